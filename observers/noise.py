"""Noise of a camera's picture: photon transfer (EMVA 1288 form), quantisation, and the rounding of JPEG."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from observers.arrays import Array, frozen

# Rec. 601 luma and colour differences, as JFIF has them (ITU-T T.871): codes of R, G, B from Y, Cb, Cr.
RGB_FROM_YCBCR = frozen([[1.0, 0.0, 1.402], [1.0, -0.344136, -0.714136], [1.0, 1.772, 0.0]])
BLOCK = 8  # samples along the side of a transform block


@dataclass(frozen=True)
class PhotonTransfer:
    """A linear sensor: ``gain`` in digital numbers per electron, dark noise in electrons, step of the converter."""

    gain: float
    dark_e: float = 0.0
    step: float = 1.0

    def variance(self, signal: Array) -> Array:
        """Temporal variance, in squared digital numbers, at a mean signal above the dark level.

        Reference: EMVA 1288 Release 4.0 Linear, var = K² σd² + σq² + K (µ − µ_dark).
        """
        result: Array = (
            self.gain**2 * self.dark_e**2 + quantisation_variance(self.step) + self.gain * np.asarray(signal)
        )
        return result


def quantisation_variance(step: float = 1.0) -> float:
    """Variance of rounding to a step."""
    return step**2 / 12.0


def ratio_uncertainty(first_e: float, second_e: float) -> float:
    """Standard deviation of ln(first/second) of two Poisson totals, to first order and at the Cramér–Rao bound."""
    return float(np.sqrt(1.0 / first_e + 1.0 / second_e))


def jpeg_level_covariance(luma_step: float, chroma_step: float, *, luma_levels: float = 1.0) -> Array:
    """(3, 3) covariance, in squared 8-bit codes of R, G, B, of an even field's level after JPEG.

    A block's level is its first coefficient, eight times its mean, rounded to the step of the table; every block of an
    even field is rounded alike, so a mean over the field keeps the error. luma_levels is how many steps of luma the
    field runs through, over which the rounding averages. Reference: ITU-T T.81.
    """
    luma = quantisation_variance(luma_step / BLOCK) / max(luma_levels, 1.0)
    chroma = quantisation_variance(chroma_step / BLOCK)
    result: Array = RGB_FROM_YCBCR @ np.diag([luma, chroma, chroma]) @ RGB_FROM_YCBCR.T
    return result
