"""Figures as inline SVG: nothing outside is referred to, identifiers are of the figure's own, and there is an alt text."""

from __future__ import annotations

import re
import warnings
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from hashlib import sha256
from html import escape
from io import StringIO
from typing import TYPE_CHECKING, Any

from chroma.report.sections_base import Picture

if TYPE_CHECKING:
    from matplotlib.axes import Axes

# Text stays text: it can be searched, any script is drawn by the reader's own fonts, and the page stays small. A sample
# may be called "a$b$": nothing in a name is mathematics.
SETTINGS: Any = {
    "svg.fonttype": "none",
    "text.parse_math": False,
    "font.family": ["DejaVu Sans"],
    "path.simplify": True,
}
HEADER = re.compile(r"^.*?(?=<svg\b)", re.DOTALL)
METADATA = re.compile(r"<metadata>.*?</metadata>|<!--.*?-->", re.DOTALL)
OWN_STYLE = re.compile(r"<defs>\s*<style[^>]*>.*?</style>\s*</defs>", re.DOTALL)
OPENING = re.compile(r"<svg\b[^>]*>")
VIEW_BOX = re.compile(r'viewBox="([^"]*)"')
NUMBERS = re.compile(r"-?\d+\.\d{3,}(?![\d.])")
MARKUP = re.compile(r"<[^>]*>")


def picture(draw: Callable[[], Axes], title: str, description: str, caption: str = "") -> Picture:
    """Draw a figure and take it as inline SVG; ``draw`` returns axes of it.

    title : its name. description : what it shows, for who cannot see it. caption : what stands under it.
    """
    import matplotlib as mpl
    from matplotlib.backends.backend_svg import FigureCanvasSVG

    salt = sha256(f"{title}\n{description}".encode()).hexdigest()[:10]
    sink = StringIO()
    with mpl.rc_context(SETTINGS | {"svg.hashsalt": salt}), quiet_letters():
        axes = draw()
        figure = axes.figure.figure
        figure.patch.set_alpha(0)  # the page's own panel shows through
        nothing = dict.fromkeys(("Creator", "Date", "Format", "Type"))
        # savefig would draw once more, only to learn the layout, which drawing settles by itself.
        canvas: Any = FigureCanvasSVG(figure)  # whose methods bear no types
        canvas.print_svg(sink, metadata=nothing)
    return Picture(inline(sink.getvalue(), salt, title, description), title, caption)


@contextmanager
def quiet_letters() -> Iterator[None]:
    """No warning where our font lacks a letter: in a page the reader's own font draws it."""
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", message="Glyph .* missing from", category=UserWarning)
        yield


def inline(svg: str, salt: str, title: str, description: str) -> str:
    """A whole SVG file as an element of a page: no header, no metadata, its own identifiers, a name and a description."""
    body = OWN_STYLE.sub("", METADATA.sub("", HEADER.sub("", svg)))
    box = VIEW_BOX.search(body)
    assert box is not None
    size = f'viewBox="{box.group(1)}" width="{_width(box.group(1))}" preserveAspectRatio="xMinYMin"'
    opening = (
        f'<svg xmlns="http://www.w3.org/2000/svg" {size} role="img" aria-labelledby="{salt}-t {salt}-d">'
        f'<title id="{salt}-t">{escape(title)}</title><desc id="{salt}-d">{escape(description)}</desc>'
    )
    start = OPENING.search(body)
    assert start is not None
    # Only markup is rewritten, never the text of a name.
    return opening + MARKUP.sub(lambda tag: _own(tag.group(), salt), body[start.end() :]).strip()


def _own(tag: str, salt: str) -> str:
    """A tag whose identifiers and references bear the salt, with coordinates to a hundredth of a point."""
    if tag.startswith("</"):
        return tag
    tag = re.sub(r'\bid="', f'id="{salt}-', tag)
    tag = (
        tag.replace("url(#", f"url(#{salt}-").replace('xlink:href="#', f'href="#{salt}-').replace("xlink:href", "href")
    )
    return tag if "base64" in tag else NUMBERS.sub(lambda found: f"{float(found.group()):.2f}", tag)


def _width(box: str) -> str:
    return f"{float(box.split()[2]) * 4 / 3:.0f}"  # points to CSS pixels
