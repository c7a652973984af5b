"""The heat-flow chain of one duty, written out: each temperature with the formula, the numbers and the source."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from soacheck.balance.operating import Operating
from soacheck.balance.place import Place, ratio_of
from soacheck.locus import Use
from soacheck.trace import FloatArray, IntArray, Traced, derived, found, given

Pick = Callable[[FloatArray], FloatArray]
NETWORK = "thermal network of the device and its heat path, closed form"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Chain:
    """Traced figures of one duty, (case,); None where unknown."""

    P_mean: Traced | None = None
    P_peak: Traced | None = None
    V_peak: Traced | None = None
    I_peak: Traced | None = None
    I_mean: Traced | None = None
    I_rms: Traced | None = None
    T_heatsink: Traced | None = None
    T_case: Traced | None = None
    T_j_mean: Traced | None = None
    T_j_peak: Traced | None = None
    R_th_total: Traced | None = None


def hottest(operating: Operating) -> IntArray:
    """The member of each case that heats the junction most, by power where temperatures are unknown. (case,)"""
    T = operating.T_j_bound
    by = T if bool(np.all(np.isfinite(T))) else operating.P_mean
    return np.asarray(np.argmax(np.nan_to_num(by, nan=-np.inf), axis=1), dtype=np.int64)


def chain(operating: Operating, place: Place, member: IntArray | None = None) -> Chain:
    """The chain of one member (case,), absent: the one that heats the junction most; peaks are those of all members."""
    locus, duty = operating.locus, operating.duty
    if locus is None:
        return Chain()
    at = hottest(operating) if member is None else member
    cases = operating.P_mean.shape[0]

    def pick(a: FloatArray) -> FloatArray:
        full = np.broadcast_to(a, (cases, operating.P_mean.shape[1]))
        return np.take_along_axis(full, at[:, None], axis=1)[:, 0]

    over = {Use.HELD: "held point", Use.ONCE: "shot", Use.REPEATED: "period"}[locus.use]
    facts = tuple(fact for fact in duty.facts if fact.symbol not in {"P_mean", "P_peak", "V_peak", "I_peak"})[:1]
    P_mean = found("P_mean", pick(operating.P_mean), "W", f"mean of v*i over the {over}", *facts)
    P_peak = found("P_peak", operating.P_peak.max(axis=1), "W", f"greatest v*i of the {over}")
    V_peak = found(
        "V_peak",
        np.broadcast_to(locus.v_peak, operating.P_mean.shape).max(axis=1),
        "V",
        "greatest v of the duty",
    )
    I_peak = found(
        "I_peak",
        np.broadcast_to(locus.i_peak, operating.P_mean.shape).max(axis=1),
        "A",
        "greatest i of the duty",
    )
    I_mean = found("I_mean", pick(locus.i_mean), "A", f"mean of i over the {over}")
    I_rms = found("I_rms", pick(locus.i_rms), "A", f"root of the mean of i*i over the {over}")
    figures = Chain(P_mean=P_mean, P_peak=P_peak, V_peak=V_peak, I_peak=I_peak, I_mean=I_mean, I_rms=I_rms)
    if place.missing or operating.T_ambient is None:
        return figures
    if locus.use is Use.ONCE:
        return _once(figures, operating, pick)
    return _steady(figures, operating, place, P_mean, pick)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Part:
    """Part of a formula: its text and what it is made of."""

    text: str
    inputs: tuple[Traced, ...]


def _shared_heat(
    operating: Operating, place: Place, ratio: FloatArray, P_mean: Traced, pick: Pick
) -> tuple[_Part, _Part]:
    """Heat of the whole stage and of the sink, from this device's."""
    if operating.duty.others is None:
        n_stage = given("n_stage", ratio[:, 0], "1", "dissipation of all devices of the stage over this one's")
        on_sink = place.sink_ratio(ratio)[:, 0]
        n_sink = given("n_sink", on_sink, "1", "dissipation of all devices on the sink over this one's")
        return (
            _Part(text="P_mean * n_stage", inputs=(P_mean, n_stage)),
            _Part(text="P_mean * n_sink", inputs=(P_mean, n_sink)),
        )
    others = found("P_others", pick(operating.duty.others), "W", "heat of the other devices of the stage at this point")
    stages = max(place.on_sink / place.devices, 1.0)
    k_sink = given("k_sink", stages, "1", f"{place.on_sink} devices on the sink, {place.devices} in the stage")
    formula = "(P_mean + P_others) * k_sink"
    if place.on_sink == 1:
        return _Part(text="P_mean + P_others", inputs=(P_mean, others)), _Part(text="P_mean", inputs=(P_mean,))
    P_sink = derived("P_sink", formula, "W", P_mean, others, k_sink)
    return _Part(text="P_mean + P_others", inputs=(P_mean, others)), _Part(text="P_sink", inputs=(P_sink,))


def _steady(figures: Chain, operating: Operating, place: Place, P_mean: Traced, pick: Pick) -> Chain:
    path, R_jc, T_ambient = place.path, place.R_th_jc, place.path.T_ambient
    ratio = np.broadcast_to(ratio_of(operating.duty), (operating.P_mean.shape[0], 1))
    if T_ambient is None or R_jc is None:
        return figures
    stage_heat, on_sink = _shared_heat(operating, place, ratio, P_mean, pick)
    extra, box = path.extra_heat.named("P_extra"), path.extra_box_heat.named("P_box")
    air = T_ambient
    if not path.sink_outside and bool(np.any(path.R_th_enclosure.value > 0)):
        air = derived(
            "T_air",
            f"T_ambient + R_th_enclosure * ({stage_heat.text} + P_extra + P_box)",
            "degC",
            T_ambient,
            path.R_th_enclosure,
            *stage_heat.inputs,
            extra,
            box,
        )
    sink: Traced | None = None
    if path.sink == "case":
        if path.T_case is None:
            return figures
        case = path.T_case
    elif path.sink == "none":
        R_ja = place.device.thermal.R_th_ja
        if R_ja is None:
            return figures
        case = derived("T_case", f"{air.symbol} + max(R_th_ja - R_th_jc, 0) * P_mean", "degC", air, R_ja, R_jc, P_mean)
    else:
        if path.interface is None or (path.sink != "ideal" and path.R_th_sink is None):
            return figures
        if path.R_th_sink is None or path.sink == "ideal":
            sink = air.named("T_heatsink")
        else:
            sink = derived(
                "T_heatsink",
                f"{air.symbol} + R_th_sa * ({on_sink.text} + P_extra)",
                "degC",
                air,
                path.R_th_sink.named("R_th_sa"),
                *on_sink.inputs,
                extra,
            )
        case = derived("T_case", "T_heatsink + R_th_cs * P_mean", "degC", sink, path.interface.named("R_th_cs"), P_mean)
    mean = derived("T_j_mean", "T_case + R_th_jc * P_mean", "degC", case, R_jc, P_mean)
    top = pick(operating.T_j_peak)
    peak: Traced | None = None
    if operating.locus is not None and operating.locus.use is Use.HELD:
        peak = mean.named("T_j_peak")
    elif bool(np.all(np.isfinite(top))):
        peak = found("T_j_peak", top, "degC", f"greatest over the period: {NETWORK}", mean)
    total = derived("R_th_total", "(T_j_mean - T_ambient) / P_mean", "K/W", mean, T_ambient, P_mean)
    return replace(figures, T_heatsink=sink, T_case=case, T_j_mean=mean, T_j_peak=peak, R_th_total=total)


def _once(figures: Chain, operating: Operating, pick: Pick) -> Chain:
    how = f"at the moment of the junction's peak: {NETWORK}"
    before = found("T_j_before", pick(operating.T_before), "degC", "junction just before the shot")

    def shot(symbol: str, values: FloatArray, text: str) -> Traced | None:
        value = pick(values)
        return found(symbol, value, "degC", text, before) if bool(np.all(np.isfinite(value))) else None

    return replace(
        figures,
        T_heatsink=shot("T_heatsink", operating.T_heatsink, how),
        T_case=shot("T_case", operating.T_case, how),
        T_j_mean=shot("T_j_mean", operating.T_j_mean, f"mean over the shot: {NETWORK}"),
        T_j_peak=shot("T_j_peak", operating.T_j_peak, f"greatest over the shot: {NETWORK}"),
    )
