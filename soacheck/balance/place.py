"""Where a device sits: its heat path with everything else that heats the same sink and the same box."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from soacheck.device.ratings import Device
from soacheck.duty import Duty
from soacheck.heat.ladder import Ladder
from soacheck.heat.path import HeatPath
from soacheck.table import Missing
from soacheck.trace import FloatArray, Traced, derived, given

DISAGREE = 0.10  # R_th_jc and (T_j - T_case)/P_tot further apart than this: the cautious one is used


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Place:
    """A device on its heat path.

    devices: devices of the whole stage; on_sink: devices on this sink, this one included.
    R_th_jc: as used. others: heat of the stage's other devices (case, member) [W] where a duty states it.
    Temperatures below are functions of this device's mean power (case, member) [W] and of
    `ratio` (case, 1), dissipation of all devices of the stage over this one's.
    """

    device: Device
    ladder: Ladder | None
    path: HeatPath
    devices: int
    on_sink: int
    R_th_jc: Traced | None
    missing: tuple[Missing, ...]
    others: FloatArray | None = None

    @property
    def boxed(self) -> bool:
        """Whether the sink, or the case without one, stands in the air of a closed box that the stage warms."""
        warms = bool(np.any(self.path.R_th_enclosure.value > 0))
        return warms and not self.path.sink_outside and self.path.sink in ("none", "resistance", "ideal")

    def beside(self, duty: Duty) -> Place:
        """The same place with the heat of the stage's other devices in a duty that states it."""
        return self if duty.others is None else replace(self, others=np.asarray(duty.others, dtype=np.float64))

    @property
    def R_jc(self) -> FloatArray:
        return _column(self.R_th_jc)

    @property
    def R_cs(self) -> FloatArray:
        """Case to sink, or case to air without a sink (R_th_ja less R_th_jc, never below 0). (case, 1)"""
        if self.path.sink == "none":
            return np.maximum(_column(self.device.thermal.R_th_ja) - self.R_jc, 0.0)
        if self.path.sink == "case":
            return np.zeros((1, 1))
        return _column(self.path.interface)

    @property
    def R_sink(self) -> FloatArray:
        if self.path.sink in ("ideal", "case"):
            return np.zeros((1, 1))
        return _column(self.path.R_th_sink)

    @property
    def extra(self) -> FloatArray:
        return _column(self.path.extra_heat)

    def sink_ratio(self, ratio: FloatArray) -> FloatArray:
        """Heat of all devices on the sink over this device's heat. [1]

        On a sink of its own part of the stage the others dissipate no more than this, the worst one, and together no
        more than the rest of the stage; on a sink shared with more devices than the stage has, the others are equal
        stages.
        """
        if self.on_sink > self.devices:
            return ratio * self.on_sink / self.devices
        return 1.0 + np.minimum(ratio - 1.0, self.on_sink - 1.0)

    def sink_heat(self, P: FloatArray, ratio: FloatArray) -> FloatArray:
        """Heat of all devices on the sink, (case, member). [W]

        Others that a duty states by their heat may be hotter than this one: on a sink that carries only some of them
        all of that heat is taken to be there.
        """
        if self.others is None:
            return np.asarray(P * self.sink_ratio(ratio), dtype=np.float64)
        if self.on_sink >= self.devices:
            return np.asarray((P + self.others) * self.on_sink / self.devices, dtype=np.float64)
        return np.asarray(P + (self.others if self.on_sink > 1 else 0.0), dtype=np.float64)

    def air(self, P: FloatArray, ratio: FloatArray) -> FloatArray:
        """Air at the sink, or a case temperature that is held. [K]"""
        room = _column(self.path.T_case if self.path.sink == "case" else self.path.T_ambient)
        if self.path.sink_outside:
            return np.broadcast_to(room, np.broadcast_shapes(P.shape, room.shape))
        stage = P * ratio if self.others is None else P + self.others
        box = stage + self.extra + _column(self.path.extra_box_heat)
        return np.asarray(room + _column(self.path.R_th_enclosure) * box, dtype=np.float64)

    def sink(self, P: FloatArray, ratio: FloatArray) -> FloatArray:
        """Sink temperature; without a sink there is none. [K]"""
        if self.path.sink in ("none", "case"):
            return np.full(np.broadcast_shapes(P.shape, ratio.shape), np.nan)
        return np.asarray(self.air(P, ratio) + self.R_sink * (self.sink_heat(P, ratio) + self.extra), dtype=np.float64)

    def case(self, P: FloatArray, ratio: FloatArray) -> FloatArray:
        """Mean case temperature. [K]"""
        below = self.air(P, ratio) if self.path.sink in ("none", "case") else self.sink(P, ratio)
        return np.asarray(below + self.R_cs * P, dtype=np.float64)

    def R_after_case(self, ratio: FloatArray) -> FloatArray:
        """Case to air as this device sees it. [K/W]"""
        if self.path.sink in ("none", "case"):
            return self.R_cs
        return np.asarray(self.R_cs + self.R_sink * self.sink_ratio(ratio), dtype=np.float64)


def _column(value: Traced | None) -> FloatArray:
    return np.full((1, 1), np.nan) if value is None else np.asarray(value.value[:, None], dtype=np.float64)


def R_th_jc_used(device: Device) -> tuple[Traced | None, bool]:
    """The junction-to-case resistance that counts, and whether the sheet's two statements disagree.

    Source: the definition of P_tot as the dissipation that brings the junction to T_j at the stated case temperature
    (IEC 60747); above 10 % apart the larger is taken (common practice).
    """
    stated, ratings = device.thermal.R_th_jc, device.max
    if stated is None or ratings.P_tot is None or device.thermal.R_th_jc_derived:
        return stated, False
    implied = derived(
        "R_th_jc_implied",
        "(T_j_max - T_case_rated) / P_tot",
        "K/W",
        ratings.T_j.named("T_j_max"),
        ratings.T_case.named("T_case_rated"),
        ratings.P_tot.named("P_tot"),
    )
    apart = np.abs(implied.value - stated.value) > DISAGREE * np.minimum(implied.value, stated.value)
    if not bool(np.any(apart)):
        return stated, False
    used = derived("R_th_jc", "max(R_th_jc_stated, R_th_jc_implied)", "K/W", stated.named("R_th_jc_stated"), implied)
    return used, True


def place_of(device: Device, ladder: Ladder | None, path: HeatPath, devices: int) -> Place:
    """Put a device on its heat path; what the temperatures lack is collected in `missing`."""
    used, _ = R_th_jc_used(device)
    if used is not None and ladder is not None and bool(np.any(ladder.R.sum() > used.value * (1 + 1e-9))):
        total = given(
            "R_th_ladder", float(ladder.R.sum()), "K/W", f"{device.name}: sum of Z_th_jc", device.thermal.grade
        )
        used = derived("R_th_jc", "max(R_th_jc_stated, R_th_ladder)", "K/W", used.named("R_th_jc_stated"), total)
    missing = list(path.missing)
    if path.sink == "none" and device.thermal.R_th_ja is None:
        missing.append(
            Missing(key="thermal.R_th_ja", where="thermal characteristics: junction to ambient, with its mounting")
        )
    if used is None:
        missing.append(Missing(key="thermal.R_th_jc", where="thermal characteristics: junction to case"))
    on_sink = path.shared_by if path.shared_by is not None else devices
    return Place(
        device=device,
        ladder=ladder,
        path=path,
        devices=devices,
        on_sink=on_sink,
        R_th_jc=used,
        missing=tuple(missing),
    )


def ratio_of(duty: Duty) -> FloatArray:
    """Dissipation of all devices of the stage over this one's, (1 or case, 1). [1]"""
    ratio = np.asarray(duty.heat_ratio, dtype=np.float64)
    return ratio if ratio.ndim == 2 else np.atleast_1d(ratio)[:, None]
