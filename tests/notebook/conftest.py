import numpy as np
import pytest
from helpers import ROOT

from chroma import Tolerance, averaged, check, conditions, corrected, joined, predict, read_spectra
from chroma.dye.build import fit_dye
from chroma.dye.series import read_concentrations, series
from chroma.dye.unmix import unmix_spectra
from chroma.matching.prepare import aimed_at
from chroma.matching.recipes import match

DEMO = ROOT / "demo_spectra"
LAMPS = conditions(["D65", "A"], "10")


def read(name):
    return averaged(joined(read_spectra(str(DEMO / name))))


def fitted(name, file, blank=None):
    known, source = read_concentrations(str(DEMO / f"{name}_concentrations.csv"), "g/L", "g/L", None)
    readings = corrected(joined(read_spectra(str(DEMO / file))), blank=blank)
    known = {key: value for key, value in known.items() if key != blank}
    data = series(readings, known, unit="g/L", path_length_mm=10.0)
    return fit_dye(data, name=name, sources=(source,))


@pytest.fixture(scope="session")
def results():
    """One result of each kind, from the invented fountain spectra."""
    target, batches = read("target.csv"), read("batches.csv")
    fits = [fitted("heron", "heron_series.txt", "blank"), fitted("broom", "broom_series.jdx")]
    dyes = [fit.dye for fit in fits]
    aim = aimed_at(target, None, dyes, LAMPS, path_length_mm=10.0)
    tolerance = Tolerance({"D65": 1.0, "A": 1.0})
    return {
        "spectra": batches,
        "colours": predict(batches, LAMPS),
        "checked": check(batches, target, tolerance, LAMPS),
        "fit": fits[0],
        "unmixed": unmix_spectra(batches, dyes, path_length_mm=10.0),
        "matches": match(aim.target, aim.stock, path_length_mm=10.0, weights=aim.weights, formula=tolerance.formula),
        "bare": check(batches.take(np.arange(3)), target, Tolerance({"D65": 1.0}), conditions(["D65"], "2")),
    }
