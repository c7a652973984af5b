"""Which printed safe-area curves count for a duty, and how much of each a locus uses.

A curve that is drawn for the case counts as it is; one drawn for the ambient counts as a case curve up to 10 ms, and
beyond that only for a device without a heat sink. A curve for repeated pulses counts for loci of no larger duty factor.
What the dc curve allows for ever is refused by no pulse curve.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from soacheck.device.ratings import SafeAreaCurve, SafeAreaDerating
from soacheck.device.soa import Allowed, allowed_current, heat_current
from soacheck.heat.ladder import network
from soacheck.heat.modes import Modes
from soacheck.limit.judged import Judged
from soacheck.limit.path import Path
from soacheck.locus import Use
from soacheck.trace import BoolArray, FloatArray, IntArray

AMBIENT_LONGEST = 0.010  # [s] a chart drawn for the ambient: up to here the case has not warmed
NOTHING = 1e12  # share of an allowance of 0: finite, so that it can be interpolated


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Line:
    """One printed forward curve as it counts for this duty.

    T: temperature of its node (case, member) [K]. Z: thermal resistance for its width (case, 1) [K/W], None where not
    known. T_j_max [K], rating (current for its width) [A], factor (what the rules leave): (1 or case,).
    duty_factor: a curve for repeated pulses counts up to it; infinite: no such bound.
    """

    curve: SafeAreaCurve
    derating: SafeAreaDerating
    T: FloatArray
    Z: FloatArray | None
    T_j_max: FloatArray
    rating: FloatArray
    factor: FloatArray
    voltage_scaled: bool
    duty_factor: float = np.inf

    @property
    def pulse(self) -> float:
        return self.curve.pulse

    @property
    def label(self) -> str:
        return self.curve.label


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Lines:
    """The curves that count: dc, and pulses of rising width. left_out: sentences about curves that do not."""

    dc: Line | None
    pulses: tuple[Line, ...]
    left_out: tuple[str, ...] = ()

    @property
    def longest(self) -> Line | None:
        """The curve that everything is measured by: dc, else the longest pulse."""
        return self.dc if self.dc is not None else self.pulses[-1] if self.pulses else None

    @property
    def widths(self) -> tuple[float, ...]:
        """Distinct pulse widths, rising. [s]"""
        return tuple(sorted({line.pulse for line in self.pulses}))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Share:
    """How much of a line's allowance the locus uses.

    r (case, member, time): i/allowance; 0 where the point does not count or a current rating is the allowance.
    raw: the same where a current rating is the allowance too; NaN where the line says nothing.
    exempt: conducts, and the current limits alone judge (a rating is the allowance, or the device is on), or the
    reverse-bias area does.
    beyond, zero (case, member): conducts where nothing is known; conducts where nothing is allowed.
    """

    r: FloatArray
    raw: FloatArray
    exempt: BoolArray
    beyond: BoolArray
    zero: BoolArray


def _of_shot(judged: Judged) -> FloatArray:
    """Temperature that the curves of a one-shot duty are scaled to, (case, member). [K]

    The junction just before it; for a shot that outlasts the longest printed pulse, which is dc to the chart, no less
    than the case reaches during it.
    """
    operating, locus = judged.operating, judged.operating.locus
    before = operating.T_before
    printed = [curve.pulse for curve in judged.device.soa if curve.bias == "forward" and np.isfinite(curve.pulse)]
    if locus is None:
        return before
    long = np.broadcast_to(locus.duration, before.shape) > max(printed, default=0.0) * (1 + 1e-9)
    return np.where(long, np.maximum(before, operating.T_case_peak), before)


def lines_of(judged: Judged) -> Lines:
    """The printed forward curves that count for a duty."""
    device, operating, ratings = judged.device, judged.operating, judged.device.max
    once = operating.locus is not None and operating.locus.use is Use.ONCE
    T_case = _of_shot(judged) if once else operating.T_case_peak
    T_air = T_case if once else operating.T_air
    made, left_out = [], []
    transient = _transient(judged)
    for curve in device.soa:
        if curve.bias != "forward":
            continue
        from_air = curve.node == "ambient" and curve.pulse > AMBIENT_LONGEST * (1 + 1e-9)
        if from_air and (operating.sink != "none" or device.thermal.R_th_ja is None):
            left_out.append(
                f"The {curve.label} curve is drawn for the ambient; it counts only without a heat sink, with R_th_ja "
                "stated."
            )
            continue
        if not curve.single and curve.duty_factor is None and not once:
            left_out.append(f"The {curve.label} curve is drawn for repeated pulses and its duty factor is not stated.")
            continue
        made.append(
            Line(
                curve=curve,
                derating=device.soa_derating,
                T=T_air if from_air else T_case,
                Z=_Z(judged, transient, curve.pulse, from_air),
                T_j_max=ratings.T_j.value,
                rating=_rating(judged, curve.pulse),
                factor=judged.rules.safe_area.value,
                voltage_scaled=device.mosfet or device.igbt,
                duty_factor=np.inf if curve.single or curve.duty_factor is None or once else curve.duty_factor,
            )
        )
    dc = [line for line in made if np.isinf(line.pulse)]
    pulses = sorted((line for line in made if np.isfinite(line.pulse)), key=lambda line: line.pulse)
    return Lines(dc=dc[0] if dc else None, pulses=tuple(pulses), left_out=tuple(left_out))


def _rating(judged: Judged, pulse: float) -> FloatArray:
    """Current rating for a pulse width: the peak rating up to the width it is stated for. (1 or case,) [A]"""
    ratings = judged.device.max
    if ratings.I_peak is None or np.isinf(pulse):
        return ratings.I_max.value
    if ratings.I_peak_pulse is None:
        return ratings.I_peak.value
    short = pulse <= ratings.I_peak_pulse.value * (1 + 1e-9)
    return np.where(short, ratings.I_peak.value, ratings.I_max.value)


def _transient(judged: Judged) -> Modes | None:
    """Modes from the junction to a case that is held; None where they are not known."""
    ladder, R = judged.operating.ladder, judged.operating.R_th_jc
    if ladder is None or R is None:
        return None
    return network(ladder, R.value, np.full_like(R.value, 1e-9), None, None)


def _Z(judged: Judged, modes: Modes | None, pulse: float, from_air: bool) -> FloatArray | None:
    """Thermal resistance from the junction to the curve's node for a pulse width, (case, 1); None where not known."""
    operating, R_ja = judged.operating, judged.device.thermal.R_th_ja
    if from_air:
        return R_ja.value[:, None] if np.isinf(pulse) and R_ja is not None else None
    R = operating.R_th_jc
    if R is None:
        return None
    if np.isinf(pulse):
        return R.value[:, None]
    if modes is None:
        return None
    return modes.step(np.asarray([pulse]))[:, modes.nodes.index("junction"), :]


def allowed(line: Line, v: FloatArray, members: IntArray) -> Allowed:
    """What a line allows at voltages (case, member, time), before the rules' factor.

    members (1 or case, member): which members of the duty the voltages belong to.
    """
    return allowed_current(
        line.curve,
        v,
        T=_T_of(line, v, members),
        T_j_max=line.T_j_max[:, None, None],
        derating=line.derating,
        Z=None if line.Z is None else line.Z[..., None],
        I_rating=line.rating[:, None, None],
        voltage_scaled=line.voltage_scaled,
    )


def _T_of(line: Line, v: FloatArray, members: IntArray) -> FloatArray:
    T = np.broadcast_to(line.T, (v.shape[0], line.T.shape[1]))
    if T.shape[1] > 1:
        T = np.take_along_axis(T, np.broadcast_to(members, v.shape[:2]), axis=1)
    return T[..., None]


def warmth(line: Line, path: Path, one: Share) -> FloatArray | None:
    """Share of the points that the line does not judge: what they do to the hot spot, (case, member, time).

    Not to be judged does not keep a point from heating. It counts with i over what second breakdown or dissipation
    would allow there, never more than 1, so that it cannot touch by itself. None where there is no such point.
    """
    if not bool(np.any(one.exempt)):
        return None
    would = heat_current(
        line.curve,
        path.v,
        T=_T_of(line, path.v, path.members),
        T_j_max=line.T_j_max[:, None, None],
        derating=line.derating,
        Z=None if line.Z is None else line.Z[..., None],
        voltage_scaled=line.voltage_scaled,
    )
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        x = path.i / (would * line.factor[:, None, None])
    return np.where(one.exempt, np.where(x < 1, x, 1.0), 0.0)


def share(line: Line, path: Path) -> Share:
    """How much of one line's allowance a path uses."""
    may = allowed(line, path.v, path.members)
    current = may.current * line.factor[:, None, None]
    none = path.counted & (current <= 0)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        raw = np.where(none, NOTHING, path.i / current)
    judged_here = path.counted & ~may.rating_limited
    unknown = path.active & np.isnan(raw)
    return Share(
        r=np.where(judged_here & ~np.isnan(raw), np.minimum(raw, NOTHING), 0.0),
        raw=np.where(path.counted, raw, 0.0),
        exempt=(path.v > 0) & path.conducts & ~judged_here,
        beyond=np.asarray(np.any(unknown, axis=2), dtype=np.bool_),
        zero=np.asarray(np.any(none, axis=2), dtype=np.bool_),
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Shares:
    """r of every distinct pulse width, rising, (case, member, time).

    known: the same, 0 where the curve of a width says nothing, so that nothing rests on what stands in for it. What is
    too dense for a curve is above what it may be where it is above the curve, and not where it is above the stand-in.
    ended: conducts right of a pulse curve's last point; dense: repeats more densely than a curve is drawn for and the
    next longer one stands in for it, (pulse curve, case, member).
    """

    r: tuple[FloatArray, ...]
    known: tuple[FloatArray, ...]
    ended: BoolArray
    dense: BoolArray


def shares(
    lines: Lines, path: Path, dc: Share | None, duty_factor: FloatArray, only: list[int] | None = None
) -> Shares:
    """Shares of the pulse curves.

    Two curves of one width: the lower counts. A curve for repeated pulses that the locus repeats too densely for is
    stood in for by the next longer one, and so is a curve that says nothing at a voltage, right of its last point.
    Where the dc curve allows more, it counts.
    duty_factor: of the locus, (case, member). only: numbers of the widths that are wanted, all when absent.
    """
    longer = None if dc is None else dc.r
    made: list[tuple[FloatArray, FloatArray]] = []
    ended = np.zeros((len(lines.pulses), *path.v.shape[:2]), dtype=np.bool_)
    dense = np.zeros_like(ended)
    wanted = lines.widths if only is None else tuple(lines.widths[k] for k in only)
    for width in reversed(wanted):
        here: list[tuple[FloatArray, FloatArray]] = []
        for number, line in enumerate(lines.pulses):
            if line.pulse != width:
                continue
            one = share(line, path)
            r = known = one.r if dc is None else np.where(dc.raw < one.r, dc.raw, one.r)
            if bool(np.any(one.beyond)):
                ended[number] = one.beyond
                r = r if longer is None else np.where(np.isnan(one.raw), longer, r)
            if np.isfinite(line.duty_factor) and longer is not None:
                dense[number] = ~(duty_factor <= line.duty_factor)
                r = np.where(dense[number][..., None], longer, r)
            here.append((r, known))
        longer, known = (np.maximum.reduce(each) for each in zip(*here, strict=True))
        made.append((longer, known))
    r_of, known_of = zip(*reversed(made), strict=True) if made else ((), ())
    return Shares(r=r_of, known=known_of, ended=ended, dense=dense)
