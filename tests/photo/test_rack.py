"""``rack.csv``: what is read and what is refused."""

from __future__ import annotations

import pytest

from chroma.photo.rack import Box, judge_boxes, rack_from, read_rack
from observers.errors import InputError

HEAD = "name,role,concentration,x,y,width,height\n"


def test_a_rack_with_boxes() -> None:
    rack = rack_from(HEAD + "b,blank,,10,20,30,40\ns,standard,0.1,50,20,30,40\nu,unknown,,90,20,30,40\n")
    assert [cuvette.role for cuvette in rack] == ["blank", "standard", "unknown"]
    assert [cuvette.concentration for cuvette in rack] == [(0.0,), (0.1,), ()]
    assert rack[1].box == Box(50, 20, 30, 40)


def test_semicolons_decimal_commas_and_a_mark_of_order(tmp_path) -> None:
    path = tmp_path / "rack.csv"
    path.write_bytes("\ufeffName;Role;Concentration;x;y;width;height\nb;blank;0;;;;\ns;standard;0,25;;;;\n".encode())
    assert read_rack(str(path))[1].concentration == (0.25,)


def test_two_dyes_have_a_column_each() -> None:
    rack = rack_from("name,role,concentration:red,concentration:blue\ns,standard,0.1,0\n", ["Red", "blue"])
    assert rack[0].concentration == (0.1, 0.0)


BAD = {
    "empty": ("", "is empty"),
    "only a header": (HEAD, "holds no cuvettes"),
    "no role column": ("name,concentration\nb,0\n", "column role is missing"),
    "unknown role": (HEAD + "b,bland,,,,,\n", "role 'bland'"),
    "no name": (HEAD + ",blank,,,,,\n", "without a name"),
    "twice": (HEAD + "b,blank,,,,,\nb,unknown,,,,,\n", "two cuvettes named"),
    "text for a number": (HEAD + "s,standard,strong,,,,\n", "'strong' is no number"),
    "not finite": (HEAD + "s,standard,nan,,,,\n", "no number"),
    "negative": (HEAD + "s,standard,-1,,,,\n", "needs its concentration"),
    "standard without": (HEAD + "s,standard,,,,,\n", "needs its concentration"),
    "blank with": (HEAD + "b,blank,1,,,,\n", "a blank with a concentration"),
    "unknown with": (HEAD + "u,unknown,1,,,,\n", "an unknown with a concentration"),
    "half a box": (HEAD + "b,blank,,1,2,,\n", "half a box"),
    "thin box": (HEAD + "b,blank,,1,2,3,40\n", "four pixels"),
    "some boxes": (HEAD + "b,blank,,1,2,30,40\nu,unknown,,,,,\n", "u has no box"),
    "too many cells": (HEAD + "b,blank,,1,2,30,40,9,9\n", "9 cells for 7 columns"),
    "a column twice": ("name,role,concentration,role\nb,blank,,\n", "two columns have one name"),
    "a stray quote": (HEAD + 'b,"blank,,,,,\n', "is no rack"),
}


@pytest.mark.parametrize(("text", "said"), BAD.values(), ids=BAD.keys())
def test_a_bad_rack_is_refused_in_words(text: str, said: str) -> None:
    with pytest.raises(InputError, match=said):
        rack_from(text)


def test_not_text_and_not_there(tmp_path) -> None:
    (tmp_path / "r.csv").write_bytes(b"\xff\xfe\x00name")
    with pytest.raises(InputError, match="not text in UTF-8"):
        read_rack(str(tmp_path / "r.csv"))
    with pytest.raises(InputError, match="cannot be read"):
        read_rack(str(tmp_path / "none.csv"))


@pytest.mark.parametrize(
    ("second", "said"),
    [((95, 0, 10, 10), "reaches outside"), ((5, 5, 10, 10), "overlap"), ((-1, 0, 10, 10), "reaches outside")],
    ids=["outside", "overlapping", "negative"],
)
def test_boxes_are_judged_against_the_photo(second: tuple[int, int, int, int], said: str) -> None:
    rack = rack_from(HEAD + "b,blank,,0,0,10,10\nu,unknown,," + ",".join(map(str, second)) + "\n")
    with pytest.raises(InputError, match=said):
        judge_boxes(rack, 100, 100)
