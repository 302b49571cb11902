"""Cuvettes and the card found in rendered photos; nothing found gives no number. All simulated."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from photo.render.cards import CUVETTES, PER_MM, PITCH_MM, card_scene
from photo.render.geometry import BOTTOM, INNER, LEVEL, lefts, mapped
from photo.render.scenes import picture_of
from photo.shared import estimated, made, rack_of
from PIL import Image

from chroma.photo.card import draw_card, layout, raster
from chroma.photo.find import find_columns
from chroma.photo.find_card import cuvettes_on_card, find_card, steps_in_order
from chroma.photo.locate import located
from chroma.photo.overlay import draw_overlay, is_overlay
from chroma.photo.picture import Picture, srgb_table
from chroma.photo.rack import Box
from chroma.spectra import Source
from observers.errors import InputError

cv2 = pytest.importorskip("cv2")
CARDS = 24  # tests/bench/photo_cards.py counts over more


def inside_liquid(boxes: tuple[Box, ...], matrix: np.ndarray, count: int, pitch: float) -> bool:
    """Whether every box, carried back to the board, lies within its own cuvette's liquid."""
    back = np.linalg.inv(matrix)
    for box, left in zip(boxes, lefts(count, pitch), strict=True):
        corners = np.array([[box.x, box.y], [box.right, box.y], [box.right, box.bottom], [box.x, box.bottom]])
        x, y = mapped(back, corners).T
        if x.min() < left - 1 or x.max() > left + INNER + 1 or y.min() < LEVEL or y.max() > BOTTOM + 1:
            return False
    return True


@pytest.mark.parametrize("number", range(1000, 1012))
def test_columns_are_found_and_lie_in_the_liquid(number: int) -> None:
    from photo.render.geometry import pose
    from photo.render.scenes import PITCH

    one = made(number)
    boxes = find_columns(picture_of(one.jpeg), 12)
    matrix = pose(one.setting.tilt_degrees, one.setting.roll_degrees, 1200, 900)
    assert inside_liquid(boxes, matrix, 12, PITCH)


@pytest.mark.parametrize("count", [11, 13, 1])
def test_a_rack_of_another_length_is_refused(count: int) -> None:
    with pytest.raises(InputError, match=f"12 cuvettes found in the photo, {count} rows"):
        find_columns(picture_of(made(1001).jpeg), count)


def test_found_boxes_give_the_same_concentrations_as_drawn_ones() -> None:
    from photo.render.world import twins

    from chroma.photo.estimate import estimate, read_photo
    from observers.illuminants import illuminant

    one = made(1001)
    bare = [replace(cuvette, box=None) for cuvette in rack_of(one, 3, spoilt=True)]
    picture = picture_of(one.jpeg)
    place = located(picture, bare)
    assert any("no card seen" in note for note in place.notes)
    reading = read_photo(picture, place.cuvettes, place.field)
    found = estimate(
        picture, reading, [one.dye], 10.0, lamps=[illuminant(one.setting.lamp)], without=twins(one.setting.camera)
    )
    drawn = estimated(1001, 3, spoilt=True)
    for a, b in zip(found.estimates[:-1], drawn.estimates[:-1], strict=True):
        assert a.parts[0].middle == pytest.approx(b.parts[0].middle, rel=0.03)


def test_cards_are_found_tilted_rolled_and_blurred() -> None:
    seen = right = 0
    for number in range(CARDS):
        shown = card_scene(number, paper=("a4", "letter")[number % 2])
        picture = picture_of(shown.jpeg)
        card = find_card(picture)
        if card is None:
            continue
        assert card.layout.paper == ("a4", "letter")[number % 2]
        corners = np.array([[0.0, 0.0], [card.layout.width, card.layout.height]])
        truth = mapped(shown.matrix, corners * PER_MM + np.array(shown.offset))
        seen += bool(np.abs(card.pixels(corners) - truth).max() < 4)
        right += inside_liquid(cuvettes_on_card(picture, card, CUVETTES), shown.matrix, CUVETTES, PITCH_MM * PER_MM)
    assert seen >= 0.99 * CARDS
    assert right >= 0.97 * CARDS


def test_a_card_without_cuvettes_gives_no_number() -> None:
    picture = picture_of(card_scene(3, cells=False).jpeg)
    card = find_card(picture)
    assert card is not None
    with pytest.raises(InputError, match="0 cuvettes found"):
        cuvettes_on_card(picture, card, CUVETTES)


def test_the_grey_steps_are_in_order_until_they_are_upset() -> None:
    picture = picture_of(card_scene(5).jpeg)
    card = find_card(picture)
    assert card is not None
    assert steps_in_order(picture, card)
    upset = picture.codes.copy()
    x, y = card.pixels(np.array([card.layout.steps[4].x + 7, card.layout.steps[4].y + 7])).astype(int)
    upset[y - 9 : y + 9, x - 9 : x + 9] = 255
    assert not steps_in_order(replace(picture, pixels=upset), card)


NOTHING = {
    "an even sheet": lambda rng: np.full((300, 400, 3), (200, 201, 190)) + rng.integers(-2, 3, (300, 400, 3)),
    "noise": lambda rng: rng.integers(0, 256, (300, 400, 3)),
    "a dark room": lambda rng: rng.integers(0, 9, (300, 400, 3)),
    "a window": lambda rng: np.kron(rng.integers(0, 256, (3, 4, 3)), np.ones((100, 100, 1))),
    "a slope": lambda rng: np.linspace(10, 240, 400)[None, :, None] * np.array([1.0, 0.9, 0.8]) * np.ones((300, 1, 1)),
}


@pytest.mark.parametrize("shown", NOTHING.values(), ids=NOTHING.keys())
def test_a_photo_without_cuvettes_never_yields_a_number(shown) -> None:
    codes = np.clip(shown(np.random.default_rng(4)), 0, 255).astype(np.uint8)
    picture = Picture(codes, srgb_table(256), np.eye(3), Source("simulated", ""))
    bare = [replace(cuvette, box=None) for cuvette in rack_of(made(1001), 3)]
    with pytest.raises(InputError, match=r"cuvettes found|no even bright ground"):
        located(picture, bare)


def test_the_card_is_a_page_of_the_papers_size(tmp_path) -> None:
    import re

    for paper, (width, height) in {"a4": (297, 210), "letter": (279.4, 215.9)}.items():
        draw_card(paper, tmp_path / "card.pdf")
        data = (tmp_path / "card.pdf").read_bytes()
        box = re.search(rb"/MediaBox \[ ?0 0 ([\d.]+) ([\d.]+) ?\]", data)
        assert box is not None
        found = [float(value) * 25.4 / 72 for value in box.groups()]
        np.testing.assert_allclose(found, [width, height], atol=0.1)


def test_a_card_is_found_in_its_own_raster_at_its_corners() -> None:
    codes = (raster("a4", 4.0) * 230).astype(np.uint8)
    tinted = np.stack([codes, codes, (codes * 0.9).astype(np.uint8)], axis=-1)
    card = find_card(Picture(tinted, srgb_table(256), np.eye(3), Source("simulated", "")))
    assert card is not None
    assert card.markers == 4
    np.testing.assert_allclose(card.pixels(layout("a4").corners), layout("a4").corners * 4, atol=0.6)


def test_another_paper_lists_the_known() -> None:
    with pytest.raises(InputError, match="a4, letter"):
        layout("a5")


def test_the_overlay_shows_the_boxes(tmp_path) -> None:
    picture = picture_of(made(1001).jpeg)
    target = tmp_path / "boxes.png"
    draw_overlay(picture, {"c0": Box(100, 200, 50, 80)}, target)
    shown = np.asarray(Image.open(target))
    assert (shown[200:280, 100] == (255, 60, 0)).all()
    assert is_overlay(str(target))
    Image.open(target).save(tmp_path / "copy.jpg")
    assert not is_overlay(str(tmp_path / "copy.jpg"))
    assert not is_overlay(str(tmp_path / "none.png"))
