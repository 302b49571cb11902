"""Lamps: what each is, how it is named, and what is refused."""

import numpy as np
import pytest
from helpers import finite, seeds
from hypothesis import given

from observers.errors import InputError
from observers.human import observer
from observers.illuminants import (
    STANDARD_NM,
    blackbody,
    daylight,
    illuminant,
    led,
    measured_lamp,
    names,
    power_at,
)
from observers.weights import weights


@pytest.mark.parametrize("name", names())
def test_every_name_is_known_in_either_case(name):
    lamp = illuminant(name.lower())
    assert lamp.name == name
    assert lamp.power.shape == lamp.wavelength_nm.shape
    assert not lamp.power.flags.writeable
    assert not lamp.wavelength_nm.flags.writeable


@pytest.mark.parametrize(
    "name", ["A", "C", "E", "D50", "D55", "D65", "D75", "FL2", "FL7", "FL11", "FL3.15", "HP1", "LED-B3", "LED-V2"]
)
def test_names_of_the_trade(name):
    assert name in names()


@pytest.mark.parametrize(
    ("spec", "name"),
    [
        ("daylight:5600K", "daylight:5600K"),
        ("Daylight: 5600 k", "daylight:5600K"),
        ("blackbody:2856.5K", "blackbody:2856.5K"),
        ("led:525nm/30nm", "led:525nm/30nm"),
        ("LED:525.5 nm / 30 nm", "led:525.5nm/30nm"),
        (" d65 ", "D65"),
    ],
)
def test_formulas_are_read(spec, name):
    assert illuminant(spec).name == name


@pytest.mark.parametrize(
    ("spec", "message"),
    [
        ("D66", "unknown illuminant 'D66'.*D65.*FL11.*LED-B3.*daylight:5600K"),
        ("", "unknown illuminant ''"),
        ("sun:5600K", "unknown kind of lamp 'sun'.*daylight:5600K"),
        ("daylight:5600", "'5600' in lamp 'daylight:5600'.*unit K is wanted"),
        ("daylight:warm", "'warm' in lamp"),
        ("daylight:-5600K", "'-5600K' in lamp"),
        ("blackbody:nanK", "'nanK' in lamp"),
        ("led:525nm", "'' in lamp 'led:525nm'.*unit nm is wanted"),
        ("led:525/30", "'525' in lamp"),
        ("daylight:3999.9K", "daylight of 3999.9 K.*holds from 4000 K to 25000 K.*blackbody"),
        ("daylight:25000.1K", "daylight of 25000.1 K"),
        ("blackbody:999K", "a blackbody of 999 K.*1000 K to 100000 K"),
        ("blackbody:100001K", "a blackbody of"),
        ("led:379.9nm/30nm", "an LED at 379.9 nm.*380 nm to 780 nm"),
        ("led:780.1nm/30nm", "an LED at 780.1 nm"),
        ("led:525nm/2.9nm", "an LED 2.9 nm wide.*3 nm to 200 nm"),
        ("led:525nm/200.1nm", "an LED 200.1 nm wide"),
    ],
)
def test_what_is_no_lamp_is_refused_with_what_is(spec, message):
    with pytest.raises(InputError, match=message):
        illuminant(spec)


@pytest.mark.parametrize(
    "spec",
    [
        "daylight:4000K",
        "daylight:25000K",
        "blackbody:1000K",
        "blackbody:100000K",
        "led:380nm/3nm",
        "led:780nm/200nm",
    ],
)
def test_the_ends_of_each_range_are_taken(spec):
    assert illuminant(spec).name == spec


@given(peak_nm=finite(440, 740), width_nm=finite(3, 70))
def test_the_width_of_an_led_is_that_at_half_height(peak_nm, width_nm):
    # the shape is drawn here by a fine table of its own through the formula of the file: read between its 1 nm points
    lamp = led(round(peak_nm), width_nm)
    peak = lamp.power[lamp.wavelength_nm == round(peak_nm)][0]
    assert peak == pytest.approx(100, abs=1e-12)
    above = lamp.wavelength_nm[lamp.power >= 50]
    assert above[-1] - above[0] == pytest.approx(width_nm, abs=2.0)


@pytest.mark.parametrize("width_nm", [20.0, 40.0, 60.0])
def test_an_led_has_half_its_power_half_a_width_from_its_peak(width_nm):
    lamp = led(550.0, width_nm)
    at = np.isin(lamp.wavelength_nm, [550 - width_nm / 2, 550 + width_nm / 2])
    np.testing.assert_allclose(lamp.power[at], 50, rtol=0, atol=1e-6)


@pytest.mark.parametrize("lamp", [blackbody(2000), blackbody(6500), illuminant("A")], ids=["2000 K", "6500 K", "A"])
def test_thermal_lamps_are_relative_to_560_nm(lamp):
    assert lamp.power[lamp.wavelength_nm == 560][0] == pytest.approx(100, rel=1e-14)


def test_daylight_has_100_at_560_nm():
    lamp = daylight(5600)
    assert lamp.power[lamp.wavelength_nm == 560][0] == pytest.approx(100, rel=1e-14)


def test_daylight_is_continuous_where_the_formula_changes():
    np.testing.assert_allclose(daylight(7000).power, daylight(7000.001).power, rtol=0, atol=0.06)


@given(seed=seeds)
def test_a_measured_lamp_on_a_coarse_even_grid_passes_through_its_points(seed):
    grid = np.arange(380.0, 781.0, 5.0)
    power = np.random.default_rng(seed).uniform(0, 1, len(grid))
    lamp = measured_lamp("bench", grid, power)
    assert lamp.rule == "sprague"
    np.testing.assert_allclose(power_at(lamp, STANDARD_NM)[20:421:5], power, rtol=0, atol=1e-12)


def test_a_measured_lamp_on_an_uneven_grid_runs_in_straight_lines():
    grid = np.array([380.0, 400, 430, 500, 546, 547, 600, 700, 780])
    power = np.array([0.0, 1, 2, 2, 3, 50, 3, 2, 1])
    lamp = measured_lamp("bench", grid, power)
    assert lamp.rule == "linear"
    inside = (STANDARD_NM >= 380) & (STANDARD_NM <= 780)
    expected = np.where(inside, np.interp(STANDARD_NM, grid, power), 0)
    np.testing.assert_allclose(power_at(lamp, STANDARD_NM), expected, rtol=0, atol=1e-12)


def test_five_even_points_are_too_few_for_sprague():
    grid = np.linspace(400.0, 700.0, 5)
    assert measured_lamp("bench", grid, np.ones(5)).rule == "linear"
    assert measured_lamp("bench", np.linspace(400.0, 700.0, 6), np.ones(6)).rule == "sprague"


def test_a_lamp_is_dark_outside_its_table():
    lamp = measured_lamp("bench", np.arange(420.0, 681.0, 10.0), np.ones(27))
    at = power_at(lamp, STANDARD_NM)
    assert (at[(STANDARD_NM < 420) | (STANDARD_NM > 680)] == 0).all()
    np.testing.assert_allclose(at[(STANDARD_NM >= 420) & (STANDARD_NM <= 680)], 1, rtol=0, atol=1e-12)


@pytest.mark.parametrize("step", [0.1, 0.2, 0.5])
def test_no_line_is_lost_in_a_lamp_finer_than_1_nm(step):
    # a line 0.2 nm wide between two whole nanometres keeps its energy
    grid = np.arange(380, 780 + step / 2, step)
    power = np.exp(-(((grid - 546.07) / 0.12) ** 2)) if step < 0.5 else (np.abs(grid - 546.5) < 0.1).astype(float)
    at = power_at(measured_lamp("bench", grid, power), STANDARD_NM)
    assert at.sum() == pytest.approx(power.sum() * step, rel=1e-9)


def test_a_fine_lamp_that_is_smooth_is_what_it_was():
    expected = 50 + (STANDARD_NM - 360) / 10
    for low, high, at_the_ends in ((350.0, 840.05, 1e-9), (360.0, 830.05, 0.03)):  # half a step where the table ends
        grid = np.arange(low, high, 0.1)
        got = power_at(measured_lamp("bench", grid, 50 + (grid - 360) / 10), STANDARD_NM)
        np.testing.assert_allclose(got[1:-1], expected[1:-1], rtol=0, atol=1e-9)
        np.testing.assert_allclose(got[[0, -1]], expected[[0, -1]], rtol=0, atol=at_the_ends)


@pytest.mark.parametrize(("step", "averaged"), [(0.74, True), (0.76, False)])
def test_a_lamp_is_averaged_when_finer_than_three_quarters_of_a_nanometre(step, averaged):
    grid = 360 + step * np.arange(int(470 / step) + 1)
    power = np.random.default_rng(3).uniform(0, 1, len(grid))
    lamp = measured_lamp("bench", grid, power)
    passes_through = abs(power_at(lamp, STANDARD_NM)[0] - power[0]) < 1e-12
    assert bool(passes_through) == (not averaged)


@pytest.mark.parametrize(
    ("low", "high", "noted"),
    [(400, 700, False), (401, 700, True), (400, 699, True), (380, 780, False)],
)
def test_a_lamp_that_misses_part_of_400_to_700_says_so(low, high, noted):
    grid = np.linspace(low, high, 40)
    lamp = measured_lamp("bench", grid, np.ones(40))
    assert any(f"measured over {low}–{high} nm only and taken as dark outside" in note for note in lamp.notes) is noted


@pytest.mark.parametrize(
    ("grid", "power", "message"),
    [
        ([300, 350, 360], [1, 1, 1], "bench: a lamp needs two points or more within 360–830 nm"),
        ([830, 835, 840], [1, 1, 1], "two points or more"),
        ([400, 500, 600], [1, -0.1, 1], "nowhere negative"),
        ([400, 500, 600], [0, 0, 0], "somewhere above zero"),
        ([400, 500, 600], [1, np.nan, 1], "must be finite"),
        ([400, 500, 600], [1, np.inf, 1], "must be finite"),
    ],
    ids=["below 360", "above 830", "negative", "dark", "nan", "inf"],
)
def test_a_lamp_that_cannot_be_is_refused(grid, power, message):
    with pytest.raises(InputError, match=message):
        measured_lamp("bench", np.array(grid, float), np.array(power, float))


@pytest.mark.parametrize("grid", [[350, 360, 361], [829, 830, 900]], ids=["from 360", "to 830"])
def test_two_points_at_the_ends_are_enough(grid):
    assert measured_lamp("bench", np.array(grid, float), np.ones(3)).rule == "linear"


def test_a_lamp_outside_what_the_observer_sees_is_refused():
    lamp = measured_lamp("heater", np.array([826.0, 828.0, 830.0]), np.ones(3))
    dark = measured_lamp("bench", np.array([355.0, 380.0, 389.0]), np.ones(3))
    assert weights(STANDARD_NM, [lamp], observer("2")).white[0, 1] == pytest.approx(100)
    with pytest.raises(InputError, match="lamp bench gives this observer no light"):
        weights(STANDARD_NM, [dark], observer("2-2015"))


@given(seed=seeds)
def test_inputs_are_not_touched_and_not_shared(seed):
    grid = np.arange(380.0, 781.0, 5.0)
    power = np.random.default_rng(seed).uniform(0, 1, len(grid))
    before = power.copy()
    lamp = measured_lamp("bench", grid, power)
    power_at(lamp, STANDARD_NM)
    np.testing.assert_array_equal(power, before)
    power[0] = 9.0  # the caller's array stays the caller's
    assert lamp.power[0] == before[0]
