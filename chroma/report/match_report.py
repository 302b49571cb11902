"""Recipes as rows and as a table. Field names here are relied on by others."""

from __future__ import annotations

from chroma.matching.prepare import Aim
from chroma.matching.recipes import Matches, Recipe
from chroma.report.rows import Row, number, source_rows
from chroma.report.text import CAUTION, aligned, joined_lines, notes, sources_line
from chroma.spectra import Source


def match_object(found: Matches, aim: Aim) -> Row:
    """The whole answer of ``match`` as one JSON object."""
    return {
        "recipes": [_row(found, recipe) for recipe in found.recipes],
        "reached": found.reached,
        "said": found.said,
        "formula": str(found.formula),
        "limits": dict(zip(found.illuminants, map(float, found.limits), strict=True)),
        "observer": found.observer,
        "path_length_mm": found.path_length_mm,
        "notes": list(aim.notes),
        "sources": source_rows(_sources(aim)),
    }


def match_rows(found: Matches) -> list[Row]:
    """One row a recipe: a column for each dye, and for the ΔE under each lamp."""
    names = sorted({name for recipe in found.recipes for name in recipe.concentrations})
    return [
        {f"{name} {found.unit}": recipe.concentrations.get(name, 0.0) for name in names}
        | {f"delta_e {lamp}": float(value) for lamp, value in zip(found.illuminants, recipe.delta_e, strict=True)}
        | {"metamerism": recipe.spread, "cost_per_litre": recipe.cost, "within": recipe.within}
        for recipe in found.recipes
    ]


def match_table(found: Matches, aim: Aim) -> str:
    """One line a recipe, best first, after the answer in one sentence."""
    names = [name for name in aim.stock.names if any(name in recipe.concentrations for recipe in found.recipes)]
    priced = any(recipe.cost is not None for recipe in found.recipes)
    header = [*(f"{name} {found.unit}" for name in names), *(f"dE {lamp}" for lamp in found.illuminants), "metamerism"]
    header += ["cost a litre"] if priced else []
    rows = [
        [
            *(f"{recipe.concentrations[name]:.5g}" if name in recipe.concentrations else "–" for name in names),
            *(f"{value:.2f}" for value in recipe.delta_e),
            f"{recipe.spread:.2f}",
            *([f"{recipe.cost:.4g}"] if priced and recipe.cost is not None else []),
            "within" if recipe.within else "not within",
        ]
        for recipe in found.recipes
    ]
    limits = ", ".join(f"{lamp} {limit:g}" for lamp, limit in zip(found.illuminants, found.limits, strict=True))
    kept = tuple(dict.fromkeys(note for recipe in found.recipes for note in recipe.notes))
    return joined_lines(
        f"{found.said[0].upper()}{found.said[1:]}",
        aligned([*header, "limits"], rows),
        f"Conditions: {found.path_length_mm:g} mm; {found.formula}; limits {limits}; observer {found.observer}",
        notes((*aim.notes, *kept)),
        sources_line(_sources(aim)),
        CAUTION,
    )


def _row(found: Matches, recipe: Recipe) -> Row:
    lamps = found.illuminants
    return {
        "concentrations": dict(recipe.concentrations),
        "unit": found.unit,
        "delta_e": dict(zip(lamps, map(float, recipe.delta_e), strict=True)),
        "metamerism": recipe.spread,
        "special_index": dict(zip(lamps[1:], map(number, recipe.special_index), strict=True)),
        "cost_per_litre": recipe.cost,
        "within": recipe.within,
        "notes": list(recipe.notes),
    }


def _sources(aim: Aim) -> tuple[Source, ...]:
    return tuple(dict.fromkeys((*aim.sources, *(dye.sources[0] for dye in aim.stock.dyes if dye.sources))))
