"""The three forms in which a rating file may state Z_th_jc; one of them, in good order."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from soacheck.table import Cells
from soacheck.trace import FloatArray, frozen

_FORMS = "pulse and value, foster, or cauer"
_LINES = {
    "pulse": 'Z_th_jc = { pulse = ["1 ms", "100 ms"], value = ["0.12 K/W", "0.6 K/W"] }',
    "foster": 'Z_th_jc = { foster = [["0.05 K/W", "0.2 ms"], ["0.78 K/W", "40 ms"]] }',
    "cauer": 'Z_th_jc = { cauer = [["0.05 K/W", "4 mJ/K"], ["0.78 K/W", "50 mJ/K"]] }',
}
_LONGEST = 1000  # points; a printed curve has a handful


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Transient:
    """Z_th_jc as stated; the fields of `ThermalData` of the same names."""

    form: Literal["none", "pulse", "foster", "cauer"] = "none"
    pulse: FloatArray | None = None
    value: FloatArray | None = None
    foster: FloatArray | None = None
    cauer: FloatArray | None = None
    grade: str = "guaranteed"


def read_transient(thermal: Cells) -> Transient:
    """Z_th_jc of [thermal]. Whether a body can have such a curve is judged where the network is built."""
    cells = thermal.inside("Z_th_jc")
    if cells is None:
        return Transient()
    grade = cells.text("grade") or "guaranteed"
    curve = cells.has("pulse") or cells.has("value")
    stated = {"pulse": curve, "foster": cells.has("foster"), "cauer": cells.has("cauer")}
    forms = [name for name, there in stated.items() if there]
    if len(forms) != 1:
        said = f"{' and '.join(forms)} are stated together" if forms else "none of its forms is stated"
        thermal.refuse("Z_th_jc", said, f"one of: {_FORMS}")
        return Transient()
    if curve:
        return _read_curve(cells, grade)
    return _read_pairs(cells, forms[0], grade)


def _read_pairs(cells: Cells, form: str, grade: str) -> Transient:
    pairs = cells.points(form)
    if pairs is None:
        return Transient()
    if not 1 <= len(pairs) <= _LONGEST or not bool(np.all(pairs > 0)):
        said = "every pair is two positive values, and at least one pair is needed"
        cells.refuse(form, said, _LINES[form])
        return Transient()
    if form == "foster":
        return Transient(form="foster", foster=frozen(pairs), grade=grade)
    return Transient(form="cauer", cauer=frozen(pairs), grade=grade)


def _read_curve(cells: Cells, grade: str) -> Transient:
    for name, other in (("pulse", "value"), ("value", "pulse")):
        if cells.has(name) and not cells.has(other):
            cells.refuse(name, f"a curve needs {other} as well", _LINES["pulse"])
            return Transient()
    pulse, value = cells.points("pulse"), cells.points("value")
    if pulse is None or value is None:
        return Transient()
    pulse, value = pulse.ravel(), value.ravel()
    if len(pulse) != len(value):
        said = f"{len(pulse)} pulse widths, but {len(value)} values"
        cells.refuse("value", said, "give one value for each pulse width")
    elif not 2 <= len(pulse) <= _LONGEST:
        cells.refuse("pulse", "a curve needs two points at least", _LINES["pulse"])
    elif not bool(np.all(np.diff(pulse) > 0)):
        cells.refuse("pulse", "pulse widths must rise from one point to the next", "order the points by time")
    elif not bool(np.all(np.diff(value) >= 0)):
        worst = int(np.argmax(np.diff(value) < 0))
        cells.refuse(
            "value",
            f"a transient curve never falls, but value {worst + 2} is below value {worst + 1}",
            "read the point again; a curve for single pulses rises to R_th_jc",
        )
    else:
        return Transient(form="pulse", pulse=frozen(pulse), value=frozen(value), grade=grade)
    return Transient()
