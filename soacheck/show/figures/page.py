"""The page of a picture: two lines of heading, axes one above the other, a key to the strokes, notes.

Everything is laid out in inches from the top, so that a longer key or one more note makes the page longer and
leaves the axes and the labels in them as they are.
"""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from soacheck.result import Result, Series
from soacheck.show.figures import canvas, palette
from soacheck.trace import FloatArray, IntArray

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure
    from matplotlib.text import Text

    from soacheck.show.figures.panels import Panel

LEFT, RIGHT, TOP = 0.78, 0.25, 0.66  # [inch]
_ROW_TITLE = 0.16  # [inch] more above the first row where rows have titles
BETWEEN = 0.68  # [inch] from the foot of one row of axes to the head of the next
BELOW = 0.50  # [inch] tick numbers and axis name of the last row
_NOTE_SIZE = 7.0
_DENSE = 1500  # bins of an envelope
ENVELOPE_FROM = 4 * _DENSE  # points
ENVELOPE_NOTE = "A long record is drawn as its envelope; no peak of it is left out."


@dataclass(slots=True, kw_only=True)
class Page:
    """A page while it is being drawn."""

    figure: Figure
    rows: tuple[Axes, ...]
    heights: tuple[float, ...]
    top: float
    key: list[tuple[Artist, str]] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)

    def explain(self, artist: Artist, text: str) -> None:
        """One entry of the key below the axes; the same text once."""
        if all(text != known for _, known in self.key):
            self.key.append((artist, text))

    def note(self, *texts: str) -> None:
        """Sentences for the foot of the page, each once."""
        self.notes.extend(text for text in dict.fromkeys(texts) if text and text not in self.notes)


def new_page(heights: Sequence[float], *, titled: bool = False) -> Page:
    """A page with one axes per height [inch]. Call inside canvas.settings()."""
    top = TOP + (_ROW_TITLE if titled else 0.0)
    figure = canvas.new_figure(top + sum(heights) + BETWEEN * (len(heights) - 1) + BELOW)
    rows = tuple(figure.add_axes((0.0, 0.0, 1.0, 1.0), label=f"row {k}") for k in range(len(heights)))
    page = Page(figure=figure, rows=rows, heights=tuple(heights), top=top)
    _lay_out(page)
    for axes in rows:
        axes.spines["top"].set_visible(False)
        axes.spines["right"].set_visible(False)
        axes.grid(visible=True, which="major", color=palette.GRID, linewidth=0.6)
        axes.set_axisbelow(True)
    return page


def _lay_out(page: Page) -> None:
    width, height = page.figure.get_size_inches()
    top = height - page.top
    for axes, tall in zip(page.rows, page.heights, strict=True):
        axes.set_position((LEFT / width, (top - tall) / height, (width - LEFT - RIGHT) / width, tall / height))
        top -= tall + BETWEEN


def finish(page: Page, heading: str, result: Result, half: str | None) -> Figure:
    """Put the heading above and the key and the notes below; the page becomes as long as they need."""
    figure = page.figure
    renderer = canvas.renderer_of(figure)
    width = canvas.WIDTH
    room = (width - 0.35) * canvas.DPI
    foot: list[Artist] = []
    below = BELOW
    if page.key:
        legend = _key(page, room)
        below += legend.get_window_extent(renderer).height / canvas.DPI + 0.05
        foot.append(legend)
    lines = [line for note in page.notes for line in _wrapped(figure, note, _NOTE_SIZE, room)]
    line_height = _NOTE_SIZE * 1.35 / 72
    height = page.top + sum(page.heights) + BETWEEN * (len(page.heights) - 1) + below + line_height * len(lines) + 0.12
    figure.set_size_inches(width, height)
    _lay_out(page)
    floor = height - page.top - sum(page.heights) - BETWEEN * (len(page.heights) - 1)
    if page.key:
        foot[0].set_bbox_to_anchor((0.2 / width, (floor - BELOW) / height))  # type: ignore[attr-defined]  # a Legend
    for count, line in enumerate(lines):
        y = (floor - below - line_height * (count + 0.8)) / height
        figure.text(0.2 / width, y, line, fontsize=_NOTE_SIZE, color=palette.QUIET, va="baseline", gid="note")
    _heading(figure, heading, result, half, room)
    return figure


def _heading(figure: Figure, heading: str, result: Result, half: str | None, room: float) -> None:
    width, height = figure.get_size_inches()
    device = result.device
    if half is not None and result.complement is not None and half == "lower":
        device = result.complement
    name = canvas.plain(device.name)
    of_half = f", {half} half" if half else ""
    stage = canvas.plain(result.stage.title or result.stage.file)
    revision = f", revision {canvas.plain(result.stage.revision, 20)}" if result.stage.revision else ""
    for text, size, weight, drop in (
        (f"{heading}{of_half}: {name}", 10.5, "bold", 0.26),
        (f"{stage}{revision}", canvas.TEXT_SIZE, "normal", 0.46),
    ):
        artist = figure.text(
            0.2 / width,
            1 - drop / height,
            text,
            fontsize=size,
            fontweight=weight,
            va="baseline",
            gid="heading",
        )
        _narrow(artist, size, figure, room)


def _narrow(artist: Text, size: float, figure: Figure, room: float) -> None:
    """Set a heading smaller until it fits."""
    renderer = canvas.renderer_of(figure)
    wide = artist.get_window_extent(renderer).width
    if wide > room:
        artist.set_fontsize(max(3.5, size * room / wide * 0.98))


def _key(page: Page, room: float) -> Artist:
    handles, texts = zip(*page.key, strict=True)
    renderer = canvas.renderer_of(page.figure)
    for columns in range(min(len(texts), 4), 0, -1):
        legend = page.figure.legend(
            handles, texts, loc="upper left", ncols=columns, frameon=False, handlelength=3.6,
            columnspacing=1.8, borderpad=0.0, borderaxespad=0.0, handletextpad=0.7, labelspacing=0.45,
            fontsize=canvas.TEXT_SIZE,
            bbox_to_anchor=(0.2 / canvas.WIDTH, 0.5),
        )  # fmt: skip
        if columns == 1 or legend.get_window_extent(renderer).width <= room:
            break
        legend.remove()
    return legend


def _wrapped(figure: Figure, text: str, size: float, room: float) -> list[str]:
    probe = figure.text(0, 0, text, fontsize=size)
    renderer = canvas.renderer_of(figure)
    per_sign = probe.get_window_extent(renderer).width / max(len(text), 1)
    most = max(20, int(room / per_sign))
    while True:
        lines = textwrap.wrap(text, most)
        widths = []
        for line in lines:
            probe.set_text(line)
            widths.append(probe.get_window_extent(renderer).width)
        if max(widths, default=0.0) <= room or most <= 20:
            probe.remove()
            return lines
        most -= 4


def thinned(*columns: FloatArray) -> IntArray:
    """Positions that keep the least and greatest of every column in each of many bins.

    A record of a million points is drawn as its envelope: no peak is lost.
    """
    count = columns[0].size
    if count <= ENVELOPE_FROM:
        return np.arange(count)
    edges = np.linspace(0, count, _DENSE + 1).astype(np.int64)
    keep = [np.array([0, count - 1]), edges[:-1]]
    length = int(np.diff(edges).max())
    places = np.minimum(edges[:-1, None] + np.arange(length), edges[1:, None] - 1)
    rows = np.arange(_DENSE)
    for column in columns:
        blocks = column[places]
        low, high = (
            np.where(np.isfinite(blocks), blocks, np.inf),
            np.where(np.isfinite(blocks), blocks, -np.inf),
        )
        keep.extend((places[rows, low.argmin(axis=1)], places[rows, high.argmax(axis=1)]))
    return np.unique(np.concatenate(keep))


def step_125(value: float, *, up: bool) -> float:
    """The next of 1, 2, 5, 10, 20 ... at or beyond a positive value."""
    decade = 10.0 ** np.floor(np.log10(value))
    choices = decade * np.array([0.5, 1.0, 2.0, 5.0, 10.0])
    if up:
        return float(choices[choices >= value * (1 - 1e-9)][0])
    return float(choices[choices <= value * (1 + 1e-9)][-1])


def log_ticks(low: float, high: float) -> tuple[FloatArray, list[str], FloatArray]:
    """Decades with plain numbers, 2 and 5 too where the axis is short; and the places of the small ticks."""
    decades = np.arange(np.floor(np.log10(low)), np.ceil(np.log10(high)) + 1)
    every = np.concatenate([10.0**d * np.arange(1, 10) for d in decades])
    every = every[(every >= low * (1 - 1e-9)) & (every <= high * (1 + 1e-9))]
    lead = np.round(every / 10.0 ** np.floor(np.log10(every) + 1e-9))
    wanted = (1, 2, 5) if np.log10(high / low) < 3.2 else (1,)
    major = np.isin(lead, wanted)
    return every[major], [f"{value:.10g}" for value in every[major]], every[~major]


def known(values: Iterable[FloatArray]) -> FloatArray:
    """All finite numbers of some arrays."""
    return np.concatenate([np.empty(0), *(array[np.isfinite(array)] for array in values)])


def path(series: Series) -> tuple[FloatArray, FloatArray]:
    """v and i of a locus, thinned where it is a long record, a period closed to its start."""
    keep = thinned(series.v, series.i)
    v, i = series.v[keep], series.i[keep]
    return (np.append(v, v[0]), np.append(i, i[0])) if series.use == "repeated" else (v, i)


def same_path(one: tuple[FloatArray, FloatArray], other: tuple[FloatArray, FloatArray]) -> bool:
    """Whether two loci are one line on paper, whether or not either was closed to its start."""
    count = min(one[0].size, other[0].size)
    if abs(one[0].size - other[0].size) > 1:
        return False
    return all(
        np.allclose(a[:count], b[:count], rtol=1e-3, atol=1e-3 * float(np.nanmax(np.abs(b))))
        for a, b in zip(one, other, strict=True)
    )


def plain_numbers(axes: Axes) -> None:
    """Tick numbers in full on linear axes, without an exponent or offset that a reader could miss."""
    from matplotlib.ticker import FuncFormatter, MaxNLocator

    for axis in (axes.xaxis, axes.yaxis):
        axis.set_major_locator(MaxNLocator(nbins=7, steps=[1, 2, 2.5, 5, 10]))
        axis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:.7g}".replace("-", "−")))


def x_limits(axes: Axes, panel: Panel) -> None:
    """An x axis over the figures with a little air; held lines and levels start at zero."""
    low, high = float(np.nanmin(panel.x)), float(np.nanmax(panel.x))
    if panel.timed:
        axes.set_xlim(low, high if high > low else low + 1.0)
    else:
        axes.set_xlim(min(0.0, 1.05 * low), 1.06 * high if high > 0 else 1.0)


def ends(axes: Axes) -> tuple[float, float]:
    """Where the x axis begins and ends."""
    left, right = axes.get_xlim()
    return float(left), float(right)
