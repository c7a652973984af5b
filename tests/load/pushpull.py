"""Push-pull stages for the tests, put together without files."""

from __future__ import annotations

from typing import Literal

import numpy as np
import numpy.typing as npt

from soacheck.device.ratings import Device, Kind, MaxRatings, Mechanical, SafeAreaDerating, ThermalData, Typical
from soacheck.duty import Duty, Fitted
from soacheck.load.parts.impedance import Element, Group, Impedance
from soacheck.load.parts.push_pull_stage import PushPull
from soacheck.load.push_pull import duties
from soacheck.locus import Locus
from soacheck.trace import Traced, given


def value(symbol: str, number: npt.ArrayLike, unit: str = "") -> Traced:
    return given(symbol, number, unit, "test")


def part(kind: Literal["R", "L", "C"], number: npt.ArrayLike) -> Element:
    return Element(kind=kind, value=value(kind, number))


def at_angle(Z_mod: float, degrees: float, f: float = 1000.0) -> Impedance:
    """R and L (or C) in series with this modulus and angle at f."""
    Z = Z_mod * np.exp(1j * np.radians(degrees))
    omega = 2 * np.pi * f
    if abs(degrees) < 0.01:
        return part("R", Z_mod)
    reactance = part("L", Z.imag / omega) if Z.imag > 0 else part("C", -1 / (omega * Z.imag))
    if abs(degrees) == 90:
        return reactance
    return Group(kind="series", parts=(part("R", Z.real), reactance))


def stage(
    V_rail: npt.ArrayLike = 35.0,
    load: Impedance | float = 8.0,
    f: float | tuple[float, float] | None = 1000.0,
    level: Literal["any", "clipped", "voltage", "ratio"] = "any",
    *,
    level_value: float | None = None,
    I_Q: npt.ArrayLike = 0.0,
    R_E: npt.ArrayLike = 0.0,
    V_sat: npt.ArrayLike = 0.0,
    pairs: int = 1,
    bridged: bool = False,
    I_limit: float | None = None,
    fault_time: float | None = None,
    dc_protected: bool = False,
) -> PushPull:
    ends = f if isinstance(f, tuple) or f is None else (f, f)
    return PushPull(
        V_rail=value("V_rail", V_rail, "V"),
        load=part("R", load) if isinstance(load, float | int) else load,
        level=level,
        level_value=None if level_value is None else value("level", level_value),
        f=None if ends is None else (value("f", ends[0], "Hz"), value("f", ends[1], "Hz")),
        I_Q=value("I_Q", I_Q, "A"),
        R_E=value("R_E", R_E, "ohm"),
        V_sat=value("V_sat", V_sat, "V"),
        pairs=pairs,
        bridged=bridged,
        I_limit=None if I_limit is None else value("I_limit", I_limit, "A"),
        fault_time=None if fault_time is None else value("fault_time", fault_time, "s"),
        dc_protected=dc_protected,
    )


def fitted(kind: Kind = "npn", share: npt.ArrayLike = 1.0, half: str | None = None) -> Fitted:
    device = Device(
        name="invented",
        kind=kind,
        max=MaxRatings(
            V_max=value("V_CEO", 200.0, "V"),
            I_max=value("I_C", 15.0, "A"),
            T_j=value("T_j", 423.15, "degC"),
            T_case=value("T_case", 298.15, "degC"),
        ),
        thermal=ThermalData(R_th_jc=None),
        soa_derating=SafeAreaDerating(),
        typical=Typical(),
        mechanical=Mechanical(),
    )
    return Fitted(device=device, half=half, share=value("share", share, "1"))


def by_name(load: PushPull, on: Fitted | None = None) -> dict[str, Duty]:
    return {duty.name: duty for duty in duties(load, on or fitted())}


def locus_of(duty: Duty) -> Locus:
    assert duty.locus is not None
    return duty.locus(None)


def mean(duty: Duty, member: int = 0, case: int = 0) -> float:
    return float(locus_of(duty).p_mean[case if locus_of(duty).p_mean.shape[0] > 1 else 0, member])


def peak(duty: Duty, member: int = 0, case: int = 0) -> float:
    return float(locus_of(duty).p_peak[case, member])


def fact(duty: Duty, symbol: str, case: int = 0) -> float:
    return next(fact for fact in duty.facts if fact.symbol == symbol).at(case)
