"""How a complementary pair shares the load current around the crossover.

The bias spreader holds the two control voltages, emitter (source) resistors included, at the sum that they
have when idle. Each law returns the current of both halves for any load current; nothing is cut off by hand.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from soacheck.device.laws import BOLTZMANN_OVER_CHARGE
from soacheck.trace import FloatArray

T_CROSSOVER = 298.15  # [K] temperature of the thermal voltage; a hot pair crosses over a little more softly
_STEPS = 200  # never needed: Newton's steps on a convex function are about four, some twenty at worst
_LAST = 1e-8  # a step this small leaves an error of half its square, which is below rounding


class Pair(NamedTuple):
    """Currents of the two halves, both positive, upper - lower = load current. [A]"""

    upper: FloatArray
    lower: FloatArray


def thermal_voltage(junctions: int = 1) -> float:
    """Thermal voltage of so many base-emitter junctions in series at `T_CROSSOVER`. [V]"""
    return junctions * BOLTZMANN_OVER_CHARGE * T_CROSSOVER


def class_b_pair(i_load: npt.ArrayLike) -> Pair:
    """Ideal class B: one half carries the load current, the other none.

    Parameters
    ----------
    i_load : array_like, shape (...)
        Load current of one pair, positive out of the upper half. [A]

    Returns
    -------
    Pair
        Currents of the upper and lower half, shape (...). [A]

    Range: any.
    Source: definition of class B.
    """
    i = np.asarray(i_load, dtype=np.float64)
    return Pair(np.maximum(i, 0.0), np.maximum(-i, 0.0))


def exponential_pair(i_load: npt.ArrayLike, I_Q: npt.ArrayLike, R_E: npt.ArrayLike, V_T: float) -> Pair:
    """Class AB of two exponential devices with emitter resistors, exact.

    The bias loop V_T ln(i_u/I_s) + R_E i_u + V_T ln(i_l/I_s) + R_E i_l keeps its idle value, so that I_s
    drops out: with x = i_load/(2 I_Q), s = (i_u + i_l)/(2 I_Q), r = 2 R_E I_Q/V_T and g = ln(i_u i_l/I_Q^2)

        g + r (sqrt(x^2 + exp(g)) - 1) = 0,      s = sqrt(x^2 + exp(g)).

    The left side rises and is convex in g and its root is at most 0, so Newton's steps, kept below 0, converge.

    Parameters
    ----------
    i_load : array_like, shape (...)
        Load current of one pair, positive out of the upper half. [A]
    I_Q : array_like, shape (...)
        Idle current of one pair; 0 is ideal class B. [A]
    R_E : array_like, shape (...)
        Emitter resistor of each device. [ohm]
    V_T : float
        Thermal voltage, twice that for a Darlington. [V]

    Returns
    -------
    Pair
        Currents of the upper and lower half, shape (...). [A]

    Range: I_Q >= 0, R_E >= 0.
    Source: the exponential law of the base-emitter junction (Sedra & Smith, Microelectronic Circuits, 5th
    ed., 14.4) with the resistors added to the loop; own derivation.
    """
    i, idle, resistor = np.broadcast_arrays(
        np.asarray(i_load, dtype=np.float64),
        np.asarray(I_Q, dtype=np.float64),
        np.asarray(R_E, dtype=np.float64),
    )
    if not np.any(idle > 0):
        return class_b_pair(i)
    some = np.where(idle > 0, idle, 1.0)
    x = np.abs(i) / (2 * some)
    r = 2 * resistor * some / V_T
    square = x * x
    g = _log_product(square, r)
    product = np.exp(g)
    total = np.sqrt(square + product)
    more = some * (total + x)
    with np.errstate(invalid="ignore", under="ignore"):
        less = some * product / (total + x)  # the difference total - x without its cancellation
    ideal = class_b_pair(i)
    upper = np.where(i >= 0, more, less)
    lower = np.where(i >= 0, less, more)
    return Pair(np.where(idle > 0, upper, ideal.upper), np.where(idle > 0, lower, ideal.lower))


def _log_product(square: FloatArray, r: FloatArray) -> FloatArray:
    """The root g of g + r (sqrt(square + exp(g)) - 1), shapes broadcast.

    The second derivative is at most twice (first - 1): a step e away from the root leaves at most e^2/2.
    """
    g = -r * (np.sqrt(square + 1.0) - 1.0)  # not above the root; put in once more, not below it
    g = np.minimum(-r * (np.sqrt(square + np.exp(g)) - 1.0), 0.0)
    for _ in range(_STEPS):
        product = np.exp(g)
        root = np.sqrt(square + product)
        slope = r * product
        slope /= 2 * root + np.finfo(float).tiny
        slope += 1.0
        root -= 1.0
        root *= r
        root += g
        step = root / slope
        g = np.minimum(g - step, 0.0)  # the root lies below 0, the left side there above it
        if bool(np.all(np.abs(step) <= _LAST * (1.0 + np.abs(g)))):
            break
    return np.asarray(g, dtype=np.float64)


def square_law_pair(i_load: npt.ArrayLike, I_Q: npt.ArrayLike) -> Pair:
    """Class AB of two equal square-law devices without source resistors.

    sqrt(i_u) + sqrt(i_l) keeps its idle value 2 sqrt(I_Q) until one half is off, at a load current of 4 I_Q;
    the transconductance drops out. Source resistors would need it and lower both currents between idle and
    cut-off, so leaving them out of the crossover errs to more current.

    Parameters
    ----------
    i_load : array_like, shape (...)
        Load current of one pair, positive out of the upper half. [A]
    I_Q : array_like, shape (...)
        Idle current of one pair; 0 is ideal class B. [A]

    Returns
    -------
    Pair
        Currents of the upper and lower half, shape (...). [A]

    Range: I_Q >= 0.
    Source: the square law of the MOSFET in saturation; own derivation.
    """
    i, idle = np.broadcast_arrays(np.asarray(i_load, dtype=np.float64), np.asarray(I_Q, dtype=np.float64))
    ideal = class_b_pair(i)
    both = np.abs(i) < 4 * idle
    some = np.where(both, idle, 1.0)
    y = np.where(both, i, 0.0) / (4 * some)
    return Pair(np.where(both, some * (1 + y) ** 2, ideal.upper), np.where(both, some * (1 - y) ** 2, ideal.lower))
