"""From a setting and solutions to a JPEG: what a simulated camera makes of the light of a simulated board."""

from __future__ import annotations

import io
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from photo.render.geometry import BOARD, EMPTY, LIQUID, MENISCUS, WALLS, board_coordinates, pose, regions
from photo.render.world import Setting
from scipy.ndimage import gaussian_filter

from observers.arrays import Array

EMPTY_CELL, FILLED_CELL, WALL_GREY, MENISCUS_GREY = 0.86, 0.93, 0.72, 0.6
CELL_SPREAD, PATH_SPREAD = 0.0005, 0.001  # cells of one matched set differ by this much


@dataclass(frozen=True, eq=False)
class Render:
    """A picture (H, W, 3) in 8-bit sRGB before JPEG, and what the estimator is not told."""

    codes: np.ndarray
    matrix: Array  # board to pixels
    true_ratio: Array  # (N, 3) of each cuvette's linear mixed channels to a filled cell with no dye


def responses(setting: Setting, transmittance: Array) -> Array:
    """(N, 3) balanced sensor signals of solutions (N, B), 1 for a clear one."""
    return transmittance @ setting.channels.T / setting.channels.sum(axis=1)


def render(
    setting: Setting,
    transmittance: Array,
    *,
    width: int = 1200,
    height: int = 900,
    pitch: float = 92.0,
    texture: Array | None = None,
    cells: bool = True,
) -> Render:
    """A photo of N cuvettes holding solutions of transmittance (N, B); texture (900, 1200) is printed on the board."""
    rng = np.random.default_rng([setting.seed, 2])
    count = len(transmittance)
    matrix = pose(setting.tilt_degrees, setting.roll_degrees, width, height)
    x, y = board_coordinates(matrix, width, height)
    kind, number = regions(x, y, count, pitch)
    raw = _painted(setting, transmittance, kind, number, rng)
    if not cells:
        raw[:] = 1.0
    if texture is not None:
        raw *= _printed(texture, x, y)[..., None]
    raw *= _light(setting, x, y)[..., None]
    if cells:
        _spoil(raw, kind, number, x, y, rng)
    signal = _exposed(setting, raw, rng)
    return Render(_developed(setting, signal), matrix, _true(setting, transmittance))


def _true(setting: Setting, transmittance: Array) -> Array:
    mixed = responses(setting, transmittance) * setting.channels.sum(axis=1) @ setting.matrix.T
    return mixed / (setting.channels.sum(axis=1) @ setting.matrix.T)


def _painted(
    setting: Setting, transmittance: Array, kind: Array, number: Array, rng: np.random.Generator
) -> np.ndarray:
    count = len(transmittance)
    bent = transmittance ** (1 + PATH_SPREAD * rng.standard_normal((count, 1)))
    table = np.ones((5, count, 3), dtype=np.float32)
    table[WALLS], table[EMPTY] = WALL_GREY, EMPTY_CELL
    table[LIQUID] = responses(setting, bent) * FILLED_CELL * np.exp(CELL_SPREAD * rng.standard_normal((count, 1)))
    table[MENISCUS] = MENISCUS_GREY * (0.3 + 0.7 * table[LIQUID])
    return table[kind, number]


def _light(setting: Setting, x: Array, y: Array) -> np.ndarray:
    """Uneven light: falling off from the middle, sloping, with a broad bright spot."""
    a, b, c, d, e, f = setting.light
    u, v = (x - BOARD[0] / 2) / 600.0, (y - BOARD[1] / 2) / 600.0
    spot = np.exp(-((u - 0.6 * a) ** 2 + (v - 0.5 * b) ** 2) / 0.5)
    fall = (1 + 0.25 * (u**2 + v**2)) ** -(0.5 + 0.5 * c)
    light = fall * (1 + 0.10 * d * u + 0.08 * e * v) * (1 + 0.10 * f * spot)
    return light.astype(np.float32)


def _printed(texture: Array, x: Array, y: Array) -> np.ndarray:
    rows = np.clip((y / BOARD[1] * texture.shape[0]).astype(np.intp), 0, texture.shape[0] - 1)
    columns = np.clip((x / BOARD[0] * texture.shape[1]).astype(np.intp), 0, texture.shape[1] - 1)
    inside = (x >= 0) & (x < BOARD[0]) & (y >= 0) & (y < BOARD[1])
    return np.where(inside, texture[rows, columns], np.float32(0.35)).astype(np.float32)


def _spoil(raw: np.ndarray, kind: Array, number: Array, x: Array, y: Array, rng: np.random.Generator) -> None:
    """Bubbles, dust, and the mirror image of a window in some cuvettes."""
    liquid = kind == LIQUID
    for which in range(int(number.max()) + 1):
        rows = np.flatnonzero((number == which) & liquid)
        if not len(rows):
            continue
        for _ in range(rng.poisson(2.5)):
            at = rows[rng.integers(len(rows))]
            cx, cy, radius = x.flat[at], y.flat[at], rng.uniform(1.0, 3.5)
            box = _near(x, y, cx, cy, radius)
            raw[box] *= np.float32(rng.uniform(0.55, 0.9))
        if rng.random() < 0.3:
            at = rows[rng.integers(len(rows))]
            cx, cy = x.flat[at], y.flat[at]
            strip = (np.abs(x - cx) < rng.uniform(1.5, 3)) & (np.abs(y - cy) < rng.uniform(20, 60)) & liquid
            raw[strip] += np.float32(rng.uniform(0.1, 0.5))


def _near(x: Array, y: Array, cx: float, cy: float, radius: float) -> np.ndarray:
    return (x - cx) ** 2 + (y - cy) ** 2 < radius**2


def _exposed(setting: Setting, raw: np.ndarray, rng: np.random.Generator) -> np.ndarray:
    """Blur, stray light and noise of the sensor; 1 is the panel at its brightest."""
    scale = raw.shape[1] / BOARD[0]
    for k in range(3):
        plane = gaussian_filter(raw[..., k], setting.blur_px * scale)
        small = gaussian_filter(plane[::8, ::8], 8.0 * scale)
        halo = np.repeat(np.repeat(small, 8, 0), 8, 1)[: plane.shape[0], : plane.shape[1]]
        plane += np.float32(setting.veil) * plane.mean() + np.float32(setting.halo) * halo
        plane /= np.float32(1 + setting.veil + setting.halo)
        electrons = plane * np.float32(setting.full_well_e * setting.exposure)
        sd = np.sqrt(np.maximum(electrons, 0) + np.float32(setting.read_e**2))
        electrons += sd * rng.standard_normal(plane.shape, dtype=np.float32)
        # Demosaicking and noise reduction make neighbours alike.
        raw[..., k] = gaussian_filter(electrons, 0.6) / np.float32(setting.full_well_e)
    return raw


def _developed(setting: Setting, signal: np.ndarray) -> np.ndarray:
    mixed = signal @ (setting.matrix * setting.channels.sum(axis=1)).T.astype(np.float32)
    encoded = encode_tone(setting, np.clip(mixed, 0.0, 1.0))
    return np.rint(encoded * np.float32(255)).astype(np.uint8)


def encode_tone(setting: Setting, linear: np.ndarray) -> np.ndarray:
    """sRGB's curve, then this camera's own tweak: a power and a slight S."""
    srgb = np.where(linear <= 0.0031308, 12.92 * linear, 1.055 * np.maximum(linear, 1e-9) ** (1 / 2.4) - 0.055)
    tweaked = srgb**setting.gamma
    return tweaked + setting.contrast * tweaked * (1 - tweaked) * (2 * tweaked - 1)


def jpeg(codes: np.ndarray, quality: int, *, exif: Sequence[tuple[int, object]] = ()) -> bytes:
    """The picture as JPEG, chroma at half resolution as phones do."""
    from PIL import Image

    picture = Image.fromarray(codes)
    tags = picture.getexif()
    for tag, value in exif:
        tags[tag] = value
    target = io.BytesIO()
    picture.save(target, "JPEG", quality=quality, subsampling=2, exif=tags.tobytes() if exif else b"")
    return target.getvalue()
