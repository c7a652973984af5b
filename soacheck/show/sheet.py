"""The calculation written out: the trace of what was computed, to be done again with a calculator.

Every value is printed once, as a numbered line: its formula, the same with the numbers put in, the result and
the source. The governing finding comes first and is complete; other sections refer to lines of it by number. Two
roads to one and the same figure of a duty (the mean power by its formula, and integrated) are one line, the first.
"""

from __future__ import annotations

import ast
import math
import re
from collections.abc import Iterable, Sequence, Set
from dataclasses import dataclass, field, replace

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
_LETTER_SYMBOL = re.compile(r"[A-Z]\w*")  # functions of formulas are written small
_READING = (
    "Numbers in brackets count the lines. Each value is written as symbol = formula = numbers put in = result. "
    "Numbers are rounded to five digits for print; the calculation carries them in full. A difference of "
    "temperatures in degC is in K."
)
_FIGURES = (
    "P_mean", "P_peak", "V_peak", "I_peak", "I_mean", "I_rms", "I_B_peak",
    "T_j_peak", "T_j_mean", "T_case", "T_heatsink", "R_th_total",
)  # fmt: skip


def sheet(result: Result, width: int = WIDTH) -> str:
    """The calculation sheet as lines of text of at most `width` columns, ending in a line feed."""
    steps = _Steps(width=width)
    lines = ["CALCULATION SHEET", *wrapped(stage_words(result), "Stage   ", width=width)]
    lines += wrapped(device_words(result.device), "Device  ", width=width)
    if result.complement is not None:
        lines += wrapped(device_words(result.complement), "Lower   ", width=width)
    lines += wrapped(f"{result.verdict.word.upper()}: {verdict_sentence(result)}", "Verdict ", width=width)
    lines += ["", *wrapped(_READING, width=width)]

    def found(index: int, title: str) -> list[str]:
        finding = result.findings[index]
        words = f"{title}: {finding.limit} in {duty_words(finding.duty, finding.half)}"
        steps.duty = (finding.duty, finding.half)
        return _section(words, _finding(result, finding, result.nominal[index], steps), width)

    if result.findings:
        lines += found(0, "Governing finding")
    lines += _section("Other inputs", _inputs(result, steps), width)
    for duty in result.duties:
        steps.duty = (duty.name, duty.half)
        lines += _section(f"Duty: {duty_words(duty.name, duty.half)}", _duty(duty, steps), width)
    for index in range(1, len(result.findings)):
        lines += found(index, "Finding")
    lines += _section("Assumptions", _numbered(result.assumptions, width), width)
    lines += _section("Not analysed", _numbered(result.not_analysed, width), width)
    cautions = (f"{caution.id}: {caution.text}" for caution in result.cautions)
    lines += _section("Cautions", _numbered(cautions, width), width)
    return "\n".join([*lines, "", *wrapped(REMINDER, width=width)]) + "\n"


def sheets(results: Sequence[Result], width: int = WIDTH) -> str:
    """Several stages, one sheet each."""
    return ("\n" + "=" * width + "\n\n").join(sheet(result, width) for result in results)


@dataclass(slots=True, kw_only=True)
class _Steps:
    """What was printed so far: the line number of each value. Filled while one sheet is written.

    Two values are one line when all that would be printed is equal; `known` saves working that out again. Within one
    duty a worked value is also the line of the same symbol and number that stands already: that is in `said`.
    """

    width: int
    duty: tuple[str, str | None] = ("", None)
    lines: int = 0
    number: dict[tuple[object, ...], int] = field(default_factory=dict)
    known: dict[int, tuple[object, ...]] = field(default_factory=dict)
    said: dict[tuple[object, ...], int] = field(default_factory=dict)
    given: set[tuple[str, float]] = field(default_factory=set)  # source and number of what came in

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
        number = value.at(0)
        word = (self.duty, value.symbol, value.unit, f"{number:.9g}")
        if (value.inputs or value.how) and word in self.said and not math.isnan(number):
            self.number[key] = self.said[word]
            return False
        self.next()
        self.number[key] = self.lines
        self.said.setdefault(word, self.lines)
        if not value.inputs and not value.how:
            self.given.add((value.source, number))
        return True

    def next(self) -> str:
        """The mark of one more line."""
        self.lines += 1
        return f"[{self.lines}]"

    def line(self, value: Traced) -> int:
        """The line number of a value that was printed."""
        return self.number[self._key(value)]

    def mark(self, value: Traced) -> str:
        return f"[{self.line(value)}]"


def _section(title: str, body: Sequence[str], width: int) -> list[str]:
    return ["", *wrapped(title, width=width), "-" * min(cells(clean(title)), width), *body] if body else []


def _numbered(items: Iterable[str], width: int) -> list[str]:
    return [line for index, item in enumerate(items, start=1) for line in wrapped(item, f"{index}. ", width=width)]


def _finding(result: Result, finding: Finding, nominal: float, steps: _Steps) -> list[str]:
    status, width = status_of(finding), steps.width
    lines = wrapped(finding.basis, "Rule    ", width=width)
    place = where_words(result, finding)
    lines += wrapped(place.removeprefix("at "), "Point   ", width=width) if place else []
    roots = [value for value in (*finding.trace, finding.applied, finding.allowed) if value is not None]
    lines += _chain(roots, steps)
    share = _share(finding)
    if share is not None:
        lines += _step(share, steps, steps.next())
    used = float(finding.utilisation[0])
    words = f", {percent(used)} of the allowance" if math.isfinite(used) else ""
    beside = f" (nominal {percent(nominal)})" if result.spread and math.isfinite(nominal) else ""
    lines += wrapped(f"{amounts(finding)}{words}{beside}: {status.word}", "Result  ", width=width)
    if words and finding.unit == "degC" and share is None:
        lines += wrapped(FROM_AMBIENT, "        ", width=width)
    if status is not Status.WITHIN:
        for reason in finding.reasons:
            if bool(reason.applies[0]):
                lines += wrapped(reason.text, "Because ", width=width)
                for item in reason.missing:
                    missing = f"{item.key} ({item.where})" if item.where else item.key
                    lines += wrapped(missing, "Missing ", width=width)
    return lines


def _share(finding: Finding) -> Traced | None:
    """The last division, applied by allowed, both counted from the ambient where they are temperatures.

    None where that is not how the utilisation comes about.
    """
    if finding.applied is None or finding.allowed is None:
        return None
    applied, allowed = _speakable(finding.applied, "applied"), _speakable(finding.allowed, "allowed")
    if applied.symbol == allowed.symbol:
        applied, allowed = applied.named("applied"), allowed.named("allowed")
    formula, inputs = f"{applied.symbol} / {allowed.symbol}", [applied, allowed]
    if finding.unit == "degC":
        ambient = next((value for value in finding.trace if value.symbol == "T_ambient"), None)
        if ambient is None:
            return None
        formula = f"({applied.symbol} - T_ambient) / ({allowed.symbol} - T_ambient)"
        inputs.append(ambient)
    share = derived("utilisation", formula, "1", *inputs)
    return share if math.isclose(share.at(0), float(finding.utilisation[0]), rel_tol=1e-6) else None


def _speakable(value: Traced, otherwise: str) -> Traced:
    """The value under a symbol that can stand in a formula."""
    return value if _LETTER_SYMBOL.fullmatch(value.symbol) else value.named(otherwise)


def _duty(duty: DutyResult, steps: _Steps) -> list[str]:
    figures = [getattr(duty, name) for name in _FIGURES]
    return _chain([*duty.facts, *(figure for figure in figures if figure is not None)], steps)


def _inputs(result: Result, steps: _Steps) -> list[str]:
    """Stated inputs that the governing finding did not use, or used with another number: the corner's."""
    used: dict[str, set[float]] = {}
    for value in _all_given(result):
        used.setdefault(value.source, set()).add(value.at(0))
    printed = frozenset(steps.given)  # the sink's resistance may stand there under another symbol
    wanted = (value for value in result.inputs if not value.source or (value.source, value.at(0)) not in printed)
    new = [value for value in wanted if steps.new(value)]
    differs = {id(v) for v in new if v.source and used.get(v.source, set()) - {v.at(0)}}
    return _table(new, steps, differs)


def _all_given(result: Result) -> Iterable[Traced]:
    """Every input that the findings and the duties rest on."""
    roots: dict[int, Traced] = {}
    for finding in result.findings:
        roots |= {id(v): v for v in (*finding.trace, finding.applied, finding.allowed) if v is not None}
    for duty in result.duties:
        roots |= {id(v): v for v in (*duty.facts, *(getattr(duty, name) for name in _FIGURES)) if v is not None}
    return (node for root in roots.values() for node in root.walk() if not node.inputs and not node.how)


def _chain(roots: Sequence[Traced], steps: _Steps) -> list[str]:
    """The inputs that the values rest on as a table, then every step from them to the values."""
    order: dict[int, Traced] = {id(node): node for root in roots for node in root.walk()}
    entered = [node for node in order.values() if not node.inputs and not node.how and steps.new(node)]
    worked = [node for node in order.values() if (node.inputs or node.how) and steps.new(node)]
    lines = _table(entered, steps)
    for node in worked:
        lines += _step(node, steps)
    printed = {steps.line(node) for node in (*entered, *worked)}
    above = [f"{_value(root)} {steps.mark(root)}" for root in roots if steps.line(root) not in printed]
    return lines + (wrapped(", ".join(dict.fromkeys(above)), "Above   ", width=steps.width) if above else [])


def _value(node: Traced) -> str:
    """The value in a sentence: a line may end after it but not inside."""
    return f"{node.symbol} = {plain(node.at(0), node.unit, _DIGITS)}".replace(" ", GLUE)


def _table(values: Sequence[Traced], steps: _Steps, nominal: Set[int] = frozenset()) -> list[str]:
    """Symbol, value with unit, source and grade of values that came in.

    nominal: those for which the calculation takes another number, by id.
    """
    symbols = [clean(value.symbol) for value in values]
    numbers = [plain(value.at(0), value.unit, _DIGITS) for value in values]
    wide = min(max(map(cells, symbols), default=0), 20)
    figure = min(max(map(cells, numbers), default=0), 16)
    lines = []
    for value, symbol, text in zip(values, symbols, numbers, strict=True):
        word = "nominal" if id(value) in nominal else ""
        source = ", ".join(part for part in (word, value.source, value.grade) if part)
        first = f"{pad(steps.mark(value), 6)}{pad(symbol, wide)} = {pad(text, figure)}  "
        lines += wrapped(source, first, " " * min(cells(first), steps.width // 2), steps.width)
    return lines


def _step(node: Traced, steps: _Steps, mark: str = "") -> list[str]:
    """One step: formula, numbers put in, result; or how it was found and from what. mark: of a line of its own."""
    width = steps.width
    head = f"{pad(mark or steps.mark(node), 6)}{clean(node.symbol)} "
    result = plain(node.at(0), node.unit, _DIGITS)
    source = f"  [{node.source}]" if node.source else ""
    indent = " " * min(cells(head), 30 * width // WIDTH)
    if not node.formula:
        how = f" ({node.how})" if node.how else ""
        lines = wrapped(f"{result}{how}{source}", head + "= ", indent + "  ", width)
        from_ = ", ".join(f"{_value(value)} {steps.mark(value)}" for value in node.inputs)
        return lines + (wrapped(from_, indent + "from ", width=width) if from_ else [])
    even = ast.unparse(ast.parse(node.formula, mode="eval"))  # the same spaces in every formula
    formula = f"= {_POWER.sub('^', even)}"
    numbers = _put_in(node, even)
    ended = f"= {result}".replace(" ", GLUE) + source
    filled = (
        ended if numbers.replace(GLUE, " ") == result else f"= {numbers} {ended}"
    )  # equal: the formula is a mere name
    together = wrapped(f"{formula} {filled}", head, width=width)
    if len(together) == 1:
        return together
    return wrapped(formula, head, indent + "  ", width) + wrapped(filled, indent, indent + "  ", width)


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
