"""Chromatic adaptation: the colour that looks the same under another white, by a von Kries transform."""

from __future__ import annotations

import numpy as np

from observers.arrays import Array, frozen

# CIE 248:2022 (CIECAM16), the cone space of CAT16.
CAT16 = frozen([[0.401288, 0.650173, -0.051461], [-0.250268, 1.204414, 0.045854], [-0.002079, 0.048952, 0.953127]])
CAT16_INVERSE = frozen(np.linalg.inv(CAT16))


def adapted(XYZ100: Array, white100: Array, to_white100: Array) -> Array:
    """The colour under ``to_white100`` that corresponds to XYZ100 (…, 3) under ``white100``, fully adapted (CAT16)."""
    before, after = white100 @ CAT16.T, to_white100 @ CAT16.T
    result: Array = (XYZ100 @ CAT16.T * (after / before)) @ CAT16_INVERSE.T
    return result
