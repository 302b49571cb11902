"""What is off, in words: the hue circle, greys, and what is too small for a word."""

import numpy as np
import pytest

from chroma.colour.spaces import Lab_from_LCh
from chroma.difference.formulas import FORMULAS, Formula
from chroma.off_target import off_words

PLAIN = Formula("cie1976")


def one_off(formula, target, sample, limit):
    return off_words(formula, target[None], sample[None], np.array([limit]))[0]


def words(target_LCh, LCh, limit=0.1, formula=PLAIN):
    return one_off(formula, Lab_from_LCh(np.array(target_LCh, float)), Lab_from_LCh(np.array(LCh, float)), limit)


@pytest.mark.parametrize(
    ("hue", "up", "down"),
    [
        (10, "yellower", "redder"),
        (60, "yellower", "redder"),
        (100, "greener", "yellower"),
        (170, "greener", "yellower"),
        (190, "bluer", "greener"),
        (260, "bluer", "greener"),
        (280, "redder", "bluer"),
        (350, "redder", "bluer"),
    ],
)
def test_hue_in_words_all_round_the_circle(hue, up, down):
    assert words((50, 40, hue), (50, 40, hue + 5)) == [up]
    assert words((50, 40, hue), (50, 40, hue - 5)) == [down]


def test_the_short_way_round_is_taken_across_the_seam():
    assert words((50, 40, 358), (50, 40, 3)) == ["redder"]
    assert words((50, 40, 2), (50, 40, 357)) == ["redder"]
    assert words((50, 40, 358), (55, 40, 3)) == ["lighter", "redder"]
    assert words((50, 40, 2), (55, 40, 357)) == ["lighter", "redder"]


@pytest.mark.parametrize(
    ("LCh", "word"),
    [((53, 40, 60), "lighter"), ((47, 40, 60), "darker"), ((50, 44, 60), "stronger"), ((50, 36, 60), "weaker")],
)
def test_lightness_and_chroma_in_words(LCh, word):
    assert words((50, 40, 60), LCh) == [word]


@pytest.mark.parametrize(
    ("step", "word"),
    [
        ((0, 1, 0), "redder"),
        ((0, -1, 0), "greener"),
        ((0, 0, 1), "yellower"),
        ((0, 0, -1), "bluer"),
        ((1, 0, 0), "lighter"),
    ],
)
def test_near_greys_a_and_b_are_spoken_of(step, word):
    grey = np.array([60.0, 1.0, -1.0])
    assert one_off(PLAIN, grey, grey + step, 0.1) == [word]


def test_a_grey_on_either_side_makes_a_pair_of_greys():
    chroma = 5.0
    assert words((50, chroma * 0.98, 0), (50, chroma * 1.5, 0)) == ["redder"]
    assert words((50, chroma * 1.5, 0), (50, chroma * 0.98, 0)) == ["greener"]
    assert words((50, chroma * 1.02, 0), (50, chroma * 1.5, 0)) == ["stronger"]


def test_words_come_in_the_order_of_their_size():
    assert words((50, 40, 60), (53, 44, 60)) == ["stronger", "lighter"]
    assert words((50, 40, 60), (54, 43, 60)) == ["lighter", "stronger"]


@pytest.mark.parametrize(("share", "said"), [(0.98 * 0.25, []), (1.02 * 0.25, ["lighter"])])
def test_a_part_is_worth_a_word_from_a_quarter_of_the_limit(share, said):
    assert words((50, 40, 60), (50 + share, 40, 60), limit=1.0) == said


@pytest.mark.parametrize(("share", "said"), [(0.98 * 0.4, ["lighter"]), (1.02 * 0.4, ["lighter", "stronger"])])
def test_and_from_four_tenths_of_the_largest_part(share, said):
    assert words((50, 40, 60), (55, 40 + 5 * share, 60), limit=1.0) == said


@pytest.mark.parametrize("name", FORMULAS)
def test_sizes_are_those_of_the_formula(name):
    # strong colours: chroma counts for little in the weighted formulas, and for all in the plain one
    said = words((50, 80, 60), (52.5, 83, 60), formula=Formula(name))
    assert said[0] == ("stronger" if name == "cie1976" else "lighter")
