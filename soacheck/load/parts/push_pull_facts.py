"""The lines of the sheet that a push-pull duty can be redone from by hand: ideal class B, and what was
searched.

Everything is for the worst device of one half. Terms that are nought in the file (V_sat, resistors, load
angle) are left out of the formulas.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.duty import Fitted
from soacheck.load.parts.impedance import Element, traced_elements
from soacheck.load.parts.push_pull_stage import PushPull, law_of
from soacheck.trace import FloatArray, Traced, derived, found, given

SINE_SOURCE = "class B: rail power of the half less half of the load's and the resistor's (own derivation)"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Sheet:
    """Traced values of one stage at one frequency (or held): what the formulas of its duties are made from.

    cos: the factor of the load angle in formulas, empty for a resistance; symbols used by a formula are
    picked by `of`.
    """

    named: dict[str, Traced]
    resistive: bool
    load: PushPull

    @property
    def cos(self) -> str:
        return "" if self.resistive else "*cos(phi*pi/180)"

    @property
    def has_r(self) -> bool:
        return "r_E" in self.named

    def of(self, symbol: str, formula: str, unit: str, *more: Traced, source: str = "") -> Traced:
        """A derived value whose inputs are found among the named values and `more`."""
        known = {**self.named, **{value.symbol: value for value in more}}
        words = _names(formula)
        return derived(symbol, formula, unit, *(value for name, value in known.items() if name in words), source=source)


def _names(formula: str) -> set[str]:
    name, names = "", set()
    for letter in formula + " ":
        if letter.isalnum() or letter == "_":
            name += letter
        else:
            names.add(name)
            name = ""
    return names


def sheet_of(load: PushPull, fitted: Fitted, f: Traced | None) -> Sheet:
    """The values of a stage at the frequency f (case,), or held."""
    named = {"V_rail": load.V_rail.named("V_rail"), "share": fitted.share.named("share")}
    Z = load.Z_at(np.ones((1, 1)) if f is None else f.value[:, None])[:, 0]
    inputs = traced_elements(load.load)
    at_f = () if f is None or load.resistive else (f,)
    if isinstance(load.load, Element) and load.load.kind == "R":
        formula, size = ("R/2" if load.bridged else "R"), inputs[0]
        named["Z_mod"] = derived("Z_mod", formula, "ohm", size)
    else:
        what = "magnitude of the load's impedance" + (", half of it for each amplifier" if load.bridged else "")
        named["Z_mod"] = found("Z_mod", np.abs(Z), "ohm", what, *inputs, *at_f)
    if load.resistive:
        named["phi"] = given("phi", 0.0, "deg", "the load is a pure resistance")
    else:
        named["phi"] = found("phi", np.degrees(np.angle(Z)), "deg", "angle of the load's impedance", *inputs, *at_f)
    if bool(np.any(load.V_sat.value > 0)):
        named["V_sat"] = load.V_sat.named("V_sat")
    if bool(np.any(load.R_E.value > 0)):
        named["pairs"] = given("pairs", float(load.pairs), "1", "load.pairs")
        R = load.R_E.named(load.R_name)
        named["r_E"] = derived("r_E", f"{load.R_name}/pairs", "ohm", R, named["pairs"])
    sheet = Sheet(named=named, resistive=load.resistive, load=load)
    top = "(V_rail - V_sat)" if "V_sat" in named else "V_rail"
    if not sheet.has_r:
        formula = top.strip("()")
    elif load.resistive:
        formula = f"{top}*Z_mod/(Z_mod + r_E)"
    else:
        formula = f"{top}*Z_mod/sqrt(Z_mod**2 + 2*r_E*Z_mod*cos(phi*pi/180) + r_E**2)"
    named["V_max"] = sheet.of("V_max", formula, "V", source="largest unclipped swing of one output")
    return sheet


def worst_swing(sheet: Sheet) -> Traced:
    """Output peak of greatest mean dissipation on a sine, ideal class B."""
    if sheet.has_r:
        formula = f"min(V_max, 2*V_rail*Z_mod/(pi*(Z_mod{sheet.cos} + r_E)))"
    elif sheet.resistive:
        formula = "min(V_max, 2*V_rail/pi)"
    else:
        formula = "min(V_max, 2*V_rail/(pi*cos(phi*pi/180)))"
    return sheet.of("V", formula, "V", source="derivative of the mean dissipation set to 0")


def worst_held(sheet: Sheet) -> Traced:
    """Held output voltage of greatest dissipation, ideal class B."""
    formula = "min(V_max, V_rail*Z_mod/(2*(Z_mod + r_E)))" if sheet.has_r else "min(V_max, V_rail/2)"
    return sheet.of("V", formula, "V", source="derivative of the dissipation set to 0")


def stated_swing(sheet: Sheet) -> Traced:
    """Output peak of a level stated in the file."""
    load = sheet.load
    if load.level == "clipped" or load.level_value is None:
        return sheet.of("V", "V_max", "V", source="the output stays at its largest swing")
    if load.level == "ratio":
        return sheet.of("V", "level*V_max", "V", load.level_value.named("level"))
    formula = "min(V_max, level/2)" if load.bridged else "min(V_max, level)"
    return sheet.of("V", formula, "V", load.level_value.named("level"))


def looked_at(sheet: Sheet, V: FloatArray) -> Traced:
    """Output peak (case,) of a level that was looked at, as a part of the largest swing."""
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = V / sheet.named["V_max"].value
    ends = "from silence to the largest swing" if sheet.load.f is not None else "between the largest swings either way"
    level = found("level", ratio, "1", f"level that governs, of those looked at {ends}")
    return sheet.of("V", "level*V_max", "V", level)


def other_way(V: Traced) -> Traced:
    """The same output voltage towards the other half's rail."""
    return derived("V", "-V_out", "V", V.named("V_out"), source="the other half carries the load")


def sine_facts(sheet: Sheet, V: Traced, P_mean: FloatArray, fitted: Fitted) -> tuple[Traced, ...]:
    """Governing formula first: what the crossover makes of the mean dissipation, then that of ideal class B."""
    resistor = " - r_E*V**2/(4*Z_mod**2)" if sheet.has_r else ""
    P_B = sheet.of(
        "P_B",
        f"share*(V_rail*V/(pi*Z_mod) - V**2{sheet.cos}/(4*Z_mod){resistor})",
        "W",
        V,
        source=SINE_SOURCE,
    )
    facts = [P_B]
    if not sheet.load.class_b:
        how = f"mean of v_CE i_C over one period of straight lines; {law_of(fitted.device.kind)}"
        facts.insert(0, found("P_AB", P_mean, "W", how, V, *_crossing(sheet)))
    if sheet.resistive:
        peak = "share*V_rail**2/(4*(Z_mod + r_E))" if sheet.has_r else "share*V_rail**2/(4*Z_mod)"
        said = "greatest instantaneous dissipation, ideal class B, once the output passes half of the rail"
    else:
        peak = "share*2*V_rail**2/Z_mod*sin(pi/6 + max(phi, -phi)*pi/540)**3"
        said = "greatest instantaneous dissipation, ideal class B driven to the rail: a bound at lower levels"
    facts += [sheet.of("P_peak_B", peak, "W", source=said), sheet.of("I_load_peak", "V/Z_mod", "A", V)]
    return (*facts, *_always(sheet, V))


def _crossing(sheet: Sheet) -> tuple[Traced, ...]:
    """What the crossover is worked out from, besides the output."""
    names = [name for name in ("V_rail", "share", "Z_mod", "phi", "r_E") if name in sheet.named]
    return (*(sheet.named[name] for name in names), sheet.load.I_Q.named("I_Q"))


def held_facts(sheet: Sheet, V: Traced, P_mean: FloatArray, fitted: Fitted) -> tuple[Traced, ...]:
    """Governing formula first: dissipation of one half while the output is held at V.

    V is positive towards the rail of the half looked at, whose mirror image the other half is; below 0 the other half
    carries the load, and this one stands at its own rail and the output together.
    """
    resistor = " - r_E*max(V, 0)/Z_mod" if sheet.has_r else ""
    across = "output held at V, positive towards this half's own rail: voltage across the half, ideal class B"
    V_half = sheet.of("V_half", f"V_rail - V{resistor}", "V", V, source=across)
    facts = [sheet.of("P_B", "share*V_half*max(V, 0)/Z_mod", "W", V, V_half, source="ideal class B, output held at V")]
    if not sheet.load.class_b:
        facts.insert(
            0,
            found(
                "P_AB",
                P_mean,
                "W",
                law_of(fitted.device.kind),
                V,
                *_crossing(sheet),
            ),
        )
    facts += [V_half, sheet.of("I_load", "V/Z_mod", "A", V)]
    return (*facts, *_always(sheet, V))


def clipped_facts(sheet: Sheet, V: Traced, P_mean: FloatArray, overdrive: float) -> tuple[Traced, ...]:
    """What a clipped duty is made from."""
    answer = "the load's current to it" if sheet.resistive else "the load's current to it, odd harmonics summed"
    how = f"mean of v_CE i_C over one period; sine of {overdrive:g} V_max cut off at V_max, {answer}"
    return (found("P_clipped", P_mean, "W", how, V, *sheet.named.values()), *_always(sheet, V))


def _always(sheet: Sheet, V: Traced) -> tuple[Traced, ...]:
    bridged = (sheet.of("V_load", "2*V", "V", V, source="across the load, between the two outputs"),)
    return (V, *(bridged if sheet.load.bridged else ()), *(sheet.named[k] for k in ("V_max", "Z_mod", "phi")))


def idle_facts(load: PushPull, fitted: Fitted) -> tuple[Traced, ...]:
    """Dissipation of one device of the idling stage."""
    inputs = [
        load.V_rail.named("V_rail"),
        load.I_Q.named("I_Q"),
        fitted.share.named("share"),
        given("pairs", float(load.pairs), "1", "load.pairs"),
    ]
    across = "V_rail"
    if bool(np.any(load.R_E.value > 0)):
        across = f"(V_rail - {load.R_name}*I_Q)"
        inputs.append(load.R_E.named(load.R_name))
    return (derived("P_idle", f"share*pairs*{across}*I_Q", "W", *inputs),)


def shorted_facts(load: PushPull, fitted: Fitted, *, half_time: bool) -> tuple[Traced, ...]:
    """Dissipation of one device into a shorted output."""
    if load.I_limit is None:
        return ()
    inputs = [load.V_rail.named("V_rail"), load.I_limit.named("I_limit"), fitted.share.named("share")]
    across = "V_rail"
    if bool(np.any(load.R_E.value > 0)):
        across = f"(V_rail - {load.R_name}/pairs*I_limit)"
        inputs += [load.R_E.named(load.R_name), given("pairs", float(load.pairs), "1", "load.pairs")]
    P_on = derived("P_short", f"share*{across}*I_limit", "W", *inputs, source="output at 0 V, the half at its limit")
    if not half_time:
        return (P_on,)
    return (
        derived("P_short_mean", "P_short/2", "W", P_on, source="each half conducts half of the period"),
        P_on,
    )
