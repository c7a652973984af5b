"""A `resistive` stage as its file states it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, cast

import numpy as np

from soacheck.load.kind import Surround
from soacheck.load.parts import turn_off_drive
from soacheck.load.parts.family import FAMILIES, Family, family_of
from soacheck.load.parts.quiescent import Bias, Way
from soacheck.load.parts.resistive_keys import ONLY_WITH
from soacheck.load.parts.turn_off_drive import TurnOffDrive
from soacheck.table import Cells, Missing
from soacheck.trace import Traced


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Resistive:
    """A resistive stage as its file states it; None where it states nothing. Currents are the whole stage's.

    absent: what the file does not state, for the findings to name.
    """

    family: Family
    use: Literal["held", "swing", "switched"]
    supply: Traced | None  # [V]
    upper: Traced | None  # [ohm]
    lower: Traced | None  # [ohm]
    R_ac: Traced | None = None  # [ohm]
    bias: Bias | None = None
    f: Traced | None = None  # [Hz]
    duty_factor: Traced | None = None
    t_r: Traced | None = None  # [s]
    t_f: Traced | None = None  # [s]
    turn_off: TurnOffDrive
    I_B: Traced | None = None  # [A]
    V_GS: Traced | None = None  # [V]
    absent: tuple[Missing, ...] = ()

    def lacks(self, *names: str) -> tuple[Missing, ...]:
        """Those of these keys of `[load]` that the file does not state."""
        return tuple(item for item in self.absent if item.key.rpartition(".")[2] in names)


def read(cells: Cells, surround: Surround) -> Resistive:
    """The stage of a `[load]` table."""
    family = family_of(surround.device_kind)
    bias_cells = cells.inside("bias")
    use = cells.text("use")
    _refuse_other_uses(cells, use, family)
    names = (
        family.supply,
        family.upper,
        family.lower,
        "R_ac",
        "f",
        "duty_factor",
        "t_r",
        "t_f",
    )
    values = {name: _quantity(cells, name) for name in names}
    supply, upper, lower = values[family.supply], values[family.upper], values[family.lower]
    if upper is not None and lower is not None and np.any(upper.value + lower.value <= 0):
        cells.refuse(
            family.upper,
            f"{family.upper} and {family.lower} are both 0: no resistance limits the current",
            f'{family.upper} = "20 ohm"',
        )
    bias = _read_bias(cells, bias_cells, family)
    if bias is not None:
        _refuse_excess_current(cells, family, bias.I_Q, supply, upper)
    _refuse_slow_edges(cells, values["f"], values["duty_factor"], values["t_r"], values["t_f"])
    return Resistive(
        family=family,
        use=cast(Literal["held", "swing", "switched"], use or "held"),
        supply=supply,
        upper=upper,
        lower=lower,
        R_ac=values["R_ac"],
        bias=bias,
        f=values["f"],
        duty_factor=values["duty_factor"],
        t_r=values["t_r"],
        t_f=values["t_f"],
        turn_off=turn_off_drive.read(cells),
        I_B=None if family.gate else _quantity(cells, "I_B"),
        V_GS=_quantity(cells, "V_GS") if family.gate else None,
        absent=tuple(cells.missing(name) for name in (*names, family.quiescent) if not cells.has(name)),
    )


def _quantity(cells: Cells, name: str) -> Traced | None:
    value = cells.quantity(name)
    return None if value is None else value.named(name)


def _refuse_other_uses(cells: Cells, use: str | None, family: Family) -> None:
    """A key that this use would not read is refused: nothing that a file states is passed over."""
    if use is None:
        return
    foreign = {name for other in FAMILIES for name in other.names} - set(family.names)  # refused by the table
    for names, uses in ONLY_WITH:
        for name in names:
            if use not in uses and name not in foreign and cells.has(name):
                read_by = " or ".join(f'use = "{one}"' for one in uses)
                problem = f'use = "{use}" does not read it, only {read_by} does'
                cells.refuse(name, problem, f"leave {name} out, or {read_by}")


def _refuse_excess_current(
    cells: Cells, family: Family, I_Q: Traced | None, supply: Traced | None, upper: Traced | None
) -> None:
    """A stated current that the supply cannot drive through the upper resistor, at any stated value of the three."""
    if I_Q is None or supply is None or upper is None:
        return
    with np.errstate(divide="ignore"):
        most = supply.value / upper.value
    if np.any(I_Q.value > most):
        problem = f"{family.supply} drives no more than {float(np.min(most)):.4g} A through {family.upper}"
        cells.refuse(family.quiescent, problem, f"a smaller {family.quiescent}, or the right {family.upper}")


def _refuse_slow_edges(
    cells: Cells, f: Traced | None, duty_factor: Traced | None, t_r: Traced | None, t_f: Traced | None
) -> None:
    if f is None or duty_factor is None:
        return
    edges = (("t_r", t_r, duty_factor.value, "on"), ("t_f", t_f, 1 - duty_factor.value, "off"))
    for name, edge, share, what in edges:
        if edge is not None and np.any(edge.value * f.value > share):
            room = float(np.min(share / f.value))
            problem = f"longer than the {what} time of a period, {room:g} s"
            cells.refuse(name, problem, "a shorter time, a lower f or another duty_factor")


def _read_bias(cells: Cells, table: Cells | None, family: Family) -> Bias | None:
    """The one stated way of setting the quiescent point; None where there is none, or it was refused."""
    I_Q = _quantity(cells, family.quiescent)
    if table is None:
        return None if I_Q is None else Bias(way="current", I_Q=I_Q)
    if I_Q is not None:
        cells.refuse(
            family.quiescent,
            "the quiescent current is stated, and [load.bias] sets it as well",
            f"{family.quiescent} or [load.bias], not both",
        )
        return None
    R_1, R_2, V_BB = (_quantity(table, name) for name in ("R_1", "R_2", family.bias))
    R_B = None if family.gate else _quantity(table, "R_B")
    ways: list[Way] = []
    if R_1 is not None or R_2 is not None:
        ways.append("divider")
    if V_BB is not None:
        ways.append("supply")
    elif R_B is not None:
        ways.append("resistor")
    choices = f"R_1 and R_2, or {family.bias}" + ("" if family.gate else ", or R_B")
    if len(ways) > 1 or ("divider" in ways and R_B is not None):
        cells.refuse("bias", "[load.bias] states two ways of setting the quiescent point", f"one of them: {choices}")
        return None
    if not ways:
        cells.refuse("bias", "[load.bias] states nothing that sets the quiescent point", choices)
        return None
    if ways == ["divider"] and (R_1 is None or R_2 is None):
        lacking = "R_1" if R_1 is None else "R_2"
        cells.refuse("bias", f"a divider wants two resistors, {lacking} is not stated", f'{lacking} = "4.7 kohm"')
        return None
    return Bias(way=ways[0], R_1=R_1, R_2=R_2, R_B=R_B, V_BB=V_BB)
