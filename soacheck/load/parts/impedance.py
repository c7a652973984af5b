"""The load as an impedance: elements, series and parallel groups, or a measured table."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

import numpy as np
import numpy.typing as npt

from soacheck.errors import QuantityError, plain
from soacheck.load.parts.impedance_table import read_table
from soacheck.quantity import a, read
from soacheck.table import Cells
from soacheck.trace import FloatArray, Traced, frozen

ComplexArray = npt.NDArray[np.complex128]

_LETTERS: tuple[Literal["R", "L", "C"], ...] = ("R", "L", "C")
_DIMENSION = {"R": "resistance", "L": "inductance", "C": "capacitance"}
_UNIT = {"R": "ohm", "L": "H", "C": "F"}
_BAND = {"R": (1e-4, 1e7), "L": (1e-10, 1e4), "C": (1e-13, 10.0)}
_FORMS = '"8 ohm", { R = "6 ohm", L = "1.2 mH" }, { series = [...] }, { parallel = [...] } or { table = "z.csv" }'
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
            element.value.named(f"{element.kind}_{counts[element.kind]}" if element.kind in several else element.kind)
        )
    return tuple(named)


def read_impedance(cells: Cells, name: str, folder: Path) -> Impedance | None:
    """The load written under the key `name`; None when something was wrong and has been reported."""
    return _Reader(cells, folder).read(name, cells.raw(name), 0)


def _letter_of(value: object) -> Literal["R", "L", "C"]:
    """Which element a text states by its unit; R where it states none of the others."""
    for letter in ("L", "C"):
        try:
            read(value, _DIMENSION[letter])
        except QuantityError:
            continue
        return letter
    return "R"


@dataclass(frozen=True, slots=True)
class _Reader:
    """Reads the nested form of a load; every method returns None once something has been reported."""

    cells: Cells
    folder: Path

    def read(self, name: str, value: object, depth: int) -> Impedance | None:
        """One impedance at a path inside the key."""
        if depth > _DEEPEST:
            self._refused(name, f"nested more than {_DEEPEST} deep", "combine elements into one")
            return None
        if not isinstance(value, dict) or "value" in value:
            return self._element(name, "R", value)
        keys = {str(key) for key in value}
        if keys in ({"series"}, {"parallel"}):
            kind: Literal["series", "parallel"] = "series" if "series" in keys else "parallel"
            return self._group(f"{name}.{kind}", kind, value[kind], depth)
        if keys == {"table"}:
            return self._table(f"{name}.table", value["table"])
        return self._elements(name, value)

    def _refused(self, name: str, problem: str, remedy: str = f"one of {_FORMS}") -> None:
        self.cells.refuse(name, problem, remedy)

    def _element(self, name: str, kind: Literal["R", "L", "C"], value: object) -> Element | None:
        if not isinstance(value, str | dict):
            self._refused(name, "a load is a text or an inline table")
            return None
        letter = _letter_of(value) if kind == "R" and not name.endswith(".R") else "R"
        if letter != "R":
            wanted = f'{{ {letter} = "{plain(str(value))}" }}'
            remedy = wanted if name.endswith("]") else f"{name.rpartition('.')[2]} = {wanted}"
            problem = f"a text alone is a resistance, {_UNIT[letter]} measures {a(_DIMENSION[letter])}"
            self._refused(name, problem, remedy)
            return None
        path = f"{self.cells.path}.{name}"
        traced = self.cells.tree_quantity(path, value, _DIMENSION[kind], _BAND[kind])
        return None if traced is None else Element(kind=kind, value=traced)

    def _elements(self, name: str, value: dict[str, object]) -> Impedance | None:
        """R, L and C of one inline table, in series."""
        for key in value:
            if key not in _DIMENSION:
                alone = key in ("series", "parallel", "table")
                problem = f"{key} stands alone" if alone else f"{key!r} is no part of a load"
                self._refused(f"{name}.{key}", problem)
                return None
        if not value:
            self._refused(name, "the load is empty")
            return None
        parts = [self._element(f"{name}.{kind}", kind, value[kind]) for kind in _LETTERS if kind in value]
        found = tuple(part for part in parts if part is not None)
        if len(found) < len(parts):
            return None
        return found[0] if len(found) == 1 else Group(kind="series", parts=found)

    def _table(self, name: str, value: object) -> Sampled | None:
        rows = read_table(self.cells, name, value, self.folder)
        if rows is None:
            return None
        return Sampled(file=rows.file, f=rows.f, magnitude=rows.magnitude, phase=rows.phase)

    def _group(self, name: str, kind: Literal["series", "parallel"], value: object, depth: int) -> Group | None:
        if not isinstance(value, list) or not value:
            self._refused(name, "a list of impedances is wanted", f'{kind} = ["8 ohm", {{ L = "1 mH" }}]')
            return None
        parts = [self.read(f"{name}[{number}]", part, depth + 1) for number, part in enumerate(value, 1)]
        found = tuple(part for part in parts if part is not None)
        return Group(kind=kind, parts=found) if len(found) == len(parts) else None
