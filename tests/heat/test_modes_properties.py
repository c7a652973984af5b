"""What any response of any network must do, found by search; and the same answers from a differential equation."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from soacheck.heat.graph import Graph, modes_of
from soacheck.heat.ladder import Ladder, network
from soacheck.heat.modes import Modes, one_shot, periodic
from soacheck.trace import FloatArray
from tests.heat.networks import Wave, row

LADDER = Ladder(R=np.array([0.05, 0.2, 0.35, 0.23]), C=np.array([2e-4, 4e-3, 3e-2, 0.25]))
ONE = np.ones(1)


def modes() -> Modes:
    return network(LADDER, 0.83 * ONE, 0.4 * ONE, 1.6 * ONE, 3.0 * ONE)


@st.composite
def waves(draw: st.DrawFn) -> Wave:
    """t, p, p_mid of one period: v and i straight between times, steps among them, powers not negative."""
    count = draw(st.integers(2, 40))
    steps = draw(st.lists(st.sampled_from([0.0, 1e-6, 1e-4, 3e-3, 0.02, 1.0]), min_size=count, max_size=count))
    v = np.array(draw(st.lists(st.floats(0, 100), min_size=count + 1, max_size=count + 1)))
    i = np.array(draw(st.lists(st.floats(0, 20), min_size=count + 1, max_size=count + 1)))
    t = np.concatenate([[0.0], np.cumsum(steps)])
    if t[-1] == 0:
        t[-1] = 1e-3
    return row(t), row(v * i), row((v[1:] + v[:-1]) * (i[1:] + i[:-1]) / 4)


@given(waves(), st.floats(0.01, 100))
def test_response_is_linear_in_power(wave: Wave, factor: float) -> None:
    t, p, p_mid = wave
    one, other = periodic(modes(), t, p, p_mid).rise, periodic(modes(), t, factor * p, factor * p_mid).rise
    scale = factor * max(float(np.abs(one).max()), 1e-300)
    assert np.abs(other - factor * one).max() <= 1e-12 * scale


@given(waves(), st.floats(0, 50))
def test_more_power_never_cools_and_none_is_never_below_the_boundary(wave: Wave, more: float) -> None:
    t, p, p_mid = wave
    one, other = periodic(modes(), t, p, p_mid).rise, periodic(modes(), t, p + more, p_mid + more).rise
    rounding = 1e-12 * max(float(other.max()), 1e-300)
    assert one.min() >= -rounding
    assert (other - one).min() >= -rounding


@given(waves())
def test_constant_power_gives_the_resistance_times_it_at_any_time(wave: Wave) -> None:
    t = wave[0]
    rise = periodic(modes(), t, np.full(t.shape, 7.0), np.full((1, 1, t.shape[2] - 1), 7.0)).rise
    expected = 7 * np.array([0.83 + 0.4 + 1.6, 0.4 + 1.6, 1.6])
    assert rise[0, 0] == pytest.approx(np.repeat(expected[:, None], t.shape[2], axis=1), rel=1e-10)


@given(waves())
def test_the_periodic_state_repeats_itself(wave: Wave) -> None:
    """A shot over one period from the periodic state ends in it, and follows the same path."""
    forever = periodic(modes(), *wave)
    shot = one_shot(modes(), *wave, forever.state[..., 0])
    scale = max(float(np.abs(forever.state).max()), 1e-300)
    assert np.abs(forever.state[..., -1] - forever.state[..., 0]).max() <= 1e-12 * scale
    assert np.abs(shot.rise - forever.rise).max() <= 1e-11 * max(float(forever.rise.max()), 1e-300)


@settings(max_examples=20)
@given(waves())
def test_many_shots_end_in_the_periodic_state(wave: Wave) -> None:
    forever = periodic(modes(), *wave)
    period = float(wave[0][0, 0, -1])
    state = 0.5 * forever.state[..., 0]
    slowest = float(modes().tau.max())
    if period < slowest / 20:
        return
    for _ in range(int(35 * slowest / period) + 1):
        state = one_shot(modes(), *wave, state).state[..., -1]
    scale = max(float(np.abs(forever.state).max()), 1e-300)
    assert np.abs(state - forever.state[..., 0]).max() <= 1e-12 * scale


@given(waves(), st.integers(2, 7))
def test_cutting_segments_changes_nothing_where_they_met(wave: Wave, parts: int) -> None:
    t, p, p_mid = (a[0, 0] for a in wave)
    s = np.arange(parts) / parts

    def parabola(s: FloatArray) -> FloatArray:
        first = p[:-1, None] * (1 - s) * (1 - 2 * s) + p_mid[:, None] * 4 * s * (1 - s)
        return np.asarray((first + p[1:, None] * s * (2 * s - 1)).ravel())

    fine = np.append((t[:-1, None] + s * np.diff(t)[:, None]).ravel(), t[-1])
    whole = periodic(modes(), *wave).rise
    cut = periodic(modes(), row(fine), row(np.append(parabola(s), p[-1])), row(parabola(s + 0.5 / parts))).rise
    assert np.abs(cut[..., ::parts] - whole).max() <= 1e-10 * max(float(whole.max()), 1e-300)


@given(waves())
def test_arrays_give_what_their_scalars_give(wave: Wave) -> None:
    t, p, p_mid = wave
    level = np.array([1.0, 0.3, 2.0])[None, :, None]
    cs = np.array([0.1, 0.4])
    many = network(LADDER, 0.83 * ONE, cs, 1.6 * ONE, 3.0 * ONE)
    together = periodic(many, t, p * level, p_mid * level).rise
    assert together.shape == (2, 3, 3, t.shape[2])
    for case in range(2):
        alone = network(LADDER, 0.83 * ONE, cs[case : case + 1], 1.6 * ONE, 3.0 * ONE)
        for member in range(3):
            x = level[0, member, 0]
            single = periodic(alone, t, p * x, p_mid * x).rise[0, 0]
            scale = max(float(single.max()), 1e-300)
            assert np.abs(together[case, member] - single).max() <= 1e-13 * scale


@given(waves())
def test_heat_that_goes_in_comes_out_or_stays(wave: Wave) -> None:
    """Energy balance over a shot from a warm start, on every node: in = out + stored."""
    t, p, p_mid = wave
    R, C = np.append(LADDER.R, 0.5), np.append(LADDER.C, 4.0)
    n = R.size
    between, out = np.zeros((1, n, n)), np.zeros((1, n))
    for k in range(n - 1):
        between[0, k, k + 1] = between[0, k + 1, k] = 1 / R[k]
    out[0, -1] = 1 / R[-1]
    net = modes_of(Graph(between=between, out=out, capacity=C[None]), heated=0, observed={str(k): k for k in range(n)})
    start = 11.0 * net.uniform[:, None, :]
    rise = one_shot(net, t, p, p_mid, start)
    assert rise.rise[0, 0, :, 0] == pytest.approx(np.full(n, 11.0), rel=1e-9)
    dt = np.diff(t[0, 0])
    energy_in = float((dt * (p[0, 0, :-1] + 4 * p_mid[0, 0] + p[0, 0, 1:]) / 6).sum())
    stored = float((C * (rise.rise[0, 0, :, -1] - rise.rise[0, 0, :, 0])).sum())
    # from tau dy/dt = p - y each mode's integral of y is the heat in less tau times its change
    change = rise.state[0, 0, :, -1] - rise.state[0, 0, :, 0]
    energy_out = float((net.gain[0, -1] / R[-1]) @ (energy_in - net.tau[0] * change))
    assert energy_in == pytest.approx(energy_out + stored, rel=1e-9, abs=1e-9 * abs(stored))


def test_over_a_period_the_heat_that_leaves_is_the_heat_that_enters() -> None:
    """The same by quadrature of the case's temperature alone, nothing of the modes used: Simpson, 1e-9."""
    net = network(LADDER, 0.83 * ONE, 0.4 * ONE, None, None)
    t, v = np.array([0.0, 2e-3, 2e-3, 9e-3, 20e-3]), np.array([5.0, 40.0, 2.0, 2.0, 5.0])
    i = np.array([0.0, 3.0, 9.0, 0.0, 0.0])
    s = np.linspace(0, 1, 401)[:-1]

    def fine(a: FloatArray) -> FloatArray:
        return np.append((a[:-1, None] + s * np.diff(a)[:, None]).ravel(), a[-1])

    tt, vv, ii = fine(t), fine(v), fine(i)
    p_mid = (vv[1:] + vv[:-1]) * (ii[1:] + ii[:-1]) / 4
    case = periodic(net, row(tt), row(vv * ii), row(p_mid)).rise[0, 0, 1]
    dt = np.diff(tt)
    energy_in = (dt * (vv[:-1] * ii[:-1] + 4 * p_mid + vv[1:] * ii[1:]) / 6).sum()
    pairs = case[: 2 * ((tt.size - 1) // 2) + 1]
    step = dt[::2]
    energy_out = (step / 3 * (pairs[:-2:2] + 4 * pairs[1:-1:2] + pairs[2::2])).sum() / 0.4
    assert energy_out == pytest.approx(energy_in, rel=1e-9)


def ladder_equation(t: FloatArray, v: FloatArray, i: FloatArray, start: FloatArray) -> FloatArray:
    """Temperatures of the ladder's nodes and the sink by an ODE solver, segment by segment: (node, time)."""
    R, C = np.append(LADDER.R[:-1], LADDER.R[-1] + 0.4), np.append(LADDER.C, 3.0)
    states = [start]
    for k in range(t.size - 1):
        if t[k + 1] == t[k]:
            states.append(states[-1])
            continue

        def slope(now: float, T: FloatArray, k: int = k) -> FloatArray:
            s = (now - t[k]) / (t[k + 1] - t[k])
            p = (v[k] + s * (v[k + 1] - v[k])) * (i[k] + s * (i[k + 1] - i[k]))
            flow = np.append((T[:-1] - T[1:]) / R, T[-1] / 1.6)
            return np.asarray((np.concatenate([[p], flow[:-1]]) - flow) / C)

        found = solve_ivp(slope, (t[k], t[k + 1]), states[-1], method="LSODA", rtol=1e-10, atol=1e-11)
        assert found.success
        states.append(found.y[:, -1])
    return np.array(states).T


T_WAVE = np.array([0.0, 1e-3, 1e-3, 6e-3, 30e-3, 50e-3])
V_WAVE = np.array([3.0, 40.0, 1.0, 2.0, 30.0, 3.0])
I_WAVE = np.array([2.0, 4.0, 8.0, 8.0, 0.1, 0.1])


def test_a_shot_from_a_warm_uniform_start_is_what_an_ode_solver_gives() -> None:
    # Second way: scipy's LSODA on the ladder's own equations.
    direct = ladder_equation(T_WAVE, V_WAVE, I_WAVE, np.full(5, 20.0))
    net = modes()
    p_mid = (V_WAVE[1:] + V_WAVE[:-1]) * (I_WAVE[1:] + I_WAVE[:-1]) / 4
    rise = one_shot(net, row(T_WAVE), row(V_WAVE * I_WAVE), row(p_mid), 20.0 * net.uniform[:, None]).rise[0, 0]
    assert rise[0] == pytest.approx(direct[0], rel=1e-7)
    assert rise[2] == pytest.approx(direct[-1], rel=1e-7)
    case = direct[-2] - (direct[-2] - direct[-1]) * LADDER.R[-1] / (LADDER.R[-1] + 0.4)
    assert rise[1] == pytest.approx(case, rel=1e-7)


def test_the_periodic_state_is_what_an_ode_solver_settles_to() -> None:
    # Second way: scipy's LSODA marched one period from the closed form's start stays on it and comes back to it.
    net = modes()
    p_mid = (V_WAVE[1:] + V_WAVE[:-1]) * (I_WAVE[1:] + I_WAVE[:-1]) / 4
    forever = periodic(net, row(T_WAVE), row(V_WAVE * I_WAVE), row(p_mid))
    every = _nodes_of(net, forever.state[0, 0, :, 0])
    marched = ladder_equation(T_WAVE, V_WAVE, I_WAVE, every)
    assert marched[0] == pytest.approx(forever.rise[0, 0, 0], rel=1e-6)
    assert marched[:, -1] == pytest.approx(every, rel=1e-6)


def _nodes_of(net: Modes, state: FloatArray) -> FloatArray:
    """Temperatures of all nodes of the ladder in a mode state: the same network with all of them observed."""
    R, C = np.append(LADDER.R[:-1], LADDER.R[-1] + 0.4), np.append(LADDER.C, 3.0)
    between, out = np.zeros((1, 5, 5)), np.zeros((1, 5))
    for k in range(4):
        between[0, k, k + 1] = between[0, k + 1, k] = 1 / R[k]
    out[0, -1] = 1 / 1.6
    graph = Graph(between=between, out=out, capacity=C[None])
    whole = modes_of(graph, heated=0, observed={str(k): k for k in range(5)})
    assert whole.tau == pytest.approx(net.tau, rel=1e-9)
    return np.asarray(whole.gain[0] @ state)
