"""Which rows the pictures of power and temperature have: a sweep over levels, a held line, a run in time."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from soacheck.result import Result, Series, Sweep
from soacheck.show.figures import page, read, words
from soacheck.show.figures.read import Drawn
from soacheck.show.text import ZERO_CELSIUS
from soacheck.trace import FloatArray, IntArray

MOST_ROWS = 3
_EMPTY = np.empty(0)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Panel:
    """One row: what is on its x axis, and the figures over it in SI and kelvin, empty where never known.

    P is the power at the points of a run in time, the mean power elsewhere.
    """

    duty: str
    title: str
    timed: bool
    x: FloatArray
    x_name: str
    P: FloatArray
    P_allowed: FloatArray
    T_j: FloatArray
    T_case: FloatArray
    T_heatsink: FloatArray
    T_air: FloatArray
    thinned: bool


def panels(result: Result, half: str | None, wanted: Callable[[Panel], bool]) -> tuple[list[Panel], list[str]]:
    """The rows in the order sweep, held lines, runs in time, at most three; and the duties left out."""
    duties = read.drawn(result, half)
    kind = read.device_kind(result, half)
    found = [_swept(sweep) for sweep in result.sweeps if sweep.half == half and sweep.x.size > 1]
    found += [_held(duty, kind) for duty in duties if duty.held and duty.points > 1]
    found += [_timed(run) for run in _by_weight(result, half, [d for d in duties if not d.held and d.points > 1])]
    if not found:
        found = [_held(duty, kind) for duty in duties if duty.points == 1]
    found = [panel for panel in found if wanted(panel)]
    return found[:MOST_ROWS], [panel.duty for panel in found[MOST_ROWS:]]


def _by_weight(result: Result, half: str | None, duties: list[Drawn]) -> list[tuple[Drawn, ...]]:
    """The hottest first, so that what is left out is the least of them; duties with one and the same run together."""

    def weight(duty: Drawn) -> float:
        finding = read.of_duty(result, "junction-temperature", duty.name, half)
        used = float(finding.utilisation[0]) if finding is not None else np.nan
        return -used if np.isfinite(used) else np.inf

    runs: list[list[Drawn]] = []
    for duty in sorted(duties, key=weight):
        twin = next((run for run in runs if _same_run(run[0].series, duty.series)), None)
        if twin is None:
            runs.append([duty])
        else:
            twin.append(duty)
    return [tuple(run) for run in runs]


def _same_run(one: Series, other: Series) -> bool:
    columns = ((one.t, other.t), (one.v, other.v), (one.i, other.i), (one.T_j, other.T_j))
    return one.use == other.use and all(
        a.shape == b.shape and np.allclose(a, b, rtol=1e-3, atol=1e-3 * _size(b), equal_nan=True) for a, b in columns
    )


def _size(column: FloatArray) -> float:
    known = column[np.isfinite(column)]
    return float(np.abs(known).max()) if known.size else 0.0


def _swept(sweep: Sweep) -> Panel:
    """Several members at one x (a level at two frequencies) are drawn as the worst of them."""
    unit = f" ({sweep.unit})" if sweep.unit and sweep.unit != "1" else ""
    what = sweep.name
    if sweep.name == "level":  # of a held line the level has a sign
        what = "output voltage held" if np.any(sweep.x < 0) else "peak voltage at the load"
    order = np.argsort(sweep.x, kind="stable")
    x, starts = np.unique(sweep.x[order], return_index=True)

    def worst(column: FloatArray, pick: np.ufunc) -> FloatArray:
        return pick.reduceat(column[order], starts) if column.size == order.size else _EMPTY

    return Panel(
        duty=sweep.duty,
        title=f"{sweep.duty}: each point is a {sweep.name} that may last",
        timed=False,
        x=x,
        x_name=f"{what}{unit}",
        P=worst(sweep.P_mean, np.fmax),
        P_allowed=worst(sweep.P_allowed, np.fmin),
        T_j=worst(sweep.T_j_peak, np.fmax),
        T_case=worst(sweep.T_case, np.fmax),
        T_heatsink=worst(sweep.T_heatsink, np.fmax),
        T_air=worst(sweep.T_air, np.fmax),
        thinned=False,
    )


def _held(duty: Drawn, kind: str) -> Panel:
    series = duty.series
    order = np.argsort(series.v, kind="stable")
    return Panel(
        duty=duty.name, title=f"{duty.name}: each point may be held", timed=False, x=series.v[order],
        x_name=words.voltage_axis(kind), P=(series.v * series.i)[order], thinned=False,
        **_figures(series, order),
    )  # fmt: skip


def _timed(run: tuple[Drawn, ...]) -> Panel:
    duty = run[0]
    series = duty.series
    power = series.v * series.i
    keep = page.thinned(power, *(column for column in (series.T_j, series.T_case) if column.size == power.size))
    t = series.t[keep] - series.t[0]
    factor, sign = words.prefix(float(t[-1]))
    names = " = ".join(same.name for same in run)
    what = "one shot" if series.use == "once" else "one period"
    return Panel(
        duty=duty.name, title=f"{names}: {what}", timed=True, x=t / factor, x_name=f"time ({sign}s)",
        P=power[keep], thinned=keep.size < power.size, **_figures(series, keep),
    )  # fmt: skip


def _figures(series: Series, order: IntArray) -> dict[str, FloatArray]:
    """The columns of a series in the order of the panel; one value stands for all points."""
    count = series.v.size

    def over(column: FloatArray) -> FloatArray:
        if column.size == count:
            return column[order]
        return np.full(order.size, column[0]) if column.size == 1 else _EMPTY

    return {
        "P_allowed": over(series.P_allowed), "T_j": over(series.T_j), "T_case": over(series.T_case),
        "T_heatsink": over(series.T_heatsink), "T_air": over(series.T_air),
    }  # fmt: skip


def in_celsius(kelvin: FloatArray) -> FloatArray:
    """For the axes."""
    return kelvin - ZERO_CELSIUS
