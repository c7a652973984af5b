"""SEAM ONLY, to be implemented (room heat): the heat path of a stage as it stands in [heat_path] and [surroundings]."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from soacheck.table import Cells, Key, Missing
from soacheck.trace import Traced

KEYS: tuple[Key, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Cutout:
    node: str
    T: Traced
    delay: Traced


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class HeatPath:
    """interface [K/W]; sink: how the sink is stated; R_th_sink, C_th_sink its figures; T_ambient [K] room air.

    missing: what the temperatures lack (surroundings.T_ambient, heat_path.heatsink, heat_path.interface).
    shared_by: None when absent (then every device of the stage).
    """

    interface: Traced | None
    sink: Literal["resistance", "ideal", "none", "absent"]
    R_th_sink: Traced | None = None
    C_th_sink: Traced | None = None
    shared_by: int | None = None
    separate_sinks: bool = False
    extra_heat: Traced
    extra_box_heat: Traced
    T_ambient: Traced | None
    R_th_enclosure: Traced
    sink_outside: bool = False
    working_voltage: Traced | None = None
    missing: tuple[Missing, ...] = ()


def read(heat_path: Cells, surroundings: Cells) -> HeatPath:
    raise NotImplementedError
