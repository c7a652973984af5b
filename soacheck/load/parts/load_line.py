"""Loci of a resistive stage: the load line held at any of its points, and a sine that swings along a line."""

from __future__ import annotations

import numpy as np

from soacheck.device.ratings import Device
from soacheck.locus import Locus, Use
from soacheck.trace import FloatArray, distinct

HELD_POINTS = 257  # along the line, even in voltage: the top of the parabola is exact, an SOA slope of 5 within 1e-4
SEGMENTS = 256  # of one period of a sine: the mean of its square is met within 1e-4


def held_voltages(supply: FloatArray, v_on: FloatArray, device: Device) -> FloatArray:
    """Voltages along the load line from the on-state to cut-off, both ends and half the supply among them.

    Parameters
    ----------
    supply, v_on : ndarray, shape (case,)
        Supply and on-state drop at the lower end of the line. [V]
    device : Device
        The corners of its printed safe-area curves are met as well.

    Returns
    -------
    ndarray, shape (case, member)
        Rising along the member axis. [V]
    """
    supply, v_on = np.broadcast_arrays(supply, np.minimum(v_on, supply))
    even = v_on[:, None] + (supply - v_on)[:, None] * np.linspace(0.0, 1.0, HELD_POINTS)
    corners = distinct(np.concatenate([curve.points[:, 0] for curve in device.soa] or [np.zeros(0)]))
    own = np.concatenate([supply[:, None] / 2, np.broadcast_to(corners, (supply.size, corners.size))], axis=1)
    return np.sort(np.concatenate([even, np.clip(own, v_on[:, None], supply[:, None])], axis=1), axis=1)


def held_points(v: FloatArray, i: FloatArray) -> Locus:
    """Points each of which may be held for ever; v [V], i [A] (case, member)."""
    return Locus(t=np.zeros((1, 1, 1)), v=v[:, :, None], i=i[:, :, None], use=Use.HELD)


def clipping_amplitude(
    i_Q: FloatArray, v_Q: FloatArray, ohms: FloatArray, V_0: FloatArray, R_on: FloatArray
) -> FloatArray:
    """Greatest amplitude of a sine current about Q before it meets cut-off or the on-state V_0 + R_on*i. [A]

    Shapes broadcast; ohms is the slope of the line, v = v_Q - ohms*(i - i_Q). [ohm]
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        to_on_state = (v_Q - V_0 - R_on * i_Q) / (ohms + R_on)
    return np.asarray(np.maximum(np.minimum(i_Q, to_on_state), 0.0), dtype=np.float64)


def sine_swing(
    i_Q: FloatArray,
    v_Q: FloatArray,
    ohms: FloatArray,
    amplitude: FloatArray,
    *,
    f: FloatArray,
    share: FloatArray,
) -> Locus:
    """One period of a sine about Q; i_Q, v_Q, amplitude (case, member), ohms, f, share (case,)."""
    s = np.arange(SEGMENTS + 1) / SEGMENTS
    wave = amplitude[:, :, None] * np.sin(2 * np.pi * s)
    return Locus(
        t=s / f[:, None, None],
        v=v_Q[:, :, None] - ohms[:, None, None] * wave,
        i=np.maximum(i_Q[:, :, None] + wave, 0.0) * share[:, None, None],
        use=Use.REPEATED,
    )


def slow_swing(
    i_Q: FloatArray,
    v_Q: FloatArray,
    ohms: FloatArray,
    amplitude: FloatArray,
    *,
    share: FloatArray,
    one_line: bool,
) -> Locus:
    """The same swing at no stated frequency: any of its points may be held for ever.

    one_line: all quiescent points stand on the line of the swing; the members then run along it, v rising.
    """
    several = i_Q.shape[1] > 1
    chosen = distinct(np.linspace(0, i_Q.shape[1] - 1, 9).round()).astype(int) if several else np.array([0])
    s = np.linspace(-1.0, 1.0, 65 if several else HELD_POINTS)
    wave = np.broadcast_to(amplitude, i_Q.shape)[:, chosen, None] * s
    v = np.broadcast_to(v_Q, i_Q.shape)[:, chosen, None] - ohms[:, None, None] * wave
    i = np.maximum(i_Q[:, chosen, None] + wave, 0.0) * share[:, None, None]
    v, i = (full.reshape(full.shape[0], -1) for full in np.broadcast_arrays(v, i))
    if one_line:
        order = np.argsort(v, axis=1)
        v, i = np.take_along_axis(v, order, axis=1), np.take_along_axis(i, order, axis=1)
    return held_points(v, i)
