"""What the sheet shows of a safe-area allowance: every case by the same formula, and the same number as the search."""

from __future__ import annotations

import numpy as np
import pytest

from soacheck.device.ratings import SafeAreaDerating
from soacheck.limit import safe_area
from soacheck.trace import Traced
from tests.limit.build import ZERO_C, device, held, judged, once, only, pulse, three


def named(values: tuple[Traced, ...]) -> dict[str, Traced]:
    return {node.symbol: node for value in values for node in value.walk()}


@pytest.mark.parametrize("kind", ["npn", "n-mosfet"])
@pytest.mark.parametrize("convention", ["like-dissipation", "held", "own-curve"])
def test_the_formula_gives_what_the_search_found_in_every_case(kind: str, convention: str) -> None:
    points = np.array([[25 + ZERO_C, 1.0], [150 + ZERO_C, 0.45]])
    part = device(kind, soa_derating=SafeAreaDerating(convention=convention, points=points, stated=True))  # type: ignore[arg-type]  # a kind, a convention
    v = three([[[20.0]], [[45.0]], [[90.0]], [[150.0]]])
    locus = held(20, 0.5)
    many = type(locus)(t=locus.t, v=v, i=three([[[0.5]]] * 4), use=locus.use)
    finding = only(safe_area.find(judged(many, part, T_case=np.array([[30.0], [60.0], [90.0], [110.0]]), cases=4)))
    last = finding.trace[-1]
    assert finding.allowed is not None
    assert last.symbol == "I_dc_allowed"
    assert last.value == pytest.approx(finding.allowed.value, rel=1e-9)
    for case in range(4):
        one = finding.at(case)
        assert one.trace[-1].at(0) == pytest.approx(0.5 / one.utilisation[0], rel=1e-9)


def test_a_pulse_shows_the_curve_that_governs_and_the_dc_curve() -> None:
    finding = only(safe_area.find(judged(once(*pulse(50, 4, 5e-3)), T_case=75)))
    shown = named(finding.trace)
    assert shown["I_10ms_printed"].at(0) == pytest.approx(10.0)
    assert shown["I_10ms_allowed"].at(0) == pytest.approx(10.0 * 0.6)
    assert shown["I_dc_allowed"].at(0) == pytest.approx(3.0 * 0.6)
    assert finding.allowed is not None
    assert finding.allowed.at(0) == pytest.approx(6.0, rel=1e-6)


def test_the_response_of_the_hot_spot_is_shown() -> None:
    finding = only(safe_area.find(judged(once(*pulse(50, 4, 5e-3)))))
    assert finding.allowed is not None
    shown = named((finding.allowed,))
    # By hand: at 50 V dc allows 3 A; the pulses 20, 10 and 6 A.
    assert shown["x_max"].at(0) == pytest.approx(4 / 3)
    assert [shown[f"g_{name}"].at(0) for name in ("1ms", "10ms", "100ms")] == pytest.approx([0.15, 0.3, 0.5])


def test_where_the_response_governs_the_nearest_pulse_curve_is_shown() -> None:
    # Five pulses of 5 ms, 1 ms apart: no run is too long, the sum is. 10 ms is the nearest width.
    starts = 6e-3 * np.arange(5)
    t = np.column_stack([starts, starts, starts + 5e-3, starts + 5e-3]).ravel()
    finding = only(safe_area.find(judged(once(t, np.full(20, 50.0), np.tile([0, 4, 4, 0], 5)))))
    assert any("Superposition governs" in reason.text for reason in finding.reasons)
    assert finding.allowed is not None
    shown = named((finding.allowed, *finding.trace))
    assert shown["I_dc_allowed"].at(0) / shown["I_10ms_allowed"].at(0) == pytest.approx(shown["g_10ms"].at(0))
    assert finding.trace[-1].symbol == "I_dc_allowed"


def test_left_of_the_corner_the_line_under_the_flat_is_written_out() -> None:
    # 30 V is left of the corner of the 1 ms curve, 40 V and 25 A: it goes on at 1000 W to 33.3 A; hot, times 0.6.
    finding = only(safe_area.find(judged(once(*pulse(30, 12, 1e-3)), T_case=75)))
    shown = named(finding.trace)
    assert shown["I_1ms_line"].at(0) == pytest.approx(1000 / 30)
    assert shown["I_1ms_allowed"].at(0) == pytest.approx(20)
    assert shown["I_1ms_allowed"].formula


@pytest.mark.parametrize(("T", "F"), [(20.0, 1.0), (50.0, 0.9), (100.0, 0.6), (140.0, 0.08)])
def test_an_own_derating_curve_shows_the_points_it_was_read_from(T: float, F: float) -> None:
    points = np.array([[25 + ZERO_C, 1.0], [75 + ZERO_C, 0.8], [125 + ZERO_C, 0.4]])
    own = SafeAreaDerating(convention="own-curve", points=points, stated=True)
    shown = named(only(safe_area.find(judged(held(60, 0.1), device(soa_derating=own), T_case=T))).trace)
    # By hand: straight between the points; past the last the lower of 0.4 and (150 - T)/(150 - 25).
    assert shown["F_dc"].at(0) == pytest.approx(F)
    assert {"T_1", "F_1", "T_2", "F_2"} <= {one.symbol for one in shown["F_dc"].walk()}
    assert "F_1" in str(shown["F_dc"].formula)


def test_the_picture_has_printed_and_scaled_curves() -> None:
    shot = judged(once(*pulse(50, 4, 5e-3)), T_case=75, listed=False)
    picture = safe_area.picture(shot, 0)
    assert [label for label, _, _ in picture.curves] == ["1 ms", "10 ms", "100 ms", "dc"]
    for label, printed, scaled in picture.curves:
        assert scaled[:, 1].max() <= printed[:, 1].max(), label
        at_100 = np.exp(np.interp(np.log(100), np.log(scaled[:, 0]), np.log(scaled[:, 1])))
        on_paper = np.exp(np.interp(np.log(100), np.log(printed[:, 0]), np.log(printed[:, 1])))
        assert at_100 == pytest.approx(0.6 * on_paper, rel=1e-3)
    warm = pytest.approx(75 + ZERO_C)
    assert warm == picture.T
    assert len(picture.v) == 6
    hot = safe_area.picture(judged(held(50, 1), T_case=150), 0)
    assert all(scaled.shape == (0, 2) for _, _, scaled in hot.curves)
