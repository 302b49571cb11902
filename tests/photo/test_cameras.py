"""Cameras, their population, and the noise of pictures."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from observers.camera_population import UNUSUAL, population
from observers.cameras import CAMERA_NM, balanced, camera, colour_matrix, effective_channels, names, sensitivities
from observers.errors import InputError
from observers.illuminants import illuminant, power_at
from observers.noise import PhotonTransfer, jpeg_level_covariance, quantisation_variance, ratio_uncertainty
from observers.tables.make_cameras import cameras_text

# Computed analytically by others from EMVA 1288 and sRGB; see the file's header.
with (Path(__file__).parent / "camera_statistics.csv").open(encoding="utf-8", newline="") as lines:
    CHECKS = {row["what"]: row for row in csv.DictReader(line for line in lines if not line.startswith("#"))}


def check(beginning: str) -> tuple[float, float]:
    row = next(row for what, row in CHECKS.items() if what.startswith(beginning))
    return float(row["value"]), float(row["tol"] or 1e-12)


def test_the_table_is_what_the_script_writes() -> None:
    written = Path("observers/tables/cameras.csv")
    packaged = Path(__file__).parents[2] / written
    assert packaged.read_text(encoding="utf-8") == cameras_text()


def test_fifty_four_cameras_with_licence() -> None:
    assert len(names()) == 54
    folder = Path(__file__).parents[2] / "observers" / "tables"
    assert "Apache License" in (folder / "cameras.LICENSE").read_text(encoding="utf-8")


def test_an_unknown_camera_lists_the_known() -> None:
    with pytest.raises(InputError, match="camera-01"):
        camera("none")


def test_effective_channels_give_one_for_a_clear_cell() -> None:
    channels = effective_channels(camera("camera-07"), illuminant("FL11"))
    np.testing.assert_allclose(channels @ np.ones(len(CAMERA_NM)), 1.0, atol=1e-12)


def test_a_colour_matrix_recovers_channels_that_are_mixtures_of_the_sensor() -> None:
    sensor = balanced(sensitivities(("camera-03",))[0], power_at(illuminant("D65"), CAMERA_NM))
    mixing = np.array([[1.5, -0.4, -0.1], [-0.2, 1.4, -0.2], [0.0, -0.5, 1.5]])
    smooth = np.exp(-0.5 * ((CAMERA_NM[:, None] - CAMERA_NM) / 40) ** 2)
    np.testing.assert_allclose(colour_matrix(sensor, mixing @ sensor, smooth), mixing, atol=1e-6)


def test_a_population_keeps_white_and_falls_in_weight() -> None:
    people = population(illuminant("D50"))
    np.testing.assert_allclose(people.mean.sum(axis=-1), 1.0, atol=1e-9)
    np.testing.assert_allclose(people.directions.sum(axis=-1), 0.0, atol=1e-9)
    sizes = np.linalg.norm(people.directions.reshape(len(people.directions), -1), axis=1)
    assert (np.diff(sizes) <= 1e-12).all()
    assert not set(UNUSUAL) & set(people.cameras)


@pytest.mark.parametrize("lamp", ["D65", "A", "FL11", "LED-B3"])
def test_a_camera_left_out_is_described_by_a_few_numbers(lamp: str) -> None:
    """Its response to solutions lies within the spread that the others give."""
    light = illuminant(lamp)
    people = population(light, without=("camera-10",))
    own = effective_channels(camera("camera-10"), light)
    flat = people.directions.reshape(len(people.directions), -1)
    apart = (own - people.mean).ravel()
    z = np.linalg.lstsq(flat.T, apart, rcond=None)[0]
    left = (apart - flat.T @ z).reshape(own.shape)
    solutions = 10.0 ** -np.exp(-(((CAMERA_NM - np.array([[450.0], [530.0], [620.0]])) / 40) ** 2))
    # The worst lamp and solution leave 0.009 of the blank undescribed (found).
    assert np.abs(left @ solutions.T).max() < 0.02
    assert np.sqrt((z**2).mean()) < 2.5


def test_more_tilt_widens_the_population() -> None:
    narrow, wide = (population(illuminant("D50"), tilt=tilt) for tilt in (0.01, 0.3))
    assert np.linalg.norm(wide.directions) > 1.1 * np.linalg.norm(narrow.directions)


def test_a_population_of_nobody_is_refused() -> None:
    with pytest.raises(InputError, match="five are needed"):
        population(illuminant("D50"), without=names()[:51])


def test_photon_transfer_as_emva_1288_has_it() -> None:
    value, tolerance = check("photon transfer")
    assert PhotonTransfer(0.25, 8.0).variance(np.array(400.0)) == pytest.approx(value, abs=tolerance)


def test_quantisation_noise() -> None:
    value, tolerance = check("quantisation noise")
    assert np.sqrt(quantisation_variance()) == pytest.approx(value, abs=tolerance)


def test_the_ratio_of_two_photon_counts_is_known_to_the_bound() -> None:
    value, tolerance = check("equal 1e6")
    assert ratio_uncertainty(1e6, 1e6) == pytest.approx(value, abs=tolerance)
    value, tolerance = check("sd of A")
    assert ratio_uncertainty(2e6, 1e6) / np.log(10) == pytest.approx(value, abs=tolerance)


def test_jpeg_rounds_an_even_field_by_as_much_as_stated() -> None:
    """Simulated: many even fields through the imaging library, against the covariance of their levels."""
    import io

    from PIL import Image

    rng = np.random.default_rng(3)
    off = []
    for colour in rng.uniform(60, 190, (400, 3)):
        # A little noise, as every photo has, so that pixels are not all rounded alike before the transform.
        field = np.rint(colour + rng.normal(0, 0.8, (32, 32, 3))).astype(np.uint8)
        buffer = io.BytesIO()
        Image.fromarray(field).save(buffer, "JPEG", quality=50, subsampling=2)
        opened = Image.open(io.BytesIO(buffer.getvalue()))
        tables = opened.quantization
        off.append(np.asarray(opened).reshape(-1, 3).mean(axis=0) - field.reshape(-1, 3).mean(axis=0))
    found = np.sqrt(np.mean(np.square(off), axis=0))
    stated = np.sqrt(np.diag(jpeg_level_covariance(tables[0][0], tables[1][0])))
    np.testing.assert_allclose(found, stated, rtol=0.15)
