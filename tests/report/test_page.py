"""The structure of a page, as a parser of HTML sees it."""

from __future__ import annotations

import re
from dataclasses import replace
from html.parser import HTMLParser
from itertools import pairwise

import numpy as np
import pytest
from pages import PAGES, SEARCHED, made
from report_world import FILE, world

from chroma.decision import WORDS
from chroma.report.page import made_on, report_checked, report_generic
from chroma.report.sections_base import Section, number, table, words
from chroma.report.sections_check import MOST_LINES, MOST_SWATCHES, check_page, worst_first
from chroma.report.sections_svg import picture
from chroma.version import PROGRAM
from observers.errors import InputError

VOID = {"meta", "br", "link", "img", "input", "hr"}


class Tree(HTMLParser):
    """Elements with their attributes and texts; every element must be closed where it was opened."""

    def __init__(self, text: str) -> None:
        super().__init__(convert_charrefs=True)
        self.open: list[int] = []
        self.elements: list[tuple[str, dict[str, str | None]]] = []
        self.texts: dict[int, str] = {}
        self.feed(text)
        self.close()
        assert self.open == []

    def handle_starttag(self, tag, attrs):
        self.elements.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(len(self.elements) - 1)

    def handle_startendtag(self, tag, attrs):
        self.elements.append((tag, dict(attrs)))

    def handle_endtag(self, tag):
        assert self.elements[self.open.pop()][0] == tag

    def handle_data(self, data):
        for at in self.open:
            self.texts[at] = self.texts.get(at, "") + data

    def all(self, tag):
        return [(attrs, self.texts.get(i, "")) for i, (name, attrs) in enumerate(self.elements) if name == tag]


@pytest.fixture(scope="module")
def trees(tmp_path_factory):
    folder = tmp_path_factory.mktemp("pages")
    return {name: Tree(made(name, folder).read_text(encoding="utf-8")) for name in PAGES}


@pytest.mark.parametrize("name", PAGES)
def test_a_page_has_its_parts_in_order(trees, name):
    tree = trees[name]
    assert tree.all("html")[0][0]["lang"] == "en-GB"
    assert len(tree.all("h1")) == 1
    assert tree.all("title")[0][1] == tree.all("h1")[0][1]
    levels = [int(tag[1]) for tag, _ in tree.elements if re.fullmatch("h[1-6]", tag)]
    assert levels[0] == 1
    assert all(after - before <= 1 for before, after in pairwise(levels))
    order = [text for _, text in tree.all("h2")]
    assert order[0] == "Picture"
    assert order[-2:] == ["Conditions", "Notes and cautions"]
    answer = [text for attrs, text in tree.all("p") if attrs.get("class") == "answer"]
    assert len(answer) == 1
    assert answer[0].endswith((".", ")"))
    kinds = [tag for tag, _ in tree.elements if tag in ("p", "svg", "table", "dl")]
    assert kinds.index("svg") < kinds.index("table") < kinds.index("dl")


@pytest.mark.parametrize("name", PAGES)
def test_nothing_outside_is_referred_to(trees, name):
    tree = trees[name]
    assert not {tag for tag, _ in tree.elements} & {"script", "link", "iframe", "object", "embed", "metadata"}
    for tag, attrs in tree.elements:
        for key, value in attrs.items():
            if key.startswith("xmlns"):
                continue
            assert "//" not in (value or "") or (value or "").startswith("data:image/png;base64,"), (tag, key)
            assert not key.startswith("on")
            if key in ("href", "src"):
                assert value.startswith(("#", "data:")), (tag, key, value)
    assert not re.search(r"@import|url\((?!#)", tree.all("style")[0][1])


@pytest.mark.parametrize("name", PAGES)
def test_identifiers_are_single_and_references_meet_them(trees, name):
    own = [attrs["id"] for _, attrs in trees[name].elements if "id" in attrs]
    assert len(own) == len(set(own))
    for _, attrs in trees[name].elements:
        wanted = (attrs.get("aria-labelledby") or "").split()
        wanted += [ref[1:] for ref in (attrs.get("href"),) if ref and ref.startswith("#")]
        wanted += re.findall(r"url\(#([^)]*)\)", " ".join(value or "" for value in attrs.values()))
        assert set(wanted) <= set(own)


@pytest.mark.parametrize("name", PAGES)
def test_pictures_have_names_and_tables_have_headings(trees, name):
    tree = trees[name]
    pictures = tree.all("svg")
    assert pictures
    assert all(attrs["role"] == "img" for attrs, _ in pictures)
    assert len(tree.all("desc")) == len(pictures)
    assert all(len(text) > 30 for _, text in tree.all("desc"))
    assert len(tree.all("caption")) == len(tree.all("table")) > 0
    assert all(attrs.get("scope") in ("col", "row") for attrs, _ in tree.all("th"))
    assert len([1 for attrs, _ in tree.all("th") if attrs["scope"] == "row"]) == len(tree.all("tr")) - len(
        tree.all("table")
    )


@pytest.mark.parametrize("name", PAGES)
def test_conditions_say_what_the_answer_rests_on(trees, name):
    tree = trees[name]
    said = {name: text for (_, name), (_, text) in zip(tree.all("dt"), tree.all("dd"), strict=True)}
    assert said["Program"] == PROGRAM
    assert said["Date"] == "2001-09-09"
    assert said["Uncertainty"]
    if name in ("check", "colours", "match"):
        assert said["Illuminants"].startswith("D65")
        assert said["Observer"]
    if name in ("check", "match"):
        assert said["Colour difference"] == "ciede2000"
    sums = [text for _, text in tree.all("code")]
    assert all(re.fullmatch("SHA-256 [0-9a-f]{64}", text) for text in sums)
    assert (f"SHA-256 {FILE.sha256}" in sums) == (name in ("check", "colours", "many", "match"))


def test_the_page_is_made_again_alike(tmp_path):
    first, second = (made("check", tmp_path / name).read_bytes() for name in ("a", "b"))
    assert first == second


@pytest.mark.parametrize(("epoch", "day"), [("0", "1970-01-01"), ("1000000000", "2001-09-09")])
def test_the_date_is_what_the_environment_says(monkeypatch, epoch, day):
    monkeypatch.setenv("SOURCE_DATE_EPOCH", epoch)
    assert made_on() == day


@pytest.mark.parametrize("epoch", ["", "today", "1e9", "9" * 30])
def test_a_date_that_is_none_is_refused(monkeypatch, epoch):
    monkeypatch.setenv("SOURCE_DATE_EPOCH", epoch)
    with pytest.raises(InputError, match="SOURCE_DATE_EPOCH"):
        made_on()


def test_verdicts_and_numbers_of_the_table(trees):
    checked, *_ = world()
    rows = [text.split("\n")[0] for _, text in trees["check"].all("tr") if text.startswith("S-")]
    assert len(rows) == len(checked.names)
    for i, (name, text) in enumerate(zip(checked.names, rows, strict=True)):
        assert text.startswith(name)
        assert WORDS[checked.worst[i]] in text
        assert f"{checked.delta_e[i, 1]:.2f} ± 0.30" in text
    marks = {text for attrs, text in trees["check"].all("span") if attrs.get("aria-hidden") == "true"}
    assert marks <= {"○", "△", "✕"}
    assert len(marks) == len(set(checked.worst))


def test_many_batches_show_the_worst_and_say_so(trees):
    captions = [text for _, text in trees["many"].all("figcaption")]
    assert f"the {MOST_SWATCHES} farthest off; the other 40" in captions[0]
    assert len([1 for _, text in trees["many"].all("tr") if text.startswith("S-")]) == 60


def test_worst_first_goes_by_verdict_and_then_by_share_of_the_limit():
    checked, *_ = world(60)
    order = worst_first(checked)
    assert sorted(order) == list(range(60))
    assert (np.diff(checked.worst[order].astype(int)) <= 0).all()
    failed = [i for i in order if checked.worst[i] == 2]
    assert failed[0] == int(np.argmax((checked.delta_e / checked.limits).max(axis=1)))


def test_a_batch_that_fails_comes_before_one_that_passes_farther_off():
    checked, *_ = world(3)
    delta_e, verdicts = (
        np.array([[5.0, 0.1], [2.0, 0.1], [3.0, 0.1]]),
        np.array([[0, 0], [2, 0], [1, 2]], dtype=np.int8),
    )
    assert worst_first(replace(checked, delta_e=delta_e, verdicts=verdicts)) == [2, 1, 0]


def test_very_many_batches_are_cut_in_the_table_and_it_says_so():
    page = check_page(*world(MOST_LINES + 5, ("D65",)))
    section = next(section for section in page.sections if section.heading == "Every batch")
    assert len(section.tables[0].rows) == MOST_LINES
    assert f"{MOST_LINES} batches farthest off, of {MOST_LINES + 5}" in section.paragraphs[0]


HOSTILE = (
    "<script>alert(1)</script>",
    "a$b$ $\\frac{$",
    "&lt;b&gt; \"x\" 'y'",
    "池の水 №5",
    "]]>--><svg onload=x>",
    "  ",
    "x" * 300,
)


def test_names_are_words_and_nothing_else(tmp_path):
    checked, target, batches = world((*HOSTILE, *(f"S-{i}" for i in range(6))), spread=0.3)
    path = tmp_path / "hostile.html"
    report_checked(checked, target, batches, str(path))
    tree = Tree(path.read_text(encoding="utf-8"))
    assert "script" not in {tag for tag, _ in tree.elements}
    assert not any(key.startswith("on") for _, attrs in tree.elements for key in attrs)
    cells = [text for attrs, text in tree.all("th") if attrs["scope"] == "row"]
    assert cells[: len(HOSTILE)] == list(HOSTILE)
    drawn = {text for _, text in tree.all("text")}
    assert set(HOSTILE[:-2]) <= drawn
    assert f"{'x' * 27}…" in drawn  # a picture has no room for all of it


def test_a_single_batch_and_a_pair_have_pages(tmp_path):
    for count, uncertainty in ((1, None), (2, 0.2)):
        path = tmp_path / f"{count}.html"
        report_checked(*world(count, ("D65",), uncertainty=uncertainty), str(path))
        tree = Tree(path.read_text(encoding="utf-8"))
        assert "In order" not in [text for _, text in tree.all("h2")]
    assert Tree((tmp_path / "1.html").read_text(encoding="utf-8")).all("h1")[0][1] == "Check of 1 batch against pond"
    assert "none known" in (tmp_path / "1.html").read_text(encoding="utf-8")


def test_any_other_answer_has_a_page(tmp_path):
    from chroma.report.plots import new_axes

    drawn = picture(new_axes, "Empty axes", "Axes without anything in them, for the test.")
    section = Section("Picture", (drawn,), (table("Ones", ("what", "value"), [[words("one"), number("1")]]),))
    path = tmp_path / "other.html"
    report_generic(
        "Other", "It is so.", [section], str(path), conditions=[("Lamp", "A")], sources=[FILE], cautions=["Mind."]
    )
    tree = Tree(path.read_text(encoding="utf-8"))
    assert [text for _, text in tree.all("h2")] == ["Picture", "Conditions", "Notes and cautions"]
    assert tree.all("td")[0] == ({"class": "n"}, "1")


def test_a_page_is_not_written_over(tmp_path):
    path = tmp_path / "page.html"
    report_generic("Once", "First.", [], str(path))
    before = path.read_text(encoding="utf-8")
    with pytest.raises(InputError, match=r"exists|there already"):
        report_generic("Twice", "Second.", [], str(path))
    assert path.read_text(encoding="utf-8") == before
    report_generic("Twice", "Second.", [], str(path), True)
    assert "Second." in path.read_text(encoding="utf-8")
    with pytest.raises(InputError, match="a report named"):
        report_generic("Once", "First.", [], str(tmp_path / "page.pdf"))
    assert sorted(item.name for item in tmp_path.iterdir()) == ["page.html"]


def test_all_kinds_of_pages_are_tested():
    import chroma.report.page as module

    assert {name for name in dir(module) if name.startswith("report_")} == set(SEARCHED)
