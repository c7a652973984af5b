"""Direct labels: text beside what it names, placed where nothing else is.

Each wanted label is tried around its point at growing distances; the best place lies inside the axes, on no
other label and on as few strokes as possible. A label that had to move away gets a thin leader. Where no
place is free the text goes to the notes below the picture, so that nothing is lost and nothing overlaps.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import product
from typing import TYPE_CHECKING

import numpy as np

from soacheck.show.figures import canvas, palette
from soacheck.trace import FloatArray

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.text import Text

# direction -> (step right, step up); what `near` lists
_AROUND = {
    "NE": (0.7, 0.7), "SE": (0.7, -0.7), "NW": (-0.7, 0.7), "SW": (-0.7, -0.7),
    "E": (1.0, 0.0), "W": (-1.0, 0.0), "N": (0.0, 1.0), "S": (0.0, -1.0),
    "ENE": (0.95, 0.3), "ESE": (0.95, -0.3), "WNW": (-0.95, 0.3), "WSW": (-0.95, -0.3),
    "NNE": (0.3, 0.95), "SSE": (0.3, -0.95), "NNW": (-0.3, 0.95), "SSW": (-0.3, -0.95),
}  # fmt: skip
_DISTANCES = (5.0, 10.0, 18.0, 30.0, 46.0, 66.0, 90.0, 120.0, 155.0)  # [points]
_LEADER_FROM = 16.0  # [points]
_GAP = 2.0  # [pixel] between labels
_SUBJECT_FROM, _SUBJECT = 4, 4  # lines drawn this high are the subject of the picture: worth four others to keep clear


@dataclass(frozen=True, slots=True, kw_only=True)
class Label:
    """Text wanted at a point in data coordinates.

    near: directions in the order of preference. also: further points that serve as well. on: points of a curve on
    which the text may sit, as the numbers of contour lines do; tried before all others.
    """

    x: float
    y: float
    text: str  # ready to draw: own text, or through canvas.plain
    colour: str = palette.INK
    near: tuple[str, ...] = ("NE", "SE", "NW", "SW", "N", "S", "E", "W")
    size: float = canvas.TEXT_SIZE
    bold: bool = False
    italic: bool = False
    also: tuple[tuple[float, float], ...] = ()
    on: tuple[tuple[float, float], ...] = ()


Box = tuple[float, float, float, float]  # left, bottom, right, top [pixel]
Point = tuple[float, float]
Place = tuple[Box, Point, float]  # the label's box, what it names, the distance between them [points]


@dataclass(slots=True, kw_only=True)
class _Paper:
    """What stands on the axes already, in pixels; it fills while labels are placed."""

    frame: Box
    per_point: float  # pixels in a point
    strokes: FloatArray  # (n, 2): points every few pixels along the lines and leaders
    marks: list[Box]  # single points of the picture
    boxes: list[Box]  # labels


def place(axes: Axes, wanted: Iterable[Label]) -> tuple[str, ...]:
    """Draw the labels, the important ones given first; returns the texts for which there was no room."""
    figure = axes.figure
    renderer = canvas.renderer_of(figure)  # type: ignore[arg-type]  # never a sub-figure
    left, bottom, right, top = axes.get_window_extent(renderer).extents
    per_point = figure.dpi / 72
    paper = _Paper(
        frame=(left, bottom, right, top), per_point=per_point, strokes=_stroke_points(axes),
        marks=_marks(axes, per_point), boxes=[],
    )  # fmt: skip
    homeless = []
    for label in wanted:
        anchors = _on_paper(axes, paper.frame, ((label.x, label.y), *label.also))
        curve = _on_paper(axes, paper.frame, label.on)
        text = _text(axes, label)
        extent = text.get_window_extent(renderer)
        size = (extent.width, extent.height)
        found = _sitting(paper, curve, size) or _best(paper, label, anchors, size)
        if found is None:
            text.remove()
            homeless.append(label.text.replace("\n", " "))
            continue
        box, at, distance = found
        paper.boxes.append(box)
        x, y = axes.transAxes.inverted().transform((box[0], box[1]))
        text.set_position((float(x), float(y)))
        if distance >= _LEADER_FROM:
            leader = _leader(at, box)
            _draw_leader(axes, leader, label.colour)
            paper.strokes = np.concatenate([paper.strokes, leader])
    return tuple(homeless)


def _text(axes: Axes, label: Label) -> Text:
    return axes.text(
        0, 0, label.text, transform=axes.transAxes, ha="left", va="bottom", color=label.colour,
        fontsize=label.size, fontweight="bold" if label.bold else "normal",
        fontstyle="italic" if label.italic else "normal",
        zorder=8, gid="label", linespacing=1.15,
        bbox={"facecolor": palette.GROUND, "edgecolor": "none", "alpha": 0.8, "pad": 0.6},
    )  # fmt: skip


def _on_paper(axes: Axes, frame: Box, points: Sequence[Point]) -> list[Point]:
    """Points in pixels, held inside the axes; unknown ones left out."""
    if not points:
        return []
    pixels = axes.transData.transform(np.asarray(points, dtype=np.float64))
    pixels = np.clip(pixels[np.all(np.isfinite(pixels), axis=1)], frame[:2], frame[2:])
    return [(float(x), float(y)) for x, y in pixels]


def _sitting(paper: _Paper, curve: Sequence[Point], size: Point) -> Place | None:
    """The point of a curve where its name hides least."""
    best: tuple[float, Place] | None = None
    for at in curve:
        box = _box(at, size, (0.0, 0.0), 0.0)
        if not _free(paper, box) or any(_overlap(box, mark) for mark in paper.marks):
            continue
        cost = _under(box, paper.strokes)
        if best is None or cost < best[0]:
            best = (cost, (box, at, 0.0))
    return None if best is None else best[1]


def _best(paper: _Paper, label: Label, anchors: Sequence[Point], size: Point) -> Place | None:
    best: tuple[float, Place] | None = None
    directions = (*label.near, *(d for d in _AROUND if d not in label.near))
    for order, (at, direction) in enumerate(product(anchors, directions)):
        for distance in _DISTANCES:
            box = _box(at, size, _AROUND[direction], distance * paper.per_point)
            if not _free(paper, box):
                continue
            cost = 25.0 * _under(box, paper.strokes) + 1.6 * distance + 2.0 * order
            cost += 400.0 * sum(_overlap(box, mark) for mark in paper.marks)
            if distance >= _LEADER_FROM:
                leader = _leader(at, box)
                cost += 45.0 + 60.0 * sum(_under(other, leader) for other in paper.boxes)
            if best is None or cost < best[0]:
                best = (cost, (box, at, distance))
    return None if best is None else best[1]


def _free(paper: _Paper, box: Box) -> bool:
    return _inside(box, paper.frame) and not any(_overlap(box, other) for other in paper.boxes)


def _box(at: tuple[float, float], size: tuple[float, float], step: tuple[float, float], reach: float) -> Box:
    x, y = at[0] + step[0] * reach, at[1] + step[1] * reach
    left = x if step[0] > 0 else x - size[0] if step[0] < 0 else x - size[0] / 2
    bottom = y if step[1] > 0 else y - size[1] if step[1] < 0 else y - size[1] / 2
    return left, bottom, left + size[0], bottom + size[1]


def _inside(box: Box, frame: Sequence[float]) -> bool:
    return box[0] >= frame[0] + 3 and box[1] >= frame[1] + 3 and box[2] <= frame[2] - 3 and box[3] <= frame[3] - 3


def _overlap(box: Box, other: Box) -> bool:
    return (
        box[0] < other[2] + _GAP and other[0] < box[2] + _GAP and box[1] < other[3] + _GAP and other[1] < box[3] + _GAP
    )


def _under(box: Box, points: FloatArray) -> float:
    """How many points of strokes lie under a box."""
    x, y = points[:, 0], points[:, 1]
    under = (x > box[0] - 2) & (x < box[2] + 2) & (y > box[1] - 2) & (y < box[3] + 2)
    return float(np.count_nonzero(under))


def _stroke_points(axes: Axes) -> FloatArray:
    """Points every few pixels along all lines of the axes; more of them where a line is what the picture is about."""
    frame = axes.bbox.extents
    pieces = [np.empty((0, 2))]
    for line in axes.lines:
        if line.get_linestyle() == "None":
            continue
        points = line.get_transform().transform(np.asarray(line.get_xydata(), dtype=np.float64))
        points = points[np.all(np.isfinite(points), axis=1)]
        if len(points) < 2:
            continue
        points = np.clip(points, (frame[0] - 50, frame[1] - 50), (frame[2] + 50, frame[3] + 50))
        length = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(points, axis=0).T))])
        along = np.linspace(0.0, length[-1], 2 + int(length[-1] / 4))
        weight = _SUBJECT if line.get_zorder() >= _SUBJECT_FROM else 1
        pieces.append(np.repeat(np.column_stack([np.interp(along, length, points[:, k]) for k in (0, 1)]), weight, 0))
    return np.concatenate(pieces)


def _marks(axes: Axes, per_point: float) -> list[Box]:
    """Boxes of the single points."""
    boxes = []
    for line in axes.lines:
        if line.get_linestyle() == "None" and line.get_marker() not in ("", "None", None):
            reach = line.get_markersize() * per_point / 2
            for x, y in line.get_transform().transform(np.asarray(line.get_xydata(), dtype=np.float64)):
                boxes.append((x - reach, y - reach, x + reach, y + reach))
    return boxes


def _leader(at: Point, box: Box) -> FloatArray:
    """Points every few pixels from what is named to the nearest edge of its label."""
    end = np.clip(at, (box[0], box[1]), (box[2], box[3]))
    count = 2 + int(np.hypot(*(end - np.asarray(at))) / 4)
    return np.linspace(at, end, count)


def _draw_leader(axes: Axes, leader: FloatArray, colour: str) -> None:
    points = axes.transAxes.inverted().transform(leader[[0, -1]])
    axes.plot(
        points[:, 0], points[:, 1], transform=axes.transAxes, color=colour, linewidth=0.6, zorder=5,
        gid="leader", scalex=False, scaley=False,
    )  # fmt: skip
