"""Where things stand in a rendered photo: a flat board with cuvettes before it, seen by a pinhole camera."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from observers.arrays import Array

# Board units: the picture's width is 1200 of them when it is looked at straight.
BOARD = (1200.0, 900.0)
DISTANCE = 1800.0
PITCH, INNER, WALL = 92.0, 52.0, 7.0
TOP, BOTTOM, LEVEL = 250.0, 690.0, 330.0
PANEL, WALLS, EMPTY, LIQUID, MENISCUS = range(5)


@dataclass(frozen=True)
class Box:
    """A box in pixels of the upright photo."""

    x: float
    y: float
    width: float
    height: float


def pose(tilt_degrees: tuple[float, float], roll_degrees: float, width: int, height: int) -> Array:
    """(3, 3) from board units to pixels: the board turned about its own axes and seen from a fixed distance."""
    a, b, c = np.radians([*tilt_degrees, roll_degrees])
    rx = np.array([[1, 0, 0], [0, np.cos(a), -np.sin(a)], [0, np.sin(a), np.cos(a)]])
    ry = np.array([[np.cos(b), 0, np.sin(b)], [0, 1, 0], [-np.sin(b), 0, np.cos(b)]])
    rz = np.array([[np.cos(c), -np.sin(c), 0], [np.sin(c), np.cos(c), 0], [0, 0, 1]])
    turn = rz @ rx @ ry
    centre = np.array([[1, 0, -BOARD[0] / 2], [0, 1, -BOARD[1] / 2], [0, 0, 1.0]])
    board = np.column_stack([turn[:, 0], turn[:, 1], [0, 0, DISTANCE]])
    scale = DISTANCE * width / BOARD[0]
    lens = np.array([[scale, 0, width / 2], [0, scale, height / 2], [0, 0, 1.0]])
    return lens @ board @ centre


def mapped(matrix: Array, points: Array) -> Array:
    """Points (…, 2) through a homography."""
    full = points @ matrix[:, :2].T + matrix[:, 2]
    return full[..., :2] / full[..., 2:]


def board_coordinates(matrix: Array, width: int, height: int) -> tuple[Array, Array]:
    """Board coordinates (H, W) of every pixel's centre."""
    inverse = np.linalg.inv(matrix)
    x, y = np.arange(width, dtype=np.float32) + 0.5, (np.arange(height, dtype=np.float32) + 0.5)[:, None]
    top = [np.float32(r[0]) * x + np.float32(r[1]) * y + np.float32(r[2]) for r in inverse]
    return top[0] / top[2], top[1] / top[2]


def lefts(count: int, pitch: float = PITCH) -> Array:
    """Left inner edges (N,) of cuvettes centred on the board."""
    first = (BOARD[0] - (count - 1) * pitch) / 2 - INNER / 2
    return first + pitch * np.arange(count)


def regions(x: Array, y: Array, count: int, pitch: float = PITCH) -> tuple[Array, Array]:
    """What each pixel shows (one of the constants above) and of which cuvette (H, W)."""
    start = lefts(count, pitch)[0]
    number = np.clip(np.rint((x - start - INNER / 2) / pitch), 0, count - 1).astype(np.int16)
    across = x - start - number * pitch
    kind = np.zeros(x.shape, dtype=np.int8)
    inside = (across > -WALL) & (across < INNER + WALL) & (y > TOP) & (y < BOTTOM + WALL)
    kind[inside] = WALLS
    well = inside & (across > 0) & (across < INNER) & (y < BOTTOM)
    kind[well] = EMPTY
    bow = 6.0 * (2 * across / INNER - 1) ** 2
    kind[well & (y > LEVEL - bow)] = MENISCUS
    kind[well & (y > LEVEL + 9.0 - bow)] = LIQUID
    return kind, number


def boxes(matrix: Array, count: int, pitch: float = PITCH) -> list[Box]:
    """Boxes well inside each cuvette's liquid, as a person would draw them."""
    found = []
    for left in lefts(count, pitch):
        corners = np.array([[left + 9, LEVEL + 40], [left + INNER - 9, LEVEL + 40], [left + INNER - 9, BOTTOM - 40],
                            [left + 9, BOTTOM - 40]])  # fmt: skip
        p = mapped(matrix, corners)
        x0, x1 = max(p[0, 0], p[3, 0]), min(p[1, 0], p[2, 0])
        y0, y1 = max(p[0, 1], p[1, 1]), min(p[2, 1], p[3, 1])
        found.append(Box(round(x0), round(y0), round(x1 - x0), round(y1 - y0)))
    return found
