"""SEAM ONLY, to be implemented (room heat): R-C ladders from the three forms of Z_th_jc, and networks built on them."""

from __future__ import annotations

from dataclasses import dataclass

from soacheck.device.ratings import ThermalData
from soacheck.heat.modes import Modes
from soacheck.trace import FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Ladder:
    """Junction-to-case ladder. Cell k: heat capacity C[k] [J/K] at its node, resistance R[k] [K/W] to the next node;
    the last resistance ends at the case. sum(R) = R_th_jc. error: greatest relative error of the fit (0: exact form).
    raised: the fit was lifted until it lies on or above every point."""

    R: FloatArray  # (cell,)
    C: FloatArray  # (cell,)
    error: float = 0.0
    raised: bool = False
    how: str = ""


def ladder_of(thermal: ThermalData, *, file: str) -> Ladder | None:
    """The ladder of a device, None when it states no Z_th_jc. Raises InputError for a curve that no body has
    (falls, grows faster than time, cannot be met within 15 %, ends above R_th_jc by more than the chart reading)."""
    raise NotImplementedError


def network(
    ladder: Ladder | None,
    R_th_jc: FloatArray,
    R_th_cs: FloatArray,
    R_th_sa: FloatArray | None,
    C_th_sink: FloatArray | None,
) -> Modes:
    """Modes of junction - ladder - case - interface - sink - boundary; resistances (case,), broadcasting.

    ladder None: the junction and case have no heat capacity and follow the power at once (only `direct`).
    R_th_sa None: the sink is the boundary (held). C_th_sink None with R_th_sa given: a sink without heat capacity.
    The ladder is scaled so that its sum is R_th_jc. One symmetric eigenproblem per case (numpy.linalg.eigh, batched) on
    the capacity-scaled matrix; symmetry, positive capacities and a path to the boundary are checked first.
    """
    raise NotImplementedError
