"""One set of spectra in whatever shape an instrument exports it: always the same numbers. All data are invented."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from chroma.readers import read_spectra

NM = np.array([380.0, 400.0, 450.0, 500.0, 550.0, 600.0, 650.0, 700.0, 720.0])
VALUES = np.round(0.5 + 0.45 * np.sin(np.arange(27).reshape(3, 9)), 4)
NAMES = ("pond", "north basin", "jet 3")
AXIS_WORDS = {
    "nm": ("nm", "Wavelength (nm)", "wavelength_nm", "Wavelength", "λ / nm"),
    "um": ("Wavelength (µm)", "wavelength [um]", "micron"),
    "cm-1": ("Wavenumber (cm-1)", "cm⁻¹", "1/cm", "wavenumber"),
}


@dataclass(frozen=True)
class Shape:
    separator: str
    decimal: str
    across: bool
    descending: bool
    unit: str
    percent: bool
    encoding: str
    head: tuple[str, ...]
    line_end: str
    axis_word: int
    trailing: bool
    footer: bool
    quoted: bool


def shapes():
    pairs = [(s, d) for s in ("\t", ";", ",", "|", " ", "   ") for d in ".," if (s, d) != (",", ",")]
    heads = st.sampled_from(
        [
            (),
            ("Fountain crew",),
            ("Fountain crew", "", "Operator: J K", "Scan speed: 240"),
            ("# exported", "Date;2031-04-05", "Slit width: 2.0 nm", ""),
        ]
    )
    return st.builds(
        lambda pair, **rest: Shape(separator=pair[0], decimal=pair[1], **rest),
        st.sampled_from(pairs),
        across=st.booleans(),
        descending=st.booleans(),
        unit=st.sampled_from(["nm", "um", "cm-1"]),
        percent=st.booleans(),
        encoding=st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be"]),
        head=heads,
        line_end=st.sampled_from(["\n", "\r\n", "\r"]),
        axis_word=st.integers(0, 4),
        trailing=st.booleans(),
        footer=st.booleans(),
        quoted=st.booleans(),
    )


def cells_of(shape: Shape) -> list[list[str]]:
    axis = {"nm": NM, "um": NM / 1000, "cm-1": 1e7 / NM}[shape.unit]
    order = slice(None, None, -1) if shape.descending else slice(None)
    words = AXIS_WORDS[shape.unit]
    values = VALUES * 100 if shape.percent else VALUES

    def number(x: float) -> str:
        return repr(round(float(x), 9)).replace(".", shape.decimal)

    names = [n.replace(" ", "_") if shape.separator.isspace() and shape.separator != "\t" else n for n in NAMES]
    if shape.across:
        unit = {"nm": "nm", "um": "um", "cm-1": "cm-1"}[shape.unit]
        head = ["sample", *(number(a) + unit for a in axis[order])]
        return [head, *([n, *map(number, v[order])] for n, v in zip(names, values, strict=True))]
    word = words[shape.axis_word % len(words)]
    if shape.separator.isspace() and shape.separator != "\t":
        word = word.replace(" ", "_")
    rows = [[number(a), *map(number, v)] for a, v in zip(axis, values.T, strict=True)]
    return [[word, *names], *rows[order]]


def written(shape: Shape) -> bytes:
    rows = cells_of(shape)
    mark = '"' if shape.quoted else ""
    tail = shape.separator if shape.trailing and not shape.separator.isspace() else ""
    kind = "Mode: %T" if shape.percent else "Mode: Transmittance"
    lines = [*shape.head, kind, *(shape.separator.join(mark + c + mark for c in row) + tail for row in rows)]
    if shape.footer:
        lines += ["", "Instrument parameters", "Lamp change at a wavelength"]
    return shape.line_end.join([*lines, ""]).encode(shape.encoding)


@settings(max_examples=400, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(shape=shapes())
def test_every_export_shape_reads_to_the_same_numbers(tmp_path, shape):
    path = tmp_path / "export.txt"
    path.write_bytes(written(shape))
    (found,) = read_spectra(str(path))
    assert found.quantity == "transmittance"
    assert tuple(name.replace("_", " ") for name in found.names) == NAMES
    np.testing.assert_allclose(found.wavelength_nm, NM, rtol=0, atol=2e-5)  # wavenumbers were written to 1e-9
    np.testing.assert_allclose(found.values, VALUES, rtol=0, atol=1e-12)
