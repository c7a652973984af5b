"""Devices made by hand and stages read from a `[load]` table as text, for the tests of the load kinds."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np

from soacheck.device.ratings import (
    Device,
    Kind,
    MaxRatings,
    Mechanical,
    SafeAreaCurve,
    SafeAreaDerating,
    ThermalData,
    Triple,
    Typical,
)
from soacheck.duty import Duty, Fitted
from soacheck.errors import InputError
from soacheck.load import load_kind
from soacheck.load.kind import Surround
from soacheck.locus import Locus
from soacheck.table import CasePlan, Document, Key, check_source, parse_source
from soacheck.trace import Traced, given

KIND = Key(table="load", name="kind", form="text", required=True, meaning="Load kind.")


def value(symbol: str, number: float, unit: str) -> Traced:
    return given(symbol, number, unit, "made for this test", "guaranteed")


def triple(symbol: str, unit: str, *numbers: float) -> Triple:
    """One number is typ; three are min, typ, max."""
    if len(numbers) == 1:
        return Triple(typ=value(symbol, numbers[0], unit))
    low, mid, high = (value(symbol, number, unit) for number in numbers)
    return Triple(min=low, typ=mid, max=high)


def device(kind: Kind = "npn", soa: tuple[SafeAreaCurve, ...] = (), **typical: Any) -> Device:
    """An invented device of 200 V, 20 A, 150 W, with the characteristics given."""
    return Device(
        name="MADE-FOR-TEST",
        kind=kind,
        max=MaxRatings(
            V_max=value("V_CEO", 200.0, "V"),
            I_max=value("I_C", 20.0, "A"),
            T_j=value("T_j", 423.15, "degC"),
            T_case=value("T_case", 298.15, "degC"),
            P_tot=value("P_tot", 150.0, "W"),
        ),
        thermal=ThermalData(R_th_jc=value("R_th_jc", 0.833, "K/W")),
        soa=soa,
        soa_derating=SafeAreaDerating(),
        typical=Typical(**typical),
        mechanical=Mechanical(),
    )


def document(kind: str, text: str, device_kind: str = "npn") -> Document:
    """A `[load]` table of a kind, checked against its declarations."""
    source = parse_source(f'[load]\nkind = "{kind}"\n{text}\n', shown_as="stage.toml")
    return check_source(source, (KIND, *load_kind(kind).KEYS), device_kind=device_kind)


def read(kind: str, text: str, device_kind: str = "npn", *, corners: bool = False) -> Any:
    """The stage of a kind as read; with corners over all corners of its uncertainties."""
    made = document(kind, text, device_kind)
    surround = Surround(folder=Path("."), device_kind=device_kind)
    load = load_kind(kind).read(made.table("load"), surround)
    made.finish()
    if corners:
        load = load_kind(kind).read(made.over(CasePlan.corners(made.spreads)).table("load"), surround)
    return load


def duties(
    kind: str,
    text: str,
    fitted: Device | None = None,
    *,
    count: int = 1,
    share: float = 1.0,
    corners: bool = False,
) -> dict[str, Duty]:
    """Duties by name."""
    made = fitted or device()
    load = read(kind, text, made.kind, corners=corners)
    sits = Fitted(device=made, count=count, share=given("worst_share", share, "1", "stated"))
    return {duty.name: duty for duty in load_kind(kind).duties(load, sits)}


def locus(duty: Duty) -> Locus:
    """The locus of a duty that has one."""
    if duty.locus is None:
        raise ValueError(f"{duty.name} lacks {duty.unknown}")
    return duty.locus(None)


def fact(duty: Duty, symbol: str) -> float:
    """A value of the sheet, nominal case: one of the facts, or what they rest on."""
    for one in duty.facts:
        for node in one.walk():
            if node.symbol == symbol:
                return node.at(0)
    raise KeyError(symbol)


def greatest(values: Any) -> float:
    return float(np.max(values))


def refusals(kind: str, text: str, device_kind: str = "npn") -> list[tuple[str, str, str]]:
    """(key, problem, remedy) of everything that reading refuses."""
    try:
        read(kind, text, device_kind)
    except InputError as error:
        return [(one.key, one.problem, one.remedy) for one in error.problems]
    return []


# tables that several tests start from

HELD = 'use = "held"\nV_CC = "24 V"\nR_C = "8 ohm"\n'
SWING = 'use = "swing"\nV_CC = "24 V"\nR_C = "8 ohm"\n'
SWITCHED = 'use = "switched"\n'
SATURATES: dict[str, Any] = {"V_CE_sat": triple("V_CE_sat", "V", 0.5)}
PULSED = f'{SWITCHED}V_CC = "100 V"\nR_C = "10 ohm"\nf = "10 kHz"\nduty_factor = "40 %"\nt_r = "1 us"\nt_f = "2 us"\n'
