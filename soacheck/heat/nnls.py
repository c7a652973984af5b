"""Least squares with non-negative unknowns, small and dense.

Written here so that reading a device does not load an optimisation package, and so that an empty problem or a
limit on iterations is an error and not a number.
"""

from __future__ import annotations

import numpy as np

from soacheck.trace import FloatArray


def nnls(matrix: FloatArray, target: FloatArray) -> FloatArray:
    """Non-negative x that makes the length of matrix @ x - target least.

    Active-set method: columns enter one by one where the gradient asks for them, and leave when the
    unconstrained solution over the entered ones would make them negative. Columns are scaled to length 1
    first.

    Parameters
    ----------
    matrix : ndarray, shape (n, m)
        Any unit.
    target : ndarray, shape (n,)
        Any unit.

    Returns
    -------
    ndarray, shape (m,)
        Unit of target / matrix.

    Range: n and m at least 1, all values finite, no column of zeros; else ValueError.
    Source: C. L. Lawson, R. J. Hanson, Solving Least Squares Problems (1974), chapter 23, algorithm NNLS.
    """
    a, b = np.asarray(matrix, dtype=np.float64), np.asarray(target, dtype=np.float64)
    if a.ndim != 2 or b.shape != a.shape[:1] or a.size == 0:
        raise ValueError("non-negative least squares needs a filled matrix and as many targets as rows")
    length = np.sqrt((a * a).sum(axis=0))
    if not (bool(np.all(np.isfinite(length))) and bool(np.all(np.isfinite(b))) and bool(np.all(length > 0))):
        raise ValueError("non-negative least squares needs finite values and no column of zeros")
    a = a / length
    x = np.zeros(a.shape[1])
    entered = np.zeros(a.shape[1], dtype=np.bool_)
    barred = np.zeros(a.shape[1], dtype=np.bool_)  # entered last and left at once: rounding, not descent
    enough = 1e-14 * max(float(np.sqrt(b @ b)), 1e-300)
    for _ in range(30 * a.shape[1] + 100):
        gradient = np.where(entered | barred, -np.inf, a.T @ (b - a @ x))
        best = int(np.argmax(gradient))
        if not gradient[best] > enough:
            return np.asarray(x / length, dtype=np.float64)
        entered[best] = True
        trial = _over(a, b, entered)
        if trial[best] <= 0:
            entered[best], barred[best] = False, True
            continue
        barred[:] = False
        while np.any(trial[entered] <= 0):
            falling = entered & (trial <= 0)
            share = float(np.min(x[falling] / (x[falling] - trial[falling])))
            x = np.where(entered, x + share * (trial - x), 0.0)
            entered &= ~(falling & (x <= 1e-15 * x.max()))
            x = np.where(entered, x, 0.0)
            trial = _over(a, b, entered)
        x = trial
    raise ValueError("non-negative least squares came to no end")


def _over(a: FloatArray, b: FloatArray, entered: np.typing.NDArray[np.bool_]) -> FloatArray:
    """Least squares over the entered columns alone, 0 elsewhere."""
    x = np.zeros(a.shape[1])
    x[entered] = np.linalg.lstsq(a[:, entered], b, rcond=None)[0]
    return x
