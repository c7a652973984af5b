"""The load as an impedance: elements, series and parallel groups, or a measured table."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

import numpy as np
import numpy.typing as npt

from soacheck.load.parts.impedance_table import read_table
from soacheck.table import Cells
from soacheck.trace import FloatArray, Traced, frozen

ComplexArray = npt.NDArray[np.complex128]

_DIMENSION = {"R": "resistance", "L": "inductance", "C": "capacitance"}
_BAND = {"R": (1e-4, 1e7), "L": (1e-10, 1e4), "C": (1e-13, 10.0)}
_FORMS = (
    '"8 ohm", { R = "6 ohm", L = "1.2 mH" }, { series = [...] }, { parallel = [...] } or { table = "z.csv" }'
)
_DEEPEST = 16


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Element:
    """One resistance [ohm], inductance [H] or capacitance [F], traced (case,)."""

    kind: Literal["R", "L", "C"]
    value: Traced


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Group:
    """Impedances in series or in parallel."""

    kind: Literal["series", "parallel"]
    parts: tuple[Impedance, ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Sampled:
    """A measured impedance: f rising [Hz], magnitude [ohm], phase [deg], each (n,).

    Between two rows the magnitude is straight on log-log paper and the phase straight over log f.
    """

    file: str
    f: FloatArray
    magnitude: FloatArray
    phase: FloatArray

    def __post_init__(self) -> None:
        for name in ("f", "magnitude", "phase"):
            object.__setattr__(self, name, frozen(getattr(self, name)))


Impedance = Element | Group | Sampled


def impedance(load: Impedance, f: FloatArray) -> ComplexArray:
    """Complex impedance at a frequency.

    Parameters
    ----------
    load : Impedance
        The load; its values have the shape (case,).
    f : ndarray, shape (case, n) or (1, n)
        Frequency. [Hz]

    Returns
    -------
    ndarray, shape (case, n)
        Impedance. [ohm]  A table outside its rows gives NaN.

    Range: f > 0.
    Source: sinusoidal steady state, Z_R = R, Z_L = j w L, Z_C = 1/(j w C).
    """
    if isinstance(load, Element):
        value = load.value.value[:, None]
        omega = 2 * np.pi * f
        if load.kind == "R":
            return np.asarray(value + 0j * omega, dtype=np.complex128)
        if load.kind == "L":
            return np.asarray(1j * omega * value, dtype=np.complex128)
        return np.asarray(1 / (1j * omega * value), dtype=np.complex128)
    if isinstance(load, Sampled):
        x, knots = np.log(f), np.log(load.f)
        size = np.exp(np.interp(x, knots, np.log(load.magnitude), left=np.nan, right=np.nan))
        angle = np.radians(np.interp(x, knots, load.phase, left=np.nan, right=np.nan))
        return np.asarray(size * np.exp(1j * angle), dtype=np.complex128)
    parts = [impedance(part, f) for part in load.parts]
    if load.kind == "series":
        return np.asarray(sum(parts[1:], parts[0]), dtype=np.complex128)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(1 / sum((1 / part for part in parts[1:]), 1 / parts[0]), dtype=np.complex128)


def elements(load: Impedance) -> Iterator[Element]:
    """Every element of the load in the order of the file."""
    if isinstance(load, Element):
        yield load
    elif isinstance(load, Group):
        for part in load.parts:
            yield from elements(part)


def tables(load: Impedance) -> Iterator[Sampled]:
    """Every table of the load in the order of the file."""
    if isinstance(load, Sampled):
        yield load
    elif isinstance(load, Group):
        for part in load.parts:
            yield from tables(part)


def is_resistance(load: Impedance) -> bool:
    """Whether the load is made of resistances alone."""
    return not any(tables(load)) and all(element.kind == "R" for element in elements(load))


def traced_elements(load: Impedance) -> tuple[Traced, ...]:
    """The elements for the sheet: R, or R_1, R_2, L_1 ... where a letter occurs more than once."""
    counts: dict[str, int] = {}
    several = {k for k in "RLC" if sum(element.kind == k for element in elements(load)) > 1}
    named = []
    for element in elements(load):
        counts[element.kind] = counts.get(element.kind, 0) + 1
        named.append(
            element.value.named(
                f"{element.kind}_{counts[element.kind]}" if element.kind in several else element.kind
            )
        )
    return tuple(named)


def read_impedance(cells: Cells, name: str, folder: Path) -> Impedance | None:
    """The load written under the key `name`; None when something was wrong and has been reported."""
    return _read(cells, name, cells.raw(name), folder, 0)


def _read(cells: Cells, name: str, value: object, folder: Path, depth: int) -> Impedance | None:
    if depth > _DEEPEST:
        cells.refuse(
            name, f"nested more than {_DEEPEST} deep", "combine elements in series or parallel into one"
        )
        return None
    if isinstance(value, str) or (isinstance(value, dict) and ("value" in value or not value)):
        return _element(cells, name, "R", value)
    if not isinstance(value, dict):
        cells.refuse(name, "a load is a text or an inline table", f"one of {_FORMS}")
        return None
    keys = [str(key) for key in value]
    if len(keys) == 1 and keys[0] in ("series", "parallel"):
        return _group(cells, f"{name}.{keys[0]}", "series" if keys[0] == "series" else "parallel", value[keys[0]],
                      folder, depth)  # fmt: skip
    if keys == ["table"]:
        sampled = read_table(cells, f"{name}.table", value["table"], folder)
        return None if sampled is None else Sampled(
            file=sampled.file, f=sampled.f, magnitude=sampled.magnitude, phase=sampled.phase
        )  # fmt: skip
    strange = [key for key in keys if key not in _DIMENSION]
    if strange:
        alone = strange[0] in ("series", "parallel", "table")
        problem = f"{strange[0]} stands alone" if alone else f"{strange[0]!r} is no part of a load"
        cells.refuse(f"{name}.{strange[0]}", problem, f"one of {_FORMS}")
        return None
    parts = [_element(cells, f"{name}.{key}", "R" if key == "R" else "L" if key == "L" else "C", value[key])
             for key in keys]  # fmt: skip
    found = tuple(part for part in parts if part is not None)
    if len(found) < len(parts):
        return None
    return found[0] if len(found) == 1 else Group(kind="series", parts=found)


def _element(cells: Cells, name: str, kind: Literal["R", "L", "C"], value: object) -> Element | None:
    traced = cells.tree_quantity(f"{cells.path}.{name}", value, _DIMENSION[kind], _BAND[kind])
    return None if traced is None else Element(kind=kind, value=traced)


def _group(
    cells: Cells, name: str, kind: Literal["series", "parallel"], value: object, folder: Path, depth: int
) -> Group | None:
    if not isinstance(value, list) or not value:
        cells.refuse(name, "a list of impedances is wanted here", f'{kind} = ["0.5 ohm", {{ L = "1.2 mH" }}]')
        return None
    parts = [_read(cells, f"{name}[{index}]", part, folder, depth + 1) for index, part in enumerate(value)]
    found = tuple(part for part in parts if part is not None)
    return Group(kind=kind, parts=found) if len(found) == len(parts) else None
