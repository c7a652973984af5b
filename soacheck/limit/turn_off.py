"""Turn-off with a reverse-driven base or gate: the reverse-bias area, unscaled, at every marked instant.

Rule: i <= k_SOA * I(v) of a printed reverse-bias curve whose conditions hold: junction temperature no higher than its
T_j_valid, reverse voltage and base current no larger than those it is stated with, gate resistance no smaller. A curve
that does not state its conditions, a drive that the stage does not state, or no such curve: unproven.
Source: definition of the reverse-bias safe operating area of IEC 60747-7 and 60747-9.
Range: instants that the load kind or the user marks as turn-off; nothing else is ever judged by it.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from soacheck.device.ratings import SafeAreaCurve
from soacheck.device.soa import printed_current
from soacheck.limit.found import Note, typical_named
from soacheck.limit.judged import Judged
from soacheck.limit.path import Path
from soacheck.quantity.units import ZERO_CELSIUS
from soacheck.result import Status
from soacheck.table import Missing
from soacheck.trace import BoolArray, FloatArray, IntArray, Traced

MISSING = Missing(key="soa[reverse]", where="reverse-bias (turn-off) safe-area chart, with its drive and temperature")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TurnOff:
    """Share of the reverse-bias area (case, member), the sample that uses most, and what is to be said of it.

    concerned (case, member): conducts at a marked instant. Where no area is known, the sample is that of most power.
    """

    value: FloatArray
    at: IntArray
    concerned: BoolArray
    notes: tuple[Note, ...]


def turn_off(judged: Judged, path: Path) -> TurnOff:
    """The marked instants against the reverse-bias area."""
    marked = path.turn_off & path.conducts & (path.v > 0)
    concerned = np.asarray(marked.any(axis=2), dtype=np.bool_)
    curves = [curve for curve in judged.device.soa if curve.bias == "reverse"]
    if not curves:
        note = Note(
            text="The device is turned off by a reverse drive and no reverse-bias safe area is stated.",
            holds=concerned,
            best=Status.UNPROVEN,
            missing=(MISSING,),
        )
        return TurnOff(
            value=np.where(concerned, np.nan, 0.0), at=_hardest(path, marked), concerned=concerned, notes=(note,)
        )
    each = [_one(judged, path, marked, curve) for curve in curves]
    # The first curve whose conditions hold counts, the widest if several do; where none does, the first one's reasons.
    open_ = np.stack([_unproven(one, concerned) for one in each])
    rank = np.where(open_, np.inf, np.stack([one.value for one in each]))
    chosen = np.where(open_.all(axis=0), 0, rank.argmin(axis=0))
    notes = [replace(note, holds=note.holds & (chosen == k)) for k, one in enumerate(each) for note in one.notes]

    value, at = np.stack([one.value for one in each]), np.stack([one.at for one in each])
    return TurnOff(
        value=np.take_along_axis(value, chosen[None], axis=0)[0],
        at=np.take_along_axis(at, chosen[None], axis=0)[0],
        concerned=concerned,
        notes=tuple(notes),
    )


def _hardest(path: Path, where: BoolArray) -> IntArray:
    """The sample of most power among some, (case, member)."""
    return np.asarray(np.argmax(np.where(where, path.v * path.i, -1.0), axis=2), dtype=np.int64)


def _unproven(one: TurnOff, concerned: BoolArray) -> BoolArray:
    answer = np.zeros(concerned.shape, dtype=np.bool_)
    for note in one.notes:
        answer |= note.holds & (note.best >= Status.UNPROVEN)
    return answer


def _one(judged: Judged, path: Path, marked: BoolArray, curve: SafeAreaCurve) -> TurnOff:
    """The marked instants against one reverse-bias curve."""
    concerned = np.asarray(marked.any(axis=2), dtype=np.bool_)
    with np.errstate(divide="ignore", invalid="ignore"):
        allowed = printed_current(curve, path.v) * judged.rules.safe_area.value[:, None, None]
        r = np.where(marked, path.i / allowed, 0.0)
    beyond = np.isnan(r)
    r = np.where(beyond, 0.0, r)
    notes = (
        *_conditions(judged, curve, concerned),
        Note(
            text=f"At turn-off current flows above {curve.points[-1, 0]:.4g} V, where the reverse-bias area ends.",
            holds=np.asarray(beyond.any(axis=2), dtype=np.bool_),
            best=Status.UNPROVEN,
            missing=(MISSING,),
        ),
        _temperature(judged, curve, concerned),
        *typical_named((f"soa[{curve.label}]",) if curve.grade == "typical" else (), holds=concerned),
    )
    at = np.where(beyond.any(axis=2), _hardest(path, beyond), r.argmax(axis=2))
    return TurnOff(value=r.max(axis=2), at=at, concerned=concerned, notes=notes)


def _temperature(judged: Judged, curve: SafeAreaCurve, concerned: BoolArray) -> Note:
    valid = curve.T_j_valid
    T_valid = np.full((1, 1), np.nan) if valid is None else valid.value[:, None]
    cold = judged.operating.T_j_bound <= T_valid
    said = "not stated" if valid is None else f"{valid.at(0) - ZERO_CELSIUS:.4g} degC"
    missing = (Missing(key="soa[reverse].T_j_valid", where="conditions of the reverse-bias safe-area chart"),)
    return Note(
        text=f"The junction is not shown to stay within the temperature that the reverse-bias area holds for ({said}).",
        holds=concerned & ~cold,
        best=Status.UNPROVEN,
        missing=missing if valid is None else judged.operating.missing,
    )


def _conditions(judged: Judged, curve: SafeAreaCurve, concerned: BoolArray) -> list[Note]:
    """What keeps the drive conditions of a reverse-bias curve from being shown to hold."""
    gate = not judged.device.bipolar
    reverse = "V_GS_off" if gate else "V_BE_off"  # what the stage calls it; a chart of a gate-driven device states R_G
    stated: dict[str, Traced | None] = {reverse: curve.V_BE_off, "I_B2": curve.I_B2, "R_G": curve.R_G}
    if all(value is None for value in stated.values()):
        where = "conditions of the reverse-bias safe-area chart" + ("" if gate else " (or I_B2)")
        missing = Missing(key=f"soa[reverse].{'R_G' if gate else 'V_BE_off'}", where=where)
        return [
            Note(
                text="The reverse-bias area is stated without its drive conditions.",
                holds=concerned,
                best=Status.UNPROVEN,
                missing=(missing,),
            )
        ]
    drive = judged.duty.drive
    ours = {
        reverse: None if drive is None else drive.V_off,
        "I_B2": None if drive is None else drive.I_B2,
        "R_G": None if drive is None else drive.R_G,
    }
    notes: list[Note] = []
    for name, value in stated.items():
        own = ours[name]
        if value is None:
            continue
        if own is None:
            missing = Missing(key=f"load.{name}", where="the drive circuit")
            text = f"The reverse-bias area is stated for a {name}; the stage does not state its own."
            notes.append(Note(text=text, holds=concerned, best=Status.UNPROVEN, missing=(missing,)))
            continue
        holds = own.value >= value.value * (1 - 1e-9) if name == "R_G" else own.value <= value.value * (1 + 1e-9)
        size = "smaller" if name == "R_G" else "larger"
        text = f"{name} is {size} than the one that the reverse-bias area is stated for."
        notes.append(Note(text=text, holds=concerned & ~holds[:, None], best=Status.UNPROVEN, missing=(MISSING,)))
    return notes
