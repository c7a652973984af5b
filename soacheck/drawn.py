"""What pictures draw of a stage, for one case: loci, temperatures, safe areas, characteristics.

Pictures compute nothing; every number they show is made here or in a finding.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise

import numpy as np

from soacheck.balance.chain import hottest
from soacheck.device import laws
from soacheck.limit import dissipation, safe_area
from soacheck.limit.judged import Judged
from soacheck.locus import Use
from soacheck.result import Characteristics, Finding, SafeAreaPicture, Series, Sweep
from soacheck.trace import FloatArray, distinct

_SAME_END = 1.02


def series(judged: Judged) -> Series | None:
    """The locus of a duty with its temperatures: its hottest member over time, or all its held points.

    Two held members are two situations (the output at either rail), not the ends of a line: the hotter one is shown.
    """
    operating, locus = judged.operating, judged.operating.locus
    if locus is None:
        return None
    member = hottest(operating)[0]
    held = locus.use is Use.HELD
    shape = (1, *locus.shape[1:])
    shown = slice(member, member + 1) if locus.shape[1] == 2 else slice(None)

    def line(a: FloatArray) -> FloatArray:
        full = np.broadcast_to(a, shape)
        return np.array(full[0, shown, 0] if held else full[0, member, :])

    v, i = line(locus.v), line(locus.i)
    region = laws.regions(judged.device, v, i)
    if locus.region is not None:
        full = np.broadcast_to(locus.region, shape)
        region = np.array(full[0, shown, 0] if held else full[0, member, :])
    turn_off = np.zeros(v.shape, dtype=bool)
    if locus.turn_off is not None and not held:
        turn_off = np.array(np.broadcast_to(locus.turn_off, shape)[0, member])
    return Series(
        t=line(locus.t),
        v=v,
        i=i,
        region=region,
        T_j=line(operating.T_j),
        T_case=line(operating.T_case_t),
        T_heatsink=line(operating.T_heatsink_t),
        use=locus.use.value,
        turn_off=turn_off,
        P_allowed=dissipation.allowed_power(judged)[0, shown] if held else np.empty(0),
        T_air=operating.T_air[0, shown] if held else operating.T_air[0, member : member + 1],
    )


def sweeps(judged: tuple[Judged, ...]) -> tuple[Sweep, ...]:
    """Duties that only carry findings, drawn over what their members are; of several runs over it, the worst."""
    drawn = []
    for one in judged:
        operating, members = one.operating, one.duty.members
        if one.duty.listed or operating.locus is None or not members.name:
            continue
        along = np.broadcast_to(members.value, operating.P_mean.shape)[0]
        x = distinct(along)
        drawn.append(
            Sweep(
                duty=one.duty.name,
                half=one.duty.half,
                name=members.name,
                unit=members.unit,
                x=x,
                P_mean=_greatest(along, operating.P_mean[0], x),
                P_allowed=-_greatest(along, -dissipation.allowed_power(one)[0], x),
                T_j_peak=_greatest(along, operating.T_j_peak[0], x),
                T_case=_greatest(along, operating.T_case[0], x),
                T_heatsink=_greatest(along, operating.T_heatsink[0], x),
                T_air=_greatest(along, operating.T_air[0], x),
            )
        )
    return tuple(drawn)


def _greatest(along: FloatArray, values: FloatArray, x: FloatArray) -> FloatArray:
    """The greatest of several runs at each x, straight between the members of a run, NaN where one is not known.

    A run is what rises: the levels at one frequency, then those at the next, which are other levels (n,). Each ends
    at its own largest swing; that they end a hair apart shall not look like a fall of the worst.
    """
    full = np.broadcast_to(values, along.shape)
    starts = np.concatenate([[0], np.flatnonzero(np.diff(along) <= 0) + 1, [along.size]])
    most = np.full(x.shape, -np.inf)
    for first, stop in pairwise(starts.tolist()):
        end = along[stop - 1] * (_SAME_END if stop - first > 1 else 1.0)
        run = np.interp(x, along[first:stop], full[first:stop], left=-np.inf)
        most = np.maximum(most, np.where(x <= end, run, -np.inf))
    return most


def safe_areas(judged: tuple[Judged, ...], findings: tuple[Finding, ...]) -> tuple[SafeAreaPicture, ...]:
    """The safe area of one half at the duty of its worst safe-area finding.

    findings: worst first. Curves are scaled to the temperature that the member has for which the finding stands.
    """
    for finding in findings:
        one = next((j for j in judged if (j.duty.name, j.duty.half) == (finding.duty, finding.half)), None)
        if finding.limit != "safe-area" or one is None or one.operating.locus is None or not one.device.soa:
            continue
        picture = safe_area.picture(one, 0, _member(one, float(finding.where.member[0])))
        return (_with_held_line(picture, judged),)
    return ()


def is_held_line(judged: Judged) -> bool:
    """Whether a duty without a row of its own is a line along which every level may be held."""
    locus = judged.operating.locus
    return not judged.duty.listed and locus is not None and locus.use is Use.HELD


def _with_held_line(picture: SafeAreaPicture, judged: tuple[Judged, ...]) -> SafeAreaPicture:
    """The picture with the line along which every level may be held, where a duty without a row of its own has one."""
    for one in judged:
        locus = one.operating.locus
        if locus is None or not is_held_line(one):
            continue
        v, i = (np.array(np.broadcast_to(a, (1, *locus.shape[1:]))[0, :, 0]) for a in (locus.v, locus.i))
        order = np.argsort(v, kind="stable")
        return replace(picture, duty=one.duty.name, v=v[order], i=i[order])
    return picture


def _member(judged: Judged, value: float) -> int | None:
    """The number of the member with this value; None where the finding names none."""
    if np.isnan(value):
        return None
    members = np.broadcast_to(judged.duty.members.value, judged.operating.P_mean.shape)[0]
    return int(np.argmin(np.abs(members - value)))


def characteristics(judged: tuple[Judged, ...]) -> Characteristics:
    """Output characteristics of the device as far as its sheet gives them, over the range that the duties use."""
    half = judged[0].fitted.half if judged else None
    loci = [one.operating.locus for one in judged if one.operating.locus is not None]
    if not loci:
        return Characteristics(half=half)
    v_max = max(float(np.max(locus.v_peak)) for locus in loci)
    i_max = max(float(np.max(locus.i_peak)) for locus in loci)
    return Characteristics(half=half, curves=laws.characteristics(judged[0].device, v_max, i_max))
