"""Colour inconstancy: how much one sample seems to change from lamp to lamp (CMCCON02, ISO 105-J05:2007)."""

from __future__ import annotations

import numpy as np

from chroma.colour.spaces import Lab_from_XYZ
from chroma.colours import Colours
from chroma.difference.classic import cmc
from observers.arrays import Array, frozen

# Li, Luo, Rigg and Hunt 2002, Color Research and Application 27, 49: the cone space of CMCCAT2000.
CMCCAT2000 = frozen([[0.7982, 0.3389, -0.1371], [-0.5918, 1.5512, 0.0406], [0.0008, 0.0239, 0.9753]])
CMCCAT2000_INVERSE = frozen(np.linalg.inv(CMCCAT2000))


def degree_of_adaptation(LA_test: float, LA_reference: float, surround: float = 1.0) -> float:
    """D of CMCCAT2000 from the luminances of both adapting fields in cd/m²; surround 1 average, 0.8 dim or dark."""
    level = 0.08 * np.log10(0.5 * (LA_test + LA_reference))
    D = surround * (level + 0.76 - 0.45 * (LA_test - LA_reference) / (LA_test + LA_reference))
    return float(np.clip(D, 0.0, 1.0))


def corresponding(XYZ100: Array, white_test: Array, white_reference: Array, *, D: float = 1.0) -> Array:
    """The colour under the reference white that looks like XYZ100 (…, 3) under the test white, by CMCCAT2000."""
    cones, test, reference = XYZ100 @ CMCCAT2000.T, white_test @ CMCCAT2000.T, white_reference @ CMCCAT2000.T
    alpha = D * white_test[..., 1:2] / white_reference[..., 1:2]
    result: Array = (cones * (alpha * reference / test + 1 - D)) @ CMCCAT2000_INVERSE.T
    return result


def inconstancy(XYZ_reference: Array, XYZ_test: Array, white_reference: Array, white_test: Array) -> Array:
    """CMCCON02 (…): CMC(1:1) between a sample under the reference lamp and its corresponding colour from the test lamp.

    The standard takes D65 for reference and complete adaptation.
    """
    seen = corresponding(XYZ_test, white_test, white_reference)
    return cmc(Lab_from_XYZ(XYZ_reference, white_reference), Lab_from_XYZ(seen, white_reference), l=1.0, c=1.0)


def inconstancies(colours: Colours) -> Array:
    """(N, L - 1) CMCCON02 of each sample from the first lamp of its conditions to each other."""
    white = colours.white100
    found = [inconstancy(colours.XYZ100[:, 0], colours.XYZ100[:, i], white[0], white[i]) for i in range(1, len(white))]
    return np.stack(found, axis=-1) if found else np.empty((len(colours.names), 0))
