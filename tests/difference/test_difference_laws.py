"""Laws that every difference keeps, and those that only some do."""

import numpy as np
import pytest
from helpers import Labs, finite, random_Lab, seeds
from hypothesis import assume, given
from hypothesis import strategies as st

from chroma.difference.ciede2000 import ciede2000
from chroma.difference.classic import cie94, cie1976, cmc, components
from chroma.difference.din99o import din99o, din99o_space
from chroma.difference.formulas import FORMULAS, Formula
from observers.errors import InputError

ALL = [Formula(name) for name in FORMULAS]
SYMMETRIC = [Formula(name) for name in ("cie1976", "ciede2000", "din99o")]
formulas = st.sampled_from(ALL)


@given(formula=formulas, Lab=Labs)
def test_a_colour_differs_from_itself_by_nothing(formula, Lab):
    assert formula.difference(Lab, Lab) == 0


@given(formula=formulas, one=Labs, other=Labs)
def test_differences_are_not_negative_and_only_nothing_is_nothing(formula, one, other):
    far = formula.difference(one, other)
    assert np.isfinite(far)
    assert far >= 0
    assert (far > 0) or np.abs(one - other).max() < 1e-6


@given(formula=st.sampled_from(SYMMETRIC), one=Labs, other=Labs)
def test_symmetric_formulas_are_symmetric(formula, one, other):
    assert formula.difference(one, other) == pytest.approx(formula.difference(other, one), rel=1e-12, abs=1e-12)


@pytest.mark.parametrize("name", ["cie94", "cie94-textile", "cmc"])
def test_the_others_take_their_weights_from_the_target(name):
    vivid, dull = np.array([50.0, 60.0, 10.0]), np.array([50.0, 30.0, 5.0])
    formula = Formula(name)
    assert formula.difference(vivid, dull) < 0.9 * formula.difference(dull, vivid)


@given(target=Labs, sample=Labs)
def test_components_hold_together(target, sample):
    dL, da, db, dC, dH = components(target, sample)
    assert da**2 + db**2 == pytest.approx(dC**2 + dH**2, rel=1e-9, abs=1e-9)
    assert dL == sample[0] - target[0]
    assert cie1976(target, sample) == pytest.approx(np.sqrt(dL**2 + dC**2 + dH**2), rel=1e-9, abs=1e-9)


@given(target=Labs, sample=Labs)
def test_components_exchanged_change_their_sign(target, sample):
    assume(np.hypot(*(target[1:] + sample[1:])) > 1e-6)  # opposite hues may be turned either way round
    np.testing.assert_allclose(components(sample, target), -components(target, sample), rtol=1e-9, atol=1e-9)


@pytest.mark.parametrize(("turn_deg", "sign"), [(0.001, 1), (30, 1), (179, 1), (-0.001, -1), (-30, -1), (-179, -1)])
@pytest.mark.parametrize("hue_deg", [0, 45, 179.9, 200, 359.999])
def test_the_hue_difference_is_positive_where_the_angle_grows(hue_deg, turn_deg, sign):
    h1, h2 = np.radians([hue_deg, hue_deg + turn_deg])
    target, sample = np.array([50, 20 * np.cos(h1), 20 * np.sin(h1)]), np.array([50, 20 * np.cos(h2), 20 * np.sin(h2)])
    dH = components(target, sample)[4]
    assert dH == pytest.approx(40 * np.sin(np.radians(turn_deg) / 2), rel=1e-9)
    assert np.sign(dH) == sign


def test_near_hues_keep_their_digits():
    # the textbook form, the square root of a difference of squares, loses all of them here
    target = np.array([50.0, 30.0, 40.0])
    sample = np.array([50.0, 30.0 - 40e-9, 40.0 + 30e-9])
    assert components(target, sample)[4] == pytest.approx(50e-9, rel=1e-6)


def test_opposite_hues_keep_their_digits():
    target, sample = np.array([50.0, 30.0, 0.0]), np.array([50.0, -20.0, 1e-9])
    assert components(target, sample)[4] == pytest.approx(2 * np.sqrt(600), rel=1e-12)


def test_beside_a_grey_there_is_no_hue_difference():
    grey, red = np.array([50.0, 0.0, 0.0]), np.array([50.0, 30.0, 10.0])
    for pair in ((grey, red), (red, grey)):
        assert components(*pair)[4] == 0


@given(seed=seeds, formula=formulas)
def test_order_of_samples_and_shapes_never_matter(seed, formula):
    target, sample = random_Lab(seed, 24), random_Lab(seed + 1, 24)
    order = np.random.default_rng(seed).permutation(24)
    before = target.copy(), sample.copy()
    far = formula.difference(target, sample)
    np.testing.assert_allclose(formula.difference(target[order], sample[order]), far[order], rtol=1e-12)
    folded = formula.difference(target.reshape(4, 6, 3), sample.reshape(4, 6, 3))
    np.testing.assert_allclose(folded, far.reshape(4, 6), rtol=1e-12)
    to_one = formula.difference(target[0], sample)
    np.testing.assert_allclose(to_one, formula.difference(np.tile(target[0], (24, 1)), sample), rtol=1e-12)
    np.testing.assert_array_equal(target, before[0])
    np.testing.assert_array_equal(sample, before[1])


@pytest.mark.parametrize("formula", ALL, ids=str)
def test_single_precision_colours_agree(formula):
    target, sample = random_Lab(1, 500), random_Lab(2, 500)
    narrow = formula.difference(target.astype(np.float32), sample.astype(np.float32))
    np.testing.assert_allclose(narrow, formula.difference(target, sample), rtol=1e-4, atol=1e-4)


@pytest.mark.parametrize("formula", ALL, ids=str)
def test_small_differences_are_smooth(formula):
    # where no formula has a join, doubling a small step doubles the difference
    target = np.array([52.0, 21.0, 17.0])
    step = np.array([0.01, -0.02, 0.015])
    one, two = formula.difference(target, target + step), formula.difference(target, target + 2 * step)
    assert two == pytest.approx(2 * one, rel=1e-3)


# --- parameters ------------------------------------------------------------------------------------------------------

TARGET, LIGHTER = np.array([50.0, 20.0, 10.0]), np.array([53.0, 20.0, 10.0])
STRONGER = TARGET * [1, 1.2, 1.2]
TURNED = np.array([50.0, 20 * np.cos(0.3) - 10 * np.sin(0.3), 20 * np.sin(0.3) + 10 * np.cos(0.3)])


@pytest.mark.parametrize("function", [cie94, ciede2000], ids=["cie94", "ciede2000"])
@pytest.mark.parametrize(
    ("name", "sample"), [("kL", LIGHTER), ("kC", STRONGER), ("kH", TURNED)], ids=["kL", "kC", "kH"]
)
def test_a_parametric_factor_divides_its_own_part(function, name, sample):
    # in the stretched a* of CIEDE2000 a turn of the hue changes chroma a little
    plain, near = function(TARGET, sample), 0.03 if function is ciede2000 and name == "kH" else 1e-3
    assert function(TARGET, sample, **{name: 2.0}) == pytest.approx(plain / 2, rel=near)
    others = {key: 2.0 for key in ("kL", "kC", "kH") if key != name}
    assert function(TARGET, sample, **others) == pytest.approx(plain, rel=near)


def test_l_and_c_of_cmc_divide_their_own_parts():
    assert cmc(TARGET, LIGHTER, l=2.0, c=1.0) == pytest.approx(cmc(TARGET, LIGHTER, l=1.0, c=1.0) / 2)
    assert cmc(TARGET, STRONGER, l=2.0, c=2.0) == pytest.approx(cmc(TARGET, STRONGER, l=2.0, c=1.0) / 2, rel=1e-3)
    assert cmc(TARGET, LIGHTER) == cmc(TARGET, LIGHTER, l=2.0, c=1.0)


def test_factors_of_din99o():
    assert din99o(TARGET, LIGHTER, kE=2.0) == pytest.approx(din99o(TARGET, LIGHTER) / 2, rel=1e-9)
    L, a, b = din99o_space(TARGET)
    halved = din99o_space(TARGET, kCH=2.0)
    np.testing.assert_allclose(halved, [L, a / 2, b / 2], rtol=1e-12)
    np.testing.assert_allclose(din99o_space(TARGET, kE=2.0), np.array([L, a, b]) / 2, rtol=1e-12)


@pytest.mark.parametrize("hue_deg", [163.9, 164.0, 164.1, 344.9, 345.0, 345.1])
def test_cmc_changes_its_hue_weight_at_164_and_345_degrees(hue_deg):
    # ISO 105-J03: T = 0.56 + |0.2 cos(h + 168)| from 164 to 345 degrees, else 0.36 + |0.4 cos(h + 35)|
    h = np.radians(hue_deg)
    T = (
        0.56 + abs(0.2 * np.cos(h + np.radians(168)))
        if 164 <= hue_deg <= 345
        else 0.36 + abs(0.4 * np.cos(h + np.radians(35)))
    )
    C = 40.0
    h += {164.0: 1e-9, 345.0: -1e-9}.get(hue_deg, 0.0)  # the edge itself belongs inside, and may round either way
    target = np.array([50.0, C * np.cos(h), C * np.sin(h)])
    sample = np.array([50.0, C * np.cos(h + 0.01), C * np.sin(h + 0.01)])
    F = np.sqrt(C**4 / (C**4 + 1900))
    S_H = (0.0638 * C / (1 + 0.0131 * C) + 0.638) * (F * T + 1 - F)
    assert cmc(target, sample) == pytest.approx(2 * C * np.sin(0.005) / S_H, rel=1e-6)


@pytest.mark.parametrize(("L", "S_L"), [(15.9, 0.511), (16.0, 0.040975 * 16 / (1 + 0.01765 * 16)), (5.0, 0.511)])
def test_cmc_has_one_lightness_weight_below_16(L, S_L):
    target, sample = np.array([L, 0.0, 0.0]), np.array([L + 1, 0.0, 0.0])
    assert cmc(target, sample, l=1.0) == pytest.approx(1 / S_L, rel=1e-12)


# --- formulas by name ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("formula", "expected"),
    [
        (Formula("ciede2000", k=(2, 1.5, 0.5)), ciede2000(TARGET, STRONGER + 1, kL=2, kC=1.5, kH=0.5)),
        (Formula("cie94", k=(2, 1.5, 0.5)), cie94(TARGET, STRONGER + 1, kL=2, kC=1.5, kH=0.5)),
        (Formula("cie94-textile"), cie94(TARGET, STRONGER + 1, kL=2, K1=0.048, K2=0.014)),
        (Formula("cmc", l_c=(1, 1)), cmc(TARGET, STRONGER + 1, l=1, c=1)),
        (Formula("cmc"), cmc(TARGET, STRONGER + 1, l=2, c=1)),
        (Formula("din99o"), din99o(TARGET, STRONGER + 1)),
        (Formula("cie1976"), cie1976(TARGET, STRONGER + 1)),
        (Formula(), ciede2000(TARGET, STRONGER + 1)),
    ],
    ids=str,
)
def test_a_formula_by_name_is_its_function(formula, expected):
    assert formula.difference(TARGET, STRONGER + 1) == expected


@pytest.mark.parametrize(
    ("formula", "text"),
    [
        (Formula(), "ciede2000"),
        (Formula("ciede2000", k=(1, 1, 1)), "ciede2000"),
        (Formula("ciede2000", k=(2, 1, 1)), "ciede2000(2:1:1)"),
        (Formula("cmc"), "cmc(2:1)"),
        (Formula("cmc", l_c=(1, 1)), "cmc(1:1)"),
        (Formula("cie94-textile"), "cie94-textile"),
    ],
)
def test_a_formula_says_what_it_is(formula, text):
    assert str(formula) == text


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (
            {"name": "cie2000"},
            "unknown formula 'cie2000': known are cie1976, cie94, cie94-textile, ciede2000, cmc, din99o",
        ),
        ({"name": "cmc", "k": (1, 1, 1)}, "kL:kC:kH does not apply to cmc: it belongs to ciede2000 and cie94"),
        ({"name": "cie94-textile", "k": (1, 1, 1)}, "does not apply to cie94-textile"),
        ({"name": "ciede2000", "l_c": (2, 1)}, "l:c does not apply to ciede2000: it belongs to cmc"),
        ({"name": "cmc", "l_c": (0, 1)}, "parameters of cmc must be positive"),
        ({"name": "ciede2000", "k": (1, -1, 1)}, "parameters of ciede2000 must be positive"),
        ({"name": "ciede2000", "k": (1, float("nan"), 1)}, "must be positive"),
        ({"name": "ciede2000", "k": (1, 1, float("inf"))}, "must be positive"),
        ({"name": "ciede2000", "k": (1, 100.0, 1)}, "must be positive"),
    ],
)
def test_what_a_formula_does_not_take_is_refused(arguments, message):
    with pytest.raises(InputError, match=message):
        Formula(**arguments)


@given(hue_deg=finite(0, 360))
def test_ciede2000_turns_the_short_way_round(hue_deg):
    # hues a degree apart on either side of 0 are as near as anywhere else: no jump at the seam
    h = np.radians([hue_deg - 0.5, hue_deg + 0.5])
    one, other = (np.array([50.0, 40 * np.cos(angle), 40 * np.sin(angle)]) for angle in h)
    assert ciede2000(one, other) < 0.7
