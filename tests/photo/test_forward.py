"""The forward model: exact where it can be worked out, and its slopes against differences."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from photo.render.world import dye

from chroma.photo.fit import Data, default_prior, fit, hypotheses
from chroma.photo.forward import Optics, concentration, predict, scaled
from chroma.photo.lamps import lamp_channels
from chroma.photo.sample import quantiles, sample
from chroma.photo.solve import detection, judge_two_dyes
from observers.cameras import CAMERA_NM
from observers.errors import InputError
from observers.illuminants import illuminant

CHANNELS, _ = lamp_channels([illuminant("D50"), illuminant("FL11")])
RED, BLUE = dye("simulated red").absorptivity, dye("simulated blue").absorptivity


def optics(known: list[list[float]], dyes: int = 1, modes: int = 0) -> Optics:
    table = np.stack([RED, BLUE][:dyes])
    shared = np.zeros((modes, dyes, len(CAMERA_NM)))
    if modes:
        shared[0, 0], shared[1, 0] = 0.03 * RED, 0.2 * np.sin(CAMERA_NM / 40)
    c = np.array(known)
    return Optics(CHANNELS, table, shared, np.linspace(0.4, 0.8, c.size * 3 // dyes).reshape(-1, 3), c)


def somewhere(model: Optics, seed: int = 1) -> np.ndarray:
    rng = np.random.default_rng(seed)
    x = np.tile(default_prior(model).mean, (2, 1))
    x[:, : model.layout.nuisance] += (
        0.3
        * rng.standard_normal((2, model.layout.nuisance))
        / np.sqrt(np.diag(default_prior(model).precision)[: model.layout.nuisance])
    )
    x[:, model.layout.unknown] = rng.uniform(0.5, 4, (2, model.layout.unknowns))
    return x


def test_a_clear_cuvette_reads_its_cell() -> None:
    model = optics([[0.0]])
    x = np.tile(default_prior(model).mean, (1, 1))
    x[:, model.layout.veil], x[:, model.layout.power] = -10.0, 1.0
    x[:, model.layout.shoulder] = x[:, model.layout.toe] = 0.0
    value, _ = predict(model, x, np.array([1]), slopes=False)
    # The clipping of small signals, (0.003)² / 0.92, is all that is left.
    np.testing.assert_allclose(value[0, 0], np.exp(x[0, model.layout.cell]), atol=2e-5)


def test_the_ratio_is_the_integral_over_lamp_and_channel() -> None:
    model = optics([[0.01]])
    x = np.tile(default_prior(model).mean, (1, 1))
    x[:, model.layout.veil], x[:, model.layout.power], x[:, model.layout.cell] = -10.0, 1.0, 0.0
    x[:, model.layout.shoulder] = x[:, model.layout.toe] = 0.0
    value, _ = predict(model, x, np.array([0]), slopes=False)
    np.testing.assert_allclose(value[0, 0], CHANNELS[0, 0] @ 10.0 ** (-0.01 * RED), rtol=2e-4)


@pytest.mark.parametrize(("dyes", "modes"), [(1, 0), (1, 2), (2, 0)], ids=["one dye", "uncertain dye", "two dyes"])
def test_slopes_are_those_of_small_differences(dyes: int, modes: int) -> None:
    none = [np.nan] * dyes
    model = optics([[0.0] * dyes, [0.02] * dyes, none, none], dyes, modes)
    x, lamp = somewhere(model), np.array([0, 1])
    _, slope = predict(model, x, lamp)
    assert slope is not None
    for j in range(model.layout.size):
        step = np.zeros(model.layout.size)
        step[j] = 1e-5
        high, _ = predict(model, x + step, lamp, slopes=False)
        low, _ = predict(model, x - step, lamp, slopes=False)
        np.testing.assert_allclose(slope[..., j], (high - low) / 2e-5, atol=2e-6, err_msg=f"number {j}")


def test_the_scale_of_an_unknown_has_its_inverse() -> None:
    c = np.array([-0.1, 0.0, 1e-4, 3.0])
    np.testing.assert_allclose(concentration(scaled(c, np.array(0.01)), np.array(0.01)), c, atol=1e-15)


def noisy(model: Optics, truth: np.ndarray, noise: float, seed: int) -> Data:
    """Simulated readings of the model itself."""
    rng = np.random.default_rng(seed)
    full = replace(model, known=truth)
    x = np.tile(default_prior(full).mean, (1, 1))
    x[0, : model.directions] = rng.standard_normal(model.directions)
    value, _ = predict(full, x, np.array([0]), slopes=False)
    seen = value[0] * (1 + noise * rng.standard_normal(value[0].shape))
    return Data(seen, np.einsum("ni,ij->nij", (noise * seen) ** 2, np.eye(3)), np.ones(seen.shape, dtype=bool))


def test_readings_of_the_model_give_back_the_concentrations() -> None:
    model = optics([[0.0], [0.005], [0.03], [np.nan], [np.nan]])
    truth = np.array([[0.0], [0.005], [0.03], [0.01], [0.02]])
    data = noisy(model, truth, 1e-4, 3)
    found = fit(model, data, hypotheses(1), default_prior(model))
    drawn = sample(model, data, found, default_prior(model))
    u = quantiles(drawn.x[:, model.layout.unknown], drawn.weight, (0.5,))[0]
    np.testing.assert_allclose(concentration(u, model.small), [0.01, 0.02], rtol=0.01)


def test_a_channel_that_does_not_count_changes_nothing() -> None:
    model = optics([[0.0], [0.005], [0.03], [np.nan]])
    data = noisy(model, np.array([[0.0], [0.005], [0.03], [0.01]]), 1e-3, 4)
    used = data.used.copy()
    used[3, 0] = False
    value = data.value.copy()
    value[3, 0] = 7.0
    muted = [Data(v, data.covariance, used) for v in (data.value, value)]
    x = [fit(model, one, hypotheses(1), default_prior(model)).x[0, -1] for one in muted]
    assert x[0] == pytest.approx(x[1], abs=2e-3)


def test_detection_lies_where_noise_puts_it() -> None:
    model = optics([[0.0], [0.005], [0.03], [np.nan]])
    truth = np.array([[0.0], [0.005], [0.03], [0.01]])
    limits = []
    for noise in (1e-3, 8e-3):
        data = noisy(model, truth, noise, 5)
        limits.append(detection(model, data, fit(model, data, hypotheses(1), default_prior(model)))[0])
    assert 0 < limits[0] < limits[1] < 0.01


def test_two_dyes_that_look_alike_are_refused() -> None:
    alike = replace(optics([[0.0, 0.0]], 2), absorbance=np.stack([RED, 1.7 * RED + 0.01 * BLUE]))
    with pytest.raises(InputError, match="cannot be told apart"):
        judge_two_dyes(alike, ["one", "two"])
    judge_two_dyes(optics([[0.0, 0.0]], 2), ["red", "blue"])


def test_quantiles_of_weighted_draws() -> None:
    draws = np.arange(1001.0)[:, None]
    found = quantiles(draws, np.full(1001, 1 / 1001), (0.025, 0.5, 0.975))
    np.testing.assert_allclose(found[:, 0], [25, 500, 975], atol=1)
