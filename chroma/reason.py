"""Why a verdict is what it is, in one sentence."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from chroma.batches import Checked, signed_codes
from chroma.decision import FAIL, PASS, decide
from chroma.tolerance import COMPONENTS
from observers.arrays import Array, Codes

RELATION = ("within", "too near", "above")  # by the codes of `chroma.decision`


@dataclass(frozen=True, eq=False)
class Grounds:
    """What decided all verdicts of a check: codes (N, L) of the difference alone and of each signed limit alone.

    U (N, L) and U_parts (N, L, 5) are the guard bands, or None under simple acceptance.
    """

    checked: Checked
    U: Array | None
    U_parts: Array | None
    by_difference: Codes
    by_sign: Mapping[str, Codes]


def grounds(checked: Checked) -> Grounds:
    """The grounds of a check, worked out once for all its verdicts."""
    guard = checked.tolerance.rule == "guard-band"
    U, U_parts = (checked.expanded, checked.expanded_parts) if guard else (None, None)
    by_difference = decide(checked.delta_e, checked.limits, 0.0 if U is None else U)
    by_sign = signed_codes(checked.tolerance, checked.parts, U_parts)
    return Grounds(checked, U, U_parts, by_difference, by_sign)


def reason(known: Grounds, row: int, lamp: int) -> str:
    """What decided one verdict: the difference against its limit, and each signed limit that is not kept for sure."""
    said = signed_reasons(known, row, lamp)
    code = int(known.by_difference[row, lamp])
    if code != PASS or not said:
        spread = "" if known.U is None else f" ± {known.U[row, lamp]:.2f}"
        delta_e, limit = known.checked.delta_e[row, lamp], known.checked.limits[lamp]
        said.insert(0, f"ΔE {delta_e:.2f}{spread} is {RELATION[code]} the limit {limit:g}")
    return "; ".join(said)


def signed_reasons(known: Grounds, row: int, lamp: int) -> list[str]:
    """The signed limits that fail or are undecided under one lamp."""
    said = []
    for key, codes in known.by_sign.items():
        code, which = int(codes[row, lamp]), COMPONENTS.index(key[:2])
        if code != PASS:
            spread = "" if known.U_parts is None else f" ± {known.U_parts[row, lamp, which]:.2f}"
            value, limit = known.checked.parts[row, lamp, which], known.checked.tolerance.one_sided[key]
            said.append(f"{key[:2]} {value:+.2f}{spread} {'breaks' if code == FAIL else 'is too near'} {key} {limit:g}")
    return said
