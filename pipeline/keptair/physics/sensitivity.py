"""Which uncertain input moves a result most: first-order shares of its variance."""

import numpy as np

from keptair.physics.arrays import Numbers


def first_order_share(result: Numbers, given: Numbers, bins: int = 8) -> Numbers:
    """Share of a result's variance that knowing one input would take away.

    S = 1 − (n − 1)/(n − k) · SSW/SST over k equal-count bins of the input

    Parameters
    ----------
    result : array [1]
        Shape (planet, draw).
    given : array [any]
        Draws of the input, shape (planet, draw).
    bins : int [1]
        k; the number of draws must be a multiple of it.

    Returns
    -------
    array [1]
        Shape (planet,); NaN where the result or the input does not vary. Can be slightly negative where there is no
        share.

    Notes
    -----
    First-order variance share of Sobol 1993 (Math. Modelling Comput. Exp. 1, 407), estimated as the adjusted R² of the
    binned means; blind to what inputs do only together.

    Examples
    --------
    A result that is the input itself, over 512 even steps: all but the variance inside the eight bins, 1/64 (exact
    for many draws):

    >>> steps = np.arange(512.0)[None, :]
    >>> float(np.round(first_order_share(steps, steps)[0], 3))
    0.984
    """
    result = np.asarray(result, dtype=float)
    planets, count = result.shape
    order = np.argsort(given, axis=1, kind="stable")
    binned = np.take_along_axis(result, order, axis=1).reshape(planets, bins, count // bins)
    within = np.square(binned - binned.mean(axis=2, keepdims=True)).sum(axis=(1, 2))
    total = np.square(result - result.mean(axis=1, keepdims=True)).sum(axis=1)
    varies = (total > 0) & (np.ptp(given, axis=1) > 0)
    share = 1 - (count - 1) / (count - bins) * within / np.where(varies, total, 1.0)
    return np.where(varies, share, np.nan)
