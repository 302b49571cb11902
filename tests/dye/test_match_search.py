"""What the search for recipes is made of: slopes, least squares, least worst, least amount, multiples of a step."""

import itertools

import numpy as np
import pytest
from matching_world import NM, foreign_transmittance, seen, stock_of

from chroma.difference.formulas import Formula
from chroma.matching.goal import colour_and_slopes, goal, target_spectrum, with_gradient
from chroma.matching.mixture import Mixtures
from chroma.matching.rounding import rounded
from chroma.matching.search import least, polish, settle
from chroma.matching.start import coarse_start, spectral_start

W = seen()
STOCK = stock_of(("blue", "yellow", "red"))
DIRECTIONS = STOCK.absorptivity / STOCK.absorptivity.max(axis=1, keepdims=True)
BASE = 0.02 + 0.05 * np.exp(-(((NM - 620) / 60) ** 2))  # a simulated batch's own absorbance


def mixtures(*, water=False, sets=((0, 1), (1, 2)), base=BASE, high=3.0):
    k = len(sets[0]) + water
    return Mixtures(base, DIRECTIONS[np.array(sets)], np.zeros((len(sets), k)), np.full((len(sets), k), high), water)


def goal_for(T, formula=None, limits=1.0, one_sided=()):
    return goal(target_spectrum(T, W), W, formula or Formula(), limits, one_sided)


def unmet(seed=0, **options):
    return goal_for(foreign_transmittance(seed), **options)


@pytest.mark.parametrize("water", [False, True], ids=["dyes", "dyes and water"])
@pytest.mark.parametrize("deep", [1.0, 6.0], ids=["pale", "near black"])
def test_slopes_of_colour_are_those_of_differences(water, deep):
    mixed = mixtures(water=water, base=BASE * deep * 4, high=9.0)
    x = np.linspace(0.1, 0.4, mixed.low.size).reshape(mixed.low.shape) * deep
    _, slopes = colour_and_slopes(W, *mixed.absorbance_and_slopes(x))
    aim = unmet()
    for i in range(x.shape[1]):
        step = 1e-5 * np.eye(x.shape[1])[i]
        by_difference = (aim.Lab(mixed.absorbance(x + step)) - aim.Lab(mixed.absorbance(x - step))) / 2e-5
        np.testing.assert_allclose(slopes[:, i], by_difference, rtol=1e-6, atol=1e-6)


def test_water_thins_base_and_dyes_alike():
    mixed = mixtures(water=True, sets=((0,),))
    A = mixed.absorbance(np.array([[0.5, 0.25]]))[0]
    np.testing.assert_allclose(A, (BASE + 0.5 * DIRECTIONS[0]) / 1.25, rtol=1e-12)


@pytest.mark.parametrize("formula", [Formula(), Formula("cie1976"), Formula("cmc"), Formula("din99o")], ids=str)
def test_gradient_and_metric_are_those_of_the_formula(formula):
    aim = unmet(formula=formula, limits=(1.0, 2.0, 0.5))
    delta = np.array([[0.02, -0.01, 0.03], [0.01, 0.02, -0.02], [-0.02, 0.01, 0.01]])
    squares, uphill = with_gradient(aim.squares, aim.target.Lab + delta)
    np.testing.assert_allclose(squares, np.einsum("li,lij,lj->l", delta, aim.metric, delta), rtol=0.01)
    np.testing.assert_allclose(uphill, 2 * np.einsum("lij,lj->li", aim.metric, delta), rtol=0.02, atol=1e-3)


@pytest.mark.parametrize("seed", range(4))
def test_least_squares_are_those_of_another_solver(seed):
    from scipy.optimize import minimize

    aim, mixed = unmet(seed), mixtures(sets=((0, 1, 2),))
    ours = settle(aim, mixed, coarse_start(aim, mixed))[0]

    def total(x):
        return float(aim.squares(aim.Lab(mixed.absorbance(x[None]))).sum())

    theirs = minimize(total, ours + 0.05, method="L-BFGS-B", bounds=[(0, 3)] * 3)
    assert total(ours) <= theirs.fun * (1 + 1e-4)
    np.testing.assert_array_less(-1e-15, ours)


def test_both_starts_lead_to_one_place():
    T = 10.0 ** -(np.array([0.6, 0.4]) @ DIRECTIONS[:2])
    aim, mixed = goal_for(T), mixtures(base=np.zeros_like(NM), sets=((0, 1),))
    spectral = spectral_start(W, T, DIRECTIONS, np.zeros_like(NM), np.array([[0, 1]]))
    np.testing.assert_allclose(spectral, [[0.6, 0.4]], rtol=1e-6)
    np.testing.assert_allclose(settle(aim, mixed, coarse_start(aim, mixed)), [[0.6, 0.4]], rtol=1e-5)


@pytest.mark.parametrize("depth", [0.05, 0.4, 2.5])
def test_the_lattice_begins_near_any_depth(depth):
    mixed = mixtures(sets=((0,),), base=np.zeros_like(NM))
    start = coarse_start(goal_for(10.0 ** -(depth * DIRECTIONS[0])), mixed)[0, 0]
    assert depth / 1.25 < start < depth * 1.25


@pytest.mark.parametrize("limit", [1.0, 100.0])
@pytest.mark.parametrize("seed", range(4))
def test_polish_lessens_the_worst_and_no_neighbour_is_better(seed, limit):
    # wide limits make small ratios, which are polished all the same
    aim, mixed = unmet(seed, limits=limit), mixtures(sets=((0, 1, 2),))
    squares = settle(aim, mixed, coarse_start(aim, mixed))[0]
    best = polish(aim, mixed, squares)

    def worst(x):
        return limit * aim.worst(aim.Lab(mixed.absorbance(np.clip(x, 0, 3)[None, ...])))[0]

    assert worst(best[None])[0] < worst(squares[None])[0] - 1e-3
    around = best + np.random.default_rng(seed).normal(0, 0.01, (500, 3))
    assert worst(around).min() > worst(best[None])[0] - 1e-4


def test_a_one_sided_limit_is_held_by_the_polish():
    # dL of the sample may not be below +0.5 under any lamp, which the least worst would break
    mixed, free = mixtures(sets=((0, 1, 2),)), unmet()
    aim = unmet(one_sided=((0, -1.0, 0.5),))
    start = settle(aim, mixed, coarse_start(aim, mixed))[0]
    plain, held = polish(free, mixed, start), polish(aim, mixed, start)
    dL = [aim.Lab(mixed.absorbance(x[None]))[0, :, 0] - aim.target.Lab[:, 0] for x in (plain, held)]
    assert dL[0].min() < 0.45
    assert dL[1].min() > 0.5 - 1e-4
    assert aim.worst(aim.Lab(mixed.absorbance(held[None])))[0] > aim.worst(aim.Lab(mixed.absorbance(plain[None])))[0]


def test_least_takes_no_more_than_it_must():
    T = 10.0 ** -(BASE + np.array([0.06, 0.05]) @ DIRECTIONS[:2])
    aim, mixed, cost = goal_for(T), mixtures(sets=((0, 1),)), np.array([1.0, 2.0])
    best = polish(aim, mixed, settle(aim, mixed, np.zeros((1, 2)))[0])
    small = least(aim, mixed, best, 0.5, cost)

    def worst(x):
        return aim.worst(aim.Lab(mixed.absorbance(x[None])))[0]

    assert worst(small[None])[0] == pytest.approx(0.5, abs=1e-4)
    axis = np.linspace(0, 0.08, 161)
    lattice = np.array(list(itertools.product(axis, axis)))
    allowed = lattice[worst(lattice) <= 0.5]
    assert cost @ small <= (allowed @ cost).min() + 1e-6
    assert cost @ small >= (allowed @ cost).min() - 0.002  # a step of the lattice


def test_rounding_finds_what_rounding_each_by_itself_misses():
    aim, mixed, step = unmet(), mixtures(sets=((0, 1, 2),)), np.array([0.1, 0.1, 0.1])
    best = polish(aim, mixed, settle(aim, mixed, coarse_start(aim, mixed))[0])

    def worst(x):
        return aim.worst(aim.Lab(mixed.absorbance(np.atleast_2d(x)[None])))[0]

    ours = worst(rounded(aim, mixed, best, step))[0]
    plain = worst(np.clip(np.round(best / step), 0, 30) * step)[0]
    lattice = np.array(list(itertools.product(range(9), repeat=3))) * 0.1
    assert ours == pytest.approx(worst(lattice).min(), abs=1e-12)
    assert ours < plain - 1e-3
