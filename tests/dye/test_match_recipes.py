"""Matching: recipes found again, the least worst found, bounds and fixed parts kept, what cannot be reached said."""

import itertools

import numpy as np
import pytest
from matching_world import LAMPS, NM, SIX, at, dye, foreign_transmittance, nearly, seen, stock_of

from chroma.colour.spaces import Lab_from_XYZ
from chroma.difference.formulas import Formula
from chroma.difference.metameric_index import special_index
from chroma.dye.solution import shelf, transmittance
from chroma.matching.goal import target_Lab, target_spectrum
from chroma.matching.recipes import match
from observers.errors import InputError

STOCK, W = stock_of(), seen()
PEAK = STOCK.absorptivity.max(axis=1)
FORMULA = Formula()


def found(target, stock=STOCK, weights=W, *, path_length_mm=10.0, formula=FORMULA, **options):
    return match(target, stock, path_length_mm=path_length_mm, weights=weights, formula=formula, **options)


def random_recipe(rng, dyes=3):
    """(D,) simulated: three dyes of six, each with an absorbance of 0.1 to 1 at its peak in 10 mm."""
    c = np.zeros(len(SIX))
    which = rng.choice(len(SIX), dyes, replace=False)
    c[which] = rng.uniform(0.1, 1.0, dyes) / PEAK[which]
    return c


def Lab_of(stock, c, weights, path_length_mm=10.0):
    return Lab_from_XYZ(weights.response(transmittance(stock, c, path_length_mm)), weights.white)


def test_a_recipe_is_found_again_from_its_spectrum():
    # The floor of the issue: ΔE00 < 0.05 under every lamp and concentrations within 1 % in 98 % of 200. Simulated.
    rng = np.random.default_rng(20)
    good = 0
    for _ in range(200):
        c = random_recipe(rng)
        best = found(target_spectrum(transmittance(STOCK, c, 10.0), W), keep=1).recipes[0]
        near = np.allclose(at(best.concentrations, STOCK), c, rtol=0.01, atol=0)
        good += near and best.delta_e.max() < 0.05
    assert good >= 196


def test_a_recipe_is_found_again_from_its_colours_alone():
    rng = np.random.default_rng(21)  # three lamps give nine numbers, which only the true three dyes meet
    for _ in range(25):
        c = random_recipe(rng)
        best = found(target_Lab(Lab_of(STOCK, c, W), W), keep=1).recipes[0]
        assert best.delta_e.max() < 0.05
        np.testing.assert_allclose(at(best.concentrations, STOCK), c, rtol=0.01, atol=0)


@pytest.mark.parametrize("seed", range(4))
def test_under_one_lamp_many_recipes_meet_one_colour(seed):
    only = seen(["D65"])
    target = target_Lab(Lab_of(STOCK, random_recipe(np.random.default_rng(seed)), only), only)
    answer = found(target, weights=only, keep=2)
    assert answer.reached
    assert answer.recipes[0].delta_e.max() < 0.05
    assert answer.recipes[0].special_index.shape == (0,)
    assert answer.recipes[0].spread == 0


@pytest.mark.parametrize("formula", [Formula("cie1976"), Formula("cmc"), Formula("cie94"), Formula("din99o")], ids=str)
def test_every_formula_leads_to_the_recipe(formula):
    c = random_recipe(np.random.default_rng(3))
    best = found(target_spectrum(transmittance(STOCK, c, 10.0), W), formula=formula, keep=1).recipes[0]
    np.testing.assert_allclose(at(best.concentrations, STOCK), c, rtol=0.01, atol=0)


@pytest.mark.parametrize("seed", [0, 1, 4])
def test_no_search_from_elsewhere_finds_a_better_worst(seed):
    # a target that no recipe meets; against it a simplex search of every three dyes from two random places
    from scipy.optimize import minimize

    target = target_spectrum(foreign_transmittance(seed), W)
    rng = np.random.default_rng(seed)

    def worst(amounts, dyes):
        c = np.zeros(len(SIX))
        c[list(dyes)] = np.abs(amounts) / PEAK[list(dyes)]
        return FORMULA.difference(target.Lab, Lab_of(STOCK, c, W)).max()

    elsewhere = min(
        minimize(worst, rng.uniform(0.05, 1, 3), args=(dyes,), method="Nelder-Mead", options={"maxiter": 300}).fun
        for dyes in itertools.combinations(range(len(SIX)), 3)
        for _ in range(2)
    )
    assert found(target, keep=1).recipes[0].delta_e.max() <= elsewhere + 1e-3


def test_recipes_come_best_first_each_with_its_own_dyes():
    answer = found(target_spectrum(foreign_transmittance(0), W), keep=8)
    worst = [recipe.delta_e.max() for recipe in answer.recipes]
    assert len(worst) == 8
    assert np.all(np.diff(worst) > -0.005)
    assert len({tuple(recipe.concentrations) for recipe in answer.recipes}) == 8
    assert all(len(recipe.concentrations) <= 3 for recipe in answer.recipes)


def test_what_cannot_be_reached_is_said_and_the_closest_shown():
    answer = found(target_spectrum(foreign_transmittance(0), W), limits=1.0)
    assert not answer.reached
    assert not answer.recipes[0].within
    closest = answer.recipes[0]
    lamp = int(np.argmax(closest.delta_e))
    assert answer.said == (
        f"no recipe of up to 3 of these dyes meets the target within its bounds; the closest, "
        f"{' with '.join(closest.concentrations)}, stays at ΔE {closest.delta_e[lamp]:.2f} under {LAMPS[lamp]}, limit 1"
    )
    assert found(target_spectrum(foreign_transmittance(0), W), limits=3.0).reached


def test_a_lamp_with_a_wider_limit_counts_for_less():
    target = target_spectrum(foreign_transmittance(0), W)
    alike = found(target, keep=1).recipes[0]
    loose = found(target, keep=1, limits=(1.0, 4.0, 1.0)).recipes[0]
    assert loose.delta_e[1] > alike.delta_e[1] + 0.3
    assert loose.delta_e[[0, 2]].max() < alike.delta_e[[0, 2]].max() - 0.3


def test_the_target_may_have_another_path_length():
    c = random_recipe(np.random.default_rng(5))
    answer = found(target_spectrum(transmittance(STOCK, c, 10.0), W), path_length_mm=25.0, keep=1)
    np.testing.assert_allclose(at(answer.recipes[0].concentrations, STOCK), c / 2.5, rtol=1e-4, atol=0)
    np.testing.assert_allclose(answer.recipes[0].transmittance, transmittance(STOCK, c, 10.0), atol=1e-6)


def test_bounds_are_kept_and_a_low_bound_puts_the_dye_in():
    c = at({"blue": 0.006, "yellow": 0.005}, STOCK)
    target = target_spectrum(transmittance(STOCK, c, 10.0), W)
    answer = found(target, bounds={"blue": (0.0, 0.004), "red": (0.0005, 0.01)}, keep=6)
    assert all(recipe.concentrations.get("blue", 0) <= 0.004 * (1 + 1e-9) for recipe in answer.recipes)
    assert all(recipe.concentrations["red"] >= 0.0005 * (1 - 1e-9) for recipe in answer.recipes)
    assert answer.recipes[0].delta_e.max() > 0.1


def test_the_fitted_range_is_the_bound_where_none_is_given():
    stock = stock_of(("blue", "yellow"), range_high=0.004)
    target = target_spectrum(transmittance(stock, np.array([0.006, 0.003]), 10.0), W)
    best = found(target, stock).recipes[0]
    assert best.concentrations["blue"] == pytest.approx(0.004)
    assert best.notes == ()
    beyond = found(target, stock, bounds={"blue": (0.0, 0.02)}).recipes[0]
    assert beyond.concentrations["blue"] == pytest.approx(0.006, rel=1e-4)
    assert beyond.notes == ("blue: 0.006 g/L is above the 0.004 g/L that it was fitted over",)


def test_fixed_parts_stay_and_the_rest_is_found():
    c = at({"blue": 0.006, "yellow": 0.005, "red": 0.002}, STOCK)
    target = target_spectrum(transmittance(STOCK, c, 10.0), W)
    best = found(target, fixed={"red": 0.002}, most_dyes=2).recipes[0]
    np.testing.assert_allclose(at(best.concentrations, STOCK), c, rtol=1e-4)
    off = found(target, fixed={"red": 0.004}, most_dyes=2).recipes[0]
    assert off.concentrations["red"] == 0.004
    assert off.delta_e.max() > 1


def test_a_fixed_part_alone_may_be_the_recipe():
    c = at({"red": 0.002}, STOCK)
    answer = found(target_spectrum(transmittance(STOCK, c, 10.0), W), fixed={"red": 0.002})
    assert dict(answer.recipes[0].concentrations) == {"red": 0.002}


def test_a_clear_target_takes_no_dye():
    answer = found(target_spectrum(np.ones_like(NM), W))
    assert answer.reached
    assert dict(answer.recipes[0].concentrations) == {}
    assert answer.said.startswith("plain solvent meets the target")


def test_steps_give_multiples_and_the_best_of_all_of_them():
    stock, step = stock_of(("blue", "yellow", "red")), 0.0005
    c = np.array([0.00627, 0.00512, 0.00188])
    target = target_spectrum(transmittance(stock, c, 10.0), W)
    best = found(target, stock, step=step).recipes[0]
    multiples = at(best.concentrations, stock) / step
    np.testing.assert_allclose(multiples, np.round(multiples), atol=1e-9)
    # every lattice point within five steps of the truth
    around = np.round(c / step) + np.array(list(itertools.product(range(-5, 6), repeat=3)))
    worst = FORMULA.difference(target.Lab, Lab_of(stock, around[(around >= 0).all(axis=1)] * step, W)).max(axis=-1)
    assert best.delta_e.max() == pytest.approx(worst.min(), abs=1e-9)


def test_steps_differ_by_dye_and_keep_to_bounds():
    stock = stock_of(("blue", "yellow"))
    target = target_spectrum(transmittance(stock, np.array([0.0062, 0.0051]), 10.0), W)
    best = found(target, stock, step={"blue": 0.001, "yellow": 0.0002}, bounds={"blue": (0.0, 0.0055)}).recipes[0]
    assert best.concentrations["blue"] == 0.005
    assert best.concentrations["yellow"] / 0.0002 == pytest.approx(round(best.concentrations["yellow"] / 0.0002))


def test_of_two_recipes_that_tie_the_cheaper_comes_first():
    # one simulated dye sold under two names: every recipe of one has its twin
    stock = shelf([dye("blue", called="dear blue"), dye("blue", called="cheap blue"), dye("yellow")])
    target = target_spectrum(transmittance(stock, np.array([0.006, 0, 0.004]), 10.0), W)
    price = {"dear blue": 3.0, "cheap blue": 1.0, "yellow": 2.0}
    answer = found(target, stock, price=price, most_dyes=2)
    assert list(answer.recipes[0].concentrations) == ["cheap blue", "yellow"]
    assert answer.recipes[0].cost == pytest.approx(0.006 * 1 + 0.004 * 2, rel=1e-4)
    turned = found(target, stock, price=price | {"cheap blue": 9.0}, most_dyes=2)
    assert list(turned.recipes[0].concentrations) == ["dear blue", "yellow"]
    assert found(target, stock).recipes[0].cost is None


@pytest.mark.parametrize(("bump", "first"), [(0.01, "cheap blue"), (0.1, "blue")], ids=["ΔE 0.002", "ΔE 0.017"])
def test_what_rounds_to_one_hundredth_ties_and_no_more(bump, first):
    stock = shelf([dye("blue"), nearly("blue", "cheap blue", bump), dye("yellow")])
    target = target_spectrum(transmittance(stock, np.array([0.006, 0, 0.005]), 10.0), W)
    best = found(target, stock, price={"blue": 5.0, "cheap blue": 1.0, "yellow": 1.0}, most_dyes=2).recipes[0]
    assert list(best.concentrations) == [first, "yellow"]


def test_what_is_within_the_limit_comes_before_what_ties_with_it_from_without():
    stock = shelf([nearly("blue", "dear", 0.0995), nearly("blue", "cheap", 0.1), dye("yellow")])
    plain = stock_of(("blue", "yellow"))
    target = target_spectrum(transmittance(plain, np.array([0.006, 0.005]), 10.0), W)
    price = {"dear": 5.0, "cheap": 1.0, "yellow": 1.0}
    either = sorted(float(r.delta_e.max()) for r in found(target, stock, most_dyes=2, keep=2).recipes)
    answer = found(target, stock, price=price, most_dyes=2, keep=2, limits=sum(either) / 2)
    assert [next(iter(recipe.concentrations)) for recipe in answer.recipes] == ["dear", "cheap"]
    assert [recipe.within for recipe in answer.recipes] == [True, False]


@pytest.mark.parametrize(("peak", "dyes"), [(1.8e-4, ["blue", "yellow"]), (1e-3, ["blue", "yellow", "red"])])
def test_a_trace_that_no_instrument_can_tell_is_no_part_of_a_recipe(peak, dyes):
    stock = stock_of(("blue", "yellow", "red"))
    c = np.array([0.006, 0.005, peak / PEAK[2]])
    answer = found(target_spectrum(transmittance(stock, c, 10.0), W), stock)
    assert list(answer.recipes[0].concentrations) == dyes


def test_prices_by_the_gram_reach_recipes_by_the_mole():
    stock = shelf([dye("blue", unit="mol/L", molar_mass=500.0)])
    answer = found(target_spectrum(transmittance(stock, np.array([0.006]), 10.0), W), stock, price={"blue": 2.0})
    assert answer.unit == "mol/L"
    assert answer.recipes[0].cost == pytest.approx(0.006 * 500 * 2, rel=1e-4)


def test_of_two_recipes_that_tie_the_one_with_fewer_dyes_comes_first():
    c = at({"blue": 0.006, "yellow": 0.005}, STOCK)
    answer = found(target_spectrum(transmittance(STOCK, c, 10.0), W))
    assert list(answer.recipes[0].concentrations) == ["blue", "yellow"]


def test_metamerism_of_a_recipe():
    target = target_spectrum(foreign_transmittance(0), W)
    best = found(target, limits=3.0).recipes[0]
    assert best.spread == pytest.approx(best.delta_e.max() - best.delta_e.min())
    pairs = [
        special_index(target.XYZ100[0], target.XYZ100[i], best.XYZ100[0], best.XYZ100[i], W.white[i]) for i in (1, 2)
    ]
    np.testing.assert_allclose(best.special_index, pairs, rtol=1e-12)
    assert np.isnan(found(target, limits=0.5).recipes[0].special_index).all()


def test_twins_on_the_shelf_do_no_harm():
    stock = shelf([dye("blue"), dye("blue", called="twin"), dye("yellow")])
    c = np.array([0.003, 0.003, 0.005])
    answer = found(target_spectrum(transmittance(stock, c, 10.0), W), stock)
    assert answer.recipes[0].delta_e.max() < 0.01
    assert len(answer.recipes[0].concentrations) == 2


def test_a_target_with_no_light_in_some_bands_is_taken():
    T = transmittance(STOCK, at({"blue": 0.04}, STOCK), 10.0)
    noisy = np.maximum(T, 1e-4) - 2e-4
    assert (noisy <= 0).any()
    assert found(target_spectrum(noisy, W)).reached


CLEAR = target_spectrum(np.full_like(NM, 0.5), W)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"path_length_mm": 0.0}, "path length 0 mm: it must be positive"),
        ({"bounds": {"green": (0, 1)}}, "bounds: unknown dye 'green': known are blue, yellow, red"),
        ({"bounds": {"blue": (0.2, 0.1)}}, "bounds 0.2 to 0.1 of blue"),
        ({"bounds": {"blue": (-0.1, 0.1)}}, "bounds -0.1 to 0.1 of blue"),
        ({"bounds": {"blue": (float("nan"), 0.1)}}, "bounds nan to 0.1 of blue"),
        ({"bounds": {"blue": (0, 0)}}, "bounds 0 to 0 of blue"),
        ({"fixed": {"green": 0.1}}, "fixed parts: unknown dye 'green'"),
        ({"fixed": {"blue": -0.1}}, "blue fixed at -0.1: a concentration is not negative"),
        ({"fixed": {"blue": 0.1}, "bounds": {"blue": (0, 1)}}, "blue is fixed and has bounds"),
        ({"fixed": dict.fromkeys(SIX, 0.001)}, "every dye is fixed: nothing is left to find"),
        ({"step": 0.0}, "step 0 for blue: a positive step"),
        ({"step": {"blue": 0.001}}, "step nan for yellow: a positive step is wanted for every free dye"),
        ({"step": {"green": 0.001}}, "steps: unknown dye 'green'"),
        ({"step": 0.1, "bounds": {"blue": (0.01, 0.05)}}, "no multiple of the step 0.1 lies within the bounds of blue"),
        ({"price": {"blue": 1.0}}, "no price for yellow, red, teal, violet, orange"),
        ({"price": dict.fromkeys(SIX, -1.0)}, "price -1 of blue: it cannot be negative"),
        ({"price": {"green": 1.0}}, "prices: unknown dye 'green'"),
        ({"most_dyes": 0}, "0 dyes, 5 recipes: at least one of each"),
        ({"keep": 0}, "3 dyes, 0 recipes: at least one of each"),
        ({"limits": 0.0}, "one positive number, or 3 of them"),
        ({"limits": (1.0, 1.0)}, "one positive number, or 3 of them"),
        ({"bounds": dict.fromkeys(SIX, (0.001, 0.01))}, "6 dyes have a lower bound above zero: a recipe may hold 3"),
        ({"weights": seen(wavelength_nm=NM[:-1])}, "weights and dyes stand on different grids"),
    ],
    ids=lambda value: " ".join(value) if isinstance(value, dict) else None,
)
def test_what_cannot_be_is_refused(options, message):
    with pytest.raises(InputError, match=message):
        found(CLEAR, **options)


def test_more_sets_than_can_be_searched_are_refused():
    stock = shelf([dye("blue", called=f"blue {i}") for i in range(40)])
    with pytest.raises(InputError, match="sets of up to 5 of 40 dyes: no more than 50000 are searched"):
        found(CLEAR, stock, most_dyes=5)


def test_a_dye_that_absorbs_nothing_here_is_refused():
    blank = dye("blue", called="glass")
    nothing = type(blank)("glass", NM, np.zeros_like(NM), "g/L", blank.independent, blank.common)
    with pytest.raises(InputError, match="glass absorbs nothing over 380–780 nm"):
        found(CLEAR, shelf([dye("red"), nothing]))


def test_a_black_with_a_trace_of_noise_below_zero_is_taken():
    one_lamp = seen(["D65"])
    target = target_Lab([[20.0, 0.0, 34.6]], one_lamp)
    assert -0.1 < target.XYZ100.min() < 0
    assert np.isfinite(found(target, weights=one_lamp).recipes[0].delta_e).all()


def test_a_price_by_the_gram_needs_a_molar_mass():
    with pytest.raises(InputError, match="a price by the gram for blue, per mol/L: its molar mass is not known"):
        found(CLEAR, shelf([dye("blue", unit="mol/L")]), price={"blue": 1.0})


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: target_spectrum(np.ones(3), W), r"a target of shape \(3,\): the dyes stand on 81 wavelengths"),
        (lambda: target_spectrum(np.full_like(NM, np.nan), W), "a value of the target is not a finite number"),
        (lambda: target_Lab([50, 0, 0], W), "one row of three is wanted for each of D65, A, FL11"),
        (lambda: target_Lab([[50, 0, 0], [120, 0, 0], [50, 0, 0]], W), "L\\* of 120: a solution lies between black"),
        (lambda: target_Lab([[50, 0, 0], [-3, 0, 0], [50, 0, 0]], W), "L\\* of -3"),
        (lambda: target_Lab([[20, 0, 0], [20, 0, 200], [20, 0, 0]], W), "L\\*a\\*b\\* 20, 0, 200 under A: .* negative"),
    ],
    ids=["shape", "not finite", "one row", "too light", "too dark", "no colour"],
)
def test_an_impossible_target_is_refused(make, message):
    with pytest.raises(InputError, match=message):
        make()
