"""A first look at every member of a duty: bounds of its utilisation, and what keeps it from having one."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from soacheck.limit.allowance import Lines, Share, share, shares, warmth
from soacheck.limit.duration import time_above
from soacheck.limit.hot_spot import printed_response
from soacheck.limit.judged import Judged
from soacheck.limit.path import Path, path_of
from soacheck.limit.superposition import mean_of, printed, times_of
from soacheck.limit.turn_off import TurnOff, turn_off
from soacheck.locus import Use
from soacheck.trace import BoolArray, FloatArray, IntArray

ELEMENTS = 2_000_000  # of the largest array of one piece of work
FIT = 1.01  # room for the fit of the hot spot's response


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Screen:
    """Per (case, member), measured by the dc curve or, without one, by the longest pulse.

    top: greatest share that is judged; v_top: the voltage it stands at; g, g_unknown: what `printed` gives there
    (case, member, n), nothing for held points or without pulse curves. low, high: bounds of the utilisation.
    duty_factor: the larger of the share of time above the measure and P_mean/P_peak.
    lasting: without a dc curve, active conduction that lasts or repeats beyond the longest pulse.
    beyond, zero: conducts where nothing is known, where nothing is allowed. reversed: collector below emitter. hole: a
    point of the locus is not a number.
    """

    top: FloatArray
    v_top: FloatArray
    g: FloatArray
    g_unknown: BoolArray
    low: FloatArray
    high: FloatArray
    duty_factor: FloatArray
    lasting: BoolArray
    beyond: BoolArray
    zero: BoolArray
    reversed: BoolArray
    T_unknown: BoolArray
    hole: BoolArray
    turned_off: TurnOff | None


def screen(judged: Judged, lines: Lines) -> Screen:
    """The first look, in pieces of members of bounded size."""
    locus = judged.operating.locus
    if locus is None:
        raise ValueError("a duty without a locus has no members")
    cases, members, times = judged.cases, locus.shape[1], locus.shape[2]
    width = max(1, ELEMENTS // (cases * 2 * times))
    pieces = [
        _piece(judged, lines, np.arange(start, min(start + width, members))[None]) for start in range(0, members, width)
    ]
    if len(pieces) == 1:
        return pieces[0]
    joined = {
        name: np.concatenate([getattr(piece, name) for piece in pieces], axis=1)
        for name in (
            "top",
            "v_top",
            "g",
            "g_unknown",
            "low",
            "high",
            "duty_factor",
            "lasting",
            "beyond",
            "zero",
            "reversed",
            "T_unknown",
            "hole",
        )
    }
    return Screen(**joined, turned_off=_joined([piece.turned_off for piece in pieces]))


def _piece(judged: Judged, lines: Lines, members: IntArray) -> Screen:
    measure, operating = lines.longest, judged.operating
    path = path_of(judged, members)
    if measure is None:
        raise ValueError("without curves there is nothing to screen")
    shape = path.v.shape[:2]

    def pick(a: FloatArray) -> FloatArray:
        full = np.broadcast_to(a, (judged.cases, a.shape[1]))
        if full.shape[1] == 1:
            return np.broadcast_to(full, shape)
        return np.take_along_axis(full, np.broadcast_to(members, shape), axis=1)

    one = share(measure, path)
    top, at = one.r.max(axis=2), one.r.argmax(axis=2)[..., None]
    v_top = np.take_along_axis(path.v, at, axis=2)[..., 0]
    with np.errstate(divide="ignore", invalid="ignore"):
        crest = np.nan_to_num(pick(operating.P_mean) / pick(operating.P_peak))
    density = np.maximum(time_above(path.t, one.r, 1.0, path.use), crest)
    g, g_unknown = np.ones((*shape, 0)), np.zeros((*shape, 0), dtype=np.bool_)
    if lines.widths and path.use is not Use.HELD:
        g, g_unknown = printed(lines, v_top, members)
    if path.use is Use.HELD:
        low = high = top
    else:
        warm = warmth(measure, path, one)
        whole = one.r if warm is None else one.r + warm
        mean = mean_of(path, whole) if path.use is Use.REPEATED else np.zeros(shape)
        # What is not judged warms the hot spot, but does not touch: the mean bounds nothing from below there.
        certain = warm is None and lines.dc is not None
        low = np.minimum(mean, top) if certain else np.zeros(shape)
        high = np.where(top > 0, _high(lines, path, one, density, whole.max(axis=2), g, mean), 0.0)

    return Screen(
        top=top,
        v_top=v_top,
        g=g,
        g_unknown=g_unknown,
        low=low * (1 - 1e-9),
        high=high,
        duty_factor=density,
        lasting=_lasting(lines, path),
        beyond=one.beyond & ~np.isnan(pick(measure.T)),
        zero=one.zero,
        reversed=_any(path.v < -1e-9 * judged.device.max.V_max.value[:, None, None]),
        T_unknown=np.isnan(pick(measure.T)),
        hole=_any(np.isnan(path.v + path.i)),
        turned_off=None if operating.locus is None or operating.locus.turn_off is None else turn_off(judged, path),
    )


def _high(
    lines: Lines,
    path: Path,
    one: Share,
    density: FloatArray,
    top: FloatArray,
    g: FloatArray,
    mean: FloatArray,
) -> FloatArray:
    """Upper bound of the utilisation, from the curves that a locus of this length can stay above for too long.

    Of the superposition: what happened within the last period answers with g(period) at most, what happened before with
    the mean (g grows no faster than time). top, mean: of all that warms the hot spot.
    """
    if lines.dc is None or not lines.widths:
        return top
    length = path.t[..., -1] - path.t[..., 0]
    widths, longest = np.asarray(lines.widths), float(np.max(length))
    if longest > widths[-1]:
        return top
    number = max(int(np.searchsorted(widths, longest)), 0)  # the longest curve whose next shorter width is less
    none = np.zeros((1, 1))
    r = shares(lines, path, one, density, only=sorted({0, number})).r
    times = times_of(lines)
    grown = printed_response(times, g, np.asarray([longest]))[..., 0]
    slow = np.all(np.diff(np.log(g), axis=-1) <= np.diff(np.log(times)) * (1 + 1e-9), axis=-1)
    response = np.where(slow, FIT * grown * top + (mean if path.use is Use.REPEATED else none), top)
    stays = np.maximum(np.maximum.reduce([each.max(axis=2) for each in r]), mean)
    return np.minimum(np.maximum(response, stays), top)


def _any(mask: BoolArray) -> BoolArray:
    return np.asarray(np.any(mask, axis=2), dtype=np.bool_)


def _lasting(lines: Lines, path: Path) -> BoolArray:
    active = path.active
    if lines.dc is not None:
        return np.zeros(active.shape[:2], dtype=np.bool_)
    some = active.any(axis=2)
    if path.use is not Use.ONCE:
        return np.asarray(some, dtype=np.bool_)
    t = np.broadcast_to(path.t, active.shape)
    first, last = active.argmax(axis=2), active.shape[2] - 1 - active[..., ::-1].argmax(axis=2)
    span = (np.take_along_axis(t, at[..., None], axis=2)[..., 0] for at in (last, first))
    return np.asarray(some & (next(span) - next(span) > lines.widths[-1] * (1 + 1e-9)), dtype=np.bool_)


def _joined(pieces: list[TurnOff | None]) -> TurnOff | None:
    whole = [piece for piece in pieces if piece is not None]
    if not whole:
        return None
    notes = tuple(
        replace(
            one[0],
            holds=np.concatenate(
                [np.broadcast_to(note.holds, piece.value.shape) for note, piece in zip(one, whole, strict=True)], axis=1
            ),
        )
        for one in zip(*(piece.notes for piece in whole), strict=True)
    )
    return TurnOff(
        value=np.concatenate([piece.value for piece in whole], axis=1),
        at=np.concatenate([piece.at for piece in whole], axis=1),
        concerned=np.concatenate([piece.concerned for piece in whole], axis=1),
        notes=notes,
    )
