"""Why a verdict is what it is, in one sentence."""

from __future__ import annotations

from chroma.batches import Checked, part_under_limit
from chroma.decision import FAIL, PASS, WORDS, decide


def reason(checked: Checked, row: int, lamp: int) -> str:
    """What decided one verdict: the difference against its limit, and each signed limit that is not kept for sure."""
    said = signed_reasons(checked, row, lamp)
    guard = checked.tolerance.rule == "guard-band" and checked.expanded is not None
    U = float(checked.expanded[row, lamp]) if guard and checked.expanded is not None else 0.0
    code = int(decide(checked.delta_e[row, lamp], float(checked.limits[lamp]), U))
    if code != PASS or not said:
        relation = {"pass": "within", "fail": "above", "undecided": "too near"}[WORDS[code]]
        spread = f" ± {U:.2f}" if guard else ""
        said.insert(0, f"ΔE {checked.delta_e[row, lamp]:.2f}{spread} is {relation} the limit {checked.limits[lamp]:g}")
    return "; ".join(said)


def signed_reasons(checked: Checked, row: int, lamp: int) -> list[str]:
    """The signed limits that fail or are undecided under one lamp."""
    said = []
    for key, limit in checked.tolerance.one_sided.items():
        value, U, code = part_under_limit(checked, key, row, lamp)
        if code != PASS:
            spread = f" ± {U:.2f}" if U else ""
            said.append(f"{key[:2]} {value:+.2f}{spread} {'breaks' if code == FAIL else 'is too near'} {key} {limit:g}")
    return said
