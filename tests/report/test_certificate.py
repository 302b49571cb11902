"""The certificate of one batch."""

import os
import shutil
import subprocess
from dataclasses import replace

import numpy as np
import pytest
from report_world import FILE, world

from chroma.decision import WORDS
from chroma.report.certificate import certificate, draw_certificate, one_batch
from observers.errors import InputError


def said(figure):
    return [text.get_text() for text in figure.texts]


def pages(path):
    return path.read_bytes().count(b"/Type /Page\n") + path.read_bytes().count(b"/Type /Page ")


@pytest.mark.parametrize("row", [0, 3, 11])
def test_one_batch_alone_is_told(tmp_path, row):
    checked, target, batches = world()
    path = tmp_path / "one.pdf"
    certificate(checked, row, target, batches, str(path))
    assert path.read_bytes().startswith(b"%PDF")
    assert pages(path) == 1
    own = one_batch(checked, row)
    assert own.names == (checked.names[row],)
    for key in ("delta_e", "parts", "expanded", "expanded_parts", "within", "verdicts", "XYZ100", "Lab"):
        np.testing.assert_array_equal(getattr(own, key)[0], getattr(checked, key)[row])


def test_what_stands_on_it(monkeypatch):
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1000000000")
    checked, target, batches = world(1)
    figure = draw_certificate(checked, target, batches)
    text = said(figure)
    word = WORDS[checked.worst[0]]
    assert "Certificate of colour: S-001" in text
    assert any(line.endswith("2001-09-09") for line in text)
    assert any(line.endswith(f" {word}") for line in text)
    assert f"SHA-256 {FILE.sha256}" in text
    assert {f"{checked.delta_e[0, 0]:.2f}", f"{checked.delta_e[0, 1]:.2f}", "0.30"} <= set(text)
    assert {"ciede2000", "guard-band", "D65 1, A 1", "CIE 1964 10°"} <= set(text)
    assert len(figure.axes) == 3


@pytest.mark.parametrize("lamps", [1, 6])
def test_nothing_runs_off_the_page_or_over_the_foot(lamps):
    names = ("D65", "A", "FL11", "FL2", "D50", "FL12")[:lamps]
    checked, target, batches = world(("a name of a batch that is rather long " * 4,), names)
    three = tuple(replace(FILE, path=f"{i}.csv") for i in range(3))
    figure = draw_certificate(replace(checked, sources=three), target, batches)
    figure.draw_without_rendering()
    width, height = figure.bbox.width, figure.bbox.height
    boxes = [(text.get_text(), text.get_window_extent()) for text in figure.texts if text.get_text().strip()]
    for text, box in boxes:
        assert box.x0 >= 0.05 * width, text
        assert box.x1 <= 0.97 * width, text
        assert box.y0 >= 0.015 * height, text
        assert box.y1 <= 0.985 * height, text
    axes = [(one.get_title() or "swatches", one.get_tightbbox()) for one in figure.axes]
    boxes += axes
    for i, (text, box) in enumerate(boxes):
        for other, at in boxes[i + 1 :]:
            over = min(box.x1, at.x1) - max(box.x0, at.x0), min(box.y1, at.y1) - max(box.y0, at.y0)
            assert not (over[0] > 1 and over[1] > 3), (text, other)


def test_it_is_made_again_alike(tmp_path, monkeypatch):
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1000000000")
    checked, target, batches = world(2)
    for name in ("a.pdf", "b.pdf"):
        certificate(checked, 1, target, batches, str(tmp_path / name))
    assert b"CreationDate" not in (tmp_path / "a.pdf").read_bytes()  # it would differ a second later
    assert (tmp_path / "a.pdf").read_bytes() == (tmp_path / "b.pdf").read_bytes()


def test_names_of_any_kind(tmp_path):
    checked, target, batches = world(("a$b$ $\\frac{$", "池の水", "x" * 300))
    for row in range(3):
        certificate(checked, row, target, batches, str(tmp_path / f"{row}.pdf"))
        assert pages(tmp_path / f"{row}.pdf") == 1


def test_what_cannot_be_is_refused(tmp_path):
    checked, target, batches = world(2)
    with pytest.raises(InputError, match="is a PDF"):
        certificate(checked, 0, target, batches, str(tmp_path / "one.html"))
    with pytest.raises(InputError, match="no such batch"):
        certificate(checked, 2, target, batches, str(tmp_path / "one.pdf"))
    many = world(1, ("D65", "A", "FL11", "FL2", "D50", "FL12", "C"))
    with pytest.raises(InputError, match="6 fit on its page"):
        certificate(many[0], 0, *many[1:], str(tmp_path / "one.pdf"))
    assert list(tmp_path.iterdir()) == []
    certificate(checked, 0, target, batches, str(tmp_path / "one.pdf"))
    with pytest.raises(InputError, match=r"there already|exists"):
        certificate(checked, 0, target, batches, str(tmp_path / "one.pdf"))


@pytest.mark.skipif(
    shutil.which("pdftotext") is None and "LAMPLIT_CI" not in os.environ, reason="poppler-utils is not installed"
)
def test_its_words_can_be_read_by_a_program(tmp_path):
    checked, target, batches = world(1)
    path = tmp_path / "one.pdf"
    certificate(checked, 0, target, batches, str(path))
    text = subprocess.run(["pdftotext", path, "-"], capture_output=True, text=True, check=True).stdout
    assert "Certificate of colour: S-001" in text
    assert FILE.sha256 in text
