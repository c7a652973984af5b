"""Safe-area geometry: what a printed curve allows at a voltage and a temperature.

A printed curve is straight between its points on log-log paper. Its flat is the run of highest current;
what stands left of it (an on-resistance or saturation line) is for display only, and right of the last
point nothing is known.

With temperature the curve falls: the part below the flat by the second-breakdown factor of the device's
convention, and everything by the dissipation line (T_j_max - T)/(Z*V). A flat is not scaled. Where the flat
ends, the scaled line below it goes on to the left under the flat, at its own slope and never flatter than
constant power: otherwise the allowance would jump by the whole factor at the corner, and a hot device would
keep its cold corner power.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.device.ratings import SafeAreaCurve, SafeAreaDerating
from soacheck.trace import BoolArray, FloatArray

_TINY = 1e-12  # [V] below this the flat holds; keeps log(v) finite


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Allowed:
    """Allowance of one curve; the arrays share the broadcast shape of v and T.

    current: [A], NaN right of the last point or where an input is not a number.
    rating_limited: the allowance is the current rating; then the current limits judge, not the safe area.
    A flat that `reading` lowers below the rating is a curve like any other.
    """

    current: FloatArray
    rating_limited: BoolArray


def effective_points(curve: SafeAreaCurve) -> FloatArray:
    """The points that count, from the end of the flat on, lowered by `reading`.

    Returns
    -------
    ndarray, shape (point, 2)
        Voltage [V] and current [A]; the first is the corner: left of it the curve is flat.
    """
    amps = curve.points[:, 1]
    corner = int(np.flatnonzero(amps == amps.max())[-1])
    points = curve.points[corner:].copy()
    points[:, 1] *= 1.0 - curve.reading
    return points


def curve_current(points: FloatArray, v: FloatArray) -> FloatArray:
    """Current of a log-log curve at voltages: flat left of the first point, NaN right of the last.

    Parameters
    ----------
    points : ndarray, shape (point, 2)
        Voltage [V], rising, and current [A], both positive (`effective_points`).
    v : ndarray, any shape
        Voltage. [V]

    Returns
    -------
    ndarray, shape of v
        Current. [A]
    """
    v = np.asarray(v, dtype=np.float64)
    inside = np.exp(_log_current(points, np.log(np.maximum(v, _TINY))))
    inside = np.where(v <= points[0, 0], points[0, 1], inside)  # exactly: a tie with the rating is the rating
    return np.where(v <= points[-1, 0], inside, np.nan)


def printed_current(curve: SafeAreaCurve, v: FloatArray) -> FloatArray:
    """The curve as printed, less `reading`, at its own temperature; for reverse-bias areas too. [A]"""
    return curve_current(effective_points(curve), v)


def breakdown_factor(
    derating: SafeAreaDerating, T: FloatArray, T_ref: float, T_j_max: FloatArray | float
) -> FloatArray:
    """Second-breakdown factor at a temperature, between 0 and 1.

    Parameters
    ----------
    derating : SafeAreaDerating
        The device's convention.
    T : ndarray, any shape
        Temperature of the curve's node. [K]
    T_ref : float
        Temperature that the curve was drawn for. [K]
    T_j_max : ndarray or float, broadcastable to T
        Rating of the junction temperature. [K]

    Returns
    -------
    ndarray, broadcast shape
        Factor. [-]  NaN where T is not a number.

    Range: an own curve is held below its first temperature; above its last one the cautious convention
    takes over where it is lower. Source: data sheets of bipolar switching and linear types, which draw the
    curve for T_case = 25 degC with a separate second-breakdown line ("own-curve") or for T_j at its maximum
    ("held").
    """
    T = np.asarray(T, dtype=np.float64)
    like_dissipation = np.asarray((T_j_max - T) / (T_j_max - T_ref), dtype=np.float64)
    if derating.convention == "held":
        factor = np.where(np.isnan(like_dissipation), np.nan, 1.0)
    elif derating.convention == "own-curve" and derating.points is not None:
        temperatures, values = derating.points[:, 0], derating.points[:, 1]
        own = np.interp(T, temperatures, values)
        covered = np.less_equal(T, temperatures[-1])
        factor = np.where(covered, own, np.minimum(own, like_dissipation))
    else:
        factor = like_dissipation
    return np.clip(factor, 0.0, 1.0)


def allowed_current(
    curve: SafeAreaCurve,
    v: FloatArray,
    *,
    T: FloatArray,
    T_j_max: float | FloatArray,
    derating: SafeAreaDerating,
    Z: FloatArray | None,
    I_rating: float | FloatArray,
    voltage_scaled: bool,
) -> Allowed:
    """What a printed forward curve allows at a voltage, once scaled to a temperature.

    Parameters
    ----------
    curve : SafeAreaCurve
        The printed curve.
    v : ndarray, any shape
        Voltage. [V]
    T : ndarray, broadcastable with v
        Temperature of the curve's node (its peak over a period). [K]
    T_j_max : ndarray or float, broadcastable with v
        Rating of the junction temperature, not a derated one. [K]
    derating : SafeAreaDerating
        The device's second-breakdown convention.
    Z : ndarray broadcastable with v, or None
        Z_th(t_p) from the junction to the curve's node, R_th for dc [K/W]; None when not known: the whole
        curve below its flat then takes the like-dissipation factor, whatever the convention.
    I_rating : ndarray or float, broadcastable with v
        Current rating for this pulse width. [A]
    voltage_scaled : bool
        MOSFET and IGBT: voltages are multiplied by the factor and currents kept. Bipolar: currents are.

    Returns
    -------
    Allowed
        Never above the printed curve, however cold.

    Range: 0 < v <= last printed voltage; NaN beyond.
    Source: bipolar: separate derating of the thermal and the second-breakdown lines as on makers' charts.
    Voltage scaling: "Understanding power MOSFET data sheet parameters", application note AN11158 rev. 4
    (2014), 3.1.2.2.
    """
    v = np.asarray(v, dtype=np.float64)
    T = np.asarray(T, dtype=np.float64)
    points = effective_points(curve)
    convention = derating if Z is not None else SafeAreaDerating(convention="like-dissipation")
    factor = breakdown_factor(convention, T, curve.T_ref, T_j_max)
    scaled = (_scaled_voltage if voltage_scaled else _scaled_current)(points, v, factor, Z is None)
    printed = curve_current(points, v)
    with np.errstate(divide="ignore", invalid="ignore"):
        heat = np.inf if Z is None else np.maximum((T_j_max - T) / (Z * np.maximum(v, _TINY)), 0.0)

    flat, rating = points[0, 1], np.asarray(I_rating, dtype=np.float64)
    current = np.minimum(np.minimum(scaled, printed), np.minimum(np.minimum(rating, flat), heat))  # NaN stays
    # Within a hair of the least: where the rating meets another line, the rating counts.
    at_rating = rating <= current * (1 + 1e-9)
    return Allowed(
        current=np.asarray(current, dtype=np.float64),
        rating_limited=np.asarray((current > 0.0) & at_rating, dtype=np.bool_),
    )


def heat_current(
    curve: SafeAreaCurve,
    v: FloatArray,
    *,
    T: FloatArray,
    T_j_max: float | FloatArray,
    derating: SafeAreaDerating,
    Z: FloatArray | None,
    voltage_scaled: bool,
) -> FloatArray:
    """What second breakdown and dissipation would allow at a voltage, were there no rating and no flat. [A]

    The line below the flat goes on to the left, at its own slope and never flatter than constant power.
    Parameters as of `allowed_current`; NaN right of the last point.
    Range: 0 < v. Infinite for a rectangle that neither a slope nor a known Z limits.
    """
    v = np.asarray(v, dtype=np.float64)
    points = effective_points(curve)
    convention = derating if Z is not None else SafeAreaDerating(convention="like-dissipation")
    factor = breakdown_factor(convention, T, curve.T_ref, T_j_max)
    with np.errstate(divide="ignore", invalid="ignore"):
        heat = np.inf if Z is None else np.maximum((T_j_max - T) / (Z * np.maximum(v, _TINY)), 0.0)
        scaled_v = v / factor if voltage_scaled else v
    if len(points) == 1 and Z is not None:
        line = np.where(np.isnan(factor), np.nan, np.inf)
    else:
        steep = max(1.0, _slope(points, 0)) if len(points) > 1 else 1.0
        log_v = np.log(np.clip(scaled_v, _TINY, 1e12))  # a factor of 0 puts v at infinity; that allowance is 0 below
        left = np.clip(steep * (np.log(points[0, 0]) - log_v), 0.0, 200.0)
        below = _scaled_voltage(points, v, factor, Z is None) if voltage_scaled else curve_current(points, v) * factor
        line = np.where(factor <= 0.0, 0.0, below * np.exp(left))
    return np.asarray(np.where(v > points[-1, 0], np.nan, np.minimum(line, heat)), dtype=np.float64)


def _log_current(points: FloatArray, log_v: FloatArray) -> FloatArray:
    logs = np.log(points)
    return np.asarray(np.interp(log_v, logs[:, 0], logs[:, 1]), dtype=np.float64)


def _slope(points: FloatArray, segment: int) -> float:
    """How fast the current falls in one segment on log-log paper, as a positive number. [-]"""
    (v0, i0), (v1, i1) = points[segment], points[segment + 1]
    return float(np.log(i0 / i1) / np.log(v1 / v0))


def _scaled_current(points: FloatArray, v: FloatArray, factor: FloatArray, Z_unknown: bool) -> FloatArray:
    """Currents below the flat times the factor; the line goes on to the left under the flat."""
    corner_v, flat = points[0]
    sloping = len(points) > 1
    if not sloping and not Z_unknown:
        # A rectangle has no line of its own below the flat; the dissipation line alone limits it.
        return np.where(np.isnan(factor) | np.isnan(v), np.nan, flat)
    steep = max(1.0, _slope(points, 0)) if sloping else 1.0
    log_v = np.log(np.maximum(v, _TINY))
    # exp of a bounded exponent: far left of the corner the flat wins by any measure.
    left = np.clip(steep * (np.log(corner_v) - log_v), 0.0, 200.0)
    below = np.exp(_log_current(points, log_v) + left)
    return np.asarray(np.minimum(flat, below * factor), dtype=np.float64)


def _scaled_voltage(points: FloatArray, v: FloatArray, factor: FloatArray, Z_unknown: bool) -> FloatArray:
    """Voltages of the sloping segments times the factor; the last segment goes on at its slope."""
    with np.errstate(divide="ignore", invalid="ignore"):
        # A factor of 0 puts every voltage beyond the scaled curve; that allowance is 0, set below.
        log_v = np.log(np.maximum(v, _TINY)) - np.log(factor)
    alone = 1.0 if Z_unknown else 0.0  # a rectangle: constant power where nothing else limits it
    slope = _slope(points, len(points) - 2) if len(points) > 1 else alone
    finite = np.where(np.isinf(log_v), 0.0, log_v)
    past = np.maximum(finite - np.log(points[-1, 0]), 0.0)
    current = np.exp(_log_current(points, finite) - slope * past)
    return np.where(factor <= 0.0, 0.0, current)
