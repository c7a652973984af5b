"""Residence: time above each curve against a count on fine samples, and its verdicts at the ends of the chart."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from soacheck.limit import safe_area
from soacheck.limit.residence import Residence
from soacheck.locus import Locus, Use
from soacheck.result import Finding, Status
from soacheck.trace import FloatArray
from tests.limit.build import DC, device, judged, once, only, pulse, repeated, rules, said, status, three

WIDTHS = (1e-3, 1e-2, 1e-1)


def by_counting(locus: Locus, allow: list[FloatArray], between: str, samples: int) -> float:
    """Second way: fine samples, runs counted one by one, the currents divided until the rule holds.

    allow: allowances of the three pulse curves and of dc at the samples.
    """
    t, i = locus.t[0, 0], locus.i[0, 0]
    dt = (t[-1] - t[0]) / samples
    current = np.interp((np.arange(samples) + 0.5) * dt, t - t[0], i)
    turns = 2 if locus.use is Use.REPEATED else 1

    def longest(above: np.ndarray) -> float:
        if locus.use is Use.REPEATED and bool(np.all(above)):
            return float("inf")
        flips = np.flatnonzero(np.diff(np.concatenate([[False], np.tile(above, turns), [False]])))
        return float((flips[1::2] - flips[::2]).max() * dt) if len(flips) else 0.0

    def passes(s: float) -> bool:
        limits = [WIDTHS[0], *WIDTHS] if between == "next-longer" else [*WIDTHS, WIDTHS[-1]]
        if any(longest(current / s > a) > w + dt for a, w in zip(allow, limits, strict=True)):
            return False
        if between == "log-log":
            for width in np.geomspace(WIDTHS[0], WIDTHS[-1], 200):
                k = min(int(np.searchsorted(WIDTHS, width)), 2)
                k = max(k, 1)
                share = np.log(width / WIDTHS[k - 1]) / np.log(WIDTHS[k] / WIDTHS[k - 1])
                a = np.exp((1 - share) * np.log(allow[k - 1]) + share * np.log(allow[k]))
                if longest(current / s > a) > width + dt:
                    return False
        return True

    low, high = 1e-4, 1e3
    for _ in range(40):
        middle = (low * high) ** 0.5
        low, high = (low, middle) if passes(middle) else (middle, high)
    return high


def allowances(v: FloatArray) -> list[FloatArray]:
    """The curves of the test device below its flats, at 25 degC: all of slope -1."""
    return [np.minimum(25.0, p / v) for p in (1000.0, 500.0, 300.0)] + [np.minimum(15.0, 150.0 / v)]


def u_residence(finding: Finding) -> float:
    assert finding.allowed is not None
    return {node.symbol: node for node in finding.allowed.walk()}["u_residence"].at(0)


@settings(max_examples=40)
@given(
    st.lists(st.tuples(st.floats(0.05, 1.0), st.floats(0.0, 5.0)), min_size=3, max_size=7),
    st.sampled_from([5e-3, 50e-3, 0.5]),
    st.booleans(),
    st.sampled_from(["next-longer", "log-log"]),
)
def test_residence_is_what_counting_samples_gives(
    points: list[tuple[float, float]], length: float, again: bool, between: str
) -> None:
    t = np.cumsum([0.0] + [dt for dt, _ in points[1:]])
    t *= length / t[-1]
    i = np.array([amps for _, amps in points])
    v = np.full(len(t), 60.0)
    fine = 400
    tt = np.unique(np.concatenate([t, np.linspace(0, t[-1], fine)]))
    locus = (repeated if again else once)(tt, np.full(len(tt), 60.0), np.interp(tt, t, i))
    samples = 4000
    allow = [np.full(samples, a[0]) for a in allowances(v)]
    expected = by_counting(locus, allow, between, samples)
    r = tuple(three(locus.i[0, 0] / a[0]) for a in allow[:3])
    test = Residence(
        t=locus.t, use=locus.use, widths=WIDTHS, r=r, dc=three(locus.i[0, 0] / allow[3][0]),
        between="log-log" if between == "log-log" else "next-longer",
    )  # fmt: skip
    top = np.full((1, 1), max(i.max() / allow[3][0], 1e-9))
    got = float(test.utilisation(top * 1e-4, top)[0, 0])
    if expected > 2e-4 * top[0, 0]:
        assert got == pytest.approx(expected, rel=0.02, abs=0.01)


def test_above_the_shortest_curve_for_longer_than_its_width_exceeds() -> None:
    finding = only(safe_area.find(judged(once(*pulse(50, 21, 1.5e-3)), T_j=140)))
    assert status(finding) is Status.EXCEEDS
    assert finding.utilisation[0] > 1


def test_above_the_shortest_curve_for_less_needs_a_shorter_curve() -> None:
    finding = only(safe_area.find(judged(once(*pulse(50, 21, 0.3e-3)), T_j=100)))
    assert status(finding) is Status.UNPROVEN
    assert np.isnan(finding.utilisation[0])
    assert "curve for a shorter pulse is needed" in said(finding)
    assert finding.missing(0) == ("soa[shorter]",)


def test_a_shorter_curve_does_not_excuse_a_crossed_rating() -> None:
    hot = only(safe_area.find(judged(once(*pulse(50, 21, 0.3e-3)), T_j=160)))
    assert status(hot) is Status.EXCEEDS
    strong = only(safe_area.find(judged(once(*pulse(50, 26, 0.3e-3)), T_j=100)))
    assert status(strong) is Status.EXCEEDS


def test_long_time_above_dc_is_bounded_by_the_longest_printed_pulse() -> None:
    inside = only(safe_area.find(judged(once(*pulse(50, 3.5, 99e-3)))))
    outside = only(safe_area.find(judged(once(*pulse(50, 3.5, 101e-3)))))
    assert status(inside) is not Status.EXCEEDS
    assert status(outside) is Status.EXCEEDS
    assert outside.utilisation[0] == pytest.approx(3.5 / 3, rel=1e-6)
    assert "above the dc curve touches" in said(outside)


def test_with_a_dc_curve_alone_any_time_above_it_needs_a_pulse_curve() -> None:
    alone = device(soa=(DC,))
    shot = only(safe_area.find(judged(once(*pulse(50, 3.5, 1e-3)), alone, T_j=100)))
    assert status(shot) is Status.UNPROVEN
    assert "shortest printed one" in said(shot)
    mean = only(safe_area.find(judged(repeated(*pulse(50, 9.0, 0.5e-3, total=1e-3)), alone, T_j=100)))
    assert status(mean) is Status.EXCEEDS  # the mean alone is above dc


def test_time_above_dc_is_told_for_every_member() -> None:
    t, v, i = pulse(50, 8, 2e-3, total=20e-3)
    above = safe_area.longest_above_dc(judged(repeated(t, v, [i, np.asarray(i) / 4])))
    assert above[0] == pytest.approx([2e-3, 0.0], rel=1e-6)


def test_a_printed_width_reads_the_same_both_ways() -> None:
    for width in (1e-3, 1e-2, 1e-1):
        shot = once(*pulse(50, 2.0, width))
        next_longer = only(safe_area.find(judged(shot)))
        log_log = only(safe_area.find(judged(shot, rule=rules(pulse_between="log-log"))))
        assert u_residence(log_log) == pytest.approx(u_residence(next_longer), rel=1e-5)


def test_log_log_is_never_stricter_than_next_longer() -> None:
    for width in (2e-3, 5e-3, 20e-3, 70e-3):
        shot = once(*pulse(50, 2.0, width))
        next_longer = only(safe_area.find(judged(shot)))
        log_log = only(safe_area.find(judged(shot, rule=rules(pulse_between="log-log"))))
        assert u_residence(log_log) <= u_residence(next_longer) * (1 + 1e-9)
