"""Tolerance: what a batch is held to, from the command line or a TOML file."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Any, cast

from chroma.decision import RULES, Rule
from chroma.difference.formulas import Formula, FormulaName
from chroma.units import ratio
from observers.errors import InputError, unknown_name, unreadable
from observers.human import STANDARD
from observers.weights import METHODS, Method

COMPONENTS = ("dL", "da", "db", "dC", "dH")
TOP_KEYS = (
    "formula",
    "limit",
    "observer",
    "weights",
    "rule",
    "coverage",
    "uncertainty",
    "k",
    "cmc",
    "illuminants",
    "one_sided",
)


@dataclass(frozen=True)
class Tolerance:
    """A formula, a limit for each illuminant, and the rule of decision.

    limits : illuminant as named → limit in units of the formula. one_sided : ``dL_min`` … ``dH_max`` → signed limit.
    coverage : the factor k of the expanded uncertainty U = k·u. uncertainty : a stated standard uncertainty of ΔE,
    which goes before what replicates say. Raises InputError for limits that are not positive or unknown names.
    """

    limits: Mapping[str, float]
    formula: Formula = field(default_factory=Formula)
    observer: str = "10"
    weights: Method = "cie"
    rule: Rule = "simple"
    coverage: float = 2.0
    uncertainty: float | None = None
    one_sided: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))

    def __post_init__(self) -> None:
        for lamp, limit in self.limits.items():
            if not limit > 0:
                raise InputError(f"limit {limit:g} for {lamp}", why="a limit is a positive colour difference")
        if not self.limits:
            raise InputError("no illuminant in the tolerance", do="name at least one, as in D65 = 1.0")
        if self.rule not in RULES:
            raise unknown_name("rule", self.rule, RULES)
        if self.weights not in METHODS:
            raise unknown_name("weights", self.weights, METHODS)
        if self.observer not in STANDARD:
            raise unknown_name("observer", self.observer, tuple(STANDARD))
        if not self.coverage > 0 or (self.uncertainty is not None and not self.uncertainty >= 0):
            raise InputError("coverage must be positive and uncertainty not negative", do="coverage = 2.0 is usual")
        known = tuple(f"{name}_{end}" for name in COMPONENTS for end in ("min", "max"))
        for key in self.one_sided:
            if key not in known:
                raise unknown_name("one-sided limit", key, known)


def read_tolerance(path: str) -> Tolerance:
    """A tolerance from a TOML file.

    Raises InputError naming the file for what cannot be read, is no TOML, or holds a key or value that is not known.
    """
    import tomllib
    from pathlib import Path

    try:
        content = tomllib.loads(Path(path).read_text(encoding="utf-8"))
    except OSError as error:
        raise unreadable(path, error) from error
    except UnicodeDecodeError as error:
        raise InputError("is not text", where=path, why="a TOML file is UTF-8") from error
    except (tomllib.TOMLDecodeError, RecursionError) as error:
        raise InputError("is no valid TOML", where=path, why=str(error), do="mend that line") from error
    try:
        return tolerance_from(content)
    except InputError as error:
        raise error.at(path) from None


def tolerance_from(content: Mapping[str, Any]) -> Tolerance:
    """A tolerance from the content of its TOML file; see `read_tolerance`."""
    for key in content:
        if key not in TOP_KEYS:
            raise unknown_name("key", key, TOP_KEYS)
    general = _number(content, "limit", None)
    lamps = _table(content, "illuminants") or {"D65": general}
    limits = {lamp: _limit(lamp, value, general) for lamp, value in lamps.items()}
    one_sided = {key: _as_number(f"one_sided.{key}", value) for key, value in _table(content, "one_sided").items()}
    return Tolerance(
        limits,
        _formula(content),
        str(content.get("observer", "10")),
        cast(Method, str(content.get("weights", "cie"))),
        cast(Rule, str(content.get("rule", "simple"))),
        _number(content, "coverage", 2.0) or 0.0,
        _number(content, "uncertainty", None),
        MappingProxyType(one_sided),
    )


def _formula(content: Mapping[str, Any]) -> Formula:
    k = ratio(str(content["k"]), 3, "1:1:1") if "k" in content else None
    l_c = ratio(str(content["cmc"]), 2, "2:1") if "cmc" in content else None
    name = cast(FormulaName, str(content.get("formula", "ciede2000")))
    return Formula(name, cast("tuple[float, float, float] | None", k), cast("tuple[float, float] | None", l_c))


def _limit(lamp: str, value: object, general: float | None) -> float:
    if value is None or value is True:  # the lamp alone, held to the general limit
        value = general
    if value is None:
        raise InputError(f"no limit for {lamp}", do=f"write limit = 1.0 above, or {lamp} = 1.0 under [illuminants]")
    return _as_number(f"illuminants.{lamp}", value)


def _table(content: Mapping[str, Any], key: str) -> Mapping[str, Any]:
    value = content.get(key, {})
    if isinstance(value, list) and all(isinstance(item, str) for item in value):
        return dict.fromkeys(value)
    if not isinstance(value, dict):
        raise InputError(
            f"{key} = {value!r}",
            why="a table of names and numbers is wanted",
            do=f"write [{key}] and the lines under it",
        )
    return _flattened(value)


def _flattened(table: Mapping[str, Any]) -> Mapping[str, Any]:
    """TOML reads the bare key ``FL3.1`` as a table in a table; here the dots are part of the name."""
    flat: dict[str, Any] = {}
    for key, value in table.items():
        if isinstance(value, dict):
            flat.update({f"{key}.{inner}": item for inner, item in _flattened(value).items()})
        else:
            flat[key] = value
    return flat


def _number(content: Mapping[str, Any], key: str, default: float | None) -> float | None:
    return _as_number(key, content[key]) if key in content else default


def _as_number(key: str, value: object) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or value != value or abs(value) == float("inf"):
        raise InputError(f"{key} = {value!r}", why="a number is wanted")
    return float(value)
