"""How long something lasts without a break, and the search that uses it.

A quantity r over time is straight between its samples; two equal times make a step. The period of a repeated locus
wraps round. A held point lasts for ever.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from soacheck.locus import Use
from soacheck.trace import BoolArray, FloatArray, IntArray

STEPS = 36  # of a bisection: to 2e-10 for a ratio of 1e6 between its ends
HAIR = 1e-9  # relative, when a duration is compared with a printed pulse width


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Run:
    """Longest unbroken time above a level [s], and when it begins and ends, (case, member); 0 where there is none.

    A run across the end of a period ends after t[-1]; infinite when r never comes down.
    """

    duration: FloatArray
    start: FloatArray
    end: FloatArray


def longest_run(t: FloatArray, r: FloatArray, level: FloatArray, use: Use) -> Run:
    """Longest unbroken time that r spends above a level.

    Parameters
    ----------
    t : ndarray, shape (1 or case, 1 or member, time)
        Times, not falling. [s]
    r : ndarray, shape (case, member, time)
        Quantity, finite.
    level : ndarray, shape (case, member)
        Level, in the unit of r.
    use : Use
        Whether the locus is held, passes once or repeats.

    Returns
    -------
    Run
        Longest run above the level. [s]
    """
    above = r > level[..., None]
    everywhere = above.all(axis=2)
    first = np.broadcast_to(t[..., 0], everywhere.shape)
    if use is Use.HELD:
        return Run(duration=np.where(everywhere, np.inf, 0.0), start=first, end=first)
    if not above.any():
        zero = np.zeros(everywhere.shape)
        return Run(duration=zero, start=first, end=first)
    period = t[..., -1:] - t[..., :1]
    if use is Use.REPEATED:
        t = np.concatenate([t, t + period], axis=2)
        r, above = np.concatenate([r, r], axis=2), np.concatenate([above, above], axis=2)
    before, after = above[..., :-1], above[..., 1:]
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        part = (level[..., None] - r[..., :-1]) / np.diff(r, axis=2)
    cross = t[..., :-1] + np.diff(t, axis=2) * np.where(before == after, 0.0, part)
    begins = np.concatenate(
        [np.where(above[..., :1], t[..., :1], -np.inf), np.where(after & ~before, cross, -np.inf)], axis=2
    )
    begun = np.maximum.accumulate(begins, axis=2)
    ends = np.where(after, t[..., 1:], cross)
    starts = np.where(before, begun[..., :-1], begun[..., 1:])
    lasts = np.where(before | after, ends - starts, 0.0)
    at = np.argmax(lasts, axis=2)[..., None]
    duration, start, end = (np.take_along_axis(a, at, axis=2)[..., 0] for a in (lasts, starts, ends))
    if use is Use.REPEATED:
        duration = np.where(everywhere, np.inf, np.minimum(duration, period[..., 0]))
    return Run(duration=duration, start=start, end=end)


def time_above(t: FloatArray, r: FloatArray, level: float, use: Use) -> FloatArray:
    """Share of the whole time that r spends above a level, (case, member). [1]"""
    above = r > level
    if use is Use.HELD:
        return above[..., 0].astype(np.float64)
    a, b = r[..., :-1], r[..., 1:]
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        part = np.abs((np.maximum(a, b) - level) / (b - a))
    share = np.where(above[..., :-1] & above[..., 1:], 1.0, np.where(above[..., :-1] != above[..., 1:], part, 0.0))
    dt = np.diff(t, axis=2)
    return np.asarray(np.sum(share * dt, axis=2) / np.sum(dt, axis=2), dtype=np.float64)


def bisect(fails: Callable[[FloatArray], BoolArray], low: FloatArray, high: FloatArray) -> FloatArray:
    """Smallest level between low and high that does not fail, (case, member).

    `fails` is true below some level and false above it. Where `low` does not fail, low is returned; where even
    `high` fails, high. The search halves on a logarithmic scale.
    """
    low, high = np.broadcast_arrays(np.asarray(low, dtype=np.float64), np.asarray(high, dtype=np.float64))
    tiny = np.maximum(high, 1e-30) * 1e-6
    bottom, top = np.maximum(low, tiny), np.maximum(high, tiny)
    answer = np.where(fails(bottom), top, np.minimum(low, top))
    open_ = answer > bottom
    if not bool(np.any(open_)):
        return np.asarray(answer)
    for _ in range(STEPS):
        middle = np.sqrt(bottom * top)
        bad = fails(middle)
        bottom, top = np.where(bad, middle, bottom), np.where(bad, top, middle)
    return np.where(open_, top, answer)


def exact_where_it_matters(
    lower: FloatArray, upper: FloatArray, evaluate: Callable[[IntArray], FloatArray], *, below: float, width: int = 8
) -> tuple[FloatArray, BoolArray]:
    """Values per (case, member), exact for every member that can be the worst of its case.

    lower, upper: bounds that are cheap to have. evaluate(pick): values of the members pick (case, width).
    below: a member whose upper bound is above this level is always evaluated; others only while they can still be
    the worst. Returns the values (the lower bound where not evaluated) and which ones are exact.
    """
    value, done = np.array(lower), np.zeros(lower.shape, dtype=np.bool_)
    width = min(width, lower.shape[1])
    while True:
        best = np.minimum(value.max(axis=1, keepdims=True), below)
        rest = np.where(~done & (upper > best * (1 + 1e-12)), upper, -np.inf)
        if not bool(np.any(rest > -np.inf)):
            return np.where(np.isnan(upper), np.nan, value), done
        pick = np.argpartition(-rest, width - 1, axis=1)[:, :width]
        np.put_along_axis(value, pick, evaluate(pick), axis=1)
        np.put_along_axis(done, pick, True, axis=1)
