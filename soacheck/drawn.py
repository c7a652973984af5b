"""What pictures draw of a stage, for one case: loci, temperatures, safe areas, characteristics.

Pictures compute nothing; every number they show is made here or in a finding.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from soacheck.balance.chain import hottest
from soacheck.device import laws
from soacheck.limit import dissipation, safe_area
from soacheck.limit.judged import Judged
from soacheck.locus import Use
from soacheck.result import Characteristics, Finding, SafeAreaPicture, Series, Sweep
from soacheck.trace import FloatArray


def series(judged: Judged) -> Series | None:
    """The locus of a duty with its temperatures: its hottest member over time, or all its held points."""
    operating, locus = judged.operating, judged.operating.locus
    if locus is None:
        return None
    member = hottest(operating)[0]
    held = locus.use is Use.HELD
    shape = (1, *locus.shape[1:])

    def line(a: FloatArray) -> FloatArray:
        full = np.broadcast_to(a, shape)
        return np.array(full[0, :, 0] if held else full[0, member, :])

    v, i = line(locus.v), line(locus.i)
    region = laws.regions(judged.device, v, i)
    if locus.region is not None:
        full = np.broadcast_to(locus.region, shape)
        region = np.array(full[0, :, 0] if held else full[0, member, :])
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
        P_allowed=dissipation.allowed_power(judged)[0] if held else np.empty(0),
        T_air=operating.T_air[0] if held else operating.T_air[0, member : member + 1],
    )


def sweeps(judged: tuple[Judged, ...]) -> tuple[Sweep, ...]:
    """Duties that only carry findings, drawn over what their members are."""
    drawn = []
    for one in judged:
        operating, members = one.operating, one.duty.members
        if one.duty.listed or operating.locus is None or not members.name:
            continue
        x = np.broadcast_to(members.value, operating.P_mean.shape)[0]
        order = np.argsort(x, kind="stable")
        drawn.append(
            Sweep(
                duty=one.duty.name,
                half=one.duty.half,
                name=members.name,
                unit=members.unit,
                x=x[order],
                P_mean=operating.P_mean[0, order],
                P_allowed=dissipation.allowed_power(one)[0, order],
                T_j_peak=operating.T_j_peak[0, order],
                T_case=operating.T_case[0, order],
                T_heatsink=operating.T_heatsink[0, order],
                T_air=operating.T_air[0, order],
            )
        )
    return tuple(drawn)


def safe_areas(judged: tuple[Judged, ...], findings: tuple[Finding, ...]) -> tuple[SafeAreaPicture, ...]:
    """The safe area of one half at the duty of its worst safe-area finding.

    findings: worst first. The locus of the governing member goes with it where no row of the duties shows it.
    """
    for finding in findings:
        one = next((j for j in judged if (j.duty.name, j.duty.half) == (finding.duty, finding.half)), None)
        if finding.limit != "safe-area" or one is None or one.operating.locus is None or not one.device.soa:
            continue
        picture = safe_area.picture(one, 0)
        if one.duty.listed:
            return (picture,)
        locus = one.operating.locus
        values = np.broadcast_to(one.duty.members.value, locus.shape[:2])[0]
        member = int(np.argmin(np.abs(values - finding.where.member[0])))
        v, i = (np.array(np.broadcast_to(a, locus.shape)[0, member]) for a in (locus.v, locus.i))
        return (replace(picture, v=v, i=i),)
    return ()


def characteristics(judged: tuple[Judged, ...]) -> Characteristics:
    """Output characteristics of the device as far as its sheet gives them, over the range that the duties use."""
    half = judged[0].fitted.half if judged else None
    loci = [one.operating.locus for one in judged if one.operating.locus is not None]
    if not loci:
        return Characteristics(half=half)
    v_max = max(float(np.max(locus.v_peak)) for locus in loci)
    i_max = max(float(np.max(locus.i_peak)) for locus in loci)
    return Characteristics(half=half, curves=laws.characteristics(judged[0].device, v_max, i_max))
