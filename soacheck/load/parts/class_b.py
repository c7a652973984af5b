"""Closed forms of the ideal complementary pair: one half conducts, its resistor takes part of the rail.

Everything is for one half (all its devices together). The load is |Z| at the angle phi, the output a sine of
peak V, r the emitter resistance of the half (R_E over the number of pairs).
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from soacheck.trace import FloatArray


def largest_swing(
    V_rail: npt.ArrayLike, V_sat: npt.ArrayLike, r: npt.ArrayLike, Z_mod: npt.ArrayLike, phi: npt.ArrayLike
) -> FloatArray:
    """Peak of the largest unclipped sine: V + r i just reaches V_rail - V_sat.

    Parameters
    ----------
    V_rail : array_like, shape (...)
        Each rail. [V]
    V_sat : array_like, shape (...)
        Voltage that the half needs across it. [V]
    r : array_like, shape (...)
        Emitter resistance of the half. [ohm]
    Z_mod : array_like, shape (...)
        Magnitude of the load. [ohm]
    phi : array_like, shape (...)
        Load angle. [rad]

    Returns
    -------
    ndarray, shape (...)
        Peak output voltage. [V]

    Range: V_sat < V_rail, |phi| <= pi/2.
    Source: phasor sum of output voltage and resistor drop; own derivation.
    """
    Z, r = np.asarray(Z_mod, dtype=np.float64), np.asarray(r, dtype=np.float64)
    sum_of_both = np.sqrt(Z * Z + 2 * r * Z * np.cos(phi) + r * r)
    return np.asarray((np.asarray(V_rail) - V_sat) * Z / sum_of_both, dtype=np.float64)


def mean_power(
    V_rail: npt.ArrayLike, V: npt.ArrayLike, r: npt.ArrayLike, Z_mod: npt.ArrayLike, phi: npt.ArrayLike
) -> FloatArray:
    """Mean dissipation of one half: supply power of the half, less half of the load's, less the resistor's.

    Parameters
    ----------
    V_rail : array_like, shape (...)
        Each rail. [V]
    V : array_like, shape (...)
        Peak output voltage. [V]
    r : array_like, shape (...)
        Emitter resistance of the half. [ohm]
    Z_mod : array_like, shape (...)
        Magnitude of the load. [ohm]
    phi : array_like, shape (...)
        Load angle. [rad]

    Returns
    -------
    ndarray, shape (...)
        Mean power. [W]

    Range: V <= V_rail, |phi| <= pi/2.
    Source: Sedra & Smith, Microelectronic Circuits, 5th ed., 14.3, with the load angle added; own derivation.
    """
    V, Z = np.asarray(V, dtype=np.float64), np.asarray(Z_mod, dtype=np.float64)
    current = V / Z
    return np.asarray(
        np.asarray(V_rail) * current / np.pi - V * current * np.cos(phi) / 4 - np.asarray(r) * current**2 / 4,
        dtype=np.float64,
    )


def worst_swing(
    V_rail: npt.ArrayLike, V_max: npt.ArrayLike, r: npt.ArrayLike, Z_mod: npt.ArrayLike, phi: npt.ArrayLike
) -> FloatArray:
    """Peak output voltage of greatest mean dissipation, at most the largest unclipped swing.

    Parameters
    ----------
    V_rail : array_like, shape (...)
        Each rail. [V]
    V_max : array_like, shape (...)
        Largest unclipped swing. [V]
    r : array_like, shape (...)
        Emitter resistance of the half. [ohm]
    Z_mod : array_like, shape (...)
        Magnitude of the load. [ohm]
    phi : array_like, shape (...)
        Load angle. [rad]

    Returns
    -------
    ndarray, shape (...)
        Peak output voltage, 2 V_rail/pi for a resistance without r. [V]

    Range: |phi| <= pi/2.
    Source: Sedra & Smith, Microelectronic Circuits, 5th ed., 14.3, with the load angle added; own derivation.
    """
    Z = np.asarray(Z_mod, dtype=np.float64)
    with np.errstate(divide="ignore"):
        V = 2 * np.asarray(V_rail) * Z / (np.pi * (Z * np.maximum(np.cos(phi), 0.0) + np.asarray(r)))
    return np.asarray(np.minimum(V, V_max), dtype=np.float64)


def peak_power(V_rail: npt.ArrayLike, Z_mod: npt.ArrayLike, phi: npt.ArrayLike) -> FloatArray:
    """Greatest instantaneous dissipation of one half when the output swings to the rails.

    Parameters
    ----------
    V_rail : array_like, shape (...)
        Each rail. [V]
    Z_mod : array_like, shape (...)
        Magnitude of the load. [ohm]
    phi : array_like, shape (...)
        Load angle. [rad]

    Returns
    -------
    ndarray, shape (...)
        Peak power, V_rail^2/(4 Z) for a resistance. [W]

    Range: |phi| <= pi/2.
    Source: stationary point of (V_rail - V_rail sin a)(V_rail/Z) sin(a - phi); own derivation.
    """
    return np.asarray(
        2 * np.asarray(V_rail) ** 2 / np.asarray(Z_mod) * np.sin(np.pi / 6 + np.abs(phi) / 3) ** 3,
        dtype=np.float64,
    )
