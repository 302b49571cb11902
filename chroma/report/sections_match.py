"""Recipes as a page."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from chroma.colour.screen import hex_codes, linear_rgb, nearest_linear_rgb
from chroma.matching.prepare import Aim
from chroma.matching.recipes import Matches
from chroma.report.match_report import match_object
from chroma.report.plots import new_axes, short, tint
from chroma.report.sections_base import Cell, Page, Section, Table, number, table, words
from chroma.report.sections_svg import picture
from chroma.report.text import CAUTION
from chroma.spectra import Source
from observers.arrays import Array

if TYPE_CHECKING:
    from matplotlib.axes import Axes

STYLES = ("-", "--", ":", "-.", (0, (5, 1, 1, 1, 1, 1)))


def matches_page(found: Matches, aim: Aim) -> Page:
    """The page of a match: the answer, the recipes' spectra and swatches, every recipe."""
    said = f"{found.said[0].upper()}{found.said[1:]}"
    answer = said if said.endswith(".") else f"{said}."
    limits = ", ".join(f"{lamp} {limit:g}" for lamp, limit in zip(found.illuminants, found.limits, strict=True))
    drawn = [
        picture(
            lambda: plot_recipe_swatches(found, aim),
            "Target beside recipe",
            f"Swatches of the target and of each of {len(found.recipes)} recipes under {', '.join(found.illuminants)}. {answer}",
            _screen_words(found),
        ),
        picture(
            lambda: plot_recipe_spectra(found, aim),
            "Transmittance",
            "Transmittance over wavelength of the recipes"
            + (" and of the target, bold." if found.target.transmittance is not None else "."),
        ),
    ]
    kept = dict.fromkeys(note for recipe in found.recipes for note in recipe.notes)
    return Page(
        "Recipes for the target",
        answer,
        (Section("Picture", tuple(drawn)), Section("Numbers", tables=(_table(found, aim),))),
        (
            ("Illuminants", ", ".join(found.illuminants)),
            ("Observer", found.observer),
            ("Path length", f"{found.path_length_mm:g} mm"),
            ("Colour difference", str(found.formula)),
            ("Limits", limits),
            ("Uncertainty", "not carried through; the dyes' own is in their files"),
        ),
        tuple(Source(row["path"], row["sha256"]) for row in match_object(found, aim)["sources"]),
        tuple(dict.fromkeys((*aim.notes, *kept, CAUTION))),
    )


def plot_recipe_spectra(found: Matches, aim: Aim, *, ax: Axes | None = None) -> Axes:
    """Transmittance of each recipe, and of the target (bold) where it is known."""
    ax = ax or new_axes(7.0, 3.6)
    nm = aim.stock.wavelength_nm
    if found.target.transmittance is not None:
        ax.plot(nm, found.target.transmittance, color="black", linewidth=2.4, label="target")
    for i, recipe in enumerate(found.recipes):
        ax.plot(
            nm, recipe.transmittance, color="#1f5a8a", linewidth=1.1, linestyle=STYLES[i % 5], label=f"recipe {i + 1}"
        )
    ax.set_xlim(float(nm[0]), float(nm[-1]))
    ax.set_ylim(0, 1.02)
    ax.set_xlabel("wavelength / nm")
    ax.set_ylabel("transmittance")
    ax.legend(fontsize=7, frameon=False, ncols=6, loc="lower left", bbox_to_anchor=(0, 1.0))
    tint(ax, float(nm[0]), float(nm[-1]))
    return ax


def plot_recipe_swatches(found: Matches, aim: Aim, *, ax: Axes | None = None) -> Axes:
    """Target beside recipe under each lamp, with the difference and whether all limits are kept in words.

    A match keeps the colours of its own observer, and the swatches are made from those.
    """
    lamps = found.illuminants
    ax = ax or new_axes(2.6 + 1.6 * len(lamps), 0.8 + 0.3 * len(found.recipes))
    left = _codes(aim, found.target.XYZ100)
    for i, recipe in enumerate(found.recipes):
        right = _codes(aim, recipe.XYZ100)
        for j in range(len(lamps)):
            ax.barh(i, 0.34, left=j + 0.02, height=0.8, color=left[j])
            ax.barh(i, 0.34, left=j + 0.36, height=0.8, color=right[j])
            ax.text(j + 0.73, i, f"{recipe.delta_e[j]:.2f}", va="center", fontsize=7)
        ax.text(len(lamps) + 0.03, i, "○ within" if recipe.within else "✕ not within", va="center", fontsize=8)
    ax.set_xticks(np.arange(len(lamps)) + 0.36, [f"{short(lamp)}\ntarget | recipe   ΔE" for lamp in lamps], fontsize=7)
    ax.set_yticks(range(len(found.recipes)), [f"recipe {i + 1}" for i in range(len(found.recipes))], fontsize=7)
    ax.set_xlim(0, len(lamps) + 0.8)
    ax.set_ylim(len(found.recipes) - 0.4, -0.6)
    ax.tick_params(length=0, top=True, labeltop=True, bottom=False, labelbottom=False)
    ax.set_facecolor("#d9d9d9")
    for side in ax.spines.values():
        side.set_visible(False)
    return ax


def _codes(aim: Aim, XYZ100: Array) -> list[str]:
    """Screen codes of colours (L, 3), one under each lamp."""
    linear = np.stack([linear_rgb(XYZ, white) for XYZ, white in zip(XYZ100, aim.weights.white, strict=True)])
    return hex_codes(nearest_linear_rgb(linear))


def _screen_words(found: Matches) -> str:
    own = "" if found.observer == "2" else f", from the numbers of observer {found.observer} rather than of 2°"
    return f"Adapted from each lamp to the screen{own}."


def _table(found: Matches, aim: Aim) -> Table:
    names = [name for name in aim.stock.names if any(name in recipe.concentrations for recipe in found.recipes)]
    priced = any(recipe.cost is not None for recipe in found.recipes)
    header = ["recipe", *(f"{name} {found.unit}" for name in names), *(f"ΔE {lamp}" for lamp in found.illuminants)]
    header += ["metamerism", *(["cost a litre"] if priced else []), "limits"]
    rows = [
        [
            words(str(i)),
            *(number(f"{recipe.concentrations[n]:.5g}" if n in recipe.concentrations else "–") for n in names),
            *(number(f"{value:.2f}") for value in recipe.delta_e),
            number(f"{recipe.spread:.2f}"),
            *([number("–" if recipe.cost is None else f"{recipe.cost:.4g}")] if priced else []),
            Cell("within", mark="○") if recipe.within else Cell("not within", mark="✕"),
        ]
        for i, recipe in enumerate(found.recipes, 1)
    ]
    return table("Recipes, best first; metamerism is the spread of ΔE over the lamps", header, rows)
