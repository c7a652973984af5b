"""The safe-area curves of a rating file and how they fall with temperature, checked for order and shape.

Whether a point may lie above the current or voltage rating is left to the limits: charts differ there.
"""

from __future__ import annotations

import math
from itertools import combinations
from pathlib import Path

import numpy as np

from soacheck.device.ratings import SafeAreaCurve, SafeAreaDerating
from soacheck.device.soa import curve_current, effective_points
from soacheck.quantity import write
from soacheck.table import Cells, Document
from soacheck.trace import FloatArray, Traced, distinct, frozen

_LINE = 'points = [["10 V", "15 A"], ["50 V", "3 A"], ["160 V", "0.2 A"]]'
_SMALLEST, _LARGEST = 1e-6, 2e4  # [V] and [A]
_LONGEST = 200  # points; a printed curve has three to six corners
_ABOVE = 1.2  # two charts read by eye, each to 10 %
_DRIVE = ("V_BE_off", "I_B2", "R_G", "T_j_valid")


def read_curves(document: Document, T_j_max: float | None, assumptions: list[str]) -> tuple[SafeAreaCurve, ...]:
    """All curves of the file, in its order; what had to be assumed is added to `assumptions`."""
    file = Path(document.file).name
    read = [(cells, _curve(cells, T_j_max, file)) for cells in document.listed("soa")]
    stated = [(cells, curve) for cells, curve in read if curve is not None]
    for (_, first), (cells, second) in combinations(stated, 2):
        _refuse_twice(cells, first, second)
        _refuse_crossed(cells, first, second)
    undated = [curve.label for cells, curve in stated if curve.bias == "forward" and not cells.has("T_ref")]
    if undated:
        which = f"curve {undated[0]} is" if len(undated) == 1 else f"curves {', '.join(undated)} are"
        assumptions.append(f"safe-area {which} drawn for 25 degC (T_ref not stated)")
    return tuple(curve for _, curve in stated)


def read_derating(document: Document, curves: tuple[SafeAreaCurve, ...], assumptions: list[str]) -> SafeAreaDerating:
    """The second-breakdown convention; silent files take the cautious one."""
    cells = document.table("soa_derating")
    stated = cells.has("convention")
    convention = cells.text("convention") if stated else "like-dissipation"
    source = f"{Path(document.file).name}: soa_derating.convention"
    points = cells.points("points")
    if convention == "own-curve":
        if not cells.has("points"):
            line = 'points = [["25 degC", "100 %"], ["150 degC", "45 %"]]'
            cells.refuse("convention", '"own-curve" needs the points of that curve', line)
        if points is None or not _line_in_order(cells, points):
            return SafeAreaDerating()
        return SafeAreaDerating(convention="own-curve", points=frozen(points), stated=True, source=source)
    if cells.has("points"):
        cells.refuse("points", "points belong to the convention own-curve", 'convention = "own-curve"')
    if convention == "held":
        return SafeAreaDerating(convention="held", stated=True, source=source)
    if not stated and any(curve.bias == "forward" for curve in curves):
        assumptions.append(
            "second breakdown falls with temperature like dissipation, the cautious convention"
            " (soa_derating.convention not stated)"
        )
    return SafeAreaDerating(stated=stated, source=source if stated else "cautious convention")


def _curve(cells: Cells, T_j_max: float | None, file: str) -> SafeAreaCurve | None:
    bias = "reverse" if cells.text("bias") == "reverse" else "forward"
    named = _pulse(cells, bias)
    points = _points(cells)
    T_ref, reading = cells.quantity("T_ref"), cells.quantity("reading")
    duty_factor = cells.quantity("duty_factor")
    single = cells.flag("single") is not False
    if not single and not cells.has("duty_factor"):
        cells.refuse("single", "a curve for repeated pulses holds for one duty factor", 'duty_factor = "10 %"')
    if single and cells.has("duty_factor"):
        cells.refuse("duty_factor", "only a curve for repeated pulses has a duty factor", "single = false")
    if bias == "forward":
        for name in _DRIVE:
            if cells.has(name):
                cells.refuse(name, "this is a condition of a turn-off area", 'bias = "reverse"')
        if T_ref is not None and T_j_max is not None and not T_ref.at(0) < T_j_max:
            cells.refuse("T_ref", "a chart is drawn for a temperature below max.T_j", 'T_ref = "25 degC"')
    if named is None or points is None or T_ref is None or reading is None:
        return None
    label, pulse = named
    if not single and math.isinf(pulse):
        cells.refuse("single", "a dc curve has no pulses to repeat", "leave `single` out")
    return SafeAreaCurve(
        label=label,
        pulse=pulse,
        points=points,
        T_ref=T_ref.at(0),
        node="ambient" if cells.text("node") == "ambient" else "case",
        bias="reverse" if bias == "reverse" else "forward",
        single=single,
        duty_factor=duty_factor.at(0) if duty_factor is not None else None,
        grade=cells.text("grade") or "guaranteed",
        reading=reading.at(0),
        source=f"{file}: soa[{label}]",
        V_BE_off=cells.quantity("V_BE_off"),
        I_B2=cells.quantity("I_B2"),
        R_G=cells.quantity("R_G"),
        T_j_valid=cells.quantity("T_j_valid"),
    )


def _pulse(cells: Cells, bias: str) -> tuple[str, float] | None:
    """What the curve is called, and its pulse width [s]: inf for dc and a turn-off area without one."""
    if cells.text("pulse") == "dc":
        return "dc", math.inf
    if cells.has("pulse"):
        width = cells.quantity("pulse")
        raw = cells.raw("pulse")
        if width is None:
            return None
        return (raw.strip() if isinstance(raw, str) else write(width.at(0), "time")), width.at(0)
    if bias == "reverse":
        return "reverse", math.inf
    cells.refuse("pulse", "a curve needs its pulse width", 'pulse = "dc", or pulse = "10 ms"')
    return None


def _points(cells: Cells) -> FloatArray | None:
    points = cells.points("points")
    if points is None:
        return None
    v, i = points[:, 0], points[:, 1]
    problem, remedy = "", ""
    if not 2 <= len(points) <= _LONGEST:
        problem, remedy = "a curve needs two points at least", _LINE
    elif not bool(np.all(points > 0)):
        problem = "log-log paper has no zero: voltages and currents must be above 0"
        remedy = "leave such a point out; the curve ends at its last point"
    elif not bool(np.all((points >= _SMALLEST) & (points <= _LARGEST))):
        problem, remedy = "points lie between 1 uV, 1 uA and 20 kV, 20 kA", "check the units of the points"
    elif not bool(np.all(np.diff(v) > 0)):
        number = int(np.argmax(np.diff(v) <= 0)) + 2
        problem = f"voltages must rise from point to point, but point {number} does not"
        remedy = "put the points in order of voltage; leave a vertical line at the end out"
    elif not bool(np.all(np.diff(i[int(np.argmax(i)) :]) <= 0)):
        corner = int(np.argmax(i))
        number = corner + int(np.argmax(np.diff(i[corner:]) > 0)) + 2
        problem = f"right of its highest current a safe area never rises, but point {number} does"
        remedy = "read the point again"
    if problem:
        cells.refuse("points", problem, remedy)
        return None
    return frozen(points)


def _line_in_order(cells: Cells, points: FloatArray) -> bool:
    T, factor = points[:, 0], points[:, 1]
    problem = ""
    if not 2 <= len(points) <= _LONGEST:
        problem = "a derating line needs two points at least"
    elif not bool(np.all(np.diff(T) > 0)):
        problem = "temperatures must rise from point to point"
    elif not bool(np.all((factor >= 0) & (factor <= 1))):
        problem = "factors lie between 0 and 100 %"
    elif not bool(np.all(np.diff(factor) <= 0)):
        problem = "a derating line never rises with temperature"
    if problem:
        cells.refuse("points", problem, 'points = [["25 degC", "100 %"], ["150 degC", "45 %"]]')
    return not problem


def _family(curve: SafeAreaCurve) -> tuple[object, ...]:
    """What curves must share to be compared: forward ones, drawn the same way."""
    return curve.bias, curve.node, curve.single, curve.duty_factor


def _refuse_twice(cells: Cells, first: SafeAreaCurve, second: SafeAreaCurve) -> None:
    if _family(first) != _family(second) or first.pulse != second.pulse:
        return
    if first.bias == "reverse":
        drives = [[getattr(curve, name) for name in _DRIVE] for curve in (first, second)]
        if [_si(each) for each in drives[0]] != [_si(each) for each in drives[1]]:
            return
        said = "two turn-off areas state the same conditions"
        cells.refuse("bias", said, "state V_BE_off, I_B2 or R_G of each")
    else:
        said = f"there are two curves for {second.label}"
        cells.refuse("pulse", said, "keep one; a curve for repeated pulses says single = false")


def _si(value: Traced | None) -> float | None:
    return None if value is None else value.at(0)


def _refuse_crossed(cells: Cells, first: SafeAreaCurve, second: SafeAreaCurve) -> None:
    """A longer pulse is never allowed more: such a pair was swapped or misread."""
    if _family(first) != _family(second) or first.bias == "reverse" or first.T_ref != second.T_ref:
        return
    longer, shorter = sorted((first, second), key=lambda curve: -curve.pulse)
    upper, lower = effective_points(shorter), effective_points(longer)
    v = distinct(np.concatenate([upper[:, 0], lower[:, 0]]))
    above = curve_current(lower, v) / curve_current(upper, v)
    worst = int(np.nanargmax(above))
    if above[worst] > _ABOVE:
        cells.refuse(
            "points",
            f"at {v[worst]:.4g} V the curve for {longer.label} lies {100 * (above[worst] - 1):.0f} % above"
            f" the one for {shorter.label}; a longer pulse is never allowed more",
            "are the two swapped, or a point misread?",
        )
