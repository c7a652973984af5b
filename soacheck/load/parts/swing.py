"""Loci of one device of a complementary output stage: a sine, an overdriven sine, a held output.

Arrays are (case, member) and give loci (case, member, time). The load current is sinusoidal (or the load's
answer to the clipped sine); only the device currents are not.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from soacheck.load.parts.class_ab import Pair
from soacheck.load.parts.impedance import ComplexArray
from soacheck.locus import Locus, Use
from soacheck.trace import FloatArray

OVERDRIVE = 10.0  # 20 dB above the largest unclipped swing: flat for 94 % of the time, edges still finite
_CONDUCTING, _RESTING = 192, 96  # intervals of the half period with and without current
_CLIPPED = 256  # intervals of a clipped period
_HARMONICS = 2047

# Angles of a period, and where among the quarter's angles each has the size of its sine.
_BASE = np.concatenate([np.linspace(0, np.pi, _CONDUCTING + 1), np.linspace(np.pi, 2 * np.pi, _RESTING + 1)[1:]])
_QUARTER = np.sin(np.linspace(0, np.pi / 2, _CONDUCTING // 2 + 1))
_UP = np.minimum(np.arange(_CONDUCTING + 1), np.arange(_CONDUCTING, -1, -1))
_DOWN = _UP[:: _CONDUCTING // _RESTING][1:]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Output:
    """One amplifier's output stage as numbers, each (case, 1) or (1, 1).

    crossover: load current of one pair (case, member, time) -> currents of its halves.
    share: part of the half's current that the device looked at carries; the drop over the resistors is that
    of even sharing, which leaves the device that carries more the higher voltage.
    """

    V_rail: FloatArray
    V_sat: FloatArray
    R_E: FloatArray
    share: FloatArray
    pairs: int
    crossover: Callable[[FloatArray], Pair]

    def upper(self, v_out: FloatArray, i_load: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Voltage across and current through the device of the upper half."""
        return self.across(v_out, self.crossover(i_load / self.pairs).upper)

    def across(self, v_out: FloatArray, even: FloatArray) -> tuple[FloatArray, FloatArray]:
        """The same from the current that each pair's upper half would carry if sharing were even."""
        v = self.V_rail[..., None] - v_out - self.R_E[..., None] * even
        return np.maximum(v, self.V_sat[..., None]), even * (self.pairs * self.share[..., None])


def _locked(*arrays: FloatArray) -> None:
    for array in arrays:
        array.setflags(write=False)  # so that Locus need not copy it


def sine(output: Output, V: FloatArray, Z: ComplexArray, f: FloatArray) -> Locus:
    """One period of a sine of peak V at the output, from the moment at which the half begins to conduct.

    The turning points of v and i and the greatest power are among the samples. The halves are mirror images, so
    that the crossover is worked out over a quarter of the period only.
    """
    Z_mod, phi = np.abs(Z), np.angle(Z)
    V, Z_mod, phi, f = np.broadcast_arrays(V, Z_mod, phi, f)
    best = _power_angle(output, V, Z_mod, phi)
    shape = best.shape  # the rails may vary over more cases than the load
    turns = [(np.pi / 2 - phi) % (2 * np.pi), (3 * np.pi / 2 - phi) % (2 * np.pi)]
    extra = np.stack([*(np.broadcast_to(turn, shape) for turn in turns), best], axis=-1)
    wave = np.sin(extra)
    # Load current of one pair at the quarter's angles and at the extra ones, as a magnitude.
    sizes = np.concatenate([np.broadcast_to(_QUARTER, (*shape, _QUARTER.size)), np.abs(wave)], axis=-1)
    pair = output.crossover((V / Z_mod / output.pairs)[..., None] * sizes)
    n = _QUARTER.size
    own = np.where(wave >= 0, pair.upper[..., n:], pair.lower[..., n:])
    even = np.concatenate([pair.upper[..., _UP], pair.lower[..., _DOWN], own], axis=-1)
    angle = np.concatenate([np.broadcast_to(_BASE, (*shape, _BASE.size)), extra], axis=-1)
    order = np.argsort(angle, axis=-1, kind="stable")  # a merge: all but the last three are in order
    angle = np.take_along_axis(angle, order, axis=-1)
    even = np.take_along_axis(np.broadcast_to(even, (*even.shape[:2], angle.shape[-1])), order, axis=-1)
    v, i = output.across(V[..., None] * np.sin(angle + phi[..., None]), even)
    t = angle / (2 * np.pi * f[..., None])
    _locked(t, v, i)
    return Locus(t=t, v=v, i=i, use=Use.REPEATED)


def _power_angle(output: Output, V: FloatArray, Z_mod: FloatArray, phi: FloatArray) -> FloatArray:
    """Angle of the greatest class-B power from the start of conduction: best of a grid, then Newton."""
    grid = np.linspace(0, np.pi, 65)
    r = (output.R_E / output.pairs) * V / Z_mod
    power = (
        output.V_rail[..., None] - V[..., None] * np.sin(grid + phi[..., None]) - r[..., None] * np.sin(grid)
    ) * np.sin(grid)
    a = grid[np.argmax(power, axis=-1)]
    for _ in range(3):
        slope = output.V_rail * np.cos(a) - V * np.sin(2 * a + phi) - r * np.sin(2 * a)
        curve = -output.V_rail * np.sin(a) - 2 * V * np.cos(2 * a + phi) - 2 * r * np.cos(2 * a)
        a = np.clip(a - np.where(curve < 0, slope / np.where(curve < 0, curve, 1.0), 0.0), 0, np.pi)
    return np.asarray(a, dtype=np.float64)


def clipped(
    output: Output,
    V: FloatArray,
    f: FloatArray,
    resistance: FloatArray | None,
    Z_at: Callable[[FloatArray], ComplexArray],
) -> Locus:
    """One period of a sine of `OVERDRIVE` times V cut off at V, and the load's current for it.

    resistance: (case, member) when the load is one; else the current is summed over the odd harmonics, `Z_at`
    giving the impedance at frequencies (case, n).
    """
    edge = np.arcsin(1 / OVERDRIVE)
    angle = np.sort(
        np.concatenate([np.linspace(0, 2 * np.pi, _CLIPPED + 1), [edge, np.pi - edge, np.pi + edge, 2 * np.pi - edge]])
    )
    V, f = np.broadcast_arrays(V, f)
    shape = np.clip(OVERDRIVE * np.sin(angle), -1.0, 1.0)
    if resistance is not None:
        current = shape / resistance[..., None]
    else:
        n = np.arange(1, _HARMONICS + 1, 2, dtype=np.float64)
        amplitude = clipped_sine_harmonics(n)
        waves = np.exp(1j * np.outer(n, angle))
        # Flat over members: one frequency list per case.
        answers = [np.imag((amplitude / Z_at(f[:, m : m + 1] * n)) @ waves) for m in range(f.shape[1])]
        current = np.stack(answers, axis=1)
    v, i = output.upper(V[..., None] * shape, V[..., None] * current)
    t = angle / (2 * np.pi * f[..., None])
    _locked(t, v, i)
    return Locus(t=t, v=v, i=i, use=Use.REPEATED)


def clipped_sine_harmonics(n: FloatArray) -> FloatArray:
    """Sine amplitudes of the odd harmonics n of a sine of `OVERDRIVE` cut off at 1.

    Parameters
    ----------
    n : ndarray, shape (n,)
        Odd harmonic numbers from 1. [-]

    Returns
    -------
    ndarray, shape (n,)
        Amplitudes; for a large overdrive those of the square wave, 4/(pi n). [-]

    Range: odd n.
    Source: Fourier integral of the cut-off sine; own derivation.
    """
    a = np.arcsin(1 / OVERDRIVE)
    below = np.where(n > 1, np.sin((n - 1) * a) / np.where(n > 1, n - 1, 1.0), a)
    return np.asarray(
        4 / np.pi * (OVERDRIVE / 2 * (below - np.sin((n + 1) * a) / (n + 1)) + np.cos(n * a) / n),
        dtype=np.float64,
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class HeldOutput:
    """A held output: the locus of the device looked at, and the power of the like device of the other half."""

    locus: Locus
    P_other: FloatArray  # (case, member) [W]


def held(output: Output, V: FloatArray, R: FloatArray) -> HeldOutput:
    """An output held at V into the resistance R, as the upper half sees it: below 0 the lower half carries the load."""
    V, R = np.broadcast_arrays(V, R)
    v, i = output.upper(V[..., None], (V / R)[..., None])
    v_other, i_other = output.upper(-V[..., None], -(V / R)[..., None])
    t = np.zeros((1, 1, 1))
    _locked(t, v, i)
    return HeldOutput(locus=Locus(t=t, v=v, i=i, use=Use.HELD), P_other=(v_other * i_other)[..., 0])
