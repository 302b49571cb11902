"""Files that must be refused, each with the words of its refusal. All of them are invented."""

from __future__ import annotations

import gzip
import io
import zipfile

import pytest

from chroma.readers import read_lamp, read_spectra
from observers.errors import InputError

GOOD = "nm,%T\n400,91.2\n410,92.0\n420,93.1\n430,93.4\n"
JCAMP = """##TITLE= pond
##JCAMP-DX= 4.24
##DATA TYPE= UV/VIS SPECTRUM
##XUNITS= NANOMETERS
##YUNITS= ABSORBANCE
##XFACTOR= 1
##YFACTOR= 0.001
##FIRSTX= 400
##LASTX= 440
##NPOINTS= 5
##FIRSTY= 0.1
##XYDATA= (X++(Y..Y))
400 100 200 300
430 400 500
##END=
"""
CGATS = """CGATS.17
ORIGINATOR "crew"
NUMBER_OF_FIELDS 4
BEGIN_DATA_FORMAT
SAMPLE_ID SPECTRAL_NM400 SPECTRAL_NM410 SPECTRAL_NM420
END_DATA_FORMAT
NUMBER_OF_SETS 2
BEGIN_DATA
1 0.5 0.6 0.7
2 0.4 0.5 0.6
END_DATA
"""


def zipped(names: dict[str, bytes]) -> bytes:
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in names.items():
            archive.writestr(name, content)
    return stream.getvalue()


CASES: dict[str, tuple[bytes | str, str]] = {
    "empty file": ("", "the file is empty"),
    "only blank lines": ("\n\n\n", "no table of numbers"),
    "only words": ("this is a letter\nabout a pond\n", "no table of numbers"),
    "one column": ("nm\n400\n410\n420\n", "no table of numbers"),
    "text in a cell": (GOOD.replace("93.1", "about 93"), "line 4 column 2: 'about 93' where a number is expected"),
    "overflow hashes": (GOOD.replace("93.1", "#####"), "line 4 column 2: '#####' .* out of range"),
    "overflow stars": (GOOD.replace("93.1", "*****"), "line 4 column 2: '\\*\\*\\*\\*\\*' .* out of range"),
    "overflow word": (GOOD.replace("93.1", "OVER"), "line 4 column 2: 'OVER' .* out of range"),
    "overflow inf": (GOOD.replace("93.1", "Inf"), "line 4 column 2: 'Inf' .* out of range"),
    "overflow 1e999": (GOOD.replace("93.1", "1e999"), "line 4 column 2: '1e999' .* out of range"),
    "overflow in the last row": (GOOD.replace("93.4", "OVER"), "line 5 column 2: 'OVER'"),
    "overflow in the first row": (GOOD.replace("91.2", "OVER"), "line 2 column 2: 'OVER'"),
    "text in the first row": (GOOD.replace("91.2", "dark"), "line 2 column 2: 'dark' where a number"),
    "text in the last row": (GOOD.replace("93.4", "dark"), "line 5 column 2: 'dark' where a number"),
    "overflow above": (GOOD.replace("93.1", ">3.5"), "line 4 column 2: '>3.5'"),
    "empty cell in the visible": (GOOD.replace("93.1", ""), "line 4 column 2: no value at 420 nm"),
    "nan in the visible": (GOOD.replace("93.1", "nan"), "line 4 column 2: no value at 420 nm"),
    "a line cut short": ("nm,a,b\n400,.1,.2\n410,.1\n420,.1,.2\n", "line 3: 2 columns where 3 are expected"),
    "cut in its last line": (
        "nm,a,b\n400,.1,.2\n410,.1,.2\n420,.1,.2\n430,.1",
        "line 5: 2 columns where 3 are expected",
    ),
    "cut in its last row": ("id,400,410,420\na,.1,.2,.3\nb,.1,.2,.3\nc,.1", "line 4: 2 columns where 4 are expected"),
    "overflow of a sample named #1": ("id,400,410,420\n#1,OVER,.2,.3\n#2,.1,.2,.3\n", "line 2 column 2: 'OVER'"),
    "a cell too many": ("nm,a,b\n400,.1,.2\n410,.1,.2,.3\n420,.1,.2\n430,.1,.2\n", "line 3: 4 columns where 3"),
    "wavelength twice": (
        GOOD.replace("420", "410"),
        "line 3 column 1 and line 4 column 1: the wavelength 410 nm comes",
    ),
    "wavelength out of order": (GOOD.replace("420,", "405,"), "line 4 column 1: the wavelength 405 nm is out of order"),
    "row without wavelength": (
        "nm,%T\n400,91\n410,92\n,93\n430,94\n440,95\n",
        "line 4 column 1: a row without its wave",
    ),
    "no quantity": (
        "nm,pond\n500,.8\n550,.91\n600,.7\n",
        r"could be a transmittance of 0.91 or .* \(transmittance 0.123\)",
    ),
    "no quantity, per cent": (GOOD.replace("%T", "pond"), "could be a transmittance of 93.4 %, a reflectance of"),
    "no quantity, counts": ("nm,pond\n400,9100\n410,9200\n420,8000\n", "could be counts"),
    "transmittance of 1.9": ("nm,Transmittance\n400,1.9\n410,1.8\n420,1.7\n", "could be 1.9, above .* or 1.9 %"),
    "two quantities": ("nm,%T,Abs\n400,50,.3\n410,40,.4\n420,30,.5\n", "columns of transmittance and of absorbance"),
    "negative counts": ("nm,counts\n400,5\n410,-5\n420,5\n", "counts cannot be negative"),
    "negative transmittance": ("nm,%T\n400,50\n410,-50\n420,50\n", "more than noise about zero"),
    "unit in doubt, small": ("wavelength,%T\n0.4,50\n0.5,50\n0.6,50\n", "without a unit: they could be"),
    "unit in doubt, large": ("wavelength,%T\n400,50\n2000,50\n4000,50\n", "without a unit: they could be"),
    "unit does not fit": ("wavelength (nm),%T\n0.4,50\n0.5,50\n0.6,50\n", "unit does not fit the numbers"),
    "unit does not fit µm": ("wavelength (µm),%T\n400000,50\n500000,50\n600000,50\n", "unit does not fit the num"),
    "commas for both": ("nm,Abs\n400,0,912\n410,0,915\n420,0,931\n", "commas may part the cells and the decimals"),
    "wavelengths both ways": ("x,300,400,500\n400,1,1,1\n500,1,1,1\n600,1,1,1\n", "across the first row or down the"),
    "no wavelengths": ("a,.5,.6,.7\nb,.5,.6,.7\nc,.5,.6,.7\n", "3 rows of 3 numbers and no wavelengths"),
    "two tables": (GOOD + "\nsecond\n" + GOOD, "a second seems to begin"),
    "thousands": ("nm;counts\n400;1.234,5\n410;936,5\n420;999,5\n430;998,1\n", "'1.234,5' where a number"),
    "a line of 2 MB": ("nm,%T\n" + "400," + "1" * 2_000_000 + "\n", "a line of 2000004 characters"),
    "10 MB without a line end": (b"0.5," * 2_500_000, "a line of 10000000 characters"),
    "zero bytes": (b"nm,%T\n400,\x00\x0050\n410,50\n", "not text: it holds zero bytes"),
    "control codes": (bytes(range(1, 32)) * 20, "not text: .* control codes"),
    "half a utf-16": ("nm,%T\n400,50\n".encode("utf-16") + b"\x00", "begins like utf-16"),
    "PDF": (b"%PDF-1.7\n...", "a PDF document and no spectra"),
    "JPEG": (b"\xff\xd8\xff\xe0\x00\x10JFIF", "a JPEG picture and no spectra"),
    "PNG": (b"\x89PNG\r\n\x1a\n", "a PNG picture and no spectra"),
    "gzip": (gzip.compress(GOOD.encode()), "a gzip archive and no spectra. Unpack it first"),
    "old workbook": (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + b"\x00" * 100, "an old binary workbook"),
    "zip that is no workbook": (zipped({"a.csv": GOOD.encode()}), "not text but a zip archive: it holds no workbook"),
    "cut zip": (zipped({"xl/a": b"x" * 100})[:60], "a damaged zip archive"),
    "zip bomb": (zipped({"xl/a": b"\x00" * (201 << 20)}), "the workbook unpacks to 201 MiB"),
    "hollow workbook": (zipped({"xl/a": b"x"}), "a damaged workbook"),
    "cut Parquet": (b"PAR1" + b"\x00" * 50, "a damaged Parquet file"),
    "JSON that is cut": ('{"quantity": "absorbance", ', "line 1 column .*: not well-formed JSON"),
    "JSON of something else": ('{"a": 1}', "JSON that holds no spectra"),
    "JSON without end": ('{"a":' * 100_000, "not well-formed JSON"),
    "JSON, unequal lengths": (
        '{"quantity": "absorbance", "wavelength_nm": [1, 2], "samples": [{"name": "a", "values": [1]}]}',
        "values of sample 1 is not a list of 2 numbers",
    ),
    "XML of something else": ("<?xml version='1.0'?><item/>", "XML with the root <item>"),
    "HTML": ("<html><body>no</body></html>", "XML with the root <html>"),
    "billion laughs": (
        '<?xml version="1.0"?><!DOCTYPE l [<!ENTITY a "ha"><!ENTITY b "&a;&a;">]><IESTM2714>&b;</IESTM2714>',
        "a document type declaration",
    ),
    "XML that is cut": ("<IESTM2714><Header>", "not well-formed XML"),
    "JCAMP mass spectrum": (JCAMP.replace("UV/VIS SPECTRUM", "MASS SPECTRUM"), "line 1: MASS SPECTRUM 'pond'"),
    "JCAMP chromatogram": (JCAMP.replace("UV/VIS SPECTRUM", "GAS CHROMATOGRAPH"), "GAS CHROMATOGRAPH 'pond'"),
    "JCAMP peak table": (JCAMP.replace("XYDATA= (X++(Y..Y))", "PEAK TABLE= (XY..XY)"), "a PEAKTABLE and no spectrum"),
    "JCAMP link alone": ("##TITLE= a\n##JCAMP-DX= 4.24\n##DATA TYPE= LINK\n##BLOCKS= 0\n##END=\n", "without a table"),
    "JCAMP logarithm": (JCAMP.replace("ABSORBANCE", "LOGARITHM EPSILON"), "line 5: YUNITS 'LOGARITHM EPSILON'"),
    "JCAMP x unit": (JCAMP.replace("NANOMETERS", "SECONDS"), "line 4: XUNITS 'SECONDS'"),
    "JCAMP without units": (JCAMP.replace("##YUNITS= ABSORBANCE\n", ""), "YUNITS missing"),
    "JCAMP X-check": (JCAMP.replace("\n430 ", "\n420 "), "line 14: the line begins at 420 and should at 430"),
    "JCAMP cut": (JCAMP.replace("430 400 500\n", ""), "3 points where NPOINTS says 5"),
    "JCAMP FIRSTY": (JCAMP.replace("FIRSTY= 0.1", "FIRSTY= 0.9"), "line 11: FIRSTY is 0.9 and the data begin with 0.1"),
    "JCAMP no number": (JCAMP.replace("XFACTOR= 1", "XFACTOR= one"), "line 6: XFACTOR is 'one'"),
    "JCAMP stray sign": (JCAMP.replace("400 500", "400 5&0"), "line 14 column 10: the character '&'"),
    "JCAMP repeats without end": (JCAMP.replace("400 500", "400 S99999999"), "a repeat count of"),
    "JCAMP Y-check": (
        JCAMP.replace("400 100 200 300", "400A00J00J00").replace("430 400", "420D01J00"),
        "Y-check fails",
    ),
    "JCAMP other form": (JCAMP.replace("(X++(Y..Y))", "(X++(R..R))"), "the form"),
    "CGATS fields": (CGATS.replace("OF_FIELDS 4", "OF_FIELDS 5"), "line 3: NUMBER_OF_FIELDS is 5 and the table has 4"),
    "CGATS sets": (CGATS.replace("OF_SETS 2", "OF_SETS 3"), "line 7: NUMBER_OF_SETS is 3 and the table has 2"),
    "CGATS cut row": (CGATS.replace("2 0.4 0.5 0.6", "2 0.4 0.5"), "line 10: a row without its 4 fields"),
    "CGATS cut end": (CGATS.replace("END_DATA\n", ""), "a table without END_DATA"),
    "CGATS text": (CGATS.replace("0.4", "dark"), "line 10 field SPECTRAL_NM400: 'dark' where a number"),
    "CGATS without spectra": (CGATS.replace("SPECTRAL_NM4", "XYZ_4"), "no spectral fields"),
}


@pytest.mark.parametrize("name", CASES)
def test_is_refused_with_a_sentence(file, name):
    content, sentence = CASES[name]
    with pytest.raises(InputError, match=sentence) as caught:
        read_spectra(file(content))
    assert "made.csv" in caught.value.where
    assert len(str(caught.value)) < 600


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        ("nm,power\n400,1\n410,-1\n420,1\n", "power of -1 at 410 nm"),
        ("nm,power\n400,0\n410,0\n420,0\n", "without power"),
        ("nm,one,two\n400,1,2\n410,1,2\n420,1,3\n", "2 columns of numbers"),
        ("nm,%T\n400,1\n410,2\n420,3\n", "transmittance, and no lamp"),
        ("<IESTM2714/>", "0 spectral points"),
        ('<IESTM2714><SpectralData wavelength="400">1</SpectralData></IESTM2714>', "1 spectral points"),
        (
            '<IESTM2714><SpectralData wavelength="400">1</SpectralData>\n'
            '<SpectralData wavelength="410">bright</SpectralData></IESTM2714>',
            "line 2: 'bright' where a number",
        ),
        ("<!DOCTYPE a SYSTEM 'file:///x'><IESTM2714/>", "document type declaration"),
        ("<IESTM2714><SpectralQuantity>transmittance</SpectralQuantity></IESTM2714>", "transmittance, and no lamp"),
    ],
)
def test_lamp_is_refused(file, content, sentence):
    with pytest.raises(InputError, match=sentence):
        read_lamp(file(content))


@pytest.mark.parametrize(
    ("path", "sentence"),
    [("no such file.csv", "there is no such file"), (".", "it is a folder"), ("a\x00b", "cannot be read")],
    ids=["missing", "folder", "zero byte"],
)
def test_a_path_that_cannot_be_read(path, sentence):
    with pytest.raises(InputError, match=sentence):
        read_spectra(path)


def test_the_size_limit_is_said(file):
    with pytest.raises(InputError, match=r"larger than .* MiB.*Parquet"):
        read_spectra(file(GOOD), size_limit=10)


def test_file_and_argument_that_contradict_each_other(file):
    with pytest.raises(InputError, match=r"the file says transmittance \('%T'\), and absorbance was asked for"):
        read_spectra(file(GOOD), quantity="absorbance")
