"""Simulated dyes and dilution series: smooth bands, an instrument with noise constant in transmittance."""

import numpy as np

from chroma.dye.model import Dye
from chroma.dye.series import Series

NM = np.arange(380.0, 781.0, 5.0)
CONCENTRATIONS = np.array([0.002, 0.004, 0.008, 0.012, 0.016, 0.020, 0.026])  # g/L


def bands(*parts, nm=NM, floor=0.3):
    """Sum of Gaussians in wavenumber, each (height, peak nm, width cm⁻¹)."""
    return floor + sum(h * np.exp(-(((1e7 / nm - 1e7 / peak) / width) ** 2)) for h, peak, width in parts)


BLUE = bands((60, 615, 1300), (20, 420, 2500))
YELLOW = bands((60, 420, 2600))
RED = bands((55, 530, 1500), (15, 400, 2500))


def exact_dye(name, absorptivity, nm=NM, **more):
    """A simulated dye that is known without error."""
    return Dye(name, nm, absorptivity, "g/L", np.zeros(len(nm)), np.zeros((0, len(nm))), **more)


def simulated_series(rng, *, absorptivity=BLUE, sd_concentration=0.003, sd_offset=3e-4, readings=1, sigma_T=5e-4, stray=0.0,
                     intercept=0.0):  # fmt: skip
    """A series of seven standards by an instrument with noise, offsets, stray light and a hand that pipettes."""
    standard = np.repeat(np.arange(len(CONCENTRATIONS)), readings)
    true = CONCENTRATIONS * (1 + sd_concentration * rng.standard_normal(len(CONCENTRATIONS)))
    A = true[standard, None] * absorptivity + sd_offset * rng.standard_normal((len(standard), 1)) + intercept
    T = (10.0**-A + stray) / (1 + stray) + sigma_T * rng.standard_normal(A.shape)
    A = -np.log10(np.maximum(T, 1e-5))
    return Series(tuple(f"{c:g}" for c in CONCENTRATIONS), CONCENTRATIONS, "g/L", 10.0, NM, A, standard, A <= 3, (), ())
