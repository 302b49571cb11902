"""Whatever the bytes: a result or an InputError, never another exception, and in bounded time."""

from __future__ import annotations

import io
from pathlib import Path

import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from chroma.readers import read_lamp, read_spectra
from observers.errors import InputError

FIXTURE = settings(deadline=5000, suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow])
SIGNS = "0 1 400 410 0.5 91,2 1e5 - . , ; \t | nm %T Abs A \n \r\n \r # ## $$ \" ' nan OVER #### { } [ ] < > é λ µm"
WORDS = "##TITLE= ##XYDATA=(X++(Y..Y)) ##END= BEGIN_DATA_FORMAT END_DATA_FORMAT BEGIN_DATA END_DATA SPECTRAL_NM400 cm-1"
PIECES = st.sampled_from([*SIGNS.split(" "), *WORDS.split(" "), "\x00", "\x1a", " "])


def seeds() -> list[bytes]:
    data = Path(__file__).parent.parent / "data"
    names = ("rhodamine_6g/Rhodamine_6G_in_methanol_A1.csv", "methylene_blue/unknown_tabtext.xls")
    files = (
        [data / name for name in names] + sorted((data / "jcamp").glob("b_*")) + sorted((data / "tm27").glob("*.spdx"))
    )
    return [path.read_bytes()[:3000] for path in files] + [made_workbook(), made_parquet()]


def made_workbook() -> bytes:
    import openpyxl

    book, stream = openpyxl.Workbook(), io.BytesIO()
    for row in (("nm", "Abs"), (400, 0.5), (410, 0.6), (420, 0.7)):
        book.active.append(row)
    book.save(stream)
    return stream.getvalue()


def made_parquet() -> bytes:
    import pyarrow as pa
    from pyarrow import parquet

    stream = io.BytesIO()
    parquet.write_table(pa.table({"name": ["a"], "%T400": [50.0], "%T410": [60.0]}), stream)
    return stream.getvalue()


SEEDS = seeds()


def attempt(path: Path, content: bytes) -> None:
    path.write_bytes(content)
    refusals: list[InputError] = []
    for read in (read_spectra, read_lamp, lambda p: read_spectra(p, quantity="absorbance")):
        try:
            read(str(path))
        except InputError as error:
            refusals.append(error)
    assert all(error.what and "made.bin" in error.where for error in refusals)


@FIXTURE
@given(content=st.binary(max_size=2000))
@example(content=b"PAR1")
@example(content=b"PK\x03\x04")
@example(content=b"\xff\xfe")
@example(content=b"#")
@example(content=b'"')
def test_random_bytes(tmp_path, content):
    attempt(tmp_path / "made.bin", content)


@settings(FIXTURE, max_examples=400)
@given(content=st.lists(PIECES, max_size=120))
def test_random_pieces_of_files(tmp_path, content):
    attempt(tmp_path / "made.bin", "".join(content).encode())


@settings(FIXTURE, max_examples=300)
@given(data=st.data(), seed=st.sampled_from(range(len(SEEDS))))
def test_damaged_files(tmp_path, data, seed):
    content = bytearray(SEEDS[seed])
    for _ in range(data.draw(st.integers(1, 8), label="wounds")):
        at = data.draw(st.integers(0, max(len(content) - 1, 0)), label="at")
        kind = data.draw(st.sampled_from(["flip", "cut", "drop", "double"]), label="kind")
        if kind == "flip" and content:
            content[at] = data.draw(st.integers(0, 255), label="byte")
        elif kind == "cut":
            del content[at:]
        elif kind == "drop":
            del content[at : at + 40]
        else:
            content[at:at] = content[at : at + 200]
    attempt(tmp_path / "made.bin", bytes(content))


LARGE = {
    "nine million digits": b"9" * 900_000 + b"\n" + b"9" * 900_000,
    "newlines": b"\n" * 1_000_000,
    "carriage returns": b"\r\r\n" * 300_000,
    "commas": b",,,,,,,,,,\n" * 100_000,
    "quotes": b'"' * 1_000_000,
    "quotes in lines": b'"""",""\n' * 100_000,
    "hashes": b"#\n" * 500_000,
    "short rows": b"1,2\n" * 250_000,
    "falling rows": b"\n".join(b"%d,1" % i for i in range(150_000, 0, -1)),
    "one wide row": b"1," * 400_000,
    "words": b"a b c d e f g h\n" * 60_000,
    "JCAMP labels": b"##TITLE=\n" * 100_000,
    "JCAMP one label": b"##TITLE= a\n" + b"text\n" * 200_000,
    "JCAMP repeats": b"##TITLE=\n##XUNITS=NM\n##YUNITS=ABSORBANCE\n##DATATYPE=UV\n##XYDATA=(X++(Y..Y))\n"
    + b"1A1" + b"S999999" * 100_000,
    "CGATS fields": b"BEGIN_DATA_FORMAT\n" + b"A " * 400_000 + b"\nEND_DATA_FORMAT\nBEGIN_DATA\n1\nEND_DATA\n",
    "CGATS rows": b"BEGIN_DATA_FORMAT\nA B\nEND_DATA_FORMAT\nBEGIN_DATA\n" + b"1 2 3\n" * 150_000 + b"END_DATA\n",
    "JSON brackets": b'{"a":' + b"[" * 900_000,
    "XML depth": b"<IESTM2714>" + b"<a>" * 300_000,
    "percent signs": b"% " * 500_000,
    "brackets": b"nm," + b"(" * 400_000 + b"\n400,1\n410,2\n",
    "blanks": b"400" + b" " * 900_000 + b"1\n410 2\n420 3\n",
}  # fmt: skip


@pytest.mark.parametrize("name", LARGE)
def test_a_megabyte_of_nonsense_ends(tmp_path, name):
    attempt(tmp_path / "made.bin", LARGE[name])
