"""Arrays as the project keeps them: float64, last axis wavelength or channel, read-only once stored."""

from __future__ import annotations

from typing import TYPE_CHECKING, TypeAlias

import numpy as np

if TYPE_CHECKING:
    import numpy.typing as npt

# Names for annotations only, as text: loading numpy.typing would cost a tenth of the start of a check.
Array: TypeAlias = "npt.NDArray[np.float64]"
Mask: TypeAlias = "npt.NDArray[np.bool_]"
Index: TypeAlias = "npt.NDArray[np.intp]"
Codes: TypeAlias = "npt.NDArray[np.int8]"


def median(values: npt.ArrayLike) -> float:
    """The median of a table's values, without the masked arrays that numpy's own loads at the first call (7 ms)."""
    ordered = np.sort(np.asarray(values, dtype=np.float64), axis=None)
    return float(ordered[(len(ordered) - 1) // 2] + ordered[len(ordered) // 2]) / 2


def frozen(values: npt.ArrayLike) -> Array:
    """A read-only float64 array; what is already float64 and read-only is not copied."""
    array = np.asarray(values, dtype=np.float64)
    if array.flags.writeable:
        array = array.copy()
        array.flags.writeable = False
    return array
