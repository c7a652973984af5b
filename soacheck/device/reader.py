"""From a rating file to the frozen `Device`: every key read, signs, order and shape checked."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np

from soacheck.device.keys import KEYS
from soacheck.device.ratings import (
    DARLINGTON,
    IGBT,
    KINDS,
    MOSFET,
    Device,
    Kind,
    MaxRatings,
    Mechanical,
    ThermalData,
    Triple,
    Typical,
)
from soacheck.device.soa_reader import read_curves, read_derating
from soacheck.device.transient_reader import read_transient
from soacheck.table import Cells, Document, check_source, read_source
from soacheck.trace import TYPICAL, FloatArray, Traced, derived, frozen

# Fields of MaxRatings and Typical that carry the name of their key.
_PLAIN_MAX = (
    "P_tot", "V_CBO", "V_CEV", "V_CER", "R_BE", "V_EBO", "V_GSS", "I_B", "I_S",
    "E_AS", "I_AS", "E_AR", "t_SC", "V_SC",
)  # fmt: skip
_SPREAD_TYPICAL = (
    "h_FE", "V_BE", "V_CE_sat", "R_DS_on", "R_DS_on_hot", "V_GS_th", "g_fs", "V_CE_TO", "r_CE",
)  # fmt: skip
_PLAIN_TYPICAL = (
    "h_FE_I_C", "V_BE_I_C", "V_BE_tempco", "doubling", "V_CE_sat_I_C", "V_A", "R_DS_on_V_GS", "T_hot",
    "V_GS_th_tempco", "V_BR", "V_CE_TO_hot", "r_CE_hot", "f_T", "E_on", "E_off", "E_V_ref", "E_I_ref",
    "E_T_ref", "t_r", "t_f", "Q_g", "C_oss", "Q_rr",
)  # fmt: skip
_GAIN_LINE = 'h_FE_points = [["0.1 A", "25 degC", 80], ["1 A", "25 degC", 90], ["8 A", "25 degC", 45]]'

NO_SOURCE = (
    "ratings-from",
    "the rating file does not say which document its figures were copied from (device.ratings_from)",
)
NO_AVALANCHE_CURRENT = (
    "avalanche-alone",
    "E_AS is stated without I_AS: an energy alone says nothing about avalanche, which stays unproven",
)


def read_device(path: Path, *, shown_as: str) -> Device:
    """Read a rating file.

    Parameters
    ----------
    path : Path
        The file.
    shown_as : str
        What to call it in messages and reports.

    Returns
    -------
    Device
        Frozen, SI, kelvin.

    Raises InputError with every problem of the file.
    """
    source = read_source(path, shown_as=shown_as)
    kind = _kind(source.data)
    return _device(check_source(source, KEYS, device_kind=kind), kind, shown_as)


def _kind(data: Mapping[str, Any]) -> Kind:
    """The kind that the file states, or the one its ratings suggest.

    A missing or misspelt kind is reported by the key check; the guess makes the rest of that report fit the file.
    """
    identity, maximum = (data.get(name) for name in ("device", "max"))
    word = identity.get("kind") if isinstance(identity, dict) else None
    ratings = maximum if isinstance(maximum, dict) else {}
    suggested: Kind = "n-mosfet" if "V_DSS" in ratings else "n-igbt" if "V_CES" in ratings else "npn"
    return next((kind for kind in KINDS if kind == word), suggested)


def _device(document: Document, kind: Kind, shown_as: str) -> Device:
    identity = document.table("device")
    maximum = _maximum(document.table("max"), kind)
    assumptions: list[str] = []
    thermal = _thermal(document.table("thermal"), document.table("max"), maximum)
    typical = _typical(document.table("typical"), kind)
    curves = read_curves(document, maximum.T_j.at(0) if maximum is not None else None, assumptions)
    derating = read_derating(document, curves, assumptions)
    assumptions += _on_state_assumed(document.table("typical"), kind)
    mechanical = _mechanical(document.table("mechanical"))
    document.finish()
    if maximum is None:  # cannot be: each of its inputs is a required key or has a default
        raise RuntimeError(f"{shown_as}: maximum ratings are missing without a problem being reported")
    ratings_from = (identity.text("ratings_from") or "").strip()
    cautions = list(document.cautions)
    if not ratings_from:
        cautions.append(NO_SOURCE)
    if document.spreads:
        keys = ", ".join(spread.key for spread in document.spreads)
        text = f"{shown_as}: min, max and tol of {keys} are kept for a later job; this check uses the stated values"
        cautions.append(("device-spread", text))
    if maximum.E_AS is not None and maximum.I_AS is None:
        cautions.append(NO_AVALANCHE_CURRENT)
    return Device(
        name=identity.text("name") or "",
        kind=kind,
        package=identity.text("package") or "",
        ratings_from=ratings_from,
        file=shown_as,
        sha256=document.sha256,
        max=maximum,
        thermal=thermal,
        soa=curves,
        soa_derating=derating,
        typical=typical,
        mechanical=mechanical,
        assumptions=(*document.assumptions, *assumptions),
        cautions=tuple(cautions),
    )


def _maximum(cells: Cells, kind: Kind) -> MaxRatings | None:
    voltage = "V_DSS" if kind in MOSFET else "V_CES" if kind in IGBT else "V_CEO"
    current, peak = ("I_D", "I_DM") if kind in MOSFET else ("I_C", "I_CM")
    V_max, I_max, T_j = cells.quantity(voltage), cells.quantity(current), cells.quantity("T_j")
    T_case = cells.quantity("T_case")
    _max_in_order(cells, voltage, current, peak)
    if T_j is not None and T_case is not None and not T_case.at(0) < T_j.at(0):
        cells.refuse("T_case", "the case temperature of P_tot must be below T_j", 'T_case = "25 degC"')
    if V_max is None or I_max is None or T_j is None or T_case is None:
        return None
    return MaxRatings(
        V_max=V_max,
        I_max=I_max,
        T_j=T_j.named("T_j_max"),
        T_case=T_case,
        I_peak=cells.quantity(peak),
        I_peak_pulse=cells.quantity(f"{peak}_pulse"),
        **{name: cells.quantity(name) for name in _PLAIN_MAX},
    )


def _max_in_order(cells: Cells, voltage: str, current: str, peak: str) -> None:
    for upper, lower in (("V_CBO", voltage), ("V_CEV", voltage), ("V_CER", voltage), (peak, current)):
        high, low = cells.quantity(upper), cells.quantity(lower)
        if high is not None and low is not None and not high.at(0) >= low.at(0):
            cells.refuse(upper, f"{upper} is below {lower}; on a data sheet it never is", "are the two swapped?")
    for stated, wanted, why, line in (
        (
            "V_CER",
            "R_BE",
            "V_CER holds for one base-emitter resistor, which is not stated",
            'R_BE = "100 ohm"',
        ),
        (f"{peak}_pulse", peak, f"this is the pulse of {peak}, which is not stated", f'{peak} = "25 A"'),
        (
            "t_SC",
            "V_SC",
            "a withstand time holds at one supply voltage, which is not stated",
            'V_SC = "400 V"',
        ),
        ("V_SC", "t_SC", "this is the voltage of t_SC, which is not stated", 't_SC = "10 us"'),
    ):
        if cells.has(stated) and not cells.has(wanted):
            cells.refuse(stated, why, f"state max.{wanted} too: {line}")


def _thermal(cells: Cells, max_cells: Cells, maximum: MaxRatings | None) -> ThermalData:
    R_th_jc = cells.quantity("R_th_jc")
    from_power = not cells.has("R_th_jc")
    if from_power and maximum is not None and maximum.P_tot is not None:
        inputs = (maximum.T_j, maximum.T_case, maximum.P_tot)
        R_th_jc = derived(
            "R_th_jc",
            "(T_j_max - T_case) / P_tot",
            "K/W",
            *inputs,
            source="not stated in the rating file, from P_tot",
            grade=_weakest(*inputs),
        )
    elif from_power and not max_cells.has("P_tot"):
        cells.refuse(
            "R_th_jc",
            "neither R_th_jc nor max.P_tot is stated; one of them is needed",
            'R_th_jc = "0.83 K/W"  (table of thermal characteristics)',
        )
    transient = read_transient(cells)
    return ThermalData(
        R_th_jc=R_th_jc,
        R_th_jc_derived=from_power and R_th_jc is not None,
        R_th_ja=cells.quantity("R_th_ja"),
        mounting=cells.text("mounting") or "",
        form=transient.form,
        pulse=transient.pulse,
        value=transient.value,
        foster=transient.foster,
        cauer=transient.cauer,
        grade=transient.grade,
    )


def _weakest(*inputs: Traced) -> str:
    grades = {node.grade for node in inputs}
    return next((grade for grade in (TYPICAL, "assumed", "measured") if grade in grades), "guaranteed")


def _typical(cells: Cells, kind: Kind) -> Typical:
    leakage = "I_DSS" if kind in MOSFET else "I_CES" if kind in IGBT else "I_CBO"
    spread: dict[str, Any] = {name: _triple(cells, name) for name in _SPREAD_TYPICAL}
    plain: dict[str, Any] = {name: cells.quantity(name) for name in _PLAIN_TYPICAL}
    typical = Typical(
        h_FE_points=_gain_points(cells),
        leakage=_triple(cells, leakage),
        leakage_T=cells.quantity(f"{leakage}_T"),
        **spread,
        **plain,
    )
    for name in ("R_DS_on_hot", "V_CE_TO_hot", "r_CE_hot"):
        if cells.has(name) and not cells.has("T_hot"):
            cells.refuse(name, "a hot value needs the temperature it is stated at", 'T_hot = "150 degC"')
    cold, hot = (each.middle if each else None for each in (typical.R_DS_on, typical.R_DS_on_hot))
    if cold is not None and hot is not None and not hot.at(0) >= cold.at(0):
        cells.refuse("R_DS_on_hot", "the hot on-resistance is below the cold one", "are the two swapped?")
    return typical


def _on_state_assumed(cells: Cells, kind: Kind) -> list[str]:
    """What is taken for the drop of a device that is fully on and whose sheet does not state it."""
    wanted = ("R_DS_on",) if kind in MOSFET else ("V_CE_TO", "r_CE") if kind in IGBT else ("V_CE_sat",)
    lacking = [name for name in wanted if not cells.has(name)]
    if not lacking or (kind in MOSFET and cells.has("R_DS_on_hot")):
        return []
    volts = 2 if kind in DARLINGTON else 1
    names = " and ".join(f"typical.{name}" for name in lacking)
    return [
        f"fully on, it drops at most {volts} V, common practice, which counts for heat and regions, and at least 0 V,"
        f" which counts for the greatest current of a load line ({names} not stated)"
    ]


def _triple(cells: Cells, name: str) -> Triple | None:
    three = cells.three(name)
    if three is None:
        return None
    low, middle, high = three
    return Triple(min=low, typ=middle, max=high)


def _gain_points(cells: Cells) -> FloatArray | None:
    points = cells.points("h_FE_points")
    if points is None:
        return None
    if len(points) == 0 or not bool(np.all(points > 0)):
        said = "currents and gains are positive, and at least one point is needed"
        cells.refuse("h_FE_points", said, _GAIN_LINE)
        return None
    if len({tuple(row) for row in points[:, :2].tolist()}) < len(points):
        cells.refuse("h_FE_points", "two points stand at one current and temperature", "leave one out")
        return None
    return frozen(points)


def _mechanical(cells: Cells) -> Mechanical:
    return Mechanical(
        pinout=cells.text("pinout") or "",
        tab=cells.text("tab") or "",
        hole=cells.quantity("hole"),
        insulation_voltage=cells.quantity("insulation_voltage"),
    )
