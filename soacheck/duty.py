"""Duty: all that a load kind returns about one operating situation of a stage.

A load kind turns its parameters into duties; everything after it (balance, limits, pictures) knows duties only.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Literal

import numpy as np

from soacheck.device.ratings import Device
from soacheck.locus import Locus
from soacheck.table import Missing
from soacheck.trace import FloatArray, IntArray, Traced, frozen

Level = Literal["worst", "full", "stated"]  # of a signal: greatest mean dissipation, greatest swing, as the file says


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Members:
    """Alternatives inside one duty (held points, levels): each limit takes its own worst.

    value: (1 or case, member) in SI, or (1, 1) zero when the duty is a single situation.
    """

    name: str = ""  # "level", "V_CE", "V_out"; empty when there is only one
    unit: str = ""
    value: FloatArray = field(default_factory=lambda: frozen([[0.0]]))


def picked(values: FloatArray, member: IntArray) -> FloatArray:
    """The values (case,) of one member (1 or case,) per case; values (1 or case, 1 or member)."""
    if values.shape[1] == 1:
        return values[:, 0]
    cases = max(len(values), member.size)
    return np.broadcast_to(values, (cases, values.shape[1]))[np.arange(cases), member]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Drive:
    """What the base or gate gets in this duty, as far as it is stated (magnitudes)."""

    V_off: Traced | None = None  # reverse base-emitter or gate-source voltage while off [V]
    V_on: Traced | None = None  # gate-source voltage while on [V]
    I_B: Traced | None = None  # base current while on [A]
    I_on: Traced | None = None  # current that this drive must carry in saturation / on [A], per device
    saturates: bool = False  # the duty relies on saturation (on-state) being reached
    I_B2: Traced | None = None  # reverse base current while turning off [A]
    R_G: Traced | None = None  # gate resistance [ohm]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Limiter:
    """A current limiter that the levels of a duty are worked out without, (case,) each."""

    I_limit: Traced  # what it lets through into a short [A]
    I_peak: Traced  # greatest current that the levels ask for where it stands [A]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Fitted:
    """The device as it sits in the circuit: which half, how many share the current, how unevenly.

    share is the worst device's part of the total current, 1/count when it is even or stated so. share_missing is
    set when more than one device shares and nothing says how evenly: current-dependent findings are then unproven.
    """

    device: Device
    half: str | None = None  # push-pull with a complement: "upper" / "lower"
    count: int = 1  # devices in parallel
    share: Traced
    share_missing: Missing | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Duty:
    """One operating situation of a stage, for the worst of its parallel devices.

    locus: function of the junction temperature (case, member) [K], or None while unknown; gives the Locus.
    heat_ratio: dissipation of all devices of the stage over this device's, (1 or case, 1). [1]
    others: heat of all other devices of the stage, (1 or case, 1 or member) [W], for held points at which it is no
    fixed multiple of this device's; counts in place of heat_ratio.
    facts: traced values of the duty for the sheet, the governing formula first.
    facts_at: function of a chosen member (case,): its own working, ready to be redone by hand, the result first.
    unknown: what the load kind lacked; findings that need the locus are then unproven.
    after: name of the duty whose temperatures a one-shot duty starts from; None: the hottest steady duty.
    T_start: junction temperature just before a one-shot duty, where the user states it.
    listed: False for a duty that only carries findings (`any-level`) and has no row of its own.
    """

    name: str
    half: str | None = None
    members: Members = field(default_factory=Members)
    locus: Callable[[FloatArray | None], Locus] | None
    heat_ratio: FloatArray
    others: FloatArray | None = None
    facts: tuple[Traced, ...] = ()
    facts_at: Callable[[IntArray], tuple[Traced, ...]] | None = None
    unknown: tuple[Missing, ...] = ()
    after: str | None = None
    T_start: Traced | None = None
    drive: Drive | None = None
    termination: Literal["open", "resistor", "reverse"] = "open"  # what the base sees while only leakage flows
    R_BE: Traced | None = None  # with termination "resistor" [ohm]
    I_B_peak: Traced | None = None  # base current at the current peak, where the kind knows it better than I/h_FE
    listed: bool = True
    level: Level | None = None  # which level of a signal this duty is, where it is one
    load_angle: Traced | None = None  # of the load at that level [deg]
    limiter: Limiter | None = None
