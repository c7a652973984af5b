"""Load line or locus on linear axes over the device's output characteristics: ends, Q point, regions."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from soacheck.device.laws import region_word
from soacheck.device.ratings import BIPOLAR
from soacheck.result import Characteristics, Result
from soacheck.show.figures import canvas, page, palette, read, words
from soacheck.show.figures.labels import Label, place
from soacheck.show.figures.read import Drawn
from soacheck.trace import BoolArray, FloatArray, IntArray

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_SHORT = 0.1  # a region that takes up less of the line is named at its end
_NOTHING = 1e-4  # of the greatest current: leakage, or the far tail of a device that another has taken over from
_MOST_STRETCHES = 200  # looked at for the longest; a record that hops between regions would take for ever


def lacks(result: Result, half: str | None) -> str:
    """Why there is nothing to draw; empty when there is."""
    return "" if read.drawn(result, half) else "no duty has a known path of voltage and current"


def draw(result: Result, half: str | None) -> Figure:
    """The line picture of one half; `lacks` must be empty."""
    sheet = page.new_page((4.4,))
    axes = sheet.rows[0]
    kind = read.device_kind(result, half)
    duties = _order(result, half)
    v = page.known([duty.series.v for duty in duties])
    i = page.known([duty.series.i for duty in duties])
    factor, sign = words.prefix(max(float(i.max()), 1e-9))
    axes.set_xlim(min(0.0, 1.05 * float(v.min())), 1.12 * max(float(v.max()), 1e-3))
    axes.set_ylim(min(0.0, 1.05 * float(i.min()) / factor), 1.28 * max(float(i.max()), 1e-9) / factor)
    axes.set_xlabel(words.voltage_axis(kind))
    axes.set_ylabel(words.current_axis(kind, sign))
    page.plain_numbers(axes)
    behind = _characteristics(axes, result, half, factor)
    labels: list[Label] = []
    loci = [duty for duty in duties if not duty.still]
    for count, (same, x, y) in enumerate(_paths(loci)):
        stroke = palette.LOCI[min(count, len(palette.LOCI) - 1)]
        canvas.drawn_line(axes, x, y / factor, stroke, zorder=4)
        sheet.explain(canvas.sample_line(stroke), f"{_what(same[0])}, {' = '.join(duty.name for duty in same)}")
    for duty in duties:
        if duty.still:
            at_v, at_i = float(duty.series.v[0]), float(duty.series.i[0])
            canvas.drawn_spot(axes, at_v, at_i / factor, palette.REST)
            at = f"{words.on_axis(at_v, 1.0, '', 'V')}, {words.on_axis(at_i, factor, sign, 'A')}"
            text = f"{_point_name(duty)}\n{at}"
            labels.append(Label(x=at_v, y=at_i / factor, text=text, bold=True))
    if loci:
        ends, named = _ends(axes, loci[0], kind, factor, sign, labels)
        labels.extend((*ends, *_regions(loci[0], kind, factor, named)))
    sheet.note(*place(axes, [*labels, *behind]))
    sheet.note(_about_characteristics(result, half, bool(behind)))
    if any(duty.points > page.ENVELOPE_FROM for duty in duties):
        sheet.note(page.ENVELOPE_NOTE)
    return page.finish(sheet, "Line of operation", result, half)


def _order(result: Result, half: str | None) -> tuple[Drawn, ...]:
    """The duty with the worst safe-area finding first: it carries the names of ends and regions."""
    duties = (*read.drawn(result, half), *read.held_lines(result, half))
    for finding in read.findings(result, "safe-area", half):
        if any(duty.name == finding.duty and not duty.still for duty in duties):
            return tuple(sorted(duties, key=lambda duty: duty.name != finding.duty))
    return tuple(sorted(duties, key=lambda duty: -duty.points))


def _paths(loci: list[Drawn]) -> list[tuple[list[Drawn], FloatArray, FloatArray]]:
    """Each path once, with all duties that follow it."""
    found: list[tuple[list[Drawn], FloatArray, FloatArray]] = []
    for duty in loci:
        v, i = page.path(duty.series)
        twin = next((entry for entry in found if page.same_path((v, i), entry[1:])), None)
        if twin is None:
            found.append(([duty], v, i))
        else:
            twin[0].append(duty)
    return found


def _what(duty: Drawn) -> str:
    return "points that may be held" if duty.held else "path"


def _point_name(duty: Drawn) -> str:
    return "Q point (idle)" if duty.name == "idle" else duty.name


def _characteristics(axes: Axes, result: Result, half: str | None, factor: float) -> list[Label]:
    """Output characteristics, thin and grey, each with its base current where it leaves the picture."""
    labels: list[Label] = []
    (_, right), (_, top) = axes.get_xlim(), axes.get_ylim()
    for name, v, i in _behind(result, half):
        canvas.drawn_line(axes, v, i / factor, palette.CHARACTERISTIC, zorder=2)
        inside = (v <= right) & (i / factor <= top)
        if np.count_nonzero(inside) > 1:
            last = int(np.flatnonzero(inside)[-1])
            x, y = float(v[last]), float(i[last] / factor)
            if last + 1 < v.size and v[last + 1] > right and v[last] < 0.97 * right:
                x, y = right, float(np.interp(right, v, i / factor))
            text = canvas.plain(name, 24)
            labels.append(Label(x=x, y=y, text=text, colour=palette.QUIET, size=7.5, near=("NW", "SW", "W")))
    return labels


def _behind(result: Result, half: str | None) -> tuple[tuple[str, FloatArray, FloatArray], ...]:
    found: tuple[Characteristics, ...] = tuple(c for c in result.characteristics if c.half == half)
    return found[0].curves if found else ()


def _about_characteristics(result: Result, half: str | None, shown: bool) -> str:
    if shown:
        return (
            "Grey: output characteristics from the typical values of the device file, each with its base "
            "current; a guide for the eye, no limit rests on them."
        )
    if _behind(result, half):
        return ""
    if read.device_kind(result, half) in BIPOLAR:
        return "No output characteristics: the device file states no gain (typical.h_FE)."
    return "No output characteristics: they are drawn for bipolar transistors only."


def _ends(
    axes: Axes, duty: Drawn, kind: str, factor: float, sign: str, there: list[Label]
) -> tuple[list[Label], set[int]]:
    """Both ends of an open line, of a closed path the points of greatest current and greatest voltage.

    And the regions that these labels name, which then need no label of their own. there: points that have a label.
    """
    v, i = duty.series.v, duty.series.i
    known = np.where(np.isfinite(v * i), 0.0, np.nan)
    places = {
        "greatest current": int(np.nanargmax(i + known)),
        "greatest voltage": int(np.nanargmax(v + known)),
    }
    if duty.held:
        places = {"low end": int(np.nanargmin(v + known)), "high end": int(np.nanargmax(v + known))}
    elif duty.series.use == "once":
        places |= {"start": 0, "end": v.size - 1}
    labels: list[Label] = []
    named: set[int] = set()
    for name, at in places.items():
        x, y = float(v[at]), float(i[at] / factor)
        if not np.isfinite(x * y) or any(_near(axes, label, x, y) for label in (*there, *labels)):
            continue
        canvas.drawn_spot(axes, x, y, palette.END)
        head = "" if duty.held else f"{name}\n"
        tail = ""
        if duty.held and duty.series.region.size == v.size:
            code = int(duty.series.region[at])
            word = region_word(code, kind)
            if word is not None and _reach(duty, duty.series.region == code) < _SHORT:
                tail = f", {word}"
                named.add(code)
        nothing = abs(float(i[at])) < _NOTHING * float(np.nanmax(np.abs(i)))
        current = f"≈ 0 {sign}A" if nothing and i[at] != 0 else words.on_axis(float(i[at]), factor, sign, "A")
        text = f"{head}{words.on_axis(float(v[at]), 1.0, '', 'V')}, {current}{tail}"
        near = ("NE", "E", "NW", "W", "N", "SE")
        labels.append(Label(x=x, y=y, text=text, colour=palette.LOAD, near=near))
    return labels, named


def _near(axes: Axes, label: Label, x: float, y: float) -> bool:
    """Whether two points fall together on the paper."""
    here, there = axes.transAxes.inverted().transform(axes.transData.transform([(x, y), (label.x, label.y)]))
    return bool(np.hypot(*(here - there)) < 0.015)


def _reach(duty: Drawn, part: BoolArray | IntArray) -> float:
    """How far a part of the path goes, as a share of the greatest voltage and current."""
    v, i = duty.series.v[part], duty.series.i[part]
    known = np.isfinite(v * i)
    if not np.any(known):
        return -1.0
    v_top, i_top = np.nanmax(duty.series.v), np.nanmax(duty.series.i)
    return float(np.ptp(v[known]) / max(v_top, 1e-12) + np.ptp(i[known]) / max(i_top, 1e-12))


def _regions(duty: Drawn, kind: str, factor: float, named: set[int]) -> list[Label]:
    """Each region named once, in the middle of its longest stretch of the line."""
    region, v, i = duty.series.region, duty.series.v, duty.series.i
    if region.size != v.size:
        return []
    starts = np.concatenate([[0], np.flatnonzero(np.diff(region)) + 1])
    stops = np.concatenate([starts[1:], [region.size]])
    labels = []
    for code in dict.fromkeys(region.tolist()):
        word = region_word(code, kind)
        if word is None or code in named:
            continue
        own = np.flatnonzero(region[starts] == code)[:_MOST_STRETCHES]
        longest = max((np.arange(starts[k], stops[k]) for k in own), key=lambda part: _reach(duty, part))
        middle = int(longest[longest.size // 2])
        near = ("NE", "N", "E", "SW", "S")
        labels.append(Label(x=float(v[middle]), y=float(i[middle] / factor), text=word, italic=True, near=near))
    return labels
