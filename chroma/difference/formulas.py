"""A difference formula by name, with its parameters: what a tolerance and the command line speak of."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, get_args

from chroma.difference.classic import cie94, cie1976, cmc
from observers.arrays import Array
from observers.errors import InputError, unknown_name

FormulaName = Literal["cie1976", "cie94", "cie94-textile", "ciede2000", "cmc", "din99o"]
FORMULAS: tuple[FormulaName, ...] = get_args(FormulaName)
TAKES_K = ("ciede2000", "cie94")


@dataclass(frozen=True)
class Formula:
    """A formula and its parameters: kL:kC:kH for ciede2000 and cie94, l:c for cmc.

    Raises InputError for an unknown name, a parameter that the formula does not take, or one that is not positive.
    """

    name: FormulaName = "ciede2000"
    k: tuple[float, float, float] | None = None
    l_c: tuple[float, float] | None = None

    def __post_init__(self) -> None:
        if self.name not in FORMULAS:
            raise unknown_name("formula", self.name, FORMULAS)
        if self.k is not None and self.name not in TAKES_K:
            raise InputError(f"kL:kC:kH does not apply to {self.name}", why=f"it belongs to {' and '.join(TAKES_K)}")
        if self.l_c is not None and self.name != "cmc":
            raise InputError(f"l:c does not apply to {self.name}", why="it belongs to cmc")
        if any(not 0 < value < 100 for value in (*(self.k or ()), *(self.l_c or ()))):
            raise InputError(
                f"parameters of {self.name} must be positive", do="1:1:1 is usual for k, 2:1 or 1:1 for cmc"
            )

    def __str__(self) -> str:
        if self.name == "cmc":
            l_c = self.l_c or (2.0, 1.0)
            return f"cmc({l_c[0]:g}:{l_c[1]:g})"
        if self.k is not None and self.k != (1.0, 1.0, 1.0):
            return f"{self.name}({':'.join(f'{value:g}' for value in self.k)})"
        return self.name

    def difference(self, target: Array, sample: Array) -> Array:
        """ΔE (…) of this formula between L*a*b* of target and sample (…, 3), target first."""
        kL, kC, kH = self.k or (1.0, 1.0, 1.0)
        match self.name:
            case "ciede2000":
                from chroma.difference.ciede2000 import ciede2000

                return ciede2000(target, sample, kL=kL, kC=kC, kH=kH)
            case "cie1976":
                return cie1976(target, sample)
            case "cie94":
                return cie94(target, sample, kL=kL, kC=kC, kH=kH)
            case "cie94-textile":
                return cie94(target, sample, kL=2.0, K1=0.048, K2=0.014)
            case "cmc":
                l, c = self.l_c or (2.0, 1.0)  # noqa: E741 - the formula is named l:c
                return cmc(target, sample, l=l, c=c)
            case "din99o":
                from chroma.difference.din99o import din99o

                return din99o(target, sample)
