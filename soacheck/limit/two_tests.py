"""Residence and superposition of every member that can be the worst of its case."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TypeVar

import numpy as np

from soacheck.limit.allowance import Lines, Share, share, shares, warmth
from soacheck.limit.duration import exact_where_it_matters, longest_run
from soacheck.limit.judged import Judged
from soacheck.limit.junction_temperature import limit_of
from soacheck.limit.path import Path, path_of
from soacheck.limit.residence import Residence
from soacheck.limit.screen import ELEMENTS, Screen
from soacheck.limit.superposition import Superposition, mean_of, spots_of, superpose
from soacheck.locus import Use
from soacheck.trace import BoolArray, FloatArray, IntArray

A = TypeVar("A", FloatArray, IntArray, BoolArray)

TOGETHER = 8  # members worked out in full at a time
TOUCH = 1e-12  # a share of 1 within rounding touches, and does not cross
SHARE = ("r", "raw", "exempt", "beyond", "zero")
KEPT = 4  # times so many members: kept for the one that governs
MODES = 24  # arrays of the size of the locus that the hot spot's modes take, about


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Tests:
    """Both tests of some members, (case, member).

    measure: share of the curve that everything is measured by. certain: residence where every curve is known. shortest:
    greatest share of the shortest printed curve, for any time at all; above: whether it is more than 1 where that curve
    is known. ended: conducts right of a pulse curve's last point; dense: repeats too densely for a curve; refused: for
    a curve on which the verdict hangs, (pulse curve, case, member). warmed: points that are not judged have their part
    in the superposition.
    """

    measure: Share
    residence: Residence
    certain: Residence
    superposition: Superposition
    shortest: FloatArray
    shortest_at: IntArray
    above: BoolArray
    ended: BoolArray
    dense: BoolArray
    refused: BoolArray
    warmed: BoolArray

    def of(self, which: IntArray) -> Tests:
        """The tests of some of the members, (case, some)."""
        both = (self.residence, self.certain)
        residence, certain = (
            replace(
                one,
                t=one.t
                if one.t.shape[1] == 1
                else _taken(np.broadcast_to(one.t, (len(which), *one.t.shape[1:])), which),
                r=tuple(_taken(r, which) for r in one.r),
                dc=None if one.dc is None else _taken(one.dc, which),
            )
            for one in both
        )
        response, measure = self.superposition, self.measure
        return Tests(
            measure=Share(**{name: _taken(getattr(measure, name), which) for name in SHARE}),
            residence=residence,
            certain=certain,
            superposition=Superposition(
                value=_taken(response.value, which),
                proven=_taken(response.proven, which),
                at=_taken(response.at, which),
            ),
            shortest=_taken(self.shortest, which),
            shortest_at=_taken(self.shortest_at, which),
            above=_taken(self.above, which),
            ended=np.take_along_axis(self.ended, which[None], axis=2),
            dense=np.take_along_axis(self.dense, which[None], axis=2),
            refused=np.take_along_axis(self.refused, which[None], axis=2),
            warmed=_taken(self.warmed, which),
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Worked:
    """Utilisation per (case, member), NaN where it has no number, and what it rests on.

    exceeds: a crossing that is proven. shorter: beyond what is known of pulses shorter than the shortest printed curve,
    and no crossing proven; above: because the locus goes above that curve; crossed: while peak current, voltage or
    junction temperature of the same member is exceeded. ended: conducts right of a pulse curve's last point; refused:
    repeats too densely for a curve on which the verdict hangs, (pulse curve, case, member).
    kept: members that were tested together, and their tests.
    """

    use: FloatArray
    exceeds: BoolArray
    shorter: BoolArray
    above: BoolArray
    crossed: BoolArray
    ended: BoolArray
    refused: BoolArray
    kept: tuple[tuple[IntArray, Tests], ...] = ()

    def tests(self, member: IntArray) -> Tests | None:
        """Tests of one member of each case (case,), if they were kept."""
        for pick, tests in self.kept:
            here = pick == member[:, None]
            if bool(np.all(here.any(axis=1))):
                return tests.of(here.argmax(axis=1)[:, None])
        return None


def _taken(array: A, which: IntArray) -> A:
    """Members (case, some) of an array whose first axes are (case, member)."""
    return np.take_along_axis(array, which.reshape(*which.shape, *[1] * (array.ndim - 2)), axis=1)


def tests_of(judged: Judged, lines: Lines, seen: Screen, path: Path) -> Tests:
    """Both tests of the members of a path."""
    if lines.longest is None:
        raise ValueError("without curves there is nothing to test")
    measure = share(lines.longest, path)
    dc = None if lines.dc is None else measure
    members = np.broadcast_to(path.members, (judged.cases, path.members.shape[1]))

    def of(array: A) -> A:
        return _taken(array, members)

    pulses = shares(lines, path, dc, of(seen.duty_factor))
    x = dc.r if dc is not None else pulses.r[-1]
    warm = None if path.use is Use.HELD else warmth(lines.longest, path, measure)
    nearest, known = (pulses.r[0], pulses.known[0]) if pulses.r else (x, x)
    if lines.widths and path.use is not Use.HELD:
        spot, least = spots_of(lines, of(seen.g), of(seen.g_unknown), of(seen.v_top), members, of(seen.duty_factor))
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
        measure=measure,
        residence=residence,
        certain=replace(residence, r=pulses.known),
        superposition=response,
        shortest=nearest.max(axis=2),
        shortest_at=nearest.argmax(axis=2),
        above=known.max(axis=2) > 1,
        ended=pulses.ended,
        dense=pulses.dense,
        refused=_refused(lines, residence, pulses.dense),
        warmed=np.zeros(x.shape[:2], dtype=np.bool_) if warm is None else warm.max(axis=2) > 0,
    )


def _refused(lines: Lines, residence: Residence, dense: BoolArray) -> BoolArray:
    """The curves that a locus repeats too densely for and, by what stands in for them, stays above for too long; all
    that it repeats too densely for where there is none such. (pulse curve, case, member)"""
    if not bool(np.any(dense)):
        return dense
    one = np.ones(dense.shape[1:])
    stays = [longest_run(residence.t, r, one, residence.use).duration > most for r, most in residence.curves()]
    failing = dense & np.stack([stays[lines.widths.index(line.pulse)] for line in lines.pulses])
    return np.where(failing.any(axis=0), failing, dense)


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
    refused = np.zeros_like(ended)

    kept: list[tuple[IntArray, Tests]] = []

    def evaluate(pick: IntArray) -> FloatArray:
        tests = tests_of(judged, lines, seen, path_of(judged, pick))
        if len(kept) < KEPT:
            kept.append((pick, tests))
        low = np.maximum(tests.superposition.value, tests.shortest)
        high = np.maximum(np.take_along_axis(seen.top, pick, axis=1), low)
        stays = tests.certain.fails(np.take_along_axis(one, pick, axis=1))
        np.put_along_axis(exceeds, pick, stays | (tests.superposition.proven > 1), axis=1)
        np.put_along_axis(above, pick, tests.above, axis=1)
        for whole, part in zip((*ended, *refused), (*tests.ended, *tests.refused), strict=True):
            np.put_along_axis(whole, pick, part, axis=1)
        return tests.residence.utilisation(low, high)

    width = max(1, min(TOGETHER, ELEMENTS // (judged.cases * judged.operating.T_j.shape[2] * MODES)))
    use, exact = exact_where_it_matters(seen.low, seen.high, evaluate, below=1.0, width=width)
    use = np.where(np.abs(use - 1) < TOUCH, 1.0, use)
    exceeds &= exact & (use > 1) & ~seen.T_unknown
    shorter = (use > 1) & ~exceeds & ~seen.lasting & ~seen.zero
    crossed = shorter & (above | ~(ended | refused).any(axis=0)) & _others_crossed(judged)
    no_number = seen.T_unknown | seen.hole | seen.zero | seen.beyond | ((shorter | seen.lasting) & ~exceeds & ~crossed)
    use = np.where(no_number, np.nan, use)
    if seen.turned_off is not None:
        use = np.maximum(use, seen.turned_off.value)
    return Worked(
        use=use,
        exceeds=exceeds,
        shorter=shorter,
        above=above,
        crossed=crossed,
        ended=ended,
        refused=refused,
        kept=tuple(kept),
    )


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
