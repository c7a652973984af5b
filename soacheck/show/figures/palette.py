"""Our colours, line styles and markers: one style per role, the same in every picture.

Six colours on a white ground. They were chosen by calculation, and a test repeats it: each has a contrast of
4.5 or more against white (labels are set in the colour of their line), and any two stay well apart to the
normal eye and with each of the three cone deficiencies. Colour is never the only signal: roles that meet in
one picture differ by dash, width or marker as well, which is what remains on a black-and-white printer.
"""

from __future__ import annotations

from dataclasses import dataclass

INK = "#1f2430"  # text, axes, the device's plain ratings
LOAD = "#bf4a0a"  # what the circuit does: locus, power, junction
LIMIT = "#1b35c4"  # what the device allows at this temperature
CASE = "#a544b8"
SINK = "#5a2a00"
QUIET = "#767676"  # what stands behind: characteristics, surroundings
GRID = "#e2e2e2"  # decoration only, carries no meaning
GROUND = "#ffffff"

COLOURS = {"ink": INK, "load": LOAD, "limit": LIMIT, "case": CASE, "sink": SINK, "quiet": QUIET}

Dash = tuple[float, ...]  # on, off, on, off ... in line widths; empty for an unbroken line
SOLID: Dash = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Stroke:
    """How a role is drawn. width in points."""

    colour: str
    dash: Dash = SOLID
    width: float = 1.5
    marker: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Spot:
    """How a single point is drawn. size in points; face is the filling."""

    colour: str
    face: str
    marker: str
    size: float


# Safe area
SCALED = Stroke(colour=LIMIT, width=1.7)
PRINTED = Stroke(colour=LIMIT, dash=(4.0, 3.0), width=0.8)
RATING = Stroke(colour=INK, dash=(9.0, 2.5, 1.5, 2.5), width=0.9)
# Loci: the governing duty first, then the others in the order of the result
LOCI = (
    Stroke(colour=LOAD, width=2.6),
    Stroke(colour=LOAD, dash=(5.0, 1.6), width=1.3),
    Stroke(colour=LOAD, dash=(1.2, 1.4), width=1.6),
    Stroke(colour=LOAD, dash=(6.0, 1.5, 1.2, 1.5), width=1.3),
)
CHARACTERISTIC = Stroke(colour=QUIET, width=0.8)
# Power
POWER = Stroke(colour=LOAD, width=2.0)
MEAN = Stroke(colour=LOAD, dash=(5.0, 2.0), width=1.2)
ALLOWANCE = Stroke(colour=LIMIT, dash=(9.0, 2.5, 1.5, 2.5), width=1.3)
# Temperature
JUNCTION = Stroke(colour=LOAD, width=2.0)
CASE_LINE = Stroke(colour=CASE, dash=(5.0, 2.0), width=1.5)
SINK_LINE = Stroke(colour=SINK, dash=(1.2, 1.4), width=1.6)
AIR = Stroke(colour=QUIET, width=0.8)
LIMIT_LINE = ALLOWANCE
# Points
HOT = Spot(colour=INK, face=INK, marker="D", size=6.5)
REST = Spot(colour=INK, face=GROUND, marker="o", size=6.0)  # the Q point: what the stage does at rest
END = Spot(colour=LOAD, face=LOAD, marker="s", size=4.5)

MEET: dict[str, tuple[Stroke, ...]] = {
    "safe-area": (SCALED, PRINTED, RATING, *LOCI),
    "line": (CHARACTERISTIC, *LOCI),
    "dissipation": (POWER, MEAN, ALLOWANCE),
    "temperature": (JUNCTION, CASE_LINE, SINK_LINE, AIR, LIMIT_LINE),
}
