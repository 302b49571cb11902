"""How sure a predicted colour is: the covariance of dyes and concentrations carried to L*a*b* (JCGM 100:2008, 5.1)."""

from __future__ import annotations

import numpy as np

from chroma.colour.spaces import Lab_jacobian
from chroma.dye.solution import Shelf, transmittance
from chroma.quantity import LN10
from observers.arrays import Array
from observers.weights import Weights


def Lab_covariance(
    stock: Shelf, concentrations: Array, u_concentrations: Array, path_length_mm: float, W: Weights
) -> Array:
    """(L, 3, 3) covariance of L*, a*, b* of one recipe (D,), from the covariance of dyes and u of concentrations (D,).

    Dyes and concentrations are taken as independent of one another. W stands on the grid of the shelf.
    """
    T = transmittance(stock, concentrations, path_length_mm)
    per_absorbance = -LN10 * T[:, None] * W.matrix  # (B, 3L): what one unit of absorbance at a band does
    cm = path_length_mm / 10
    lamps = len(W.illuminants)
    XYZ = np.zeros((lamps, 3, lamps, 3))
    for dye, c, u_c in zip(stock.dyes, concentrations, u_concentrations, strict=True):
        moves = [c * cm * dye.common @ per_absorbance, (u_c * cm * dye.absorptivity @ per_absorbance)[None]]
        noise = c * cm * dye.independent[:, None] * per_absorbance
        rows = np.concatenate([*moves, noise])
        XYZ += (rows.T @ rows).reshape(lamps, 3, lamps, 3)
    own = np.stack([XYZ[i, :, i, :] for i in range(lamps)])
    J = Lab_jacobian(W.response(T), W.white)
    result: Array = J @ own @ np.swapaxes(J, -1, -2)
    return result
