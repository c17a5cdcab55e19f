from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cornerwise.render.figures.marks import Sheet, Words
from cornerwise.render.figures.scales import Scale, around, rule_below, tick_words, ticks
from cornerwise.render.figures.vector import simplified


@given(st.floats(-1e3, 1e3), st.floats(1e-3, 1e4), st.integers(3, 8))
def test_ticks_are_round_inside_and_few(low: float, span: float, most: int) -> None:
    found = ticks(low, low + span, most)
    assert 1 <= len(found) <= most + 1
    assert all(low - 1e-6 * span <= value <= low + span + 1e-6 * span for value in found)
    assert len(set(tick_words(found))) == len(found)


def test_tick_words_have_the_decimals_of_the_step_and_no_negative_zero() -> None:
    assert tick_words([-0.5, -0.0, 0.5]) == ["−0.5", "0.0", "0.5"]
    assert tick_words(ticks(-140.0, 80.0, 5)) == ["−100", "−50", "0", "50"]


def test_a_scale_maps_ends_to_ends_and_keeps_what_lies_beyond_at_its_end() -> None:
    scale = Scale(low=-2.0, high=2.0, start=10.0, end=50.0)
    assert [scale(v) for v in (-2.0, 0.0, 2.0)] == [10.0, 30.0, 50.0]
    assert scale.inside(9.0) == 50.0
    assert not scale.holds(9.0)


def test_room_is_left_around_a_single_value() -> None:
    low, high = around([0.0])
    assert low < 0.0 < high


def test_a_rule_writes_its_ticks() -> None:
    sheet = Sheet(width=85.0, height=20.0, title="t")
    rule_below(sheet, Scale(low=0.0, high=1.0, start=10.0, end=50.0), 5.0)
    assert [mark.text for mark in sheet.marks if isinstance(mark, Words)] == [
        "0.0",
        "0.2",
        "0.4",
        "0.6",
        "0.8",
        "1.0",
    ]


def test_a_simplified_path_stays_within_what_can_be_seen() -> None:
    path = tuple((x / 50, (x / 100) ** 3) for x in range(200))
    short = simplified(path)
    assert len(short) < len(path) / 2
    assert (short[0], short[-1]) == (path[0], path[-1])
    for x, y in path:
        (x0, y0), (x1, y1) = next(p for p in pairwise(short) if p[0][0] <= x <= p[1][0])
        assert y0 + (y1 - y0) * (x - x0) / (x1 - x0) == pytest.approx(y, abs=0.2)
