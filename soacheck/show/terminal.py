"""The result for the terminal: the verdict first, then what it rests on. Every verdict is a word.

80 columns; on a narrower page what does not fit beside the numbers stands below them.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Hashable, Iterable, Sequence
from dataclasses import dataclass

from soacheck.result import DutyResult, Finding, Result, Status
from soacheck.show.text import GLUE, WIDTH, cells, clean, number, pad, percent, settled, shown, wrapped
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
_COLUMN = 8  # one of them the space before it
_UNKNOWN = "-"
BOTH = "both"  # halves
_COLOURS = {Status.WITHIN: "32", Status.MARGINAL: "33", Status.UNPROVEN: "35", Status.EXCEEDS: "1;31"}
_INDENT = "  "
_ROW = " "  # before a finding: one column less lets the longest usual names stand beside the numbers
_UNDER = "        "


def terminal(result: Result, colour: bool = False, width: int = WIDTH) -> str:
    """The whole result as lines of text of at most `width` columns, ending in a line feed."""
    lines = [
        *_verdict(result, colour, width),
        "",
        *wrapped(stage_words(result), "Stage   ", width=width),
        *wrapped(device_words(result.device), "Device  ", width=width),
    ]
    if result.complement is not None:
        lines += wrapped(device_words(result.complement), "Lower   ", width=width)
    lines += ["", *_duties(result.duties, width), "", *_findings(result, colour, width)]
    lines += _listed("Not analysed", result.not_analysed, width, "- ")
    lines += _listed("Assumptions", result.assumptions, width)
    lines += _listed("Cautions", [f"{caution.id}: {caution.text}" for caution in result.cautions], width, "- ")
    lines += ["", *wrapped(REMINDER, width=width)]
    return "\n".join(lines) + "\n"


def terminal_blocks(results: Sequence[Result], colour: bool = False, width: int = WIDTH) -> str:
    """Several stages, one block each, and the worst of them in the last line."""
    blocks = [terminal(result, colour, width) for result in results]
    if len(results) > 1:
        worst = max(results, key=lambda result: result.verdict)
        word = worst.verdict.word.upper()
        closing = wrapped(f"{word}: worst of {len(results)} stages, {stage_words(worst)}", width=width)
        blocks.append("\n".join(_with_colour(closing, word, worst.verdict, colour)) + "\n")
    return ("\n" + "-" * width + "\n\n").join(blocks)


def _verdict(result: Result, colour: bool, width: int) -> list[str]:
    word = result.verdict.word.upper()
    sentence = wrapped(f"{word}: {verdict_sentence(result)}", "", "  ", width)
    return [*_with_colour(sentence, word, result.verdict, colour), *wrapped(counts(result.findings), "  ", width=width)]


def _with_colour(lines: list[str], word: str, status: Status, colour: bool) -> list[str]:
    """The same lines with the verdict's word, which begins them, in its colour."""
    return [_coloured(word, status, colour) + lines[0][len(word) :], *lines[1:]]


def _coloured(word: str, status: Status, colour: bool) -> str:
    """A word of the verdict, with its colour where the terminal wants one. The word itself always says it."""
    return f"\x1b[{_COLOURS[status]}m{word}\x1b[0m" if colour else word


def _merged(rows: Iterable[tuple[str | None, Hashable]]) -> list[tuple[str | None, int]]:
    """Half and index of the rows to print: two halves that would read the same become one row, "both".

    rows: the half and all else that is printed of each.
    """
    first: dict[Hashable, int] = {}
    halves: dict[Hashable, str | None] = {}
    repeats: Counter[Hashable] = Counter()
    for index, (half, content) in enumerate(rows):
        key = (content, repeats[half, content])  # only rows of different halves meet
        repeats[half, content] += 1
        first.setdefault(key, index)
        halves[key] = half if key not in halves else BOTH
    return [(halves[key], index) for key, index in first.items()]


def _duties(duties: Sequence[DutyResult], width: int) -> list[str]:
    if not duties:
        return ["Duties: none"]
    figures = [_figures(duty) for duty in duties]
    contents = [(duty.half, (duty.name, row)) for duty, row in zip(duties, figures, strict=True)]
    rows = [(_INDENT + clean(duty_words(duties[k].name, half)), figures[k]) for half, k in _merged(contents)]
    lines = _duty_table(rows) if width >= WIDTH else _duty_list(rows, width)
    if any(_UNKNOWN in row for row in figures):
        lines.append(f"{_INDENT}{_UNKNOWN} not known")
    return lines


def _duty_table(rows: Iterable[tuple[str, tuple[str, ...]]]) -> list[str]:
    first = WIDTH - _COLUMN * len(_COLUMNS)
    head = pad("Duties, per device", first) + _across(title for title, _, _ in _COLUMNS)
    lines = [head, " " * first + _across(unit for _, unit, _ in _COLUMNS)]
    for label, figures in rows:
        beside = label
        if cells(label) >= first:  # a long name gets a line of its own
            lines.append(label)
            beside = ""
        lines.append(pad(beside, first) + _across(figures))
    return lines


def _duty_list(rows: Iterable[tuple[str, tuple[str, ...]]], width: int) -> list[str]:
    """Each duty with its figures in a sentence, where the table has no room."""
    lines = ["Duties, per device"]
    for label, figures in rows:
        known = [
            f"{title} {text} {unit}" if text != _UNKNOWN else f"{title} {text}"
            for (title, unit, _), text in zip(_COLUMNS, figures, strict=True)
        ]
        lines += [*wrapped(label.lstrip(), _INDENT, width=width), *wrapped(_kept(known), _INDENT * 2, width=width)]
    return lines


def _kept(parts: Iterable[str]) -> str:
    """Parts of a sentence; a line may end after one but not inside."""
    return ", ".join(part.replace(" ", GLUE) for part in parts)


def _across(texts: Iterable[str]) -> str:
    return "".join(" " + pad(text, _COLUMN - 1, right=True) for text in texts)


def _figures(duty: DutyResult) -> tuple[str, ...]:
    return tuple(_figure(getattr(duty, attribute)) for _, _, attribute in _COLUMNS)


def _figure(traced: Traced | None) -> str:
    """Three digits, fewer or with an exponent where the column has no room for them."""
    if traced is None or math.isnan(traced.at(0)):
        return _UNKNOWN
    value = shown(traced.at(0), traced.unit)
    if traced.unit == "degC":
        return f"{value:.1f}"
    for digits in (3, 2):
        text = number(settled(value, traced.unit), digits, strip=False)
        if len(text) < _COLUMN:
            return text
    return f"{value:.1e}" if value > 0 else f"{value:.0e}"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Row:
    finding: Finding
    status: Status
    words: tuple[str, ...]  # utilisation, nominal, status, limit, amounts
    duty: str


def _findings(result: Result, colour: bool, width: int) -> list[str]:
    """Every finding, worst first; what is not `within` with its reasons.

    The place stands on a line below: for all when the duty has no room beside the numbers, else for those
    that are not `within` and for the one that governs. On a narrow page the amounts go there too.
    """
    rows = _rows(result)
    if not rows:
        return ["Findings: none"]
    titles = ("used", "nominal" if result.spread else "", "status", "limit", "applied of allowed")
    widths = [max(map(cells, column)) for column in zip(titles, *(row.words for row in rows), strict=True)]
    full = len(_ROW) + cells(_columns(titles, widths))
    beside = full + max(cells(row.duty) for row in rows) <= width
    narrow = full - 2 > width  # two spaces end the columns
    if narrow:
        widths[1] = widths[4] = 0
    title = _columns(titles, widths) + ("duty" if beside else "")
    lines = ["Findings, worst first", (_ROW + title).rstrip()]
    seen: dict[tuple[str, ...], str] = {}
    for row in rows:
        text = _ROW + _columns(row.words, widths) + (row.duty if beside else "")
        lines.append(_coloured_row(text.rstrip(), row.status, colour))
        detailed = row.status is not Status.WITHIN or row is rows[0] or not beside
        place = where_words(result, row.finding) if detailed else ""
        moved = (row.words[4], f"nominal {row.words[1]}" if row.words[1] else "") if narrow else ()
        under = ", ".join(part for part in (*moved, "" if beside else row.duty, place) if part)
        if under:
            lines += wrapped(under, _UNDER, width=width)
        if row.status is not Status.WITHIN:
            lines += _reasons(row, seen, width)
    if any(finding.unit == "degC" for finding in result.findings):
        lines += wrapped(FROM_AMBIENT, _INDENT, width=width)
    return lines


def _rows(result: Result) -> list[_Row]:
    """What is printed of each finding; findings of two halves that would read the same are one row."""
    pairs = list(zip(result.findings, result.nominal, strict=True))
    words = [_words(finding, nominal, result.spread) for finding, nominal in pairs]
    contents = (
        (finding.half, (row, finding.duty, _told(finding))) for finding, row in zip(result.findings, words, strict=True)
    )
    return [
        _Row(
            finding=result.findings[index],
            status=status_of(result.findings[index]),
            words=words[index],
            duty=clean(duty_words(result.findings[index].duty, half)),
        )
        for half, index in _merged(contents)
    ]


def _words(finding: Finding, nominal: float, spread: bool) -> tuple[str, ...]:
    return (
        percent(float(finding.utilisation[0])),
        percent(nominal) if spread else "",
        status_of(finding).word,
        clean(finding.limit),
        amounts(finding),
    )


def _told(finding: Finding) -> tuple[str, ...]:
    """The reasons that apply and what they lack, as text."""
    return tuple(
        text
        for reason in finding.reasons
        if bool(reason.applies[0])
        for text in (reason.text, *(f"{item.key} {item.where}" for item in reason.missing))
    )


def _columns(words: Sequence[str], widths: Sequence[int]) -> str:
    padded = (
        pad(word, width, right=column < 2) + "  "
        for column, (word, width) in enumerate(zip(words, widths, strict=True))
        if width
    )
    return "".join(padded)


def _coloured_row(line: str, status: Status, colour: bool) -> str:
    return line.replace(status.word, _coloured(status.word, status, colour), 1)


def _reasons(row: _Row, seen: dict[tuple[str, ...], str], width: int) -> list[str]:
    """Why a finding is not `within`, and what it lacks; once in full, then by reference to where it stood."""
    told = _told(row.finding)
    if not told:
        return []
    if told in seen:
        missing = ", ".join(row.finding.missing(0))
        return wrapped(f"as for {seen[told]}" + (f"; missing: {missing}" if missing else ""), _UNDER, width=width)
    seen[told] = f"{row.finding.limit} in {row.duty}"
    reasons = [reason for reason in row.finding.reasons if bool(reason.applies[0])]
    lines = [line for reason in reasons for line in wrapped(reason.text, _UNDER, width=width)]
    stated = {item.key: item.where for reason in reasons for item in reason.missing}
    for path, where in stated.items():
        words = f"{path} ({where})" if where else path
        lines += wrapped(words, _UNDER + "missing: ", _UNDER + "         ", width)
    return lines


def _listed(title: str, items: Iterable[str], width: int, mark: str = "") -> list[str]:
    """A titled list, empty when there is nothing to list; numbered unless a mark is given."""
    lines = [
        line
        for index, item in enumerate(items, start=1)
        for line in wrapped(item, _INDENT + (mark or f"{index}. "), width=width)
    ]
    return ["", title, *lines] if lines else []
