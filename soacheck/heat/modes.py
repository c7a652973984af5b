"""SEAM ONLY, to be implemented (room heat): a thermal network as its modes, and what the modes answer.

A network seen from the junction is a sum of first-order modes. With the mode states y_m in watts,

    tau_m * dy_m/dt = p(t) - y_m,      T_obs(t) - T_boundary = direct_obs * p(t) + sum_m gain_obs,m * y_m(t)

so a step of 1 W gives direct + sum gain * (1 - exp(-t/tau)), the steady state is y_m = P, and every node that is
observed (junction, case, heat sink) shares the same states.
"""

from __future__ import annotations

from dataclasses import dataclass

from soacheck.trace import FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Modes:
    """tau (case, mode) [s]; gain (case, node, mode) [K/W]; direct (case, node) [K/W]; uniform (case, mode) [W/K].

    nodes: names of the observed nodes, "junction", "case", "heatsink".
    uniform: mode states when every heat capacity is 1 K above the boundary.
    A network without heat capacities has no modes (mode axis of length 0) and only `direct`.
    """

    nodes: tuple[str, ...]
    tau: FloatArray
    gain: FloatArray
    direct: FloatArray
    uniform: FloatArray

    def step(self, t: FloatArray) -> FloatArray:
        """Rise of each node at times t (time,) after a step of 1 W: (case, node, time). [K/W]"""
        raise NotImplementedError


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Response:
    """rise (case, member, node, time) over the boundary [K] at the times asked; state (case, member, mode, time) [W]."""

    rise: FloatArray
    state: FloatArray


def periodic(modes: Modes, t: FloatArray, p: FloatArray, p_mid: FloatArray) -> Response:
    """Periodic steady state, closed form.

    t (1|case, 1|member, time) one period, p the power at those times, p_mid (…, time-1) in the middle of each
    segment: the power is the parabola through the three (exact when v and i are straight lines).
    """
    raise NotImplementedError


def one_shot(modes: Modes, t: FloatArray, p: FloatArray, p_mid: FloatArray, start: FloatArray) -> Response:
    """Response from the mode states `start` (case, member, mode) [W] at t[0]."""
    raise NotImplementedError
