"""The contour of a tolerance really lies where the formula gives the limit."""

import numpy as np
import pytest

from chroma.difference.formulas import FORMULAS, Formula
from chroma.report.ellipses import on_plane, tolerance_contour
from observers.errors import InputError

# Places of every kind: pale, strong, dark, in the blue where CIEDE2000 turns its ellipses, and grey.
PLACES = {
    "green": (60, -40, 25),
    "blue": (35, 15, -60),
    "red": (45, 60, 30),
    "dark": (12, 3, -8),
    "grey": (70, 0, 0),
}
KINDS = [*(Formula(name) for name in FORMULAS), Formula("cmc", l_c=(1.0, 1.0)), Formula("ciede2000", k=(2.0, 1.0, 1.0))]


@pytest.mark.parametrize("plane", ["ab", "LC"])
@pytest.mark.parametrize("target", PLACES.values(), ids=PLACES)
@pytest.mark.parametrize("formula", KINDS, ids=str)
def test_every_point_is_at_the_limit(formula, target, plane):
    target = np.array(target, dtype=float)
    contour = tolerance_contour(formula, target, 1.3, plane)
    assert contour.shape == (181, 3)
    assert np.isfinite(contour).all()
    np.testing.assert_allclose(formula.difference(target, contour), 1.3, rtol=0, atol=1e-6)
    np.testing.assert_allclose(contour[0], contour[-1], atol=1e-9)


@pytest.mark.parametrize("target", PLACES.values(), ids=PLACES)
def test_the_contour_stays_in_its_plane(target):
    target = np.array(target, dtype=float)
    assert (tolerance_contour(Formula(), target, 1.0, "ab")[:, 0] == target[0]).all()
    across = tolerance_contour(Formula(), target, 1.0, "LC") - target
    np.testing.assert_allclose(across[:, 1] * target[2], across[:, 2] * target[1], atol=1e-9)


def test_cie1976_gives_a_circle_of_the_limit():
    target = np.array([50.0, 20.0, -30.0])
    for plane in ("ab", "LC"):
        x, y = on_plane(tolerance_contour(Formula("cie1976"), target, 2.5, plane), target, plane)
        at = on_plane(target, target, plane)
        np.testing.assert_allclose(np.hypot(x - at[0], y - at[1]), 2.5, atol=1e-9)


def test_cie94_has_the_half_axes_of_its_weights():
    # CIE 116-1995: S_C = 1 + 0.045 C*, S_L = 1; along chroma and lightness from the target.
    target = np.array([50.0, 30.0, 40.0])
    x, y = on_plane(tolerance_contour(Formula("cie94"), target, 1.0, "LC", points=360), target, "LC")
    assert np.ptp(x) / 2 == pytest.approx(1 + 0.045 * 50, abs=1e-6)
    assert np.ptp(y) / 2 == pytest.approx(1.0, abs=1e-6)


def test_ciede2000_turns_its_ellipse_in_the_blue():
    def tilt(target):
        step = (tolerance_contour(Formula(), target, 1.0) - target)[:-1, 1:]
        longest = np.linalg.eigh(step.T @ step)[1][:, -1]
        radial = target[1:] / np.hypot(*target[1:])
        return np.degrees(np.arccos(min(1.0, abs(longest @ radial))))

    assert tilt(np.array([35.0, 15.0, -60.0])) > 15
    assert tilt(np.array([60.0, 45.0, 35.0])) < 3


@pytest.mark.parametrize(
    ("limit", "plane", "said"),
    [(0.0, "ab", "positive"), (-1.0, "LC", "positive"), (1.0, "xy", "it is ab or LC"), (1e9, "ab", "no colour")],
)
def test_what_has_no_contour_is_refused(limit, plane, said):
    with pytest.raises(InputError, match=said):
        tolerance_contour(Formula("ciede2000"), np.array([50.0, 10.0, 10.0]), limit, plane)
