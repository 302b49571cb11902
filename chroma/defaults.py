"""Defaults that a bench keeps in ``lamplit.toml``: what is used where the command line says nothing."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from chroma.difference.formulas import FORMULAS
from chroma.units import path_length_mm
from observers.errors import InputError, unknown_name
from observers.human import STANDARD
from observers.illuminants import illuminant
from observers.weights import METHODS


@dataclass(frozen=True)
class Defaults:
    """What a file of defaults says: key → a text, or texts for ``illuminants`` and ``dyes``; and its path."""

    path: str
    values: Mapping[str, str | tuple[str, ...]]


def read_defaults(path: str) -> Defaults:
    """Defaults from a TOML file; files that it names are sought beside it.

    Raises InputError naming file and key for what cannot be read, is no TOML, or holds a key or value that is not known.
    """
    import tomllib

    try:
        content = tomllib.loads(Path(path).read_text(encoding="utf-8"))
    except OSError as error:
        raise InputError("cannot be read", where=path, why=error.strerror or "") from error
    except UnicodeDecodeError as error:
        raise InputError("is not text", where=path, why="a TOML file is UTF-8") from error
    except (tomllib.TOMLDecodeError, RecursionError) as error:
        raise InputError("is no valid TOML", where=path, why=str(error), do="mend that line") from error
    return Defaults(path, defaults_from(content, path))


def defaults_from(content: Mapping[str, Any], path: str) -> dict[str, str | tuple[str, ...]]:
    """The values of a file of defaults, each judged; see `read_defaults`."""
    values: dict[str, str | tuple[str, ...]] = {}
    for key, value in content.items():
        if key not in JUDGES:
            raise unknown_name("key", key, tuple(JUDGES)).at(path)
        try:
            values[key] = JUDGES[key](value, Path(path).parent)
        except InputError as error:
            raise error.at(f"{path}, {key}") from None
    return values


def _illuminants(value: object, folder: Path) -> tuple[str, ...]:
    return tuple(_lamp(spec, folder) for spec in _texts(value, "D65"))


def _lamp(spec: str, folder: Path) -> str:
    beside = folder / spec
    if beside.suffix and beside.is_file():
        return str(beside)
    illuminant(spec)  # refuses a name that is none
    return spec


def _dyes(value: object, folder: Path) -> tuple[str, ...]:
    paths = [folder / name for name in _texts(value, "heron.dye.json")]
    for path in paths:
        if not path.is_file():
            raise InputError(f"no such file: {path}", do="name the files of dyes as seen from this one")
    return tuple(map(str, paths))


def _path_length(value: object, _: Path) -> str:
    text = _text(value, "10mm")
    path_length_mm(text)
    return text


def _one_of(kind: str, valid: tuple[str, ...]) -> Callable[[object, Path], str]:
    def judged(value: object, _: Path) -> str:
        # The observers 2 and 10 are easily written as numbers.
        text = str(value) if type(value) is int else _text(value, valid[0])
        if text not in valid:
            raise unknown_name(kind, text, valid)
        return text

    return judged


def _texts(value: object, example: str) -> tuple[str, ...]:
    if not isinstance(value, list) or not value:
        raise InputError(f"{value!r}", why="a list of texts is wanted", do=f'write ["{example}"]')
    return tuple(_text(item, example) for item in value)


def _text(value: object, example: str) -> str:
    if not isinstance(value, str):
        raise InputError(f"{value!r}", why="a text is wanted", do=f'write "{example}"')
    return value


JUDGES: Mapping[str, Callable[[object, Path], str | tuple[str, ...]]] = {
    "illuminants": _illuminants,
    "observer": _one_of("observer", tuple(STANDARD)),
    "formula": _one_of("formula", FORMULAS),
    "weights": _one_of("weights", METHODS),
    "path_length": _path_length,
    "dyes": _dyes,
}
