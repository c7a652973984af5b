"""Guards about thermal data: resistances mixed up, ratings that disagree, interfaces left out, shared sinks."""

from __future__ import annotations

import numpy as np

from soacheck.balance.place import R_th_jc_used
from soacheck.guard.seen import Raised, Seen
from soacheck.table import Missing
from soacheck.trace import Traced

TEMPERATURE_LIMITS = frozenset({"dissipation", "safe-area", "junction-temperature"})
R_JA_SMALLEST = 10.0  # [K/W] below this no package without a sink is built (common practice)
R_JC_LARGEST = 40.0  # [K/W] above this a figure is junction to ambient (common practice)
INTERFACE_RANGE = "0.1 to 1.5 K/W, dry or with grease and pad, depending on package (common practice)"


def _value(traced: Traced | None) -> float:
    return float("nan") if traced is None else float(traced.value.max())


def rth_mixed_up(seen: Seen) -> tuple[Raised, ...]:
    """rth-mixed-up: junction-to-ambient and junction-to-case confused."""
    thermal = seen.place.device.thermal
    R_jc, R_ja = _value(thermal.R_th_jc), _value(thermal.R_th_ja)
    problems = []
    if R_ja < R_JA_SMALLEST:
        problems.append(
            f"R_th_ja = {R_ja:.3g} K/W is below {R_JA_SMALLEST:g} K/W, which is a value with a sink or to the case"
        )
    if R_jc > R_JC_LARGEST:
        problems.append(f"R_th_jc = {R_jc:.3g} K/W is above {R_JC_LARGEST:g} K/W, which is a value to the ambient")
    if R_ja < R_jc:
        problems.append(f"R_th_ja = {R_ja:.3g} K/W is below R_th_jc = {R_jc:.3g} K/W")
    if not problems:
        return ()
    return (
        Raised(
            id="rth-mixed-up",
            text=f"{seen.place.device.name}: {'; '.join(problems)}. Look up which of the two the sheet states.",
            lowers=TEMPERATURE_LIMITS,
            missing=(
                Missing(key="thermal.R_th_jc", where="thermal characteristics: junction to case, not to ambient"),
            ),
        ),
    )


def rth_ptot_disagree(seen: Seen) -> tuple[Raised, ...]:
    """rth-ptot-disagree: (T_j - T_case)/R_th_jc and P_tot more than 10 % apart."""
    device = seen.place.device
    used, apart = R_th_jc_used(device)
    stated, P_tot = device.thermal.R_th_jc, device.max.P_tot
    if not apart or used is None or stated is None or P_tot is None:
        return ()
    span = device.max.T_j.at(0) - device.max.T_case.at(0)
    return (
        Raised(
            id="rth-ptot-disagree",
            text=(
                f"{device.name}: R_th_jc = {stated.at(0):.3g} K/W would mean {span / stated.at(0):.4g} W, "
                f"P_tot = {P_tot.at(0):.4g} W would mean {span / P_tot.at(0):.3g} K/W; "
                f"{used.at(0):.3g} K/W and {min(P_tot.at(0), span / used.at(0)):.4g} W are used."
            ),
        ),
    )


def interface_missing(seen: Seen) -> tuple[Raised, ...]:
    """interface-missing: the case-to-sink interface is absent or zero."""
    path = seen.place.path
    if path.sink in {"none", "case", "absent"} or (
        path.interface is not None and bool(np.all(path.interface.value > 0))
    ):
        return ()
    state = "not stated" if path.interface is None else "stated as 0 K/W"
    return (
        Raised(
            id="interface-missing",
            text=f"The interface between case and sink is {state}; real ones are {INTERFACE_RANGE}.",
            lowers=TEMPERATURE_LIMITS,
            missing=(Missing(key="heat_path.interface", where="maker of the pad or grease; mounting drawing"),),
        ),
    )


def shared_sink(seen: Seen) -> tuple[Raised, ...]:
    """shared-sink: more than one device heats the sink."""
    place = seen.place
    if place.on_sink < 2 or place.path.sink not in {"resistance"}:
        return ()
    return (
        Raised(
            id="shared-sink",
            text=(
                f"{place.on_sink} devices heat this sink: its resistance carries the watts of all of them, "
                "each interface and each junction only its own."
            ),
        ),
    )
