"""Load kind `profile`: voltage and current of the stage as points over time, straight lines between them."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from soacheck.duty import Drive, Duty, Fitted
from soacheck.load.kind import Surround
from soacheck.load.parts import turn_off_drive
from soacheck.load.parts.turn_off_drive import TurnOffDrive
from soacheck.locus import Locus, Use
from soacheck.table import Cells, Key
from soacheck.trace import BoolArray, FloatArray, Traced, distinct, found, frozen, given

KEYS: tuple[Key, ...] = (
    Key(
        table="load",
        name="points",
        form="points",
        columns=("time", "voltage", "current"),
        sign="any",
        required=True,
        grade="",
        meaning="Time, voltage across the devices and their whole current, leakage included; straight lines "
        "between the points, two points at one time make a step.",
        where="a scope picture, a simulation or the circuit's equations",
    ),
    Key(
        table="load",
        name="repeat",
        form="flag",
        required=True,
        grade="",
        meaning="true: the points are one period of a repetition; false: they happen once.",
        where="the circuit's task",
    ),
    Key(
        table="load",
        name="turn_off",
        form="points",
        columns=("time", "time"),
        sign="any",
        grade="",
        meaning="Intervals in which a reverse-driven base or gate turns the device off: there the turn-off "
        "area counts.",
        where="the drive circuit's waveform",
    ),
    Key(
        table="load",
        name="T_start",
        dimension="temperature",
        band=(218.0, 573.0),
        grade="",
        meaning="Junction temperature just before a profile that happens once.",
        where="the duty that precedes it; absent: the hottest steady duty of the stage",
    ),
    Key(
        table="load",
        name="temperature_independent",
        form="flag",
        grade="",
        meaning="true: the current does not follow the junction temperature; wants `because`.",
        where="the circuit",
    ),
    Key(
        table="load",
        name="because",
        form="text",
        grade="",
        meaning="Why the current does not follow the junction temperature; printed with the result.",
        where="the circuit",
    ),
    *turn_off_drive.KEYS,
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Profile:
    """The points as a path: t, v, i (time,) in SI, and which of the times lie in a marked turn-off."""

    t: FloatArray
    v: FloatArray
    i: FloatArray
    turn_off: BoolArray | None
    repeat: bool
    drive: TurnOffDrive
    T_start: Traced | None = None
    because: str = ""  # why the current does not follow the temperature; empty where nothing is stated


def read(cells: Cells, surround: Surround) -> Profile:
    """The profile of a `[load]` table."""
    points, repeat = cells.points("points"), bool(cells.flag("repeat"))
    wrong = points is None or _check_points(cells, points)
    if points is None or wrong:
        points = np.array([[0.0, 0.0, 0.0], [1.0, 0.0, 0.0]])  # never used: the refusal above ends the reading
    t, v, i = (frozen(column) for column in points.T)
    marks, spans = None, cells.points("turn_off")
    if spans is not None and not wrong and not _check_spans(cells, spans, t):
        t, v, i, marks = _marked(t, v, i, spans)
    if not cells.has("turn_off"):
        _refuse_idle_drive(cells)
    T_start = cells.quantity("T_start")
    if T_start is not None and repeat:
        cells.refuse(
            "T_start",
            "a repeated profile has no start: its temperatures repeat with it",
            "leave T_start out, or repeat = false",
        )
    return Profile(
        t=t,
        v=v,
        i=i,
        turn_off=marks,
        repeat=repeat,
        drive=turn_off_drive.read(cells),
        T_start=T_start,
        because=_because(cells),
    )


def _refuse_idle_drive(cells: Cells) -> None:
    for key in turn_off_drive.KEYS:
        if cells.quantity(key.name) is not None:
            problem = "the drive at turn-off is stated, but no turn-off is marked in the points"
            cells.refuse(key.name, problem, 'turn_off = [["2 ms", "2.1 ms"]]')


def _because(cells: Cells) -> str:
    independent, because = cells.flag("temperature_independent"), cells.text("because")
    if independent and not (because or "").strip():
        cells.refuse(
            "temperature_independent",
            "a reason is wanted, and printed with the result",
            'because = "a control loop holds the current"',
        )
    if because is not None and not independent:
        cells.refuse(
            "because",
            "this reason belongs to temperature_independent = true, which is not stated",
            "temperature_independent = true",
        )
    return (because or "").strip() if independent else ""


def _check_points(cells: Cells, points: FloatArray) -> bool:
    """Report what is wrong with the times; True when something is."""
    t = points[:, 0]
    if t.size < 2:
        cells.refuse(
            "points",
            "a path needs at least two points",
            'points = [["0 ms", "24 V", "0 A"], ["5 ms", "24 V", "1 A"]]',
        )
        return True
    falls = np.flatnonzero(np.diff(t) < 0)
    if falls.size:
        n = int(falls[0])
        cells.refuse(
            "points",
            f"times must not fall: point {n + 2} ({t[n + 1]:g} s) comes before point {n + 1} ({t[n]:g} s)",
            "put the points in the order of time",
        )
        return True
    thrice = np.flatnonzero((t[2:] == t[:-2]) if t.size > 2 else np.array([], dtype=bool))
    if thrice.size:
        n = int(thrice[0])
        cells.refuse(
            "points",
            f"points {n + 1} to {n + 3} stand at one time ({t[n]:g} s): two make a step, a third is lost",
            "leave the middle one out, or give it its own time",
        )
        return True
    if t[-1] == t[0]:
        cells.refuse("points", "the points last no time", "give the last point a later time than the first")
        return True
    return False


def _check_spans(cells: Cells, spans: FloatArray, t: FloatArray) -> bool:
    """Report what is wrong with the turn-off intervals; True when something is."""
    for n, (begin, end) in enumerate(spans, start=1):
        if not begin < end:
            problem = (
                f"interval {n} ends ({end:g} s) before it begins ({begin:g} s)"
                if end < begin
                else f"interval {n} lasts no time"
            )
            cells.refuse("turn_off", problem, 'turn_off = [["2 ms", "2.1 ms"]]: begin, then end')
            return True
        if begin < t[0] or end > t[-1]:
            cells.refuse(
                "turn_off",
                f"interval {n} ({begin:g} s to {end:g} s) leaves the points ({t[0]:g} s to {t[-1]:g} s)",
                "an interval lies inside the points; one over the end of a period is written as two",
            )
            return True
    ordered = spans[np.argsort(spans[:, 0])]
    if np.any(ordered[1:, 0] < ordered[:-1, 1]):
        cells.refuse("turn_off", "two intervals overlap", "write them as one")
        return True
    return False


def _marked(
    t: FloatArray, v: FloatArray, i: FloatArray, spans: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray, BoolArray]:
    """The path with samples at both ends of every interval, and the samples inside marked.

    Between two intervals one unmarked sample is wanted, else what lies between two marked samples would count
    as marked; the same before the first and after the last interval of a period.
    """
    edges = distinct(np.concatenate([[t[0]], spans.ravel(), [t[-1]]]))
    wanted = np.concatenate([edges, (edges[1:] + edges[:-1]) / 2])
    new = np.setdiff1d(wanted, t)
    at = np.searchsorted(t, new)  # no step at a new time: plain interpolation is exact
    t, v, i = (
        np.insert(t, at, new),
        np.insert(v, at, np.interp(new, t, v)),
        np.insert(i, at, np.interp(new, t, i)),
    )
    marks = np.any((t >= spans[:, :1]) & (t <= spans[:, 1:]), axis=0)
    return frozen(t), frozen(v), frozen(i), marks


def duties(load: Profile, fitted: Fitted) -> tuple[Duty, ...]:
    """The one duty of a profile."""
    share = fitted.share.value[:, None, None]
    locus = Locus(
        t=load.t[None, None],
        v=load.v[None, None],
        i=load.i[None, None] * share,
        use=Use.REPEATED if load.repeat else Use.ONCE,
        turn_off=load.turn_off,
    )
    facts = [
        found(
            "P_mean",
            locus.p_mean[:, 0],
            "W",
            "time mean of v * i, exact for straight lines between the points",
            fitted.share,
        )
    ]
    if not load.repeat:
        energy = locus.p_mean[:, 0] * locus.duration[:, 0]
        facts.insert(
            0,
            found(
                "E",
                energy,
                "J",
                "integral of v * i, exact for straight lines between the points",
                fitted.share,
            ),
        )
    if load.because:
        facts.append(given("temperature_independent", 1.0, "1", f"stated by the user: {load.because}"))
    return (
        Duty(
            name="profile",
            half=fitted.half,
            locus=lambda _: locus,
            heat_ratio=frozen(1.0 / fitted.share.value[:, None]),
            facts=tuple(facts),
            drive=_drive(load),
            T_start=None if load.T_start is None else replace(load.T_start, symbol="T_start"),
        ),
    )


def _drive(load: Profile) -> Drive | None:
    """What the base or gate gets at the marked turn-offs; None where nothing of it is stated."""
    at = load.drive
    if not at.reverse and at.R_G is None:
        return None
    return Drive(V_off=at.V_off, I_B2=at.I_B2, R_G=at.R_G)


def devices(load: Profile, parallel: int) -> int:
    """All devices of the stage."""
    return parallel


def sharing(load: Profile, parallel: int) -> int:
    """Devices that share the current."""
    return parallel


def halves(load: Profile) -> int:
    """A profile has no other half."""
    return 1


def not_analysed(load: Profile) -> tuple[str, ...]:
    """A profile states everything that it is about."""
    return ()
