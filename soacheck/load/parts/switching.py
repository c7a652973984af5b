"""Locus of a switched resistive load: voltage and current are straight lines through each transition."""

from __future__ import annotations

import numpy as np

from soacheck.device.laws import CUTOFF, SATURATION
from soacheck.locus import Locus, Use
from soacheck.trace import FloatArray


def resistive_switching(
    *,
    supply: FloatArray,
    v_on: FloatArray,
    i_on: FloatArray,
    i_off: FloatArray,
    on_time: FloatArray,
    period: FloatArray,
    t_r: FloatArray,
    t_f: FloatArray,
    reverse: bool,
) -> Locus:
    """One period of a switch with a resistive load, from the start of turn-on.

    Parameters
    ----------
    supply : ndarray, shape (case,)
        Voltage while off. [V]
    v_on, i_on : ndarray, shape (case,)
        Voltage [V] and current [A] while on.
    i_off : ndarray, shape (case,)
        Leakage while off. [A]
    on_time : ndarray, shape (case,)
        From the start of turn-on to the start of turn-off. [s]
    period : ndarray, shape (case,)
        [s]
    t_r, t_f : ndarray, shape (case,)
        Duration of turn-on and turn-off. [s]
    reverse : bool
        Whether the base or gate is driven in reverse at turn-off.

    Returns
    -------
    Locus
        Seven times, one member. In a transition v + R*i stays the supply, so that each costs
        i_on*(supply + 2*v_on)*t/6.
    """
    zero = np.zeros(np.broadcast_shapes(*(np.shape(x) for x in (supply, v_on, i_on, i_off, on_time, period, t_r, t_f))))

    def path(*values: FloatArray) -> FloatArray:
        return np.stack([value + zero for value in values], axis=-1)[:, None, :]

    turn_off = np.array([False, False, False, True, True, False, False])
    return Locus(
        t=path(zero, zero, t_r, on_time, on_time + t_f, on_time + t_f, period),
        v=path(supply, supply, v_on, v_on, supply, supply, supply),
        i=path(i_off, zero, i_on, i_on, zero, i_off, i_off),
        use=Use.REPEATED,
        turn_off=turn_off if reverse else None,
        region=np.array([CUTOFF, CUTOFF, SATURATION, SATURATION, CUTOFF, CUTOFF, CUTOFF], dtype=np.int64),
    )
