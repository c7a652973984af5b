"""Networks as graphs: what is refused, and what nodes without heat capacity do."""

from __future__ import annotations

import numpy as np
import pytest

from soacheck.heat.graph import Graph, modes_of
from soacheck.trace import FloatArray


def star() -> tuple[FloatArray, FloatArray, FloatArray]:
    """Three bodies on one massless joint; the last one and the joint lose heat to the boundary."""
    between = np.zeros((1, 4, 4))
    for body, g in ((0, 2.0), (1, 5.0), (2, 0.5)):
        between[0, body, 3] = between[0, 3, body] = g
    return between, np.array([[0.0, 0.0, 0.2, 0.1]]), np.array([[1.0, 3.0, 0.4, 0.0]])


def test_steady_rises_solve_the_conductance_matrix() -> None:
    between, out, capacity = star()
    matrix = np.diag(between[0].sum(axis=1) + out[0]) - between[0]
    for heated in range(4):
        net = modes_of(
            Graph(between=between, out=out, capacity=capacity), heated=heated, observed={str(k): k for k in range(4)}
        )
        steady = net.direct[0] + net.gain[0].sum(axis=1)
        assert steady == pytest.approx(np.linalg.solve(matrix, np.eye(4)[heated]), rel=1e-12)


def test_modes_follow_the_differential_equation_of_the_bodies() -> None:
    # Second way: the joint by hand, star to mesh, and the general eigenvalues of C**-1 G.
    between, out, capacity = star()
    g = np.array([2.0, 5.0, 0.5])
    total = g.sum() + 0.1
    mesh = np.diag(g + np.array([0, 0, 0.2])) - np.outer(g, g) / total
    rate = np.sort(np.linalg.eigvals(mesh / np.array([1.0, 3.0, 0.4])[:, None]).real)
    net = modes_of(Graph(between=between, out=out, capacity=capacity), heated=0, observed={"joint": 3})
    assert 1 / net.tau[0] == pytest.approx(rate, rel=1e-12)


def test_bodies_one_kelvin_warm_put_the_joint_at_the_weighted_mean() -> None:
    between, out, capacity = star()
    net = modes_of(Graph(between=between, out=out, capacity=capacity), heated=0, observed={"a": 0, "joint": 3})
    assert (net.gain[0] * net.uniform[0]).sum(axis=1) == pytest.approx([1.0, 7.5 / 7.6], rel=1e-12)


def test_a_body_that_no_heat_reaches_still_has_its_warmth() -> None:
    between = np.zeros((1, 2, 2))
    net = modes_of(
        Graph(between=between, out=np.array([[1.0, 1.0]]), capacity=np.array([[1.0, 2.0]])),
        heated=0, observed={"far": 1},
    )  # fmt: skip
    assert net.gain[0].sum() == pytest.approx(0, abs=1e-100)
    assert (net.gain[0] * net.uniform[0]).sum() == pytest.approx(1.0, rel=1e-12)


@pytest.mark.parametrize("span", [1e6, 1e12, 1e15])
def test_time_constants_far_apart_cost_no_digits_of_the_resistance(span: float) -> None:
    n = 12
    R, C = np.linspace(0.1, 1, n), np.geomspace(1.0 / span, 1.0, n)
    between, out = np.zeros((1, n, n)), np.zeros((1, n))
    for k in range(n - 1):
        between[0, k, k + 1] = between[0, k + 1, k] = 1 / R[k]
    out[0, -1] = 1 / R[-1]
    net = modes_of(Graph(between=between, out=out, capacity=C[None]), heated=0, observed={"first": 0, "last": n - 1})
    assert net.gain[0].sum(axis=1) == pytest.approx([R.sum(), R[-1]], rel=1e-10)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ("asymmetric", "not symmetric"), ("negative capacity", "heat capacity"), ("negative", "conductance"),
        ("nan", "conductance"), ("no way out", "no path"), ("shape", "case, node"), ("structure", "every case"),
    ],
)  # fmt: skip
def test_a_network_that_no_body_is_gets_refused(change: str, words: str) -> None:
    # numpy's eigh reads one triangle only, and gives an eigenvalue of 0 without complaint
    between, out, capacity = star()
    match change:
        case "asymmetric":
            between[0, 0, 3] = 9.0
        case "negative capacity":
            capacity[0, 1] = -1.0
        case "negative":
            between[0, 0, 3] = between[0, 3, 0] = -2.0
        case "nan":
            between[0, 0, 3] = between[0, 3, 0] = np.nan
        case "no way out":
            out[:] = 0.0
        case "shape":
            out = out[:, :3]
        case "structure":
            capacity = np.array([[1.0, 3.0, 0.4, 0.0], [1.0, 0.0, 0.4, 0.0]])
    with pytest.raises(ValueError, match=words):
        Graph(between=between, out=out, capacity=capacity)
