"""Verdicts on batches: the rules, one-sided limits, guard bands, and what is refused. All data here is simulated."""

import numpy as np
import pytest
from helpers import VISIBLE_NM, one, replicated, simulated, smooth_transmittance

from chroma.batches import check, differences
from chroma.colours import predict
from chroma.decision import WORDS
from chroma.difference.formulas import FORMULAS, Formula
from chroma.off_target import off_targets
from chroma.reason import grounds, reason
from chroma.spectra import measured
from chroma.tolerance import COMPONENTS, Tolerance
from chroma.viewing import conditions
from observers.errors import InputError
from observers.illuminants import measured_lamp

LAMPS = ("D65", "A", "FL11")
VIEW = conditions(LAMPS, "10")
TRUE = smooth_transmittance(VISIBLE_NM, seed=31, count=1, narrowest_nm=80)[0]
TARGET = one(TRUE, name="target")
STRENGTHS = (1.0, 1.01, 1.05, 0.93, 1.2)
BATCHES = measured([f"x{s}" for s in STRENGTHS], VISIBLE_NM, np.stack([TRUE**s for s in STRENGTHS]), "transmittance")


def held(limit=1.0, **other):
    limits = dict.fromkeys(LAMPS, limit) if np.isscalar(limit) else dict(zip(LAMPS, limit, strict=True))
    return Tolerance(limits, **other)


# --- differences -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", FORMULAS)
def test_differences_are_those_of_the_formula_between_predicted_colours(name):
    checked = check(BATCHES, TARGET, held(formula=Formula(name)), VIEW)
    target, Lab = predict(TARGET, VIEW).Lab[0], predict(BATCHES, VIEW).Lab
    np.testing.assert_allclose(checked.delta_e, Formula(name).difference(target, Lab), rtol=0, atol=1e-12)
    np.testing.assert_allclose(checked.target_Lab, target, rtol=0, atol=1e-12)
    np.testing.assert_allclose(checked.Lab, Lab, rtol=0, atol=1e-12)
    parts = dict(zip(COMPONENTS, np.moveaxis(checked.parts, -1, 0), strict=True))
    np.testing.assert_allclose(parts["dL"], Lab[..., 0] - target[..., 0], rtol=0, atol=1e-12)
    np.testing.assert_allclose(parts["da"] ** 2 + parts["db"] ** 2, parts["dC"] ** 2 + parts["dH"] ** 2, atol=1e-9)
    assert checked.delta_e[0].max() < 1e-12  # the target itself


def test_target_and_batches_may_stand_on_their_own_grids():
    fine = np.arange(380.0, 781.0, 5.0)
    T = smooth_transmittance(fine, seed=31, count=1, narrowest_nm=80)[0]
    checked = check(BATCHES, one(T, wavelength_nm=fine), held(), VIEW)
    np.testing.assert_allclose(checked.delta_e, check(BATCHES, TARGET, held(), VIEW).delta_e, rtol=0, atol=2e-3)


def test_many_batches_are_judged_block_by_block_as_one_by_one():
    rng = np.random.default_rng(1)
    target_Lab = rng.uniform(20, 80, (3, 3))
    Lab = target_Lab + rng.normal(0, 2, (9001, 3, 3))
    delta_e, parts = differences(Formula(), target_Lab, Lab)
    for row in (0, 4095, 4096, 8192, 9000):
        some, some_parts = differences(Formula(), target_Lab, Lab[row : row + 1])
        np.testing.assert_allclose(delta_e[row], some[0], rtol=0, atol=1e-12)
        np.testing.assert_allclose(parts[row], some_parts[0], rtol=0, atol=1e-12)


def test_the_order_of_batches_never_matters():
    order = [3, 1, 4, 0, 2]
    mixed = check(BATCHES.take(order), TARGET, held(), VIEW)
    plain = check(BATCHES, TARGET, held(), VIEW)
    assert mixed.names == tuple(plain.names[i] for i in order)
    np.testing.assert_allclose(mixed.delta_e, plain.delta_e[order], rtol=0, atol=1e-12)
    np.testing.assert_array_equal(mixed.verdicts, plain.verdicts[order])


# --- verdicts --------------------------------------------------------------------------------------------------------


def test_simple_verdicts_each_lamp_by_its_own_limit_and_the_batch_by_its_worst():
    delta_e = check(BATCHES, TARGET, held(), VIEW).delta_e
    limits = delta_e[2] * [1.1, 0.9, 1.1]
    checked = check(BATCHES, TARGET, held(limits), VIEW)
    np.testing.assert_array_equal(checked.limits, limits)
    assert [WORDS[code] for code in checked.verdicts[2]] == ["pass", "fail", "pass"]
    assert WORDS[checked.worst[2]] == "fail"
    assert checked.counts() == {"batches": 5, "pass": 2, "fail": 3, "undecided": 0}
    assert checked.expanded is None
    assert checked.expanded_parts is None
    assert checked.within is None


def test_exactly_at_the_limit_is_within():
    delta_e = check(BATCHES, TARGET, held(), VIEW).delta_e
    checked = check(BATCHES, TARGET, held(delta_e[2]), VIEW)
    assert WORDS[checked.worst[2]] == "pass"
    assert WORDS[check(BATCHES, TARGET, held(np.nextafter(delta_e[2], 0)), VIEW).worst[2]] == "fail"


def test_a_guard_band_of_a_stated_uncertainty_leaves_some_undecided():
    delta_e = check(BATCHES, TARGET, held(), VIEW).delta_e[2]
    u = 0.1 * delta_e.min()
    for coverage in (1.0, 2.0, 3.0):
        guard = {"rule": "guard-band", "uncertainty": u, "coverage": coverage}
        for share, word in ((1.05, "pass"), (0.99, "undecided"), (-0.99, "undecided"), (-1.05, "fail")):
            limits = delta_e + share * coverage * u
            checked = check(BATCHES, TARGET, held(limits, **guard), VIEW)
            assert [WORDS[code] for code in checked.verdicts[2]] == [word] * 3
            np.testing.assert_allclose(checked.expanded, coverage * u, rtol=1e-14)
            np.testing.assert_allclose(checked.expanded_parts, coverage * u, rtol=1e-14)
            assert checked.expanded_parts.shape == (5, 3, 5)


def test_the_simple_rule_takes_no_account_of_uncertainty_but_tells_it():
    delta_e = check(BATCHES, TARGET, held(), VIEW).delta_e[2]
    checked = check(BATCHES, TARGET, held(delta_e * 1.0001, uncertainty=0.5), VIEW)
    assert WORDS[checked.worst[2]] == "pass"
    np.testing.assert_allclose(checked.expanded, 1.0, rtol=1e-14)
    assert ((checked.within[2] > 0.1) & (checked.within[2] < 0.6)).all()
    assert (checked.within[:, 0].argmax(), checked.within[:, 0].argmin()) == (0, 4)
    assert any("stated for ΔE" in note for note in checked.notes)


def test_a_guard_band_without_an_uncertainty_is_refused():
    with pytest.raises(InputError, match="a guard band without an uncertainty: neither replicates nor a stated"):
        check(BATCHES, TARGET, held(rule="guard-band"), VIEW)


def test_a_guard_band_from_replicates_with_the_factor_of_few_readings():
    rng = np.random.default_rng(5)
    batch = replicated("b", TRUE**1.05, VISIBLE_NM, readings=3, noise=0.002, rng=rng)
    checked = check(batch, TARGET, held(rule="guard-band"), VIEW)
    # 2 degrees of freedom: Student's t of 95.45 % is 4.53
    assert any("U = 4.53 × u, u from replicates pooled over all samples (2 degrees" in note for note in checked.notes)
    limits = checked.delta_e[0] + 0.99 * checked.expanded[0]
    assert WORDS[check(batch, TARGET, held(limits, rule="guard-band"), VIEW).worst[0]] == "undecided"
    limits = checked.delta_e[0] + 1.01 * checked.expanded[0]
    assert WORDS[check(batch, TARGET, held(limits, rule="guard-band"), VIEW).worst[0]] == "pass"


def test_a_stated_uncertainty_goes_before_replicates():
    rng = np.random.default_rng(5)
    batch = replicated("b", TRUE**1.05, VISIBLE_NM, readings=3, noise=0.002, rng=rng)
    checked = check(batch, TARGET, held(rule="guard-band", uncertainty=0.25), VIEW)
    np.testing.assert_allclose(checked.expanded, 0.5, rtol=1e-14)


# --- one-sided limits ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("component", COMPONENTS)
@pytest.mark.parametrize("end", ["min", "max"])
def test_each_signed_limit_fails_on_its_own_side_and_passes_at_the_limit(component, end):
    plain = check(BATCHES, TARGET, held(100.0), VIEW)
    value = plain.parts[4, 0, COMPONENTS.index(component)]
    sign = 1 if end == "max" else -1
    for limit, word in ((value, "pass"), (value + 0.01 * sign, "pass"), (value - 0.01 * sign, "fail")):
        tolerance = held(100.0, one_sided={f"{component}_{end}": limit})
        checked = check(BATCHES, TARGET, tolerance, VIEW)
        assert WORDS[checked.verdicts[4, 0]] == word
        if word == "fail":
            assert reason(grounds(checked), 4, 0).startswith(f"{component} {value:+.2f} breaks {component}_{end} ")


def test_a_signed_limit_has_its_guard_band_too():
    plain = check(BATCHES, TARGET, held(100.0), VIEW)
    dL = plain.parts[4, 0, 0]
    for limit, word in ((dL + 0.41, "pass"), (dL + 0.39, "undecided"), (dL - 0.39, "undecided"), (dL - 0.41, "fail")):
        guard = held(100.0, rule="guard-band", uncertainty=0.2, one_sided={"dL_max": limit})
        assert WORDS[check(BATCHES, TARGET, guard, VIEW).verdicts[4, 0]] == word


def test_a_signed_limit_is_added_to_the_difference_never_instead_of_it():
    checked = check(BATCHES, TARGET, held(0.01, one_sided={"dL_max": 100.0}), VIEW)
    assert WORDS[checked.worst[4]] == "fail"


@pytest.mark.parametrize(
    ("limit", "words"), [(2.0, "is within the limit 2"), (0.5, "is above the limit 0.5")], ids=["pass", "fail"]
)
def test_the_reason_says_what_decided(limit, words):
    checked = check(BATCHES, TARGET, held(limit), VIEW)
    row = 1 if limit == 2.0 else 4
    assert reason(grounds(checked), row, 0) == f"ΔE {checked.delta_e[row, 0]:.2f} {words}"


def test_the_reason_of_an_undecided_batch_gives_its_uncertainty():
    delta_e = check(BATCHES, TARGET, held(), VIEW).delta_e[2]
    checked = check(BATCHES, TARGET, held(delta_e, rule="guard-band", uncertainty=0.1), VIEW)
    assert reason(grounds(checked), 2, 0) == f"ΔE {delta_e[0]:.2f} ± 0.20 is too near the limit {delta_e[0]:g}"


# --- what cannot be checked ------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("batches", "target", "message"),
    [
        (BATCHES, simulated(["a", "b"]), r"2 samples in the target: a batch is held to one. Name it: FILE:NAME"),
        (BATCHES.take([]), TARGET, "no batches to check"),
        (BATCHES, simulated(["a"], quantity="reflectance"), "the target is reflectance, the batches are transmittance"),
        (simulated(["a"], quantity="counts"), TARGET, "counts cannot become transmittance"),
        (BATCHES, one(TRUE[2:-8], wavelength_nm=VISIBLE_NM[2:-8]), None),
        (BATCHES, one(TRUE[3:], wavelength_nm=VISIBLE_NM[3:]), "spectra over 410–780 nm: colour needs 400–700 nm"),
    ],
    ids=["two targets", "no batches", "quantities", "counts", "400-700 is enough", "410 is not"],
)
def test_what_cannot_be_checked_is_refused(batches, target, message):
    if message is None:
        assert any("not measured" in note for note in check(batches, target, held(), VIEW).notes)
        return
    with pytest.raises(InputError, match=message):
        check(batches, target, held(), VIEW)


def test_absorbance_and_transmittance_are_the_same_colour():
    A = measured(BATCHES.names, VISIBLE_NM, -np.log10(BATCHES.values), "absorbance")
    np.testing.assert_allclose(
        check(A, TARGET, held(), VIEW).delta_e, check(BATCHES, TARGET, held(), VIEW).delta_e, atol=1e-9
    )


def test_a_lamp_of_ones_own_is_held_to_the_limit_of_its_name():
    lamp = measured_lamp("garden", VISIBLE_NM, np.linspace(1, 3, len(VISIBLE_NM)))
    checked = check(BATCHES, TARGET, Tolerance({"garden": 0.7}), conditions([lamp], "2"))
    np.testing.assert_array_equal(checked.limits, [0.7])
    assert "garden" in str(checked.conditions)


# --- in words --------------------------------------------------------------------------------------------------------


def test_off_target_in_words():
    checked = check(BATCHES, TARGET, held(), VIEW)
    assert off_targets(checked)[0] == "on target"
    assert "stronger" in off_targets(checked)[4]
    assert "darker" in off_targets(checked)[4] or "stronger" in off_targets(checked)[4]
    assert "weaker" in off_targets(checked)[3]
