"""Escape times and the loss over a planet's life."""

import numpy as np

from keptair.physics.arrays import Numbers
from keptair.physics.constants import GIGAYEAR

LONGEST_GYR = 1e30  # longer times are written as this


def escape_time(column: Numbers, loss: Numbers) -> Numbers:
    """Time in which the present loss would take all that is held.

    τ = N/φ, at most 10³⁰ Gyr

    Parameters
    ----------
    column : array [m-2]
        Or [kg m-2], with `loss` to match.
    loss : array [m-2 s-1]

    Returns
    -------
    array [Gyr]

    Notes
    -----
    Definition. No loss gives 10³⁰ Gyr, never infinity.

    Examples
    --------
    Earth's air, 10 093 kg m⁻² (Trenberth & Smith 2005, doi:10.1175/JCLI-3299.1), at 3 kg/s of hydrogen (Catling &
    Zahnle 2009) over 5.1e14 m²:

    >>> round(float(escape_time(10093.0, 3 / 5.1e14)))
    54
    """
    return column / np.maximum(loss * GIGAYEAR, column / LONGEST_GYR)


def epoch_age(start: Numbers, age: Numbers, epoch: int, epochs: int) -> Numbers:
    """Age at one of the log-spaced epochs between start and now.

    t_k = t₀ (age/t₀)^(k/(n−1))

    Parameters
    ----------
    start : array [Gyr]
        t₀.
    age : array [Gyr]
    epoch : int [1]
        k, from 0.
    epochs : int [1]
        n.

    Returns
    -------
    array [Gyr]

    Notes
    -----
    Definition.

    Examples
    --------
    >>> float(epoch_age(0.1, 10.0, 1, 3))
    1.0
    """
    if epoch == epochs - 1:
        return age
    return start * (age / start) ** (epoch / (epochs - 1))


def epoch_weight(start: Numbers, age: Numbers, at: Numbers, epoch: int, epochs: int) -> Numbers:
    """Weight of an epoch in the trapezoid sum over the logarithm of time.

    w_k = t_k ln(age/t₀)/(n−1), half of it at either end

    Parameters
    ----------
    start : array [Gyr]
        t₀.
    age : array [Gyr]
    at : array [Gyr]
        t_k.
    epoch : int [1]
    epochs : int [1]

    Returns
    -------
    array [Gyr]

    Notes
    -----
    Trapezoid rule in ln t.

    Examples
    --------
    Constant loss over 0.5–10 Gyr adds up to 9.5 Gyr:

    >>> total = sum(epoch_weight(0.5, 10.0, epoch_age(0.5, 10.0, k, 64), k, 64) for k in range(64))
    >>> round(float(total), 2)
    9.5
    """
    end = 0.5 if epoch in (0, epochs - 1) else 1.0
    return at * np.log(age / start) * (end / (epochs - 1))
