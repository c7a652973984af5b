"""Locus: the path of (v, i) across one device, and its means and peaks.

Axes are (case, member, time); an axis of length 1 broadcasts. v and i are straight lines between neighbouring
times, so power is a parabola there and every mean below is exact. Two equal times in a row make a step.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

import numpy as np

from soacheck.trace import BoolArray, FloatArray, IntArray


class Use(Enum):
    """How a locus stands in time."""

    HELD = "held"  # points each of which may be held for ever; the time axis has length 1
    ONCE = "once"  # one shot
    REPEATED = "repeated"  # one period; the last time is followed by the first


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Locus:
    """t [s], v [V], i [A], each broadcastable to (case, member, time).

    `turn_off` marks times at which a reverse-driven base or gate turns the device off, shape (time,) or broadcastable.
    `region` is the code of `soacheck.device.laws` per time, or None when v and i themselves must tell.
    """

    t: FloatArray
    v: FloatArray
    i: FloatArray
    use: Use
    turn_off: BoolArray | None = None
    region: IntArray | None = None

    def __post_init__(self) -> None:
        for name in ("t", "v", "i"):
            array = np.asarray(getattr(self, name), dtype=np.float64)
            if array.ndim != 3:
                raise ValueError(f"locus: {name} needs the axes (case, member, time)")
            if array.flags.writeable:
                array = array.copy()
                array.setflags(write=False)
            object.__setattr__(self, name, array)
        np.broadcast_shapes(self.t.shape, self.v.shape, self.i.shape)
        if self.use is Use.HELD and self.shape[2] != 1:
            raise ValueError("locus: a held locus is points, its time axis has length 1")
        if self.use is not Use.HELD and (self.shape[2] < 2 or not bool(np.all(np.diff(self.t, axis=2) >= 0))):
            raise ValueError("locus: times must not fall, and at least two are needed")

    @property
    def shape(self) -> tuple[int, int, int]:
        """(case, member, time) after broadcasting."""
        case, member, time = np.broadcast_shapes(self.t.shape, self.v.shape, self.i.shape)
        return case, member, time

    @property
    def p(self) -> FloatArray:
        """Power at the sample times. [W]"""
        return self.v * self.i

    @property
    def duration(self) -> FloatArray:
        """Length of the period or of the shot, (case, member); 0 for held points. [s]"""
        return self.t[:, :, -1] - self.t[:, :, 0]

    def refined(self, parts: int) -> Locus:
        """The same path with every segment of some length cut into `parts`, finer towards both ends of the segment.

        A temperature or a hot spot may peak inside a ramp; the cosine spacing catches steep starts as well. Between two
        samples of different region the inner ones are active, between two turn-off marks they are marked.
        """
        if self.use is Use.HELD or parts < 2:
            return self
        dt = np.diff(self.t, axis=2)
        long = np.any(dt > 0, axis=(0, 1))
        fraction = 0.5 * (1.0 - np.cos(np.pi * np.arange(parts) / parts))
        start = np.repeat(np.arange(dt.shape[2]), np.where(long, parts, 1))
        s = np.concatenate([fraction if cut else fraction[:1] for cut in long])
        end = start + 1

        def straight(a: FloatArray) -> FloatArray:
            full = np.broadcast_to(a, (*a.shape[:2], dt.shape[2] + 1))
            inner = full[..., start] + s * (full[..., end] - full[..., start])
            return np.concatenate([inner, full[..., -1:]], axis=2)

        turn_off, region = self.turn_off, self.region
        if turn_off is not None:
            inner = np.where(s == 0, turn_off[..., start], turn_off[..., start] & turn_off[..., end])
            turn_off = np.concatenate([inner, turn_off[..., -1:]], axis=-1)
        if region is not None:
            same = (s == 0) | (region[..., start] == region[..., end])
            region = np.concatenate([np.where(same, region[..., start], 1), region[..., -1:]], axis=-1)
        return Locus(
            t=straight(self.t),
            v=straight(self.v),
            i=straight(self.i),
            use=self.use,
            turn_off=turn_off,
            region=region,
        )

    @property
    def p_mid(self) -> FloatArray:
        """Power in the middle of each segment. [W]"""
        v, i = self.v, self.i
        return np.asarray((v[..., :-1] + v[..., 1:]) * (i[..., :-1] + i[..., 1:]) / 4, dtype=np.float64)

    def _mean(self, a: FloatArray, b: FloatArray) -> FloatArray:
        """Exact time mean of the product of two straight-line quantities, (case, member)."""
        if self.use is Use.HELD:
            return (a * b)[:, :, 0]
        dt = np.diff(self.t, axis=2)
        times = self.shape[2]
        a, b = (np.broadcast_to(x, (*x.shape[:2], times)) for x in (a, b))
        a0, a1, b0, b1 = a[..., :-1], a[..., 1:], b[..., :-1], b[..., 1:]
        area = dt * (2 * a0 * b0 + a0 * b1 + a1 * b0 + 2 * a1 * b1) / 6
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.asarray(np.sum(area, axis=2) / self.duration, dtype=np.float64)

    def _full(self, a: FloatArray) -> FloatArray:
        return np.broadcast_to(a, self.shape)

    @property
    def p_mean(self) -> FloatArray:
        """Mean power, (case, member). [W]"""
        return np.broadcast_to(self._mean(self.v, self.i), self.shape[:2])

    @property
    def i_mean(self) -> FloatArray:
        """Mean current, (case, member). [A]"""
        return np.broadcast_to(self._mean(self.i, np.ones((1, 1, 1))), self.shape[:2])

    @property
    def i_rms(self) -> FloatArray:
        """Root-mean-square current, (case, member). [A]"""
        return np.broadcast_to(np.sqrt(np.maximum(self._mean(self.i, self.i), 0.0)), self.shape[:2])

    @property
    def p_peak(self) -> FloatArray:
        """Greatest instantaneous power, inside the segments too, (case, member). [W]"""
        p = self._full(self.p)
        peak: FloatArray = p.max(axis=2)
        if self.use is Use.HELD:
            return peak
        v, i = self._full(self.v), self._full(self.i)
        dv, di = np.diff(v, axis=2), np.diff(i, axis=2)
        with np.errstate(divide="ignore", invalid="ignore"):
            s = -(dv * i[..., :-1] + di * v[..., :-1]) / (2 * dv * di)
        lasts = np.diff(self.t, axis=2) > 0  # a step takes no time: nothing lies between its two points
        s = np.where((s > 0) & (s < 1) & lasts, s, 0.0)
        inner = (v[..., :-1] + s * dv) * (i[..., :-1] + s * di)
        return np.asarray(np.maximum(peak, inner.max(axis=2)), dtype=np.float64)

    @property
    def v_peak(self) -> FloatArray:
        """Greatest voltage, (case, member). [V]"""
        return np.asarray(self._full(self.v).max(axis=2), dtype=np.float64)

    @property
    def i_peak(self) -> FloatArray:
        """Greatest current, (case, member). [A]"""
        return np.asarray(self._full(self.i).max(axis=2), dtype=np.float64)
