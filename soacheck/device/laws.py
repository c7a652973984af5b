"""Laws of the device: regions of operation, and characteristics against temperature and current.

A value that the rating file does not state and that common practice supplies carries the source "common
practice", so that the sheet and the list of assumptions can say so; nothing here stands in for a maximum
rating.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from soacheck.device.ratings import DARLINGTON, MOSFET, Device, Triple
from soacheck.trace import FloatArray, IntArray, Traced, derived, distinct, given

CUTOFF = 0
ACTIVE = 1
SATURATION = 2  # MOSFET: on
BREAKDOWN = 3

COMMON_PRACTICE = "common practice"
T_25 = 298.15  # [K] 25 degC
BOLTZMANN_OVER_CHARGE = 8.617333262e-5  # [V/K] k/e from the exact SI values of 2019

_WORDS = ("cutoff", "active", "saturation", "breakdown")
_MOSFET_WORDS = ("off", "active", "on", "breakdown")
_HOT_FROM = 323.15  # [K] a leakage stated at 50 degC or above is a hot one; data sheets use 100 to 175 degC
_LEAKAGE_SHARE = 1e-3  # of the continuous rating, where no hot leakage is stated


def region_word(code: int, device_kind: str) -> str | None:
    """The word of a region code; None where there is no region (code -1)."""
    if not 0 <= code < len(_WORDS):
        return None
    return (_MOSFET_WORDS if device_kind in MOSFET else _WORDS)[code]


def leakage_bound(device: Device) -> Traced:
    """Current up to which a device counts as off: the stated hot leakage, else 0.1 % of the rating. [A]"""
    leakage, T = device.typical.leakage, device.typical.leakage_T
    stated = leakage.high if leakage is not None else None
    if stated is not None and T is not None and T.at(0) >= _HOT_FROM:
        return stated
    rating = device.max.I_max
    return derived("I_leak", f"0.001 * {rating.symbol}", "A", rating, source=COMMON_PRACTICE)


def leakage_level(device: Device) -> float:
    """`leakage_bound` as a number. [A]"""
    return leakage_bound(device).at(0)


def V_CE_sat(device: Device) -> Traced:
    """Saturation voltage, the largest stated one [V]; absent: 2 V for a Darlington, 1 V for others."""
    stated = _high(device.typical.V_CE_sat)
    if stated is not None:
        return stated
    volts = 2.0 if device.kind in DARLINGTON else 1.0
    return given("V_CE_sat", volts, "V", COMMON_PRACTICE)


def R_DS_on_hot(device: Device) -> Traced | None:
    """Hot on-resistance of a MOSFET: the stated one, else the cold one times (T_j_max/298.15 K)^2.3. [ohm]

    Source of the power law: common practice for silicon MOSFETs of some 100 V; a stated hot value outranks
    it.
    """
    hot, cold = _high(device.typical.R_DS_on_hot), _high(device.typical.R_DS_on)
    if hot is not None or cold is None:
        return hot
    return derived(
        "R_DS_on_hot",
        "R_DS_on * (T_j_max / 298.15) ** 2.3",
        "ohm",
        cold.named("R_DS_on"),
        device.max.T_j.named("T_j_max"),
        source=COMMON_PRACTICE,
    )


def saturation_voltage(device: Device, i: FloatArray) -> FloatArray:
    """Voltage up to which the device is in saturation (MOSFET: on) at a current, shape of i. [V]

    MOSFET: i times the hot on-resistance, 1 V where none is stated. IGBT: its on-state line, hot where
    stated.
    """
    i = np.asarray(i, dtype=np.float64)
    if device.mosfet:
        resistance = R_DS_on_hot(device)
        return np.full(i.shape, 1.0) if resistance is None else i * _over(resistance.value, i.ndim)
    if device.igbt:
        typical = device.typical
        knee = typical.V_CE_TO_hot if typical.V_CE_TO_hot is not None else _high(typical.V_CE_TO)
        slope = typical.r_CE_hot if typical.r_CE_hot is not None else _high(typical.r_CE)
        if knee is not None and slope is not None:
            return _over(knee.value, i.ndim) + i * _over(slope.value, i.ndim)
    return np.broadcast_to(_over(V_CE_sat(device).value, i.ndim), i.shape)


def regions(device: Device, v: FloatArray, i: FloatArray) -> IntArray:
    """Region code at each point, decided by v and i alone.

    Parameters
    ----------
    device : Device
        The device.
    v, i : ndarray, broadcastable to each other
        Voltage [V] and current [A]; a leading axis may be the case axis.

    Returns
    -------
    ndarray, broadcast shape
        CUTOFF, ACTIVE, SATURATION or BREAKDOWN; -1 where v or i is not a number.
    """
    v, i = np.broadcast_arrays(np.asarray(v, dtype=np.float64), np.asarray(i, dtype=np.float64))
    off = i <= _over(leakage_bound(device).value, i.ndim)
    # The relative hair keeps a point that a load kind put exactly on the line on it.
    saturated = v <= saturation_voltage(device, i) * (1 + 1e-9)
    code = np.where(
        off,
        CUTOFF,
        np.where(v > _over(device.max.V_max.value, v.ndim), BREAKDOWN, np.where(saturated, SATURATION, ACTIVE)),
    )
    return np.where(np.isnan(v) | np.isnan(i), -1, code).astype(np.int64)


def current_gain(device: Device, current: FloatArray, T: float = T_25) -> FloatArray | None:
    """h_FE at a collector current; None when the file states no gain.

    Parameters
    ----------
    device : Device
        A bipolar transistor.
    current : ndarray, any shape
        Collector current. [A]
    T : float
        Junction temperature [K]; counts only between stated temperatures, and is held outside them.

    Returns
    -------
    ndarray, shape of current, or None
        Typical h_FE [-]: from h_FE_points straight over log(I), held left of the first point, NaN right of
        the last (the gain falls there and nothing says how fast); else the single stated value.
    """
    current = np.asarray(current, dtype=np.float64)
    points = device.typical.h_FE_points
    if points is None:
        stated = device.typical.h_FE.middle if device.typical.h_FE is not None else None
        return None if stated is None else np.broadcast_to(_over(stated.value, current.ndim), current.shape)
    temperatures = distinct(points[:, 1])
    at_each = [_gain_at(points[points[:, 1] == temperature], current) for temperature in temperatures]
    above = int(np.clip(np.searchsorted(temperatures, T), 1, max(len(temperatures) - 1, 1)))
    if len(temperatures) == 1:
        return at_each[0]
    low, high = temperatures[above - 1], temperatures[above]
    share = float(np.clip((T - low) / (high - low), 0.0, 1.0))
    return at_each[above - 1] * (1 - share) + at_each[above] * share


class Characteristic(NamedTuple):
    """One output characteristic for a picture: v [V] and i [A], shape (point,)."""

    label: str
    v: FloatArray
    i: FloatArray


def characteristics(device: Device, v_max: float, i_max: float) -> tuple[Characteristic, ...]:
    """Output characteristics of a bipolar transistor for a few base currents, from h_FE, V_CE_sat and V_A.

    Parameters
    ----------
    device : Device
        The device; empty for a MOSFET, an IGBT, or without a stated gain.
    v_max, i_max : float
        Where the picture ends. [V], [A]

    Returns
    -------
    tuple of Characteristic
        Base currents that reach about 1/5 ... 5/5 of i_max at low voltage; the line rises straight to
        V_CE_sat and then by (1 + v/V_A) where the Early voltage is stated.
    """
    top = min(i_max, device.max.I_max.at(0))
    gain = current_gain(device, np.asarray([top])) if device.bipolar else None
    if gain is None or not np.all(np.isfinite(gain)) or not v_max > 0 or not top > 0:
        return ()
    v_sat = min(V_CE_sat(device).at(0), 0.5 * v_max)
    step = _round_down(top / float(gain[0]) / 5)
    # The base current that each collector current takes, never falling: a reading wobbles, the device does not.
    reached = np.geomspace(top * 1e-6, top, 4001)
    along = current_gain(device, reached)
    if along is None:
        return ()
    needed = np.maximum.accumulate(reached / along)
    v = np.concatenate([np.linspace(0.0, v_sat, 9), np.linspace(v_sat, v_max, 24)[1:]])
    early = device.typical.V_A
    curves = []
    for number in range(1, 6):
        I_B = step * number
        I_C = float(np.interp(I_B, needed, reached))
        rise = 1.0 if early is None else 1.0 + np.maximum(v - v_sat, 0.0) / early.at(0)
        curves.append(Characteristic(f"{I_B * 1e3:.4g} mA", v, I_C * np.minimum(v / v_sat, 1.0) * rise))
    return tuple(curves)


def _high(triple: Triple | None) -> Traced | None:
    return triple.high if triple is not None else None


def _over(value: FloatArray, ndim: int) -> FloatArray:
    """A (case,) value against an array whose leading axis is the case axis."""
    return value.reshape(value.shape + (1,) * (ndim - 1)) if ndim else value.reshape(())


def _gain_at(points: FloatArray, current: FloatArray) -> FloatArray:
    rows = points[np.argsort(points[:, 0])]
    with np.errstate(divide="ignore", invalid="ignore"):
        gain = np.interp(np.log(np.maximum(current, 1e-30)), np.log(rows[:, 0]), rows[:, 2])
    return np.where(current <= rows[-1, 0], gain, np.nan)


def _round_down(value: float) -> float:
    """To 1, 2 or 5 times a power of ten, not above the value."""
    power = float(10.0 ** np.floor(np.log10(value)))
    return power * max(factor for factor in (1.0, 2.0, 5.0) if factor * power <= value * (1 + 1e-9))
