"""Ladders from the three forms of Z_th_jc, and the network behind them."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from soacheck.device.ratings import ThermalData
from soacheck.errors import InputError
from soacheck.heat.ladder import Ladder, ladder_of, network
from soacheck.heat.stated import foster_to_ladder
from soacheck.trace import FloatArray
from soacheck.trace import given as stated

ONE = np.ones(1)
HELD = 1e-12 * ONE


def thermal(form: str, a: object, b: object, R_th_jc: float | None) -> ThermalData:
    R = None if R_th_jc is None else stated("R_th_jc", R_th_jc, "K/W", "test")
    first, second = np.array(a, dtype=float), np.array(b, dtype=float)
    if form == "pulse":
        return ThermalData(R_th_jc=R, form="pulse", pulse=first, value=second)
    pairs = np.stack([first, second], axis=1)
    if form == "foster":
        return ThermalData(R_th_jc=R, form="foster", foster=pairs)
    return ThermalData(R_th_jc=R, form="cauer", cauer=pairs)


def made(form: str, a: object, b: object, R_th_jc: float | None) -> Ladder:
    ladder = ladder_of(thermal(form, a, b, R_th_jc), file="part.toml")
    assert ladder is not None
    return ladder


def step(ladder: Ladder, t: FloatArray) -> FloatArray:
    return np.asarray(network(ladder, ladder.R.sum() * ONE, HELD, None, None).step(t)[0, 0])


@pytest.mark.parametrize(
    ("R", "tau", "ladder_R", "ladder_C"),
    [
        ([0.1, 0.3, 0.6], [1e-3, 1e-2, 1e-1], [0.179468, 0.355461, 0.465071], [0.00735294, 0.0258645, 0.177230]),
        ([0.5, 1.0], [1e-2, 1.0], [0.520096, 0.979904], [0.0196078, 1.00070]),
    ],
)
def test_foster_pairs_become_the_tabulated_ladder(
    R: list[float], tau: list[float], ladder_R: list[float], ladder_C: list[float]
) -> None:
    # Foster to Cauer check pairs, six digits.
    ours_R, ours_C = foster_to_ladder(np.array(R), np.array(tau))
    assert ours_R == pytest.approx(ladder_R, rel=3e-6)
    assert ours_C == pytest.approx(ladder_C, rel=4e-6)


@given(
    st.lists(st.tuples(st.floats(1e-3, 10), st.floats(-7, 3)), min_size=1, max_size=14),
)
def test_foster_pairs_and_their_ladder_answer_a_step_alike_at_all_times(pairs: list[tuple[float, float]]) -> None:
    R, tau = np.array([r for r, _ in pairs]), np.array([10**x for _, x in pairs])
    ladder = made("foster", R, tau, float(R.sum()))
    t = np.geomspace(tau.min() / 100, tau.max() * 10, 60)
    exact = -np.expm1(-t[:, None] / tau) @ R
    assert ladder.R.sum() == pytest.approx(R.sum(), rel=1e-12)
    assert step(ladder, t) == pytest.approx(exact, rel=1e-9)


def test_time_constants_close_together_keep_their_digits() -> None:
    # Second way: the same continued fraction with 600 digits; 28 would not do.
    R, tau = np.linspace(0.1, 0.3, 12), np.geomspace(1e-2, 1e-2 * 1.01**11, 12)
    with mpmath.workdps(600):
        bottom, top = [mpmath.mpf(1)], [mpmath.mpf(0)]
        for r, x in zip(R.tolist(), tau.tolist(), strict=True):
            top = [
                a + b * mpmath.mpf(x) + c * mpmath.mpf(r)
                for a, b, c in zip([*top, 0], [0, *top], [*bottom, 0], strict=True)
            ]
            bottom = [a + b * mpmath.mpf(x) for a, b in zip([*bottom, 0], [0, *bottom], strict=True)]
        top.pop()
        cells = []
        while top:
            C = bottom[-1] / top[-1]
            bottom = [a - C * b for a, b in zip(bottom[:-1], [0, *top[:-1]], strict=True)]
            r = top[-1] / bottom[-1]
            top = [a - r * b for a, b in zip(top[:-1], bottom[:-1], strict=True)]
            cells.append((float(r), float(C)))
    ours_R, ours_C = foster_to_ladder(R, tau)
    assert ours_R.tolist() == pytest.approx([r for r, _ in cells], rel=1e-14)
    assert ours_C.tolist() == pytest.approx([c for _, c in cells], rel=1e-14)


def test_first_ladder_capacity_is_all_foster_capacities_in_series() -> None:
    # Identity: C_1 = 1 / sum(1 / C_i).
    R, tau = np.array([0.03, 0.2, 0.4, 0.1]), np.array([1e-5, 1e-3, 2e-2, 0.6])
    assert foster_to_ladder(R, tau)[1][0] == pytest.approx(1 / np.sum(R / tau), rel=1e-14)


def test_pairs_of_one_time_constant_are_one_pair() -> None:
    R, C = foster_to_ladder(np.array([0.2, 0.3]), np.array([1e-2, 1e-2]))
    assert R.tolist() == [0.5]
    assert C.tolist() == pytest.approx([0.02])


def test_a_ladder_as_stated_stays_as_it_is() -> None:
    ladder = made("cauer", [0.1, 0.4], [1e-3, 1e-2], 0.5)
    assert ladder.R.tolist() == pytest.approx([0.1, 0.4], rel=1e-15)
    assert ladder.C.tolist() == pytest.approx([1e-3, 1e-2], rel=1e-15)
    assert (ladder.error, ladder.raised) == (0.0, False)


def test_no_curve_gives_no_ladder() -> None:
    assert ladder_of(ThermalData(R_th_jc=stated("R_th_jc", 0.8, "K/W", "test")), file="part.toml") is None


@pytest.mark.parametrize("form", ["foster", "cauer"])
@pytest.mark.parametrize(
    ("rated", "total", "words"),
    [(0.505, 0.505, "scaled by"), (0.8, 0.8, "scaled up"), (0.4, 0.5, "kept, cautious"), (None, 0.5, "not stated")],
)
def test_sums_that_differ_from_the_rating_are_tied_to_the_larger(
    form: str, rated: float | None, total: float, words: str
) -> None:
    ladder = made(form, [0.1, 0.4], [1e-3, 1e-2], rated)
    assert ladder.R.sum() == pytest.approx(total, rel=1e-12)
    assert words in ladder.how


def test_scaling_keeps_the_time_constants() -> None:
    a, b = made("foster", [0.1, 0.4], [1e-3, 1e-2], 0.5), made("foster", [0.1, 0.4], [1e-3, 1e-2], 0.8)
    t = np.geomspace(1e-5, 1, 30)
    assert step(b, t) == pytest.approx(1.6 * step(a, t), rel=1e-9)


# --- single-pulse curves ---

CHART_T = [1e-5, 1e-4, 1e-3, 1e-2, 0.1, 1.0]
CHART_Z = [0.01, 0.0316, 0.1, 0.28, 0.6, 0.82]


def test_a_plausible_chart_is_met_closely_with_few_cells() -> None:
    ladder = made("pulse", CHART_T, CHART_Z, 0.83)
    assert step(ladder, np.array(CHART_T)) == pytest.approx(CHART_Z, rel=0.01)
    assert ladder.error < 0.01
    assert not ladder.raised
    assert ladder.R.size <= 16
    assert ladder.R.sum() == pytest.approx(0.83, rel=1e-12)


def test_below_its_first_point_a_curve_goes_as_the_root_of_time() -> None:
    ladder = made("pulse", CHART_T, CHART_Z, 0.83)
    t = np.geomspace(1e-8, 1e-5, 31)
    assert step(ladder, t) == pytest.approx(0.01 * np.sqrt(t / 1e-5), rel=0.05)


def test_a_curve_that_ends_below_the_rating_is_completed_to_it() -> None:
    ladder = made("pulse", [1e-5, 1e-3, 0.1], [0.01, 0.12, 0.6], 0.83)
    assert "completed" in ladder.how
    assert ladder.R.sum() == pytest.approx(0.83, rel=1e-12)
    z = step(ladder, np.array([0.1, 0.3, 3.0]))
    assert z[0] == pytest.approx(0.6, rel=0.01)
    assert z[1] > 0.7  # on at the last slope at least
    assert z[2] == pytest.approx(0.83, rel=0.01)


def test_a_curve_that_ends_a_little_above_the_rating_keeps_its_end() -> None:
    ladder = made("pulse", CHART_T, [*CHART_Z[:-1], 0.88], 0.83)
    assert ladder.R.sum() == pytest.approx(0.88, rel=1e-12)
    assert "cautious" in ladder.how


def test_a_lone_point_is_a_root_of_time_on_its_way_to_the_rating() -> None:
    z = step(made("pulse", [1e-3], [0.1], 1.0), np.array([1e-5, 1e-3, 1e-2, 10.0]))
    assert z == pytest.approx([0.01, 0.1, 0.316, 1.0], rel=0.05)


@given(st.lists(st.floats(-0.06, 0.06), min_size=12, max_size=12))
def test_a_curve_read_badly_is_raised_onto_or_above_every_point(reading: list[float]) -> None:
    t = np.geomspace(1e-5, 1, 12)
    z = np.maximum.accumulate(0.83 * -np.expm1(-np.sqrt(t / 0.1)) * np.exp(reading))
    z = np.minimum(z, 0.82)
    ladder = made("pulse", t, z, 0.83)
    ours = step(ladder, t)
    if ladder.raised:
        assert ladder.error > 0.02
        assert (ours / z).min() >= 1 - 1e-9
        assert "raised" in ladder.how
    else:
        assert ours == pytest.approx(z, rel=0.0201)


def test_a_reading_at_the_rating_itself_is_reached_to_a_thousandth() -> None:
    # no ladder reaches its sum at a finite time
    t = np.geomspace(1e-5, 1, 16)
    z = np.minimum(np.sqrt(t / 0.1), 1.0)
    ladder = made("pulse", t, z, 1.0)
    assert ladder.raised
    assert (step(ladder, t) / z).min() >= 1 - 1.001e-3


@pytest.mark.parametrize(
    ("t", "z", "rated", "words"),
    [
        ([1e-3, 1e-2, 1e-1], [0.1, 0.09, 0.5], 1.0, "never falls"),
        ([1e-3, 2e-3, 1e-1], [0.1, 0.21, 0.5], 1.0, "faster than time"),
        ([1e-3, 1e-2, 1e-1, 1.0], [0.1, 0.11, 0.9, 0.95], 1.0, "no body answers"),
        ([1e-3, 1e-2, 1e-1], [0.1, 0.3, 1.2], 1.0, "far above R_th_jc"),
        ([1e-3, 1e-3, 1e-1], [0.1, 0.3, 0.9], 1.0, "must rise"),
        ([1e-3, 1e-2, 1e-1], [0.0, 0.3, 0.9], 1.0, "place 1"),
    ],
)
def test_a_curve_that_no_body_has_is_an_input_error(t: list[float], z: list[float], rated: float, words: str) -> None:
    with pytest.raises(InputError) as caught:
        ladder_of(thermal("pulse", t, z, rated), file="part.toml")
    problem = caught.value.problems[0]
    assert (problem.file, problem.key) == ("part.toml", "thermal.Z_th_jc")
    assert words in problem.problem
    assert problem.remedy


def test_a_curve_of_a_ladder_gives_a_ladder_that_answers_alike() -> None:
    true = Ladder(R=np.array([0.05, 0.2, 0.35, 0.23]), C=np.array([2e-4, 4e-3, 3e-2, 0.25]))
    t = np.geomspace(1e-5, 10, 25)
    again = made("pulse", t, step(true, t), 0.83)
    between = np.geomspace(2e-5, 9, 77)
    assert step(again, between) == pytest.approx(step(true, between), rel=0.02)


# --- networks ---

LADDER = Ladder(R=np.array([0.2, 0.4]), C=np.array([1e-3, 2e-2]))


def test_steady_rises_are_sums_of_resistances() -> None:
    net = network(LADDER, np.array([0.6, 0.9]), 0.4 * ONE, np.array([1.6]), np.array([200.0]))
    assert net.nodes == ("junction", "case", "heatsink")
    steady = net.direct + net.gain.sum(axis=2)
    assert steady == pytest.approx(np.array([[2.6, 2.0, 1.6], [2.9, 2.0, 1.6]]), rel=1e-12)


def test_a_ladder_scaled_to_its_resistance_keeps_its_time_constants() -> None:
    a, b = (network(LADDER, R * ONE, HELD, None, None) for R in (0.6, 0.9))
    assert b.tau == pytest.approx(a.tau, rel=1e-9)


def test_a_held_sink_is_the_boundary() -> None:
    net = network(LADDER, 0.6 * ONE, 0.4 * ONE, None, None)
    assert net.nodes == ("junction", "case")
    assert net.gain.sum(axis=2)[0] == pytest.approx([1.0, 0.4], rel=1e-12)


def test_a_sink_without_heat_capacity_follows_the_case() -> None:
    net = network(LADDER, 0.6 * ONE, 0.4 * ONE, 1.6 * ONE, None)
    z = net.step(np.geomspace(1e-4, 10, 9))[0]
    assert z[2] == pytest.approx(0.8 * z[1], rel=1e-12)


def test_without_a_ladder_junction_and_case_follow_the_power_at_once() -> None:
    net = network(None, 0.6 * ONE, 0.4 * ONE, 1.6 * ONE, 100.0 * ONE)
    assert net.step(np.array([0.0, 160.0]))[0] == pytest.approx(
        np.array([[1.0, 1.0 + 1.6 * -np.expm1(-1)], [0.4, 0.4 + 1.6 * -np.expm1(-1)], [0.0, 1.6 * -np.expm1(-1)]])
    )


def test_nothing_with_heat_capacity_leaves_no_modes() -> None:
    net = network(None, 0.6 * ONE, 0.4 * ONE, 1.6 * ONE, None)
    assert net.tau.shape == (1, 0)
    assert net.direct[0] == pytest.approx([2.6, 2.0, 1.6])


def test_everything_one_kelvin_warm_starts_one_kelvin_warm() -> None:
    net = network(LADDER, 0.6 * ONE, 0.4 * ONE, 1.6 * ONE, 100.0 * ONE)
    assert (net.gain * net.uniform[:, None]).sum(axis=2)[0] == pytest.approx([1, 1, 1], rel=1e-12)


def test_a_resistance_that_is_not_known_makes_its_case_unknown_only() -> None:
    net = network(LADDER, 0.6 * ONE, np.array([0.4, np.nan]), 1.6 * ONE, 100.0 * ONE)
    assert np.isnan(net.tau[1]).all()
    assert np.isnan(net.gain[1]).all()
    assert net.gain[0].sum(axis=1) == pytest.approx([2.6, 2.0, 1.6])


@pytest.mark.parametrize("bad", [0.0, -1.0, np.inf])
def test_a_resistance_that_is_no_positive_number_is_refused(bad: float) -> None:
    with pytest.raises(ValueError, match="positive"):
        network(LADDER, 0.6 * ONE, bad * ONE, None, None)


def test_a_boundary_has_no_heat_capacity() -> None:
    with pytest.raises(ValueError, match="boundary"):
        network(LADDER, 0.6 * ONE, 0.4 * ONE, None, 100.0 * ONE)


def test_a_ladder_of_unequal_or_empty_cells_is_refused() -> None:
    with pytest.raises(ValueError, match="positive"):
        Ladder(R=np.array([0.1, 0.2]), C=np.array([1e-3]))
    with pytest.raises(ValueError, match="positive"):
        Ladder(R=np.array([0.1, 0.2]), C=np.array([1e-3, 0.0]))
