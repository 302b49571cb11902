"""Bytes and text: how large, which encoding, what it looks like when it is not text, and its SHA-256."""

from __future__ import annotations

import errno
import hashlib
import os
import sys
from dataclasses import dataclass
from typing import BinaryIO

from chroma.spectra import Source
from observers.errors import InputError

SIZE_LIMIT = 1 << 30  # bytes; beyond it text is the wrong form
LINE_LIMIT = 1_000_000  # characters; 100 000 numbers on a line, which no table of spectra needs

_MAGIC = (
    (b"PAR1", "parquet"),
    (b"PK\x03\x04", "zip"),
    (b"PK\x05\x06", "zip"),
    (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "an old binary workbook (.xls)"),
    (b"%PDF", "a PDF document"),
    (b"\xff\xd8\xff", "a JPEG picture"),
    (b"\x89PNG", "a PNG picture"),
    (b"GIF8", "a GIF picture"),
    (b"II*\x00", "a TIFF picture"),
    (b"MM\x00*", "a TIFF picture"),
    (b"\x1f\x8b", "a gzip archive"),
    (b"BZh", "a bzip2 archive"),
    (b"\xfd7zXZ\x00", "an xz archive"),
    (b"7z\xbc\xaf", "a 7z archive"),
    (b"\x89HDF", "an HDF5 file"),
    (b"\x93NUMPY", "a numpy array file"),
)


@dataclass(frozen=True)
class Raw:
    """A file as it came: where it is from, its bytes and their SHA-256."""

    source: Source
    data: bytes

    @property
    def path(self) -> str:
        """The path as the caller gave it, ``-`` for standard input."""
        return self.source.path

    @property
    def stem(self) -> str:
        """The name of the file without folder and suffix."""
        return "stdin" if self.path == "-" else os.path.splitext(os.path.basename(self.path))[0]

    @property
    def suffix(self) -> str:
        """The suffix in small letters, with its dot."""
        return os.path.splitext(self.path)[1].lower()


def load(path: str, size_limit: int = SIZE_LIMIT) -> Raw:
    """The bytes of a file, or of standard input for ``-``; raises InputError when they cannot be had."""
    try:
        if path == "-":
            data = _bounded(sys.stdin.buffer, size_limit, path)
        else:
            with open(path, "rb") as stream:
                data = _bounded(stream, size_limit, path)
    except (OSError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        raise InputError("cannot be read", where=path, why=reason(error), do="check the name") from None
    if not data:
        raise InputError("the file is empty", where=path, do="export it again")
    return Raw(Source(path, hashlib.sha256(data).hexdigest()), data)


def reason(error: OSError | ValueError) -> str:
    """Why the system refused, in the words of a person."""
    words = {
        errno.ENOENT: "there is no such file or folder",
        errno.EACCES: "there is no permission",
        errno.EPERM: "there is no permission",
        errno.EROFS: "the place can only be read",
        errno.EISDIR: "it is a folder",
        errno.ENOTDIR: "a part of the path is not a folder",
        errno.ENOSPC: "the disk is full",
        errno.ENAMETOOLONG: "the name is too long",
    }
    number = getattr(error, "errno", None)
    return words.get(number or 0) or (os.strerror(number) if number else str(error))


def kind(data: bytes) -> str:
    """``text``, ``zip``, ``parquet``, or what other thing the first bytes say it is."""
    for magic, name in _MAGIC:
        if data.startswith(magic):
            return name
    return "text"


def decode(raw: Raw) -> tuple[str, tuple[str, ...]]:
    """The text of a file, and notes on its encoding.

    UTF-8, UTF-16 (also without a mark where every other byte is zero), else Windows-1252, which is noted.
    Raises InputError for what is not text.
    """
    data = raw.data
    notes: tuple[str, ...] = ()
    encoding = _encoding(data)
    if encoding is None and b"\x00" in data:
        raise not_text(raw, "it holds zero bytes")
    try:
        text = data.decode(encoding or "utf-8-sig")
    except UnicodeDecodeError:
        if encoding:
            raise not_text(raw, f"it begins like {encoding} but does not go on so") from None
        text, notes = _western(data)
    text = text.removeprefix("\ufeff").rstrip("\x1a\x00")
    _refuse_controls(raw, text)
    return text, notes


def lines_of(raw: Raw, text: str) -> list[str]:
    """The lines, however they end; raises InputError for one that is too long to be a table's."""
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    longest = max(range(len(lines)), key=lambda i: len(lines[i]))
    if len(lines[longest]) > LINE_LIMIT:
        raise InputError(
            f"a line of {len(lines[longest])} characters",
            where=f"{raw.path} line {longest + 1}",
            why=f"no table of spectra needs more than {LINE_LIMIT}",
            do="export one sample a row or one band a row, or use Parquet",
        )
    return lines


def not_text(raw: Raw, why: str) -> InputError:
    """The refusal of a file that is not text."""
    what = kind(raw.data)
    looks = "not text" if what == "text" else f"not text but {'a zip archive' if what == 'zip' else what}"
    return InputError(looks, where=raw.path, why=why, do="export the spectra as delimited text")


def _bounded(stream: BinaryIO, limit: int, path: str) -> bytes:
    data = stream.read(limit + 1)
    if len(data) > limit:
        raise InputError(
            f"the file is larger than {limit / (1 << 20):g} MiB",
            where=path,
            why="so much is not read into memory at once",
            do="give it as Parquet, or in parts",
        )
    return data


def _encoding(data: bytes) -> str | None:
    """The encoding that a mark, or zeros in every other byte, give away; None when neither does."""
    if data.startswith((b"\xff\xfe\x00\x00", b"\x00\x00\xfe\xff")):
        return "utf-32"
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        return "utf-16"
    head = data[:4096]
    even, odd = head[0::2], head[1::2]
    if not odd or len(data) % 2:
        return None
    zero_even, zero_odd = even.count(0) / len(even), odd.count(0) / len(odd)
    if zero_odd > 0.6 and zero_even < 0.05:
        return "utf-16-le"
    if zero_even > 0.6 and zero_odd < 0.05:
        return "utf-16-be"
    return None


def _western(data: bytes) -> tuple[str, tuple[str, ...]]:
    note = ("not UTF-8: letters beyond ASCII read as Windows-1252",)
    try:
        return data.decode("cp1252"), note
    except UnicodeDecodeError:  # five bytes have no meaning there
        return data.decode("latin-1"), note


def _refuse_controls(raw: Raw, text: str) -> None:
    head = text[:100_000]
    odd = sum(1 for c in head if (c < " " and c not in "\t\n\r\x0b\x0c\x1a") or c == "\x7f" or c == "\ufffd")
    if odd > 2 + len(head) // 1000:
        raise not_text(raw, f"{odd} of its first {len(head)} characters are control codes")
