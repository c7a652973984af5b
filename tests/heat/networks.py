"""Networks and waveforms that the tests of this room share."""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

import numpy as np

from soacheck.heat.modes import Modes
from soacheck.trace import FloatArray

Wave = tuple[FloatArray, FloatArray, FloatArray]  # t, p, p_mid


def foster_modes(R: list[float], tau: list[float]) -> Modes:
    """One observed node whose modes are the pairs themselves."""
    return Modes(
        nodes=("junction",),
        tau=np.array([tau]),
        gain=np.array([[R]]),
        direct=np.zeros((1, 1)),
        uniform=np.ones((1, len(R))),
    )


F3 = foster_modes([0.1, 0.3, 0.6], [1e-3, 1e-2, 1e-1])


def square_root_body(shortest: float, longest: float) -> Modes:
    """A body whose step response is the square root of time between the two times.

    sqrt(t) = 1/(2 sqrt(pi)) * integral over s from 0 to infinity of (1 - exp(-s t)) s**(-3/2) ds; with s = exp(u) the
    integral by the trapezoidal rule, four nodes a decade, ten decades beyond both ends.
    """
    u = np.arange(np.log(1e-10 / longest), np.log(1e10 / shortest), np.log(10) / 4)
    gain = np.exp(-u / 2) * (u[1] - u[0]) / (2 * np.sqrt(np.pi))
    return foster_modes(gain.tolist(), np.exp(-u).tolist())


def row(values: object) -> FloatArray:
    """(1, 1, time)."""
    return np.atleast_1d(np.asarray(values, dtype=np.float64))[None, None]


def sampled(p: Callable[[FloatArray], FloatArray], *knots: float, parts: int = 400) -> Wave:
    """t, p and p_mid of a smooth power between knots; it may jump at a knot."""
    t: list[FloatArray] = []
    power: list[FloatArray] = []
    middle: list[FloatArray] = []
    for a, b in pairwise(knots):
        s = np.linspace(a, b, parts + 1)
        inner = np.clip(s, a + 1e-12 * (b - a), b - 1e-12 * (b - a))  # a jump belongs to the side it is seen from
        if t:
            middle.append(np.zeros(1))
        t.append(s)
        power.append(p(inner))
        middle.append(p((s[1:] + s[:-1]) / 2))
    return row(np.concatenate(t)), row(np.concatenate(power)), row(np.concatenate(middle))


def rectangle(power: float, width: float, period: float) -> Wave:
    """One period of a rectangle that begins at 0."""
    return (
        row([0.0, width, width, period]),
        row([power, power, 0.0, 0.0]),
        row([power, 0.5 * power, 0.0]),
    )
