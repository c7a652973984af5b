"""Printed and allowed safe-area curves on log-log paper, the ratings, the loci and the hot spot."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from soacheck.result import Finding, Result, SafeAreaPicture
from soacheck.show.figures import canvas, page, palette, read, words
from soacheck.show.figures.labels import Label, place
from soacheck.show.text import percent
from soacheck.trace import FloatArray

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_FINE = 40  # pieces of a straight segment: on log paper it is a curve


def lacks(result: Result, half: str | None) -> str:
    """Why there is nothing to draw; empty when there is."""
    picture = _picture(result, half)
    if picture is None or not any(printed.size for _, printed, _ in picture.curves):
        return "the device file states no forward safe-area curve ([[soa]])"
    return ""


def _picture(result: Result, half: str | None) -> SafeAreaPicture | None:
    return next((picture for picture in result.safe_area if picture.half == half), None)


def draw(result: Result, half: str | None) -> Figure:
    """The safe-area picture of one half; `lacks` must be empty."""
    picture = _picture(result, half)
    if picture is None:
        raise ValueError("no safe-area curve")
    sheet = page.new_page((4.6,))
    axes = sheet.rows[0]
    kind = read.device_kind(result, half)
    spot = read.hot_spot(result, "safe-area", half)
    loci = _loci(result, picture, half)
    _axes(axes, picture, loci, spot, kind)
    labels = [*_hot_labels(axes, spot), *_curves(axes, picture), *_ratings(axes, picture, kind)]
    for count, (name, v, i, single) in enumerate(loci):
        if single:
            at_hot = spot is not None and spot.duty in name and np.isclose(spot.where.v[0], v[0])
            labels.extend([] if at_hot else _rest(axes, name, v, i))
            continue
        stroke = palette.LOCI[min(count, len(palette.LOCI) - 1)]
        canvas.drawn_line(axes, *_on_log_paper(axes, v, i), stroke, zorder=4)
        sheet.explain(canvas.sample_line(stroke), f"locus, {name}")
    sheet.note(*place(axes, labels))
    T, T_ref = words.celsius(picture.T), words.celsius(picture.T_ref)
    factor = "" if picture.factor == 1 else f", {percent(picture.factor)} by the rules"
    if any(_drawable(scaled).size for _, _, scaled in picture.curves):
        sheet.explain(canvas.sample_line(palette.SCALED), f"allowed at {T}{factor}")
    if any(printed.size for _, printed, _ in picture.curves):
        sheet.explain(canvas.sample_line(palette.PRINTED), f"as printed, for {T_ref}")
    if np.isfinite([picture.I_max, picture.I_peak, picture.V_max]).any():
        sheet.explain(canvas.sample_line(palette.RATING), "rating")
    sheet.note(*_notes(result, picture, half, spot))
    return page.finish(sheet, "Safe area", result, half)


def _loci(result: Result, picture: SafeAreaPicture, half: str | None) -> list[tuple[str, FloatArray, FloatArray, bool]]:
    """Name, v, i of each locus, the governing one first; whether it stands still. One path is drawn once."""
    duties = sorted(read.drawn(result, half), key=lambda duty: duty.name != picture.duty)
    found = [(duty.name, *page.path(duty.series), duty.still) for duty in duties]
    if picture.v.size:
        found.insert(0, (picture.duty, picture.v, picture.i, read.stands_still(picture.v, picture.i)))
    merged: list[tuple[str, FloatArray, FloatArray, bool]] = []
    for name, v, i, still in found:
        twin = next((k for k, other in enumerate(merged) if page.same_path((v, i), (other[1], other[2]))), None)
        if twin is None or name == "idle":
            merged.append((name, v, i, still))
        else:
            merged[twin] = (f"{merged[twin][0]} = {name}", *merged[twin][1:])
    return sorted(merged, key=lambda entry: entry[3])


def _axes(
    axes: Axes,
    picture: SafeAreaPicture,
    loci: list[tuple[str, FloatArray, FloatArray, bool]],
    spot: Finding | None,
    kind: str,
) -> None:
    """Log axes wide enough for the curves, the ratings, the hot spot and the loci down to what matters."""
    curves = [array for _, printed, scaled in picture.curves for array in (printed, scaled) if array.size]
    hot_v = [float(spot.where.v[0])] if spot is not None else []
    hot_i = [float(spot.where.i[0])] if spot is not None else []
    v = page.known([np.concatenate([c[:, 0] for c in curves]), np.array([picture.V_max, *hot_v])])
    i = page.known([np.concatenate([c[:, 1] for c in curves]), np.array([picture.I_max, picture.I_peak, *hot_i])])
    v_loci, i_loci = page.known([entry[1] for entry in loci]), page.known([entry[2] for entry in loci])
    v_high, i_high = max(v.max(), v_loci.max(initial=0.0)), max(i.max(), i_loci.max(initial=0.0))
    i_low = min(i[i > 0].min(), 0.5 * float(np.median(i_loci[i_loci > 0])) if np.any(i_loci > 0) else i_high)
    low_v = page.step_125(max(v[v > 0].min(), v_high / 1e4) * 0.999, up=False)
    low_i = page.step_125(max(i_low * 0.8, i_high / 1e5), up=False)
    axes.set_xscale("log")
    axes.set_yscale("log")
    axes.set_xlim(low_v, page.step_125(v_high * 1.2, up=True))
    axes.set_ylim(low_i, page.step_125(i_high * 1.3, up=True))
    for axis, limits in ((axes.xaxis, axes.get_xlim()), (axes.yaxis, axes.get_ylim())):
        major, texts, minor = page.log_ticks(*limits)
        axis.set_ticks(major, texts)
        axis.set_ticks(minor, [""] * len(minor), minor=True)
    axes.set_xlabel(words.voltage_axis(kind))
    axes.set_ylabel(words.current_axis(kind))


def _curves(axes: Axes, picture: SafeAreaPicture) -> list[Label]:
    """Both families, each allowed curve with its name (the printed one where nothing is allowed)."""
    labels = []
    for name, printed, scaled in picture.curves:
        text = canvas.plain(name, 24)
        if printed.size:
            canvas.drawn_line(axes, printed[:, 0], printed[:, 1], palette.PRINTED, zorder=2.5)
        shown = _drawable(scaled)
        if shown.size:
            canvas.drawn_line(axes, shown[:, 0], shown[:, 1], palette.SCALED, zorder=3)
            labels.append(_on_slope(shown, text))
        elif printed.size:
            labels.append(_on_slope(printed, f"({text})", bold=False))
    return labels


def _drawable(scaled: FloatArray) -> FloatArray:
    """The points of an allowed curve that have a place on log paper."""
    return scaled[np.all(scaled > 0, axis=1)] if scaled.size else scaled


def _on_slope(points: FloatArray, text: str, bold: bool = True) -> Label:
    """A curve's name on its falling part, clear of the rating line at its end."""
    falling = points[points[:, 1] < points[:, 1].max() * (1 - 1e-6)]
    top = points[points.shape[0] - falling.shape[0] - 1 :] if falling.size else points
    length = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(np.log(top), axis=0).T))])
    along = np.linspace(0.35, 0.92, 20) * length[-1]
    on = np.exp(np.column_stack([np.interp(along, length, np.log(top[:, k])) for k in (0, 1)]))
    return Label(
        x=float(on[-1, 0]), y=float(on[-1, 1]), text=text, colour=palette.LIMIT, bold=bold, near=("SW", "NE"),
        on=tuple((float(x), float(y)) for x, y in on[::-1]),
    )  # fmt: skip


def _ratings(axes: Axes, picture: SafeAreaPicture, kind: str) -> list[Label]:
    (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
    labels = []
    for value, symbol in (
        (picture.I_max, words.current_rating(kind)),
        (picture.I_peak, words.peak_rating(kind)),
    ):
        if math.isfinite(value) and not (value == picture.I_max and symbol == words.peak_rating(kind)):
            canvas.drawn_line(axes, [left, min(picture.V_max, right)], [value, value], palette.RATING, zorder=2)
            text = f"{symbol} {words.amount(value, 'A')}"
            labels.append(Label(x=left * 1.06, y=value, text=text, near=("NE", "SE")))
    if math.isfinite(picture.V_max):
        peak = max((value for value in (picture.I_max, picture.I_peak) if math.isfinite(value)), default=top)
        canvas.drawn_line(axes, [picture.V_max] * 2, [bottom, peak], palette.RATING, zorder=2)
        text = f"{words.voltage_rating(kind)} {words.amount(picture.V_max, 'V')}"
        labels.append(Label(x=picture.V_max, y=bottom, text=text, near=("NW", "NE")))
    return labels


def _on_log_paper(axes: Axes, v: FloatArray, i: FloatArray) -> tuple[FloatArray, FloatArray]:
    """The locus with its straight segments cut fine; what is below the paper is held just under its edge."""
    if 1 < v.size < 400:
        inner = np.linspace(0.0, 1.0, _FINE + 1)[1:-1]
        along = np.concatenate([[0.0], 1e-3 * inner, inner, 1 - 1e-3 * inner])
        along = np.unique(along)
        at = (np.arange(v.size - 1)[:, None] + along).ravel()
        at = np.append(at, v.size - 1.0)
        v, i = np.interp(at, np.arange(v.size), v), np.interp(at, np.arange(i.size), i)
    return np.maximum(v, axes.get_xlim()[0] / 30), np.maximum(i, axes.get_ylim()[0] / 30)


def _rest(axes: Axes, name: str, v: FloatArray, i: FloatArray) -> list[Label]:
    x, y = float(v[0]), float(i[0])
    (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
    if not (left <= x <= right and bottom <= y <= top):
        return []
    canvas.drawn_spot(axes, x, y, palette.REST)
    return [Label(x=x, y=y, text=name)]


def _hot_labels(axes: Axes, spot: Finding | None) -> list[Label]:
    """The point that touches, and how far the allowance is, in words."""
    if spot is None:
        return []
    v, i = float(spot.where.v[0]), float(spot.where.i[0])
    if not (v > 0 and i > 0):
        return []
    canvas.drawn_spot(axes, v, i, palette.HOT)
    u = float(spot.utilisation[0])
    if math.isfinite(u):
        margin = f"safe-area {percent(u)} of the allowance"
    elif spot.allowed is not None and spot.allowed.at(0) == 0:
        margin = "safe-area: nothing is allowed here"
    else:
        margin = "safe-area: the margin has no figure"
    amounts = ""
    allowed = spot.allowed.at(0) if spot.allowed is not None and spot.unit == "A" else math.nan
    if math.isfinite(allowed) and allowed > 0:
        axes.plot([v, v], [i, allowed], color=palette.INK, linewidth=0.8, zorder=5)
        axes.plot([v], [allowed], color=palette.INK, marker="_", markersize=9, linestyle="none", zorder=5)
        amounts = f"{words.amount(i, 'A')} of {words.amount(allowed, 'A')} "
    place_words = f"{amounts}at {words.amount(v, 'V')}\n{read.duty_words(spot)}: {read.status_word(spot)}"
    return [Label(x=v, y=i, text=f"{margin}\n{place_words}", bold=True, near=("NE", "E", "SW", "SE", "W", "NW"))]


def _notes(result: Result, picture: SafeAreaPicture, half: str | None, spot: Finding | None) -> list[str]:
    notes = []
    if any(printed.size and not _drawable(scaled).size for _, printed, scaled in picture.curves):
        notes.append(
            f"In brackets, printed only: allows nothing at {words.celsius(picture.T)}, or is no curve that this duty "
            "is judged by."
            if math.isfinite(picture.T)
            else "In brackets: as printed only."
        )
    if not math.isfinite(picture.T):
        notes.append("The temperature at the chart's reference point is not known, so no curve could be scaled.")
    if spot is None:
        notes.append("No hot spot is marked: no safe-area finding has a place on this chart.")
    elif spot.where.v[0] <= 0 or spot.where.i[0] <= 0:
        notes.append(f"The hot spot ({read.place_words(spot)}) has no place on log paper.")
    elif not math.isfinite(spot.utilisation[0]) and read.status_word(spot) == "exceeds":
        notes.append(f"Hot spot: {read.why(spot)}")
    if any(d.points > page.ENVELOPE_FROM for d in read.drawn(result, half)):
        notes.append(page.ENVELOPE_NOTE)
    return [*notes, *read.unproven_notes(result, "safe-area", half)]
