"""A thermal network as a graph of heat capacities and conductances, and its modes seen from the node that is
heated.

Nodes without heat capacity follow the others at once. They are taken out one by one, each replaced by
conductances between its neighbours (star to mesh): only positive numbers are added and multiplied there, so
nothing cancels. What is left is one symmetric eigenproblem per case on the capacity-scaled matrix.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.heat.modes import Modes
from soacheck.trace import BoolArray, FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Graph:
    """A thermal network. Structure is the same in every case, only numbers vary.

    between: (case, node, node) conductance between nodes, symmetric, diagonal 0 [W/K]
    out:     (case, node) conductance to the boundary [W/K]
    capacity: (case, node) heat capacity, 0 for a node without [J/K]

    Raises ValueError for a matrix that is not symmetric, a negative or not finite value and a node without a
    path to the boundary: numpy's eigenvalue routine notices none of these.
    """

    between: FloatArray
    out: FloatArray
    capacity: FloatArray

    def __post_init__(self) -> None:
        g, out, c = self.between, self.out, self.capacity
        if g.ndim != 3 or g.shape[1] != g.shape[2] or out.shape[1:] != g.shape[1:2] or c.shape[1:] != g.shape[1:2]:
            raise ValueError("thermal network: conductances are (case, node, node), the rest (case, node)")
        for name, values in (("conductance", g), ("conductance to the boundary", out), ("heat capacity", c)):
            if not bool(np.all(np.isfinite(values) & (values >= 0))):
                raise ValueError(f"thermal network: a {name} is negative or not a number")
        if not bool(np.all(g == np.swapaxes(g, 1, 2))):
            raise ValueError("thermal network: not symmetric, heat that leaves one node must reach the other")
        if bool(np.any(np.any(c > 0, axis=0) != np.all(c > 0, axis=0))):
            raise ValueError("thermal network: the same nodes must have heat capacity in every case")
        reached = np.all(out > 0, axis=0)
        for _ in range(g.shape[1]):
            reached = reached | np.any(np.all(g > 0, axis=0)[:, reached], axis=1)
        if not bool(np.all(reached)):
            raise ValueError("thermal network: a node has no path to the boundary")


def modes_of(graph: Graph, *, heated: int, observed: dict[str, int]) -> Modes:
    """Modes of a network heated at one node, observed at others."""
    cases = np.broadcast_shapes(graph.between.shape[:1], graph.out.shape[:1], graph.capacity.shape[:1])[0]
    nodes = graph.out.shape[1]
    g = np.array(np.broadcast_to(graph.between, (cases, nodes, nodes)))
    out = np.array(np.broadcast_to(graph.out, (cases, nodes)))
    capacity = np.broadcast_to(graph.capacity, (cases, nodes))
    massive: BoolArray = np.all(capacity > 0, axis=0)
    heat = np.zeros((cases, nodes))
    heat[:, heated] = 1.0
    taken: list[tuple[int, FloatArray, FloatArray]] = []
    for node in np.flatnonzero(~massive).tolist():
        link = g[:, node].copy()
        share = link / (link.sum(axis=1) + out[:, node])[:, None]
        own = heat[:, node] / (link.sum(axis=1) + out[:, node])
        taken.append((node, share, own))
        g += share[:, :, None] * link[:, None, :]
        g = (g + np.swapaxes(g, 1, 2)) / 2  # the two products differ by rounding
        out += share * out[:, node, None]
        heat += share * heat[:, node, None]
        g[:, node] = g[:, :, node] = 0.0
        g[:, np.arange(nodes), np.arange(nodes)] = 0.0
        heat[:, node] = out[:, node] = 0.0
    # temperature of every node as a linear form in those with capacity, and in the power itself
    form = np.zeros((cases, nodes, nodes))
    form[:, massive, massive] = 1.0
    at_once = np.zeros((cases, nodes))
    for node, share, own in reversed(taken):
        form[:, node] = (share[:, None, :] @ form)[:, 0]
        at_once[:, node] = (share * at_once).sum(axis=1) + own
    seen = np.array(list(observed.values()), dtype=np.intp)
    tau, gain, uniform = _eigen(
        g[:, massive][:, :, massive],
        out[:, massive],
        capacity[:, massive],
        heat[:, massive],
        form[:, seen][:, :, massive],
    )
    return Modes(nodes=tuple(observed), tau=tau, gain=gain, direct=at_once[:, seen], uniform=uniform)


def _eigen(
    g: FloatArray, out: FloatArray, capacity: FloatArray, heat: FloatArray, form: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """tau, gain and uniform of the nodes with capacity. All of them positive definite after the checks of
    `Graph`."""
    root = np.sqrt(capacity)
    count = g.shape[1]
    matrix = -g / (root[:, :, None] * root[:, None, :])
    matrix[:, np.arange(count), np.arange(count)] = (g.sum(axis=2) + out) / capacity
    rate, vector = np.linalg.eigh(matrix)
    turned = np.swapaxes(vector, 1, 2)
    driven = (turned @ (heat / root)[:, :, None])[:, :, 0]
    # a mode that the power does not reach keeps a defined state by a vanishing coupling
    tiny = 1e-200 * np.sqrt(np.sum(heat * heat / capacity, axis=1, keepdims=True))
    driven = np.where(np.abs(driven) < tiny, tiny, driven)
    shown = (form / root[:, None, :]) @ vector
    gain = shown * (driven / rate)[:, None, :]
    uniform = rate / driven * (turned @ root[:, :, None])[:, :, 0]
    return 1.0 / rate, gain, uniform
