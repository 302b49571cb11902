"""``lamplit photo`` from the outside: files in, tables and JSON out, refusals in one line. Photos are simulated."""

from __future__ import annotations

import io
import json

import numpy as np
import pytest
from click.testing import CliRunner
from photo.shared import made
from PIL import Image

from chroma.cli.photo_command import command
from chroma.dye.files import dye_text
from observers.errors import InputError


@pytest.fixture
def bench(tmp_path, monkeypatch):
    """A folder with a photo, its rack with and without boxes, and the dye."""
    monkeypatch.chdir(tmp_path)
    one = made(1002)
    (tmp_path / "rack.jpg").write_bytes(one.jpeg)
    (tmp_path / "own.dye.json").write_text(dye_text(one.dye), encoding="utf-8")
    known = one.known(3)[:, 0]
    head = "name,role,concentration,x,y,width,height\n"
    with_boxes, bare = head, head
    for i, box in enumerate(one.boxes):
        c = known[i] if i < len(known) else np.nan
        role = "blank" if i == 0 else "unknown" if np.isnan(c) else "standard"
        start = f"c{i},{role},{c if role == 'standard' else ''}"
        with_boxes += f"{start},{box.x},{box.y},{box.width},{box.height}\n"
        bare += f"{start},,,,\n"
    (tmp_path / "rack.csv").write_text(with_boxes, encoding="utf-8")
    (tmp_path / "bare.csv").write_text(bare, encoding="utf-8")
    return tmp_path


def run(*arguments: str) -> str:
    """What the command prints on stdout; its refusals come out as InputError."""
    done = CliRunner().invoke(command, list(arguments), standalone_mode=False)
    if done.exception is not None:
        raise done.exception
    return done.stdout


DYE = ("--dye", "own.dye.json", "--path-length", "10mm")


def test_estimate_prints_a_table_with_cautions(bench) -> None:
    said = run("estimate", "rack.jpg", "--rack", "rack.csv", *DYE)
    assert "concentration (g/L)" in said
    assert "confirm with a calibrated instrument" in said
    assert "taken as sRGB" in said
    assert "Limit of detection" in said
    assert (bench / "rack.boxes.png").exists()


def test_json_alone_on_stdout(bench) -> None:
    content = json.loads(run("estimate", "rack.jpg", "--rack", "bare.csv", *DYE, "-i", "D50", "--json"))
    assert content["unit"] == "g/L"
    truth = made(1002).concentration
    for sample in content["samples"]:
        if sample["name"] == "c11":
            assert "off the dye's path" in sample["flags"]
            continue
        assert sample["concentration"] == pytest.approx(truth[int(sample["name"][1:])], rel=0.12)
    assert content["sources"][0]["path"] == "rack.jpg"
    assert len(content["sources"][0]["sha256"]) == 64


def test_out_writes_rows_and_never_over_another_file(bench) -> None:
    run("estimate", "rack.jpg", "--rack", "rack.csv", *DYE, "--out", "c.csv")
    assert (bench / "c.csv").read_text(encoding="utf-8").startswith("name,dye,concentration,low,high,unit,flags")
    with pytest.raises(InputError, match="exists"):
        run("estimate", "rack.jpg", "--rack", "rack.csv", *DYE, "--out", "c.csv")


def test_an_overlay_is_written_over_its_own_kind_only(bench) -> None:
    arguments = ("estimate", "rack.jpg", "--rack", "rack.csv", *DYE, "--overlay", "mine.png")
    run(*arguments)
    run(*arguments)
    Image.new("RGB", (9, 9)).save(bench / "mine.png")
    with pytest.raises(InputError, match="exists"):
        run(*arguments)


def test_calibrate_then_estimate_without_standards(bench) -> None:
    said = run("calibrate", "rack.jpg", "--rack", "rack.csv", *DYE, "--out", "phone.cal.json", "--json")
    assert json.loads(said)["standards"] == 3
    bare = (bench / "rack.csv").read_text(encoding="utf-8").splitlines()
    later = [bare[0]] + [
        ",".join([row.split(",")[0], "unknown", "", *row.split(",")[3:]]) if ",standard," in row else row
        for row in bare[1:]
    ]
    (bench / "later.csv").write_text("\n".join(later), encoding="utf-8")
    content = json.loads(
        run("estimate", "rack.jpg", "--rack", "later.csv", *DYE, "--calibration", "phone.cal.json", "--json")
    )
    assert content["standards"] == 0
    assert len(content["samples"]) == 11
    assert any("warning" in note for note in content["notes"])


def test_several_photos_are_combined(bench) -> None:
    (bench / "again.jpg").write_bytes((bench / "rack.jpg").read_bytes())
    content = json.loads(run("estimate", "rack.jpg", "again.jpg", "--rack", "rack.csv", *DYE, "--json"))
    assert "2 photos combined" in content["notes"]


def test_the_card(bench) -> None:
    pytest.importorskip("cv2")
    run("card", "--out", "card.pdf", "--paper", "letter")
    assert (bench / "card.pdf").read_bytes().startswith(b"%PDF")
    with pytest.raises(InputError, match="exists"):
        run("card", "--out", "card.pdf")
    with pytest.raises(InputError, match="a card is a PDF"):
        run("card", "--out", "card.png")


def grey_jpeg() -> bytes:
    target = io.BytesIO()
    Image.fromarray(np.tile(np.arange(200, dtype=np.uint8), (150, 1))).save(target, "JPEG")
    return target.getvalue()


def rack_with(bench, change) -> None:
    text = (bench / "rack.csv").read_text(encoding="utf-8")
    (bench / "rack.csv").write_text(change(text), encoding="utf-8")


BAD = {
    "no blank": (
        lambda b: rack_with(
            b, lambda t: "\n".join(r for r in t.splitlines() if ",standard," not in r and ",blank," not in r)
        ),
        {},
        "no blank in the rack",
    ),
    "no unknown": (
        lambda b: rack_with(b, lambda t: "\n".join(r for r in t.splitlines() if ",unknown," not in r)),
        {},
        "no unknown in the rack",
    ),
    "boxes outside": (lambda b: rack_with(b, lambda t: t + "far,unknown,,1190,10,60,60\n"), {}, "outside the photo"),
    "boxes overlapping": (
        lambda b: rack_with(b, lambda t: t + t.splitlines()[1].replace("c0,blank", "x,unknown") + "\n"),
        {},
        "overlap",
    ),
    "grey photo": (lambda b: (b / "rack.jpg").write_bytes(grey_jpeg()), {}, "grey photo"),
    "corrupted JPEG": (lambda b: (b / "rack.jpg").write_bytes(made(1002).jpeg[:9000]), {}, "is damaged"),
    "no photo": (lambda b: (b / "rack.jpg").write_bytes(b"name,role\n" * 9), {}, "no photo that can be read"),
    "missing photo": (lambda b: (b / "rack.jpg").unlink(), {}, "cannot be read"),
    "missing dye file": (lambda b: (b / "own.dye.json").unlink(), {}, "cannot be read"),
    "no dye file": (lambda b: (b / "own.dye.json").write_text("{}", encoding="utf-8"), {}, "is no dye file"),
    "no path length": (lambda b: None, {"--path-length": None}, "--path-length is missing"),
    "wrong unit": (lambda b: None, {"--path-length": "10g"}, "number with its unit"),
    "no unit": (lambda b: None, {"--path-length": "10"}, "number with its unit"),
    "no dye, few standards": (lambda b: None, {"--dye": None, "--path-length": None}, "4 standards are needed"),
    "unknown lamp": (lambda b: None, {"-i": "D99"}, "unknown"),
    "missing calibration": (lambda b: None, {"--calibration": "none.cal.json"}, "cannot be read"),
    "missing rack": (lambda b: (b / "rack.csv").unlink(), {}, "cannot be read"),
    "one cuvette fewer": (
        lambda b: rack_with(
            b,
            lambda t: "\n".join(
                ",".join([*r.split(",")[:3], "", "", "", ""]) if n else r for n, r in enumerate(t.splitlines()[:-1])
            ),
        ),
        {},
        "12 cuvettes found in the photo, 11 rows",
    ),
}


@pytest.mark.parametrize(("spoil", "options", "said"), BAD.values(), ids=BAD.keys())
def test_bad_input_is_refused_in_words_and_writes_nothing(bench, spoil, options, said: str) -> None:
    spoil(bench)
    chosen = {"--rack": "rack.csv", "--dye": "own.dye.json", "--path-length": "10mm", "--out": "c.csv", **options}
    arguments = [part for key, value in chosen.items() if value is not None for part in (key, value)]
    with pytest.raises(InputError, match=said):
        run("estimate", "rack.jpg", *arguments)
    assert not (bench / "c.csv").exists()
    assert not list(bench.glob("*.part")) + list(bench.glob(".*.part"))


def test_no_standard_in_range_is_said(bench) -> None:
    """The one standard left is the weakest cuvette: what is stronger is flagged."""
    one = made(1002)
    keep = f"c{one.ranked[0]},"
    rack_with(
        bench,
        lambda t: "\n".join(
            ",".join([r.split(",")[0], "unknown", "", *r.split(",")[3:]])
            if ",standard," in r and not r.startswith(keep)
            else r
            for r in t.splitlines()
        ),
    )
    content = json.loads(run("estimate", "rack.jpg", "--rack", "rack.csv", *DYE, "--json"))
    flags = {sample["name"]: sample["flags"] for sample in content["samples"]}
    assert "above the standards" in flags[f"c{one.ranked[9]}"]
