"""From the three ways in which a data sheet states Z_th_jc to one R-C ladder."""

from __future__ import annotations

from decimal import Decimal, localcontext
from typing import NamedTuple

import numpy as np

from soacheck.device.ratings import ThermalData
from soacheck.errors import InputError, Problem
from soacheck.heat.zth import positive_modes
from soacheck.trace import FloatArray

SAME = 0.02  # sums of resistances this close to R_th_jc are the same figure, rounded
RAISED_ABOVE = 0.02  # a fit further off than this is raised above every point
REFUSED_ABOVE = 0.15  # no body answers like a curve that is missed by more, or ends further above R_th_jc
DECADES_BELOW = 3  # how far the root of time is followed below the first point of a curve
PER_DECADE = 5  # points between the readings that steer the fit along the chart's straight lines
ALIKE = 1e-6  # Foster time constants closer than this are one


class Cells(NamedTuple):
    """Cells of a ladder with what must be said about them."""

    R: FloatArray
    C: FloatArray
    error: float = 0.0
    raised: bool = False
    how: str = ""


def cells_of(thermal: ThermalData, *, file: str) -> Cells | None:
    """The ladder cells of a device, None when it states no Z_th_jc; InputError for a curve that no body has.

    A curve that falls, grows faster than time, cannot be met within 15 % or ends above R_th_jc by more than
    15 %.
    """
    if thermal.form == "none":
        return None
    rated = None if thermal.R_th_jc is None else float(thermal.R_th_jc.value[0])
    if thermal.form == "pulse" and thermal.pulse is not None and thermal.value is not None:
        return _from_curve(thermal.pulse, thermal.value, rated, file)
    if thermal.form == "cauer" and thermal.cauer is not None:
        R, C, how = thermal.cauer[:, 0], thermal.cauer[:, 1], "ladder as stated"
    elif thermal.form == "foster" and thermal.foster is not None:
        R, C = foster_to_ladder(thermal.foster[:, 0], thermal.foster[:, 1])
        how = f"the {thermal.foster.shape[0]} stated pairs turned into a ladder by continued fraction"
    else:
        raise ValueError(f"Z_th_jc is of the form {thermal.form} but has no values")
    return _tied(R, C, rated, how)


def _tied(R: FloatArray, C: FloatArray, rated: float | None, how: str) -> Cells:
    """The ladder tied to R_th_jc: scaled to it, or left larger where it states clearly more heat
    resistance."""
    total = float(R.sum())
    if rated is None:
        return Cells(R, C, how=f"{how}; its sum {total:.4g} K/W stands for R_th_jc, which is not stated")
    scale = rated / total
    if abs(scale - 1) <= SAME:
        said = "" if abs(scale - 1) < 1e-9 else f"; scaled by {scale:.4g} so that its sum is R_th_jc"
        return Cells(R * scale, C / scale, how=how + said)
    if scale > 1:
        said = f"; its sum {total:.4g} K/W is below R_th_jc {rated:.4g} K/W: scaled up, cautious"
        return Cells(R * scale, C / scale, how=how + said)
    said = f"; its sum {total:.4g} K/W is above R_th_jc {rated:.4g} K/W: kept, cautious"
    return Cells(R, C, how=how + said)


def _from_curve(t: FloatArray, z: FloatArray, rated: float | None, file: str) -> Cells:
    """A positive ladder from a single-pulse curve read off a chart."""
    problems = _faults(t, z, rated)
    if problems:
        raise _refused(file, *problems)
    end = float(z[-1])
    total = end if rated is None else max(rated, end)
    tau, gain, error = positive_modes(t, z, total=total, raise_above=RAISED_ABOVE, guide=_guide(t, z, total))
    if error > REFUSED_ABOVE:
        raise _refused(
            file,
            f"no body answers a step of power like this curve: the closest is {100 * error:.0f} % off at a point",
        )
    R, C = foster_to_ladder(gain, tau)
    how = f"{t.size} points met by a ladder of {R.size} cells, greatest deviation {100 * error:.1f} %"
    if error > RAISED_ABOVE:
        how += "; raised until it lies on or above every point"
    if rated is None:
        how += f"; its last point {end:.4g} K/W stands for R_th_jc, which is not stated"
    elif end > rated * (1 + 1e-9):
        how += f"; its last point {end:.4g} K/W is above R_th_jc {rated:.4g} K/W, kept, cautious"
    elif end < rated * (1 - 1e-9):
        how += f"; completed from its last point {end:.4g} K/W to R_th_jc {rated:.4g} K/W"
    return Cells(R, C, error, error > RAISED_ABOVE, how + "; below its first point it goes as the root of time")


def _faults(t: FloatArray, z: FloatArray, rated: float | None) -> list[str]:
    """What makes a curve impossible, in words."""
    found = []
    dt, dz = np.diff(t), np.diff(z)
    for bad, words in (
        (np.append(t[:1] <= 0, dt <= 0), "the pulse widths must rise, the one at place {} does not"),
        (np.append(z[:1] <= 0, dz < 0), "a transient thermal curve never falls, the value at place {} does"),
    ):
        if bool(np.any(bad)):
            found.append(words.format(int(np.argmax(bad)) + 1))
    if not found and t.size > 1:
        fast = z[1:] / z[:-1] > t[1:] / t[:-1] * (1 + 1e-9)
        if bool(np.any(fast)):
            place = int(np.argmax(fast)) + 2
            found.append(f"the curve grows faster than time up to the value at place {place}")
    if rated is not None and not float(z[-1]) <= rated * (1 + REFUSED_ABOVE):
        found.append(f"the curve ends at {z[-1]:.4g} K/W, far above R_th_jc = {rated:.4g} K/W")
    return found


def _refused(file: str, *problems: str) -> InputError:
    remedy = "read the chart's single-pulse curve again, in K/W; a normalised one times R_th_jc"
    key = "thermal.Z_th_jc"
    return InputError(*(Problem(file=file, key=key, problem=text, remedy=remedy) for text in problems))


def _guide(t: FloatArray, z: FloatArray, total: float) -> tuple[FloatArray, FloatArray]:
    """Points that steer a fit where there are no readings: the root of time before them (heat still in the
    die), the chart's straight line between them, and on to the total at the steeper of the last slope and the
    root of time."""
    log_t, log_z = np.log10(t), np.log10(z)
    slope = 0.5
    if t.size > 1:
        slope = min(max(float((log_z[-1] - log_z[-2]) / (log_t[-1] - log_t[-2])), 0.5), 1.0)
    arrives = float(log_t[-1] + (np.log10(total) - log_z[-1]) / slope)
    knots_t = np.array([log_t[0] - DECADES_BELOW, *log_t, *([arrives] if arrives > log_t[-1] + 1e-6 else [])])
    knots_z = np.array([log_z[0] - DECADES_BELOW / 2, *log_z, np.log10(total)])[: knots_t.size]
    x = np.linspace(knots_t[0], knots_t[-1], round((knots_t[-1] - knots_t[0]) * PER_DECADE) + 1)
    end = np.array([arrives + 0.5, arrives + 1.0])
    return (
        np.concatenate([10**x, 10**end]),
        np.concatenate([10 ** np.interp(x, knots_t, knots_z), np.full(2, total)]),
    )


def foster_to_ladder(R: FloatArray, tau: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Ladder with the same step response as a chain of parallel R-C pairs, seen from its first node.

    Parameters
    ----------
    R : ndarray, shape (n,)
        Resistances of the pairs. [K/W]
    tau : ndarray, shape (n,)
        Their time constants. [s]

    Returns
    -------
    tuple of two ndarray, shape (m,), m <= n
        R and C of the ladder from the heated node outwards. [K/W], [J/K]

    Range: all values positive. Pairs with time constants equal to 1e-6 are joined.
    Source: W. Cauer, continued fraction of a positive real driving-point impedance about infinity (from
    memory); digits are kept by computing with 60 + 20 n decimals.
    """
    R, tau = _joined(np.asarray(R, dtype=np.float64), np.asarray(tau, dtype=np.float64))
    with localcontext() as context:
        context.prec = 60 + 20 * R.size
        context.Emax, context.Emin = 999_999_999, -999_999_999
        # Z = top / bottom, polynomials in s with the lowest power first
        pairs = [(Decimal(float(r)), Decimal(float(x))) for r, x in zip(R, tau, strict=True)]
        bottom: list[Decimal] = [Decimal(1)]
        top: list[Decimal] = []
        for r, x in pairs:
            top = _sum(_times(top, x), [r * b for b in bottom])
            bottom = _times(bottom, x)
        resistances, capacities = [], []
        while top:
            C = bottom[-1] / top[-1]  # admittance at infinite frequency
            bottom = [b - C * a for b, a in zip(bottom[:-1], [Decimal(0), *top[:-1]], strict=True)]
            r = top[-1] / bottom[-1]  # impedance of what is left
            top = [a - r * b for a, b in zip(top[:-1], bottom[:-1], strict=True)]
            resistances.append(float(r))
            capacities.append(float(C))
    return np.array(resistances), np.array(capacities)


def _joined(R: FloatArray, tau: FloatArray) -> tuple[FloatArray, FloatArray]:
    order = np.argsort(tau, kind="stable")
    cells: list[list[float]] = []
    for r, x in zip(R[order].tolist(), tau[order].tolist(), strict=True):
        if cells and x <= cells[-1][1] * (1 + ALIKE):
            last = cells[-1]
            last[0], last[1] = last[0] + r, (last[0] * last[1] + r * x) / (last[0] + r)
        else:
            cells.append([r, x])
    return np.array([cell[0] for cell in cells]), np.array([cell[1] for cell in cells])


def _times(polynomial: list[Decimal], x: Decimal) -> list[Decimal]:
    """The polynomial times (1 + x s)."""
    return _sum([*polynomial, Decimal(0)], [Decimal(0), *(x * a for a in polynomial)])


def _sum(a: list[Decimal], b: list[Decimal]) -> list[Decimal]:
    longer, shorter = (a, b) if len(a) >= len(b) else (b, a)
    return [value + (shorter[k] if k < len(shorter) else 0) for k, value in enumerate(longer)]
