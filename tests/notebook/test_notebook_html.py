"""What a notebook shows of each result: a small table, escaped, with swatches whose codes stand beside them."""

import re
from dataclasses import replace
from xml.etree import ElementTree

import numpy as np
import pytest

from chroma.notebook import MOST_ROWS, Swatch, table_html
from chroma.spectra import measured

NM = np.arange(380.0, 781.0, 10.0)
KINDS = ("spectra", "colours", "checked", "fit", "unmixed", "matches")


def parsed(result):
    """The table as rows of texts, after it was read as well-formed XML."""
    root = ElementTree.fromstring(result._repr_html_())
    table = root.find("table")
    head = [cell.text or "" for cell in table.findall("thead/tr/th")]
    rows = [["".join(cell.itertext()) for cell in row] for row in table.findall("tbody/tr")]
    return root, head, rows


@pytest.mark.parametrize("kind", KINDS)
def test_each_result_is_a_small_table_with_swatches(results, kind):
    root, head, rows = parsed(results[kind])
    assert rows
    assert len(rows) <= MOST_ROWS
    assert {len(row) for row in rows} == {len(head)}
    assert all(cell.get("scope") == "col" for cell in root.iter("th"))
    assert root.find("table/caption").text
    boxes = [re.search("background:(#[0-9a-f]{6})$", span.get("style"))[1] for span in root.iter("span")]
    assert boxes
    beside = [code for row in rows for code in re.findall("#[0-9a-f]{6}", " ".join(row))]
    assert boxes == beside


def test_verdicts_are_words_and_swatches_say_whose_they_are(results):
    root, _, rows = parsed(results["checked"])
    assert [row[1] for row in rows] == [("pass", "undecided", "fail")[code] for code in results["checked"].worst]
    assert rows[0][2] == "0.17 ± 0.03"
    assert "9 pass, 11 fail, 0 undecided" in root.find("table/caption").text
    assert "own observer (10)" in "".join(root.itertext())
    assert "own observer" not in "".join(parsed(results["bare"])[0].itertext())


def test_swatches_of_the_2_degree_observer_are_those_of_predict(results):
    codes, _ = results["colours"].swatches()
    assert [row[-1].strip() for row in parsed(results["spectra"])[2]] == [row[0] for row in codes]
    _, _, checked = parsed(results["bare"])
    assert [row[-1].split()[1] for row in checked] == [row[0] for row in codes[:3]]


def test_a_long_result_is_cut_and_says_so(results):
    root, _, rows = parsed(results["colours"])
    assert len(rows) == MOST_ROWS
    assert "20 more; to_frame() has all" in "".join(root.itertext())
    many = measured([f"pond {i}" for i in range(1000)], NM, np.full((1000, len(NM)), 0.5), "transmittance")
    root, _, rows = parsed(many)
    assert len(rows) == MOST_ROWS
    assert f"{1000 - MOST_ROWS} more; to_frame() has all" in "".join(root.itertext())


@pytest.mark.parametrize("name", ["<b>pond</b>", "a & b", '"quoted"', "<script>alert(1)</script>"])
def test_names_are_escaped(name):
    odd = measured([name], NM, np.full((1, len(NM)), 0.5), "transmittance", notes=(f"note of {name}",))
    root, _, rows = parsed(odd)
    assert rows[0][0] == name
    assert not list(root.iter("script"))
    assert not list(root.iter("b"))
    assert f"note of {name}" in "".join(root.itertext())


def test_a_swatch_code_cannot_leave_its_attribute():
    text = table_html("c", ["h"], [[Swatch(('"><i>',))]], total=1)
    assert not list(ElementTree.fromstring(text).iter("i"))


@pytest.mark.parametrize(
    ("quantity", "value"), [("absorbance", 0.3), ("transmittance", 10**-0.3), ("reflectance", 10**-0.3)]
)
def test_absorbance_shows_the_colour_of_its_transmittance(quantity, value):
    grey = measured(["grey"], NM, np.full((1, len(NM)), value), quantity)
    assert parsed(grey)[2][0][-1].strip() == "#bcbcbc"


def test_no_swatch_where_there_is_no_colour(results):
    counts = measured(["a"], NM, np.full((1, len(NM)), 900.0), "counts")
    part = measured(["a"], NM[:5], np.full((1, 5), 0.5), "transmittance")
    for spectra in (counts, part):
        root, head, _ = parsed(spectra)
        assert head == ["sample", "lowest", "highest", "mean"]
        assert not list(root.iter("span"))


def test_what_is_found_in_a_cell_looks_as_the_cell_does(results):
    _, _, spectra = parsed(results["spectra"])
    _, head, unmixed = parsed(results["unmixed"])
    assert head[1:3] == ["heron g/L", "broom g/L"]
    shown, found = (np.array([list(bytes.fromhex(row[-1].strip()[1:])) for row in rows]) for rows in (spectra, unmixed))
    clean = ~results["unmixed"].foreign
    assert clean.sum() > 10
    assert np.abs(shown - found)[clean].max() <= 2


def test_a_recipe_looks_like_its_target(results):
    _, _, rows = parsed(results["matches"])
    assert rows[0][0].startswith("heron 0.0065")
    (target, best), (_, worse) = (
        [np.array(list(bytes.fromhex(code[1:]))) for code in row[-1].split()] for row in rows[:2]
    )
    assert np.abs(best - target).max() <= 1  # ΔE 0.02, which may round to the next code
    assert np.abs(worse - target).max() > 20


def test_a_recipe_without_a_dye_says_so(results):
    bare = replace(results["matches"].recipes[0], concentrations={})
    assert parsed(replace(results["matches"], recipes=(bare,)))[2][0][0] == "plain solvent"


def test_a_dye_is_shown_as_it_looks_at_absorbance_1(results):
    stronger = replace(results["fit"].dye, absorptivity=results["fit"].dye.absorptivity * 7)
    again = replace(results["fit"], dye=stronger)
    assert parsed(again)[2][0][-1] == parsed(results["fit"])[2][0][-1]
    assert parsed(results["fit"])[1][-1] == "at absorbance 1 (D65, 2°)"
