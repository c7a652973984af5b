"""One shot against the continuous rating: what its pulses add up to over any window of it."""

from __future__ import annotations

import numpy as np

from soacheck.trace import BoolArray, FloatArray

ROUNDS = 40  # of a search that ends in about five


def squared(dt: FloatArray, a: FloatArray, b: FloatArray) -> FloatArray:
    """Integral of i^2 over straight segments from a to b of length dt, broadcast shape. [A^2 s]"""
    return np.asarray(dt * (a * a + a * b + b * b) / 3, dtype=np.float64)


def pulses(t: FloatArray, i: FloatArray, allowed: FloatArray, peak: FloatArray, width: FloatArray) -> FloatArray:
    """Steady current that uses the continuous rating as much as the pulses of one shot do.

    Parameters
    ----------
    t : ndarray, shape (1 or case, 1 or member, time)
        Times, not falling. [s]
    i : ndarray, shape (case, member, time)
        Current, straight between the times, not negative. [A]
    allowed, peak : ndarray, broadcastable to (case, member)
        Continuous current and peak current allowed. [A]
    width : ndarray, broadcastable to (case, member)
        Pulse width that the peak current is stated for. [s]

    Returns
    -------
    ndarray, shape (case, member)
        allowed * the greatest u over all windows, of any length L, for which
        integral of i^2 = u^2 * (allowed^2 * L + (peak^2 - allowed^2) * width). [A]

    A single pulse at the peak rating for its whole width just meets the rating (u = 1). A train of equal pulses at
    equal distances, each within the peak rating, meets it however long as long as its rms value may flow for ever;
    with more rms than that the use grows with every pulse, towards rms/allowed.

    Range: peak >= allowed; where they are equal the greatest current counts.
    Source: our own rule; continuous and peak rating hold at once.
    """
    A2 = np.broadcast_to(allowed * allowed, i.shape[:2])[..., None]
    credit = np.broadcast_to(np.maximum(peak * peak - allowed * allowed, 0.0) * width, i.shape[:2])[..., None]
    dt, a, b = np.diff(t, axis=2), i[..., :-1], i[..., 1:]
    u2 = np.zeros_like(credit)
    for _ in range(ROUNDS):  # each round takes the window that is worst at the last u; u never falls
        length, integral = _grown(dt, a, b, np.sqrt(u2 * A2))
        over = integral - u2 * A2 * length
        lowest = np.minimum.accumulate(over, axis=2)
        end = np.argmax(over - lowest, axis=2)[..., None]
        start = np.argmax(over == np.take_along_axis(lowest, end, axis=2), axis=2)[..., None]
        E, L = (np.take_along_axis(x, end, axis=2) - np.take_along_axis(x, start, axis=2) for x in (integral, length))
        with np.errstate(divide="ignore", invalid="ignore"):
            now = np.where(E > 0, E / (A2 * L + credit), 0.0)
        done = bool(np.all(now <= u2 * (1 + 1e-12)))
        u2 = np.maximum(u2, now)
        if done:
            break
    flat = credit[..., 0] <= 0
    return np.where(flat, i.max(axis=2), np.sqrt(u2[..., 0]) * np.broadcast_to(allowed, i.shape[:2]))


def _grown(dt: FloatArray, a: FloatArray, b: FloatArray, level: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Time and integral of i^2 from the start, at the samples and where i passes a level (case, member, 1)."""
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        s = (level - a) / (b - a)
    s = np.where((s > 0) & (s < 1), s, 0.0)
    x = a + s * (b - a)
    length, integral = np.zeros((2, *a.shape[:2], 2 * a.shape[2] + 1))
    length[..., 1::2], length[..., 2::2] = s * dt, (1 - s) * dt
    integral[..., 1::2], integral[..., 2::2] = squared(s * dt, a, x), squared((1 - s) * dt, x, b)
    return length.cumsum(axis=2), integral.cumsum(axis=2)


def is_train(i: FloatArray, allowed: FloatArray) -> BoolArray:
    """Whether a current (case, member, time) goes above what is allowed (case, member) more than once."""
    above = i > allowed[..., None]
    return np.asarray(above[..., 0].astype(int) + np.sum(above[..., 1:] & ~above[..., :-1], axis=2) > 1, dtype=np.bool_)
