"""Superposition: the hot spot's response against its definition, stepped through time."""

from __future__ import annotations

import numpy as np
import pytest

from soacheck.device.ratings import SafeAreaCurve
from soacheck.limit import safe_area
from soacheck.limit.hot_spot import fit, printed_response
from soacheck.locus import Locus
from soacheck.result import Finding, Status
from soacheck.trace import FloatArray
from tests.limit.build import curve, device, judged, once, only, pulse, repeated, rules, status, value

WIDTHS = np.array([1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 1e-1])
END = 10 * WIDTHS[-1]


def root_family() -> tuple[SafeAreaCurve, ...]:
    """Curves of a square-root body: I proportional to t_p^-1/2, dc a decade above the longest."""
    made = [curve(f"{w:g} s", w, (1, (END / w) ** 0.5), (100, (END / w) ** 0.5)) for w in WIDTHS]
    return (*made, curve("dc", np.inf, (1, 1.0), (100, 1.0)))


# Ratings far above the curves, so that only the curves judge.
ROOT = device(soa=root_family(), I_max=value("I_C", 1e5, "A"), I_peak=value("I_CM", 1e5, "A"))
BENT = device(
    soa=(
        curve("1 ms", 1e-3, (1, 20.0), (100, 20.0)),
        curve("10 ms", 1e-2, (1, 9.0), (100, 9.0)),
        curve("100 ms", 1e-1, (1, 3.0), (100, 3.0)),
        curve("dc", np.inf, (1, 1.0), (100, 1.0)),
    ),
    I_max=value("I_C", 100, "A"),
    I_peak=value("I_CM", 100, "A"),
)


def part_of(finding: Finding, symbol: str) -> float:
    assert finding.allowed is not None
    return {node.symbol: node for node in finding.allowed.walk()}[symbol].at(0)


def stepped(locus: Locus, times: FloatArray, g: FloatArray, steps: int, periods: int) -> float:
    """Second way: x in many small steps, each answered by g itself; periods one after another until nothing changes."""
    t, i = locus.t[0, 0], locus.i[0, 0]
    length = t[-1] - t[0]
    dt = length / steps
    grid = (np.arange(steps) + 0.5) * dt + t[0]
    x = np.tile(np.interp(grid, t, i), periods)
    jumps = np.diff(x, prepend=0.0)
    response = printed_response(times, g, np.arange(1, len(x) + 1) * dt)
    size = 2 * len(x)
    answer = np.fft.irfft(np.fft.rfft(jumps, size) * np.fft.rfft(response, size), size)[: len(x)]
    return float(answer[-steps:].max())


def hump(shape: str, peak: float, width: float, count: int = 401) -> Locus:
    s = np.linspace(0, 1, count)
    y = {
        "triangle": 1 - np.abs(2 * s - 1),
        "half sine": np.sin(np.pi * s),
        "rising ramp": s,
        "falling ramp": 1 - s,
        "rectangle": np.ones(count),
        "sine squared": np.sin(np.pi * s) ** 2,
    }[shape]
    return once(s * width, np.full(count, 50.0), peak * np.maximum(y, 0.0))


# Analytic: on a square-root body the peak response of a hump over that of the rectangle of its height and length.
FACTORS = {
    "rectangle": 1.0,
    "rising ramp": 2 / 3,
    "falling ramp": 2**0.5 / 3,
    "triangle": 0.544331,
    "half sine": 0.671084,
    "sine squared": 0.584050,
}


@pytest.mark.parametrize("shape", FACTORS)
def test_humps_on_a_square_root_body_have_their_factors(shape: str) -> None:
    width = 1e-3
    rectangle = (END / width) ** 0.5
    finding = only(safe_area.find(judged(hump(shape, 0.5 * rectangle, width), ROOT)))
    assert part_of(finding, "u_superposition") == pytest.approx(0.5 * FACTORS[shape], rel=0.015)


@pytest.mark.parametrize(("shape", "generous"), [("half sine", 0.31), ("triangle", 0.41)])
def test_residence_alone_is_too_generous_with_humps(shape: str, generous: float) -> None:
    # Analytic: with interpolated curves of a square-root body residence lets a half sine through that is 31 % higher
    # than superposition does, a triangle 41 %.
    finding = only(safe_area.find(judged(hump(shape, 15.0, 1e-3), ROOT, rule=rules(pulse_between="log-log"))))
    more = part_of(finding, "u_superposition") / part_of(finding, "u_residence") - 1
    assert more == pytest.approx(generous, abs=0.025)
    assert finding.utilisation[0] == pytest.approx(part_of(finding, "u_superposition"))


def test_a_nested_staircase_is_passed_by_residence_and_not_by_superposition() -> None:
    # Stairs that stay above each printed curve just for the next shorter pulse.
    up = [(1e-1, 2.98), (1e-2, 8.9), (1e-3, 19.5)]
    t, i = [0.0], [0.0]
    for width, amps in up:
        t += [0.2 - width, 0.2 - width]
        i += [i[-1], amps]
    t, i = [*t[1:], 0.2, 0.2, 0.201], [*i[1:], 19.5, 0.0, 0.0]
    finding = only(safe_area.find(judged(once(t, np.full(len(t), 50.0), i), BENT)))
    assert part_of(finding, "u_residence") < 1.0
    assert part_of(finding, "u_superposition") > 1.1
    assert status(finding) is Status.EXCEEDS


@pytest.mark.parametrize("shape", ["triangle", "half sine", "rectangle"])
@pytest.mark.parametrize("width", [3e-3, 30e-3, 300e-3])
def test_one_shots_are_what_stepping_through_time_gives(shape: str, width: float) -> None:
    locus = hump(shape, 2.0, width)
    finding = only(safe_area.find(judged(locus, BENT)))
    times, g = np.array([1e-3, 1e-2, 1e-1, 1.0]), np.array([1 / 20, 1 / 9, 1 / 3, 1.0])
    assert part_of(finding, "u_superposition") == pytest.approx(stepped(locus, times, g, 20000, 1), rel=0.03)


@pytest.mark.parametrize(("width", "period"), [(2e-3, 20e-3), (0.5e-3, 1e-3), (20e-3, 50e-3), (5e-3, 0.4)])
def test_repeated_pulses_are_what_stepping_through_periods_gives(width: float, period: float) -> None:
    locus = repeated(*pulse(50.0, 2.0, width, lead=period / 4, total=period))
    finding = only(safe_area.find(judged(locus, BENT)))
    times, g = np.array([1e-3, 1e-2, 1e-1, 1.0]), np.array([1 / 20, 1 / 9, 1 / 3, 1.0])
    periods = int(np.ceil(1.2 / period)) + 1
    steps = max(400, 400_000 // periods)
    assert part_of(finding, "u_superposition") == pytest.approx(stepped(locus, times, g, steps, periods), rel=0.03)


def test_a_mean_above_dc_is_not_hidden_by_short_pulses() -> None:
    # 0.2 ms of every 0.3 ms at three times dc: each pulse is far inside the 1 ms curve, the mean is twice dc.
    finding = only(safe_area.find(judged(repeated(*pulse(50.0, 3.0, 0.2e-3, total=0.3e-3)), BENT)))
    assert part_of(finding, "u_residence") < 0.5
    assert finding.utilisation[0] == pytest.approx(2.0, rel=0.06)
    assert status(finding) is Status.EXCEEDS


def test_constant_current_uses_dc_alone() -> None:
    finding = only(safe_area.find(judged(repeated([0, 1], [50, 50], [0.7, 0.7]), BENT)))
    assert finding.utilisation[0] == pytest.approx(0.7, rel=1e-6)


def test_without_a_dc_curve_a_shot_is_measured_by_the_longest_pulse() -> None:
    part = device(soa=BENT.soa[:-1], I_max=BENT.max.I_max, I_peak=BENT.max.I_peak)
    inside = only(safe_area.find(judged(once(*pulse(50.0, 2.0, 90e-3)), part)))
    assert inside.utilisation[0] == pytest.approx(2 / 3, rel=0.02)
    too_long = only(safe_area.find(judged(once(*pulse(50.0, 2.0, 110e-3)), part)))
    assert status(too_long) is Status.UNPROVEN
    assert too_long.missing(0) == ("soa[dc]",)
    again = only(safe_area.find(judged(repeated(*pulse(50.0, 2.0, 1e-3, total=1.0)), part)))
    assert status(again) is Status.UNPROVEN
    certain = only(safe_area.find(judged(once(*pulse(50.0, 4.0, 110e-3)), part)))
    assert status(certain) is Status.EXCEEDS


def test_the_fit_meets_printed_pulses_and_ends_in_one() -> None:
    times = np.array([1e-3, 1e-2, 1e-1, 1.0])
    g = np.array([[[0.05, 0.11, 0.33, 1.0], [0.01, 0.01, 0.2, 1.0], [1.0, 1.0, 1.0, 1.0]]])
    spot = fit(times, g)
    assert spot.step(np.array([1e6]))[..., 0] == pytest.approx(np.ones((1, 3)), rel=1e-4)
    assert spot.step(np.array([0.0]))[..., 0] == pytest.approx(g[..., 0])
    gentle, steep, flat = np.abs(spot.step(times[:-1]) / g[..., :-1] - 1).max(axis=-1)[0]
    assert gentle < 0.01
    assert steep < 0.05  # 20 times in a decade: faster than time
    assert flat < 1e-4


def test_many_cases_at_once_fit_as_each_alone() -> None:
    times = np.array([1e-3, 1e-2, 1e-1])
    g = np.sort(np.random.default_rng(7).uniform(0.05, 1.0, (4, 3, 3)), axis=-1)
    g[..., -1] = 1.0
    together = fit(times, g)
    for case in range(4):
        alone = fit(times, g[case : case + 1])
        assert together.step(times)[case] == pytest.approx(alone.step(times)[0], rel=1e-9)
