"""Against the files of numbers that other programs computed: see the header of each."""

import numpy as np
import pytest
from helpers import columns, read_cross, read_gold
from scipy.integrate import quad

from chroma.colour.adaptation import adapted
from chroma.colour.dominant import dominant
from chroma.colour.spaces import Lab_from_XYZ, XYZ_from_Lab, uv_prime, xyY_from_XYZ
from chroma.decision import conformance_probability, guard_banded_limit, probability_within
from chroma.difference.classic import cie1976
from chroma.difference.formulas import Formula
from chroma.difference.metameric_index import special_index
from chroma.inconstancy import corresponding, degree_of_adaptation, inconstancy
from observers.human import observer
from observers.illuminants import A_C2_NM_K, A_TEMPERATURE_K, PLANCK_C2_M_K, blackbody, illuminant, power_at
from observers.weights import weights

FULL_NM = np.arange(360.0, 831.0)
PAIRS = read_gold("ciede2000_sharma.csv")
TARGET, SAMPLE = columns(PAIRS, "L1", "a1", "b1"), columns(PAIRS, "L2", "a2", "b2")
OTHERS = read_cross("delta_e_other_formulas.csv")


@pytest.mark.parametrize(
    ("column", "formula", "tolerance"),
    [
        ("dE76", Formula("cie1976"), 5e-7),
        ("dE94_graphic", Formula("cie94"), 5e-7),
        ("dE94_textile", Formula("cie94-textile"), 5e-7),
        ("CMC_1_1", Formula("cmc", l_c=(1, 1)), 5e-7),
        ("CMC_2_1", Formula("cmc"), 5e-7),
        ("DIN99o", Formula("din99o"), 6e-6),  # the header: own code and another program's agree to 6e-6
    ],
    ids=lambda value: value if isinstance(value, str) else "",
)
def test_other_formulas_on_the_34_pairs(column, formula, tolerance):
    expected = columns(OTHERS, column)[:, 0]
    np.testing.assert_allclose(formula.difference(TARGET, SAMPLE), expected, rtol=0, atol=tolerance)


LIGHTNESS = read_cross("lightness.csv")


@pytest.mark.parametrize("row", LIGHTNESS, ids=[f"Y {row['Y']}" for row in LIGHTNESS])
def test_lightness_and_back(row):
    white, Y, L = np.full(3, 100.0), float(row["Y"]), float(row["Lstar"])
    np.testing.assert_allclose(Lab_from_XYZ(np.full(3, Y), white), [L, 0, 0], rtol=0, atol=5e-10)
    np.testing.assert_allclose(XYZ_from_Lab(np.array([L, 0, 0]), white), np.full(3, Y), rtol=0, atol=5e-9)


DOMINANT = read_cross("dominant_wavelength.csv")


@pytest.mark.parametrize("row", DOMINANT, ids=[f"{row['lambda_nm']} nm" for row in DOMINANT])
def test_dominant_wavelength_and_purities(row):
    found = dominant(columns([row], "x", "y")[0], columns([row], "xn", "yn")[0], observer("2"))
    assert found.wavelength_nm == pytest.approx(float(row["lambda_nm"]), rel=0, abs=0.05)
    assert found.excitation_purity == pytest.approx(float(row["pe"]), rel=0, abs=5e-4)
    colorimetric = float(row["pc"] or "nan")  # a purple has none
    assert found.colorimetric_purity == pytest.approx(colorimetric, rel=0, abs=5e-4, nan_ok=True)


CAT16 = [row for row in read_cross("chromatic_adaptation.csv") if row["transform"] == "CAT16"]
WHITE_D65, WHITE_D50 = np.array([95.047, 100.0, 108.883]), np.array([96.422, 100.0, 82.521])  # the file's header


def test_cat16_of_a_colour():
    (row,) = (row for row in CAT16 if row["what"].startswith("XYZ 40 30 20"))
    got = adapted(np.array([40.0, 30.0, 20.0]), WHITE_D65, WHITE_D50)
    np.testing.assert_allclose(got, columns([row], "v1", "v2", "v3")[0], rtol=0, atol=float(row["tol"]))


def test_cat16_matrix():
    rows = [row for row in CAT16 if row["what"].startswith("matrix")]
    got = adapted(np.eye(3), WHITE_D65, WHITE_D50).T
    np.testing.assert_allclose(got, columns(rows, "v1", "v2", "v3"), rtol=0, atol=float(rows[0]["tol"]))


RULES = {row["what"]: row for row in read_cross("decision_rules.csv")}


def rule(start):
    (row,) = (row for what, row in RULES.items() if what.startswith(start))
    return float(row["value"]), max(float(row["tol"]), 1e-12)


@pytest.mark.parametrize(
    ("start", "value", "u", "lower", "upper"),
    [
        ("conformance probability two-sided", 13.6, 1.8, 12.5, 16.3),
        ("one-sided upper: y=TU-2u", 10 - 2 * 0.3, 0.3, -np.inf, 10),
        ("w=1.64485u", 10 - 1.64485 * 0.3, 0.3, -np.inf, 10),
        ("w=0 at limit", 10, 0.3, -np.inf, 10),
        ("dE00 example", 0.80, 0.15, -np.inf, 1.0),
    ],
    ids=["two-sided", "guard of 2u", "guard of 1.64u", "at the limit", "difference"],
)
def test_conformance_probability(start, value, u, lower, upper):
    expected, tolerance = rule(start)
    got = conformance_probability(np.float64(value), np.float64(u), lower=lower, upper=upper)
    assert got == pytest.approx(expected, rel=0, abs=max(tolerance, 1e-9))


def test_guard_banded_limit():
    expected, tolerance = rule("guard-banded limit")
    assert guard_banded_limit(1.0, 2 * 0.15) == pytest.approx(expected, rel=0, abs=tolerance)


def within(limit, difference, sd):
    return float(probability_within(np.float64(difference), np.float64(sd), np.float64(limit)))


def test_mean_of_a_difference_of_nothing_is_that_of_maxwell():
    # the mean of what cannot be negative is the integral of the probability to exceed
    expected, tolerance = rule("expected |dE| bias")
    mean, _ = quad(lambda limit: 1 - within(limit, 0.0, 0.1), 0, 2, points=[0.2, 0.5], epsabs=1e-12)
    assert mean == pytest.approx(expected, rel=0, abs=tolerance)


def test_quantile_of_a_difference_of_nothing():
    quantile, _ = rule("same, 95 % quantile")
    assert within(quantile, 0.0, 0.1) == pytest.approx(0.95, rel=0, abs=1e-8)


def test_probability_within_of_a_shift():
    expected, tolerance = rule("true shift 1.0 on one axis")
    assert within(1.0, 1.0, 0.3) == pytest.approx(expected, rel=0, abs=tolerance)


METAMERISM = {row["quantity"]: row for row in read_cross("metamerism_inconstancy.csv")}
# The four colours stand in the file's header, the two whites in its rows.
STANDARD_D65, STANDARD_A = np.array([7.6576, 10.7116, 5.0731]), np.array([8.96442, 10.1878, 1.6663])
SAMPLE_D65, SAMPLE_A = np.array([7.6933, 10.5616, 5.54474]), np.array([8.56438, 10.0324, 1.9315])
WHITE_D65_10, WHITE_A_10 = np.array([94.811, 100.0, 107.304]), np.array([111.144, 100.0, 35.200])


def test_special_index_of_metamerism():
    row = METAMERISM["Mt multiplicative XYZ, dE76"]
    got = special_index(STANDARD_D65, STANDARD_A, SAMPLE_D65, SAMPLE_A, WHITE_A_10)
    assert got == pytest.approx(float(row["value"]), rel=0, abs=float(row["tol"]))


@pytest.mark.parametrize(
    ("quantity", "target", "sample", "white"),
    [
        ("dE76 under reference", STANDARD_D65, SAMPLE_D65, WHITE_D65_10),
        ("dE76 under A uncorrected", STANDARD_A, SAMPLE_A, WHITE_A_10),
    ],
    ids=["reference", "test lamp"],
)
def test_differences_of_the_metameric_pair(quantity, target, sample, white):
    row = METAMERISM[quantity]
    got = cie1976(Lab_from_XYZ(target, white), Lab_from_XYZ(sample, white))
    assert got == pytest.approx(float(row["value"]), rel=0, abs=float(row["tol"]))


WHITE_A, WHITE_D65_REF = np.array([111.15, 100.0, 35.20]), np.array([94.81, 100.0, 107.30])  # in the row's own words


def test_cmccat2000():
    rows = [METAMERISM[next(key for key in METAMERISM if key.startswith(f"CMCCAT2000 {axis}"))] for axis in "XYZ"]
    D = degree_of_adaptation(200.0, 200.0)
    assert pytest.approx(0.944082, rel=0, abs=5e-7) == D  # the same row
    got = corresponding(np.array([22.48, 22.74, 8.54]), WHITE_A, WHITE_D65_REF, D=D)
    np.testing.assert_allclose(got, columns(rows, "value")[:, 0], rtol=0, atol=1e-5)


def test_inconstancy_of_the_standard():
    row = METAMERISM["inconstancy standard A->D65 CMC(1:1)"]
    got = inconstancy(STANDARD_D65, STANDARD_A, WHITE_D65_10, WHITE_A_10)
    assert got == pytest.approx(float(row["value"]), rel=0, abs=float(row["tol"]))


FACTS = {row["what"]: float(row["value"]) for row in read_cross("physics_facts.csv")}


def test_temperature_of_illuminant_a_on_the_present_scale():
    # A is defined by c2 = 1.4350e-2 at 2848 K; with the present c2 the same curve is that of another temperature
    got = A_TEMPERATURE_K * PLANCK_C2_M_K * 1e9 / A_C2_NM_K
    assert got == pytest.approx(FACTS["CIE A temperature (c2 1.4388/1.4350*2848) K"], rel=0, abs=1e-6)
    A, same = power_at(illuminant("A"), FULL_NM), power_at(blackbody(got), FULL_NM)
    np.testing.assert_allclose(A, same, rtol=1e-12)


def test_blackbody_peaks_where_wien_says():
    # our c2 is the rounded one of CIE 15, 2e-5 above the constant of physics: 0.01 nm here
    lamp = blackbody(5778.0)
    around = slice(130, 154)  # 490 to 513 nm
    curve = np.polynomial.Polynomial.fit(lamp.wavelength_nm[around], lamp.power[around], 5)
    (peak,) = (root.real for root in curve.deriv().roots() if abs(root.imag) < 1e-9 and 490 < root.real < 513)
    assert peak == pytest.approx(FACTS["Wien peak 5778 K nm"], rel=0, abs=0.05)


CCT = read_cross("cct.csv")


@pytest.mark.parametrize("row", CCT, ids=[row["name"] for row in CCT])
def test_blackbody_of_the_correlated_temperature_lies_duv_away(row):
    # Duv is the distance on CIE 1960 u, v, which are u' and two thirds of v'
    xy = columns([row], "x", "y")[0]
    seen = np.array([xy[0] / xy[1], 1.0, (1 - xy.sum()) / xy[1]]) * 100
    white = weights(FULL_NM, [blackbody(float(row["CCT_K"]))], observer("2")).white[0]
    (u, v), (un, vn) = uv_prime(seen), uv_prime(white)
    far = np.hypot(u - un, (v - vn) * 2 / 3)
    assert far == pytest.approx(abs(float(row["Duv"])), rel=0, abs=3e-5)


@pytest.mark.parametrize("name", ["D50", "D65", "D75"])
def test_daylight_of_the_nominal_temperature_is_the_tabulated_one(name):
    # 5000 K was named when c2 was 1.4380e-2, so the tabulated D50 is of 5000 × 1.4388/1.4380 K (physics_facts.csv)
    nominal = {"D50": FACTS["D50 actual CCT 5000*1.4388/1.4380 K"], "D65": 6503.6, "D75": 7504.2}[name]
    lamp = illuminant(f"daylight:{nominal:.2f}K")
    W = weights(FULL_NM, [lamp], observer("2"))
    (row,) = (row for row in CCT if row["name"] == name)
    np.testing.assert_allclose(xyY_from_XYZ(W.white[0])[:2], columns([row], "x", "y")[0], rtol=0, atol=2e-4)
