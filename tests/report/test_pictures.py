"""Pictures by their structure: artists, labels, limits."""

import numpy as np
import pytest
from matplotlib.figure import Figure
from report_world import NM, spectra, transmittance, world

from chroma.batches import check
from chroma.colour.spaces import xyY_from_XYZ
from chroma.control import control
from chroma.decision import WORDS
from chroma.report.colour_plots import plot_ab, plot_chromaticity, plot_LC, plot_tolerance
from chroma.report.control_chart import control_sentence, plot_control
from chroma.report.ellipses import tolerance_contour
from chroma.report.overlap_plot import plot_overlap
from chroma.report.plots import MARKS, plot_swatches
from observers.human import observer
from observers.illuminants import illuminant


def axes():
    return Figure(figsize=(5, 4), layout="constrained").add_subplot()


def labels(ax):
    return [text.get_text() for text in ax.get_legend().get_texts()]


def offsets(ax):
    return np.vstack([np.asarray(one.get_offsets()) for one in ax.collections])


def contrast(a, b):
    def light(code):
        c = np.array(list(bytes.fromhex(code[1:]))) / 255
        return np.where(c <= 0.04045, c / 12.92, ((c + 0.055) / 1.055) ** 2.4) @ (0.2126, 0.7152, 0.0722) + 0.05

    return max(light(a), light(b)) / min(light(a), light(b))


@pytest.mark.parametrize("ground", ["#ffffff", "#d9d9d9", "#fbfaf7"])
@pytest.mark.parametrize("word", WORDS)
def test_tints_of_verdicts_stand_out_from_their_grounds(word, ground):
    assert contrast(MARKS[word][1], ground) >= 4.5


@pytest.mark.parametrize(
    ("draw", "plane", "places"), [(plot_ab, "ab", (1, 2)), (plot_LC, "LC", None)], ids=["ab", "LC"]
)
def test_batches_stand_where_they_are_with_the_ellipse(draw, plane, places):
    checked, *_ = world(20)
    given = axes()
    ax = draw(checked, 1, ax=given)
    assert ax is given
    Lab = checked.Lab[:, 1]
    at = Lab[:, places] if places else np.column_stack([np.hypot(*Lab[:, 1:].T), Lab[:, 0]])
    drawn = offsets(ax)
    assert sorted(map(tuple, drawn.round(9))) == sorted(map(tuple, at.round(9)))
    contour = tolerance_contour(checked.tolerance.formula, checked.target_Lab[1], 1.0, plane)
    x, y = ax.lines[0].get_data()
    ordinate = contour[:, 2] if plane == "ab" else contour[:, 0]
    np.testing.assert_allclose(y, ordinate)
    assert len(x) == len(contour)
    assert ax.get_aspect() == 1.0
    present = [WORDS[code] for code in sorted(set(checked.verdicts[:, 1]))]
    assert labels(ax) == ["ΔE = 1", *present, "target"]


def test_verdicts_are_told_by_shape():
    checked, *_ = world(60)
    ax = plot_ab(checked)
    assert set(checked.verdicts[:, 0]) == {0, 1, 2}
    paths = [one.get_paths()[0].vertices.shape for one in ax.collections]
    assert len(set(paths)) == 3
    assert len(ax.collections[0].get_facecolor()) == 0  # pass is hollow


def test_names_cover_no_mark():
    checked, *_ = world(60)
    ax = plot_ab(checked)
    ax.figure.draw_without_rendering()
    marks = ax.transData.transform(offsets(ax))
    named = [text for text in ax.texts if text.get_text()]
    assert named
    for text in named:
        box = text.get_window_extent()
        assert not ((marks > (box.x0 + 1, box.y0 + 1)) & (marks < (box.x1 - 1, box.y1 - 1))).all(axis=1).any()


def test_both_planes_stand_side_by_side_with_one_legend():
    checked, *_ = world(8)
    ax = plot_tolerance(checked)
    first, second = ax.figure.axes
    assert (first.get_xlabel(), first.get_ylabel()) == ("a*", "b*")
    assert (second.get_xlabel(), second.get_ylabel()) == ("C*", "L*")
    assert second.get_legend() is None


def test_chromaticity_has_locus_whites_and_samples():
    _, _, colours = world(5, ("D65", "A", "FL11"))
    ax = plot_chromaticity(colours, ax=axes(), names=colours.names)
    np.testing.assert_allclose(
        sorted(map(tuple, offsets(ax))), sorted(map(tuple, colours.xyY[..., :2].reshape(-1, 2))), atol=1e-12
    )
    crosses = [line.get_xydata()[0] for line in ax.lines if line.get_marker() == "+" and len(line.get_xdata())]
    np.testing.assert_allclose(crosses, xyY_from_XYZ(colours.white100)[:, :2])
    assert {"520", "600", "S-001"} <= {text.get_text() for text in ax.texts}
    assert labels(ax) == ["D65", "A", "FL11", "white of the lamp"]
    locus = ax.lines[0].get_xydata()
    assert (locus[0] == locus[-1]).all()
    assert locus[:, 1].max() > 0.8


def test_control_chart_has_its_lines():
    checked, *_ = world(25)
    chart = control(checked.delta_e[:, 0])
    ax = plot_control(checked, ax=axes())
    np.testing.assert_allclose(ax.lines[0].get_ydata(), chart.values)
    np.testing.assert_allclose(ax.lines[1].get_ydata(), chart.ewma)
    np.testing.assert_allclose(ax.lines[2].get_ydata(), chart.ewma_action)
    levels = sorted(float(line.get_ydata()[0]) for line in ax.lines[4:])
    assert levels == pytest.approx(sorted([1.0, chart.centre, chart.warning, chart.action]))
    said = {text.get_text() for text in ax.texts}
    assert {"tolerance 1.00", f"action 3σ {chart.action:.2f}", f"warning 2σ {chart.warning:.2f}"} <= said
    assert ax.get_ylim()[0] == 0
    assert [text.get_text() for text in ax.get_xticklabels()] == list(checked.names)
    heights = sorted(text.xy[1] for text in ax.texts)
    assert min(np.diff(heights)) >= 0.05 * ax.get_ylim()[1] * (1 - 1e-9)


def test_control_chart_of_many_counts_batches():
    checked, *_ = world(80)
    assert plot_control(checked).get_xlabel().startswith("number of the batch")


def test_control_sentence_names_what_is_out():
    names = tuple(f"S-{i}" for i in range(30))
    values = transmittance(30, 0.002)
    values[17] = transmittance(1, 0.0)[0] ** 1.4
    checked, *_ = world(names)
    off = check(
        spectra(names, values), spectra(("pond",), transmittance(1, 0.0)), checked.tolerance, checked.conditions
    )
    assert "1 batch above the action limit" in control_sentence(off)
    assert "(S-17)" in control_sentence(off)
    # two kinds in turn: the ranges are large, and nothing stands out
    in_turn = spectra(names, np.tile(transmittance(2), (15, 1)))
    steady = check(in_turn, spectra(("pond",), transmittance(1, 0.0)), checked.tolerance, checked.conditions)
    assert "no batch above" in control_sentence(steady)
    assert "stays within its limit; no trend beyond chance" in control_sentence(steady)


@pytest.mark.parametrize("key", ["2", "10"])
def test_overlap_is_the_product(key):
    lamp, looker = illuminant("A"), observer(key)
    sample = spectra(("pond",), transmittance(1, 0.0))
    ax = plot_overlap(lamp, sample, looker, ax=axes())
    np.testing.assert_allclose(ax.lines[1].get_ydata(), sample.values[0])
    assert max(ax.lines[0].get_ydata()) == pytest.approx(1)
    tops = [one.get_paths()[0].vertices[:, 1].max() for one in ax.collections if len(one.get_paths())]
    assert len(ax.lines) == 5
    assert max(tops) == pytest.approx(1)
    assert ax.get_xlim() == (NM[0], NM[-1])
    assert "lamp A" in labels(ax)


def test_swatches_of_chosen_rows():
    checked, target, batches = world(10)
    ax = plot_swatches(checked, target, batches, ax=axes(), rows=[4, 2])
    assert [text.get_text() for text in ax.get_yticklabels()] == ["S-005", "S-003"]
    assert len(ax.patches) == 2 * 2 * 2
    words = [text.get_text() for text in ax.texts]
    assert words[0] == f"{checked.delta_e[4, 0]:.2f}"
    assert words[2].endswith(WORDS[checked.worst[4]])
