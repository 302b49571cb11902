from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest


@pytest.fixture(scope="session")
def data() -> Path:
    """The folder of files made by others; tests/data/README.md says where each is from."""
    return Path(__file__).parent.parent / "data"


@pytest.fixture
def file(tmp_path: Path) -> Callable[..., str]:
    """Writes bytes or text to a file and gives its path."""

    def write(content: bytes | str, name: str = "made.csv") -> str:
        path = tmp_path / name
        path.write_bytes(content.encode() if isinstance(content, str) else content)
        return str(path)

    return write
