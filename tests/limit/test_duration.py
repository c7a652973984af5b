"""How long something lasts: known answers, and a brute-force second way."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from soacheck.limit.duration import bisect, exact_where_it_matters, longest_run, time_above
from soacheck.locus import Use
from tests.limit.build import three

ONE = np.ones((1, 1))


def test_a_rectangle_lasts_as_long_as_it_is_wide() -> None:
    t, r = three([0, 1, 1, 3, 3, 5]), three([0, 0, 2, 2, 0, 0])
    run = longest_run(t, r, ONE, Use.ONCE)
    assert run.duration[0, 0] == pytest.approx(2.0)
    assert (run.start[0, 0], run.end[0, 0]) == (1.0, 3.0)


def test_a_period_wraps_round() -> None:
    t, r = three([0, 1, 1, 4, 4, 5]), three([2, 2, 0, 0, 2, 2])
    assert longest_run(t, r, ONE, Use.ONCE).duration[0, 0] == pytest.approx(1.0)
    assert longest_run(t, r, ONE, Use.REPEATED).duration[0, 0] == pytest.approx(2.0)


def test_what_never_comes_down_lasts_for_ever_when_it_repeats() -> None:
    t, r = three([0, 1, 2]), three([2, 3, 2])
    assert longest_run(t, r, ONE, Use.REPEATED).duration[0, 0] == np.inf
    assert longest_run(t, r, ONE, Use.ONCE).duration[0, 0] == pytest.approx(2.0)


def test_a_held_point_lasts_for_ever() -> None:
    assert longest_run(three([0]), three([2]), ONE, Use.HELD).duration[0, 0] == np.inf
    assert longest_run(three([0]), three([1]), ONE, Use.HELD).duration[0, 0] == 0.0


def test_a_triangle_is_above_half_its_height_half_the_time() -> None:
    # Analytic limit.
    t, r = three([0, 1, 2]), three([0, 2, 0])
    assert longest_run(t, r, ONE, Use.ONCE).duration[0, 0] == pytest.approx(1.0)
    assert time_above(t, r, 1.0, Use.ONCE)[0, 0] == pytest.approx(0.5)


@given(
    st.lists(st.tuples(st.floats(0.1, 2.0), st.floats(0.0, 3.0)), min_size=3, max_size=9),
    st.sampled_from([Use.ONCE, Use.REPEATED]),
)
def test_runs_are_those_of_fine_sampling(points: list[tuple[float, float]], use: Use) -> None:
    # Second way: the straight line sampled finely, its runs counted one by one.
    t = np.cumsum([0.0] + [dt for dt, _ in points[1:]])
    r = np.array([value for _, value in points])
    assume(not bool(np.any(r == 1.0)))  # a touch breaks a run, and samples do not see it
    step = t[-1] / 20000
    fine = np.arange(20000) * step + step / 2
    above = np.interp(fine, t, r) > 1.0
    if use is Use.REPEATED:
        above = np.concatenate([above, above])
    longest = count = 0
    for is_above in above:
        count = count + 1 if is_above else 0
        longest = max(longest, count)
    got = float(longest_run(three(t), three(r), ONE, use).duration[0, 0])
    if use is Use.REPEATED and bool(np.all(above)):
        assert got == np.inf
    else:
        assert got == pytest.approx(longest * step, abs=2.5 * step)


def test_bisection_finds_a_known_level_and_keeps_a_passing_lower_bound() -> None:
    level = np.array([[0.3, 2.0, 40.0]])
    got = bisect(lambda x: x < level, np.full((1, 3), 1e-3), np.full((1, 3), 100.0))
    assert got == pytest.approx(level, rel=1e-9)
    assert bisect(lambda x: x < 0, np.full((1, 1), 0.4), np.full((1, 1), 2.0))[0, 0] == 0.4


@given(st.lists(st.floats(0.0, 3.0), min_size=1, max_size=30), st.integers(1, 5))
def test_the_worst_member_is_never_passed_over(values: list[float], width: int) -> None:
    exact = np.array([values])
    calls = []

    def evaluate(pick: np.ndarray) -> np.ndarray:
        calls.append(pick)
        return np.take_along_axis(exact, pick, axis=1)

    value, done = exact_where_it_matters(0.5 * exact, 1.2 * exact, evaluate, below=1.0, width=width)
    assert value.max() == exact.max()
    assert bool(np.all(done | (1.2 * exact <= 1.0)))
