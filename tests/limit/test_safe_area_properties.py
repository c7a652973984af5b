"""safe-area: what must hold whatever the locus."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from soacheck.device.ratings import Device, SafeAreaCurve, ThermalData, Triple, Typical
from soacheck.heat.ladder import Ladder
from soacheck.limit import safe_area
from soacheck.limit.judged import Judged
from soacheck.locus import Locus, Use
from soacheck.result import Finding, Status
from tests.limit.build import DC, PULSES, ZERO_C, device, judged, only, rules, status, three, value

LADDER = Ladder(R=np.array([0.1, 0.3, 125 / 150 - 0.4]), C=np.array([0.01, 0.03, 0.2]))
SATURATION = Typical(V_CE_sat=Triple(typ=value("V_CE_sat", 1.0, "V")))
DEVICES = {
    "npn": device(typical=SATURATION),
    "mosfet": device("n-mosfet"),
    "dc only": device(soa=(DC,)),
    "no dc": device(soa=PULSES),
}
names = st.sampled_from(sorted(DEVICES))


@st.composite
def loci(draw: st.DrawFn, v_max: float = 150.0) -> Locus:
    """Straight pieces, some of them steps, one shot or repeated, of any length between 0.1 ms and 1 s."""
    count = draw(st.integers(3, 7))
    dt = draw(st.lists(st.sampled_from([0.0, 0.1, 0.4, 1.0]), min_size=count - 1, max_size=count - 1))
    assume(sum(dt) > 0)
    t = np.concatenate([[0.0], np.cumsum(dt)])
    t *= draw(st.sampled_from([1e-4, 2e-3, 3e-2, 0.2, 1.0])) / t[-1]
    v = draw(st.lists(st.floats(0.5, v_max), min_size=count, max_size=count))
    i = draw(st.lists(st.floats(0.0, 12.0), min_size=count, max_size=count))
    use = draw(st.sampled_from([Use.ONCE, Use.REPEATED]))
    return Locus(t=three(t), v=three(v), i=three(i), use=use).refined(24)


def flat_voltage(draw_locus: Locus, v: float) -> Locus:
    return replace(draw_locus, v=np.full(draw_locus.v.shape, v))


def ask(locus: Locus, name: str, T_case: float = 60.0, **more: object) -> Finding:
    more.setdefault("T_j", 100.0)
    return only(safe_area.find(judged(locus, DEVICES[name], T_case=T_case, ladder=LADDER, **more)))  # type: ignore[arg-type]  # names of judged


def no_better(worse: Finding, better: Finding, hair: float = 1e-6) -> bool:
    """Neither the status nor a known utilisation is lower; a bound to marginal by duty factor is not a utilisation."""
    numbers = worse.utilisation[0] >= better.utilisation[0] * (1 - hair) - 1e-9
    known = not (np.isnan(worse.utilisation[0]) or np.isnan(better.utilisation[0]))
    return bool(status(worse) >= status(better)) and (bool(numbers) or not known)


@given(loci(), names, st.floats(1.0, 4.0))
def test_more_current_is_never_better(locus: Locus, name: str, factor: float) -> None:
    assert no_better(ask(replace(locus, i=locus.i * factor), name), ask(locus, name))


@given(loci(), st.floats(5.0, 100.0), names, st.floats(1.0, 1.5))
def test_more_voltage_is_never_better(locus: Locus, v: float, name: str, factor: float) -> None:
    here = flat_voltage(locus, v)
    # The response of the hot spot is read at one voltage.
    assert no_better(ask(replace(here, v=here.v * factor), name), ask(here, name), hair=0.02)


@given(loci(), names, st.floats(25.0, 140.0), st.floats(0.0, 60.0))
def test_a_hotter_case_is_never_better(locus: Locus, name: str, T: float, more: float) -> None:
    assert no_better(ask(locus, name, T_case=T + more), ask(locus, name, T_case=T), hair=0.02)


@given(loci(), st.sampled_from(["npn", "mosfet", "dc only"]), st.floats(0.3, 0.999))
def test_a_locus_inside_the_scaled_dc_curve_is_inside(locus: Locus, name: str, share: float) -> None:
    from soacheck.limit.allowance import lines_of
    from soacheck.limit.screen import screen

    asked = judged(locus, DEVICES[name], T_case=60.0, T_j=100.0, ladder=LADDER)
    seen = screen(asked, lines_of(asked))
    assume(bool(seen.top[0, 0] > 0) and not bool(seen.beyond[0, 0]))
    finding = ask(replace(locus, i=locus.i * (share / seen.top[0, 0])), name)
    # Points that are left to the current limits warm the hot spot, with a share of 1 at most.
    left_out = any("warm the hot spot" in reason.text for reason in finding.reasons)
    assert finding.utilisation[0] <= (1.0 if left_out else share) * (1 + 1e-6)
    assert status(finding) in (Status.WITHIN, Status.MARGINAL)


@settings(max_examples=30)
@given(loci(), st.floats(0.3, 3.0), st.floats(0.3, 3.0))
def test_scaled_ratings_and_a_scaled_locus_change_nothing(locus: Locus, a: float, b: float) -> None:
    def scaled(c: SafeAreaCurve) -> SafeAreaCurve:
        return replace(c, points=c.points * np.array([a, b]))

    big = device(
        soa=tuple(scaled(c) for c in (*PULSES, DC)),
        V_max=value("V_CEO", 160 * a, "V"),
        I_max=value("I_C", 15 * b, "A"),
        I_peak=value("I_CM", 25 * b, "A"),
        P_tot=value("P_tot", 150 * a * b, "W"),
        thermal=ThermalData(R_th_jc=value("R_th_jc", 125 / 150 / (a * b), "K/W")),
        typical=Typical(V_CE_sat=Triple(typ=value("V_CE_sat", 1.0 * a, "V"))),
    )
    ladder = Ladder(R=LADDER.R / (a * b), C=LADDER.C * (a * b))
    plain = ask(locus, "npn")
    other = only(
        safe_area.find(judged(replace(locus, v=locus.v * a, i=locus.i * b), big, T_case=60.0, T_j=100.0, ladder=ladder))
    )
    assert status(other) is status(plain)
    assert other.utilisation[0] == pytest.approx(plain.utilisation[0], rel=1e-6, abs=1e-9, nan_ok=True)


@settings(max_examples=30)
@given(loci(), names)
def test_splitting_a_locus_finer_converges(locus: Locus, name: str) -> None:
    # Where counting begins (out of saturation) is found to a sample.
    coarse, fine = ask(locus.refined(4), name), ask(locus.refined(12), name)
    if not (np.isnan(coarse.utilisation[0]) or np.isnan(fine.utilisation[0])):
        assert fine.utilisation[0] == pytest.approx(coarse.utilisation[0], rel=0.02, abs=0.005)


def together(shots: list[Locus], dev: Device) -> tuple[Judged, list[Judged]]:
    """The same loci as members, over three temperatures as cases; and each on its own."""
    T = np.array([[30.0], [80.0], [120.0]])
    locus = Locus(
        t=np.concatenate([one.t for one in shots], axis=1),
        v=np.concatenate([one.v for one in shots], axis=1),
        i=np.concatenate([one.i for one in shots], axis=1),
        use=shots[0].use,
    )
    all_ = judged(locus, dev, T_case=np.broadcast_to(T, (3, len(shots))), T_j=100.0, cases=3, ladder=LADDER)
    each = [judged(one, dev, T_case=float(temperature), T_j=100.0, ladder=LADDER) for temperature in T[:, 0]
            for one in shots]  # fmt: skip
    return all_, each


@settings(max_examples=25)
@given(st.data())
def test_cases_and_members_together_are_what_each_is_alone(data: st.DataObject) -> None:
    name = data.draw(names)
    use = data.draw(st.sampled_from([Use.ONCE, Use.REPEATED]))
    shots = []
    for _ in range(3):
        t = np.linspace(0, 1, 9) * data.draw(st.sampled_from([1e-3, 2e-2, 0.3]))
        v = data.draw(st.lists(st.floats(0.5, 150), min_size=9, max_size=9))
        i = data.draw(st.lists(st.floats(0, 10), min_size=9, max_size=9))
        shots.append(Locus(t=three(t), v=three(v), i=three(i), use=use))
    all_, each = together(shots, DEVICES[name])
    finding = only(safe_area.find(all_))
    alone = [only(safe_area.find(one)) for one in each]
    for case in range(3):
        mine = alone[3 * case : 3 * case + 3]
        assert status(finding, case) is max(status(one) for one in mine)
        worst = [one.utilisation[0] for one in mine if status(one) is status(finding, case)]
        if not any(np.isnan(u) for u in worst):
            assert finding.utilisation[case] == pytest.approx(max(worst), rel=1e-6, abs=1e-9)


def test_held_points_are_a_straight_share_of_dc() -> None:
    from tests.limit.build import held

    for T in (25.0, 70.0, 110.0):
        finding = ask(held([20.0, 60.0, 120.0], [1.0, 1.0, 0.5]), "npn", T_case=T)
        assert finding.utilisation[0] == pytest.approx(60.0 / (150.0 * (150 - T) / 125), rel=1e-9)
        assert finding.where.v[0] in (60.0, 120.0)


def test_a_case_at_the_junction_limit_allows_nothing() -> None:
    for T in (150.0, 170.0):
        finding = ask(Locus(t=three([0, 1]), v=three([40, 40]), i=three([0.1, 0.1]), use=Use.REPEATED), "npn",
                      T_case=T)  # fmt: skip
        assert status(finding) is Status.EXCEEDS
        assert np.isnan(finding.utilisation[0])
        assert finding.allowed is not None
        assert finding.allowed.at(0) == 0.0


def test_own_junction_limits_do_not_move_the_curves() -> None:
    cool = rules(T_j_max=value("T_j_max", 100 + ZERO_C, "degC"))
    locus = Locus(t=three([0, 1]), v=three([40, 40]), i=three([1, 1]), use=Use.REPEATED)
    assert ask(locus, "npn", rule=cool).utilisation[0] == ask(locus, "npn").utilisation[0]
