"""The locus as the safe area sees it: finer, with what counts told from what does not."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeVar

import numpy as np

from soacheck.device import laws
from soacheck.limit.judged import Judged
from soacheck.locus import Use
from soacheck.trace import BoolArray, FloatArray, IntArray

A = TypeVar("A", FloatArray, IntArray, BoolArray)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Path:
    """A locus with the middle of every segment put in, (case, member, time); held points have one time.

    A sample that no segment of positive length touches is no conduction: what stands before it is put in its place (at
    the start, what follows); `voltage` and `peak-current` judge it. At a marked turn-off every instant counts.
    counted: forward conduction that the safe area judges (not on, not turned off by a reverse drive, not reversed).
    conducts: more than leakage. members: which members of the duty these are, (1 or case, member).
    """

    t: FloatArray  # (1 or case, 1 or member, time)
    v: FloatArray
    i: FloatArray
    region: IntArray
    counted: BoolArray
    conducts: BoolArray
    turn_off: BoolArray
    members: IntArray
    use: Use

    @property
    def active(self) -> BoolArray:
        """Conduction in the active region or beyond it."""
        return self.counted & self.conducts


def path_of(judged: Judged, members: IntArray) -> Path:
    """Members (1 or case, some) of the locus with the middle of every segment put in."""
    locus = judged.operating.locus
    if locus is None:
        raise ValueError("a duty without a locus has no path")
    count, times = locus.shape[1:]
    shape = (judged.cases, members.shape[1], times)

    def some(a: A) -> A:
        if a.shape[1] == 1 and count > 1:
            return a
        if members.shape[0] == 1:
            return a[:, members[0]]
        full = np.broadcast_to(a, (judged.cases, *a.shape[1:]))
        return np.take_along_axis(full, members[..., None], axis=1)

    t = some(locus.t)
    step = np.diff(t, axis=2) == 0
    v, i = (np.broadcast_to(some(a), shape) for a in (locus.v, locus.i))
    marked = None if locus.turn_off is None else np.broadcast_to(some(_three(locus.turn_off)), shape)
    stated = None if locus.region is None else np.broadcast_to(some(_three(locus.region)), shape)
    lasting = _lasting(t, v + i, marked)
    if lasting is not None:
        v, i = (np.take_along_axis(a, lasting, axis=2) for a in (v, i))
        marked = None if marked is None else np.take_along_axis(marked, lasting, axis=2)
        stated = None if stated is None else np.take_along_axis(stated, lasting, axis=2)
    v, i = (_doubled(a, np.where(step, a[..., :-1], (a[..., :-1] + a[..., 1:]) / 2)) for a in (v, i))
    region = laws.regions(judged.device, v, i) if stated is None else _regions(stated, step)
    off = np.zeros(v.shape, dtype=np.bool_)
    if marked is not None:
        off = _doubled(marked, marked[..., :-1] & (marked[..., 1:] | step))
    return Path(
        t=_doubled(t, (t[..., :-1] + t[..., 1:]) / 2),
        v=v,
        i=i,
        region=region,
        turn_off=off,
        members=members,
        use=locus.use,
        counted=(region != laws.SATURATION) & (v > 0) & (i > 0) & ~off,
        conducts=i > laws.leakage_level(judged.device),
    )


def _doubled(a: A, middle: A) -> A:
    """The samples with what lies in the middle between them. In the middle of a step there is nothing: the caller
    puts the sample before it."""
    out = np.empty((*a.shape[:2], 2 * a.shape[2] - 1), dtype=a.dtype)
    out[..., ::2], out[..., 1::2] = a, middle
    return out


def _three(a: A) -> A:
    return a.reshape((1,) * (3 - a.ndim) + a.shape)


def _lasting(t: FloatArray, known: FloatArray, marked: BoolArray | None) -> IntArray | None:
    """The sample that stands for each, (case, member, time): itself, or for one that lasts 0 s the last before it that
    lasts, the first at the start. None where every one stands for itself.

    known: not a number where the sample has to stay, so that it is seen; marked: has to stay as well.
    """
    step = np.diff(t, axis=2) == 0
    if not step.any():
        return None
    end = np.ones((*step.shape[:2], 1), dtype=np.bool_)
    brief = np.concatenate([end, step], axis=2) & np.concatenate([step, end], axis=2) & ~np.isnan(known)
    if marked is not None:
        brief &= ~marked
    if not brief.any() or bool(np.any(brief.all(axis=2))):  # held, or a shot of no length at all
        return None
    each = np.where(brief, -1, np.arange(brief.shape[2]))
    before = np.maximum.accumulate(each, axis=2)
    return np.asarray(np.where(before < 0, np.argmin(brief, axis=2)[..., None], before), dtype=np.int64)


def _regions(stated: IntArray, step: BoolArray) -> IntArray:
    # Between two regions the way is through the active one.
    same = step | (stated[..., :-1] == stated[..., 1:])
    return _doubled(stated, np.where(same, stated[..., :-1], laws.ACTIVE))
