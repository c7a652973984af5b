"""The page: ticks with plain numbers, and records thinned without losing a peak."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from soacheck.show.figures import canvas, page, words
from soacheck.show.figures.labels import Label, place


@given(st.floats(1e-6, 1e6))
def test_the_next_of_one_two_five_is_beyond_the_value_and_near_it(value: float) -> None:
    up, down = page.step_125(value, up=True), page.step_125(value, up=False)
    assert value * (1 - 1e-9) <= up <= value * 2.5 * (1 + 1e-9)
    assert value / 2.5 * (1 - 1e-9) <= down <= value * (1 + 1e-9)
    lead = up / 10 ** np.floor(np.log10(up) + 1e-9)
    assert min(abs(lead - choice) for choice in (1, 2, 5, 10)) < 1e-6


def test_decades_are_written_as_plain_numbers() -> None:
    major, texts, minor = page.log_ticks(0.1, 1000.0)
    assert texts == ["0.1", "1", "10", "100", "1000"]
    assert major == pytest.approx([0.1, 1, 10, 100, 1000])
    assert minor.size == 4 * 8


def test_a_short_axis_gets_twos_and_fives() -> None:
    assert page.log_ticks(2.0, 200.0)[1] == ["2", "5", "10", "20", "50", "100", "200"]


@given(st.integers(6001, 40000), st.integers(0, 2**32 - 1))
def test_a_thinned_record_keeps_the_extremes_and_the_ends(count: int, seed: int) -> None:
    values = np.random.default_rng(seed).normal(size=(2, count))
    keep = page.thinned(values[0], values[1])
    assert keep[0] == 0
    assert keep[-1] == count - 1
    assert np.all(np.diff(keep) > 0)
    assert keep.size < 8000
    for column in values:
        assert column[keep].max() == column.max()
        assert column[keep].min() == column.min()


def test_a_record_of_unknown_values_can_be_thinned() -> None:
    assert page.thinned(np.full(9000, np.nan)).size > 0


def test_a_short_record_is_drawn_whole() -> None:
    assert page.thinned(np.arange(100.0)).size == 100


@pytest.mark.parametrize(
    ("largest", "sign"), [(0.9, ""), (0.05, "m"), (60e-3, "m"), (2e-4, "µ"), (150.0, ""), (3000.0, ""), (3e4, "k")]
)
def test_axes_are_in_units_that_need_no_exponent(largest: float, sign: str) -> None:
    factor, found = words.prefix(largest)
    assert found == sign
    assert 0.3 <= largest / factor < 10_000  # watts stay watts as long as the labels beside them do


def test_a_label_rather_covers_two_lines_of_the_chart_than_the_one_it_is_about() -> None:
    with canvas.settings():
        figure = page.new_page((3.0,)).figure
        (axes,) = figure.axes
        axes.set_xlim(0, 10)
        axes.set_ylim(0, 10)
        for level in np.arange(0, 10, 0.2):
            axes.plot([5.0, 10.0], [level, level], zorder=4)  # right of the point: what the picture is about
        for level in np.arange(0, 10, 0.1):
            axes.plot([0.0, 5.0], [level, level], zorder=2)  # left of it: twice as many lines of the chart
        homeless = place(axes, [Label(x=5.0, y=5.0, text="named here by a long word", near=("NE", "NW"))])
        (label,) = [text for text in axes.texts if text.get_gid() == "label"]
        box = label.get_window_extent(canvas.renderer_of(figure))
        middle = axes.transData.inverted().transform((0.5 * (box.x0 + box.x1), box.y0))
    assert homeless == ()
    assert middle[0] < 5
