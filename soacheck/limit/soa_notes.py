"""What is to be said of a safe-area finding besides its utilisation."""

from __future__ import annotations

import numpy as np

from soacheck.limit import voltage
from soacheck.limit.allowance import Line, Lines
from soacheck.limit.found import ALWAYS, Note, sharing, temperature_unknown, typical, typical_named
from soacheck.limit.judged import Judged
from soacheck.limit.screen import Screen
from soacheck.limit.two_tests import Worked
from soacheck.locus import Use
from soacheck.result import Status
from soacheck.table import Missing
from soacheck.trace import BoolArray

DC_MISSING = Missing(key="soa[dc]", where="safe-area chart: the line marked dc")
SHORTER_MISSING = Missing(key="soa[shorter]", where="safe-area chart: a line for a shorter pulse")
IDLE = "off, on, or limited by a current rating; the current limits judge it."
NO_DC = (
    "There is no dc curve: conduction in the active region that lasts or repeats beyond the longest printed pulse is "
    "judged neither by pulse curves nor by the dissipation line."
)


def notes_of(judged: Judged, lines: Lines, measure: Line, seen: Screen, worked: Worked) -> tuple[Note, ...]:
    """All notes; `measure` is the dc curve, or the longest pulse without one."""
    end = measure.curve.points[-1, 0]
    more = Missing(key=f"soa[{measure.label}]", where=f"safe-area chart: the line beyond {end:.4g} V")
    beyond = f"Current flows above {end:.4g} V, where the {measure.label} curve ends; nothing is known there."
    idle = (seen.top == 0) & ~seen.T_unknown & ~seen.beyond
    marked = np.zeros_like(idle) if seen.turned_off is None else seen.turned_off.concerned
    notes = [
        *sharing(judged),
        *temperature_unknown(judged, np.where(seen.T_unknown, np.nan, 0.0)),
        Note(text="The locus has points that are not numbers.", holds=seen.hole, best=Status.UNPROVEN),
        Note(text="At the temperature reached the safe area allows no current.", holds=seen.zero, best=Status.EXCEEDS),
        Note(
            text="Where the curves are known, the locus is outside them.",
            holds=worked.exceeds & np.isnan(worked.use),
            best=Status.EXCEEDS,
        ),
        Note(text=beyond, holds=seen.beyond, best=Status.UNPROVEN, missing=(more,)),
        Note(text=NO_DC, holds=seen.lasting, best=Status.UNPROVEN, missing=(DC_MISSING,)),
        *_shorter(judged, lines, worked),
        *_dense(judged, lines, seen, worked),
        *_typical(judged, lines, measure, seen),
        Note(text=f"Every point is {IDLE}", holds=idle & ~marked),
        Note(text=f"Outside the marked turn-off every point is {IDLE}", holds=idle & marked),
        *(Note(text=text, holds=ALWAYS) for text in lines.left_out),
    ]
    if judged.device.bipolar:
        notes.append(Note(text=voltage.REVERSED, holds=seen.reversed, best=Status.UNPROVEN))
    if seen.turned_off is not None:
        notes += seen.turned_off.notes
    return tuple(notes)


def _shorter(judged: Judged, lines: Lines, worked: Worked) -> tuple[Note, ...]:
    """Above the shortest printed curve for less than its width: unproven, if the other ratings hold."""
    if not bool(np.any(worked.shorter)):
        return ()
    label = lines.pulses[0].label if lines.pulses else "dc"
    stood_in = (worked.ended | worked.refused).any(axis=0)
    above = f"Above the {label} curve, the shortest printed one, for less than its width"
    answer = (
        f"The response of the hot spot touches only because nothing is known below {label}, the shortest printed curve"
    )
    needed, crossed = (
        "a curve for a shorter pulse is needed.",
        "peak current, voltage or junction temperature is exceeded.",
    )
    open_ = worked.shorter & ~worked.crossed
    return (
        Note(text=f"{above}: {needed}", holds=open_ & worked.above, best=Status.UNPROVEN, missing=(SHORTER_MISSING,)),
        Note(
            text=f"{answer}: {needed}",
            holds=open_ & ~worked.above & ~stood_in,
            best=Status.UNPROVEN,
            missing=(SHORTER_MISSING,),
        ),
        *_ended(lines, worked.ended & open_),
        *_too_dense(lines, worked.refused & open_),
        Note(text=f"{above}, and {crossed}", holds=worked.shorter & worked.crossed, best=Status.EXCEEDS),
    )


def _ended(lines: Lines, holds: BoolArray) -> tuple[Note, ...]:
    """Right of a pulse curve's last point, and the longer curves in its stead do not show the locus to be inside."""
    notes = []
    for line, where in zip(lines.pulses, holds, strict=True):
        end = line.curve.points[-1, 0]
        text = (
            f"Current flows above {end:.4g} V, where the {line.label} curve ends; nothing is known there, and the "
            "longer curves do not allow it."
        )
        more = Missing(key=f"soa[{line.label}]", where=f"safe-area chart: the line beyond {end:.4g} V")
        notes.append(Note(text=text, holds=where, best=Status.UNPROVEN, missing=(more,)))
    return tuple(notes)


def _too_dense(lines: Lines, holds: BoolArray) -> tuple[Note, ...]:
    """Repeats more densely than a curve is drawn for, and the longer ones in its stead do not show it to be inside."""
    notes = []
    for line, where in zip(lines.pulses, holds, strict=True):
        text = (
            f"The {line.label} curve holds for duty factors up to {100 * line.duty_factor:.3g} %, and that of the "
            "locus is larger; the longer curves in its place do not allow it."
        )
        more = Missing(key=f"soa[{line.label}]", where="safe-area chart: the line for single pulses")
        notes.append(Note(text=text, holds=where, best=Status.UNPROVEN, missing=(more,)))
    return tuple(notes)


def _dense(judged: Judged, lines: Lines, seen: Screen, worked: Worked) -> tuple[Note, ...]:
    """Pulse curves hold for duty factors up to a bound; past it a locus that passes is at best marginal."""
    locus = judged.operating.locus
    if locus is None or locus.use is not Use.REPEATED or not any(line.curve.single for line in lines.pulses):
        return ()
    bound = judged.rules.soa_duty_factor_max.value[:, None]
    holds = (seen.top > 1) & (worked.use <= 1) & (seen.duty_factor > bound)
    text = (
        f"Above the dc curve with a duty factor of more than {100 * bound[0, 0]:.3g} %: pulse curves are published for "
        "less, so this is at best marginal."
    )
    return (Note(text=text, holds=holds, best=Status.MARGINAL),)


def _typical(judged: Judged, lines: Lines, measure: Line, seen: Screen) -> tuple[Note, ...]:
    outside = seen.top > 1
    pulses = [line for line in lines.pulses if line is not measure]

    def named(some: list[Line]) -> tuple[str, ...]:
        return tuple(f"soa[{line.label}]" for line in some if line.curve.grade == "typical")

    transient = judged.operating.ladder is not None and judged.device.thermal.grade == "typical"
    return (
        *typical(judged.operating.R_th_jc, judged.device.max.T_j),
        *typical_named(named([measure])),
        *typical_named((*named(pulses), *(("Z_th_jc",) if transient else ())), holds=outside),
    )
