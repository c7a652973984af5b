"""Traced values: a number together with its symbol, unit, formula, inputs and source: one line of the sheet.

A formula is evaluated from the same text that is printed, so that the sheet cannot say one thing and the program
compute another. Values have the shape (case,): the same question asked with other numbers. A value that every case
shares has the shape (1,) and broadcasts.
"""

from __future__ import annotations

import ast
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from functools import lru_cache
from types import CodeType
from typing import Any

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]
IntArray = npt.NDArray[np.int64]

TYPICAL = "typical"

_FUNCTIONS: dict[str, Callable[..., Any]] = {
    "min": lambda *values: _reduced(np.minimum, values),
    "max": lambda *values: _reduced(np.maximum, values),
    "sqrt": np.sqrt,
    "exp": np.exp,
    "ln": np.log,
    "sin": np.sin,
    "cos": np.cos,
}
_CONSTANTS = {"pi": float(np.pi)}
_NODES = (
    ast.Expression, ast.BinOp, ast.UnaryOp, ast.Call, ast.Name, ast.Constant, ast.Load,
    ast.Add, ast.Sub, ast.Mult, ast.Div, ast.Pow, ast.USub,
)  # fmt: skip


def _reduced(function: Callable[[Any, Any], Any], values: tuple[Any, ...]) -> Any:
    result = values[0]
    for value in values[1:]:
        result = function(result, value)
    return result


def frozen(values: npt.ArrayLike) -> FloatArray:
    """A read-only float64 array of at least one axis, copied if it could be changed from elsewhere."""
    array = np.asarray(values, dtype=np.float64)
    if array.ndim == 0:
        array = array.reshape(1)
    if array.flags.writeable:
        array = array.copy()
        array.setflags(write=False)
    return array


def distinct(values: npt.ArrayLike) -> FloatArray:
    """The values in rising order, each once. (numpy's own `unique` loads its masked arrays: 5 ms of a cold start.)"""
    ordered = np.sort(np.asarray(values, dtype=np.float64), axis=None)
    first = np.ones(ordered.shape, dtype=bool)
    first[1:] = ordered[1:] != ordered[:-1]
    return ordered[first]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Traced:
    """One value of the calculation.

    `value` has shape (case,) in SI; a temperature (unit "degC") is held in kelvin and only printed in degC.
    `formula` is the text that was evaluated, over the symbols of `inputs`; empty for an input value. A value found by
    a search or an integration has no formula but says in `how` what was done.
    `grade` is set on ratings, curves and thermal values only: "guaranteed typical measured assumed".
    """

    symbol: str
    value: FloatArray
    unit: str
    formula: str = ""
    how: str = ""
    inputs: tuple[Traced, ...] = ()
    source: str = ""
    grade: str = ""

    def __post_init__(self) -> None:
        object.__setattr__(self, "value", frozen(self.value))
        if self.value.ndim != 1:
            raise ValueError(f"{self.symbol}: a traced value has the shape (case,), not {self.value.shape}")

    def at(self, case: int) -> float:
        """The value of one case."""
        return float(self.value[case if self.value.size > 1 else 0])

    def named(self, symbol: str) -> Traced:
        """The same value under another symbol."""
        return replace(self, symbol=symbol)

    def walk(self) -> Iterator[Traced]:
        """This value and all that it rests on, each once, inputs before what is made of them."""
        seen: set[int] = set()
        stack: list[tuple[Traced, bool]] = [(self, False)]
        while stack:
            node, done = stack.pop()
            if done:
                yield node
            elif id(node) not in seen:
                seen.add(id(node))
                stack.append((node, True))
                stack.extend((child, False) for child in reversed(node.inputs))

    @property
    def typical_below(self) -> tuple[str, ...]:
        """Symbols of the typical-grade ratings, curves and thermal values that this value rests on."""
        return tuple(dict.fromkeys(node.symbol for node in self.walk() if node.grade == TYPICAL))


@lru_cache(maxsize=1024)
def _compiled(formula: str) -> tuple[CodeType, frozenset[str]]:
    tree = ast.parse(formula, mode="eval")
    names = set()
    for node in ast.walk(tree):
        if not isinstance(node, _NODES):
            raise ValueError(f"formula {formula!r}: {type(node).__name__} is not arithmetic")
        if isinstance(node, ast.Name):
            names.add(node.id)
    return compile(tree, f"<formula {formula}>", "eval"), frozenset(names)


def derived(symbol: str, formula: str, unit: str, *inputs: Traced, source: str = "", grade: str = "") -> Traced:
    """A value computed from other traced values by the formula that the sheet prints.

    `formula` is arithmetic (+ - * / **) over the symbols of `inputs`, pi, numbers and min max sqrt exp ln sin cos.
    Shapes broadcast over the case axis. Raises ValueError when the names in the formula and the inputs differ.
    """
    code, names = _compiled(formula)
    symbols = {node.symbol for node in inputs}
    wanted = names - _FUNCTIONS.keys() - _CONSTANTS.keys()
    if wanted != symbols or len(symbols) != len(inputs):
        raise ValueError(f"{symbol}: the formula {formula!r} needs {sorted(wanted)}, given {sorted(symbols)}")
    scope: dict[str, Any] = {**_FUNCTIONS, **_CONSTANTS, **{node.symbol: node.value for node in inputs}}
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        value = eval(code, {"__builtins__": {}}, scope)  # names and node types were checked by _compiled
    return Traced(symbol=symbol, value=value, unit=unit, formula=formula, inputs=inputs, source=source, grade=grade)


def found(symbol: str, value: npt.ArrayLike, unit: str, how: str, *inputs: Traced, source: str = "") -> Traced:
    """A value that a search, an integration or a curve reading gave; `how` says in words what was done."""
    return Traced(symbol=symbol, value=frozen(value), unit=unit, how=how, inputs=inputs, source=source)


def given(symbol: str, value: npt.ArrayLike, unit: str, source: str, grade: str = "") -> Traced:
    """A value that came in from a file, an option or a convention; `source` says which."""
    return Traced(symbol=symbol, value=frozen(value), unit=unit, source=source, grade=grade)
