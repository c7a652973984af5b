"""Loci: exact means of straight-line v and i, and refinement that changes nothing."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from soacheck.locus import Locus, Use


def locus(t: list[float], v: list[float], i: list[float], use: Use = Use.REPEATED) -> Locus:
    shape = (1, 1, -1)
    return Locus(t=np.reshape(t, shape), v=np.reshape(v, shape), i=np.reshape(i, shape), use=use)


def test_mean_power_of_crossing_ramps_is_a_sixth_of_the_corner_power() -> None:
    # Analytic limit: v falls and i rises in straight lines: the mean of V(1-s) I s over s is VI/6, the peak VI/4.
    ramp = locus([0, 1], [60, 0], [0, 3])
    assert ramp.p_mean[0, 0] == pytest.approx(60 * 3 / 6, rel=1e-14)
    assert ramp.p_peak[0, 0] == pytest.approx(60 * 3 / 4, rel=1e-14)


def test_rms_of_a_triangle_is_its_peak_over_root_three() -> None:
    # Analytic limit.
    assert locus([0, 1, 2], [1, 1, 1], [0, 6, 0]).i_rms[0, 0] == pytest.approx(6 / np.sqrt(3), rel=1e-14)


def test_a_step_has_no_width() -> None:
    square = locus([0, 1, 1, 4], [10, 10, 0, 0], [2, 2, 0, 0])
    assert square.p_mean[0, 0] == pytest.approx(20 / 4)
    assert square.duration[0, 0] == 4


def test_times_must_not_fall() -> None:
    with pytest.raises(ValueError, match="must not fall"):
        locus([0, 2, 1], [1, 1, 1], [1, 1, 1])


@given(
    st.lists(st.tuples(*(st.floats(0.0, 100.0) for _ in range(3))), min_size=2, max_size=8),
    st.integers(2, 40),
)
def test_cutting_segments_finer_keeps_every_mean_and_peak(rows: list[tuple[float, float, float]], parts: int) -> None:
    t = np.cumsum([row[0] for row in rows]) + np.arange(len(rows)) * 0.1
    path = locus(t.tolist(), [row[1] for row in rows], [row[2] for row in rows])
    fine = path.refined(parts)
    for name in ("p_mean", "p_peak", "i_mean", "i_rms", "v_peak", "i_peak", "duration"):
        assert getattr(fine, name) == pytest.approx(getattr(path, name), rel=1e-9, abs=1e-9), name


def test_refinement_keeps_steps_and_marks() -> None:
    mark = np.array([[[False, True, True, False]]])
    path = Locus(
        t=np.array([[[0.0, 1.0, 1.0, 2.0]]]),
        v=np.array([[[1.0, 1.0, 5.0, 5.0]]]),
        i=np.ones((1, 1, 4)),
        use=Use.ONCE,
        turn_off=mark,
    )
    fine = path.refined(4)
    assert fine.shape[2] == 10
    assert fine.turn_off is not None
    assert fine.t[0, 0][fine.turn_off[0, 0]].tolist() == [1.0, 1.0]
