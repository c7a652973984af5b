"""Outputs held for ever, of either sign: what a half sees while the other one carries the load."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given as for_all
from hypothesis import strategies as st

from soacheck.device.ratings import Kind
from soacheck.duty import Duty
from soacheck.load.parts.class_ab import exponential_pair, square_law_pair, thermal_voltage
from soacheck.load.parts.push_pull_stage import PushPull
from tests.load.pushpull import by_name, fact, fitted, locus_of, mean, stage


def others(duty: Duty) -> np.ndarray:
    assert duty.others is not None
    return duty.others


def test_the_half_that_rests_stands_at_both_rails() -> None:
    # Analytic: the output at -100 V, the upper rail at +100 V.
    found = by_name(stage(100.0, 200.0, None))
    for name in ("full-level", "any-level"):
        assert float(locus_of(found[name]).v.max()) == pytest.approx(200.0, rel=1e-12)
        assert float(locus_of(found[name]).i.max()) == pytest.approx(0.5, rel=1e-12)


@pytest.mark.parametrize("bridged", [False, True])
def test_a_stated_level_is_held_either_way(bridged: bool) -> None:
    # Analytic: 100 V - 90 V and 100 V + 90 V; a bridge shares 90 V between its two outputs.
    load = stage(100.0, 200.0, None, level="voltage", level_value=90.0, bridged=bridged)
    duty = by_name(load)["at-level"]
    own = 45.0 if bridged else 90.0
    assert locus_of(duty).v[0, :, 0] == pytest.approx([100 - own, 100 + own])
    assert locus_of(duty).i[0, :, 0] == pytest.approx([0.45, 0.0])
    assert duty.members.value[0] == pytest.approx([90.0, -90.0])


def test_in_class_a_a_half_is_hottest_where_the_other_one_carries_the_load() -> None:
    # Analytic, two square-law devices of 0.7 A, 200 ohm: at -40 V the load takes 0.2 A, the upper half carries
    # 0.7 (1 - 0.2/2.8)^2 = 0.604 A at 80 V.
    found = by_name(stage(40.0, 200.0, None, I_Q=0.7), fitted("n-mosfet"))
    upper = 0.7 * (1 - 0.2 / 2.8) ** 2
    for name in ("worst-level", "any-level"):
        assert float(locus_of(found[name]).p_mean.max()) == pytest.approx(80 * upper, rel=1e-9)
    assert fact(found["worst-level"], "V") == pytest.approx(-40.0)
    assert upper == pytest.approx(0.604, abs=5e-4)


def test_the_worst_held_level_lies_below_nothing_where_the_idle_current_says_so() -> None:
    # Analytic: (60 - V)(1 + V/240)^2 rises towards negative V up to -240/3 + 2*60/3 = -40 V: 69.4 W.
    worst = by_name(stage(60.0, 60.0, None, I_Q=1.0), fitted("n-mosfet"))["worst-level"]
    assert fact(worst, "V") == pytest.approx(-40.0, abs=0.02)
    assert mean(worst) == pytest.approx(100 * (1 - 40 / 240) ** 2, rel=1e-6)


@pytest.mark.parametrize("bridged", [False, True])
@pytest.mark.parametrize("kind", ["npn", "n-mosfet"])
def test_all_devices_together_dissipate_what_the_supply_gives_and_the_load_does_not_take(
    bridged: bool, kind: Kind
) -> None:
    # Second way, the energy balance without resistors: each half draws its current from its rail, the load takes V^2/R.
    share = 0.3
    load = stage(40.0, 16.0, None, I_Q=0.4, pairs=4, bridged=bridged)
    duty = by_name(load, fitted(kind, share=share))["any-level"]
    amplifiers = 2 if bridged else 1
    V = duty.members.value[0] / amplifiers
    i_pair = V * amplifiers / 16 / 4
    pair = exponential_pair(i_pair, 0.4, 0.0, thermal_voltage()) if kind == "npn" else square_law_pair(i_pair, 0.4)
    drawn = 40 * 4 * (pair.upper + pair.lower)
    total = amplifiers * (drawn - V**2 * amplifiers / 16)
    assert locus_of(duty).p_mean[0] + others(duty)[0] == pytest.approx(total, rel=1e-9)


def test_the_heat_of_the_other_half_is_there_where_this_one_has_none() -> None:
    # Analytic, class B at -V_rail/2: all of V_rail^2/(4 R) is the other half's.
    duty = by_name(stage(40.0, 8.0, None, level="voltage", level_value=20.0))["at-level"]
    assert locus_of(duty).p_mean[0] == pytest.approx([50.0, 0.0])
    assert others(duty)[0] == pytest.approx([0.0, 50.0])
    shared = by_name(stage(40.0, 8.0, None, level="voltage", level_value=20.0), fitted(share=0.5))["at-level"]
    assert others(shared)[0] == pytest.approx([25.0, 50.0])
    for name in ("worst-level", "full-level", "any-level"):
        assert bool(np.all(np.isfinite(by_name(stage(f=None))[name].heat_ratio)))


@for_all(
    level=st.floats(0.01, 1.0),
    I_Q=st.sampled_from([0.0, 1e-4, 0.03, 0.4, 2.0]),
    R_E=st.sampled_from([0.0, 0.22, 1.0]),
    R=st.floats(4.0, 300.0),
    kind=st.sampled_from(["npn", "n-mosfet"]),
)
def test_no_held_output_of_either_sign_is_above_the_search(
    level: float, I_Q: float, R_E: float, R: float, kind: Kind
) -> None:
    def made(one: PushPull) -> dict[str, Duty]:
        return by_name(one, fitted(kind))

    found = made(stage(40.0, R, None, I_Q=I_Q, R_E=R_E))
    every = locus_of(found["any-level"])
    single = locus_of(made(stage(40.0, R, None, "ratio", level_value=level, I_Q=I_Q, R_E=R_E))["at-level"])
    for of_all, of_one in ((every.p_mean, single.p_mean), (every.v, single.v), (every.i, single.i)):
        assert float(of_one.max()) <= float(of_all.max()) * (1 + 1e-6)
    assert float(single.p_mean.max()) <= mean(found["worst-level"]) * (1 + 1e-6)
    # what heats the sink: all devices of the stage
    whole = [
        float((locus_of(one).p_mean + others(one)).max())
        for one in (
            found["any-level"],
            made(stage(40.0, R, None, "ratio", level_value=level, I_Q=I_Q, R_E=R_E))["at-level"],
        )
    ]
    assert whole[1] <= whole[0] * (1 + 1e-3)


@pytest.mark.parametrize("I_Q", [0.0, 0.3])
@pytest.mark.parametrize("name", ["full-level", "any-level"])
def test_each_sign_can_be_redone_by_hand(name: str, I_Q: float) -> None:
    duty = by_name(stage(40.0, 8.0, None, I_Q=I_Q, R_E=0.5, pairs=2), fitted(share=0.6))[name]
    assert duty.facts_at is not None
    for member in (0, 1, locus_of(duty).shape[1] - 1):
        made = {one.symbol: one.at(0) for one in duty.facts_at(np.array([member]))}
        V = float(duty.members.value[0, member])
        half = max(V, 0.0) / 8
        assert made["V"] == pytest.approx(V)
        assert made["V_half"] == pytest.approx(40 - V - 0.25 * half)
        assert made["P_B"] == pytest.approx(0.6 * (40 - V - 0.25 * half) * half)
        assert made["P_AB" if I_Q else "P_B"] == pytest.approx(mean(duty, member), abs=1e-9)


def test_members_of_several_cases_have_facts_of_their_own_sign() -> None:
    duty = by_name(stage([40.0, 44.0], 8.0, None, level="ratio", level_value=0.5))["at-level"]
    assert duty.facts_at is not None
    made = {one.symbol: one.value for one in duty.facts_at(np.array([0, 1]))}
    assert made["V"] == pytest.approx([20.0, -22.0])
    assert made["P_B"] == pytest.approx([50.0, 0.0])
