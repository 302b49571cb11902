"""Observers: tables as published, read-only, and nothing outside them."""

import numpy as np
import pytest

from observers.errors import InputError
from observers.human import STANDARD, observer, responsivity_at
from observers.tables import table


@pytest.mark.parametrize("key", STANDARD)
def test_observer(key):
    eye = observer(key)
    assert eye.key == key
    assert eye.responsivity.shape == (len(eye.wavelength_nm), 3)
    assert (np.diff(eye.wavelength_nm) == 1).all()
    assert not eye.responsivity.flags.writeable
    assert (eye.responsivity >= 0).all()


@pytest.mark.parametrize(
    ("key", "peak_nm"),
    [("2", 555), ("10", 557), ("2-2015", 549), ("10-2015", 555)],
)
def test_the_second_curve_peaks_at_about_one(key, peak_nm):
    eye = observer(key)
    assert eye.responsivity[:, 1].max() == pytest.approx(1, abs=2e-3)
    assert abs(eye.wavelength_nm[eye.responsivity[:, 1].argmax()] - peak_nm) <= 8


def test_an_unknown_observer_is_refused_with_those_known():
    with pytest.raises(InputError, match=r"unknown observer '4': known are 2, 10, 2-2015, 10-2015"):
        observer("4")


def test_responsivity_between_points_and_outside():
    eye = observer("2-2015")
    at = responsivity_at(eye, np.array([389.9, 390.0, 555.5, 830.0, 830.1]))
    middle = np.flatnonzero(eye.wavelength_nm == 555)[0]
    assert (at[[0, 4]] == 0).all()
    np.testing.assert_array_equal(at[[1, 3]], eye.responsivity[[0, -1]])
    np.testing.assert_allclose(at[2], eye.responsivity[middle : middle + 2].mean(axis=0), rtol=1e-12)


def test_tables_are_read_once_and_read_only():
    assert table("daylight") is table("daylight")
    assert all(not column.flags.writeable for column in table("daylight").values())
