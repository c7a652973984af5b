"""The hot spot's own step response, read from the family of safe-area curves at one voltage.

What the curves allow for a pulse of width t_p is, turned over, how far the hottest cell has come after t_p on its way
to what dc does to it: g(t_p) = I_dc/I(t_p), straight on log-log paper between the printed pulses, dc placed one decade
above the longest, and constant below the shortest. Each straight piece of it is smooth and is carried by a few
first-order modes, as Z_th is; they start where the piece starts and are taken back where it ends. So the bends are as
sharp as they are drawn: one sum of modes for the whole of g rounds them off by 5 to 10 %.
Source: our own derivation; it rests on superposition and on the curves alone.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise

import numpy as np

from soacheck.trace import FloatArray, IntArray

TAUS_PER_DECADE = 2
TIMES_PER_DECADE = 12  # of a piece, besides its ends
SHORTER, LONGER = 4.0, 3.0  # how far the time constants of a piece go beyond its ends
SMALLEST = 1e-6  # singular value that counts, of the greatest


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class HotSpot:
    """g(t) = offset + sum over pieces of sum(gain * (1 - exp(-u/tau))), u the part of t that lies in the piece.

    times (n,): printed pulses and dc, the ends of the n - 1 pieces [s]. tau (mode,) [s].
    gain (case, member, piece, mode); offset (case, member): g of the shortest printed pulse.
    short (case, member): what the sum lacks of g at worst, as a factor of 1 or more.
    """

    times: FloatArray
    tau: FloatArray
    gain: FloatArray
    offset: FloatArray
    short: FloatArray

    @property
    def shortest(self) -> float:
        """The shortest printed pulse. [s]"""
        return float(self.times[0])

    @property
    def delayed(self) -> FloatArray:
        """Gains of the modes that answer `times` later, (case, member, n, mode).

        What a mode has gone through up to the end of its piece is taken back there: it has decayed by then.
        """
        gone = np.exp(-np.diff(self.times)[:, None] / self.tau)
        none = np.zeros((*self.offset.shape, 1, len(self.tau)))
        kept, taken = np.concatenate([self.gain, none], axis=2), np.concatenate([none, self.gain * gone], axis=2)
        return np.asarray(kept - taken, dtype=np.float64)

    def step(self, t: FloatArray) -> FloatArray:
        """g at times t (time,), (case, member, time)."""
        lengths = np.diff(self.times)[:, None]
        part = np.clip(np.asarray(t) - self.times[:-1, None], 0.0, lengths)
        grown = -np.expm1(-part[:, None, :] / self.tau[:, None])
        return np.asarray(self.offset[..., None] + np.einsum("...km,kmt->...t", self.gain, grown), dtype=np.float64)


def printed_response(times: FloatArray, g: FloatArray, t: FloatArray) -> FloatArray:
    """g at times t (time,), straight on log-log paper between `times` (n,), constant outside; g (..., n)."""
    at = np.clip(np.searchsorted(times, t, side="right"), 1, max(len(times) - 1, 1))
    if len(times) == 1:
        return np.broadcast_to(g, (*g.shape[:-1], len(t)))
    weight = np.clip(np.log(t / times[at - 1]) / np.log(times[at] / times[at - 1]), 0.0, 1.0)
    return np.asarray(np.exp((1 - weight) * np.log(g[..., at - 1]) + weight * np.log(g[..., at])), dtype=np.float64)


def fit(times: FloatArray, g: FloatArray) -> HotSpot:
    """Modes of a printed response.

    Parameters
    ----------
    times : ndarray, shape (n,)
        Printed pulse widths and the time that stands for dc, rising. [s]
    g : ndarray, shape (case, member, n)
        Response at those times, above 0, not falling, 1 at the last. [-]

    Returns
    -------
    HotSpot
        Equal to g at the printed pulses, at once and in the end; between them, times `short`, on or above g.

    Range: any number of cases and members in one call; with printed pulses within 3 decades of each other, and g no
    steeper than time to the power of 1.5, what is on or above g is so by 0.5 % at most.
    """
    offset, short = g[..., 0], np.ones(g.shape[:-1])
    pieces = [_piece(float(start), float(end)) for start, end in pairwise(times)]
    first = min((numbers[0] for numbers, _, _ in pieces), default=0)
    count = max((numbers[-1] + 1 - first for numbers, _, _ in pieces), default=0)
    tau = _taus(np.arange(first, first + count))
    gain = np.zeros((*offset.shape, len(pieces), count))
    for k, (numbers, t, solve) in enumerate(pieces):
        wanted = printed_response(times, g, t)
        rise = g[..., k + 1] - g[..., k]
        grown = -np.expm1(-(t[:, None] - times[k]) / _taus(numbers))
        made = np.einsum("mt,...t->...m", solve, wanted - g[..., k, None])
        reached = made @ grown[-1]
        made = made * np.where(reached > 0, rise / np.where(reached > 0, reached, 1.0), 0.0)[..., None]
        gain[..., k, numbers - first] = made
        lacking = wanted / (g[..., k, None] + np.einsum("tm,...m->...t", grown, made))
        short = np.maximum(short, lacking.max(axis=-1))
    return HotSpot(times=times, tau=tau, gain=gain, offset=offset, short=short)


def _taus(numbers: IntArray) -> FloatArray:
    return np.asarray(10.0 ** (numbers / TAUS_PER_DECADE), dtype=np.float64)


@lru_cache(maxsize=64)
def _piece(start: float, end: float) -> tuple[IntArray, FloatArray, FloatArray]:
    """Of one straight piece: numbers of its time constants, times (time,), and what turns a rise into gains."""
    low = math.floor(TAUS_PER_DECADE * math.log10(start / SHORTER))
    high = math.ceil(TAUS_PER_DECADE * math.log10(end * LONGER))
    numbers = np.arange(low, high + 1, dtype=np.int64)
    count = max(round(np.log10(end / start) * TIMES_PER_DECADE), 8)
    # Finer towards the start, where the modes begin.
    u = np.geomspace((end - start) * 1e-3, end - start, 8)[:-1]
    t = np.unique(np.concatenate([np.geomspace(start, end, count + 1), start + u]))
    weight = (t / start) ** -0.5
    grown = -np.expm1(-(t[:, None] - start) / _taus(numbers)) * weight[:, None]
    solve = np.linalg.pinv(grown, rcond=SMALLEST) * weight
    return numbers, t, np.asarray(solve, dtype=np.float64)
