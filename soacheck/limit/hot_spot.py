"""The hot spot's own step response, read from the family of safe-area curves at one voltage.

What the curves allow for a pulse of width t_p is, turned over, how far the hottest cell has come after t_p on its way
to what dc does to it: g(t_p) = I_dc/I(t_p), straight on log-log paper between the printed pulses, dc placed one decade
above the longest, and constant below the shortest. The same sum of first-order modes that carries Z_th carries g; its
gains are not all positive, because g stands still below the shortest pulse and past dc, which no passive network does.
Source: our own derivation; it rests on superposition and on the curves alone.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.trace import FloatArray

TAUS_PER_DECADE = 3
TIMES_PER_DECADE = 10
SHORTER, LONGER = 8.0, 2.0  # how far the time constants go beyond the first and the last time of g
SMOOTH = 1e-6  # ridge on the gains over the local g: keeps neighbouring gains from fighting
AT_PRINTED = 10.0  # weight of a printed pulse against a time between
AT_END = 1e4  # weight of reaching dc in the end


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class HotSpot:
    """g(t) = offset + sum(gain * (1 - exp(-t/tau))) of each case and member.

    tau (mode,) [s]; gain (case, member, mode); offset (case, member): g of the shortest printed pulse.
    short (case, member): what the sum lacks at a printed pulse at worst, as a factor of 1 or more.
    """

    tau: FloatArray
    gain: FloatArray
    offset: FloatArray
    short: FloatArray

    @property
    def shortest(self) -> float:
        """The shortest printed pulse. [s]"""
        return float(self.tau[0] * SHORTER)

    def step(self, t: FloatArray) -> FloatArray:
        """g at times t (time,), (case, member, time)."""
        return np.asarray(self.offset[..., None] - self.gain @ np.expm1(-t / self.tau[:, None]), dtype=np.float64)


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
        The sum of modes nearest to g in relative least squares, equal to g at once and in the end.

    Range: any number of cases and members in one call; printed pulses are met to about 1 %, bends to 4 %.
    """
    first, last = times[0], times[-1]
    t = np.geomspace(first / 30, last * 30, round(np.log10(900 * last / first) * TIMES_PER_DECADE) + 1)
    t = np.sort(np.concatenate([t, times]))
    count = round(np.log10(SHORTER * LONGER * last / first) * TAUS_PER_DECADE) + 1
    tau = np.geomspace(first / SHORTER, last * LONGER, count)
    target, scale = printed_response(times, g, t), printed_response(times, g, tau)
    weight = np.where(np.isin(t, times[:-1]), AT_PRINTED, 1.0) / target
    offset = g[..., 0]
    rows = -np.expm1(-t[:, None] / tau) * weight[..., None] * scale[..., None, :]
    seen = np.swapaxes(rows, -1, -2)
    normal = seen @ rows + SMOOTH * np.eye(count) + AT_END * scale[..., :, None] * scale[..., None, :]
    right = (
        seen @ ((target - offset[..., None]) * weight)[..., None]
        + AT_END * (scale * (1 - offset)[..., None])[..., None]
    )
    gain = np.linalg.solve(normal, right)[..., 0] * scale
    spot = HotSpot(tau=tau, gain=gain, offset=offset, short=np.ones(offset.shape))
    reached = spot.step(times[:-1]) if len(times) > 1 else g
    wanted = g[..., :-1] if len(times) > 1 else g
    return HotSpot(tau=tau, gain=gain, offset=offset, short=np.maximum(1.0, (wanted / reached).max(axis=-1)))
