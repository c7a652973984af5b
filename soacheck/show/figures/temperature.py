"""Temperatures of junction, case and sink over the period, the levels or the held line, and their limit."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from soacheck.result import Result
from soacheck.show.figures import canvas, page, palette, read, words
from soacheck.show.figures.labels import Label, place
from soacheck.show.figures.panels import Panel, in_celsius, panels
from soacheck.trace import FloatArray

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_LIMIT = "junction-temperature"
_WORDS = {"T_j": "junction", "T_case": "case", "T_heatsink": "heat sink", "T_air": "air"}
_STROKES = {
    "T_j": palette.JUNCTION,
    "T_case": palette.CASE_LINE,
    "T_heatsink": palette.SINK_LINE,
    "T_air": palette.AIR,
}


def _columns(panel: Panel) -> dict[str, FloatArray]:
    """What is known of the panel, in degC."""
    found = {"T_j": panel.T_j, "T_case": panel.T_case, "T_heatsink": panel.T_heatsink, "T_air": panel.T_air}
    return {name: in_celsius(column) for name, column in found.items() if np.any(np.isfinite(column))}


def _wanted(panel: Panel) -> bool:
    return any(name != "T_air" for name in _columns(panel))


def lacks(result: Result, half: str | None) -> str:
    """Why there is nothing to draw; empty when there is."""
    if panels(result, half, _wanted)[0]:
        return ""
    missing = dict.fromkeys(key for finding in read.findings(result, _LIMIT, half) for key in finding.missing(0))
    return "no temperature is known" + (f", for want of {', '.join(missing)}" if missing else "")


def draw(result: Result, half: str | None) -> Figure:
    """The picture of the temperatures of one half; `lacks` must be empty."""
    rows, left_out = panels(result, half, _wanted)
    sheet = page.new_page((3.4,) if len(rows) == 1 else (2.4,) * len(rows), titled=True)
    for axes, panel in zip(sheet.rows, rows, strict=True):
        _row(sheet, axes, panel, result, half)
    if left_out:
        sheet.note(f"Not drawn for want of room: {', '.join(left_out)}.")
    if any(panel.thinned for panel in rows):
        sheet.note(page.ENVELOPE_NOTE)
    sheet.note(*read.unproven_notes(result, _LIMIT, half))
    return page.finish(sheet, "Temperatures", result, half)


def _row(sheet: page.Page, axes: Axes, panel: Panel, result: Result, half: str | None) -> None:
    columns = _columns(panel)
    limit = _limit(result, panel.duty, half)
    every = page.known([*columns.values(), np.array([limit])])
    low, high = float(every.min()), float(every.max())
    room = max(high - low, 5.0)
    axes.set_title(panel.title, loc="left", fontsize=canvas.TEXT_SIZE, pad=4, gid="row title")
    axes.set_xlabel(panel.x_name)
    axes.set_ylabel("temperature (°C)")
    axes.set_ylim(low - 0.1 * room, high + 0.16 * room)
    page.x_limits(axes, panel)
    page.plain_numbers(axes)
    left, right = page.ends(axes)
    labels = []
    if np.isfinite(limit):
        canvas.drawn_line(axes, [left, right], [limit, limit], palette.LIMIT_LINE, zorder=3)
        text = f"junction may reach {round(limit)} °C"
        labels.append(
            Label(x=left, y=limit, text=text, colour=palette.LIMIT, near=("NE", "SE"), also=((right, limit),))
        )
    for name, column in columns.items():
        stroke = _STROKES[name]
        if panel.x.size == 1 or (name == "T_air" and np.nanmax(column) == np.nanmin(column)):
            canvas.drawn_line(axes, [left, right], [column[0]] * 2, stroke, zorder=4)
        else:
            canvas.drawn_line(axes, panel.x, column, stroke, zorder=4)
        labels.append(_label(panel, name, column, right))
    sheet.note(*place(axes, labels))
    for name in ("T_j", "T_case", "T_heatsink"):
        if name not in columns:
            sheet.note(_unknown(result, panel.duty, half, name))
        elif not np.all(np.isfinite(columns[name])):
            sheet.note(f"{panel.duty}: the {_WORDS[name]} line is broken where its temperature is not known.")
    if not np.isfinite(limit):
        sheet.note(f"{panel.duty}: the limit of the junction is not known.")


def _label(panel: Panel, name: str, column: FloatArray, right: float) -> Label:
    """What the line is and its greatest value, at the place of that value."""
    at = int(np.nanargmax(column))
    value = float(column[at])
    flat = float(np.nanmax(column) - np.nanmin(column)) < 0.5
    greatest = f"{_WORDS[name]} {round(value)} °C" if flat else f"{_WORDS[name]}, greatest {round(value)} °C"
    x = right if flat or panel.x.size == 1 else float(panel.x[at])
    below = ("SW", "NW") if name == "T_air" else ("NW", "SW")  # nothing but the edge is below the air
    near = below if flat or panel.x.size == 1 else ("N", "NE", "NW", "S", "SE", "SW")
    return Label(x=x, y=value, text=greatest, colour=_STROKES[name].colour, bold=name == "T_j", near=near)


def _limit(result: Result, duty: str, half: str | None) -> float:
    """What the junction may reach by the rules in force [degC]; the same for all duties of a half."""
    findings = read.findings(result, _LIMIT, half)
    for finding in sorted(findings, key=lambda found: found.duty != duty):
        if finding.allowed is not None and np.isfinite(finding.allowed.at(0)):
            return float(in_celsius(finding.allowed.value)[0])
    return float("nan")


def _unknown(result: Result, duty: str, half: str | None, name: str) -> str:
    """Why a line is absent, with the mean where that at least is known."""
    sentence = f"{duty}: the temperature of the {_WORDS[name]} at each point is not known and not drawn"
    row = next((entry for entry in result.duties if entry.name == duty and entry.half == half), None)
    mean = row.T_j_mean if row is not None and name == "T_j" else None
    if mean is not None and np.isfinite(mean.at(0)):
        return f"{sentence}; its mean is {words.celsius(mean.at(0))}."
    return f"{sentence}."
