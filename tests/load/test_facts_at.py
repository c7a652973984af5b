"""The working of a chosen member: what its formulas give is what stands in the locus."""

from __future__ import annotations

import numpy as np
import pytest

from soacheck.device.ratings import Kind
from soacheck.duty import Duty
from soacheck.load.parts.class_ab import exponential_pair, square_law_pair, thermal_voltage
from soacheck.trace import Traced
from tests.load import stages
from tests.load.pushpull import at_angle, by_name, fitted, locus_of, mean, stage


def at(duty: Duty, member: int) -> dict[str, Traced]:
    assert duty.facts_at is not None
    facts = duty.facts_at(np.array([member]))
    return {fact.symbol: fact for fact in facts}


@pytest.mark.parametrize(("kind", "names"), [("npn", ("V_CC", "R_C", "R_E")), ("n-mosfet", ("V_DD", "R_D", "R_S"))])
@pytest.mark.parametrize(("count", "share"), [(1, 1.0), (3, 0.4)])
def test_every_held_point_can_be_redone_by_hand(kind: Kind, names: tuple[str, ...], count: int, share: float) -> None:
    supply, upper, lower = names
    text = f'use = "held"\n{supply} = "88 V"\n{upper} = "20 ohm"\n{lower} = "1 ohm"\n'
    duty = stages.duties("resistive", text, stages.device(kind), count=count, share=share)["held-worst-point"]
    locus = locus_of(duty)
    for member in (0, 40, locus.shape[1] - 1):
        made = at(duty, member)
        # Second way: the load line by hand; each device's own resistor carries its share only.
        V = float(locus.v[0, member, 0])
        current = share * (88 - V) / (20 + share * 1)
        assert next(iter(made)) == "P"
        assert made["P"].formula.endswith("* I")
        assert made["I"].at(0) == pytest.approx(current, rel=1e-12, abs=1e-15)
        assert made["I"].at(0) == pytest.approx(float(locus.i[0, member, 0]), rel=1e-12, abs=1e-15)
        assert made["P"].at(0) == pytest.approx(V * current, rel=1e-12, abs=1e-12)


@pytest.mark.parametrize("extra", ["", 'R_ac = "5 ohm"\n', "spread"])
def test_every_held_point_of_a_slow_swing_can_be_redone_by_hand(extra: str) -> None:
    bias = '[load.bias]\nR_B = "3 kohm"\n' if extra == "spread" else 'I_CQ = "1.2 A"\n'
    gain = stages.triple("h_FE", "1", 80, 150, 250) if extra == "spread" else stages.triple("h_FE", "1", 150)
    part = stages.device("npn", h_FE=gain, V_BE=stages.triple("V_BE", "V", 0.7))
    own = "" if extra == "spread" else extra
    duty = stages.duties("resistive", stages.SWING + own + bias, part, count=2, share=0.6)["full-swing"]
    locus = locus_of(duty)
    for member in (0, 17, locus.shape[1] - 1):
        made = at(duty, member)
        v, i = float(locus.v[0, member, 0]), float(locus.i[0, member, 0])
        assert made["V_CE"].at(0) == pytest.approx(v, rel=1e-12)
        assert made["I"].at(0) == pytest.approx(i, rel=1e-9, abs=1e-12)
        assert made["P"].at(0) == pytest.approx(v * i, rel=1e-9, abs=1e-12)


def test_a_quiescent_point_of_a_spread_can_be_redone_by_hand() -> None:
    part = stages.device("npn", h_FE=stages.triple("h_FE", "1", 80, 150, 250), V_BE=stages.triple("V_BE", "V", 0.7))
    found = stages.duties("resistive", f'{stages.SWING}f = "1 kHz"\n[load.bias]\nR_B = "3 kohm"\n', part)
    for name, symbol in (("idle", "P_idle"), ("full-swing", "P_swing")):
        P = locus_of(found[name]).p_mean
        for member in (0, 20, P.shape[1] - 1):
            assert at(found[name], member)[symbol].at(0) == pytest.approx(float(P[0, member]), rel=1e-3)


@pytest.mark.parametrize("f", [1000.0, (20.0, 20000.0), None])
@pytest.mark.parametrize("I_Q", [0.0, 0.05])
def test_every_level_of_a_push_pull_stage_can_be_redone_by_hand(
    f: float | tuple[float, float] | None, I_Q: float
) -> None:
    load = 8.0 if f is None else at_angle(8, 45)
    duty = by_name(stage(load=load, f=f, I_Q=I_Q, R_E=0.22, pairs=2), fitted(share=0.5))["any-level"]
    members = duty.members.value
    for member in (5, 30, members.shape[1] - 1):
        made = at(duty, member)
        assert made["V"].at(0) == pytest.approx(float(members[0, member]), rel=1e-12)
        first = next(iter(made.values()))
        assert first.symbol == ("P_AB" if I_Q else "P_B")
        assert first.at(0) == pytest.approx(mean(duty, member), rel=1e-4)
        if isinstance(f, tuple):
            period = float(locus_of(duty).t[0, member, -1] - locus_of(duty).t[0, member, 0])
            assert 1 / made["f"].at(0) == pytest.approx(period, rel=1e-2)


def test_the_fact_that_the_mean_is_made_from_comes_first() -> None:
    for name in ("worst-level", "full-level", "any-level"):
        assert by_name(stage(I_Q=0.05))[name].facts[0].symbol == "P_AB"
        assert by_name(stage())[name].facts[0].symbol == "P_B"


@pytest.mark.parametrize("kind", ["npn", "n-mosfet"])
@pytest.mark.parametrize("angle", [-60.0, 0.0, 33.0])
def test_a_crossover_worked_out_over_a_quarter_is_that_of_every_sample(kind: Kind, angle: float) -> None:
    # Second way: the load current at every sample time, put into the law of the pair.
    duty = by_name(stage(load=at_angle(8, angle), I_Q=0.05, R_E=0.22), fitted(kind))["full-level"]
    locus = locus_of(duty)
    made = {fact.symbol: fact.at(0) for fact in duty.facts}
    load = made["V"] / made["Z_mod"] * np.sin(2 * np.pi * 1000 * locus.t)
    pair = exponential_pair(load, 0.05, 0.22, thermal_voltage()) if kind == "npn" else square_law_pair(load, 0.05)
    np.testing.assert_allclose(locus.i, pair.upper, rtol=1e-9, atol=1e-12)
    v_out = made["V"] * np.sin(2 * np.pi * 1000 * locus.t + np.radians(made["phi"]))
    np.testing.assert_allclose(locus.v, 35 - v_out - 0.22 * pair.upper, rtol=1e-9, atol=1e-9)
