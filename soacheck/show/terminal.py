"""The result for the terminal: the verdict first, then what it rests on. 80 columns, every verdict a word."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from soacheck.result import DutyResult, Finding, Reason, Result, Status
from soacheck.show.text import WIDTH, cells, clean, number, pad, percent, shown, wrapped
from soacheck.show.words import (
    FROM_AMBIENT,
    REMINDER,
    amounts,
    counts,
    device_words,
    duty_words,
    stage_words,
    status_of,
    verdict_sentence,
    where_words,
)
from soacheck.trace import Traced

_COLUMNS = (
    ("P mean", "W", "P_mean"),
    ("P peak", "W", "P_peak"),
    ("V peak", "V", "V_peak"),
    ("I peak", "A", "I_peak"),
    ("T_j", "degC", "T_j_peak"),
    ("T_case", "degC", "T_case"),
    ("T_sink", "degC", "T_heatsink"),
)
_COLUMN = 8
_COLOURS = {Status.WITHIN: "32", Status.MARGINAL: "33", Status.UNPROVEN: "35", Status.EXCEEDS: "1;31"}
_INDENT = "  "
_ROW = " "  # before a finding: one column less lets the longest usual names stand beside the numbers
_UNDER = "        "


def terminal(result: Result, colour: bool = False) -> str:
    """The whole result as lines of text, ending in a line feed."""
    lines = [
        *_verdict(result, colour),
        "",
        *wrapped(stage_words(result), "Stage   "),
        *wrapped(device_words(result.device), "Device  "),
    ]
    if result.complement is not None:
        lines += wrapped(device_words(result.complement), "Lower   ")
    lines += ["", *_duties(result.duties), "", *_findings(result, colour)]
    lines += _listed("Not analysed", result.not_analysed, "- ")
    lines += _listed("Assumptions", result.assumptions)
    lines += _listed("Cautions", [f"{caution.id}: {caution.text}" for caution in result.cautions], "- ")
    lines += ["", *wrapped(REMINDER)]
    return "\n".join(lines) + "\n"


def terminal_blocks(results: Sequence[Result], colour: bool = False) -> str:
    """Several stages, one block each, and the worst of them in the last line."""
    blocks = [terminal(result, colour) for result in results]
    if len(results) > 1:
        worst = max(results, key=lambda result: result.verdict)
        word = worst.verdict.word.upper()
        closing = wrapped(f"{word}: worst of {len(results)} stages, {stage_words(worst)}")
        blocks.append("\n".join(_with_colour(closing, word, worst.verdict, colour)) + "\n")
    return ("\n" + "-" * WIDTH + "\n\n").join(blocks)


def _verdict(result: Result, colour: bool) -> list[str]:
    word = result.verdict.word.upper()
    lines = _with_colour(wrapped(f"{word}: {verdict_sentence(result)}", "", "  "), word, result.verdict, colour)
    return [*lines, *wrapped(counts(result.findings), "  ")]


def _with_colour(lines: list[str], word: str, status: Status, colour: bool) -> list[str]:
    """The same lines with the verdict's word, which begins them, in its colour."""
    return [_coloured(word, status, colour) + lines[0][len(word) :], *lines[1:]]


def _coloured(word: str, status: Status, colour: bool) -> str:
    """A word of the verdict, with its colour where the terminal wants one. The word itself always says it."""
    return f"\x1b[{_COLOURS[status]}m{word}\x1b[0m" if colour else word


def _duties(duties: Sequence[DutyResult]) -> list[str]:
    names = [clean(duty_words(duty.name, duty.half)) for duty in duties]
    first = WIDTH - _COLUMN * len(_COLUMNS)
    head = pad("Duties, per device", first) + "".join(pad(title, _COLUMN, right=True) for title, _, _ in _COLUMNS)
    units = " " * first + "".join(pad(unit, _COLUMN, right=True) for _, unit, _ in _COLUMNS)
    lines = [head, units]
    for name, duty in zip(names, duties, strict=True):
        label = _INDENT + name
        if cells(label) >= first:  # a long name gets a line of its own
            lines.append(label)
            label = ""
        figures = [_figure(getattr(duty, attribute)) for _, _, attribute in _COLUMNS]
        lines.append(pad(label, first) + "".join(pad(figure, _COLUMN, right=True) for figure in figures))
    if any(getattr(duty, attribute) is None for duty in duties for _, _, attribute in _COLUMNS):
        lines.append(f"{_INDENT}- not known")
    return lines if duties else ["Duties: none"]


def _figure(traced: Traced | None) -> str:
    if traced is None or math.isnan(traced.at(0)):
        return "-"
    value = shown(traced.at(0), traced.unit)
    return f"{value:.1f}" if traced.unit == "degC" else number(value, 3, strip=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Row:
    status: Status
    words: tuple[str, ...]  # utilisation, nominal, status, limit, amounts
    duty: str


def _findings(result: Result, colour: bool) -> list[str]:
    """Every finding, worst first; what is not `within` with its reasons.

    The place stands on a line below: for all when the duty has no room beside the numbers, else for those
    that are not `within` and for the one that governs.
    """
    rows = [_row(result, finding, nominal) for finding, nominal in zip(result.findings, result.nominal, strict=True)]
    if not rows:
        return ["Findings: none"]
    titles = ("used", "nominal" if result.spread else "", "status", "limit", "applied of allowed")
    widths = [max(cells(text) for text in column) for column in zip(titles, *(row.words for row in rows), strict=True)]
    beside = len(_ROW) + cells(_columns(titles, widths)) + max(cells(row.duty) for row in rows) <= WIDTH
    title = _columns(titles, widths) + ("duty" if beside else "")
    lines = ["Findings, worst first", (_ROW + title).rstrip()]
    seen: dict[tuple[str, ...], str] = {}
    for index, (row, finding) in enumerate(zip(rows, result.findings, strict=True)):
        text = _ROW + _columns(row.words, widths) + (row.duty if beside else "")
        lines.append(_coloured_row(text.rstrip(), row.status, colour))
        detailed = row.status is not Status.WITHIN or index == 0 or not beside
        place = where_words(result, finding) if detailed else ""
        under = ", ".join(part for part in ("" if beside else row.duty, place) if part)
        if under:
            lines += wrapped(under, _UNDER)
        if row.status is not Status.WITHIN:
            lines += _reasons(finding, duty_words(finding.duty, finding.half), seen)
    if any(finding.unit == "degC" for finding in result.findings):
        lines += wrapped(FROM_AMBIENT, _INDENT)
    return lines


def _row(result: Result, finding: Finding, nominal: float) -> _Row:
    status = status_of(finding)
    words = (
        percent(float(finding.utilisation[0])),
        percent(nominal) if result.spread else "",
        status.word,
        clean(finding.limit),
        amounts(finding),
    )
    return _Row(status=status, words=words, duty=clean(duty_words(finding.duty, finding.half)))


def _columns(words: Sequence[str], widths: Sequence[int]) -> str:
    padded = (
        pad(word, width, right=column < 2) + "  "
        for column, (word, width) in enumerate(zip(words, widths, strict=True))
        if width
    )
    return "".join(padded)


def _coloured_row(line: str, status: Status, colour: bool) -> str:
    return line.replace(status.word, _coloured(status.word, status, colour), 1)


def _reasons(finding: Finding, label: str, seen: dict[tuple[str, ...], str]) -> list[str]:
    """Why a finding is not `within`, and what it lacks; once in full, then by reference to where it stood."""
    reasons = [reason for reason in finding.reasons if _applies(reason)]
    if not reasons:
        return []
    key = tuple(text for reason in reasons for text in (reason.text, *(str(item) for item in reason.missing)))
    missing = ", ".join(finding.missing(0))
    if key in seen:
        return wrapped(f"as for {seen[key]}" + (f"; missing: {missing}" if missing else ""), _UNDER)
    seen[key] = f"{finding.limit} in {label}"
    lines = [line for reason in reasons for line in wrapped(reason.text, _UNDER)]
    stated = {item.key: item.where for reason in reasons for item in reason.missing}
    for path, where in stated.items():
        lines += wrapped(f"{path} ({where})" if where else path, _UNDER + "missing: ", _UNDER + "         ")
    return lines


def _applies(reason: Reason) -> bool:
    return bool(reason.applies[0])


def _listed(title: str, items: Iterable[str], mark: str = "") -> list[str]:
    """A titled list, empty when there is nothing to list; numbered unless a mark is given."""
    lines = [
        line for index, item in enumerate(items, start=1) for line in wrapped(item, _INDENT + (mark or f"{index}. "))
    ]
    return ["", title, *lines] if lines else []
