"""Which curves count, where, and for which loci."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from soacheck.device.ratings import SafeAreaCurve, SafeAreaDerating
from soacheck.limit import safe_area
from soacheck.limit.allowance import lines_of, share, shares
from soacheck.limit.path import path_of
from soacheck.limit.screen import screen
from soacheck.locus import Locus, Use
from soacheck.result import Status
from tests.limit.build import DC, PULSES, ZERO_C, curve, device, held, judged, once, only, pulse, repeated, said, status


def test_in_saturation_the_current_limits_judge() -> None:
    # A flat well below the current rating: on at 0.8 V it is not judged, in the active region it is.
    part = device(soa=(curve("dc", np.inf, (0.1, 5), (30, 5), (160, 0.9)),))
    on = only(safe_area.find(judged(held(0.8, 8), part)))
    active = only(safe_area.find(judged(held(1.5, 8), part)))
    assert on.utilisation[0] == 0.0
    assert active.utilisation[0] == pytest.approx(8 / 5)


def test_a_region_that_the_load_states_outranks_v_and_i() -> None:
    part = device(soa=(curve("dc", np.inf, (0.1, 5), (30, 5), (160, 0.9)),))
    on = Locus(t=np.array([[[0.0, 1.0]]]), v=np.array([[[1.5, 1.5]]]), i=np.array([[[8.0, 8.0]]]), use=Use.REPEATED,
               region=np.array([2, 2]))  # fmt: skip
    assert only(safe_area.find(judged(on, part))).utilisation[0] == 0.0


def test_nothing_that_dc_allows_is_refused_by_a_pulse_curve() -> None:
    # Z_th unknown: a hot pulse curve takes the whole like-dissipation factor, dc its own milder one, and lies above it.
    steep = curve("dc", np.inf, (10, 15), (50, 3), (160, 0.2))
    hundred = curve("100 ms", 0.1, (12, 25), (50, 4), (160, 0.3))
    own = SafeAreaDerating(
        convention="own-curve", stated=True, points=np.array([[25 + ZERO_C, 1.0], [150 + ZERO_C, 0.85]])
    )
    part = device(soa=(hundred, steep), soa_derating=own)
    asked = judged(repeated([0, 1], [160, 160], [0.15, 0.15]), part, T_case=100)
    finding = only(safe_area.find(asked))
    assert finding.utilisation[0] == pytest.approx(0.15 / (0.2 * 0.91), rel=1e-6)


def test_a_repeated_curve_is_stood_in_for_by_the_next_longer_one() -> None:
    dense = curve("10 ms", 1e-2, (1, 25), (20, 25), (160, 3.125), single=False, duty_factor=0.3)
    asked = judged(repeated(*pulse(50, 4, 5e-3, total=50e-3)), device(soa=(dense, PULSES[2], DC)))
    lines, path = lines_of(asked), path_of(asked, np.array([[0]]))
    assert lines.dc is not None
    dc = share(lines.dc, path)
    for density, allowed in ((0.1, 10.0), (0.3, 10.0), (0.31, 6.0)):
        ten, hundred = shares(lines, path, dc, np.array([[density]])).r
        assert ten.max() == pytest.approx(4 / allowed)
        assert hundred.max() == pytest.approx(4 / 6)


def repeated_curves() -> tuple[SafeAreaCurve, ...]:
    return tuple(replace(one, single=False, duty_factor=0.1) for one in PULSES)


def test_beyond_the_duty_factor_of_a_repeated_curve_nothing_is_known() -> None:
    # 50 V: dc 3 A, the 1 ms curve 20 A. Single-pulse curves allow 4 A at 20 %; at 10 % these do as well.
    fifth, tenth = (repeated(*pulse(50, 4, 1e-3, total=total)) for total in (5e-3, 10e-3))
    finding = only(safe_area.find(judged(fifth, device(soa=(*repeated_curves(), DC)))))
    assert status(finding) is Status.UNPROVEN
    assert np.isnan(finding.utilisation[0])
    assert "The 1 ms curve holds for duty factors up to 10 %" in said(finding)
    assert "10 ms curve" not in said(finding)
    assert "touches" not in said(finding)
    assert finding.missing(0) == ("soa[1 ms]",)
    assert status(only(safe_area.find(judged(fifth)))) is Status.MARGINAL
    assert status(only(safe_area.find(judged(tenth, device(soa=(*repeated_curves(), DC)))))) is Status.WITHIN


def test_what_a_repeated_curve_refuses_it_refuses_at_a_larger_duty_factor_too() -> None:
    # Above the 10 ms curve (10 A at 50 V) for 15 ms, and dc 3 A in the mean.
    dense = repeated(*pulse(50, 12, 15e-3, total=30e-3))
    long = repeated(*pulse(50, 21, 1.5e-3, total=14e-3))  # above the 1 ms curve, 20 A, for 1.5 ms; mean 2.25 A
    for locus in (dense, long):
        finding = only(safe_area.find(judged(locus, device(soa=(*repeated_curves(), DC)))))
        assert status(finding) is Status.EXCEEDS


def test_a_stand_in_is_named_as_what_touches() -> None:
    part = device(soa=(*repeated_curves(), DC))
    finding = only(safe_area.find(judged(repeated(*pulse(50, 2.8, 1e-3, total=5e-3)), part)))
    # 2.8 A of 3 A at 50 V, though the 1 ms curve has 20 A there.
    assert finding.utilisation[0] == pytest.approx(2.8 / 3)
    assert "time spent above the dc curve touches; it counts in place of the 1 ms curve" in said(finding)
    assert "I_dc_allowed" in {one.symbol for one in finding.trace}
    assert "I_1ms_allowed" not in {one.symbol for one in finding.trace}


def test_a_point_that_lasts_no_time_is_no_conduction() -> None:
    # 100 V allows 10 A for 1 ms and 1.5 A for ever; 12 A there would need a shorter curve.
    t, v, i = [0, 0.001, 0.001], [20, 20, 100], [1, 1, 12]
    plain = only(safe_area.find(judged(once(t[:2], v[:2], i[:2]))))
    for use in (once, repeated):
        after = only(safe_area.find(judged(use(t, v, i))))
        before = only(safe_area.find(judged(use([0, 0, 0.001], v[::-1], i[::-1]))))
        for finding in (after, before):
            assert status(finding) is Status.WITHIN
            assert finding.where.v[0] == pytest.approx(20)
    assert only(safe_area.find(judged(once(t, v, i)))).utilisation == pytest.approx(plain.utilisation)


def test_a_point_that_lasts_no_time_sets_no_response_of_the_hot_spot() -> None:
    # The greatest x is at 50 V; the last point, at 100 V, must not take its place.
    t = [0, 5e-3, 5e-3]
    plain, more = (only(safe_area.find(judged(once(t[:n], [50, 50, 100][:n], [4, 4, 8][:n])))) for n in (2, 3))
    shown = [{one.symbol: one.at(0) for one in found.allowed.walk()} for found in (plain, more) if found.allowed]
    assert shown[0]["V_g"] == shown[1]["V_g"] == pytest.approx(50)
    assert more.utilisation == pytest.approx(plain.utilisation)


def test_a_point_that_lasts_no_time_does_not_end_a_run() -> None:
    # 12 A at 50 V for 6 ms, above the 10 ms curve throughout: a break of no length changes nothing.
    whole = once(*pulse(50, 12, 6e-3))
    broken = once([0, 0, 3e-3, 3e-3, 3e-3, 6e-3, 6e-3, 7e-3], np.full(8, 50.0), [0, 12, 12, 0, 12, 12, 0, 0])
    a, b = (only(safe_area.find(judged(locus))) for locus in (whole, broken))
    assert b.utilisation == pytest.approx(a.utilisation, rel=1e-6)


def test_a_point_that_is_not_a_number_is_seen_however_short() -> None:
    finding = only(safe_area.find(judged(once([0, 1e-3, 1e-3], [10, 10, np.nan], [1, 1, 1]))))
    assert status(finding) is Status.UNPROVEN


def test_a_repeated_curve_without_its_duty_factor_counts_for_one_shot_only() -> None:
    part = device(soa=(curve("10 ms", 1e-2, (1, 25), (20, 25), (160, 3.125), single=False), DC))
    again = only(safe_area.find(judged(repeated(*pulse(50, 2, 1e-3, total=50e-3)), part)))
    assert "duty factor is not stated" in said(again)
    assert "duty factor is not stated" not in said(only(safe_area.find(judged(once(*pulse(50, 2, 1e-3)), part))))


def test_a_long_curve_drawn_for_the_ambient_is_left_out_on_a_sink() -> None:
    part = device(soa=(PULSES[1], replace(PULSES[2], node="ambient"), DC))
    finding = only(safe_area.find(judged(once(*pulse(50, 2, 5e-3)), part)))
    assert "The 100 ms curve is drawn for the ambient" in said(finding)
    short = device(soa=(replace(PULSES[1], node="ambient"), DC))
    assert "drawn for the ambient" not in said(only(safe_area.find(judged(once(*pulse(50, 2, 5e-3)), short))))


def test_a_spike_at_another_voltage_is_measured_by_the_shortest_curve() -> None:
    # Greatest x at 100 V, 3 A (2 times dc); at 12 V 22 A is 1.76 times dc and 1.1 times the only pulse curve.
    part = device(soa=(curve("1 ms", 1e-3, (1, 20), (50, 20), (160, 6.25)), DC))
    t = [0, 0.3e-3, 0.3e-3, 1e-3, 1e-3, 1.2e-3, 1.2e-3, 50e-3]
    finding = only(safe_area.find(judged(once(t, [100, 100, 100, 12, 12, 12, 12, 12], [3, 3, 0, 0, 22, 22, 0, 0]), part,
                                         T_j=100)))  # fmt: skip
    assert status(finding) is Status.UNPROVEN
    assert "curve for a shorter pulse" in said(finding)


def test_of_many_members_the_worst_is_found() -> None:
    # Second way: each member asked alone.
    random = np.random.default_rng(11)
    t = np.linspace(0, 1, 25) * 8e-3
    v, i = random.uniform(5, 120, (40, 25)), random.uniform(0, 9, (40, 25)) * random.uniform(0.1, 1.5, (40, 1))
    together = only(safe_area.find(judged(repeated(t, v, i))))
    alone = [only(safe_area.find(judged(repeated(t, v[m], i[m])))) for m in range(40)]
    worst = max(status(one) for one in alone)
    assert status(together) is worst
    assert together.utilisation[0] == pytest.approx(
        np.nanmax([one.utilisation[0] for one in alone if status(one) is worst]), rel=1e-9
    )


@pytest.mark.parametrize("length", [0.3e-3, 8e-3, 60e-3, 0.5])
@pytest.mark.parametrize("use", [Use.ONCE, Use.REPEATED])
def test_the_first_look_bounds_what_is_found(length: float, use: Use) -> None:
    random = np.random.default_rng(5)
    t = (np.linspace(0, 1, 25) * length)[None, None]
    v = np.broadcast_to(random.uniform(40, 120, (1, 20, 1)), (1, 20, 25))
    i = random.uniform(0, 1, (1, 20, 25)) ** random.uniform(0, 6, (1, 20, 1))
    i[0, :3] = 1.0
    whole = judged(Locus(t=t, v=v, i=i, use=use))
    seen = screen(whole, lines_of(whole))
    for m in range(20):
        part = slice(m, m + 1)
        finding = only(safe_area.find(judged(Locus(t=t, v=v[:, part], i=i[:, part], use=use))))
        use_of = finding.utilisation[0]
        if not np.isnan(use_of):
            assert seen.low[0, m] * (1 - 1e-9) <= use_of <= seen.high[0, m] * (1 + 1e-9)
