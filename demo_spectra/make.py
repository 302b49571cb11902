"""Write the invented world of the demo: the dyed water of ornamental fountains, as bench instruments export it.

Run as ``python demo_spectra/make.py [OUTDIR]``. Nothing here was measured: dyes, batches, tiles and lamp are made up
from smooth bands, and the noise is seeded, so that every run writes the same bytes. numpy is all it needs.
"""

from __future__ import annotations

import sys
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]
Bands = tuple[tuple[float, float, float], ...]

SEED = 380_780
NOISE_T = 5e-4  # standard deviation of one reading, constant in transmittance
BASELINE_A = 1.5e-3  # a cell put back in its holder: standard deviation of the offset, in absorbance
STRAY = 5e-4  # stray light, as a fraction of the blank
PIPETTING = 3e-3  # relative standard deviation between the stated and the true concentration of a standard
DRAWING = 6e-3  # relative standard deviation of strength between draws from one tank; every reading is a fresh draw
CELL_MM = 10.0
BY_2_NM: Array = np.arange(380.0, 781.0, 2.0)
BY_5_NM: Array = np.arange(380.0, 781.0, 5.0)

# Bands of each dye: peak (nm), full width at half height (1000 cm-1), height (L g-1 cm-1). The last lies in the UV.
DYES: dict[str, Bands] = {
    "Heron blue": ((628, 2.4, 70), (578, 3.8, 56), (398, 3.4, 12), (318, 5.5, 32)),
    "Broom yellow": ((427, 4.1, 52), (398, 3.6, 14), (300, 6.0, 28)),
    "Rowan red": ((512, 2.6, 38), (542, 1.7, 27), (338, 5.5, 16)),
    # foreign dyes, which the crew does not hold: only the metameric batches have them
    "Alder teal": ((672, 2.1, 84), (620, 2.8, 40), (380, 4.5, 14)),
    "Thistle violet": ((552, 2.0, 58), (516, 2.6, 30), (322, 6.0, 18)),
    "Sedge yellow": ((452, 2.6, 46), (420, 3.5, 20), (300, 6.0, 20)),
}
# Rowan red pairs up in strong solution; a pair absorbs less at the peak, and further to the blue.
ROWAN_PAIR: Bands = ((492, 2.9, 36), (540, 1.9, 9), (338, 5.5, 16))
PAIRING_L_PER_G = 2.4

SERIES_G_PER_L = {
    "Heron blue": (0.0005, 0.001, 0.002, 0.004, 0.006, 0.009, 0.012),
    "Broom yellow": (0.001, 0.002, 0.004, 0.007, 0.010, 0.015, 0.020),
    "Rowan red": (0.001, 0.002, 0.004, 0.008, 0.013, 0.019, 0.026),
}


@dataclass(frozen=True)
class Recipe:
    """What a sample really is: grams of dye in a litre, what is wrong, and haze (absorbance at 550 nm in 10 mm)."""

    name: str
    g_per_L: dict[str, float]
    wrong: str = ""
    haze: float = 0.0
    readings: int = 1


def absorptivity(dye: str, wavelength_nm: Array) -> Array:
    """Absorptivity (B,) of a dye in thin solution, L g-1 cm-1, at wavelengths (B,) in nm; KeyError if unknown."""
    return _sum_of_bands(DYES[dye], wavelength_nm)


def absorbance(recipe: Recipe, wavelength_nm: Array, path_length_mm: float = CELL_MM) -> Array:
    """True decadic absorbance (B,) of a recipe at wavelengths (B,) in nm: dyes by Beer's law, pairs, and haze."""
    per_cm = recipe.haze * (550.0 / wavelength_nm) ** 1.6
    for dye, g_per_L in recipe.g_per_L.items():
        single = g_per_L
        if dye == "Rowan red":  # single molecules m and pairs in equilibrium: m + 2 K m² = c
            single = (np.sqrt(1 + 8 * PAIRING_L_PER_G * g_per_L) - 1) / (4 * PAIRING_L_PER_G)
            per_cm = per_cm + (g_per_L - single) * _sum_of_bands(ROWAN_PAIR, wavelength_nm)
        per_cm = per_cm + single * absorptivity(dye, wavelength_nm)
    return np.asarray(per_cm * path_length_mm / 10.0)


def _sum_of_bands(bands: Bands, wavelength_nm: Array) -> Array:
    # Gaussian in wavenumber, as bands of dyes nearly are; widths in 1000 cm-1.
    offsets = [(1e4 / wavelength_nm - 1e4 / peak) / width for peak, width, _ in bands]
    return np.asarray(sum(band[2] * np.exp(-4 * np.log(2) * x**2) for band, x in zip(bands, offsets, strict=True)))


def _own(
    name: str, blue: float, yellow: float, wrong: str = "", *, red: float = 0.0, haze: float = 0.0, readings: int = 1
) -> Recipe:
    """A batch of the crew's own dyes: blue and yellow relative to the target, red in g/L."""
    g_per_L = {"Heron blue": 0.0065 * blue, "Broom yellow": 0.0050 * yellow, "Rowan red": red}
    return Recipe(name, g_per_L, wrong, haze, readings)


TARGET = _own("Heron basin", 1.0, 1.0)
# Found by solving for nearly the L*a*b* of the target under D65, 10° observer; under A they part from it.
THREE_FOREIGN = {"Alder teal": 0.0117, "Thistle violet": 0.00335, "Sedge yellow": 0.0042}
ONE_FOREIGN = {"Alder teal": 0.0136, "Rowan red": 0.00415, "Broom yellow": 0.0043}
BATCHES = (
    _own("HB-01", 1.004, 0.993),
    _own("HB-02", 0.985, 0.994),
    _own("HB-03", 1.012, 1.016),
    _own("HB-04", 0.996, 1.011, readings=3),
    _own("HB-05", 0.912, 0.907, "weak: 9 %"),
    _own("HB-06", 1.003, 0.974),
    _own("HB-07", 1.002, 0.996, "contaminated: a touch of red from a shared jug", red=0.0004),
    Recipe("HB-08", THREE_FOREIGN, "metameric: made with three foreign dyes"),
    _own("HB-09", 1.019, 1.008),
    _own("HB-10", 1.092, 1.088, "strong: 9 %", readings=3),
    _own("HB-11", 0.991, 1.026),
    _own("HB-12", 1.001, 1.004, "turbid: fine, blooming water", haze=0.024),
    _own("HB-13", 0.960, 0.918, "near limit: a little weak, and short of yellow", readings=3),
    _own("HB-14", 0.999, 0.982),
    _own("HB-15", 0.857, 0.861, "weak: 14 %, topped up with plain water"),
    _own("HB-16", 0.994, 1.003, "contaminated: red from an unrinsed tank", red=0.0011),
    Recipe("HB-17", ONE_FOREIGN, "metameric: a foreign blue, put right with red"),
    _own("HB-18", 1.136, 1.129, "strong: 13 %"),
    _own("HB-19", 1.006, 1.009),
    _own("HB-20", 0.995, 0.998, "turbid: coarse, limescale", haze=0.045),
)


def _normal(label: str, size: int) -> Array:
    # Twelve uniforms less six: near enough to a Gaussian, and arithmetic alone, so every machine draws the same.
    generator = np.random.default_rng([SEED, *label.encode()])
    return np.asarray(generator.random((12, size)).sum(axis=0) - 6.0)


def read_transmittance(true_absorbance: Array, label: str) -> Array:
    """What the bench instrument reads (B,): a fraction, 4 decimals; the label seeds the noise of this one reading."""
    draw = _normal(label, true_absorbance.size + 1)
    light = 10.0 ** -(true_absorbance + BASELINE_A * draw[0])
    return np.asarray(np.round((light + STRAY) / (1 + STRAY) + NOISE_T * draw[1:], 4))


def _columns(wavelength_nm: Array, columns: Sequence[Array], separator: str, form: str = ".4f") -> list[str]:
    """One line for each wavelength: the wavelength, then the value of every sample."""
    rows = zip(wavelength_nm, *columns, strict=True)
    return [separator.join([f"{nm:g}", *(f"{value:{form}}" for value in values)]) for nm, *values in rows]


def target_csv() -> list[str]:
    """Comma-separated, one sample, transmittance as a fraction."""
    head = ["# Invented data: the colour that the fountain Heron basin is held to, 10 mm cell against water"]
    head += ["# quantity: transmittance, as a fraction", f"wavelength_nm,{TARGET.name}"]
    return head + _columns(BY_5_NM, [read_transmittance(absorbance(TARGET, BY_5_NM), "target")], ",")


def batches_csv() -> list[str]:
    """Semicolons and decimal commas, samples in columns, per cent transmittance, some batches read three times."""
    names, columns = [], []
    for batch in BATCHES:
        for reading in range(1, batch.readings + 1):
            names.append(f"{batch.name}#{reading}" if batch.readings > 1 else batch.name)
            drawn = 1 + DRAWING * _normal(f"{names[-1]} drawn", 1)
            columns.append(100 * read_transmittance(drawn * absorbance(batch, BY_5_NM), names[-1]))
    head = ["Title: Heron basin, dosing tank, twenty batches (invented data)", "Quantity: %T", "Path length: 10 mm"]
    head += ["Blank: demineralised water, already taken off", "", ";".join(["nm", *names])]
    return head + [line.replace(".", ",") for line in _columns(BY_5_NM, columns, ";", ".2f")]


def _standards(dye: str) -> dict[str, float]:
    stem = dye.split()[0].lower()
    return {"blank": 0.0} | {f"{stem}-{k}": stated for k, stated in enumerate(SERIES_G_PER_L[dye], start=1)}


def _series(dye: str, wavelength_nm: Array, zero: float = 0.0) -> dict[str, Array]:
    """Absorbance, 4 decimals, of the blank and standards of a dye; zero: what a cell of water itself reads."""
    readings: dict[str, Array] = {}
    for name, stated in _standards(dye).items():
        true_g_per_L = stated * (1 + PIPETTING * _normal(f"{name} pipette", 1)[0])
        true = absorbance(Recipe(name, {dye: true_g_per_L}), wavelength_nm) + zero
        light = np.maximum(read_transmittance(true, f"{dye} {name}"), 1e-4)
        readings[name] = np.asarray(np.round(-np.log10(light), 4) + 0.0)  # no minus before a zero
    return readings


def heron_series() -> list[str]:
    """Tabs, wavelengths descending, samples in columns; zeroed on air, so the blank is to be taken off."""
    nm = BY_2_NM[::-1]
    series = _series("Heron blue", nm, zero=0.0362)
    head = ["Dilution series of Heron blue (invented data)", "Mode\tAbsorbance", "Cell\t10 mm", "Zeroed on\tair"]
    head += ["", "\t".join(["Wavelength (nm)", *series])]
    return head + _columns(nm, list(series.values()), "\t")


def broom_series() -> list[str]:
    """JCAMP-DX 4.24, a LINK of one block for each sample."""
    series = _series("Broom yellow", BY_2_NM)
    origin = ["##ORIGIN=demo_spectra/make.py, not measured", "##OWNER=public domain"]
    lines = ["##TITLE=Dilution series of Broom yellow (invented data)", "##JCAMP-DX=4.24", "##DATA TYPE=LINK"]
    lines += [f"##BLOCKS={len(series)}", *origin]
    for name, values in series.items():
        whole = np.round(values * 1e4).astype(int)
        lines += [f"##TITLE={name}", "##JCAMP-DX=4.24", "##DATA TYPE=UV/VIS SPECTRUM", *origin, "##PATHLENGTH=1.0"]
        lines += ["##XUNITS=NANOMETERS", "##YUNITS=ABSORBANCE", "##XFACTOR=1.0", "##YFACTOR=0.0001", "##FIRSTX=380"]
        lines += ["##LASTX=780", "##DELTAX=2", "##NPOINTS=201", f"##FIRSTY={values[0]:.4f}", "##XYDATA=(X++(Y..Y))"]
        lines += [f"{BY_2_NM[i]:g} " + " ".join(map(str, whole[i : i + 10])) for i in range(0, whole.size, 10)]
        lines += ["##END="]
    return [*lines, "##END="]


def rowan_series() -> list[str]:
    """Comma-separated, samples in rows, wavelengths in the header row."""
    head = ["# Dilution series of Rowan red (invented data), 10 mm cell, zeroed on water", "# quantity: absorbance"]
    head += [",".join(["sample", *(f"{nm:g}" for nm in BY_5_NM)])]
    series = _series("Rowan red", BY_5_NM)
    return head + [",".join([name, *(f"{value:.4f}" for value in values)]) for name, values in series.items()]


def concentrations(dye: str) -> list[str]:
    """Stated concentration of the blank and of each standard of a series."""
    rows = [f"{name},{stated:g},g/L" for name, stated in _standards(dye).items()]
    return [f"# Standards of {dye} (invented data)", "name,concentration,unit", *rows]


def counts_csv() -> list[str]:
    """Raw counts of a diode array on its own uneven pixels: dark, blank and three samples."""
    pixel = np.arange(193.0)
    nm: Array = np.round(378.9 + 2.135 * pixel - 1.8e-4 * pixel**2, 2)
    lamp = 52_000 * np.exp(-0.5 * ((nm - 610) / 95) ** 2)
    light = {"dark": 0 * nm}
    for sample in (Recipe("blank", {}), TARGET, BATCHES[4], BATCHES[15]):
        light[sample.name] = lamp * 10.0 ** -absorbance(sample, nm) + STRAY * lamp.mean()
    head = ["# Invented data: raw readings of a diode array, mean of 16 scans, 10 mm cell", "# quantity: counts"]
    # A pedestal of 640, read noise of 8, and shot noise at 4 electrons a count over 16 scans.
    columns = [640 + x + np.sqrt(8**2 + x / 64) * _normal(f"counts {name}", nm.size) for name, x in light.items()]
    return [*head, ",".join(["wavelength_nm", *light]), *_columns(nm, columns, ",", ".0f")]


TILES: dict[str, tuple[float, Bands]] = {  # floor, then bands in reflectance
    "chalk white": (0.10, ((560, 22.0, 0.74),)),
    "slate blue": (0.09, ((460, 5.5, 0.21), (760, 3.0, 0.12))),
    "moss green": (0.06, ((545, 4.0, 0.20), (740, 2.5, 0.16))),
    "terracotta": (0.07, ((690, 5.0, 0.38),)),
}


def basin_reflectance() -> list[str]:
    """CGATS.17 text, reflectance as a fraction, 400-700 nm at 10 nm."""
    nm = np.arange(400.0, 701.0, 10.0)
    fields = ["SAMPLE_ID", "SAMPLE_NAME", *(f"SPECTRAL_NM{x:.0f}" for x in nm)]
    rows = []
    for k, (name, (floor, bands)) in enumerate(TILES.items(), start=1):
        values = np.round(floor + _sum_of_bands(bands, nm) + NOISE_T * _normal(name, nm.size), 4)
        rows.append(" ".join([str(k), f'"{name}"', *(f"{value:.4f}" for value in values)]))
    head = ["CGATS.17", "", 'ORIGINATOR "demo_spectra/make.py, not measured"']
    head += ['DESCRIPTOR "Reflectance of painted basin tiles, as a fraction (invented data)"', ""]
    head += [f"NUMBER_OF_FIELDS {len(fields)}", "BEGIN_DATA_FORMAT", " ".join(fields), "END_DATA_FORMAT", ""]
    return [*head, f"NUMBER_OF_SETS {len(rows)}", "BEGIN_DATA", *rows, "END_DATA"]


def garden_lamp() -> list[str]:
    """IES TM-27-14 document of a warm white LED: a blue pump and two broad phosphor bands."""
    power = _sum_of_bands(((452, 1.0, 0.42), (545, 4.2, 0.33), (612, 3.3, 0.90)), BY_5_NM)
    header = {"Manufacturer": "none (invented)", "Description": "Warm LED garden lamp (invented data)"}
    header |= {"DocumentCreator": "demo_spectra/make.py", "UniqueIdentifier": "garden-lamp"}
    header |= {"DocumentCreationDate": "2024-01-01", "Comments": "Invented; no lamp was measured."}
    head = ['<?xml version="1.0"?>', '<IESTM2714 xmlns="iestm2714" version="1.0">', "\t<Header>"]
    head += [f"\t\t<{tag}>{text}</{tag}>" for tag, text in header.items()]
    head += ["\t</Header>", "\t<SpectralDistribution>", "\t\t<SpectralQuantity>relative</SpectralQuantity>"]
    points = zip(BY_5_NM, power / power.max(), strict=True)
    data = [f'\t\t<SpectralData wavelength="{x:.1f}">{y:.4f}</SpectralData>' for x, y in points]
    return [*head, *data, "\t</SpectralDistribution>", "</IESTM2714>"]


def truth_csv() -> list[str]:
    """What every batch really is, for tests only."""
    rows = []
    for recipe in (TARGET, *BATCHES):
        amounts = [f"{recipe.g_per_L.get(dye, 0.0):.7f}" for dye in DYES]
        rows.append(",".join([recipe.name, *amounts, f"{recipe.haze:g}", f'"{recipe.wrong}"']))
    head = "# Invented data, for tests only: what is really in each batch, g/L; haze is absorbance at 550 nm in 10 mm"
    return [head, ",".join(["batch", *DYES, "haze", "wrong"]), *rows]


FILES: dict[str, Callable[[], list[str]]] = {
    "target.csv": target_csv,
    "batches.csv": batches_csv,
    "heron_series.txt": heron_series,
    "broom_series.jdx": broom_series,
    "rowan_series.csv": rowan_series,
    **{f"{dye.split()[0].lower()}_concentrations.csv": partial(concentrations, dye) for dye in SERIES_G_PER_L},
    "counts.csv": counts_csv,
    "basin_reflectance.txt": basin_reflectance,
    "garden_lamp.spdx": garden_lamp,
    "truth.csv": truth_csv,
}


def main(arguments: Sequence[str]) -> None:
    """Write every file into the folder given, or else beside this script."""
    folder = Path(arguments[0]) if arguments else Path(__file__).resolve().parent
    folder.mkdir(parents=True, exist_ok=True)
    for name, lines in FILES.items():
        (folder / name).write_bytes("".join(f"{line}\n" for line in lines()).encode())


if __name__ == "__main__":
    main(sys.argv[1:])
