"""The operating temperatures of one duty.

Heat runs junction - case - interface - sink - air. The device's own power waveform enters at the junction; the other
devices on the sink are taken to heat it in step with this one (exact for equal parallel devices, cautious for the
other half of a push-pull pair). A sink whose heat capacity is not stated is held at the mean of what flows into it:
its time constant is minutes, a period is not (common practice).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from soacheck.balance.place import Place
from soacheck.device.ratings import Device
from soacheck.duty import Duty
from soacheck.heat.ladder import Ladder
from soacheck.heat.modes import Modes
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
    missing: what the temperatures lack. state: mode states at the moment of T_j_peak (case, member, mode) [W].
    """

    duty: Duty
    device: Device
    ladder: Ladder | None
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
    modes: Modes | None = None
    state: FloatArray | None = None


def _nan(cases: int, members: int, times: int = 1) -> FloatArray:
    return np.full((cases, members, times), np.nan)


def unknown(duty: Duty, place: Place, cases: int) -> Operating:
    """A duty whose locus could not be worked out: every figure is NaN."""
    flat, full = _nan(cases, 1)[:, :, 0], _nan(cases, 1)
    return Operating(
        duty=duty,
        device=place.device,
        ladder=place.ladder,
        locus=None,
        P_mean=flat,
        P_peak=flat,
        T_air=flat,
        T_heatsink=flat,
        T_case=flat,
        T_case_peak=flat,
        T_j_mean=flat,
        T_j_peak=flat,
        T_j_bound=flat,
        T_before=flat,
        T_j=full,
        T_case_t=full,
        T_heatsink_t=full,
        R_th_jc=place.R_th_jc,
        T_ambient=place.path.T_ambient,
        sink=place.path.sink,
        missing=place.missing,
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Before:
    """What a one-shot duty starts from: the hottest member of the hottest preceding duty of each case.

    T_air, T_heatsink, T_case, T_j, P_mean: (case, 1). state (case, 1, mode) of `modes` at the junction's peak, where
    all candidates share one network; else None and the steady state at the mean power stands in.
    """

    name: str
    T_air: FloatArray
    T_heatsink: FloatArray
    T_case: FloatArray
    T_j: FloatArray
    P_mean: FloatArray
    modes: Modes | None = None
    state: FloatArray | None = None


def before_of(candidates: Sequence[Operating]) -> Before | None:
    """The hottest of some steady duties, case by case; None when there is none with a locus."""
    candidates = [operating for operating in candidates if operating.locus is not None]
    if not candidates:
        return None
    picked = [_hottest_member(operating) for operating in candidates]
    T_j = np.stack([np.nan_to_num(one.T_j, nan=np.inf) for one in picked])  # not known stays not known
    winner = np.argmax(T_j, axis=0)[None]

    def choose(arrays: list[FloatArray]) -> FloatArray:
        wide = winner.reshape(winner.shape + (1,) * (arrays[0].ndim - 2))
        return np.asarray(np.take_along_axis(np.stack(arrays), wide, axis=0)[0], dtype=np.float64)

    first = picked[0]
    shared = first.state is not None and all(
        one.state is not None and first.modes is not None and same_network(first.modes, one.modes) for one in picked
    )
    names = {picked[k].name for k in winner.ravel().tolist()}
    return Before(
        name=" / ".join(sorted(names)),
        T_air=choose([one.T_air for one in picked]),
        T_heatsink=choose([one.T_heatsink for one in picked]),
        T_case=choose([one.T_case for one in picked]),
        T_j=choose([one.T_j for one in picked]),
        P_mean=choose([one.P_mean for one in picked]),
        modes=first.modes if shared else None,
        state=choose([one.state for one in picked if one.state is not None]) if shared else None,
    )


def _hottest_member(operating: Operating) -> Before:
    at = np.argmax(np.nan_to_num(operating.T_j_bound, nan=-np.inf), axis=1)[:, None]

    def pick(a: FloatArray) -> FloatArray:
        return np.take_along_axis(np.broadcast_to(a, operating.P_mean.shape), at, axis=1)

    state = operating.state
    return Before(
        name=operating.duty.name,
        T_air=pick(operating.T_air),
        T_heatsink=pick(operating.T_heatsink),
        T_case=pick(operating.T_case),
        T_j=pick(operating.T_j_bound),
        P_mean=pick(operating.P_mean),
        modes=operating.modes,
        state=None if state is None else np.take_along_axis(state, at[..., None], axis=1),
    )


def same_network(a: Modes, b: Modes | None) -> bool:
    return (
        b is not None
        and a.nodes == b.nodes
        and a.tau.shape == b.tau.shape
        and bool(np.allclose(a.tau, b.tau, rtol=1e-9))
    )
