"""Arrays as the project keeps them: float64, last axis wavelength or channel, read-only once stored."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]
Mask = npt.NDArray[np.bool_]
Index = npt.NDArray[np.intp]
Codes = npt.NDArray[np.int8]


def frozen(values: npt.ArrayLike) -> Array:
    """A read-only float64 array; what is already float64 and read-only is not copied."""
    array = np.asarray(values, dtype=np.float64)
    if array.flags.writeable:
        array = array.copy()
        array.flags.writeable = False
    return array
