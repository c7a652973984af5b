"""drive: what the base or gate gets, against its ratings and against what saturation needs.

Rules: reverse base-emitter voltage <= k_V * V_EBO, gate voltage of either sign <= k_V * V_GSS, base current <= k_I *
I_B. A bipolar transistor that the duty relies on to saturate needs I_on <= h_FE_min * I_B, with the least gain stated
at that current or above it; a MOSFET's R_DS_on counts only at the V_GS it is stated for, or more; an IGBT's on-state
line, whose gate voltage a rating file does not state, only at 15 V or more, and then at best marginal.
Source: limiting values of IEC 60747-7 and 60747-8; the least gain decides, never the typical one, and on-state
lines of IGBTs are stated at 15 V (common practice).
Range: what the stage states; where it states no drive there is nothing to judge.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from soacheck.duty import Drive
from soacheck.limit.found import ALWAYS, Note, finding, ratio, sharing, typical, verdict
from soacheck.limit.judged import Judged
from soacheck.result import Finding, Status
from soacheck.table import Missing
from soacheck.trace import FloatArray, Traced, derived, given

NAME = "drive"
IGBT_ON = 15.0  # [V] gate voltage that makers state on-state lines of IGBTs at, common practice
GATE_MISSING = Missing(key="load.V_GS", where="gate voltage while on: the drive circuit")
GAIN_MISSING = Missing(key="typical.h_FE", where="least dc current gain at that collector current: [min, typ, max]")
GAIN_I_MISSING = Missing(key="typical.h_FE_I_C", where="collector current that the gain is stated at")


def find(judged: Judged) -> tuple[Finding, ...]:
    """One finding for each part of the drive that is stated."""
    drive = judged.duty.drive
    if drive is None:
        return ()
    checks: tuple[Callable[[Judged, Drive], Finding | None], ...] = (_off, _on, _base, _saturation, _on_state, _on_line)
    return tuple(made for check in checks if (made := check(judged, drive)) is not None)


def _made(
    judged: Judged,
    applied: Traced | None,
    allowed: Traced | None,
    basis: str,
    unit: str,
    notes: tuple[Note, ...] = (),
    *,
    marginal_from: FloatArray | None = None,
) -> Finding:
    known = applied is not None and allowed is not None
    use = np.full((judged.cases, 1), np.nan)
    if applied is not None and allowed is not None:
        use = np.broadcast_to(ratio(applied.value, allowed.value), (judged.cases,))[:, None]
    rests = typical(applied, allowed) if known else ()
    decided = verdict(judged, use, (*notes, *rests), marginal_from=marginal_from)
    return finding(judged, decided, limit=NAME, basis=basis, unit=unit, applied=applied, allowed=allowed)


def _lacks(text: str, *missing: Missing) -> tuple[Note, ...]:
    return (Note(text=text, holds=ALWAYS, best=Status.UNPROVEN, missing=missing),)


def _gate_or_base(judged: Judged) -> tuple[Traced | None, Missing]:
    ratings = judged.device.max
    if judged.device.bipolar:
        return ratings.V_EBO, Missing(key="max.V_EBO", where="maximum ratings: emitter-base voltage")
    return ratings.V_GSS, Missing(key="max.V_GSS", where="maximum ratings: gate-source (gate-emitter) voltage")


def _off(judged: Judged, drive: Drive) -> Finding | None:
    if drive.V_off is None:
        return None
    rating, missing = _gate_or_base(judged)
    return _voltage(judged, drive.V_off, rating, missing)


def _on(judged: Judged, drive: Drive) -> Finding | None:
    if drive.V_on is None or judged.device.bipolar:
        return None
    rating, missing = _gate_or_base(judged)
    return _voltage(judged, drive.V_on, rating, missing)


def _voltage(judged: Judged, applied: Traced, rating: Traced | None, missing: Missing) -> Finding:
    symbol = missing.key.removeprefix("max.")
    basis = f"{applied.symbol} <= k_V * {symbol}"
    if rating is None:
        return _made(judged, applied, None, basis, "V", _lacks(f"The rating {symbol} is not stated.", missing))
    allowed = derived("V_allowed", f"k_V * {rating.symbol}", "V", judged.rules.voltage.named("k_V"), rating)
    return _made(judged, applied, allowed, basis, "V")


def _base(judged: Judged, drive: Drive) -> Finding | None:
    if drive.I_B is None or not judged.device.bipolar:
        return None
    rating = judged.device.max.I_B
    basis = "I_B <= k_I * I_B_max"
    if rating is None:
        missing = Missing(key="max.I_B", where="maximum ratings: base current")
        return _made(
            judged, drive.I_B, None, basis, "A", (*sharing(judged), *_lacks("The rating I_B is not stated.", missing))
        )
    allowed = derived("I_B_allowed", "k_I * I_B_max", "A", judged.rules.current.named("k_I"), rating.named("I_B_max"))
    return _made(judged, drive.I_B, allowed, basis, "A", sharing(judged))


def _saturation(judged: Judged, drive: Drive) -> Finding | None:
    if not drive.saturates or not judged.device.bipolar:
        return None
    basis = "saturation: I_on <= h_FE_min * I_B"
    if drive.I_B is None:
        missing = Missing(key="load.I_B", where="base current while the transistor is on: the drive circuit")
        return _made(judged, drive.I_on, None, basis, "A", _lacks("The base current while on is not stated.", missing))
    if drive.I_on is None:
        return _made(
            judged,
            None,
            None,
            basis,
            "A",
            _lacks("The current to be carried while on is not known.", *judged.duty.unknown),
        )
    gain, at = judged.device.typical.h_FE, judged.device.typical.h_FE_I_C
    least = gain.min if gain is not None else None
    if least is None:
        text = (
            "Whether saturation is reached needs the least gain; a typical gain does not decide. A forced gain of 10 "
            "to 20 is common practice."
        )
        return _made(judged, drive.I_on, None, basis, "A", _lacks(text, GAIN_MISSING))
    notes = [*sharing(judged)]
    if at is None:
        notes += _lacks("The current that the gain is stated at is not given.", GAIN_I_MISSING)
    else:
        beyond = np.broadcast_to(drive.I_on.value > at.value * (1 + 1e-9), (judged.cases,))[:, None]
        notes.append(
            Note(
                text="The least gain is stated at a lower current than has to be carried, where it is higher.",
                holds=beyond,
                best=Status.UNPROVEN,
                missing=(GAIN_MISSING,),
            )
        )
    allowed = derived("I_saturated", "h_FE_min * I_B", "A", least.named("h_FE_min"), drive.I_B.named("I_B"))
    return _made(judged, drive.I_on, allowed, basis, "A", tuple(notes))


def _on_state(judged: Judged, drive: Drive) -> Finding | None:
    if not drive.saturates or not judged.device.mosfet:
        return None
    basis = "on-state: V_GS >= the gate voltage that R_DS_on is stated for"
    needed = judged.device.typical.R_DS_on_V_GS
    if needed is None:
        missing = Missing(key="typical.R_DS_on_V_GS", where="gate voltage beside the on-resistance in its table")
        return _made(
            judged,
            None,
            drive.V_on,
            basis,
            "V",
            _lacks("R_DS_on is stated without the gate voltage it holds for.", missing),
        )
    if drive.V_on is None:
        text = "The gate voltage while on is not stated."
        return _made(judged, needed, None, basis, "V", _lacks(text, GATE_MISSING))
    text = (
        "The gate voltage is lower than the one R_DS_on is stated for; nothing is known of the on-state there. The "
        "threshold voltage does not mean on."
    )
    missing = Missing(key="typical.R_DS_on", where="on-resistance at this gate voltage")
    return _fully_on(judged, drive.V_on, needed, basis, text, missing)


def _on_line(judged: Judged, drive: Drive) -> Finding | None:
    if not drive.saturates or not judged.device.igbt:
        return None
    needed = given("V_GS_on", IGBT_ON, "V", "common practice")
    basis = "on-state: V_GS >= the gate voltage that on-state lines of IGBTs are stated for"
    if drive.V_on is None:
        text = "The gate voltage while on is not stated."
        return _made(judged, needed, None, basis, "V", _lacks(text, GATE_MISSING))
    text = (
        f"The gate voltage is lower than the {IGBT_ON:.3g} V that on-state lines of IGBTs are stated for; nothing is "
        "known of the on-state there."
    )
    missing = Missing(key="typical.V_CE_TO", where="on-state line at this gate voltage")
    assumed = f"That the on-state line holds at {IGBT_ON:.3g} V is common practice, not stated: at best marginal."
    note = Note(text=assumed, holds=ALWAYS, best=Status.MARGINAL)
    return _fully_on(judged, drive.V_on, needed, basis, text, missing, note)


def _fully_on(
    judged: Judged, V_on: Traced, needed: Traced, basis: str, text: str, missing: Missing, *notes: Note
) -> Finding:
    """Not a rating: meeting the stated condition is all that is wanted, and falling short proves nothing either way."""
    low = np.broadcast_to(V_on.value < needed.value * (1 - 1e-9), (judged.cases,))[:, None]
    short = Note(text=text, holds=low, best=Status.UNPROVEN, missing=(missing,))
    use = np.where(low[:, 0], np.nan, np.broadcast_to(ratio(needed.value, V_on.value), (judged.cases,)))
    decided = verdict(judged, np.minimum(use, 1.0)[:, None], (short, *notes), marginal_from=np.ones(1))
    return finding(judged, decided, limit=NAME, basis=basis, unit="V", applied=needed, allowed=V_on)
