"""Metamerism: how a match that holds under one lamp goes apart under another."""

from __future__ import annotations

import numpy as np

from chroma.batches import Checked
from chroma.difference.metameric_index import special_index
from observers.arrays import Array


def change(checked: Checked) -> Array:
    """(N, L - 1) ΔE under each further lamp minus ΔE under the first."""
    result: Array = checked.delta_e[:, 1:] - checked.delta_e[:, :1]
    return result


def special_indices(checked: Checked) -> Array:
    """(N, L - 1) special index of each further lamp against the first; NaN where the pair does not qualify.

    A pair qualifies when it matches under the first lamp: when its difference there lies within the limit.
    """
    lamps = range(1, len(checked.limits))
    index = [
        special_index(
            checked.target_XYZ100[0],
            checked.target_XYZ100[i],
            checked.XYZ100[:, 0],
            checked.XYZ100[:, i],
            checked.white100[i],
        )
        for i in lamps
    ]
    if not index:
        return np.empty((len(checked.names), 0))
    matched = checked.delta_e[:, :1] <= checked.limits[0]
    return np.where(matched, np.stack(index, axis=-1), np.nan)
