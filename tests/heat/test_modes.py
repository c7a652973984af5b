"""Responses of modes: published networks, closed forms, a body of the square root of time, high precision."""

from __future__ import annotations

from collections.abc import Callable

import mpmath
import numpy as np
import pytest

from soacheck.heat.modes import Modes, one_shot, periodic, segment_weights
from soacheck.trace import FloatArray
from tests.heat.networks import F3, Wave, foster_modes, rectangle, row, sampled, square_root_body

REST = np.zeros((1, 1, 3))


@pytest.mark.parametrize(("t", "z"), [(1e-3, 0.0977309), (1e-2, 0.346729), (0.1, 0.779259)])
def test_check_network_answers_a_step_as_tabulated(t: float, z: float) -> None:
    # Check network R = 0.1, 0.3, 0.6 K/W, tau = 1, 10, 100 ms: sum of R (1 - exp(-t/tau)), six digits.
    assert F3.step(np.array([t]))[0, 0, 0] == pytest.approx(z, rel=1e-6)


@pytest.mark.parametrize(
    ("power", "width", "period", "peak", "lowest", "mean"),
    [(100.0, 1e-3, 10e-3, 17.1114, 7.57061, 10.0), (50.0, 10e-3, 20e-3, 31.7150, 18.2850, 25.0)],
)
def test_repeated_rectangle_peaks_where_the_closed_form_says(
    power: float, width: float, period: float, peak: float, lowest: float, mean: float
) -> None:
    # Exact steady state: P sum R (1 - exp(-tp/tau)) / (1 - exp(-T/tau)), and the same times exp(-(T - tp)/tau).
    rise = periodic(F3, *rectangle(power, width, period)).rise[0, 0, 0]
    assert rise.max() == pytest.approx(peak, rel=3e-6)
    assert rise.min() == pytest.approx(lowest, rel=3e-6)
    t = np.concatenate([np.linspace(0, width, 201), np.linspace(width, period, 201)])
    power_at = np.repeat([power, 0.0], 201)
    fine = periodic(F3, row(t), row(power_at), row((power_at[1:] + power_at[:-1]) / 2)).rise[0, 0, 0]
    assert np.trapezoid(fine, t) / period == pytest.approx(mean, rel=1e-4)


def test_a_single_rectangle_ends_on_the_step_response() -> None:
    rise = one_shot(F3, *rectangle(7.0, 1e-2, 2e-2), REST).rise[0, 0, 0]
    assert rise[1] == pytest.approx(7 * 0.346729, rel=3e-6)
    assert rise[0] == 0


def class_b(frequency: float) -> Wave:
    """Dissipation of one device of a class-B pair at its worst amplitude, 2/pi of the 35 V rail into 8 ohm."""
    peak = 2 / np.pi * 35.0

    def p(t: FloatArray) -> FloatArray:
        v = peak * np.sin(2 * np.pi * frequency * t)
        return np.where(v > 0, (35.0 - v) * v / 8.0, 0.0)

    return sampled(p, 0.0, 0.5 / frequency, 1 / frequency, parts=2000)


@pytest.mark.parametrize(("frequency", "peak"), [(20, 23.4116), (50, 20.3091), (100, 18.8980), (1000, 16.0713)])
def test_audio_ripple_of_a_class_b_device_peaks_as_tabulated(frequency: float, peak: float) -> None:
    # Check network, worst amplitude, mean 35**2 / (pi**2 8) = 15.5148 W: six digits.
    rise = periodic(F3, *class_b(frequency)).rise[0, 0, 0]
    assert rise.max() == pytest.approx(peak, rel=3e-6)


@pytest.mark.parametrize(("frequency", "peak"), [(20, 50.5615), (50, 43.0874), (100, 39.8549), (1000, 33.0392)])
def test_half_sines_of_100_w_peak_as_tabulated(frequency: float, peak: float) -> None:
    # Check network, 100 W half sine in every other half period, mean 31.8310 W: six digits.

    def p(t: FloatArray) -> FloatArray:
        return np.asarray(100 * np.maximum(np.sin(2 * np.pi * frequency * t), 0))

    wave = sampled(p, 0.0, 0.5 / frequency, 1 / frequency, parts=2000)
    assert periodic(F3, *wave).rise[0, 0, 0].max() == pytest.approx(peak, rel=3e-6)


@pytest.mark.parametrize("ratio", [0.1, 0.5, 1.0, 2.0, 5.0, 10.0])
def test_half_sine_on_one_cell_follows_its_closed_form(ratio: float) -> None:
    # dT = P R / (1 + (w tau)**2) (sin wt - w tau cos wt + w tau exp(-t/tau)), w = pi/tp.
    cell, width = foster_modes([2.0], [1.0]), ratio
    t, p, p_mid = sampled(lambda s: 3 * np.sin(np.pi * s / width), 0.0, width, parts=2000)
    w = np.pi / width
    exact = 3 * 2 / (1 + w**2) * (np.sin(w * t) - w * np.cos(w * t) + w * np.exp(-t))
    rise = one_shot(cell, t, p, p_mid, np.zeros((1, 1, 1))).rise[0, 0, 0]
    assert rise == pytest.approx(exact[0, 0], abs=1e-11)


@pytest.mark.parametrize(
    ("ratio", "half_sine", "triangle"),
    [
        (0.1, 0.0606300, 0.0476280), (1.0, 0.422996, 0.336407), (2.0, 0.628121, 0.510120),
        (5.0, 0.862235, 0.739505), (10.0, 0.954762, 0.862045),
    ],
)  # fmt: skip
def test_shapes_on_one_cell_reach_the_tabulated_part_of_the_rectangle_for_ever(
    ratio: float, half_sine: float, triangle: float
) -> None:
    # Single cell, greatest rise over P R: six digits.
    cell = foster_modes([1.0], [1.0])
    rest = np.zeros((1, 1, 1))
    wave = sampled(lambda s: np.sin(np.pi * s / ratio), 0.0, ratio, parts=4000)
    assert one_shot(cell, *wave, rest).rise.max() == pytest.approx(half_sine, rel=3e-6)
    wave = sampled(lambda s: 1 - np.abs(2 * s / ratio - 1), 0.0, ratio / 2, ratio, parts=4000)
    assert one_shot(cell, *wave, rest).rise.max() == pytest.approx(triangle, rel=3e-6)


SHAPES: dict[str, tuple[Callable[[FloatArray], FloatArray], float, float]] = {
    # shape of length 1 and peak 1, greatest rise over Z(1), where: exact on the square-root body
    "rectangle": (np.ones_like, 1.0, 1.0),
    "rising ramp": (lambda s: s, 2 / 3, 1.0),
    "falling ramp": (lambda s: 1 - s, 0.471405, 0.5),
    "triangle": (lambda s: 1 - np.abs(2 * s - 1), 0.544331, 2 / 3),
    "half sine": (lambda s: np.sin(np.pi * s), 0.671084, 0.7313),
    "squared sine": (lambda s: np.sin(np.pi * s) ** 2, 0.584050, 0.668),
    "decay": (lambda s: np.exp(-8 * s), 0.541044 / np.sqrt(8), 0.854032 / 8),
}


@pytest.mark.parametrize("shape", SHAPES)
def test_pulse_shapes_on_the_square_root_body_have_their_exact_factors(shape: str) -> None:
    p, factor, where = SHAPES[shape]
    body = square_root_body(1e-5, 1.0)
    width = 2.5e-3
    t, power, middle = sampled(lambda s: p(s / width), 0.0, width / 2, width, parts=2000)
    rise = one_shot(body, t, power, middle, np.zeros((1, 1, body.tau.shape[1]))).rise[0, 0, 0]
    assert rise.max() / np.sqrt(width) == pytest.approx(factor, rel=3e-5)
    assert t[0, 0, np.argmax(rise)] / width == pytest.approx(where, abs=1e-3)


def test_a_staircase_is_the_sum_of_its_steps() -> None:
    # Superposition: dT(t) = sum over j of (P_j - P_j-1) Z(t - t_j).
    at, power = np.array([0.0, 2e-3, 3e-3, 20e-3, 21e-3]), np.array([5.0, 60.0, 0.0, 12.0, 1.0])
    end = 50e-3
    t = np.append(np.repeat(at, 2)[1:], end)
    p = np.repeat(power, 2)
    rise = one_shot(F3, row(t), row(p), row((p[1:] + p[:-1]) / 2), REST).rise[0, 0, 0]
    jumps = np.diff(power, prepend=0.0)
    for k, now in enumerate(t):
        before = at < now
        expected = float((jumps[before] * F3.step(now - at[before])[0, 0]).sum())
        assert rise[k] == pytest.approx(expected, rel=1e-12, abs=1e-14)


X = [1e-300, 1e-20, 1e-9, 1e-3, 0.3, 0.999, 1.0, 1.001, 2.0, 30.0, 800.0, 1e12]


@pytest.mark.parametrize("x", X)
def test_segment_weights_hold_fourteen_digits_for_any_step(x: float) -> None:
    with mpmath.workdps(700):
        z = mpmath.mpf(x)
        one = -mpmath.expm1(-z) / z
        two = (1 - one) / z
        three = (mpmath.mpf(1) / 2 - two) / z
        exact = [z * (one - 3 * two + 4 * three), z * (4 * two - 8 * three), z * (4 * three - two)]
        for ours, true in zip(segment_weights(np.array([x])), exact, strict=True):
            assert abs(mpmath.mpf(float(ours[0])) / true - 1) < 3e-14


def test_a_segment_of_no_length_changes_nothing() -> None:
    assert [float(w[0]) for w in segment_weights(np.array([0.0]))] == [0.0, 0.0, 0.0]


def test_time_constants_from_a_microsecond_to_a_day_keep_their_digits() -> None:
    rng = np.random.default_rng(5)
    tau = 10.0 ** np.linspace(-6, 5, 12)
    t = np.sort(np.concatenate([rng.uniform(0, 1e-3, 20), [0.0, 4e-4, 4e-4, 1e-3]]))
    p = rng.uniform(0, 50, t.size)
    p_mid = (p[1:] + p[:-1]) / 2 + rng.uniform(-1, 1, t.size - 1)
    modes = foster_modes([1.0] * 12, tau.tolist())
    ours = periodic(modes, row(t), row(p), row(p_mid)).state[0, 0]
    with mpmath.workdps(60):
        for m, x in enumerate(tau):
            exact = _states(t, p, p_mid, float(x))
            for k, true in enumerate(exact):
                assert abs(mpmath.mpf(float(ours[m, k])) / true - 1) < 2e-13


def _states(t: FloatArray, p: FloatArray, p_mid: FloatArray, tau: float) -> list[mpmath.mpf]:
    """Periodic states of one mode by 60-digit arithmetic, from the integral of the parabola in each segment."""
    x = mpmath.mpf(tau)
    steps = []
    for k in range(t.size - 1):
        h = mpmath.mpf(float(t[k + 1])) - mpmath.mpf(float(t[k]))
        p0, pm, p1 = (mpmath.mpf(float(a)) for a in (p[k], p_mid[k], p[k + 1]))
        a, b = (-3 * p0 + 4 * pm - p1), 2 * (p0 - 2 * pm + p1)  # p = p0 + a s + b s**2, s = time / h
        if h == 0:
            steps.append((mpmath.mpf(1), mpmath.mpf(0)))
            continue
        # a particular solution of tau dy/dt = p - y that is a parabola too
        q2 = b
        q1 = a - 2 * q2 * x / h
        q0 = p0 - q1 * x / h
        decay = mpmath.exp(-h / x)
        steps.append((decay, q0 + q1 + q2 - decay * q0))
    end, kept = mpmath.mpf(0), mpmath.mpf(1)
    for decay, fed in steps:
        end, kept = end * decay + fed, kept * decay
    states = [end / (1 - kept)]
    for decay, fed in steps:
        states.append(states[-1] * decay + fed)
    return states


def test_no_heat_capacity_means_following_the_power_at_once() -> None:
    modes = Modes(
        nodes=("junction", "case"),
        tau=np.ones((2, 0)),
        gain=np.ones((2, 2, 0)),
        direct=np.array([[3.0, 1.0], [4.0, 2.0]]),
        uniform=np.ones((2, 0)),
    )
    t, p, p_mid = row([0.0, 1.0, 2.0]), row([1.0, 5.0, 0.0]), row([3.0, 2.5])
    rise = periodic(modes, t, p, p_mid).rise
    assert rise[:, 0, :, 1].tolist() == [[15.0, 5.0], [20.0, 10.0]]
    assert modes.step(np.array([0.0, 1.0]))[1, 0].tolist() == [4.0, 4.0]


def test_a_period_without_length_is_refused() -> None:
    with pytest.raises(ValueError, match="length"):
        periodic(F3, row([1.0, 1.0]), row([1.0, 1.0]), row([1.0]))


def test_powers_that_do_not_fit_the_times_are_refused() -> None:
    with pytest.raises(ValueError, match="middle of every segment"):
        periodic(F3, row([0.0, 1.0]), row([1.0, 1.0]), row([1.0, 1.0]))
