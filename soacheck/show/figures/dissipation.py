"""Power along the line, over the levels or over time, with the allowance at the case temperature reached."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from soacheck.result import DutyResult, Finding, Result
from soacheck.show.figures import canvas, page, palette, read, words
from soacheck.show.figures.labels import Label, place
from soacheck.show.figures.panels import Panel, panels
from soacheck.trace import FloatArray

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_TOO_HIGH = 10.0  # an allowance this many times the power would flatten the picture: it is told, not drawn


def _wanted(panel: Panel) -> bool:
    return bool(np.any(np.isfinite(panel.P)))


def lacks(result: Result, half: str | None) -> str:
    """Why there is nothing to draw; empty when there is."""
    return "" if panels(result, half, _wanted)[0] else "no duty has a known dissipation"


def draw(result: Result, half: str | None) -> Figure:
    """The picture of the dissipation of one half; `lacks` must be empty."""
    rows, left_out = panels(result, half, _wanted)
    sheet = page.new_page((3.4,) if len(rows) == 1 else (2.3,) * len(rows), titled=True)
    for axes, panel in zip(sheet.rows, rows, strict=True):
        _row(sheet, axes, panel, result, half)
    if left_out:
        sheet.note(f"Not drawn for want of room: {', '.join(left_out)}.")
    if any(panel.thinned for panel in rows):
        sheet.note(page.ENVELOPE_NOTE)
    sheet.note(*read.unproven_notes(result, "dissipation", half))
    return page.finish(sheet, "Dissipation of one device", result, half)


def _row(sheet: page.Page, axes: Axes, panel: Panel, result: Result, half: str | None) -> None:
    finding = read.of_duty(result, "dissipation", panel.duty, half)
    allowed, constant = _allowance(panel, finding)
    power = panel.P
    low, high = float(np.nanmin(power)), float(np.nanmax(power))
    shown = allowed.size > 0 and float(np.nanmin(allowed)) <= _TOO_HIGH * max(high, 1e-12)
    top = max(high, float(np.nanmin(allowed)) if shown else high)
    if shown and not constant:
        top = max(top, min(float(np.nanmax(allowed)), 2.5 * top))
    factor, sign = words.prefix(top)
    axes.set_title(panel.title, loc="left", fontsize=canvas.TEXT_SIZE, pad=4, gid="row title")
    axes.set_xlabel(panel.x_name)
    axes.set_ylabel(f"{'power' if panel.timed else 'mean power'} ({sign}W)")
    axes.set_ylim(1.1 * min(0.0, low) / factor, max(1.22 * top, 1e-9) / factor)
    page.x_limits(axes, panel)
    page.plain_numbers(axes)
    if panel.x.size > 1:
        canvas.drawn_line(axes, panel.x, power / factor, palette.POWER, zorder=4)
        sheet.explain(canvas.sample_line(palette.POWER), "power")
    varies = high - low > 1e-9 * abs(high)
    labels = [_peak(axes, panel, factor, sign)] if panel.x.size == 1 or varies else []
    duty = _result_of(result, panel.duty, half)
    if panel.timed and varies:
        labels += _mean(sheet, axes, duty, factor, sign)
    elif panel.timed:  # the mean would lie under the power
        labels.append(_steady(axes, high, factor, sign))
    if shown:
        labels.append(_draw_allowance(sheet, axes, panel, allowed, factor, sign))
    elif allowed.size:
        least = words.amount(float(np.nanmin(allowed)), "W")
        sheet.note(f"{panel.duty}: the allowance of {least} is above the picture.")
    elif duty is not None and duty.series is not None and duty.series.use == "once":
        sheet.note(f"{panel.duty}: one shot has no allowance of mean power; temperature and safe area judge it.")
    else:
        sheet.note(f"{panel.duty}: no allowance is drawn, for want of what it rests on.")
    if not panel.timed:
        labels += _rest(axes, panel, result, half, factor, sign)
    sheet.note(*place(axes, labels))


def _allowance(panel: Panel, finding: Finding | None) -> tuple[FloatArray, bool]:
    """The allowance over the panel and whether it is one figure; empty where it is not known."""
    if panel.P_allowed.size and np.any(np.isfinite(panel.P_allowed)):
        known = panel.P_allowed[np.isfinite(panel.P_allowed)]
        return panel.P_allowed, bool(np.ptp(known) <= 1e-9 * float(np.abs(known).max()))
    if finding is None or finding.allowed is None or not np.isfinite(finding.allowed.at(0)):
        return np.empty(0), True
    return np.full(panel.x.size, finding.allowed.at(0)), True


def _peak(axes: Axes, panel: Panel, factor: float, sign: str) -> Label:
    at = int(np.nanargmax(panel.P))
    x, y = float(panel.x[at]), float(panel.P[at])
    canvas.drawn_spot(axes, x, y / factor, palette.HOT)
    text = f"{'peak' if panel.timed else 'greatest'} {words.on_axis(y, factor, sign, 'W')}"
    return Label(x=x, y=y / factor, text=text, bold=True, near=("N", "NE", "NW", "S", "SE", "SW"))


def _steady(axes: Axes, power: float, factor: float, sign: str) -> Label:
    x, text = page.ends(axes)[1], f"power {words.on_axis(power, factor, sign, 'W')}"
    return Label(x=x, y=power / factor, text=text, colour=palette.LOAD, near=("NW", "SW"))


def _mean(sheet: page.Page, axes: Axes, duty: DutyResult | None, factor: float, sign: str) -> list[Label]:
    if duty is None or duty.P_mean is None or not np.isfinite(duty.P_mean.at(0)):
        return []
    mean = duty.P_mean.at(0)
    canvas.drawn_line(axes, page.ends(axes), [mean / factor] * 2, palette.MEAN, zorder=3)
    sheet.explain(canvas.sample_line(palette.MEAN), "mean")
    x = page.ends(axes)[1]
    text = f"mean {words.on_axis(mean, factor, sign, 'W')}"
    also = ((0.5 * x, mean / factor), (0.0, mean / factor))
    return [Label(x=x, y=mean / factor, text=text, colour=palette.LOAD, near=("NW", "SW"), also=also)]


def _draw_allowance(sheet: page.Page, axes: Axes, panel: Panel, allowed: FloatArray, factor: float, sign: str) -> Label:
    one = panel.timed or panel.x.size == 1
    x = np.asarray(page.ends(axes)) if one else panel.x
    y = np.full(2, allowed[0]) if one else allowed
    canvas.drawn_line(axes, x, y / factor, palette.ALLOWANCE, zorder=3)
    text = "allowed mean" if panel.timed else "allowed"
    sheet.explain(canvas.sample_line(palette.ALLOWANCE), "allowed mean at the case temperature reached")
    at = int(np.nanargmin(y))
    value = words.on_axis(float(y[at]), factor, sign, "W")
    constant = float(np.nanmax(y) - np.nanmin(y)) <= 1e-9 * abs(float(y[at]))
    text = f"{text} {value}" if constant else f"{text}, at the least {value}"
    anchor = float(x[0]) if constant else float(x[at])
    near = ("NE", "SE") if constant else ("S", "SE", "SW", "N", "NE", "NW")
    level = float(y[at]) / factor
    also = ((float(x[-1]), level), (float(np.mean(x)), level)) if constant else ()
    return Label(x=anchor, y=level, text=text, colour=palette.LIMIT, near=near, also=also)


def _rest(axes: Axes, panel: Panel, result: Result, half: str | None, factor: float, sign: str) -> list[Label]:
    """The Q point on a held line."""
    if panel.x_name != words.voltage_axis(read.device_kind(result, half)):
        return []
    labels = []
    for duty in read.drawn(result, half):
        if duty.points == 1 and duty.held and duty.name != panel.duty:
            x, y = float(duty.series.v[0]), float(duty.series.v[0] * duty.series.i[0])
            canvas.drawn_spot(axes, x, y / factor, palette.REST)
            labels.append(Label(x=x, y=y / factor, text=f"{duty.name} {words.on_axis(y, factor, sign, 'W')}"))
    return labels


def _result_of(result: Result, name: str, half: str | None) -> DutyResult | None:
    return next((duty for duty in result.duties if duty.name == name and duty.half == half), None)
