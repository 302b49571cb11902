"""Simulated photos of the printed card with a few cuvettes before it."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from photo.render.geometry import BOARD
from photo.render.picture import jpeg, render
from photo.render.world import absorptivity, draw_setting

from chroma.photo.card import raster
from observers.arrays import Array

PER_MM = 3.1  # board units a mm: the card is wholly in the picture
PITCH_MM = 31.0
GROUND = 0.35
CUVETTES = 5


@dataclass(frozen=True, eq=False)
class CardScene:
    """A photo of the card, and the board-to-pixel matrix that the finder is not told."""

    jpeg: bytes
    matrix: Array
    offset: tuple[float, float]


def card_texture(paper: str) -> tuple[Array, tuple[float, float]]:
    """The card upon a darker bench, on the board at two samples a unit, and its upper left corner in board units."""
    printed = 0.05 + 0.95 * raster(paper, PER_MM * 2)
    board = np.full((int(BOARD[1] * 2), int(BOARD[0] * 2)), GROUND, dtype=np.float32)
    top, left = 160, (board.shape[1] - printed.shape[1]) // 2
    board[top : top + printed.shape[0], left : left + printed.shape[1]] = printed
    return board, (left / 2, top / 2)


def card_scene(
    number: int, *, paper: str = "a4", cells: bool = True, width: int = 1200, height: int = 900
) -> CardScene:
    """Up to 25° tilt, 10° roll and blur of up to two pixels, seeded."""
    rng = np.random.default_rng([number, 9])
    direction = rng.uniform(0, 2 * np.pi)
    tilt = rng.uniform(0, 25)
    setting = replace(
        draw_setting(number),
        tilt_degrees=(tilt * np.cos(direction), tilt * np.sin(direction)),
        roll_degrees=rng.uniform(-10, 10),
        blur_px=rng.uniform(0.8, 2.0),
    )
    texture, offset = card_texture(paper)
    wavelength_nm = np.arange(380.0, 781.0, 5.0)
    curve = absorptivity("simulated blue", wavelength_nm)
    c = np.linspace(0, 1, CUVETTES) / curve.max()
    transmittance = 10.0 ** -np.outer(c, curve)
    made = render(
        setting, transmittance, width=width, height=height, pitch=PITCH_MM * PER_MM, texture=texture, cells=cells
    )
    return CardScene(jpeg(made.codes, setting.quality), made.matrix, offset)
