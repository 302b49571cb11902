"""Reading boxes: uneven light divided out, what is not liquid left out, and an honest standard error. All simulated."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.ndimage import gaussian_filter

from chroma.photo.boxes import histogram_median, read_boxes
from chroma.photo.panel import fit_panel
from chroma.photo.picture import Picture, srgb_table
from chroma.photo.rack import Box
from chroma.spectra import Source
from observers.errors import InputError

RATIO = np.array([0.55, 0.8, 0.3])
BOX = Box(180, 120, 40, 100)


def encoded(linear: np.ndarray) -> np.ndarray:
    code = np.where(linear <= 0.0031308, 12.92 * linear, 1.055 * np.maximum(linear, 1e-9) ** (1 / 2.4) - 0.055)
    return np.rint(np.clip(code, 0, 1) * 255).astype(np.uint8)


def picture(linear: np.ndarray) -> Picture:
    return Picture(encoded(linear), srgb_table(256), np.eye(3), Source("simulated", ""))


def scene(
    *, noise: float = 0.01, seed: int = 1, correlated: float = 0.0, slope: float = 0.3, grey: float = 0.7
) -> np.ndarray:
    """A sloping, bowed panel with one cuvette."""
    y, x = np.mgrid[:340, :400]
    light = grey * (1 + slope * (x - 200) / 400 - 0.2 * ((y - 170) / 340) ** 2)
    ratio = np.ones((340, 400, 3))
    ratio[90:250, 168:232] = 0.75
    ratio[96:244, 176:224] = RATIO
    rng = np.random.default_rng(seed)
    rough = rng.standard_normal((340, 400, 3))
    if correlated:
        rough = gaussian_filter(rough, (correlated, correlated, 0))
        rough /= rough.std()
    return light[..., None] * ratio * (1 + noise * rough)


def test_uneven_light_is_divided_out() -> None:
    shown = picture(scene())
    found = read_boxes(shown, [BOX], fit_panel(shown, [BOX]))
    np.testing.assert_allclose(found.value[0], RATIO, rtol=0.004)
    assert found.kept[0] > 0.98
    uneven = read_boxes(shown, [Box(190, 100, 20, 60)], None).value[0]
    assert not np.allclose(uneven, RATIO, rtol=0.05)


def test_glare_dust_and_bubbles_are_left_out() -> None:
    spoilt = scene()
    spoilt[130:200, 185:190] += 0.25
    spoilt[160:166, 200:206] *= 0.5
    spoilt[205:210, 210:214] *= 0.7
    found = read_boxes(picture(spoilt), [BOX], fit_panel(picture(spoilt), [BOX]))
    np.testing.assert_allclose(found.value[0], RATIO, rtol=0.005)
    assert 0.7 < found.kept[0] < 0.95


@pytest.mark.parametrize("correlated", [0.0, 2.0], ids=["white noise", "noise alike in neighbours"])
def test_the_standard_error_is_that_of_many_photos(correlated: float) -> None:
    values, stated = [], []
    for seed in range(60):
        shown = picture(scene(noise=0.04, seed=seed, correlated=correlated, slope=0.0))
        found = read_boxes(shown, [BOX], None)
        values.append(found.value[0])
        stated.append(np.diag(found.covariance[0]))
    ratio = np.sqrt(np.mean(stated, axis=0)) / np.std(values, axis=0, ddof=1)
    assert (ratio > 0.7).all()
    assert (ratio < 1.8).all()


def test_clipped_and_dark_shares_are_counted() -> None:
    bright = scene(noise=0.0, slope=0.0, grey=1.6)
    found = read_boxes(picture(bright), [BOX], None)
    assert found.clipped[0, 1] == 1.0
    assert found.clipped[0, 2] == 0.0
    black = scene(noise=0.0)
    black[96:244, 176:224, 2] = 0.0
    assert read_boxes(picture(black), [BOX], None).dark[0].tolist() == [0.0, 0.0, 1.0]


def test_a_matrix_to_srgb_is_applied_to_means() -> None:
    matrix = np.array([[1.2, -0.2, 0.0], [-0.05, 1.05, 0.0], [0.0, -0.1, 1.1]])
    plain = picture(scene(noise=0.005))
    mixed = Picture(plain.codes, plain.linear, matrix, plain.source)
    panel = fit_panel(plain, [BOX])
    one, two = read_boxes(plain, [BOX], panel), read_boxes(mixed, [BOX], panel)
    light = one.value[0] * one.level[0]
    np.testing.assert_allclose(two.value[0], (matrix @ light) / (matrix @ one.level[0]), rtol=1e-9)


def test_a_photo_without_even_bright_ground_is_refused() -> None:
    with pytest.raises(InputError, match="no even bright ground"):
        fit_panel(picture(np.ones((340, 400, 3)) * 2.0), [BOX])
    rng = np.random.default_rng(2)
    with pytest.raises(InputError, match="no even bright ground"):
        fit_panel(picture(rng.uniform(0, 1, (340, 400, 3))), [BOX])


def test_the_median_of_a_histogram() -> None:
    rng = np.random.default_rng(1)
    codes = rng.normal(100, 6, 4001).round().astype(np.uint8)
    middle, scale = histogram_median(codes, 255)
    assert middle == pytest.approx(np.median(codes), abs=0.6)
    assert scale == pytest.approx(np.median(np.abs(codes - np.median(codes.astype(float)))), abs=0.7)
