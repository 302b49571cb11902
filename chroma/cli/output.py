"""Where an answer goes: a table or JSON on stdout, data in a file; talk on stderr."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import click

from chroma.cli.options import Output


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
                beside.write_text(as_json(content()) + "\n", encoding="utf-8")
        else:
            write_rows(rows(), output.out, force=output.force)
        click.echo(f"written: {output.out}", err=True)
    click.echo(as_json(content()) if output.json else table())


def as_json(content: Mapping[str, Any]) -> str:
    """One JSON object; what is not a number is null, never NaN."""
    import json

    return json.dumps(content, ensure_ascii=False, allow_nan=False)
