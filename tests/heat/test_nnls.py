"""Non-negative least squares against scipy's and against its own conditions."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import nnls as scipy_nnls

from soacheck.heat.nnls import nnls
from soacheck.trace import FloatArray


@given(st.integers(1, 40), st.integers(1, 30), st.integers(0, 2**32 - 1))
def test_residual_is_that_of_scipy(rows: int, columns: int, seed: int) -> None:
    # Second way: scipy.optimize.nnls.
    rng = np.random.default_rng(seed)
    matrix, target = rng.normal(size=(rows, columns)), rng.normal(size=rows)
    ours = nnls(matrix, target)
    theirs, residual = scipy_nnls(matrix, target)
    assert (ours >= 0).all()
    assert np.linalg.norm(matrix @ ours - target) == pytest.approx(residual, abs=1e-9)
    if rows >= columns:
        assert ours == pytest.approx(theirs, abs=1e-7)


@given(st.integers(0, 2**32 - 1))
def test_no_direction_left_goes_down(seed: int) -> None:
    """Kuhn-Tucker: the gradient is zero where x is positive, not negative elsewhere."""
    rng = np.random.default_rng(seed)
    matrix, target = rng.normal(size=(30, 20)) * 10.0 ** rng.uniform(-6, 6, 20), rng.normal(size=30)
    x = nnls(matrix, target)
    gradient = matrix.T @ (matrix @ x - target) / np.linalg.norm(matrix, axis=0)
    assert gradient.min() >= -1e-9
    assert np.abs(gradient[x > 0]).max(initial=0.0) <= 1e-9


def test_columns_of_any_size_count_alike() -> None:
    # a column 1e12 times another's length must not push it out
    x = nnls(np.diag([1e-12, 1e12]), np.array([1.0, 1.0]))
    assert x == pytest.approx([1e12, 1e-12])


def test_nearly_equal_columns_come_to_an_end() -> None:
    t = np.geomspace(1e-6, 10, 80)
    tau = np.geomspace(1e-8, 20, 75)
    z = -np.expm1(-np.sqrt(t / 0.1))
    matrix = -np.expm1(-t[:, None] / tau) / z[:, None]
    assert np.abs(matrix @ nnls(matrix, np.ones(80)) - 1).max() < 1e-5


def test_nothing_positive_helps_gives_zero() -> None:
    assert nnls(np.eye(3), -np.ones(3)).tolist() == [0, 0, 0]


@pytest.mark.parametrize(
    ("matrix", "target"),
    [
        (np.ones((0, 2)), np.ones(0)), (np.ones((2, 0)), np.ones(2)), (np.ones((2, 2)), np.ones(3)),
        (np.array([[1.0, np.nan]]), np.ones(1)), (np.array([[1.0]]), np.array([np.inf])),
        (np.zeros((2, 1)), np.ones(2)),
    ],
)  # fmt: skip
def test_what_is_no_problem_is_refused(matrix: FloatArray, target: FloatArray) -> None:
    with pytest.raises(ValueError, match="non-negative least squares needs"):
        nnls(matrix, target)
