"""Correction: what to add to a batch, against what the invented batches of the demo really are."""

import runpy
from dataclasses import replace
from types import MappingProxyType

import numpy as np
import pytest
from helpers import ROOT
from matching_world import NM, at, seen, stock_of

from chroma.colour.spaces import Lab_from_XYZ
from chroma.correction import correct
from chroma.difference.formulas import Formula
from chroma.dye.model import Dye
from chroma.dye.solution import shelf, transmittance
from chroma.matching.goal import target_Lab, target_spectrum
from chroma.readers import read_spectra
from chroma.spectra import averaged, joined
from chroma.tolerance import Tolerance, read_tolerance
from chroma.viewing import conditions
from observers.errors import InputError

# --- the invented batches of the demo, and what they really are ------------------------------------------------------

DEMO = ROOT / "demo_spectra"
MAKE = runpy.run_path(str(DEMO / "make.py"))
RECIPES = {recipe.name: recipe for recipe in MAKE["BATCHES"]}
TOLERANCE = read_tolerance(str(DEMO / "tolerance.toml"))
LAMPS = tuple(TOLERANCE.limits)
W = conditions(LAMPS, "10").weights(NM)
LIMITS = np.array([TOLERANCE.limits[lamp] for lamp in LAMPS])


def demo_dye(name):
    none = np.zeros_like(NM)
    return Dye(name, NM, MAKE["absorptivity"](name, NM), "g/L", none, none[None, :][:0], range_high=0.02)


BLUE_YELLOW = shelf([demo_dye("Heron blue"), demo_dye("Broom yellow")])
ALL_THREE = shelf([demo_dye("Heron blue"), demo_dye("Broom yellow"), demo_dye("Rowan red")])


@pytest.fixture(scope="module")
def measured():
    """The batches and the target as the demo's instrument read them."""
    batches = averaged(joined(read_spectra(str(DEMO / "batches.csv"))))
    target = joined(read_spectra(str(DEMO / "target.csv")))
    return dict(zip(batches.names, batches.values, strict=True)), target.values[0]


def corrected(measured, name, stock=BLUE_YELLOW, **options):
    batches, target = measured
    return correct(
        batches[name],
        target_spectrum(target, W),
        stock,
        path_length_mm=10.0,
        weights=W,
        tolerance=TOLERANCE,
        **options,
    )


def really(recipe, addition):
    """(L,) ΔE of what the batch really is, once the addition is in it, against what the target really is."""
    mixed = {dye: amount / (1 + addition.water) for dye, amount in recipe.g_per_L.items()}
    for dye, amount in addition.dyes.items():
        mixed[dye] = mixed.get(dye, 0.0) + amount / (1 + addition.water)
    after = replace(recipe, g_per_L=mixed, haze=recipe.haze / (1 + addition.water))
    batch, target = (10.0 ** -MAKE["absorbance"](one, NM) for one in (after, MAKE["TARGET"]))
    Lab_t, Lab = (Lab_from_XYZ(W.response(T), W.white) for T in (target, batch))
    return TOLERANCE.formula.difference(Lab_t, Lab)


@pytest.mark.parametrize("stock", [BLUE_YELLOW, ALL_THREE], ids=["two dyes", "three dyes"])
@pytest.mark.parametrize("name", ["HB-05", "HB-10", "HB-13", "HB-15", "HB-18"])
def test_weak_and_strong_batches_come_within_tolerance(measured, name, stock):
    found = corrected(measured, name, stock)
    assert found.needed
    assert found.addition is not None
    assert (really(RECIPES[name], found.addition) <= LIMITS).all()
    assert (found.addition.delta_e <= 0.5 * LIMITS + 1e-4).all()


def test_a_strong_batch_takes_water_alone(measured):
    found = corrected(measured, "HB-18")
    assert dict(found.addition.dyes) == {}
    assert found.addition.water == pytest.approx(0.10, abs=0.01)
    assert found.strength.at_peak == pytest.approx(113.6, abs=1.5)
    assert found.strength.summed == pytest.approx(113.3, abs=1.5)
    assert found.said() == "add 101 mL/L water; ΔE D65 0.50, A 0.61, LED-B3 0.57 expected"
    assert found.said(200).startswith("add 20.3 L water; ΔE")


def test_a_weak_batch_takes_both_its_dyes(measured):
    found = corrected(measured, "HB-15")
    assert list(found.addition.dyes) == ["Heron blue", "Broom yellow"]
    assert found.addition.water == 0
    assert found.strength.at_peak == pytest.approx(85.7, abs=1.5)
    assert found.said().startswith("add 0.774 mg/L Heron blue and 0.517 mg/L Broom yellow; ΔE D65 0.50")
    assert found.said(200).startswith("add 155 mg Heron blue and 103 mg Broom yellow; ΔE")


@pytest.mark.parametrize(
    ("name", "at_nm"), [("HB-08", 700), ("HB-16", 515), ("HB-17", 700), ("HB-20", 380)], ids=lambda value: str(value)
)
def test_what_is_foreign_cannot_be_put_right(measured, name, at_nm):
    found = corrected(measured, name)
    assert found.addition is None
    assert not found.closest.within
    text = found.said()
    assert text.startswith("no addition of these dyes or of up to 250 mL/L water brings it within tolerance")
    assert text.endswith(f"something else than these dyes is in it, most plainly at {at_nm} nm")
    assert (found.closest.delta_e / LIMITS).max() < (found.delta_e / LIMITS).max()


def test_too_much_of_a_dye_of_the_shelf_is_named(measured):
    found = corrected(measured, "HB-16", ALL_THREE)
    assert found.addition is None
    assert found.composition.value[0, 2] == pytest.approx(0.0011, rel=0.03)
    assert found.said().endswith("it holds 1.09 mg/L Rowan red where the target has none")


@pytest.mark.parametrize("name", ["HB-01", "HB-09", "HB-19"])
def test_a_good_batch_takes_nothing(measured, name):
    found = corrected(measured, name)
    assert not found.needed
    assert found.addition is None
    assert found.said() == "within tolerance as it is, nothing to add"


# --- simulated batches, whose answer is known ------------------------------------------------------------------------

PLAIN_W = seen()
STOCK = stock_of(("blue", "yellow", "red"), range_high=0.02)
MEANT = at({"blue": 0.006, "yellow": 0.005}, STOCK)
TARGET = target_spectrum(transmittance(STOCK, MEANT, 10.0), PLAIN_W)
HELD_TO = Tolerance(dict.fromkeys(PLAIN_W.illuminants, 1.0))


def simulated(concentrations, extra=0.0, **options):
    """The correction of a simulated batch: dyes at concentrations, and an absorbance of something else."""
    A = at(concentrations, STOCK) @ STOCK.absorptivity + extra
    given = {"path_length_mm": 10.0, "weights": PLAIN_W, "tolerance": HELD_TO} | options
    return correct(10.0**-A, given.pop("target", TARGET), given.pop("stock", STOCK), **given)


def worst_after(batch_c, added_c, water):
    c = (batch_c + added_c) / (1 + water)
    Lab = Lab_from_XYZ(PLAIN_W.response(transmittance(STOCK, c, 10.0)), PLAIN_W.white)
    return Formula().difference(TARGET.Lab, Lab).max(axis=-1)


def test_one_dye_that_is_short_is_all_that_is_added_and_no_more_than_needed():
    batch = {"blue": 0.006, "yellow": 0.0042}
    found = simulated(batch)
    assert list(found.addition.dyes) == ["yellow"]
    assert found.addition.water == 0
    amounts = np.linspace(0, 0.001, 2001)
    worst = worst_after(at(batch, STOCK), amounts[:, None] * at({"yellow": 1.0}, STOCK), 0.0)
    smallest = amounts[np.flatnonzero(worst <= 0.5)[0]]
    assert found.addition.dyes["yellow"] == pytest.approx(smallest, abs=1e-6)


def test_with_the_whole_limit_as_aim_less_is_added():
    batch = {"blue": 0.006, "yellow": 0.0042}
    half, whole = simulated(batch), simulated(batch, aim=1.0)
    assert whole.addition.dyes["yellow"] < half.addition.dyes["yellow"]
    assert whole.addition.delta_e.max() == pytest.approx(1.0, abs=1e-4)


def test_water_and_one_dye_before_two_dyes_when_one_is_in_excess():
    found = simulated({"blue": 0.0068, "yellow": 0.005})
    assert list(found.addition.dyes) in ([], ["yellow"])
    assert found.addition.water > 0
    assert found.addition.within


def test_a_batch_far_too_weak_takes_the_least_mass_of_two_dyes():
    batch = {"blue": 0.003, "yellow": 0.0025}
    found = simulated(batch)
    assert list(found.addition.dyes) == ["blue", "yellow"]
    axis = np.linspace(0.001, 0.0035, 126)
    blue, yellow = np.meshgrid(axis, axis)
    added = np.stack([blue.ravel(), yellow.ravel(), np.zeros(blue.size)], axis=-1)
    allowed = added[worst_after(at(batch, STOCK), added, 0.0) <= 0.5]
    assert sum(found.addition.dyes.values()) <= allowed.sum(axis=1).min() + 1e-9
    assert sum(found.addition.dyes.values()) >= allowed.sum(axis=1).min() - 4e-5  # two steps of the lattice


def test_the_expectation_starts_from_the_batch_as_it_was_measured():
    haze = 0.01 * (550 / NM) ** 2
    found = simulated({"blue": 0.0072, "yellow": 0.006}, extra=haze)
    addition = found.addition
    A = at({"blue": 0.0072, "yellow": 0.006}, STOCK) @ STOCK.absorptivity + haze
    A = (A + at(dict(addition.dyes), STOCK) @ STOCK.absorptivity) / (1 + addition.water)
    np.testing.assert_allclose(addition.transmittance, 10.0**-A, rtol=1e-12)


def test_another_path_length_changes_nothing_but_the_spectrum():
    c = at({"blue": 0.006, "yellow": 0.0042}, STOCK)
    thick = correct(
        transmittance(STOCK, c / 2, 20.0), TARGET, STOCK, path_length_mm=20.0, weights=PLAIN_W, tolerance=HELD_TO
    )
    thin = simulated({"blue": 0.006, "yellow": 0.0042})
    assert thick.addition.dyes["yellow"] == pytest.approx(thin.addition.dyes["yellow"] / 2, rel=1e-3)


def test_a_target_known_by_its_colour_alone():
    found = simulated({"blue": 0.006, "yellow": 0.0042}, target=target_Lab(TARGET.Lab, PLAIN_W))
    assert list(found.addition.dyes) == ["yellow"]
    assert found.strength is None
    assert found.wanted is None


def test_the_uncertainty_of_a_guard_band_narrows_the_limits():
    batch = {"blue": 0.006, "yellow": 0.0046}
    assert not simulated(batch, tolerance=replace(HELD_TO, limits=dict.fromkeys(PLAIN_W.illuminants, 2.0))).needed
    narrowed = simulated(
        batch,
        tolerance=replace(HELD_TO, limits=dict.fromkeys(PLAIN_W.illuminants, 2.0)),
        expanded=np.array([1.5, 1.0, 1.5]),
    )
    assert narrowed.needed
    np.testing.assert_allclose(narrowed.limits, [0.5, 1.0, 0.5])
    assert narrowed.addition.within


def test_a_one_sided_limit_is_held_too():
    # against a wide limit the weak batch passes, but it may not be lighter than the target by more than 0.1
    wide = replace(HELD_TO, limits=dict.fromkeys(PLAIN_W.illuminants, 4.0))
    batch = {"blue": 0.0055, "yellow": 0.0046}
    assert not simulated(batch, tolerance=wide).needed
    signed = replace(wide, one_sided=MappingProxyType({"dL_max": 0.1}))
    found = simulated(batch, tolerance=signed)
    assert found.needed
    assert found.addition is not None
    dL = found.addition.Lab[:, 0] - TARGET.Lab[:, 0]
    assert dL.max() <= 0.1 + 1e-6


def test_no_room_for_water_is_kept_to_and_said():
    found = simulated({"blue": 0.0085, "yellow": 0.0071}, most_water=0.0)
    assert found.addition is None
    assert found.said().startswith(
        "no addition of these dyes brings it within tolerance: none brings it nearer than ΔE"
    )
    assert simulated({"blue": 0.0085, "yellow": 0.0071}, most_water=0.5).addition.water == pytest.approx(0.4, abs=0.05)


def test_water_comes_before_a_dye_when_either_would_do():
    wide = replace(HELD_TO, limits=dict.fromkeys(PLAIN_W.illuminants, 3.0))
    batch = {"blue": 0.00684, "yellow": 0.005}
    yellow = np.linspace(0, 0.004, 200)[:, None] * at({"yellow": 1.0}, STOCK)
    assert worst_after(at(batch, STOCK), yellow, 0.0).min() < 3.0
    found = simulated(batch, tolerance=wide, aim=1.0)
    assert dict(found.addition.dyes) == {}
    assert found.addition.water > 0


def test_the_closest_has_no_more_components_than_are_worth_it():
    found = simulated({"blue": 0.0132, "yellow": 0.011})
    assert found.addition is None
    assert dict(found.closest.dyes) == {}
    assert found.closest.water == pytest.approx(0.25)
    assert found.said().endswith("it holds 11 mg/L yellow where the target has 5 mg/L")


def test_a_dye_that_may_be_no_more_than_in_the_target_is_not_blamed():
    noise = np.random.default_rng(4).normal(0, 3e-3, NM.shape)  # simulated, in absorbance
    found = simulated({"blue": 0.006, "yellow": 0.00501, "red": 0.002}, extra=noise)
    assert found.composition.low[0, 1] < found.wanted[1] < found.composition.value[0, 1]
    assert found.said().count("it holds") == 1
    assert found.said().endswith("mg/L red where the target has none")


def test_fewer_components_may_be_asked_for():
    batch = {"blue": 0.003, "yellow": 0.0025}
    assert simulated(batch, most_components=1).addition is None
    assert simulated(batch, most_components=2).addition is not None


def test_what_ends_above_the_fitted_range_is_noted():
    stock = stock_of(("blue", "yellow", "red"), range_high=0.0045)
    found = simulated({"blue": 0.006, "yellow": 0.0042}, stock=stock)
    name, value, *_ = found.notes[-1].split()
    assert (name, float(value)) == ("yellow:", pytest.approx(0.0042 + found.addition.dyes["yellow"], rel=1e-3))
    assert "above the 0.0045 g/L that it was fitted over" in found.notes[-1]


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"aim": 0.0}, "aim 0, 3 components, 0.25 L of water"),
        ({"aim": 1.5}, "aim 1.5"),
        ({"most_components": 0}, "aim 0.5, 0 components"),
        ({"most_water": -0.1}, "-0.1 L of water"),
        ({"weights": seen(wavelength_nm=NM[:-1])}, "all must stand on the grid of the shelf"),
        ({"extra": np.full_like(NM, np.nan)}, "a value of the batch is not a finite number"),
        ({"tolerance": Tolerance({"D65": 1.0})}, "no limit for A, FL11"),
        ({"expanded": np.array([0.2, 1.2, 0.2])}, "under A U = 1.2 is not below the limit 1"),
        ({"path_length_mm": 0.0}, "path length 0 mm: it must be positive"),
    ],
    ids=lambda value: " ".join(value) if isinstance(value, dict) else None,
)
def test_what_cannot_be_is_refused(options, message):
    with pytest.raises(InputError, match=message):
        simulated({"blue": 0.005, "yellow": 0.005}, **options)
