"""The drawing surface: matplotlib through its object interface, with our settings alone, to bytes.

Two things reach into matplotlib from outside: the variable MPLBACKEND (a name it does not know ends the
import) and a `matplotlibrc` in the working directory. Neither may change a picture, and drawing a picture may
not change the settings of a program that uses soacheck as a library.
"""

from __future__ import annotations

import io
import os
import unicodedata
from collections.abc import Iterator
from contextlib import contextmanager
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from soacheck.errors import OutputError
from soacheck.show.figures import palette

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.backends.backend_agg import RendererAgg
    from matplotlib.figure import Figure
    from matplotlib.lines import Line2D

FORMATS = ("png", "svg", "pdf")
WIDTH = 7.2  # [inch]: fits A4 and Letter between their margins
DPI = 150
TEXT_SIZE = 8.5
LONGEST = 80  # characters of the user's text that a picture shows
UNKNOWN_SIGN = "\N{REPLACEMENT CHARACTER}"

_SETTINGS: dict[str, Any] = {
    "font.family": ["DejaVu Sans"],  # comes with matplotlib, so pictures do not depend on the fonts of the machine
    "font.size": TEXT_SIZE,
    "mathtext.default": "regular",
    "axes.linewidth": 0.8,
    "axes.edgecolor": palette.INK,
    "axes.labelcolor": palette.INK,
    "text.color": palette.INK,
    "xtick.color": palette.INK,
    "ytick.color": palette.INK,
    "xtick.labelsize": TEXT_SIZE,
    "ytick.labelsize": TEXT_SIZE,
    "figure.facecolor": palette.GROUND,
    "axes.facecolor": palette.GROUND,
    "figure.dpi": DPI,
    "savefig.dpi": DPI,
    "savefig.facecolor": palette.GROUND,
    "svg.hashsalt": "soacheck",  # else the ids differ from run to run
    "svg.fonttype": "path",
    "pdf.fonttype": 42,
    "path.simplify": True,
    "agg.path.chunksize": 20000,
}
_METADATA: dict[str, dict[str, None]] = {  # no clock, no versions: the same result gives the same bytes
    "png": {"Software": None},
    "svg": {"Date": None, "Creator": None},
    "pdf": {"CreationDate": None, "Creator": None, "Producer": None},
}


@lru_cache(maxsize=1)
def _load() -> None:
    """Import matplotlib past an MPLBACKEND that it does not know, and leave both as the user set them."""
    wanted = os.environ.pop("MPLBACKEND", None)
    try:
        import matplotlib as mpl
        import matplotlib.backends.backend_agg
        import matplotlib.figure
    except (OSError, UnicodeDecodeError) as error:
        raise OutputError(
            f"matplotlib cannot start: {error}; look at the matplotlibrc file in the working directory or in "
            "its own settings folder"
        ) from error
    finally:
        if wanted is not None:
            os.environ["MPLBACKEND"] = wanted
    if wanted:
        try:
            mpl.rcParams["backend"] = wanted
        except ValueError:
            return  # no such backend: pictures need none, and matplotlib says so to whoever wants windows


@contextmanager
def settings() -> Iterator[None]:
    """Our settings over matplotlib's own defaults; the ones found are put back afterwards."""
    _load()
    import matplotlib as mpl

    with mpl.rc_context():
        mpl.rcdefaults()
        mpl.rcParams.update(_SETTINGS)  # type: ignore[arg-type]  # the stub wants a literal of all keys
        yield


def new_figure(height: float) -> Figure:
    """An empty figure of our width; height [inch]. Call inside `settings()`."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(figsize=(WIDTH, height), dpi=DPI)
    FigureCanvasAgg(figure)
    return figure


def renderer_of(figure: Figure) -> RendererAgg:
    """What measures text on this figure."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg

    canvas = figure.canvas
    if not isinstance(canvas, FigureCanvasAgg):
        canvas = FigureCanvasAgg(figure)
    renderer: RendererAgg = canvas.get_renderer()  # type: ignore[no-untyped-call]  # matplotlib's stub lacks it
    return renderer


def rendered(figure: Figure, fmt: str) -> bytes:
    """The figure as the bytes of a file, the same at every run."""
    target = io.BytesIO()
    with settings():
        figure.savefig(target, format=fmt, metadata=_METADATA[fmt])
    return target.getvalue()


@lru_cache(maxsize=1)
def _drawable() -> frozenset[int]:
    """Code points of the one font in use."""
    from matplotlib import font_manager

    return frozenset(font_manager.get_font(font_manager.findfont("DejaVu Sans")).get_charmap())


def plain(text: str, longest: int = LONGEST) -> str:
    """Text from a file so that it appears as it stands: never as formula markup, on one line, capped.

    Control and direction characters go; one that the font does not have becomes a replacement sign.
    """
    if len(text) > 20 * longest:
        text = text[: 20 * longest]
    known = _drawable()
    signs = []
    seen = (" " if sign.isspace() else sign for sign in text)
    shown = "".join(sign for sign in seen if unicodedata.category(sign) not in ("Cc", "Cf", "Cs"))
    for sign in " ".join(shown.split()):
        signs.append(sign if ord(sign) in known else UNKNOWN_SIGN)
    if len(signs) > longest:
        signs = [*signs[: longest - 1], "…"]
    return "".join(signs).replace("$", r"\$")


def drawn_line(axes: Axes, x: Any, y: Any, stroke: palette.Stroke, **more: Any) -> Line2D:
    """A line in the style of its role."""
    (line,) = axes.plot(x, y, **_line_style(stroke), **more)
    return line


def _line_style(stroke: palette.Stroke) -> dict[str, Any]:
    pattern = (0, stroke.dash) if stroke.dash else "solid"
    return {
        "color": stroke.colour,
        "linestyle": pattern,
        "linewidth": stroke.width,
        "dash_capstyle": "butt",
        "solid_capstyle": "round",
        "solid_joinstyle": "round",
    }


def drawn_spot(axes: Axes, x: float, y: float, spot: palette.Spot) -> Line2D:
    """A single point in the style of its role, above all lines."""
    (mark,) = axes.plot([x], [y], linestyle="none", zorder=6, clip_on=False, **_spot_style(spot))
    return mark


def _spot_style(spot: palette.Spot) -> dict[str, Any]:
    return {
        "marker": spot.marker,
        "markersize": spot.size,
        "markerfacecolor": spot.face,
        "markeredgecolor": spot.colour,
        "markeredgewidth": 1.2,
    }


def sample_line(stroke: palette.Stroke) -> Line2D:
    """A line that belongs to no axes, for the key below a picture."""
    from matplotlib.lines import Line2D

    return Line2D([], [], **_line_style(stroke))
