"""R-C ladders from the three forms of Z_th_jc, and networks built on them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.device.ratings import ThermalData
from soacheck.heat.graph import Graph, modes_of
from soacheck.heat.modes import Modes
from soacheck.heat.stated import cells_of
from soacheck.trace import BoolArray, FloatArray, frozen


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Ladder:
    """Junction-to-case ladder. Cell k: heat capacity C[k] [J/K] at its node, resistance R[k] [K/W] to the
    next node; the last resistance ends at the case. sum(R) = R_th_jc. error: greatest relative error of the
    fit (0: exact form).
    raised: the fit was lifted until it lies on or above every point."""

    R: FloatArray  # (cell,)
    C: FloatArray  # (cell,)
    error: float = 0.0
    raised: bool = False
    how: str = ""

    def __post_init__(self) -> None:
        for name in ("R", "C"):
            object.__setattr__(self, name, frozen(getattr(self, name)))
        if self.R.shape != self.C.shape or not bool(np.all((self.R > 0) & (self.C > 0))):
            raise ValueError("ladder: as many capacities as resistances, all positive")


def ladder_of(thermal: ThermalData, *, file: str) -> Ladder | None:
    """The ladder of a device, None when it states no Z_th_jc. Raises InputError for a curve that no body has
    (falls, grows faster than time, cannot be met within 15 %, ends above R_th_jc by more than the chart
    reading)."""
    cells = cells_of(thermal, file=file)
    if cells is None:
        return None
    return Ladder(R=cells.R, C=cells.C, error=cells.error, raised=cells.raised, how=cells.how)


def network(
    ladder: Ladder | None,
    R_th_jc: FloatArray,
    R_th_cs: FloatArray,
    R_th_sa: FloatArray | None,
    C_th_sink: FloatArray | None,
) -> Modes:
    """Modes of junction - ladder - case - interface - sink - boundary; resistances (case,), broadcasting.

    ladder None: the junction and case have no heat capacity and follow the power at once (only `direct`).
    R_th_sa None: the sink is the boundary (held). C_th_sink None with R_th_sa given: a sink without heat
    capacity. The ladder is scaled so that its sum is R_th_jc, its time constants kept. A value that is not
    known (NaN) makes that case's modes unknown (NaN). One symmetric eigenproblem per case (numpy.linalg.eigh,
    batched) on the capacity-scaled matrix; symmetry, positive capacities and a path to the boundary are
    checked first.
    """
    given = [np.atleast_1d(np.asarray(a, dtype=np.float64)) for a in (R_th_jc, R_th_cs)]
    sink = [np.atleast_1d(np.asarray(a, dtype=np.float64)) for a in (R_th_sa, C_th_sink) if a is not None]
    jc, cs, *rest = np.broadcast_arrays(*given, *sink)
    if R_th_sa is None and C_th_sink is not None:
        raise ValueError("a sink that is the boundary has no heat capacity of its own")
    cases = jc.shape[0]
    R = np.ones(1) if ladder is None else ladder.R
    scale = jc / R.sum()
    chain = np.stack([*(scale * part for part in R), cs, *rest[:1]], axis=1)
    capacity = np.zeros(chain.shape)
    if ladder is not None:
        capacity[:, : ladder.C.size] = ladder.C / scale[:, None]
    if C_th_sink is not None:
        capacity[:, -1] = rest[1]
    known = ~np.isnan(chain.sum(axis=1) + capacity.sum(axis=1))
    massive = [ladder is not None] * R.size + [False] + [C_th_sink is not None] * len(rest[:1])
    chain, capacity = np.where(known[:, None], chain, 1.0), np.where(known[:, None], capacity, massive)
    if not bool(np.all(np.isfinite(chain) & (chain > 0))):
        raise ValueError("thermal network: every resistance must be a positive number")
    count = chain.shape[1]
    between = np.zeros((cases, count, count))
    step = np.arange(count - 1)
    between[:, step, step + 1] = between[:, step + 1, step] = 1.0 / chain[:, :-1]
    out = np.zeros((cases, count))
    out[:, -1] = 1.0 / chain[:, -1]
    observed = {"junction": 0, "case": R.size}
    if R_th_sa is not None:
        observed["heatsink"] = R.size + 1
    modes = modes_of(Graph(between=between, out=out, capacity=capacity), heated=0, observed=observed)
    return modes if bool(np.all(known)) else _unknown_where(~known, modes)


def _unknown_where(cases: BoolArray, modes: Modes) -> Modes:
    return Modes(
        nodes=modes.nodes,
        tau=np.where(cases[:, None], np.nan, modes.tau),
        gain=np.where(cases[:, None, None], np.nan, modes.gain),
        direct=np.where(cases[:, None], np.nan, modes.direct),
        uniform=np.where(cases[:, None], np.nan, modes.uniform),
    )
