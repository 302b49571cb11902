"""Mixtures whose amounts are sought: components poured on a base, and perhaps water.

With amounts x, the absorbance is (base + Σ x direction) / (1 + w): what is added adds up by Beer's law, and water w, in
shares of the volume, thins it all.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from observers.arrays import Array


@dataclass(frozen=True, eq=False)
class Mixtures:
    """S mixtures of the same number of components.

    base (B,): absorbance before anything is added. directions (S, m, B): absorbance a unit of each. low and high (S, k)
    bound the amounts, k = m, or m + 1 where the last amount is water.
    """

    base: Array
    directions: Array
    low: Array
    high: Array
    water: bool = False

    def __len__(self) -> int:
        return len(self.directions)

    def row(self, i: int) -> Mixtures:
        """The i-th alone, as S = 1."""
        one = slice(i, i + 1)
        return Mixtures(self.base, self.directions[one], self.low[one], self.high[one], self.water)

    def absorbance(self, x: Array) -> Array:
        """(S, B) of amounts (S, k), or (S, P, B) of several points each (S, P, k)."""
        if x.ndim == 2:
            one: Array = self.absorbance(x[:, None])[:, 0]
            return one
        A: Array = self.base + x[..., : self.directions.shape[1]] @ self.directions
        return A / (1 + x[..., -1:]) if self.water else A

    def absorbance_and_slopes(self, x: Array) -> tuple[Array, Array]:
        """(S, B) of amounts (S, k), and the slope along each amount (S, k, B)."""
        A = self.absorbance(x)
        if not self.water:
            return A, self.directions
        share = 1 / (1 + x[:, -1])[:, None, None]
        return A, np.concatenate([self.directions * share, -A[:, None] * share], axis=1)
