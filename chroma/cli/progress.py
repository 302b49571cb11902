"""Talk while a command works: on stderr, only on a terminal, and only once a second has passed."""

from __future__ import annotations

import os
import sys
import threading
import time
from collections.abc import Iterator, Sequence
from types import TracebackType
from typing import TypeVar

import click

KEY = "lamplit.working"  # where the context keeps what is being shown
FIRST_S, EVERY_S = 1.0, 0.25
BAR = 20
Item = TypeVar("Item")


class Working:
    """A line that says what is done and for how long, redrawn in place and wiped at the end."""

    def __init__(self, text: str) -> None:
        self.text = text
        self._started = time.monotonic()
        self._done = threading.Event()
        self._thread: threading.Thread | None = None

    def __enter__(self) -> Working:
        if sys.stderr.isatty() and os.environ.get("TERM") != "dumb":
            self._thread = threading.Thread(target=self._run, daemon=True)
            self._thread.start()
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        self.stop()

    def stop(self) -> None:
        """Wipe the line, and draw it no more; what is printed next stands at the start of a line."""
        self._done.set()
        if self._thread is not None:
            self._thread.join()
            self._thread = None

    def _run(self) -> None:
        drawn, wait = False, FIRST_S
        while not self._done.wait(wait):
            line = f"{self.text}, {time.monotonic() - self._started:.0f} s"
            # Back to the start of the line, so that whatever else is printed goes over it.
            print(f"\r\x1b[K{line[:78]}\r", end="", file=sys.stderr, flush=True)
            drawn, wait = True, EVERY_S
        if drawn:
            print("\r\x1b[K", end="", file=sys.stderr, flush=True)


def shown() -> Working | None:
    """What the command that runs now shows, if it does."""
    ctx = click.get_current_context(silent=True)
    working: Working | None = ctx.meta.get(KEY) if ctx is not None else None
    return working


def rest() -> None:
    """Wipe what is shown, before an answer is printed."""
    if (working := shown()) is not None:
        working.stop()


def counted(items: Sequence[Item], doing: str) -> Iterator[Item]:
    """The items one by one, with a bar of how many are done."""
    working = shown()
    if working is None or len(items) < 2:
        yield from items
        return
    before = working.text
    for number, item in enumerate(items, 1):
        full = BAR * number // len(items)
        working.text = f"{doing} {number} of {len(items)} [{'#' * full}{'.' * (BAR - full)}]"
        yield item
    working.text = before
