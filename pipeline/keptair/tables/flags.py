"""Flag columns → one mask and its names."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from keptair.tables import schema


def pack(raised: Mapping[str, NDArray[np.bool_]]) -> tuple[NDArray[np.int64], NDArray[np.object_]]:
    """The mask and the names in bit order of the flags raised for each planet."""
    legend = schema.flags()
    unknown = sorted(raised.keys() - {flag.name for flag in legend})
    if unknown:
        raise ValueError(f"not in flags.toml: {', '.join(unknown)}")
    size = len(next(iter(raised.values())))
    mask = np.zeros(size, dtype=np.int64)
    for flag in legend:
        if flag.name in raised:
            mask |= raised[flag.name].astype(np.int64) << flag.bit
    names = {int(value): " ".join(flag.name for flag in legend if value >> flag.bit & 1) for value in np.unique(mask)}
    return mask, np.array([names[int(value)] for value in mask], dtype=object)
