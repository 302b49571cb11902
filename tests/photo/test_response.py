"""Where there is no spectrum of the dye: a curve through the standards; and real photos of red ink."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from photo.render.scenes import picture_of
from photo.shared import made, rack_of

from chroma.photo.boxes import read_boxes
from chroma.photo.estimate import read_photo
from chroma.photo.rack import Box, Cuvette
from chroma.photo.reading import read_picture
from chroma.photo.response import falling, fit_response, read_off
from chroma.photo.without_dye import estimate_without_dye
from observers.errors import InputError

INK = Path(__file__).parents[1] / "data" / "red_ink_photos"


def test_pooled_neighbours_only_fall() -> None:
    found = falling(np.array([0.0, -1.0, -0.8, -2.0]), np.ones(4))
    np.testing.assert_allclose(found, [0.0, -0.9, -0.9, -2.0])


def simulated(c: np.ndarray) -> np.ndarray:
    """Invented curves that flatten: ln ratios (S, 3), one channel blind to the dye."""
    return np.stack([-1.5 * c / (1 + 0.4 * c), -0.4 * c, 0 * c], axis=1)


def test_a_curve_is_read_back_within_its_intervals() -> None:
    levels = np.array([0.2, 0.5, 1.0, 1.6, 2.4])
    response = fit_response(levels, simulated(levels), np.full((5, 3), 1e-6))
    assert response.used.tolist() == [True, True, False]
    c = np.array([0.3, 0.8, 1.3, 2.0])
    middle, low, high, beyond = read_off(response, simulated(c), np.full((4, 3), 1e-6))
    np.testing.assert_allclose(middle, c, rtol=0.03)
    assert (low < c).all()
    assert (c < high).all()
    assert not beyond.any()


def test_there_is_no_answer_outside_the_standards() -> None:
    levels = np.array([0.2, 0.5, 1.0, 1.6])
    response = fit_response(levels, simulated(levels), np.full((4, 3), 1e-6))
    middle, _, high, beyond = read_off(response, simulated(np.array([3.0])), np.full((1, 3), 1e-6))
    assert beyond[0]
    assert middle[0] <= high[0] <= 1.6


def test_channels_that_tell_nothing_are_refused() -> None:
    levels = np.array([0.2, 0.5, 1.0, 1.6])
    noise = 0.05 * np.random.default_rng(1).standard_normal((4, 3))
    with pytest.raises(InputError, match="no channel responds"):
        fit_response(levels, noise, np.full((4, 3), 0.05**2))


def test_three_standards_and_no_dye_are_refused() -> None:
    one = made(1001)
    picture = picture_of(one.jpeg)
    with pytest.raises(InputError, match="4 standards are needed"):
        estimate_without_dye(picture, read_photo(picture, rack_of(one, 3)))


def test_a_photo_with_six_standards_and_no_dye() -> None:
    one = made(1001)
    rack = []
    for number, cuvette in enumerate(rack_of(one, 0)):
        if number and one.ranked.index(number) in (0, 2, 4, 6, 8, 9):
            cuvette = Cuvette(cuvette.name, "standard", (float(one.concentration[number]),), cuvette.box)
        rack.append(cuvette)
    picture = picture_of(one.jpeg)
    found = estimate_without_dye(picture, read_photo(picture, rack))
    assert "second-best way" in " ".join(found.notes)
    assert len(found.standards) == 6
    for row in found.estimates:
        c = one.concentration[int(row.name[1:])]
        assert row.parts[0].low <= c <= row.parts[0].high
        assert row.parts[0].middle == pytest.approx(c, rel=0.15)


def ink() -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Relative concentration (51,) of each pair, ln ratios (51, 3) of ink to blank, and their variance."""
    with (INK / "labels.csv").open(encoding="utf-8", newline="") as lines:
        rows = list(csv.DictReader(lines))
    c = np.array([float(row["relative_concentration"]) for row in rows])
    ln, variance = [], []
    for row in rows:
        (a, va), (b, vb) = (crop(row[key]) for key in ("sample_crop", "blank_crop_same_photo"))
        ln.append(np.log(a / b))
        variance.append(va / a**2 + vb / b**2)
    return c, np.array(ln), np.array(variance)


def crop(name: str) -> tuple[np.ndarray, np.ndarray]:
    picture = read_picture(str(INK / name))
    inner = Box(picture.width * 0.2, picture.height * 0.2, picture.width * 0.6, picture.height * 0.6)
    found = read_boxes(picture, [inner], None)
    return np.maximum(found.value[0], 1e-4), np.diag(found.covariance[0])


def test_real_photos_of_red_ink() -> None:
    """51 real pairs of phone-photo crops (biotungsten/diffusion-analysis, CC BY 4.0); the figures are those found.

    Two pairs of each dilution are the standards, 33 pairs are read off. Good from 1:8 to 1:32 (root-mean-square relative error of the
    middle under 0.4), poor where the blue channel has saturated (undiluted ink reads 0.4 to 0.7) and near nothing,
    as ink and blank were lit differently: the control, which holds no ink, reads up to 0.014 and is outside its
    interval in most pairs.
    """
    c, ln, variance = ink()
    # The blue channel falls nearly in a line with concentration up to 1:8 (squared correlation found: 0.921), then
    # flattens.
    line = c <= 0.125
    assert np.corrcoef(c[line], ln[line, 2])[0, 1] ** 2 == pytest.approx(0.921, abs=0.005)
    standard = np.zeros(len(c), dtype=bool)
    for level in np.unique(c[c > 0]):
        standard[np.flatnonzero(c == level)[:2]] = True
    response = fit_response(c[standard], ln[standard], variance[standard])
    assert response.used.tolist() == [False, True, True]
    truth = c[~standard]
    middle, low, high, _ = read_off(response, ln[~standard], variance[~standard])
    assert len(truth) == 33
    covered = (low <= truth) & (truth <= high)
    assert 0.8 <= covered.mean() < 0.93
    middling = (truth >= 1 / 32) & (truth <= 0.25)
    assert np.sqrt(((middle[middling] / truth[middling] - 1) ** 2).mean()) < 0.3
    assert (middle[truth == 1] < 0.8).all()
    assert (middle[truth == 0] < 0.02).all()
    assert covered[truth == 0].mean() < 0.5
