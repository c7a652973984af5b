"""Which levels and frequencies of an output stage are looked at, and which of them heats a device most.

Arrays are (case, member). Levels are fractions of the largest unclipped swing at their own frequency.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from soacheck.load.parts import class_b
from soacheck.load.parts.impedance import ComplexArray
from soacheck.load.parts.swing import Output, sine
from soacheck.locus import Locus
from soacheck.trace import FloatArray, IntArray

_SCAN = 241  # frequencies of the first look at the load, evenly over log f
_SPREAD = 9  # frequencies kept from end to end of the range, besides the worst of each sort
_POINTS, _ROUNDS = 9, 5  # of the refinement: each round narrows by four
_SEARCHED = 2  # rounds over the level alone, a parabola then ends them; as many again where the frequency moves too


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Driven:
    """An output stage on its load: what a level and a frequency are turned into loci with.

    Z_at: frequencies (case, n) -> impedance that one amplifier sees (case, n).
    cases: of all values together; each array below has that many or one.
    """

    output: Output
    Z_at: Callable[[FloatArray], ComplexArray]
    cases: int = 1

    @property
    def r(self) -> FloatArray:
        """Emitter resistance of one half, (case, 1). [ohm]"""
        return self.output.R_E / self.output.pairs

    def swing(self, Z: ComplexArray) -> FloatArray:
        """Largest unclipped swing into Z, (case, n). [V]"""
        return class_b.largest_swing(self.output.V_rail, self.output.V_sat, self.r, np.abs(Z), np.angle(Z))

    def at(self, level: FloatArray, f: FloatArray) -> tuple[FloatArray, Locus]:
        """Output peak (case, n) and locus at fractions of the largest swing and frequencies (case, n)."""
        Z = self.Z_at(f)
        V = level * self.swing(Z)
        return V, sine(self.output, V, Z, f)


def fractions(few_frequencies: bool) -> FloatArray:
    """Fractions of the largest swing that are looked at: few where little happens, 0 and 1 among them."""
    few, many = (13, 52) if few_frequencies else (4, 20)
    return np.concatenate([np.linspace(0, 0.4, few, endpoint=False), np.linspace(0.4, 1, many)])


def frequencies(driven: Driven, low: FloatArray, high: FloatArray, knots: FloatArray) -> FloatArray:
    """Frequencies of an operating range that are looked at, rising, (case, n).

    Both ends, some between them, and those at which ideal class B has the greatest mean dissipation at any
    level and at the largest swing, the greatest peak power and current, and the largest load angle. `knots`
    (n,) are the rows of a measured table.
    """
    low, high = (np.broadcast_to(end, (driven.cases, 1)) for end in (low, high))
    span = np.log(high / low)
    scan = low * np.exp(span * np.linspace(0, 1, _SCAN))
    scan[:, -1:] = high  # the end itself, not its rounding
    if knots.size:
        scan = np.sort(
            np.concatenate([scan, np.clip(np.broadcast_to(knots, (len(scan), knots.size)), low, high)], 1), 1
        )
    rail, r = driven.output.V_rail, driven.r

    def worst_mean(f: FloatArray) -> FloatArray:
        Z = driven.Z_at(f)
        size, angle = np.abs(Z), np.angle(Z)
        V = class_b.worst_swing(rail, driven.swing(Z), r, size, angle)
        return class_b.mean_power(rail, V, r, size, angle)

    Z = driven.Z_at(scan)
    size, angle, V_max = np.abs(Z), np.angle(Z), driven.swing(Z)
    seen = [
        class_b.mean_power(rail, V_max, r, size, angle),
        class_b.peak_power(rail, size, angle),
        V_max / size,
        np.abs(angle),
    ]
    picked = [np.take_along_axis(scan, np.argmax(score, axis=1)[:, None], 1) for score in seen]
    even = low * np.exp(span * np.linspace(0, 1, _SPREAD)[1:-1])
    return np.sort(np.concatenate([low, even, high, _refined(worst_mean, scan), *picked], axis=1), axis=1)


def _refined(score: Callable[[FloatArray], FloatArray], scan: FloatArray) -> FloatArray:
    """The argument (case, 1) of the greatest score near the best of a rising scan; the first where equal."""
    for _ in range(_ROUNDS):
        values = score(scan)
        best = np.argmax(values, axis=1)[:, None]
        below = np.take_along_axis(scan, np.maximum(best - 1, 0), 1)
        above = np.take_along_axis(scan, np.minimum(best + 1, scan.shape[1] - 1), 1)
        centre = np.take_along_axis(scan, best, 1)
        half = np.linspace(0, 1, _POINTS)
        scan = np.concatenate([below + (centre - below) * half, centre + (above - centre) * half[1:]], axis=1)
    return np.asarray(centre, dtype=np.float64)


def first_best(P: FloatArray) -> IntArray:
    """Index (case, 1) of the first member within rounding of the greatest: the lowest frequency where all are equal."""
    most = P.max(axis=1, keepdims=True)
    return np.asarray(np.argmax(most * (1 - 1e-9) <= P, axis=1)[:, None], dtype=np.int64)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Levels:
    """All levels looked at, the worst among them: output peaks V [V] and f [Hz], each (case, member)."""

    V: FloatArray
    f: FloatArray
    locus: Locus
    worst_V: FloatArray  # (case, 1)
    worst_f: FloatArray
    worst: Locus
    full_f: FloatArray
    full: Locus


def every_level(driven: Driven, f: FloatArray, *, class_b_only: bool, resistance: bool) -> Levels:
    """Loci of every level at frequencies (case, n), with the level of greatest mean dissipation as last
    member.

    class_b_only: no idle current, so that the worst level has a closed form. Else it is searched: the best of
    the grid, then by turns a finer grid over the level and over the frequency around it.
    """
    levels, cases = fractions(f.shape[1] <= 2), driven.cases
    f = np.broadcast_to(f, (cases, f.shape[1]))
    grid_f = np.repeat(f, levels.size, axis=1)
    grid_level = np.broadcast_to(np.tile(levels, f.shape[1]), grid_f.shape)
    V, locus = driven.at(grid_level, grid_f)
    P = np.broadcast_to(locus.p_mean, (cases, grid_f.shape[1]))
    best = first_best(P)
    best_f = np.take_along_axis(grid_f, best, 1)
    if class_b_only:
        Z = driven.Z_at(best_f)
        V_max = driven.swing(Z)
        best_level = class_b.worst_swing(driven.output.V_rail, V_max, driven.r, np.abs(Z), np.angle(Z)) / V_max
        best_level = np.minimum(best_level, 1.0)
    else:
        fixed = resistance or f.shape[1] == 1
        best_level, best_f = _search(driven, levels, f, best, best_f, fixed_f=fixed)
    worst_V, worst = driven.at(best_level, best_f)
    last = P[:, levels.size - 1 :: levels.size]
    full_f = np.take_along_axis(f, first_best(last), 1)
    full = driven.at(np.ones((1, 1)), full_f)[1]
    joined = Locus(
        t=_joined(locus.t, worst.t, cases),
        v=_joined(locus.v, worst.v, cases),
        i=_joined(locus.i, worst.i, cases),
        use=locus.use,
    )
    both = [np.broadcast_to(x, (cases, x.shape[1])) for x in (V, worst_V)]
    return Levels(
        V=np.concatenate(both, axis=1),
        f=np.concatenate([grid_f, np.broadcast_to(best_f, (cases, 1))], axis=1),
        locus=joined,
        worst_V=both[1],
        worst_f=best_f,
        worst=worst,
        full_f=full_f,
        full=full,
    )


def _search(
    driven: Driven, levels: FloatArray, f: FloatArray, best: IntArray, best_f: FloatArray, *, fixed_f: bool
) -> tuple[FloatArray, FloatArray]:
    index = best % levels.size
    level = levels[index]
    level_at = [levels[np.maximum(index - 1, 0)], levels[np.minimum(index + 1, levels.size - 1)]]
    column = best // levels.size
    f_at = [
        np.take_along_axis(f, np.maximum(column - 1, 0), 1),
        np.take_along_axis(f, np.minimum(column + 1, f.shape[1] - 1), 1),
    ]

    def over_level(x: FloatArray) -> FloatArray:
        return driven.at(x, best_f)[1].p_mean

    def over_f(x: FloatArray) -> FloatArray:
        return driven.at(level, x)[1].p_mean

    for n in range(_SEARCHED if fixed_f else 2 * _SEARCHED):
        last = n + 1 == (_SEARCHED if fixed_f else 2 * _SEARCHED)
        if not fixed_f:
            best_f, f_at = _narrowed(over_f, best_f, f_at)
        level, level_at = _narrowed(over_level, level, level_at, vertex=last)
    return level, best_f


def _narrowed(
    score: Callable[[FloatArray], FloatArray], centre: FloatArray, ends: list[FloatArray], *, vertex: bool = False
) -> tuple[FloatArray, list[FloatArray]]:
    """The best of a few arguments between the ends, and its neighbours; the centre if nothing is better.

    vertex: the top of the parabola through those three, where it is one.
    """
    half = np.linspace(0, 1, _POINTS // 2 + 1)
    tried = np.concatenate([ends[0] + (centre - ends[0]) * half, centre + (ends[1] - centre) * half[1:]], axis=1)
    values = np.broadcast_to(score(tried), tried.shape).copy()
    values[:, _POINTS // 2] *= 1 + 1e-12  # rounding alone must not move it
    best = np.argmax(values, axis=1)[:, None]
    around = [np.clip(best + step, 0, _POINTS - 1) for step in (-1, 0, 1)]
    x = [np.take_along_axis(tried, index, 1) for index in around]
    if not vertex:
        return x[1], [x[0], x[2]]
    y = [np.take_along_axis(values, index, 1) for index in around]
    left, right = (x[1] - x[0]) * (y[1] - y[2]), (x[2] - x[1]) * (y[1] - y[0])
    with np.errstate(divide="ignore", invalid="ignore"):
        top = x[1] + ((x[2] - x[1]) * right - (x[1] - x[0]) * left) / (2 * (left + right))
    inside = (x[0] < x[1]) & (x[1] < x[2])  # at an end of the range there is no parabola
    return np.where(inside & (top > x[0]) & (top < x[2]), top, x[1]), [x[0], x[2]]


def _joined(many: FloatArray, one: FloatArray, cases: int) -> FloatArray:
    array = np.concatenate([np.broadcast_to(x, (cases, *x.shape[1:])) for x in (many, one)], axis=1)
    array.setflags(write=False)
    return array
