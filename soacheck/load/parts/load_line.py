"""Loci of a resistive stage: the load line held at any of its points, and a sine that swings along a line."""

from __future__ import annotations

import numpy as np

from soacheck.device.ratings import Device
from soacheck.locus import Locus, Use
from soacheck.trace import FloatArray, distinct

HELD_POINTS = 257  # along the line, even in voltage: the top of the parabola is exact, an SOA slope of 5 within 1e-4
_FOLLOWED = 9  # swings about different quiescent points that are followed from end to end
_BETWEEN = 4  # quiescent points taken for each one: an end of the swing that turns between two is met within 0.1 %
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


def closer(along: FloatArray) -> FloatArray:
    """The values (case, member), and three more between each two, straight; a single one stays alone."""
    if along.shape[1] == 1:
        return along
    steps = np.arange(_BETWEEN) / _BETWEEN
    inner = along[:, :-1, None] + np.diff(along, axis=1)[:, :, None] * steps
    return np.concatenate([inner.reshape(len(along), -1), along[:, -1:]], axis=1)


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

    A few swings are followed closely, of every one both ends and the point of greatest dissipation are met.
    one_line: all quiescent points stand on the line of the swing; the members then run along it, v rising.
    """
    count = i_Q.shape[1]
    chosen = distinct(np.linspace(0, count - 1, _FOLLOWED).round()).astype(int)
    most = np.broadcast_to(amplitude, np.broadcast_shapes(amplitude.shape, i_Q.shape))
    even = most[:, chosen, None] * np.linspace(-1.0, 1.0, 65 if count > 1 else HELD_POINTS)
    top = np.clip((v_Q / ohms[:, None] - i_Q) / 2, -most, most)  # where v is ohms times i, or as near as it comes
    wave, number = even.reshape(len(even), -1), np.repeat(chosen, even.shape[2])
    if count > 1:
        rows = max(len(top), len(most))
        ends = [np.broadcast_to(x, (rows, count)) for x in (-most, top, most)]
        wave = np.concatenate([np.broadcast_to(wave, (rows, wave.shape[1])), *ends], axis=1)
        number = np.concatenate([number, np.tile(np.arange(count), 3)])
    v = np.broadcast_to(v_Q, (len(v_Q), count))[:, number] - ohms[:, None] * wave
    i = np.maximum(i_Q[:, number] + wave, 0.0) * share[:, None]
    v, i = np.broadcast_arrays(v, i)
    if one_line:
        order = np.argsort(v, axis=1)
        v, i = np.take_along_axis(v, order, axis=1), np.take_along_axis(i, order, axis=1)
    return held_points(v, i)
