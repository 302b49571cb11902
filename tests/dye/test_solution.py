"""Solutions: Beer's law, walls, uncertainty carried to the colour, sweeps, inconstancy."""

from dataclasses import replace

import numpy as np
import pytest
from helpers import read_cross
from simulated import BLUE, NM, RED, YELLOW, exact_dye, simulated_series

from chroma.colour.spaces import Lab_from_XYZ
from chroma.dye.appearance import predict_solutions
from chroma.dye.build import fit_dye
from chroma.dye.files import dye_text, read_dye
from chroma.dye.model import Dye, in_unit, on_grid
from chroma.dye.propagate import Lab_covariance
from chroma.dye.solution import (
    Cell,
    absorbance,
    fresnel,
    range_notes,
    refractive_index,
    seen_through,
    shelf,
    transmittance,
    walls,
)
from chroma.dye.sweep import hue_turns, one_solution, sweep, turn_sentences
from chroma.inconstancy import corresponding, degree_of_adaptation, inconstancy
from chroma.viewing import conditions
from observers.errors import InputError

FACTS = {row["what"]: row for row in read_cross("physics_facts.csv")}
CHECKS = {row["quantity"]: row for row in read_cross("metamerism_inconstancy.csv")}
LAMPS = conditions(["D65", "A"], "10")


def fact(name):
    return pytest.approx(float(FACTS[name]["value"]), abs=float(FACTS[name]["tol"]))


def stock(**more):
    return shelf([exact_dye("blue", BLUE, **more), exact_dye("yellow", YELLOW)])


def test_beers_law():
    both = stock()
    c = np.array([0.01, 0.02])
    np.testing.assert_allclose(absorbance(both, c, 20.0), 2 * (0.01 * BLUE + 0.02 * YELLOW))
    np.testing.assert_allclose(transmittance(both, c, 20.0), 10.0 ** -(2 * (0.01 * BLUE + 0.02 * YELLOW)))
    # Path length times concentration is what counts.
    np.testing.assert_allclose(transmittance(both, c, 20.0), transmittance(both, 2 * c, 10.0), rtol=1e-14)


def test_walls_by_fresnel():
    assert fresnel(1.0, 1.5) == fact("Fresnel air-glass n 1.5")
    assert fresnel(1.4585, 1.333) == fact("Fresnel quartz 1.4585-water 1.333")
    assert fresnel(1.0, 1.4585) == fact("Fresnel air-quartz 1.4585")
    assert walls(Cell(10, 1.5, 1.333)) == pytest.approx((1 - 0.04) ** 2 * (1 - fresnel(1.5, 1.333)) ** 2)
    assert refractive_index("water") == pytest.approx(1.333)
    assert refractive_index("1.47") == 1.47


def test_a_cell_of_water_loses_light_and_a_blank_takes_that_out():
    # Common practice: a blank cuvette loses light too, so the sample is compared with a blank.
    T = transmittance(stock(), np.array([0.01, 0.0]), 10.0)
    blank, sample = seen_through(np.ones_like(T), Cell(10.0)), seen_through(T, Cell(10.0))
    assert 0.90 < blank.max() < 0.93
    np.testing.assert_allclose(sample / blank, T, rtol=1e-14)
    np.testing.assert_allclose(seen_through(T, Cell(20.0), 0.1) / seen_through(T, Cell(20.0)), 10**-0.2)


@pytest.mark.parametrize(("text", "message"), [("vapour", "known are air, water"), ("0.5", "between 1 and 5")])
def test_a_medium_that_is_none(text, message):
    with pytest.raises(InputError, match=message):
        refractive_index(text)


def test_uncertainty_of_a_colour_equals_monte_carlo():
    # Simulated dyes with noise of their own and errors that all bands share; JCGM 101 by 20 000 draws.
    rng = np.random.default_rng(8)
    dyes = [
        replace(exact_dye("blue", BLUE), independent=np.full(len(NM), 0.4), common=np.stack([0.01 * BLUE, np.full(len(NM), 0.2)])),
        replace(exact_dye("yellow", YELLOW), independent=np.full(len(NM), 0.3), common=0.02 * YELLOW[None]),
    ]  # fmt: skip
    both, c, u_c = shelf(dyes), np.array([0.012, 0.02]), np.array([0.0002, 0.0003])
    W = LAMPS.weights(NM)
    draws = 20_000
    A = np.zeros((draws, len(NM)))
    for dye, amount, u in zip(dyes, c, u_c, strict=True):
        eps = dye.absorptivity + rng.standard_normal((draws, len(NM))) * dye.independent
        eps += rng.standard_normal((draws, len(dye.common))) @ dye.common
        A += (amount + u * rng.standard_normal((draws, 1))) * eps
    Lab = Lab_from_XYZ(W.response(10.0**-A), W.white)
    linear = np.sqrt(np.einsum("lii->li", Lab_covariance(both, c, u_c, 10.0, W)))
    np.testing.assert_allclose(linear, Lab.std(axis=0), rtol=0.03)


def test_a_predicted_colour_carries_its_uncertainty():
    colours = predict_solutions(("mix",), stock(), np.array([[0.01, 0.01]]), np.array([10.0]), LAMPS, relative_u=0.02)
    exact = predict_solutions(("mix",), stock(), np.array([[0.01, 0.01]]), np.array([10.0]), LAMPS)
    assert (colours.u_Lab > 0.05).any()
    np.testing.assert_allclose(exact.u_Lab, 0, atol=1e-12)


def test_outside_what_was_fitted_is_said():
    both = stock(range_high=0.02, linear_to=0.015)
    assert range_notes(both, np.array([0.01, 1.0])) == ()
    assert "up to 0.015 g/L" in range_notes(both, np.array([0.017, 0.0]))[0]
    assert "above the 0.02 g/L that it was fitted over" in range_notes(both, np.array([0.03, 0.0]))[0]


def test_units_by_molar_mass():
    dye = exact_dye("blue", BLUE, molar_mass=200.0, range_high=0.02)
    molar = in_unit(dye, "mol/L")
    np.testing.assert_allclose(molar.absorptivity, 200 * BLUE)
    assert molar.range_high == pytest.approx(1e-4)
    np.testing.assert_allclose(in_unit(molar, "g/L").absorptivity, BLUE)
    with pytest.raises(InputError, match="its molar mass is not known"):
        in_unit(exact_dye("red", RED), "mol/L")


def test_a_shelf_is_on_one_grid():
    fine = np.arange(400.0, 721.0, 2.0)
    other = Dye("red", fine, np.interp(fine, NM, RED), "g/L", np.zeros(len(fine)), np.zeros((0, len(fine))))
    both = shelf([exact_dye("blue", BLUE), other])
    assert both.wavelength_nm[0] == 400
    assert both.wavelength_nm[-1] == 720
    np.testing.assert_allclose(both.absorptivity[0], BLUE[4:-12])
    np.testing.assert_allclose(
        on_grid(other, np.array([500.0, 600.0])).absorptivity, np.interp([500, 600], NM, RED), atol=0.02
    )


def test_dyes_that_cannot_stand_together():
    infrared = np.arange(800.0, 901.0, 10.0)
    far = Dye("far", infrared, np.ones(11), "g/L", np.zeros(11), np.zeros((0, 11)))
    with pytest.raises(InputError, match="do not overlap"):
        shelf([exact_dye("blue", BLUE), far])
    with pytest.raises(InputError, match="two dyes are named 'blue'"):
        shelf([exact_dye("blue", BLUE), exact_dye("blue", RED)])
    with pytest.raises(InputError, match="no dye was given"):
        shelf([])
    with pytest.raises(InputError, match=r"dye blue.*not extrapolated"):
        on_grid(exact_dye("blue", BLUE), np.array([300.0, 400.0]))


def test_sweeps():
    both, c = stock(), np.array([0.01, 0.03])
    strength = sweep("strength=0.1:10:3", both, c, 10.0)
    np.testing.assert_allclose(strength.concentrations[:, 0], [0.001, 0.01, 0.1])
    length = sweep("path-length=1mm:100mm:3", both, c, 10.0)
    np.testing.assert_allclose(length.path_length_mm, [1, 10, 100])
    one = sweep("blue=0mg/L:20mg/L:3", both, c, 10.0)
    np.testing.assert_allclose(one.concentrations, [[0, 0.03], [0.01, 0.03], [0.02, 0.03]])
    mixed = sweep("blue/yellow=3", both, c, 10.0)
    np.testing.assert_allclose(mixed.concentrations, [[0.04, 0], [0.02, 0.02], [0, 0.04]])
    assert one_solution(both, c, 10.0).names == ("0.01 g/L blue + 0.03 g/L yellow",)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("strength", "it is one of"),
        ("strength=1:2", "first, last and the number of steps"),
        ("strength=0:2:3", "a strength is a positive number"),
        ("strength=1:2:1", "number of steps is from 2 to 1000"),
        ("red=0g/L:1g/L:3", "no dye is named 'red'"),
        ("blue=0:1g/L:3", "a number with its unit"),
        ("blue/blue=3", "two dyes with a concentration"),
        ("path-length=1:100:3", "a positive number with its unit"),
    ],
)
def test_a_sweep_that_is_none(text, message):
    with pytest.raises(InputError, match=message):
        sweep(text, stock(), np.array([0.01, 0.03]), 10.0)


def test_a_dilution_does_not_keep_its_hue_and_where_it_turns_is_said():
    red = shelf([exact_dye("red", RED)])
    steps = sweep("strength=0.05:20:12", red, np.array([0.01]), 10.0)
    colours = predict_solutions(steps.names, red, steps.concentrations, steps.path_length_mm, LAMPS)
    hue = np.unwrap(np.radians(colours.LCh[:, 0, 2]))
    assert np.degrees(np.ptp(hue)) > 20
    said = turn_sentences(steps, colours, 10.0)
    assert said[0].startswith("D65: the hue turns by +")
    turns = hue_turns(np.array([[50, 10, 350], [50, 10, 5], [50, 10, 12], [50, 1, 90], [50, 10, 20]]), 10.0)
    assert turns == [(1, 15.0), (4, 15.0)]


def test_inconstancy_against_the_published_example():
    # tests/cross/metamerism_inconstancy.csv: CMCCAT2000 example (Li et al. 2002) and CMCCON02 by hand.
    found = corresponding(
        np.array([22.48, 22.74, 8.54]), np.array([111.15, 100, 35.20]), np.array([94.81, 100, 107.30]),
        D=degree_of_adaptation(200, 200),
    )  # fmt: skip
    name = "CMCCAT2000 X (22.48 22.74 8.54; w 111.15 100 35.20; wr 94.81 100 107.30; LA1=LA2=200)"
    wanted = [float(CHECKS[key]["value"]) for key in (name, "CMCCAT2000 Y", "CMCCAT2000 Z")]
    np.testing.assert_allclose(found, wanted, atol=1e-5)
    row = CHECKS["inconstancy standard A->D65 CMC(1:1)"]
    value = inconstancy(
        np.array([7.6576, 10.7116, 5.0731]), np.array([8.96442, 10.1878, 1.6663]), np.array([94.811, 100, 107.304]),
        np.array([111.144, 100, 35.2]),
    )  # fmt: skip
    assert value == pytest.approx(float(row["value"]), abs=float(row["tol"]))


def test_a_dye_file_is_read_back_as_it_was(tmp_path):
    dye = fit_dye(
        simulated_series(np.random.default_rng(1)), name="simulated", molar_mass=320.0, created="now", program="p"
    ).dye
    path = tmp_path / "simulated.dye.json"
    path.write_text(dye_text(dye), encoding="utf-8")
    back = read_dye(str(path))
    for field in ("wavelength_nm", "absorptivity", "independent", "common"):
        np.testing.assert_array_equal(getattr(back, field), getattr(dye, field))
    for field in (
        "name",
        "unit",
        "freedom",
        "range_low",
        "range_high",
        "linear_to",
        "molar_mass",
        "created",
        "program",
    ):
        assert getattr(back, field) == getattr(dye, field)
    assert back.findings["linearity"] == dye.findings["linearity"]


def broken(**changes):
    import json

    content = json.loads(dye_text(fit_dye(simulated_series(np.random.default_rng(1)), name="x").dye)) | changes
    return json.dumps({key: value for key, value in content.items() if value != "gone"})


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "it is not JSON"),
        ("[1, 2]", "it does not say"),
        ('{"kind": "something else"}', "it does not say"),
        (broken(version=2), "a dye file of version 2: this program reads version 1"),
        (broken(version="1"), "version '1'"),
        (broken(absorptivity="gone"), "absorptivity is missing"),
        (broken(absorptivity=[1.0, 2.0]), "they must agree"),
        (broken(absorptivity=["a"]), "not a table of numbers"),
        (broken(absorptivity=[[1.0], [2.0, 3.0]]), "not a table of numbers"),
        (broken(unit="ppm"), "unit = 'ppm'"),
        (broken(name=""), "name = ''"),
        (broken(path_length_mm="10"), "path_length_mm = '10'"),
        (broken(concentration_range=[1]), "concentration_range"),
        (broken(sources=3), "sources is not a list"),
        (broken(wavelength_nm=list(range(500, 419, -1))), "do not ascend"),
        ("[" * 100_000, "it is not JSON"),
    ],
    ids=lambda text: text[:30],
)
def test_a_dye_file_that_is_wrong_is_refused(tmp_path, text, message):
    path = tmp_path / "wrong.dye.json"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(InputError, match=f"wrong.dye.json.*({message})"):
        read_dye(str(path))
