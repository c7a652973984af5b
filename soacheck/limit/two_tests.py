"""Residence and superposition of every member that can be the worst of its case."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from soacheck.limit.allowance import Lines, share, shares, warmth
from soacheck.limit.duration import exact_where_it_matters
from soacheck.limit.judged import Judged
from soacheck.limit.junction_temperature import limit_of
from soacheck.limit.path import Path, path_of
from soacheck.limit.residence import Residence
from soacheck.limit.screen import ELEMENTS, Screen
from soacheck.limit.superposition import Superposition, mean_of, spots_of, superpose
from soacheck.locus import Use
from soacheck.trace import BoolArray, FloatArray, IntArray

TOGETHER = 8  # members worked out in full at a time
TOUCH = 1e-12  # a share of 1 within rounding touches, and does not cross
MODES = 24  # arrays of the size of the locus that the hot spot's modes take, about


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Tests:
    """Both tests of some members, (case, member).

    certain: residence where every curve is known. shortest: greatest share of the shortest printed curve, for any time
    at all; above: whether it is more than 1 where that curve is known. ended: conducts right of a pulse curve's last
    point, (pulse curve, case, member). warmed: points that are not judged have their part in the superposition.
    """

    residence: Residence
    certain: Residence
    superposition: Superposition
    shortest: FloatArray
    shortest_at: IntArray
    above: BoolArray
    ended: BoolArray
    warmed: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Worked:
    """Utilisation per (case, member), NaN where it has no number, and what it rests on.

    exceeds: a crossing that is proven. shorter: beyond what is known of pulses shorter than the shortest printed curve,
    and no crossing proven; above: because the locus goes above that curve; crossed: while peak current, voltage or
    junction temperature of the same member is exceeded. ended: conducts right of a pulse curve's last point, (pulse
    curve, case, member).
    """

    use: FloatArray
    exceeds: BoolArray
    shorter: BoolArray
    above: BoolArray
    crossed: BoolArray
    ended: BoolArray


def tests_of(judged: Judged, lines: Lines, seen: Screen, path: Path) -> Tests:
    """Both tests of the members of a path."""
    dc = None if lines.dc is None else share(lines.dc, path)
    members = np.broadcast_to(path.members, (judged.cases, path.members.shape[1]))

    def of(array: FloatArray) -> FloatArray:
        return np.take_along_axis(array, members, axis=1)

    pulses = shares(lines, path, dc, of(seen.duty_factor))
    x = dc.r if dc is not None else pulses.r[-1]
    warm = None
    if path.use is not Use.HELD:
        longest = lines.dc if lines.dc is not None else lines.pulses[-1]
        warm = warmth(longest, path, dc if dc is not None else share(longest, path))
    nearest, known = (pulses.r[0], pulses.known[0]) if pulses.r else (x, x)
    if lines.widths and path.use is not Use.HELD:
        spot, least = spots_of(lines, of(seen.v_top), members)
        response = superpose(path, x, spot, warm=warm, least=least)
    else:
        response = _without_pulses(path, x, x if warm is None else x + warm)
    residence = Residence(
        t=path.t,
        use=path.use,
        widths=lines.widths,
        r=pulses.r,
        dc=None if dc is None else dc.r,
        between=judged.rules.pulse_between,
    )
    return Tests(
        residence=residence,
        certain=replace(residence, r=pulses.known),
        superposition=response,
        shortest=nearest.max(axis=2),
        shortest_at=nearest.argmax(axis=2),
        above=known.max(axis=2) > 1,
        ended=pulses.ended,
        warmed=np.zeros(x.shape[:2], dtype=np.bool_) if warm is None else warm.max(axis=2) > 0,
    )


def _without_pulses(path: Path, x: FloatArray, whole: FloatArray) -> Superposition:
    """With the dc curve alone the hot spot may answer at once; no more than the mean of x is proven.

    whole: x with the share of the points that are not judged.
    """
    top = x.max(axis=2)
    if path.use is Use.HELD:
        proven = top
    elif path.use is Use.REPEATED:
        proven = np.minimum(mean_of(path, whole), top)
    else:
        proven = np.zeros_like(top)
    return Superposition(value=top, proven=proven, at=x.argmax(axis=2))


def work(judged: Judged, lines: Lines, seen: Screen) -> Worked:
    """The larger utilisation of both tests, exact for every member that can be the worst."""
    exceeds, one = np.zeros(seen.top.shape, dtype=np.bool_), np.ones(seen.top.shape)
    above = np.zeros(seen.top.shape, dtype=np.bool_)
    ended = np.zeros((len(lines.pulses), *seen.top.shape), dtype=np.bool_)

    def evaluate(pick: IntArray) -> FloatArray:
        tests = tests_of(judged, lines, seen, path_of(judged, pick))
        low = np.maximum(tests.superposition.value, tests.shortest)
        high = np.maximum(np.take_along_axis(seen.top, pick, axis=1), low)
        stays = tests.certain.fails(np.take_along_axis(one, pick, axis=1))
        np.put_along_axis(exceeds, pick, stays | (tests.superposition.proven > 1), axis=1)
        np.put_along_axis(above, pick, tests.above, axis=1)
        for whole, part in zip(ended, tests.ended, strict=True):
            np.put_along_axis(whole, pick, part, axis=1)
        return tests.residence.utilisation(low, high)

    width = max(1, min(TOGETHER, ELEMENTS // (judged.cases * judged.operating.T_j.shape[2] * MODES)))
    use, exact = exact_where_it_matters(seen.low, seen.high, evaluate, below=1.0, width=width)
    use = np.where(np.abs(use - 1) < TOUCH, 1.0, use)
    exceeds &= exact & (use > 1) & ~seen.T_unknown
    shorter = (use > 1) & ~exceeds & ~seen.lasting & ~seen.zero
    crossed = shorter & (above | ~ended.any(axis=0)) & _others_crossed(judged)
    no_number = seen.T_unknown | seen.hole | seen.zero | seen.beyond | ((shorter | seen.lasting) & ~exceeds & ~crossed)
    use = np.where(no_number, np.nan, use)
    if seen.turned_off is not None:
        use = np.maximum(use, seen.turned_off.value)
    return Worked(use=use, exceeds=exceeds, shorter=shorter, above=above, crossed=crossed, ended=ended)


def _others_crossed(judged: Judged) -> BoolArray:
    """Whether a member exceeds its peak current, its voltage or its junction temperature, (case, member).

    Without Z_th_jc the mean junction temperature proves what the bound with the peak power does not.
    """
    operating = judged.operating
    T_j = np.where(np.isnan(operating.T_j_peak), operating.T_j_mean, operating.T_j_peak)
    locus, ratings, rules = judged.operating.locus, judged.device.max, judged.rules
    if locus is None:
        raise ValueError("a duty without a locus has no members")
    peak = ratings.I_max if ratings.I_peak is None else ratings.I_peak
    return np.asarray(
        (T_j > limit_of(judged).value[:, None])
        | (locus.v_peak > (rules.voltage.value * ratings.V_max.value)[:, None])
        | (locus.i_peak > (rules.current.value * np.maximum(peak.value, ratings.I_max.value))[:, None]),
        dtype=np.bool_,
    )
