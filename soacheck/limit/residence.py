"""Residence: how long a locus stays above each printed curve, as a reviewer reads it from the chart.

For each printed curve of pulse width t_p the longest unbroken time that the locus spends above it may not exceed the
next shorter printed pulse ("next-longer": a pulse between two curves is judged by the longer one), or, with "log-log",
no curve interpolated between printed ones may be exceeded for longer than its own t_p. Above the dc curve the longest
printed pulse counts; above the shortest one nothing is known, and longer than its own t_p is too long.
Source: reading of single-pulse charts; log-log interpolation is common practice.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from soacheck.limit.duration import HAIR, Run, bisect, longest_run
from soacheck.locus import Use
from soacheck.trace import BoolArray, FloatArray, IntArray

ROUNDS = 60  # of the search for an interpolated curve that is exceeded for longer than its own width


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Residence:
    """Shares of each distinct pulse width, rising, and of the dc curve (None: there is none) over one path."""

    t: FloatArray
    use: Use
    widths: tuple[float, ...]
    r: tuple[FloatArray, ...]
    dc: FloatArray | None
    between: Literal["next-longer", "log-log"]

    def curves(self) -> tuple[tuple[FloatArray, float], ...]:
        """Share and the time above that is too long, per printed curve: the shortest first, dc last.

        A curve that may be exceeded for as long as the next shorter pulse has a hair more; one that may not be exceeded
        for its own width, a hair less.
        """
        made = []
        for k, r in enumerate(self.r):
            own = k == 0 or self.between == "log-log"
            made.append((r, self.widths[k] * (1 - HAIR) if own else self.widths[k - 1] * (1 + HAIR)))
        if self.dc is not None and self.widths:
            made.append((self.dc, self.widths[-1] * (1 + HAIR)))
        return tuple(made)

    def fails(self, level: FloatArray) -> BoolArray:
        """Whether the locus stays too long above some curve once all its currents are divided by `level`."""
        bad = np.zeros(level.shape, dtype=np.bool_)
        for r, longest in self.curves():
            bad |= longest_run(self.t, r, level, self.use).duration > longest
        if self.between == "log-log" and len(self.r) > 1:
            bad |= self._between(level)[0]
        return bad

    def interpolated(self, width: FloatArray) -> FloatArray:
        """Share of the curve interpolated for a width (case, member) between printed ones."""
        log = np.log(np.clip(width, self.widths[0], self.widths[-1]))[..., None]
        logs = np.log(self.widths)
        at = np.clip(np.searchsorted(logs, log, side="left"), 1, len(logs) - 1)
        weight = (log - logs[at - 1]) / (logs[at] - logs[at - 1])
        low, high = (self._chosen(at + step) for step in (-1, 0))
        with np.errstate(divide="ignore", invalid="ignore"):
            mixed = np.exp((1 - weight) * np.log(low) + weight * np.log(high))
        # A point left to the current limits on one curve is left to them between it and the next.
        return np.where((low > 0) & (high > 0), mixed, 0.0)

    def _chosen(self, which: IntArray) -> FloatArray:
        answer = self.r[0]
        for k in range(1, len(self.r)):
            answer = np.where(which == k, self.r[k], answer)
        return answer

    def _between(self, level: FloatArray) -> tuple[BoolArray, FloatArray]:
        """Whether some curve between the printed ones is exceeded for longer than its own width, and which width.

        The time above a curve grows with the curve's width. From the longest width down: the time above it is the next
        width that could be too short; where that settles before it leaves the chart, it is.
        """
        width = np.full(level.shape, self.widths[-1])
        bad = np.zeros(level.shape, dtype=np.bool_)
        open_ = np.ones(level.shape, dtype=np.bool_)
        for _ in range(ROUNDS):
            lasts = longest_run(self.t, self.interpolated(width), level, self.use).duration
            bad |= open_ & (lasts >= width * (1 - HAIR)) & (lasts > 0)
            open_ &= ~bad & (lasts >= self.widths[0])
            width = np.where(open_, np.minimum(lasts, width), width)
            if not bool(np.any(open_)):
                break
        return bad | open_, width

    def utilisation(self, low: FloatArray, high: FloatArray) -> FloatArray:
        """Factor by which the currents must be divided to pass, between low (returned where it passes) and high."""
        return bisect(self.fails, low, high)

    def touching(self, level: FloatArray) -> tuple[IntArray, IntArray]:
        """Sample (case, member) that touches at the utilisation, and the number of the curve (as in `curves`).

        A curve that is interpolated between printed ones has the number of the longer of the two.
        """
        inside = level * (1 - 1e-6)
        score, at = np.full(level.shape, -np.inf), np.zeros(level.shape, dtype=np.int64)
        curve = np.zeros(level.shape, dtype=np.int64)
        candidates = [(k, r, np.full(level.shape, longest)) for k, (r, longest) in enumerate(self.curves())]
        if self.between == "log-log" and len(self.r) > 1:
            _, width = self._between(inside)
            number = np.searchsorted(self.widths, width * (1 - HAIR))
            candidates.append((-1, self.interpolated(width), width))
        for k, r, longest in candidates:
            run = longest_run(self.t, r, inside, self.use)
            over = np.where(run.duration > 0, run.duration / longest, -np.inf)
            better = over > score * (1 + HAIR)
            score, at = np.where(better, over, score), np.where(better, self._nearest(r, level, run), at)
            curve = np.where(better, number if k < 0 else k, curve)
        return at, curve

    def _nearest(self, r: FloatArray, level: FloatArray, run: Run) -> IntArray:
        """The sample of a run whose share is nearest to the level, (case, member)."""
        t = np.broadcast_to(self.t, r.shape)
        slack = 1e-9 * np.maximum(run.end - run.start, 0.0)[..., None]
        within = (t >= run.start[..., None] - slack) & (t <= run.end[..., None] + slack)
        if self.use is Use.REPEATED:
            again = t + (self.t[..., -1:] - self.t[..., :1])
            within |= (again >= run.start[..., None] - slack) & (again <= run.end[..., None] + slack)
        off = np.where(
            within & (r > 0),
            np.abs(np.log(np.maximum(r, 1e-300)) - np.log(np.maximum(level, 1e-300))[..., None]),
            np.inf,
        )
        return np.asarray(np.argmin(off, axis=2), dtype=np.int64)
