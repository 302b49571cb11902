"""Where an answer goes: a table or JSON on stdout, data in a file; talk on stderr."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Mapping, Sequence
from typing import Any

import click

from chroma.cli.common import used_defaults
from chroma.cli.options import Output
from chroma.cli.progress import rest


def emit(
    output: Output,
    *,
    table: Callable[[], str],
    content: Callable[[], Mapping[str, Any]],
    rows: Callable[[], Sequence[Mapping[str, Any]]],
) -> None:
    """Print the table or the JSON object, after the data were written where ``--out`` says."""
    if output.out is not None:
        from chroma.readers.write import atomic_write, write_rows

        if output.out.lower().endswith(".json"):
            with atomic_write(output.out, output.force) as beside:
                beside.write_text(as_json(with_defaults(content())) + "\n", encoding="utf-8")
        else:
            write_rows(rows(), output.out, force=output.force)
        say_written(output.out)
    answer(output.json, table=table, content=content)


def answer(wants_json: bool, *, table: Callable[[], str], content: Callable[[], Mapping[str, Any]]) -> None:
    """Print the table, with swatches where the terminal can show them, or the JSON object; each names the defaults."""
    if wants_json:
        text = as_json(with_defaults(content()))
    else:
        from chroma.report.text import joined_lines, painted

        text = joined_lines(table(), defaults_line())
        text = painted(text) if can_paint() else text
    rest()
    click.echo(text)


def say_written(path: str) -> None:
    """Word of a file, on stderr."""
    rest()
    click.echo(f"written: {path}", err=True)


def with_defaults(content: Mapping[str, Any]) -> Mapping[str, Any]:
    """The content, with the file of defaults and the values taken from it, where any were."""
    found = used_defaults()
    return content if found is None else {**content, "defaults": found}


def defaults_line() -> str:
    """Which values came from which file of defaults; empty where none did."""
    import textwrap

    from chroma.report.text import WIDTH

    found = used_defaults()
    if found is None:
        return ""
    said = [f"{key} {', '.join(v) if isinstance(v, list) else v}" for key, v in found["values"].items()]
    return textwrap.fill(f"Defaults from {found['file']}: {'; '.join(said)}", WIDTH, subsequent_indent="  ")


def can_paint() -> bool:
    """Whether stdout is a terminal of true colour whose user has not asked for none (no-color.org)."""
    environment = os.environ
    return (
        sys.stdout.isatty()
        and environment.get("COLORTERM", "").lower() in ("truecolor", "24bit")
        and environment.get("TERM") != "dumb"
        and not environment.get("NO_COLOR")
    )


def as_json(content: Mapping[str, Any]) -> str:
    """One JSON object; what is not a number is null, never NaN."""
    import json

    return json.dumps(content, ensure_ascii=False, allow_nan=False)


def noted(result: Any) -> Any:
    """A result whose notes name the file of defaults and what was taken from it, for a report."""
    from dataclasses import replace

    line = " ".join(defaults_line().split())
    return replace(result, notes=(*result.notes, line)) if line else result
