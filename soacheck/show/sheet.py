"""The calculation written out: the trace of what was computed, to be done again with a calculator.

Every value is printed once, as a numbered line: its formula, the same with the numbers put in, the result and
the source. The governing finding comes first and is complete; other sections refer to lines of it by number.
"""

from __future__ import annotations

import ast
import math
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from soacheck.result import DutyResult, Finding, Result, Status
from soacheck.show.text import GLUE, WIDTH, ZERO_CELSIUS, cells, clean, pad, percent, plain, wrapped
from soacheck.show.words import (
    FROM_AMBIENT,
    REMINDER,
    amounts,
    device_words,
    duty_words,
    stage_words,
    status_of,
    verdict_sentence,
    where_words,
)
from soacheck.trace import Traced, derived

_NAME = re.compile(r"(?<![\w.])[A-Za-z_]\w*")
_POWER = re.compile(r" *\*\* *")
_DIGITS = 5
_FIGURES = (
    "P_mean", "P_peak", "V_peak", "I_peak", "I_mean", "I_rms", "I_B_peak",
    "T_j_peak", "T_j_mean", "T_case", "T_heatsink", "R_th_total",
)  # fmt: skip


def sheet(result: Result) -> str:
    """The calculation sheet as lines of text, ending in a line feed."""
    steps = _Steps(number={}, known={})
    lines = ["CALCULATION SHEET", *wrapped(stage_words(result), "Stage   ")]
    lines += wrapped(device_words(result.device), "Device  ")
    if result.complement is not None:
        lines += wrapped(device_words(result.complement), "Lower   ")
    lines += wrapped(f"{result.verdict.word.upper()}: {verdict_sentence(result)}", "Verdict ")
    lines += [
        "",
        *wrapped(
            "Numbers in brackets count the lines. Each value is written as symbol = formula = numbers put in "
            "= result. Numbers are rounded to five digits for print; the calculation carries them in full. A "
            "difference of temperatures in degC is in K."
        ),
    ]
    for index, finding in enumerate(result.findings[:1]):
        title = f"Governing finding: {finding.limit} in {duty_words(finding.duty, finding.half)}"
        lines += _section(title, _finding(result, finding, result.nominal[index], steps))
    lines += _section("Other inputs", _inputs(result.inputs, steps))
    for duty in result.duties:
        lines += _section(f"Duty: {duty_words(duty.name, duty.half)}", _duty(duty, steps))
    for finding, nominal in zip(result.findings[1:], result.nominal[1:], strict=True):
        title = f"Finding: {finding.limit} in {duty_words(finding.duty, finding.half)}"
        lines += _section(title, _finding(result, finding, nominal, steps))
    lines += _section("Assumptions", _numbered(result.assumptions))
    lines += _section("Not analysed", _numbered(result.not_analysed))
    lines += _section("Cautions", _numbered(f"{caution.id}: {caution.text}" for caution in result.cautions))
    return "\n".join([*lines, "", *wrapped(REMINDER)]) + "\n"


def sheets(results: Sequence[Result]) -> str:
    """Several stages, one sheet each."""
    return ("\n" + "=" * WIDTH + "\n\n").join(sheet(result) for result in results)


@dataclass(frozen=True, slots=True)
class _Steps:
    """What was printed so far: the line number of each value. Filled while one sheet is written.

    Two values are one line when all that would be printed is equal; `known` saves working that out again.
    """

    number: dict[tuple[object, ...], int]
    known: dict[int, tuple[object, ...]]

    def _key(self, value: Traced) -> tuple[object, ...]:
        key = self.known.get(id(value))
        if key is None:
            inputs = tuple(self.number[self._key(node)] for node in value.inputs)
            key = (
                value.symbol,
                repr(value.at(0)),
                value.unit,
                value.formula,
                value.how,
                value.source,
                inputs,
            )
            self.known[id(value)] = key
        return key

    def new(self, value: Traced) -> bool:
        """Whether the value is still to be printed; gives it the next number if so. Its inputs come first."""
        key = self._key(value)
        if key in self.number:
            return False
        self.number[key] = len(self.number) + 1
        return True

    def mark(self, value: Traced) -> str:
        """The line number of a value that was printed."""
        return f"[{self.number[self._key(value)]}]"


def _section(title: str, body: Sequence[str]) -> list[str]:
    return ["", *wrapped(title), "-" * min(cells(clean(title)), WIDTH), *body] if body else []


def _numbered(items: Iterable[str]) -> list[str]:
    return [line for index, item in enumerate(items, start=1) for line in wrapped(item, f"{index}. ")]


def _finding(result: Result, finding: Finding, nominal: float, steps: _Steps) -> list[str]:
    status = status_of(finding)
    lines = wrapped(finding.basis, "Rule    ")
    place = where_words(result, finding)
    lines += wrapped(place.removeprefix("at "), "Point   ") if place else []
    roots = [value for value in (*finding.trace, finding.applied, finding.allowed) if value is not None]
    lines += _chain(roots, steps)
    used = float(finding.utilisation[0])
    share = f", {percent(used)} of the allowance" if math.isfinite(used) else ""
    beside = f" (nominal {percent(nominal)})" if result.spread and math.isfinite(nominal) else ""
    lines += wrapped(f"{amounts(finding)}{share}{beside}: {status.word}", "Result  ")
    if share and finding.unit == "degC":
        lines += wrapped(FROM_AMBIENT, "        ")
    if status is not Status.WITHIN:
        for reason in finding.reasons:
            if bool(reason.applies[0]):
                lines += wrapped(reason.text, "Because ")
                for item in reason.missing:
                    lines += wrapped(f"{item.key} ({item.where})" if item.where else item.key, "Missing ")
    return lines


def _duty(duty: DutyResult, steps: _Steps) -> list[str]:
    figures = [getattr(duty, name) for name in _FIGURES]
    return _chain([*duty.facts, *(figure for figure in figures if figure is not None)], steps)


def _inputs(values: Sequence[Traced], steps: _Steps) -> list[str]:
    return _table([value for value in values if steps.new(value)], steps)


def _chain(roots: Sequence[Traced], steps: _Steps) -> list[str]:
    """The inputs that the values rest on as a table, then every step from them to the values."""
    order: dict[int, Traced] = {id(node): node for root in roots for node in root.walk()}
    entered = [node for node in order.values() if not node.inputs and not node.how and steps.new(node)]
    worked = [node for node in order.values() if (node.inputs or node.how) and steps.new(node)]
    lines = _table(entered, steps)
    for node in worked:
        lines += _step(node, steps)
    printed = {id(node) for node in (*entered, *worked)}
    above = [f"{_value(root)} {steps.mark(root)}" for root in roots if id(root) not in printed]
    return lines + (wrapped(", ".join(above), "Above   ") if above else [])


def _value(node: Traced) -> str:
    """The value in a sentence: a line may end after it but not inside."""
    return f"{node.symbol} = {plain(node.at(0), node.unit, _DIGITS)}".replace(" ", GLUE)


def _table(values: Sequence[Traced], steps: _Steps) -> list[str]:
    """Symbol, value with unit, source and grade of values that came in."""
    symbols = [clean(value.symbol) for value in values]
    numbers = [plain(value.at(0), value.unit, _DIGITS) for value in values]
    wide = min(max(map(cells, symbols), default=0), 20)
    figure = min(max(map(cells, numbers), default=0), 16)
    lines = []
    for value, symbol, text in zip(values, symbols, numbers, strict=True):
        source = ", ".join(part for part in (value.source, value.grade) if part)
        first = f"{pad(steps.mark(value), 6)}{pad(symbol, wide)} = {pad(text, figure)}  "
        lines += wrapped(source, first, " " * min(cells(first), WIDTH // 2))
    return lines


def _step(node: Traced, steps: _Steps) -> list[str]:
    """One step: formula, numbers put in, result; or how it was found and from what."""
    head = f"{pad(steps.mark(node), 6)}{clean(node.symbol)} "
    result = plain(node.at(0), node.unit, _DIGITS)
    source = f"  [{node.source}]" if node.source else ""
    indent = " " * min(cells(head), 30)
    if not node.formula:
        how = f" ({node.how})" if node.how else ""
        lines = wrapped(f"{result}{how}{source}", head + "= ", indent + "  ")
        from_ = ", ".join(f"{_value(value)} {steps.mark(value)}" for value in node.inputs)
        return lines + (wrapped(from_, indent + "from ") if from_ else [])
    even = ast.unparse(ast.parse(node.formula, mode="eval"))  # the same spaces in every formula
    formula = f"= {_POWER.sub('^', even)}"
    numbers = _put_in(node, even)
    ended = f"= {result}".replace(" ", GLUE) + source
    filled = (
        ended if numbers.replace(GLUE, " ") == result else f"= {numbers} {ended}"
    )  # equal: the formula is a mere name
    together = wrapped(f"{formula} {filled}", head)
    if len(together) == 1:
        return together
    return wrapped(formula, head, indent + "  ") + wrapped(filled, indent, indent + "  ")


def _put_in(node: Traced, text: str) -> str:
    """The formula with the numbers of its inputs in place of their symbols."""
    celsius = _same_in_celsius(node)
    values = {value.symbol: value for value in node.inputs}

    def written(found: re.Match[str]) -> str:
        name = found.group()
        if name not in values:
            return name  # a function or pi
        value = values[name]
        unit = "K" if value.unit == "degC" and not celsius else value.unit
        quantity = plain(value.at(0), unit, _DIGITS).replace(" ", GLUE)
        divides = text[: found.start()].rstrip().endswith("/") and "/" in unit
        raised = text[found.end() :].lstrip().startswith("**")
        return f"({quantity})" if divides or raised or quantity.startswith("-") else quantity

    return _POWER.sub("^", _NAME.sub(written, text))


def _same_in_celsius(node: Traced) -> bool:
    """Whether the formula gives the same with temperatures in degC, as sums and differences do."""
    if not any(value.unit == "degC" for value in node.inputs):
        return True
    lowered = [
        replace(value, value=value.value - ZERO_CELSIUS) if value.unit == "degC" else value for value in node.inputs
    ]
    wanted = node.at(0) - (ZERO_CELSIUS if node.unit == "degC" else 0.0)
    got = derived(node.symbol, node.formula, node.unit, *lowered).at(0)
    return math.isnan(wanted) or math.isclose(got, wanted, rel_tol=1e-9, abs_tol=1e-9)
