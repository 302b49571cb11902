"""The CIE special index of metamerism, change of illuminant."""

from __future__ import annotations

from chroma.colour.spaces import Lab_from_XYZ
from chroma.difference.classic import cie1976
from observers.arrays import Array


def special_index(
    target_ref: Array, target_test: Array, sample_ref: Array, sample_test: Array, white_test: Array
) -> Array:
    """ΔE*ab under the test lamp (…), after what the pair differs by under the reference lamp is taken out.

    The colours are XYZ100 (…, 3). They are corrected by multiplying the sample's tristimulus values (CIE 15:2018, 9.2).
    """
    corrected = sample_test * target_ref / sample_ref
    return cie1976(Lab_from_XYZ(target_test, white_test), Lab_from_XYZ(corrected, white_test))
