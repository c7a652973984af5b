"""SEAM ONLY, to be implemented (room balance): the operating temperatures of one duty."""

from __future__ import annotations

from dataclasses import dataclass

from soacheck.device.ratings import Device
from soacheck.duty import Duty
from soacheck.locus import Locus
from soacheck.table import Missing
from soacheck.trace import FloatArray, Traced


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Operating:
    """A duty at its operating temperatures. Arrays (case, member) unless said; kelvin; NaN where unknown.

    T_case: mean over the period, for one shot at the moment of T_j_peak; T_case_peak: greatest over the locus.
    T_j_peak: NaN when the device states no Z_th_jc and power varies; T_j_bound is then T_case + P_peak * R_th_jc
    (equal to T_j_peak otherwise).
    T_before: one shot only: junction temperature just before it; NaN otherwise.
    T_j, T_case_t, T_heatsink_t: (case, member, time), NaN where unknown.
    locus is None (and all figures NaN) when the load kind lacked something: see duty.unknown.
    missing: what the temperatures lack.
    """

    duty: Duty
    device: Device
    locus: Locus | None
    P_mean: FloatArray
    P_peak: FloatArray
    T_air: FloatArray
    T_heatsink: FloatArray
    T_case: FloatArray
    T_case_peak: FloatArray
    T_j_mean: FloatArray
    T_j_peak: FloatArray
    T_j_bound: FloatArray
    T_before: FloatArray
    T_j: FloatArray
    T_case_t: FloatArray
    T_heatsink_t: FloatArray
    R_th_jc: Traced | None  # as used: the cautious one where ratings disagree
    T_ambient: Traced | None
    sink: str  # resistance, ideal, none, absent
    missing: tuple[Missing, ...] = ()
