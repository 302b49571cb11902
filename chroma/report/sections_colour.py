"""Colours as a page: what each sample looks like under each lamp."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from chroma.colours import Colours
from chroma.report.colour_plots import plot_chromaticity
from chroma.report.colour_report import inconstancy_rows
from chroma.report.dye_plots import plot_ladder, plot_path_ab
from chroma.report.sections_base import Cell, Page, Section, Table, condition_pairs, number, screen_cautions, table
from chroma.report.sections_svg import picture
from chroma.report.text import two_places

MOST_STEPS = 24  # swatches in the picture
MOST_NAMES = 6  # beside their points
MOST_LINES = 2000


def colours_page(colours: Colours, turns: Sequence[str] = ()) -> Page:
    """The page of colours; ``turns`` are sentences on where a sweep's hue turns."""
    notes = (*colours.notes, *screen_cautions(colours))
    return Page(
        f"Colour of {colours.names[0]}" if len(colours.names) == 1 else f"Colours of {len(colours.names)} samples",
        answer(colours),
        (_pictures(colours), Section("Numbers", tables=_tables(colours), paragraphs=(*turns, *_left_out(colours)))),
        (*condition_pairs(colours.conditions), ("Uncertainty", _uncertainty(colours))),
        colours.sources,
        tuple(dict.fromkeys(notes)),
    )


def answer(colours: Colours) -> str:
    """What the first sample looks like, or the span of all of them, in one sentence."""
    lamp = colours.conditions.illuminants[0].name
    L, C, h = np.moveaxis(colours.LCh[:, 0], -1, 0)
    if len(colours.names) == 1:
        a, b = colours.Lab[0, 0, 1:]
        return (
            f"{colours.names[0]} under {lamp}: L* {L[0]:.2f}, a* {a:.2f}, b* {b:.2f} (C* {C[0]:.2f}, hue {h[0]:.1f}°)."
        )
    return (
        f"{len(colours.names)} samples under {lamp}: L* from {L.min():.1f} to {L.max():.1f}, C* from {C.min():.1f} to "
        f"{C.max():.1f}."
    )


def _pictures(colours: Colours) -> Section:
    shown, rest = _first(colours, MOST_STEPS)
    lamps = ", ".join(lamp.name for lamp in colours.conditions.illuminants)
    said = (f"The first {MOST_STEPS} samples are drawn; the other {rest} are in the table.",) if rest else ()
    named = shown.names if 1 < len(shown.names) <= MOST_NAMES else None
    drawn = (
        picture(
            lambda: plot_ladder(shown),
            "Swatches",
            f"A swatch for each of {len(shown.names)} samples, in rows for {lamps}. {answer(colours)}",
            "A row for each lamp, adapted to the screen." + _star(shown),
        ),
        picture(
            lambda: plot_path_ab(shown),
            "In a*, b*",
            f"a* against b* of the same samples, a line for each of {lamps}; the table holds the numbers.",
        ),
        picture(
            lambda: plot_chromaticity(shown, names=named),
            "In x, y",
            "The chromaticity diagram with the spectrum locus, the white of each lamp, and the samples; the table holds x and y.",
        ),
    )
    return Section("Picture", drawn, paragraphs=said)


def _star(colours: Colours) -> str:
    return "" if colours.swatches()[1].all() else " * outside sRGB."


def _first(colours: Colours, most: int) -> tuple[Colours, int]:
    """The first samples, and how many more there are."""
    from dataclasses import replace

    rest = max(0, len(colours.names) - most)
    cut = {key: getattr(colours, key)[:most] for key in ("names", "XYZ100", "XYZ100_screen", "u_Lab")}
    return replace(colours, **cut), rest


def _tables(colours: Colours) -> tuple[Table, ...]:
    codes, shown = colours.swatches()
    Lab, LCh, XYZ, xyY, tau = colours.Lab, colours.LCh, colours.XYZ100, colours.xyY, colours.luminous_transmittance
    rows = []
    for i, name in enumerate(colours.names[:MOST_LINES]):
        for j, lamp in enumerate(colours.conditions.illuminants):
            values = [*XYZ[i, j], *Lab[i, j], *LCh[i, j, 1:]]
            chromaticity = [f"{v:.4f}" if np.isfinite(v) else "–" for v in xyY[i, j, :2]]
            swatch = Cell(codes[i][j] + ("" if shown[i, j] else " (nearest)"), colour=codes[i][j])
            cells = [*map(two_places, values), *chromaticity, two_places(100 * tau[i, j])]
            rows.append([Cell(name), Cell(lamp.name), swatch, *map(number, cells)])
    header = ("sample", "lamp", "screen", "X", "Y", "Z", "L*", "a*", "b*", "C*", "h / °", "x", "y", "τv / %")
    main = table("Tristimulus values (perfect transmitter Y = 100) and CIELAB", header, rows)
    return (main, *_inconstancy(colours))


def _inconstancy(colours: Colours) -> tuple[Table, ...]:
    rows = [
        [Cell(row["name"]), Cell(row["reference"]), Cell(row["test"]), number(f"{row['cmccon02']:.2f}")]
        for row in inconstancy_rows(colours)[:MOST_LINES]
    ]
    header = ("sample", "from", "to", "CMCCON02")
    return (
        (table("How much each sample seems to change from lamp to lamp (ISO 105-J05)", header, rows),) if rows else ()
    )


def _left_out(colours: Colours) -> tuple[str, ...]:
    rest = len(colours.names) - MOST_LINES
    return (f"The table holds the first {MOST_LINES} samples; --out writes the other {rest} too.",) if rest > 0 else ()


def _uncertainty(colours: Colours) -> str:
    known = np.isfinite(colours.u_Lab).all(axis=-1)
    if not known.any():
        return "none known: each sample was measured once, or computed"
    worst = colours.u_Lab[known].max(axis=0)
    return f"standard uncertainty from replicates up to L* {worst[0]:.2g}, a* {worst[1]:.2g}, b* {worst[2]:.2g}"
