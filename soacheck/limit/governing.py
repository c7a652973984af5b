"""The safe-area finding of the worst members: both tests in full, the point that touches, the hand calculation."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.limit.allowance import Line, Lines, allowed
from soacheck.limit.by_hand import hand_calculation, plain_name
from soacheck.limit.duration import longest_run
from soacheck.limit.found import Point, Verdict
from soacheck.limit.judged import Judged
from soacheck.limit.path import Path, path_of
from soacheck.limit.screen import Screen
from soacheck.limit.two_tests import Tests, Worked, tests_of
from soacheck.locus import Use
from soacheck.result import Reason
from soacheck.trace import BoolArray, FloatArray, IntArray, Traced, found

RESIDENCE, SUPERPOSITION, SHORTEST, TURN_OFF = range(4)
FIT = 1e-3  # the share of the shortest curve is in the superposition, too: it governs only where it is larger by this
LOW = 1e-4  # of the greatest share: below this a residence counts as none


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Governing:
    """What the finding of the worst members is made of."""

    point: Point
    applied: Traced
    allowed: Traced
    trace: tuple[Traced, ...]
    reasons: tuple[Reason, ...]


def governing(judged: Judged, lines: Lines, measure: Line, seen: Screen, worked: Worked, decided: Verdict) -> Governing:
    """Both tests worked out in full for the worst member of each case."""
    pick = decided.member[:, None]
    path = path_of(judged, pick)
    tests = worked.tests(decided.member) or tests_of(judged, lines, seen, path)
    use = decided.of(worked.use)
    top = np.maximum(np.take_along_axis(seen.top, pick, axis=1), np.maximum(tests.shortest, tests.superposition.value))
    stay = np.where(tests.residence.fails(LOW * top), tests.residence.utilisation(LOW * top, top), 0.0)
    stay_at, curve = tests.residence.touching(np.where(stay > 0, stay, top))
    test, at = _largest(seen, tests, stay, stay_at, pick)
    touching = np.take_along_axis(np.broadcast_to(path.v, tests.measure.r.shape), stay_at[..., None], axis=2)[..., 0]
    stands = _stand_in(lines, tests, curve[:, 0], touching[:, 0])

    raw = tests.measure.raw
    unknown = path.active & np.isnan(raw)
    blind = np.isnan(use) & np.any(unknown[:, 0], axis=1)
    at = np.where(blind, unknown.argmax(axis=2)[:, 0], at)
    T_unknown = np.take_along_axis(seen.T_unknown, pick, axis=1)[:, 0]
    nothing = (np.isnan(use) & T_unknown) | (~(use > 0) & ~np.isnan(use))

    def there(a: FloatArray) -> FloatArray:
        full = np.broadcast_to(a, path.v.shape)
        return np.where(nothing, np.nan, np.take_along_axis(full, at[:, None, None], axis=2)[:, 0, 0])

    region = np.take_along_axis(path.region, at[:, None, None], axis=2)[:, 0, 0]
    t = np.full(judged.cases, np.nan) if path.use is Use.HELD else there(path.t)  # a held point has no time
    point = Point(t=t, v=there(path.v), i=there(path.i), region=np.where(nothing, -1, region))
    idle = use == 0
    v_idle = _nearest(measure, path) if bool(np.any(idle)) else point.v
    shown = np.where(test == RESIDENCE, stands, np.where(test == SHORTEST, 0, _nearest_width(lines, path, tests)))
    wanted = (test != TURN_OFF) & ~idle & (path.use is not Use.HELD)
    trace = hand_calculation(judged, lines, decided, np.where(idle, v_idle, point.v), shown, wanted)
    applied = found(
        "I", np.where(idle, 0.0, point.i), "A", "current at the point that touches; 0 where no point is judged"
    )
    zero = decided.of(seen.zero)
    shape = _response(lines, seen, pick) if lines.widths and path.use is not Use.HELD else ()
    allowed = _allowed(path.use, lines, use, zero, applied, stay[:, 0], tests, trace, shape)
    held = path.use is Use.HELD
    reasons = () if held else _reasons(lines, test, curve[:, 0], stands, tests.warmed[:, 0], ~np.isnan(use) & (use > 0))
    return Governing(point=point, applied=applied, allowed=allowed, trace=trace, reasons=reasons)


def _stand_in(lines: Lines, tests: Tests, curve: IntArray, v: FloatArray) -> IntArray:
    """Number of the curve whose allowance counts in place of each (case,) at a voltage: itself, or the next longer one
    where it has ended or holds for smaller duty factors."""
    numbers = {width: number for number, width in enumerate(lines.widths)}
    out = np.zeros((len(lines.widths) + 1, len(curve)), dtype=np.bool_)
    for line, dense in zip(lines.pulses, tests.dense, strict=True):
        out[numbers[line.pulse]] |= dense[:, 0] | (v > line.curve.points[-1, 0])
    if lines.dc is None and lines.widths:
        out[-2] = False
    answer = curve.copy()
    for number in range(len(lines.widths)):
        answer = np.where((answer == number) & out[number], number + 1, answer)
    return answer


def _nearest_width(lines: Lines, path: Path, tests: Tests) -> IntArray:
    """Number of the pulse curve nearest to the time that a locus stays above half its greatest share, (case,)."""
    if not lines.widths or path.use is Use.HELD:
        return np.full(tests.measure.r.shape[0], len(lines.widths), dtype=np.int64)
    r, widths = tests.measure.r, np.asarray(lines.widths)
    length = longest_run(path.t, r, r.max(axis=2) / 2, path.use).duration[:, 0]
    length = np.clip(length, widths[0], widths[-1])
    return np.asarray(np.argmin(np.abs(np.log(length[:, None] / widths)), axis=1), dtype=np.int64)


def _nearest(measure: Line, path: Path) -> FloatArray:
    """Voltage of the point with the largest share of a curve's allowance, judged or not, (case,). [V]"""
    may = allowed(measure, path.v, path.members).current
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.where(np.isnan(may), -1.0, path.i / may)
    at = np.argmax(np.where(np.isnan(ratio), -1.0, ratio), axis=2)
    return np.asarray(np.take_along_axis(path.v, at[..., None], axis=2)[:, 0, 0], dtype=np.float64)


def _largest(
    seen: Screen, tests: Tests, stay: FloatArray, stay_at: IntArray, pick: IntArray
) -> tuple[IntArray, IntArray]:
    """Which test is the largest, and the sample that it touches at, (case,)."""
    values = [stay, tests.superposition.value, tests.shortest * (1 - FIT)]
    at = [stay_at, tests.superposition.at, tests.shortest_at]
    if seen.turned_off is not None:
        values.append(np.take_along_axis(seen.turned_off.value, pick, axis=1))
        at.append(np.take_along_axis(seen.turned_off.at, pick, axis=1))
    order = np.stack(values)[..., 0]
    test = np.argmax(np.where(np.isnan(order), np.inf, order), axis=0)
    return test, np.take_along_axis(np.stack(at)[..., 0], test[None], axis=0)[0]


def _response(lines: Lines, seen: Screen, pick: IntArray) -> tuple[Traced, ...]:
    """The hot spot's step response as it was read from the curves, and the greatest x."""
    v = np.take_along_axis(seen.v_top, pick, axis=1)
    g, unknown = (np.take_along_axis(a, pick[..., None], axis=1) for a in (seen.g, seen.g_unknown))
    labels = {line.pulse: line.label for line in lines.pulses}
    how = "I_dc/I(t_p) at V_g, both scaled"
    ended = f"{how}; where this curve has ended, that of the next longer pulse"
    V = found("V_g", v[:, 0], "V", "voltage of the greatest x")
    return (
        V,
        found("x_max", np.take_along_axis(seen.top, pick, axis=1)[:, 0], "1", "greatest x = i/I_dc(v)", V),
        *(
            found(f"g_{plain_name(labels[width])}", g[:, 0, k], "1", ended if unknown[:, 0, k].any() else how, V)
            for k, width in enumerate(lines.widths)
        ),
    )


def _allowed(
    use: Use,
    lines: Lines,
    utilisation: FloatArray,
    zero: BoolArray,
    applied: Traced,
    stay: FloatArray,
    tests: Tests,
    trace: tuple[Traced, ...],
    shape: tuple[Traced, ...],
) -> Traced:
    with np.errstate(divide="ignore", invalid="ignore"):
        limit = np.where(utilisation > 0, applied.value / utilisation, np.where(zero, 0.0, np.nan))
    # Where nothing is judged, what the curve that everything is measured by allows at the point nearest to it.
    limit = np.where(utilisation == 0, trace[-1].value, limit)
    if use is Use.HELD and lines.dc is not None:
        return found("I_allowed", limit, "A", "the dc curve scaled to the temperature reached", *trace[-1:])
    how = "current at the point that touches over the utilisation, the largest of the tests"
    residence = (
        "factor by which all currents must be divided until no printed curve is exceeded for too long (bisection)"
    )
    response = "greatest response of the hot spot to x = i/I_dc(v), from its step response g = I_dc/I(t_p)"
    return found(
        "I_allowed",
        limit,
        "A",
        how,
        applied,
        found("u_residence", stay, "1", residence),
        found("u_superposition", tests.superposition.value[:, 0], "1", response, *shape, source="own derivation"),
    )


def _reasons(
    lines: Lines, test: IntArray, curve: IntArray, stands: IntArray, warmed: BoolArray, clear: BoolArray
) -> tuple[Reason, ...]:
    """Which test governs, said of the cases in which it does."""
    labels = {line.pulse: line.label for line in lines.pulses}
    names = [*(labels[width] for width in lines.widths), "dc"]
    said = [
        (
            f"Residence governs: the time spent above the {name} curve touches.",
            (test == RESIDENCE) & (curve == number) & (stands == number),
        )
        for number, name in enumerate(names)
    ]
    said += [
        (
            f"Residence governs: the time spent above the {names[other]} curve touches; it counts in place of the "
            f"{name} curve, which says nothing here.",
            (test == RESIDENCE) & (curve == number) & (stands == other),
        )
        for number, name in enumerate(names)
        for other in range(number + 1, len(names))
    ]
    said += [
        (
            "Superposition governs: the response of the hot spot to the whole locus touches (own derivation).",
            test == SUPERPOSITION,
        ),
        (
            "Points that the current limits judge, or at which the device is on, are part of the response; they warm "
            "the hot spot and cannot touch.",
            (test == SUPERPOSITION) & warmed,
        ),
        ("The share of the shortest printed curve governs.", test == SHORTEST),
        ("The reverse-bias area at turn-off governs.", test == TURN_OFF),
    ]
    return tuple(Reason(text=text, applies=holds & clear) for text, holds in said if bool(np.any(holds & clear)))
