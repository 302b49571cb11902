"""Tolerances: from TOML, and every refusal."""

import pytest

from chroma.difference.formulas import Formula
from chroma.tolerance import Tolerance, read_tolerance, tolerance_from
from observers.errors import InputError


def test_a_tolerance_with_everything(tmp_path):
    path = tmp_path / "t.toml"
    path.write_text(
        """
formula = "cmc"
cmc = "1:1"
limit = 1.0
observer = "2"
weights = "astm"
rule = "guard-band"
coverage = 3
uncertainty = 0.1

[illuminants]
D65 = 0.8
A = 1.5
FL3.1 = 2.0
"led:525nm/30nm" = true

[one_sided]
dL_min = -0.4
dH_max = 0.3
""",
        encoding="utf-8",
    )
    tolerance = read_tolerance(str(path))
    assert tolerance == Tolerance(
        {"D65": 0.8, "A": 1.5, "FL3.1": 2.0, "led:525nm/30nm": 1.0},
        Formula("cmc", l_c=(1, 1)),
        "2",
        "astm",
        "guard-band",
        3.0,
        0.1,
        {"dL_min": -0.4, "dH_max": 0.3},
    )


def test_the_least_that_a_tolerance_needs():
    tolerance = tolerance_from({"limit": 1})
    assert dict(tolerance.limits) == {"D65": 1.0}
    assert tolerance.formula == Formula("ciede2000")
    assert (tolerance.observer, tolerance.weights, tolerance.rule) == ("10", "cie", "simple")
    assert (tolerance.coverage, tolerance.uncertainty) == (2.0, None)


def test_lamps_as_a_list_share_the_limit():
    assert dict(tolerance_from({"limit": 0.5, "illuminants": ["A", "FL3.1"]}).limits) == {"A": 0.5, "FL3.1": 0.5}


def test_parameters_of_the_formula():
    assert tolerance_from({"limit": 1, "k": "2:1:1"}).formula == Formula("ciede2000", k=(2, 1, 1))


@pytest.mark.parametrize(
    ("content", "message"),
    [
        ({"limits": 1}, "unknown key 'limits': known are formula, limit, observer"),
        ({}, r"no limit for D65. Write limit = 1.0 above, or D65 = 1.0 under \[illuminants\]"),
        ({"illuminants": {"A": True}}, "no limit for A"),
        ({"illuminants": ["A"]}, "no limit for A"),
        ({"limit": 0}, "limit 0 for D65: a limit is a positive colour difference"),
        ({"limit": -1.0}, "limit -1 for D65"),
        ({"limit": "1"}, "limit = '1': a number is wanted"),
        ({"limit": True}, "limit = True: a number is wanted"),
        ({"limit": float("nan")}, "limit = nan: a number is wanted"),
        ({"limit": float("inf")}, "limit = inf: a number is wanted"),
        ({"limit": 1, "illuminants": {"A": "much"}}, "illuminants.A = 'much': a number is wanted"),
        ({"limit": 1, "illuminants": {"A": False}}, "illuminants.A = False: a number is wanted"),
        ({"limit": 1, "illuminants": "A"}, r"illuminants = 'A': a table of names and numbers is wanted"),
        ({"limit": 1, "illuminants": [1]}, r"illuminants = \[1\]: a table"),
        (
            {"limit": 1, "one_sided": {"dE_max": 1}},
            "unknown one-sided limit 'dE_max': known are dL_min, dL_max, da_min",
        ),
        ({"limit": 1, "one_sided": {"dL_max": None}}, "one_sided.dL_max = None: a number is wanted"),
        ({"limit": 1, "rule": "strict"}, "unknown rule 'strict': known are simple, guard-band"),
        ({"limit": 1, "weights": "din"}, "unknown weights 'din': known are cie, astm"),
        ({"limit": 1, "observer": 3}, "unknown observer '3': known are 2, 10"),
        ({"limit": 1, "coverage": 0}, "coverage must be positive and uncertainty not negative"),
        ({"limit": 1, "coverage": -2}, "coverage must be positive"),
        ({"limit": 1, "uncertainty": -0.1}, "uncertainty not negative"),
        ({"limit": 1, "formula": "de2000"}, "unknown formula 'de2000'"),
        ({"limit": 1, "k": "1:1"}, "'1:1': 3 numbers with colons between them are wanted"),
        ({"limit": 1, "k": [1, 1, 1]}, "3 numbers with colons"),
        ({"limit": 1, "formula": "cmc", "cmc": "a:b"}, "'a:b': 2 numbers with colons"),
        ({"limit": 1, "formula": "cmc", "cmc": "0:1"}, "parameters of cmc must be positive"),
        ({"limit": 1, "cmc": "2:1"}, "l:c does not apply to ciede2000"),
    ],
)
def test_what_is_no_tolerance_is_refused(content, message):
    with pytest.raises(InputError, match=message):
        tolerance_from(content)


def test_no_lamp_at_all_is_refused():
    with pytest.raises(InputError, match="no illuminant in the tolerance"):
        Tolerance({})


def test_observers_may_be_written_as_numbers():
    assert tolerance_from({"limit": 1, "observer": 2}).observer == "2"


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"limit = ", r"t.toml: is no valid TOML: .*Mend that line"),
        (b"\xff\xfe", "t.toml: is not text"),
        (b"limit = 1\nlimit = 2\n", "t.toml: is no valid TOML"),
        (b"a = " + b"[" * 20000, "t.toml: is no valid TOML"),
        (b"limits = 1\n", "t.toml: unknown key 'limits'"),
    ],
    ids=["cut off", "no text", "twice", "nested", "key"],
)
def test_a_file_that_cannot_be_read_is_named(tmp_path, content, message):
    path = tmp_path / "t.toml"
    path.write_bytes(content)
    with pytest.raises(InputError, match=message):
        read_tolerance(str(path))


def test_a_missing_file_is_named(tmp_path):
    with pytest.raises(InputError, match=r"none.toml: cannot be read"):
        read_tolerance(str(tmp_path / "none.toml"))
    with pytest.raises(InputError, match="cannot be read"):
        read_tolerance(str(tmp_path))
