"""Pictures to files: PNG, SVG or PDF, written beside and renamed."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from chroma.readers.write import atomic_write
from observers.errors import InputError

if TYPE_CHECKING:
    from matplotlib.axes import Axes

FORMATS = ("png", "svg", "pdf")


def save(ax: Axes, path: str, *, force: bool = False) -> None:
    """Write the figure that the axes stand on; the suffix names the format.

    Raises InputError for another suffix, or a file that is there already without ``force``.
    """
    suffix = Path(path).suffix.lstrip(".").lower()
    if suffix not in FORMATS:
        raise InputError(
            f"a picture named {path!r}", why=f"pictures are {', '.join(FORMATS)}", do="choose one of these suffixes"
        )
    import matplotlib as mpl

    # A sample's name is text and no mathematics, whatever dollar signs it holds.
    with mpl.rc_context({"text.parse_math": False}), atomic_write(path, force) as beside:
        ax.figure.figure.savefig(beside, format=suffix, dpi=130)
