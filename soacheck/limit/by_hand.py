"""What an engineer needs to redo a safe-area allowance by hand: one printed curve at one voltage and temperature."""

from __future__ import annotations

import re

import numpy as np

from soacheck.device.laws import COMMON_PRACTICE
from soacheck.device.soa import breakdown_factor, effective_points
from soacheck.limit.allowance import Line, Lines, allowed
from soacheck.limit.found import Verdict
from soacheck.limit.judged import Judged
from soacheck.trace import BoolArray, FloatArray, IntArray, Traced, derived, found, given


def hand_calculation(
    judged: Judged, lines: Lines, decided: Verdict, v: FloatArray, curve: IntArray, wanted: BoolArray
) -> tuple[Traced, ...]:
    """The curves that govern, at the voltage (case,) that touches: dc always, one width of pulse curve where wanted.

    curve: number of the pulse curve (case,), rising width, dc last. wanted: cases in which it is to be shown.
    """
    used: list[Line] = []
    for number, width in enumerate(lines.widths):
        if bool(np.any(wanted & (curve == number))):
            used += [line for line in lines.pulses if line.pulse == width]
    measure = lines.longest
    if measure is not None and measure not in used:
        used.append(measure)
    return tuple(part for line in used for part in _one(judged, line, decided, v))


def plain_name(label: str) -> str:
    """A curve's label as part of a symbol."""
    return re.sub(r"\W", "", label) or "curve"


def _one(judged: Judged, line: Line, decided: Verdict, v: FloatArray) -> tuple[Traced, ...]:
    name = plain_name(line.label)
    member = decided.member[:, None]
    value = (allowed(line, v[:, None, None], member).current * line.factor[:, None, None])[:, 0, 0]
    T = found(f"T_{name}", decided.of(line.T), "degC", "temperature that the curve is scaled to")
    T_ref = given("T_ref", line.curve.T_ref, "degC", line.curve.source or f"safe-area chart, {line.label}")
    T_j_max = judged.device.max.T_j.named("T_j_max")
    V = found("V", v, "V", "voltage at the point that touches")
    factor = _factor(line, T, T_ref, T_j_max, name)
    at = V
    if line.voltage_scaled:
        at = derived(f"V_{name}", f"V / {factor.symbol}", "V", V, factor)
    printed = _printed(line, at, name)
    scaled = printed if line.voltage_scaled else _scaled(line, at, printed, factor, name)
    parts = [scaled]
    k = judged.rules.safe_area.named("k_SOA")
    if line.Z is not None:
        Z = found(
            f"Z_{name}",
            line.Z[:, 0],
            "K/W",
            "thermal resistance from the junction for this width: R_th for dc, Z_th of the ladder for a pulse",
        )
        parts.append(derived(f"I_{name}_heat", f"(T_j_max - {T.symbol}) / ({Z.symbol} * V)", "A", T_j_max, T, Z, V))
    rating = given("I_rating", line.rating, "A", "current rating for this pulse width")
    names = ", ".join(part.symbol for part in parts)
    total = derived(f"I_{name}_allowed", f"k_SOA * min(I_rating, {names})", "A", k, rating, *parts)
    if bool(np.all(np.isclose(total.value, value, rtol=1e-9, equal_nan=True))):
        return (*_order(T, factor, printed, parts), total)
    how = "k_SOA times the least of rating, flat, scaled curve (it goes on under the flat) and dissipation line"
    return (*_order(T, factor, printed, parts), found(f"I_{name}_allowed", value, "A", how, k, rating, *parts))


def _scaled(line: Line, V: Traced, printed: Traced, factor: Traced, name: str) -> Traced:
    """The printed curve times the factor; left of its corner, the line that goes on to the left under the flat."""
    points, symbol = effective_points(line.curve), f"I_{name}_scaled"
    if len(points) == 1 and line.Z is not None:
        return printed  # a rectangle has no line of its own; dissipation alone scales it
    if not bool(np.all((V.value > 0) & (V.value <= points[0, 0]))):
        return derived(symbol, f"{printed.symbol} * {factor.symbol}", "A", printed, factor)
    source = line.curve.source or f"safe-area chart, {line.label}"
    corner = given("V_1", points[0, 0], "V", f"{source}: corner of the flat")
    ends, steep = [corner], "1"
    if len(points) > 1:
        steep = f"max(1, ln({printed.symbol} / I_2) / ln(V_2 / V_1))"
        ends += [
            given("V_2", points[1, 0], "V", f"{source}: printed point"),
            given("I_2", points[1, 1], "A", f"{source}: printed point"),
        ]
    on = derived(
        f"I_{name}_line",
        f"{printed.symbol} * (V_1 / {V.symbol}) ** {steep}",
        "A",
        printed,
        V,
        *ends,
        source="the line below the flat goes on under it, no flatter than constant power",
    )
    return derived(symbol, f"min({printed.symbol}, {on.symbol} * {factor.symbol})", "A", printed, on, factor)


def _order(T: Traced, factor: Traced, printed: Traced, parts: list[Traced]) -> tuple[Traced, ...]:
    return tuple(dict.fromkeys((T, factor, printed, *parts)))


def _factor(line: Line, T: Traced, T_ref: Traced, T_j_max: Traced, name: str) -> Traced:
    """The second-breakdown factor of the device's convention."""
    symbol, derating = f"F_{name}", line.derating
    like = line.Z is None or derating.convention == "like-dissipation"
    if like:
        source = derating.source if derating.stated else f"{COMMON_PRACTICE}: the cautious convention"
        return derived(
            symbol, f"max(0, min(1, (T_j_max - {T.symbol}) / (T_j_max - T_ref)))", "1", T_j_max, T, T_ref, source=source
        )
    value = breakdown_factor(derating, T.value, line.curve.T_ref, T_j_max.value)
    points = derating.points
    if derating.convention == "own-curve" and points is not None and len(points) > 1:
        whole = _own_factor(symbol, line, T, T_ref, T_j_max, points)
        if bool(np.all(np.isclose(whole.value, value, rtol=1e-9, equal_nan=True))):
            return whole
    how = (
        "chart drawn for T_j at its maximum: not derated"
        if derating.convention == "held"
        else "read at T from the device's own derating curve"
    )
    return found(symbol, value, "1", how, T, source=derating.source)


def _own_factor(symbol: str, line: Line, T: Traced, T_ref: Traced, T_j_max: Traced, points: FloatArray) -> Traced:
    """The device's own derating curve, straight between the two points about a temperature."""
    k = np.clip(np.searchsorted(points[:, 0], T.value), 1, len(points) - 1)
    source = line.derating.source or "derating curve of second breakdown"
    ends = [
        given(f"{what}_{n}", points[k - 2 + n, column], unit, f"{source}: stated point")
        for n in (1, 2)
        for column, what, unit in ((0, "T", "degC"), (1, "F", "1"))
    ]
    formula = f"F_1 + (F_2 - F_1) * max(0, min(1, ({T.symbol} - T_1) / (T_2 - T_1)))"
    if bool(np.all(T.value > points[-1, 0])):  # past its end the cautious convention counts where it is lower
        like = f"(T_j_max - {T.symbol}) / (T_j_max - T_ref)"
        return derived(symbol, f"max(0, min({formula}, {like}))", "1", T, *ends, T_j_max, T_ref, source=source)
    return derived(symbol, formula, "1", T, *ends, source=source)


def _printed(line: Line, at: Traced, name: str) -> Traced:
    """The printed curve at a voltage, as a power law between the two points about it."""
    points = effective_points(line.curve)
    symbol, v = f"I_{name}_printed", at.value
    source = line.curve.source or f"safe-area chart, {line.label}"
    corner = points[0]
    if len(points) == 1 or bool(np.all(v <= corner[0])):
        return given(symbol, corner[1], "A", f"{source}: the flat of the curve", line.curve.grade)
    k = np.clip(np.searchsorted(points[:, 0], v), 1, len(points) - 1)
    ends = [
        given(f"{what}_{n}", points[k - 2 + n, column], unit, f"{source}: printed point")
        for n in (1, 2)
        for column, what, unit in ((0, "V", "V"), (1, "I", "A"))
    ]
    # Left of the corner the curve is flat; where some case stands there, the formula says so.
    volts = at.symbol if bool(np.all((v > corner[0]) | np.isnan(v))) else f"max({at.symbol}, V_1)"
    formula = f"I_1 * ({volts} / V_1) ** (ln(I_2 / I_1) / ln(V_2 / V_1))"
    return derived(symbol, formula, "A", at, *ends, source="straight on log-log paper", grade=line.curve.grade)
