"""Results built by hand for the pictures: no check is run, so each test decides what the picture is given."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from soacheck.result import (
    Characteristics,
    DeviceFacts,
    DutyResult,
    Finding,
    Reason,
    Result,
    SafeAreaPicture,
    Series,
    StageFacts,
    Status,
    Sweep,
    Where,
)
from soacheck.table import Missing
from soacheck.trace import FloatArray, Traced, given

NAN = float("nan")
AMBIENT = 313.15  # 40 degC

DC = np.array([[5.0, 15.0], [10.0, 15.0], [50.0, 3.0], [80.0, 1.1], [160.0, 0.2]])
TEN_MS = np.array([[5.0, 25.0], [20.0, 25.0], [160.0, 0.9]])
DC_HOT = np.array([[5.0, 15.0], [5.3, 15.0], [50.0, 1.6], [80.0, 0.6], [160.0, 0.11]])
TEN_MS_HOT = np.array([[5.0, 25.0], [11.0, 25.0], [160.0, 0.5]])


def value(symbol: str, number: float, unit: str) -> Traced:
    return given(symbol, number, unit, "test")


def series(t: FloatArray, v: FloatArray, i: FloatArray, use: str, **more: FloatArray) -> Series:
    """Region by v and i; temperatures NaN where not given."""
    v, i = np.asarray(v, dtype=float), np.asarray(i, dtype=float)
    unknown = np.full(v.shape, NAN)
    region = np.where(i <= 0.01, 0, np.where(v <= 1.0, 2, 1)).astype(np.int64)
    columns = {"T_j": unknown, "T_case": unknown, "T_heatsink": unknown, **more}
    return Series(
        t=np.asarray(t, dtype=float),
        v=v,
        i=i,
        region=region,
        use=use,
        turn_off=np.zeros(v.shape, dtype=bool),
        **columns,
    )


def finding(
    limit: str,
    duty: str,
    used: float,
    *,
    applied: float = NAN,
    allowed: float = NAN,
    unit: str = "W",
    at: tuple[float, float, float] = (NAN, NAN, NAN),
    half: str | None = None,
    status: Status | None = None,
    reasons: tuple[Reason, ...] = (),
    level: float = NAN,
) -> Finding:
    t, v, i = (np.array([number]) for number in at)
    if status is None:
        status = Status.EXCEEDS if used > 1 else Status.MARGINAL if used > 0.8 else Status.WITHIN
    return Finding(
        limit=limit, duty=duty, half=half, unit=unit, utilisation=np.array([used]), status=np.array([int(status)]),
        where=Where(t=t, v=v, i=i, region=np.array([1]), member=np.array([level])),
        member_name="level" if np.isfinite(level) else "", basis="by hand",
        applied=None if np.isnan(applied) else value("applied", applied, unit),
        allowed=None if np.isnan(allowed) else value("allowed", allowed, unit), reasons=reasons,
    )  # fmt: skip


def reason(text: str, *keys: str) -> Reason:
    missing = tuple(Missing(key=key, where="the sheet's thermal table") for key in keys)
    return Reason(text=text, applies=np.array([True]), missing=missing)


def duty(name: str, what: Series | None, half: str | None = None, **values: float) -> DutyResult:
    units = {"P_mean": "W", "P_peak": "W", "T_j_mean": "degC", "T_j_peak": "degC"}
    return DutyResult(
        name=name,
        half=half,
        series=what,
        **{key: value(key, number, units[key]) for key, number in values.items()},
    )


def picture(name: str, half: str | None = None, **more: object) -> SafeAreaPicture:
    plain = SafeAreaPicture(
        half=half, duty=name, T_ref=298.15, T=362.15, V_max=160.0, I_max=15.0, I_peak=25.0,
        curves=(("dc", DC, DC_HOT), ("10 ms", TEN_MS, TEN_MS_HOT)),
    )  # fmt: skip
    return replace(plain, **more)  # type: ignore[arg-type]  # the fields' names are the caller's


def result(
    duties: tuple[DutyResult, ...],
    findings: tuple[Finding, ...],
    *,
    title: str = "Greenhouse vent actuator, output stage",
    kind: str = "npn",
    **more: object,
) -> Result:
    plain = Result(
        stage=StageFacts(title=title, file="stage.toml", sha256="0" * 64, revision="A"),
        device=DeviceFacts(name="EXAMPLE-NPN-160", file="d.toml", sha256="0" * 64, ratings_from="", kind=kind),
        verdict=max((Status(int(f.status[0])) for f in findings), default=Status.UNPROVEN),
        duties=duties,
        findings=tuple(sorted(findings, key=lambda f: (-f.status[0], -np.nan_to_num(f.utilisation[0], nan=9e9)))),
        nominal=(NAN,) * len(findings),
        spread=False,
    )
    return replace(plain, **more)  # type: ignore[arg-type]  # the fields' names are the caller's


def output_characteristics(half: str | None = None, top: float = 1.2) -> Characteristics:
    v = np.linspace(0.0, 40.0, 60)
    curves = []
    for step in range(1, 6):
        i = top / 4.5 * step * (1 + v / 120) * np.clip(v / 0.6, 0, 1)
        curves.append((f"{4 * step} mA", v, i))
    return Characteristics(half=half, curves=tuple(curves))


def held_line(*, title: str = "Greenhouse vent actuator, output stage", hot: float = 1.0) -> Result:
    """24 V over 20.2 ohm, any point held: P = v (24 - v)/R, 7.13 W at 12 V; sink 6 K/W, case 0.4 K/W above it."""
    v = np.linspace(0.6, 24.0, 60)
    i = (24.0 - v) / 20.2
    P = v * i
    sink = AMBIENT + 6.0 * hot * P
    case, junction = sink + 0.4 * P, sink + 2.5 * P
    line = series(
        np.zeros_like(v), v, i, "held", T_j=junction, T_case=case, T_heatsink=sink, P_allowed=(423.15 - case) / 2.1,
        T_air=np.array([AMBIENT]),
    )  # fmt: skip
    idle = series([0.0], [21.0], [0.1], "held", T_j=np.array([330.0]), T_case=np.array([329.0]))
    worst = int(P.argmax())
    at = (NAN, float(v[worst]), float(i[worst]))
    return result(
        (duty("idle", idle, P_mean=2.1), duty("held-worst-point", line, P_mean=float(P.max()))),
        (
            finding("safe-area", "held-worst-point", 0.09, applied=0.59, allowed=6.58, at=at, unit="A"),
            finding("dissipation", "held-worst-point", 0.2, applied=7.13, allowed=33.0, at=at),
            finding(
                "junction-temperature",
                "held-worst-point",
                0.6,
                applied=374.0,
                allowed=423.15,
                unit="degC",
                at=at,
            ),
        ),
        title=title,
        safe_area=(picture("held-worst-point"),),
        characteristics=(output_characteristics(),),
    )


def _sine_half(rail: float, peak: float, R: float, lag: float) -> Series:
    """One device of a class-B pair: v = rail - peak sin(x), i = peak/R sin(x - lag) while that is positive."""
    x = np.linspace(0.0, 2 * np.pi, 241)
    i = np.maximum(peak / R * np.sin(x - lag), 0.0)
    v = rail - peak * np.sin(x)
    ripple = 4.0 * np.sin(x - lag - 1.0)
    mean = 0.25 * peak / R * rail
    t = x / (2 * np.pi * 20.0)
    return series(
        t, v, i, "repeated", T_j=372.0 + ripple + mean, T_case=np.full(x.shape, 365.0),
        T_heatsink=np.full(x.shape, 358.0),
        T_air=np.array([AMBIENT]),
    )  # fmt: skip


def push_pull(*, complement: bool = True) -> Result:
    """+-42 V into 4 ohm at 60 degrees: the loci are open loops; both halves, worst level and full level."""
    duties: list[DutyResult] = []
    findings: list[Finding] = []
    halves = ("upper", "lower") if complement else (None,)
    for half in halves:
        worst, full = _sine_half(42.0, 38.0, 8.0, 1.047), _sine_half(42.0, 40.0, 8.0, 1.047)
        hot = int(np.argmax(worst.v * worst.i))
        at = (float(worst.t[hot]), float(worst.v[hot]), float(worst.i[hot]))
        duties += [
            duty("idle", series([0.0], [42.0], [0.05], "held", T_j=np.array([340.0])), half, P_mean=2.1),
            duty("worst-level", worst, half, P_mean=42.5),
            duty("full-level", full, half, P_mean=42.0),
        ]
        findings += [
            finding(
                "safe-area",
                "any-level",
                1.39,
                applied=3.7,
                allowed=2.66,
                at=at,
                unit="A",
                half=half,
                level=38.0,
            ),
            finding("dissipation", "worst-level", 0.92, applied=42.5, allowed=46.0, half=half, at=at),
            finding(
                "junction-temperature",
                "worst-level",
                1.03,
                applied=426.0,
                allowed=423.15,
                unit="degC",
                half=half,
                at=at,
            ),
        ]
    level = np.linspace(1.0, 42.0, 42)
    P = 42 * level / (np.pi * 8) - level**2 / (4 * 8) * 0.5
    case = AMBIENT + 1.3 * P
    return result(
        tuple(duties),
        tuple(findings),
        title="Hall amplifier, 2 pairs, 60 degrees",
        complement=DeviceFacts(name="EXAMPLE-PNP-160", file="p.toml", sha256="0" * 64, ratings_from="", kind="pnp")
        if complement
        else None,
        safe_area=tuple(picture("any-level", half, v=duties[1].series.v, i=duties[1].series.i) for half in halves),
        characteristics=tuple(output_characteristics(half, 5.0) for half in halves),
        sweeps=tuple(
            Sweep(
                duty="any-level", half=half, name="level", unit="V", x=level, P_mean=P,
                P_allowed=(423.15 - case) / 0.83, T_j_peak=case + 0.9 * P, T_case=case, T_heatsink=case - 0.2 * P,
                T_air=np.full(level.shape, AMBIENT),
            )
            for half in halves
        ),
    )  # fmt: skip


def one_shot() -> Result:
    """A load of 60 V switched in: 0.75 A for 40 ms falling to nothing, from a warm sink; no dc curve on the sheet."""
    t = np.array([0.0, 2e-3, 2e-3, 20e-3, 40e-3, 60e-3])
    v = np.array([60.0, 60.0, 55.0, 40.0, 12.0, 60.0])
    i = np.array([0.0, 0.0, 0.9, 0.75, 0.4, 0.0])
    fine = np.linspace(0, 60e-3, 200)
    fine = np.unique(np.concatenate([fine, t]))
    v, i = np.interp(fine, t, v), np.interp(fine, t, i)
    T_j = 350.0 + np.cumsum(v * i) / 800 * np.exp(-fine / 0.08)
    shot = series(fine, v, i, "once", T_j=T_j, T_case=np.full(fine.shape, 349.0), T_heatsink=np.full(fine.shape, 345.0))
    short = np.array([[3.0, 90.0], [20.0, 90.0], [100.0, 12.0]]), np.array([[3.0, 90.0], [15.0, 90.0], [100.0, 8.0]])
    long = np.array([[3.0, 50.0], [6.0, 50.0], [100.0, 1.8]]), np.array([[3.0, 50.0], [4.4, 50.0], [100.0, 1.2]])
    at = (2e-3, 55.0, 0.9)
    lacking = reason("conduction in the linear region lasts longer than the longest printed pulse", "soa[dc]")
    return result(
        (duty("profile", shot, P_mean=18.0),),
        (
            finding("safe-area", "profile", NAN, at=at, unit="A", status=Status.UNPROVEN, reasons=(lacking,)),
            finding("junction-temperature", "profile", 0.6, applied=float(T_j.max()), allowed=423.15, unit="degC"),
        ),
        title="Electronic load, one step",
        kind="n-mosfet",
        safe_area=(
            picture(
                "profile", V_max=100.0, I_max=30.0, I_peak=90.0, T=349.0,
                curves=(("100 µs", *short), ("10 ms", *long)),
            ),
        ),
    )  # fmt: skip


def without_temperatures(which: Result) -> Result:
    """The same duties with nothing known about temperature."""
    bare = []
    for entry in which.duties:
        assert entry.series is not None
        unknown = np.full(entry.series.v.shape, NAN)
        bare.append(
            replace(
                entry,
                series=replace(entry.series, T_j=unknown, T_case=unknown, T_heatsink=unknown, T_air=np.empty(0)),
            )
        )
    lacking = reason("the temperature of the air is not stated", "surroundings.T_ambient")
    findings = tuple(
        replace(
            entry,
            status=np.array([int(Status.UNPROVEN)]),
            utilisation=np.array([NAN]),
            allowed=None,
            reasons=(lacking,),
        )
        for entry in which.findings
    )
    return replace(which, duties=tuple(bare), findings=findings, sweeps=())
