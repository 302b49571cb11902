"""Embedded ICC profiles: what carries a picture's codes to linear sRGB."""

from __future__ import annotations

import struct
from dataclasses import dataclass

import numpy as np

from observers.arrays import Array
from observers.errors import InputError

# Colorants of sRGB on D50, as the ICC's own sRGB profile has them (linear Bradford adaptation, ISO 15076-1).
SRGB_D50 = np.array(
    [[0.4360747, 0.3850649, 0.1430804], [0.2225045, 0.7168786, 0.0606169], [0.0139322, 0.0971045, 0.7141733]]
)
SIZE_LIMIT = 4_000_000
PARAMETERS = (1, 3, 4, 5, 7)  # of the five parametric curves of ISO 15076-1, table 65


@dataclass(frozen=True, eq=False)
class Profile:
    """A table of linear light (3, levels), or None for sRGB's, and a matrix to linear sRGB; or the library's task."""

    linear: Array | None
    to_srgb: Array
    notes: tuple[str, ...]
    by_library: bool = False


def read_profile(data: bytes | None, deep: bool = False) -> Profile:
    """A profile of a matrix with curves as table and matrix; none is taken as sRGB, and that is noted.

    Raises InputError for a profile of another colour space than RGB, or a broken one. Reference: ISO 15076-1.
    """
    if not data:
        return Profile(None, np.eye(3), ("no colour profile embedded: taken as sRGB",))
    if len(data) < 132 or len(data) > SIZE_LIMIT or data[36:40] != b"acsp":
        raise _broken("it is no ICC profile")
    if data[16:20] != b"RGB ":
        raise InputError("its colour profile is not of RGB", do="save it in sRGB")
    try:
        tags = _tags(data)
        if not {b"rXYZ", b"gXYZ", b"bXYZ", b"rTRC", b"gTRC", b"bTRC"} <= tags.keys():
            return Profile(None, np.eye(3), (), by_library=True)
        colorants = np.column_stack([_xyz(tags[key]) for key in (b"rXYZ", b"gXYZ", b"bXYZ")])
        code = np.linspace(0.0, 1.0, 65536 if deep else 256)
        linear = np.stack([_curve(tags[key], code) for key in (b"rTRC", b"gTRC", b"bTRC")])
    except (struct.error, IndexError, ValueError) as error:
        raise _broken(str(error)) from None
    if not np.isfinite(linear).all() or (np.diff(linear) < 0).any() or abs(np.linalg.det(colorants)) < 1e-3:
        raise _broken("its curves or colorants are not of this world")
    return Profile(linear, np.linalg.solve(SRGB_D50, colorants), (f"colour profile: {_name(tags)}",))


def _broken(why: str) -> InputError:
    return InputError("its colour profile is damaged", why=why, do="save it in sRGB")


def _tags(data: bytes) -> dict[bytes, bytes]:
    (count,) = struct.unpack_from(">I", data, 128)
    if count > 200:
        raise ValueError(f"{count} tags")
    found = {}
    for number in range(count):
        name, offset, size = struct.unpack_from(">4sII", data, 132 + 12 * number)
        found[name] = data[offset : offset + size]
    return found


def _xyz(tag: bytes) -> Array:
    if tag[:4] != b"XYZ ":
        raise ValueError("a colorant is not in XYZ")
    return np.array(struct.unpack_from(">3i", tag, 8), dtype=np.float64) / 65536.0


def _curve(tag: bytes, code: Array) -> Array:
    """Linear light of codes in 0–1 by a sampled or a parametric curve."""
    if tag[:4] == b"curv":
        (count,) = struct.unpack_from(">I", tag, 8)
        if count == 0:
            return code
        points = np.array(struct.unpack_from(f">{count}H", tag, 12), dtype=np.float64)
        if count == 1:
            result: Array = code ** (points[0] / 256.0)
            return result
        return np.interp(code, np.linspace(0.0, 1.0, count), points / 65535.0)
    if tag[:4] == b"para":
        return _parametric(tag, code)
    raise ValueError("a curve of unknown kind")


def _parametric(tag: bytes, code: Array) -> Array:
    (kind,) = struct.unpack_from(">H", tag, 8)
    if kind >= len(PARAMETERS):
        raise ValueError("a parametric curve of unknown kind")
    given = [value / 65536.0 for value in struct.unpack_from(f">{PARAMETERS[kind]}i", tag, 12)]
    g, a, b, c, d, e, f = (given + [0.0] * 7)[:7]
    if kind == 0:
        a, d = 1.0, 0.0
    if kind in (1, 2):
        # Below -b/a the curve is a constant; kinds 1 and 2 write that without a d.
        c, d, e, f = 0.0, -b / a, (c if kind == 2 else 0.0), (c if kind == 2 else 0.0)
    power = np.maximum(a * code + b, 0.0) ** g + e
    result: Array = np.where(code >= d, power, c * code + f)
    return result


def _name(tags: dict[bytes, bytes]) -> str:
    """The profile's description, in the forms of version 2 and 4."""
    tag = tags.get(b"desc", b"")
    if tag[:4] == b"desc" and len(tag) > 12:
        (size,) = struct.unpack_from(">I", tag, 8)
        return tag[12 : 12 + min(size, 100)].split(b"\x00")[0].decode("ascii", "replace")
    if tag[:4] == b"mluc" and len(tag) >= 28:
        length, offset = struct.unpack_from(">II", tag, 20)
        return tag[offset : offset + min(length, 200)].decode("utf-16-be", "replace")
    return "unnamed"
