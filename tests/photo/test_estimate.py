"""Estimates from rendered photos. Everything is simulated; cameras are left out of the population they are read with."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from photo.render.scenes import picture_of
from photo.render.world import dye
from photo.shared import estimated, made, rack_of, reading_of, truths

from chroma.photo.calibration import calibrated, calibration_text, read_calibration
from chroma.photo.combine import combined
from chroma.photo.estimate import CAUTIONS, Part, estimate, judge_rack, read_photo, solved_photo
from chroma.photo.words import estimate_object, estimate_rows
from observers.errors import InputError
from observers.illuminants import illuminant

SCENES = (1000, 1001, 1002, 1003)
# Largest root-mean-square relative error over a scene's unknowns; the benchmark has the figures over many scenes.
WORST = {3: 0.05, 1: 0.08, 0: 0.4}


@pytest.mark.parametrize("standards", [3, 1, 0], ids=["three standards", "one", "none"])
@pytest.mark.parametrize("number", SCENES)
def test_concentrations_are_found(number: int, standards: int) -> None:
    found = estimated(number, standards)
    truth = truths(number, found)
    middle = np.array([row.parts[0].middle for row in found.estimates])
    assert np.sqrt(((middle / truth - 1) ** 2).mean()) < WORST[standards]
    for row, c in zip(found.estimates, truth, strict=True):
        assert 0 <= row.parts[0].low < row.parts[0].middle < row.parts[0].high
        # Three times the interval's half width is beyond chance.
        half = (row.parts[0].high - row.parts[0].low) / 2
        assert abs(row.parts[0].middle - c) < 3 * half


def test_more_standards_narrow_the_intervals() -> None:
    widths = [
        np.median([(r.parts[0].high - r.parts[0].low) / r.parts[0].middle for r in estimated(1001, n).estimates])
        for n in (3, 1, 0)
    ]
    assert widths[0] < widths[1] < widths[2]


def test_an_unknown_lamp_is_a_mixture_and_that_is_said() -> None:
    found = estimated(1002, 3, named=False)
    assert len(found.lamps) == 8
    assert sum(found.lamps.values()) == pytest.approx(1.0)
    assert any("mixture of eight" in note for note in found.notes)
    truth = truths(1002, found)
    assert np.abs([r.parts[0].middle for r in found.estimates] / truth - 1).max() < 0.12


@pytest.mark.parametrize("number", SCENES)
def test_a_contaminated_cuvette_is_flagged_and_only_that(number: int) -> None:
    found = estimated(number, 3, spoilt=True)
    off = [row.name for row in found.estimates if "off the dye's path" in row.flags]
    assert off == ["c11"]


def test_the_wrong_dye_is_flagged_even_with_no_standard() -> None:
    """A red solution read as the blue dye's."""
    one = made(1002)
    assert one.dye.name == "simulated red"
    wrong = estimate(
        picture_of(one.jpeg), reading_of(1002, 0), [dye("simulated blue")], 10.0, lamps=[illuminant(one.setting.lamp)]
    )
    assert any("off the dye's path" in row.flags for row in wrong.estimates)


def test_no_blank_is_flagged_when_standards_stand_in_for_it() -> None:
    found = estimated(1001, 3, blank=False)
    assert "no blank" in found.flags
    truth = truths(1001, found)
    assert np.abs(np.log([r.parts[0].middle for r in found.estimates] / truth)).max() < 0.5


def test_no_blank_and_no_standard_is_refused() -> None:
    with pytest.raises(InputError, match="no blank in the rack"):
        judge_rack(rack_of(made(1001), 0, blank=False))


def test_no_unknown_is_refused() -> None:
    with pytest.raises(InputError, match="no unknown in the rack"):
        judge_rack(rack_of(made(1001), 3)[:1])


def test_above_the_standards_and_above_the_dyes_range_are_flagged() -> None:
    one = made(1001)
    weak = one.concentration[one.ranked[0]]
    rack = [
        replace(cuvette, role="unknown", concentration=())
        if cuvette.concentration and cuvette.concentration[0] > weak
        else cuvette
        for cuvette in rack_of(one, 3)
    ]
    picture = picture_of(one.jpeg)
    reading = read_photo(picture, rack)
    short = replace(one.dye, range_high=2 * weak)
    found = estimate(picture, reading, [short], 10.0, lamps=[illuminant(one.setting.lamp)])
    strongest = next(row for row in found.estimates if row.name == f"c{one.ranked[9]}")
    assert {"above the standards", "above the dye's fitted range"} <= set(strongest.flags)


def test_a_blank_read_as_unknown_is_below_detection() -> None:
    one = made(1003)
    rack = list(rack_of(one, 3))
    rack.append(replace(rack[0], name="water", role="unknown", concentration=(), box=None))
    box = rack[0].box
    assert box is not None
    rack[0] = replace(rack[0], box=replace(box, height=box.height / 2 - 2))
    rack[-1] = replace(rack[-1], box=replace(box, y=box.y + box.height / 2 + 2, height=box.height / 2 - 4))
    picture = picture_of(one.jpeg)
    found = estimate(picture, read_photo(picture, rack), [one.dye], 10.0, lamps=[illuminant(one.setting.lamp)])
    water = next(row for row in found.estimates if row.name == "water")
    assert "below detection" in water.flags
    assert 0 < found.detection[0] < one.concentration[one.ranked[0]]
    assert water.parts[0].low == 0.0


def test_the_path_length_counts() -> None:
    one = made(1001)
    reading, picture = reading_of(1001, 0), picture_of(one.jpeg)
    lamps = [illuminant(one.setting.lamp)]
    ten, twenty = (estimate(picture, reading, [one.dye], mm, lamps=lamps) for mm in (10.0, 20.0))
    for a, b in zip(ten.estimates, twenty.estimates, strict=True):
        assert a.parts[0].middle == pytest.approx(2 * b.parts[0].middle, rel=1e-6)


def test_an_uncertain_dye_widens_the_interval_without_standards() -> None:
    one = made(1001)
    vague = replace(one.dye, common=0.2 * one.dye.absorptivity[None])
    reading, picture, lamps = reading_of(1001, 0), picture_of(one.jpeg), [illuminant(one.setting.lamp)]
    sure, unsure = (estimate(picture, reading, [d], 10.0, lamps=lamps) for d in (one.dye, vague))
    width = [np.mean([r.parts[0].high - r.parts[0].low for r in found.estimates]) for found in (sure, unsure)]
    assert width[1] > 1.3 * width[0]


def test_independent_errors_of_the_bands_act_on_channels_as_they_should() -> None:
    """The spread of a broad response, by the shared errors that stand in for them and by many draws."""
    from chroma.photo.solve import absorbance_of
    from observers.cameras import CAMERA_NM, effective_channels
    from observers.cameras import camera as measured

    rough = replace(made(1001).dye, independent=np.linspace(0.5, 2.0, len(CAMERA_NM)))
    _, modes, _ = absorbance_of([rough], 10.0)
    channels = effective_channels(measured("camera-20"), illuminant("D50"))
    drawn = np.random.default_rng(1).standard_normal((20000, len(CAMERA_NM))) * rough.independent
    np.testing.assert_allclose(
        np.sqrt(((modes[:, 0] @ channels.T) ** 2).sum(axis=0)), (drawn @ channels.T).std(axis=0), rtol=0.25
    )


def test_a_dye_known_over_too_little_is_refused() -> None:
    one = made(1001)
    keep = one.dye.wavelength_nm >= 450
    short = replace(
        one.dye,
        wavelength_nm=one.dye.wavelength_nm[keep],
        absorptivity=one.dye.absorptivity[keep],
        independent=one.dye.independent[keep],
        common=one.dye.common[:, keep],
    )
    with pytest.raises(InputError, match="400–700 nm at least"):
        estimate(picture_of(one.jpeg), reading_of(1001, 3), [short], 10.0)


def test_two_dyes_at_once() -> None:
    one = made(1002)
    rack = [
        replace(cuvette, concentration=(*cuvette.concentration, 0.0) if cuvette.concentration else ())
        for cuvette in rack_of(one, 3)
    ]
    picture = picture_of(one.jpeg)
    dyes = [one.dye, dye("simulated yellow")]
    found = estimate(picture, read_photo(picture, rack), dyes, 10.0, lamps=[illuminant(one.setting.lamp)])
    truth = truths(1002, found)
    own = np.array([row.parts[0].middle for row in found.estimates])
    assert np.abs(own / truth - 1).max() < 0.3
    # None of the other is there: its interval is about nothing, in units of the red dye.
    other = np.array([row.parts[1].low for row in found.estimates])
    assert (other * dyes[1].absorptivity.max() < 0.1 * truth * one.dye.absorptivity.max() + 0.02).all()


def test_several_photos_widen_by_their_disagreement() -> None:
    one = estimated(1001, 3)
    row = one.estimates[0]
    part = row.parts[0]
    moved = replace(part, middle=1.3 * part.middle, low=1.3 * part.low, high=1.3 * part.high)
    other = replace(one, estimates=(replace(row, parts=(moved,)), *one.estimates[1:]))
    both = combined([one, other])
    widened = both.estimates[0].parts[0]
    assert widened.middle == pytest.approx(1.15 * part.middle)
    assert widened.low < part.middle < 1.3 * part.middle < widened.high
    assert "photos disagree" in both.estimates[0].flags
    same = combined([one, one]).estimates[1].parts[0]
    assert same == pytest.approx(one.estimates[1].parts[0]) if isinstance(same, float) else isinstance(same, Part)
    assert same.high - same.low == pytest.approx(one.estimates[1].parts[0].high - one.estimates[1].parts[0].low)


def test_photos_of_different_racks_are_refused() -> None:
    with pytest.raises(InputError, match="different racks"):
        combined([estimated(1001, 3), estimated(1001, 1)])


def test_json_and_rows_hold_what_others_rely_on() -> None:
    found = estimated(1001, 3)
    content = estimate_object(found)
    assert content["unit"] == "g/L"
    assert content["standards"] == 3
    for sample in content["samples"]:
        assert sample["low"] <= sample["concentration"] <= sample["high"]
        assert isinstance(sample["flags"], list)
    assert list(content["cautions"]) == list(CAUTIONS)
    assert len(estimate_rows(found)) == len(found.estimates)


@pytest.fixture
def learned(tmp_path):
    one = made(1001)
    picture = replace(picture_of(one.jpeg), taken={"phone": "invented"})
    solved, names, _ = solved_photo(picture, reading_of(1001, 3), [one.dye], 10.0, [illuminant(one.setting.lamp)], None)
    path = tmp_path / "phone.cal.json"
    path.write_text(calibration_text(calibrated(picture, solved, names, one.dye, 10.0)), encoding="utf-8")
    return str(path)


def test_a_later_photo_needs_only_a_blank(learned: str) -> None:
    """The same simulated phone and lamp again, with other noise; no standards in it."""
    from photo.render.geometry import boxes
    from photo.render.picture import jpeg, render
    from photo.render.scenes import PITCH

    one = made(1001)
    c = np.array([0.0, 0.7, 0.3, 0.12]) * one.concentration[one.ranked[9]]
    again = render(replace(one.setting, seed=99), 10.0 ** -np.outer(c, one.dye.absorptivity), pitch=PITCH)
    picture = replace(picture_of(jpeg(again.codes, 95)), taken={"phone": "invented"})
    found_boxes = boxes(again.matrix, 4, PITCH)
    from chroma.photo.rack import Box, Cuvette

    rack = [
        Cuvette(f"c{i}", "unknown" if i else "blank", () if i else (0.0,), Box(b.x, b.y, b.width, b.height))
        for i, b in enumerate(found_boxes)
    ]
    reading = read_photo(picture, rack)
    kept = read_calibration(learned)
    with_it = estimate(picture, reading, [one.dye], 10.0, calibration=kept)
    without = estimate(picture, reading, [one.dye], 10.0, lamps=[illuminant(one.setting.lamp)])
    values = np.array([row.parts[0].middle for row in with_it.estimates])
    assert np.abs(values / c[1:] - 1).max() < 0.08
    width = [np.mean([r.parts[0].high - r.parts[0].low for r in f.estimates]) for f in (with_it, without)]
    assert width[0] < 0.5 * width[1]
    assert not [note for note in with_it.notes if note.startswith("warning")]


def test_another_phone_is_warned_of(learned: str) -> None:
    one = made(1001)
    other = replace(picture_of(one.jpeg), taken={"phone": "another", "white_balance": "1"})
    found = estimate(other, reading_of(1001, 0), [one.dye], 10.0, calibration=read_calibration(learned))
    said = " ".join(found.notes)
    assert "phone was invented in the calibration, is another here" in said
    assert "white balance" in said


def test_another_dye_or_path_is_refused(learned: str) -> None:
    one = made(1001)
    kept = read_calibration(learned)
    with pytest.raises(InputError, match="calibration is for simulated yellow"):
        estimate(picture_of(one.jpeg), reading_of(1001, 0), [dye("simulated red")], 10.0, calibration=kept)
    with pytest.raises(InputError, match="path of 10 mm"):
        estimate(picture_of(one.jpeg), reading_of(1001, 0), [one.dye], 20.0, calibration=kept)


def test_a_calibration_without_standards_is_refused() -> None:
    one = made(1001)
    picture = picture_of(one.jpeg)
    solved, names, _ = solved_photo(picture, reading_of(1001, 0), [one.dye], 10.0, [illuminant("D50")], None)
    with pytest.raises(InputError, match="no standard"):
        calibrated(picture, solved, names, one.dye, 10.0)


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (lambda t: t[: len(t) // 2], "is no calibration"),
        (lambda t: "{}", "is no calibration"),
        (lambda t: t.replace('"version": 1', '"version": 9'), "version 9"),
        (lambda t: t.replace('"mean": [', '"mean": ["x", '), "is damaged"),
        (lambda t: t.replace('"covariance": [[', '"covariance": [[1e9, '), "is damaged"),
        (lambda t: t.replace('"highest_standard"', '"lowest_standard"'), "is damaged"),
    ],
    ids=["cut short", "empty object", "newer", "text for a number", "not square", "a field missing"],
)
def test_a_bad_calibration_is_refused(learned: str, tmp_path, change, said: str) -> None:
    from pathlib import Path

    text = Path(learned).read_text(encoding="utf-8")
    (tmp_path / "bad.json").write_text(change(text), encoding="utf-8")
    with pytest.raises(InputError, match=said):
        read_calibration(str(tmp_path / "bad.json"))
