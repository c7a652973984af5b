"""Devices, loci and operating points put together by hand, so that each limit is tested on its own."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from soacheck.balance.operating import Operating
from soacheck.device.ratings import (
    Device,
    Kind,
    MaxRatings,
    Mechanical,
    SafeAreaCurve,
    SafeAreaDerating,
    ThermalData,
    Typical,
)
from soacheck.duty import Drive, Duty, Fitted, Members
from soacheck.heat.ladder import Ladder
from soacheck.limit.judged import Judged
from soacheck.limit.rules import Rules
from soacheck.locus import Locus, Use
from soacheck.result import Finding, Status
from soacheck.table import Missing
from soacheck.trace import FloatArray, Traced, given

ZERO_C = 273.15


def value(symbol: str, number: Any, unit: str = "1", grade: str = "guaranteed") -> Traced:
    return given(symbol, np.atleast_1d(np.asarray(number, dtype=float)), unit, "test", grade)


def curve(label: str, pulse: float, *points: tuple[float, float], **more: Any) -> SafeAreaCurve:
    more.setdefault("T_ref", 25 + ZERO_C)
    return SafeAreaCurve(label=label, pulse=pulse, points=np.array(points, dtype=float), **more)


DC = curve("dc", np.inf, (1, 15), (10, 15), (50, 3), (160, 0.9375))  # 150 W all the way down
PULSES = (
    curve("1 ms", 1e-3, (1, 25), (40, 25), (160, 6.25)),
    curve("10 ms", 1e-2, (1, 25), (20, 25), (160, 3.125)),
    curve("100 ms", 1e-1, (1, 25), (12, 25), (160, 1.875)),
)


def device(kind: Kind = "npn", soa: Sequence[SafeAreaCurve] = (*PULSES, DC), **more: Any) -> Device:
    """A 160 V, 15 A, 150 W, 150 degC device; `more` replaces ratings by name, or whole sections."""
    names = ("V_CEO", "I_C", "I_CM") if kind not in ("n-mosfet", "p-mosfet") else ("V_DSS", "I_D", "I_DM")
    ratings: dict[str, Any] = {
        "V_max": value(names[0], 160, "V"),
        "I_max": value(names[1], 15, "A"),
        "T_j": value("T_j", 150 + ZERO_C, "degC"),
        "T_case": value("T_case", 25 + ZERO_C, "degC"),
        "P_tot": value("P_tot", 150, "W"),
        "I_peak": value(names[2], 25, "A"),
        "I_peak_pulse": value(f"{names[2]}_pulse", 1e-3, "s"),
    }
    sections: dict[str, Any] = {
        "soa_derating": SafeAreaDerating(),
        "typical": Typical(),
        "mechanical": Mechanical(),
        "thermal": ThermalData(R_th_jc=value("R_th_jc", 125 / 150, "K/W")),
    }
    for name, what in more.items():
        (sections if name in sections else ratings)[name] = what
    return Device(name="TEST", kind=kind, soa=tuple(soa), max=MaxRatings(**ratings), ratings_from="a test", **sections)


def rules(**more: Any) -> Rules:
    plain: dict[str, Any] = {
        "voltage": value("voltage", 1),
        "current": value("current", 1),
        "power": value("power", 1),
        "safe_area": value("safe_area", 1),
        "T_j_max": None,
        "T_j_below_max": None,
        "marginal_from": value("marginal_from", 0.8),
        "pulse_between": "next-longer",
        "soa_duty_factor_max": value("soa_duty_factor_max", 0.1),
    }
    return Rules(**(plain | more))


def three(a: Any) -> FloatArray:
    """(time,), (member, time) or (case, member, time) to (case, member, time)."""
    array = np.asarray(a, dtype=float)
    return array.reshape((1,) * (3 - array.ndim) + array.shape)


def once(t: Any, v: Any, i: Any, **more: Any) -> Locus:
    return Locus(t=three(t), v=three(v), i=three(i), use=Use.ONCE, **more)


def repeated(t: Any, v: Any, i: Any, **more: Any) -> Locus:
    return Locus(t=three(t), v=three(v), i=three(i), use=Use.REPEATED, **more)


def held(v: Any, i: Any) -> Locus:
    """Points (member,) each of which may be held for ever."""
    v, i = np.atleast_1d(np.asarray(v, dtype=float)), np.atleast_1d(np.asarray(i, dtype=float))
    return Locus(t=np.zeros((1, 1, 1)), v=v[None, :, None], i=i[None, :, None], use=Use.HELD)


def pulse(v: float, i: float, width: float, *, lead: float = 0.0, total: float | None = None) -> tuple[Any, Any, Any]:
    """t, v, i of one rectangular pulse."""
    end = lead + width
    last = end + 1e-6 if total is None else total
    t = [0, lead, lead, end, end, last]
    return t, np.full(6, v), [0, 0, i, i, 0, 0]


def judged(
    locus: Locus | None,
    dev: Device | None = None,
    *,
    T_case: Any = 25.0,
    T_j: Any = None,
    T_ambient: float = 25.0,
    cases: int = 1,
    rule: Rules | None = None,
    ladder: Ladder | None = None,
    share_missing: Missing | None = None,
    missing: tuple[Missing, ...] = (),
    members: Members | None = None,
    drive: Drive | None = None,
    sink: str = "resistance",
    **duty: Any,
) -> Judged:
    """A duty at stated temperatures [degC], each a number or (case, member). T_j absent: the bound with R_th_jc."""
    dev = device() if dev is None else dev
    made = Duty(
        name="duty",
        locus=None if locus is None else lambda _: locus,
        heat_ratio=np.ones((1, 1)),
        drive=drive,
        **({"members": members} if members is not None else {}),
        **duty,
    )
    count, times = (1, 1) if locus is None else locus.shape[1:]
    shape = (cases, count)

    def full(a: Any) -> FloatArray:
        return np.broadcast_to(np.asarray(a, dtype=float), shape)

    R = dev.thermal.R_th_jc
    R_jc = np.nan if R is None else R.value[:, None]
    case = full(T_case) + ZERO_C
    p_mean = full(np.nan if locus is None else locus.p_mean)
    p_peak = full(np.nan if locus is None else locus.p_peak)
    mean = case + R_jc * p_mean
    is_held = locus is not None and locus.use is Use.HELD
    peak = mean if is_held else np.full(shape, np.nan)
    peak = peak if T_j is None else full(T_j) + ZERO_C
    bound = np.where(np.isnan(peak), case + R_jc * p_peak, peak)
    is_once = locus is not None and locus.use is Use.ONCE
    if is_once:
        mean = np.full(shape, np.nan)  # one shot without Z_th_jc has no mean junction temperature
    operating = Operating(
        duty=made,
        device=dev,
        ladder=ladder,
        locus=locus,
        P_mean=p_mean,
        P_peak=p_peak,
        T_air=full(T_ambient) + ZERO_C,
        T_heatsink=case,
        T_case=case,
        T_case_peak=case,
        T_j_mean=mean,
        T_j_peak=peak,
        T_j_bound=bound,
        T_before=case if is_once else np.full(shape, np.nan),
        T_j=np.broadcast_to(peak[..., None], (*shape, times)),
        T_case_t=np.broadcast_to(case[..., None], (*shape, times)),
        T_heatsink_t=np.broadcast_to(case[..., None], (*shape, times)),
        R_th_jc=R,
        T_ambient=value("T_ambient", T_ambient + ZERO_C, "degC"),
        sink=sink,
        missing=missing,
    )
    fitted = Fitted(device=dev, share=value("share", 1.0), count=2 if share_missing else 1, share_missing=share_missing)
    return Judged(
        device=dev,
        fitted=fitted,
        duty=made,
        operating=operating,
        rules=rules() if rule is None else rule,
        cases=cases,
    )


def only(findings: tuple[Finding, ...]) -> Finding:
    """The one finding there is."""
    (one,) = findings
    return one


def said(finding: Finding, case: int = 0) -> str:
    """All reasons of one case."""
    return " ".join(r.text for r in finding.reasons if r.applies[case if r.applies.size > 1 else 0])


def status(finding: Finding, case: int = 0) -> Status:
    return Status(int(finding.status[case]))
