"""Superposition: the hot spot's response against its definition, stepped through time."""

from __future__ import annotations

import numpy as np
import pytest

from soacheck.device.ratings import SafeAreaCurve
from soacheck.limit import safe_area
from soacheck.limit.hot_spot import fit, printed_response
from soacheck.locus import Locus, Use
from soacheck.result import Finding, Status
from soacheck.trace import FloatArray
from tests.limit.build import curve, device, judged, once, only, pulse, repeated, rules, said, status, value

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
    assert part_of(finding, "u_superposition") == pytest.approx(0.5 * FACTORS[shape], rel=0.003)


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
    assert part_of(finding, "u_superposition") == pytest.approx(stepped(locus, times, g, 20000, 1), rel=0.004)


@pytest.mark.parametrize(("width", "period"), [(2e-3, 20e-3), (0.5e-3, 1e-3), (20e-3, 50e-3), (5e-3, 0.4)])
def test_repeated_pulses_are_what_stepping_through_periods_gives(width: float, period: float) -> None:
    locus = repeated(*pulse(50.0, 2.0, width, lead=period / 4, total=period))
    finding = only(safe_area.find(judged(locus, BENT)))
    times, g = np.array([1e-3, 1e-2, 1e-1, 1.0]), np.array([1 / 20, 1 / 9, 1 / 3, 1.0])
    periods = int(np.ceil(1.2 / period)) + 1
    steps = max(400, 400_000 // periods)
    assert part_of(finding, "u_superposition") == pytest.approx(stepped(locus, times, g, steps, periods), rel=0.004)


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
    assert spot.step(times) == pytest.approx(g, rel=1e-9)


def test_many_cases_at_once_fit_as_each_alone() -> None:
    times = np.array([1e-3, 1e-2, 1e-1])
    g = np.sort(np.random.default_rng(7).uniform(0.05, 1.0, (4, 3, 3)), axis=-1)
    g[..., -1] = 1.0
    together = fit(times, g)
    for case in range(4):
        alone = fit(times, g[case : case + 1])
        assert together.step(times)[case] == pytest.approx(alone.step(times)[0], rel=1e-9)


def families(count: int, seed: int) -> list[tuple[FloatArray, FloatArray]]:
    """Times and g of random charts: 1 to 5 pulse widths 0.3 to 2 decades apart, each piece of any slope up to t^1.2."""
    random = np.random.default_rng(seed)
    made = []
    for _ in range(count):
        pieces = int(random.integers(1, 6))
        decades = np.append(0.0, np.cumsum(random.choice([0.3, 0.5, 1.0, 2.0], pieces - 1)))
        widths = 10.0 ** (random.uniform(-5, -2) + decades)
        times = np.append(widths, 10 * widths[-1])
        rise = random.uniform(0, 1.2, pieces) * np.diff(np.log(times))
        made.append((times, np.maximum(np.exp(np.append(-np.cumsum(rise[::-1])[::-1], 0.0)), 1e-7)))
    return made


def test_the_response_lies_on_the_printed_one_or_just_above_it_at_every_time() -> None:
    for times, g in families(300, seed=1):
        spot = fit(times, g[None, None])
        t = np.geomspace(times[0] / 100, times[-1] * 100, 1500)
        over = (spot.step(t) * spot.short[..., None])[0, 0] / printed_response(times, g, t)
        assert over.min() > 1 - 1e-3
        assert over.max() < 1.005


def exact(locus: Locus, times: FloatArray, g: FloatArray) -> float:
    """Second way: every jump of x, in this and in all earlier periods, answered by g itself, at many times."""
    t, i = locus.t[0, 0], locus.i[0, 0]
    at = np.flatnonzero(np.diff(i) != 0)
    jumps, when = np.append(i[0], np.diff(i)[at]), np.append(t[0], t[at])
    asked = np.unique(np.concatenate([np.linspace(t[0], t[-1], 500), when, when[1:] - 1e-12 * t[-1], t[-1:]]))
    if locus.use is Use.REPEATED:
        period = t[-1] - t[0]
        jumps[0] -= i[-1]
        back = period * np.arange(int(times[-1] / period) + 2)
        # Farther back than dc every jump is answered in full: what they add up to is x at the end of a period.
        rest = i[-1]
        when, jumps = (when[None] - back[:, None]).ravel(), np.tile(jumps, len(back))
    else:
        rest = 0.0
    since = asked[:, None] - when
    answered = printed_response(times, g, np.maximum(since, 1e-15).ravel()).reshape(since.shape)
    return float(np.max(np.sum(np.where(since >= 0, jumps * answered, 0.0), axis=1) + rest))


@pytest.mark.parametrize("use", [Use.ONCE, Use.REPEATED])
def test_random_charts_and_bursts_are_what_superposition_by_brute_force_gives(use: Use) -> None:
    random = np.random.default_rng(3)
    for times, g in families(150, seed=4 if use is Use.ONCE else 5):
        made = [curve(f"{w:g} s", w, (1, 1 / r), (100, 1 / r)) for w, r in zip(times[:-1], g, strict=False)]
        chart = (*made, curve("dc", np.inf, (1, 1.0), (100, 1.0)))
        part = device(soa=chart, I_max=value("I_C", 1e9, "A"), I_peak=value("I_CM", 1e9, "A"))
        steps = int(random.integers(1, 5))
        levels = random.uniform(0, 1, steps) * random.choice([0.0, 0.3, 1.0], steps)
        levels[random.integers(0, steps)] = 1.0
        ends = np.cumsum(random.uniform(0.1, 1, steps))
        shortest = times[0] / 2 if use is Use.ONCE else max(times[0] / 10, times[-1] / 500)
        span = np.exp(random.uniform(np.log(shortest), np.log(times[-1])))
        t = np.repeat(np.append(0.0, ends), 2)[1:-1] / ends[-1] * span
        shot = Locus(t=t[None, None], v=np.full((1, 1, 2 * steps), 50.0), i=np.repeat(levels, 2)[None, None], use=use)
        wanted = exact(shot, times, g)
        asked = judged(shot.refined(24), part)
        got = part_of(only(safe_area.find(asked)), "u_superposition")
        assert 1 - 0.002 < got / wanted < 1.02


def test_a_printed_pulse_with_a_step_in_it_is_not_let_through() -> None:
    # Found by search: one sum of modes for the whole of g was 9.6 % low here.
    times, g = np.array([0.01, 0.0316, 0.316, 3.16]), 1 / np.array([33.0033, 11.6822, 1.267427, 1.0])
    made = [curve(f"{w:g} s", w, (1, 1 / r), (100, 1 / r)) for w, r in zip(times[:-1], g, strict=False)]
    chart = (*made, curve("dc", np.inf, (1, 1.0), (100, 1.0)))
    part = device(soa=chart, I_max=value("I_C", 1e9, "A"), I_peak=value("I_CM", 1e9, "A"))
    half = 8.62091e-3
    shot = once([0, half, half, 2 * half], np.full(4, 50.0), np.repeat([14.62496, 24.37494], 2))
    finding = only(safe_area.find(judged(shot, part, rule=rules(pulse_between="log-log"))))
    assert part_of(finding, "u_superposition") == pytest.approx(exact(shot, times, g), rel=0.003)


def burst(*pieces: tuple[float, float, float]) -> Locus:
    """One shot of pieces (length, volts, amps)."""
    t = np.append(0.0, np.cumsum([length for length, _, _ in pieces]))
    return once(np.repeat(t, 2)[1:-1], *(np.repeat([piece[k] for piece in pieces], 2) for k in (1, 2)))


HYPERBOLA = device(
    soa=(
        curve("1 ms", 1e-3, (5, 25), (40, 25), (160, 2.2)),
        curve("10 ms", 1e-2, (5, 25), (20, 25), (160, 0.9)),
        curve("100 ms", 1e-1, (5, 15), (13.8, 15), (50, 4), (80, 1.7), (160, 0.38)),
        curve("dc", np.inf, (5, 15), (10, 15), (50, 3), (80, 1.1), (160, 0.2)),
    )
)


def test_preheating_counts_the_same_on_both_sides_of_the_end_of_the_current_flat() -> None:
    # 150 W for 0.9 s, then 2.5 A at 80 V for 1 ms: below 10 V the current rating is the allowance, and the hot spot
    # is as warm as above 10 V.
    below = only(safe_area.find(judged(burst((0.9, 9.999, 14.2), (1e-3, 80, 2.5)), HYPERBOLA, T_j=100)))
    above = only(safe_area.find(judged(burst((0.9, 10.001, 14.2), (1e-3, 80, 2.5)), HYPERBOLA, T_j=100)))
    cold = only(safe_area.find(judged(burst((0.9, 9.999, 0.0), (1e-3, 80, 2.5)), HYPERBOLA, T_j=100)))
    assert status(below) is status(above) is Status.EXCEEDS
    assert below.utilisation[0] == pytest.approx(above.utilisation[0], rel=1e-3)
    assert below.where.v[0] == 80.0
    assert "warm the hot spot" in said(below)
    assert status(cold) is Status.WITHIN


def test_what_is_left_to_the_current_limits_cannot_touch_by_itself() -> None:
    for amps in (14.9, 40.0):
        finding = only(safe_area.find(judged(burst((0.9, 9.9, amps)), HYPERBOLA, T_j=100)))
        assert finding.utilisation[0] == 0.0
    # Twice the rating counts as 1 in the response: what follows inside the dc curve stays inside.
    after = only(safe_area.find(judged(burst((0.9, 9.9, 30.0), (1e-3, 50, 1.0)), HYPERBOLA, T_j=100)))
    assert 0.5 < after.utilisation[0] <= 1.0


def test_an_on_device_warms_the_hot_spot_little() -> None:
    # By hand: 10 A at 0.8 V where dissipation would allow 150 W: x = 0.053 all the time before.
    before = only(safe_area.find(judged(burst((5.0, 0.8, 10.0), (1e-3, 80, 2.0)), HYPERBOLA, T_j=100)))
    cold = only(safe_area.find(judged(burst((5.0, 0.8, 0.0), (1e-3, 80, 2.0)), HYPERBOLA, T_j=100)))
    more = part_of(before, "u_superposition") - part_of(cold, "u_superposition")
    assert 0.0 < more <= 0.0534


ENDING = device(soa=(curve("1 ms", 1e-3, (5, 25), (40, 25), (80, 8)), *HYPERBOLA.soa[1:]))


def test_a_pulse_curve_that_ends_below_the_supply_proves_nothing() -> None:
    # With the 1 ms curve drawn to 160 V, 2 A at 120 V for 0.5 ms is inside.
    shot = burst((0.5e-3, 120, 2.0))
    assert status(only(safe_area.find(judged(shot, HYPERBOLA, T_j=60)))) is Status.WITHIN
    for hot in (60, 200):
        finding = only(safe_area.find(judged(shot, ENDING, T_j=hot)))
        assert status(finding) is Status.UNPROVEN
        assert "above 80 V, where the 1 ms curve ends" in said(finding)
        assert finding.missing(0) == ("soa[1 ms]",)


def test_the_longer_curves_decide_where_a_pulse_curve_has_ended() -> None:
    small = only(safe_area.find(judged(burst((0.5e-3, 120, 0.9)), ENDING, T_j=60)))
    assert status(small) in (Status.WITHIN, Status.MARGINAL)
    long = only(safe_area.find(judged(burst((50e-3, 120, 2.0)), ENDING, T_j=60)))
    assert status(long) is Status.EXCEEDS


def test_without_the_transient_curve_the_bound_on_the_junction_proves_nothing() -> None:
    # 0.1 ms above the 1 ms curve; P_peak * R_th_jc would be far above T_j_max, if it lasted.
    finding = only(safe_area.find(judged(burst((0.1e-3, 100, 8.0)), HYPERBOLA)))
    assert status(finding) is Status.UNPROVEN
    assert finding.missing(0) == ("soa[shorter]",)
    hot = only(safe_area.find(judged(burst((0.1e-3, 100, 8.0)), HYPERBOLA, T_j=160)))
    assert status(hot) is Status.EXCEEDS
