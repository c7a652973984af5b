"""safe-area: the locus against the printed safe-area curves, scaled to the temperature reached.

Rule: a locus wholly inside the dc curve is inside. Otherwise two tests, and the larger utilisation counts. Residence: the
longest unbroken time above each printed curve may not exceed the next shorter printed pulse (or, log-log, no interpolated
curve's own width). Superposition: the hot spot's response to x = i/I_dc(v), with g = I_dc/I(t_p) as its step response,
may not go above 1. Curves are scaled to the case temperature (its peak; for one shot the junction temperature just
before), with T_j_max the rating. Where a current rating is the allowance, or the device is on, `current` and
`peak-current` judge. Utilisation is the factor by which all currents must be divided to touch.
Source: makers' charts; residence as read by hand; superposition is our own derivation. Pulse curves are published for
duty factors to 10 %.
Range: no dc curve: lasting or repeated conduction in the active region is unproven. Nothing is known right of a curve's
last point, nor below the shortest printed pulse.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.limit import junction_temperature, peak_current, turn_off, voltage
from soacheck.limit.allowance import Lines, lines_of, share, shares
from soacheck.limit.by_hand import hand_calculation
from soacheck.limit.duration import exact_where_it_matters, longest_run, time_above
from soacheck.limit.found import (
    ALWAYS,
    Note,
    Point,
    Verdict,
    finding,
    sharing,
    temperature_unknown,
    typical,
    typical_named,
    verdict,
    without_locus,
)
from soacheck.limit.judged import Judged
from soacheck.limit.path import Path, path_of
from soacheck.limit.residence import Residence
from soacheck.limit.screen import Screen, screen
from soacheck.limit.soa_picture import picture
from soacheck.limit.superposition import Superposition, mean_of, spot_of, superpose
from soacheck.locus import Use
from soacheck.result import Finding, Reason, Status
from soacheck.table import Missing
from soacheck.trace import BoolArray, FloatArray, IntArray, Traced, found

NAME = "safe-area"
BASIS = (
    "residence above each printed curve and superposition on the hot spot's response, both scaled to the temperature "
    "reached; the larger counts"
)
DC_MISSING = Missing(key="soa[dc]", where="safe-area chart: the line marked dc")
SHORTER_MISSING = Missing(key="soa[shorter]", where="safe-area chart: a line for a shorter pulse")
ELEMENTS = 2_000_000  # of the largest array of one piece of work

__all__ = ["NAME", "find", "longest_above_dc", "picture"]


def find(judged: Judged) -> tuple[Finding, ...]:
    """One finding."""
    if judged.operating.locus is None:
        return (without_locus(judged, limit=NAME, basis=BASIS, unit="A"),)
    lines = lines_of(judged)
    if lines.longest is None:
        return (_no_curves(judged, lines),)
    seen = screen(judged, lines)
    worked = _work(judged, lines, seen)
    decided = verdict(judged, worked.use, _notes(judged, lines, seen, worked))
    return (_finding(judged, lines, seen, worked, decided),)


def longest_above_dc(judged: Judged) -> FloatArray:
    """Longest unbroken time above the scaled dc curve, (case, member) [s]; infinite while held, 0 without a dc curve."""
    lines, locus = lines_of(judged), judged.operating.locus
    if locus is None or lines.dc is None:
        return np.zeros((judged.cases, 1))
    path = path_of(judged, np.arange(locus.shape[1])[None])
    r = share(lines.dc, path).r
    return longest_run(path.t, r, np.ones(r.shape[:2]), locus.use).duration


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Tests:
    """Both tests of some members, (case, member). shortest: share of the shortest curve, for any time at all."""

    residence: Residence
    superposition: Superposition
    shortest: FloatArray
    shortest_at: IntArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Worked:
    """Utilisation per (case, member), NaN where it has no number, and what it rests on.

    exceeds: a crossing that is proven. shorter: above the shortest printed curve, for less than its width.
    """

    use: FloatArray
    exceeds: BoolArray
    shorter: BoolArray


def _tests(judged: Judged, lines: Lines, seen: Screen, path: Path) -> Tests:
    dc = None if lines.dc is None else share(lines.dc, path)
    members = np.broadcast_to(path.members, (judged.cases, path.members.shape[1]))
    density = np.take_along_axis(seen.duty_factor, members, axis=1)
    r = shares(lines, path, dc, density)
    x = dc.r if dc is not None else r[-1]
    nearest = r[0] if r else x
    if lines.widths and path.use is not Use.HELD:
        spot = spot_of(lines, np.take_along_axis(seen.v_top, members, axis=1), members)
        response = superpose(path, x, spot)
    else:
        top = x.max(axis=2)
        proven = top if path.use is Use.HELD else mean_of(path, x) if path.use is Use.REPEATED else np.zeros_like(top)
        response = Superposition(value=top, proven=proven, at=x.argmax(axis=2))
    if lines.dc is None:
        # The longest pulse stands for dc only while the shot is no longer than it.
        lasting = np.take_along_axis(seen.lasting, members, axis=1)
        response = Superposition(
            value=np.where(lasting, 0.0, response.value), proven=np.where(lasting, 0.0, response.proven), at=response.at
        )
    return Tests(
        residence=Residence(t=path.t, use=path.use, widths=lines.widths, r=r, dc=None if dc is None else dc.r,
                            between=judged.rules.pulse_between),
        superposition=response, shortest=nearest.max(axis=2), shortest_at=nearest.argmax(axis=2),
    )  # fmt: skip


def _work(judged: Judged, lines: Lines, seen: Screen) -> Worked:
    shape = seen.top.shape
    exceeds, one = np.zeros(shape, dtype=np.bool_), np.ones(shape)

    def evaluate(pick: IntArray) -> FloatArray:
        tests = _tests(judged, lines, seen, path_of(judged, pick))
        response = tests.superposition
        low = np.maximum(response.value, tests.shortest)
        high = np.maximum(np.take_along_axis(seen.top, pick, axis=1), low)
        stays = tests.residence.fails(np.take_along_axis(one, pick, axis=1))
        np.put_along_axis(exceeds, pick, stays | (response.proven > 1), axis=1)
        return tests.residence.utilisation(low, high)

    times = 2 * judged.operating.T_j.shape[2]
    width = max(1, min(8, ELEMENTS // (judged.cases * times * 12)))
    use, exact = exact_where_it_matters(seen.low, seen.top, evaluate, below=1.0, width=width)
    exceeds &= exact & (use > 1)
    shorter = (use > 1) & ~exceeds & ~seen.lasting
    unknown = seen.T_unknown | seen.zero | ((shorter | seen.beyond | seen.lasting) & ~exceeds)
    use = np.where(unknown, np.nan, use)
    if seen.turned_off is not None:
        use = np.maximum(use, seen.turned_off.value)
    return Worked(use=use, exceeds=exceeds, shorter=shorter)


def _notes(judged: Judged, lines: Lines, seen: Screen, worked: Worked) -> tuple[Note, ...]:
    measure = lines.longest
    notes: list[Note] = [*sharing(judged)]
    if measure is None:
        return tuple(notes)
    notes += temperature_unknown(judged, np.where(seen.T_unknown, np.nan, 0.0))
    notes.append(Note(text="At the temperature reached the safe area allows no current.", holds=seen.zero,
                      best=Status.EXCEEDS))  # fmt: skip
    end = measure.curve.points[-1, 0]
    notes.append(
        Note(text=f"Current flows above {end:.4g} V, where the {measure.label} curve ends; nothing is known there.",
             holds=seen.beyond, best=Status.UNPROVEN,
             missing=(Missing(key=f"soa[{measure.label}]", where=f"safe-area chart: the line beyond {end:.4g} V"),)),
    )  # fmt: skip
    notes.append(
        Note(text="There is no dc curve: conduction in the active region that lasts or repeats beyond the longest printed "
             "pulse is not judged by pulse curves or by the dissipation line.", holds=seen.lasting, best=Status.UNPROVEN,
             missing=(DC_MISSING,)),
    )  # fmt: skip
    notes += _shorter(judged, lines, worked)
    density = judged.rules.soa_duty_factor_max.value[:, None]
    single = any(line.curve.single for line in lines.pulses)
    repeated = judged.operating.locus is not None and judged.operating.locus.use is Use.REPEATED
    dense = (seen.top > 1) & (seen.duty_factor > density) & single & repeated
    notes.append(
        Note(text=f"Above the dc curve with a duty factor of more than {100 * density[0, 0]:.3g} %: makers publish pulse "
             "curves for less, so this is at best marginal.", holds=dense, best=Status.MARGINAL),
    )  # fmt: skip
    outside = seen.top > 1
    ratings = judged.device.max
    notes += typical(judged.operating.R_th_jc, ratings.T_j)
    notes += typical_named(tuple(f"soa[{x.label}]" for x in (measure,) if x.curve.grade == "typical"))
    notes += typical_named(
        tuple(f"soa[{x.label}]" for x in lines.pulses if x is not measure and x.curve.grade == "typical"), holds=outside
    )
    if judged.operating.ladder is not None and judged.device.thermal.grade == "typical":
        notes += typical_named(("Z_th_jc",), holds=outside)
    notes.append(Note(text="Every point is off, on, or limited by a current rating; the current limits judge it.",
                      holds=(seen.top == 0) & ~seen.T_unknown & ~seen.beyond))  # fmt: skip
    notes += [Note(text=text, holds=ALWAYS) for text in lines.left_out]
    if judged.device.bipolar:
        notes.append(Note(text=voltage.REVERSED, holds=seen.reversed, best=Status.UNPROVEN))
    if seen.turned_off is not None:
        notes += seen.turned_off.notes
    return tuple(notes)


def _shorter(judged: Judged, lines: Lines, worked: Worked) -> tuple[Note, ...]:
    """Above the shortest printed curve for less than its width: unproven, if the other ratings hold."""
    if not bool(np.any(worked.shorter)):
        return ()
    others = [f for limit in (peak_current.find, voltage.find, junction_temperature.find) for f in limit(judged)]
    crossed = np.logical_or.reduce([f.status == Status.EXCEEDS for f in others])[:, None]
    label = lines.pulses[0].label if lines.pulses else "dc"
    shortest = f"Above the {label} curve, the shortest printed one, for less than its width"
    return (
        Note(text=f"{shortest}: a curve for a shorter pulse is needed.", holds=worked.shorter & ~crossed,
             best=Status.UNPROVEN, missing=(SHORTER_MISSING,)),
        Note(text=f"{shortest}, and peak current, voltage or junction temperature is exceeded.",
             holds=worked.shorter & crossed, best=Status.EXCEEDS),
    )  # fmt: skip


def _no_curves(judged: Judged, lines: Lines) -> Finding:
    text = "No safe-area curve is stated; the dissipation line never stands in for one."
    notes = [Note(text=text, holds=ALWAYS, best=Status.UNPROVEN, missing=(DC_MISSING,)), *sharing(judged)]
    notes += [Note(text=left, holds=ALWAYS) for left in lines.left_out]
    decided = verdict(judged, np.full((judged.cases, 1), np.nan), notes)
    return finding(judged, decided, limit=NAME, basis=BASIS, unit="A", applied=None, allowed=None)


def _finding(judged: Judged, lines: Lines, seen: Screen, worked: Worked, decided: Verdict) -> Finding:
    """The finding of the worst members, both tests worked out in full for them."""
    pick = decided.member[:, None]
    path = path_of(judged, pick)
    tests = _tests(judged, lines, seen, path)
    response, nearest = tests.superposition, tests.shortest
    use = decided.of(worked.use)[:, None]
    top = np.maximum(np.maximum(np.take_along_axis(seen.top, pick, axis=1), nearest), response.value)
    stay = tests.residence.utilisation(top * 1e-4, top)
    stay_at, stay_curve = tests.residence.touching(stay)
    stay = np.where(tests.residence.fails(top * 1e-4), stay, 0.0)
    columns = [stay, response.value, nearest]
    at = [stay_at, response.at, tests.shortest_at]
    if seen.turned_off is not None:
        columns.append(np.take_along_axis(seen.turned_off.value, pick, axis=1))
        at.append(np.take_along_axis(seen.turned_off.at, pick, axis=1))
    # The shortest curve only where it is the larger by more than the fit of g: it is in the superposition, too.
    order = np.stack([column * (1 - 1e-3 * (k == 2)) for k, column in enumerate(columns)])
    governs = np.argmax(np.where(np.isnan(order), np.inf, order), axis=0)
    index = np.take_along_axis(np.stack(at), governs[None], axis=0)[0]
    beyond = path.active & np.isnan(_raw(lines, path))
    index = np.where(np.isnan(use) & beyond.any(axis=2), beyond.argmax(axis=2), index)
    nothing = (np.isnan(use) & (seen.T_unknown_of(pick))) | ((decided.of(seen.top) == 0)[:, None] & ~(use > 0)
                                                             & ~beyond.any(axis=2))  # fmt: skip

    def there(a: FloatArray) -> FloatArray:
        return np.asarray(np.where(nothing, np.nan, np.take_along_axis(a, index[..., None], axis=2)[..., 0])[:, 0])

    t = np.broadcast_to(path.t, path.v.shape)
    region = np.take_along_axis(path.region, index[..., None], axis=2)[:, 0, 0]
    point = Point(t=there(t), v=there(path.v), i=there(path.i), region=np.where(nothing[:, 0], -1, region))
    if path.use is Use.HELD:
        words: tuple[str, ...] = ("",) * 4
    else:
        words = (
            "Residence governs: the time above the {curve} curve is what touches.",
            "Superposition governs: the response of the hot spot to the whole locus is what touches (own derivation).",
            "The share of the shortest printed curve governs.",
            "The reverse-bias area at turn-off governs.",
        )
    reasons = []
    numbered = [*(f"{width:.4g} s" for width in lines.widths), "dc"]
    labels = {line.pulse: line.label for line in lines.pulses}
    numbered = [*(labels[width] for width in lines.widths), "dc"]
    clear = ~np.isnan(use) & (use > 0)
    for k, text in enumerate(words[: len(columns)]):
        if not text:
            continue
        for number, label in enumerate(numbered if k == 0 else numbered[:1]):
            holds = (governs == k) & clear & ((stay_curve == number) if k == 0 else True)
            if bool(np.any(holds)):
                reasons.append(Reason(text=text.format(curve=label), applies=holds[:, 0]))
    applied = found("I", point.i, "A", "current at the point that touches")
    with np.errstate(divide="ignore", invalid="ignore"):
        limit = np.where(use[:, 0] > 0, point.i / use[:, 0], np.nan)
    parts = (
        found("u_residence", stay[:, 0], "1", "factor by which all currents must be divided until no printed curve is "
              "exceeded for too long (bisection)"),
        found("u_superposition", response.value[:, 0], "1", "greatest response of the hot spot to x = i/I_dc(v)"),
    )  # fmt: skip
    how = "current at the point that touches over the utilisation, the larger of residence and superposition"
    allowed = found("I_allowed", limit, "A", how, applied, *parts)
    trace: tuple[Traced, ...] = hand_calculation(judged, lines, decided, point.v, stay_curve[:, 0], governs[:, 0] == 0)
    if path.use is Use.HELD and lines.dc is not None:
        allowed = found("I_allowed", limit, "A", "dc curve scaled to the temperature reached, as below", *trace[-1:])
    return finding(
        judged, decided, limit=NAME, basis=BASIS, unit="A", applied=applied, allowed=allowed, point=point, trace=trace,
        more=tuple(reasons),
    )  # fmt: skip


def _raw(lines: Lines, path: Path) -> FloatArray:
    measure = lines.longest
    if measure is None:
        raise ValueError("without curves there is no share")
    return share(measure, path).raw


_ = time_above
