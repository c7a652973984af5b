"""Results put together by hand, to test what renders them. The stage is a class-B amplifier half."""

from __future__ import annotations

from typing import Any

import numpy as np

from soacheck.result import (
    Caution,
    DeviceFacts,
    DutyResult,
    Finding,
    Reason,
    Result,
    StageFacts,
    Status,
    Where,
)
from soacheck.table import Missing
from soacheck.trace import Traced, derived, found, frozen, given

HOSTILE = "[/red]$x_1$<script>alert(1)</script>\x1b[31mred\x1b]0;title\x07\u202e desrever\x9b1m\r\n{0}%s\\"


def where(v: float = np.nan, i: float = np.nan, t: float = np.nan, region: int = -1, member: float = np.nan) -> Where:
    return Where(
        t=frozen([t]),
        v=frozen([v]),
        i=frozen([i]),
        region=np.array([region], dtype=np.int64),
        member=frozen([member]),
    )


def heat_chain(power: float = 22.34, ambient: float = 40.0) -> dict[str, Traced]:
    """Junction temperature of one of four equal devices on a shared sink, every step traced."""
    t_a = given("T_ambient", [ambient + 273.15], "degC", "amp.toml: ambient.T_ambient")
    r_sa = given("R_th_sa", [0.45], "K/W", "amp.toml: heat_path.heatsink", "measured")
    r_cs = given("R_th_cs", [0.4], "K/W", "amp.toml: heat_path.interface", "guaranteed")
    r_jc = given("R_th_jc", [0.83], "K/W", "npn160.toml: thermal.R_th_jc", "guaranteed")
    n = given("n", [4.0], "1", "every device of the stage on one sink (assumption)")
    rail = given("V_rail", [42.0], "V", "amp.toml: load.V_rail")
    load = given("R_load", [4.0], "ohm", "amp.toml: load.load")
    pairs = given("pairs", [2.0], "1", "amp.toml: load.pairs")
    if power == 22.34:
        p = derived("P_mean", "V_rail**2 / (pi**2 * R_load * pairs)", "W", rail, load, pairs, source="class B, 2/pi")
    else:
        p = found("P_mean", [power], "W", "mean of v times i over one period", rail, load)
    sink = derived("T_heatsink", "T_ambient + R_th_sa * n * P_mean", "degC", t_a, r_sa, n, p)
    case = derived("T_case", "T_heatsink + R_th_cs * P_mean", "degC", sink, r_cs, p)
    junction = derived("T_j_mean", "T_case + R_th_jc * P_mean", "degC", case, r_jc, p)
    peak = found("T_j_peak", junction.value + 3.2, "degC", "peak of the periodic response", case, r_jc, p)
    return {
        "T_ambient": t_a, "R_th_jc": r_jc, "P_mean": p, "T_heatsink": sink, "T_case": case,
        "T_j_mean": junction, "T_j_peak": peak,
    }  # fmt: skip


def finding(
    limit: str = "dissipation",
    duty: str = "worst-level",
    applied: float | Traced | None = 22.34,
    allowed: float | Traced | None = 75.0,
    unit: str = "W",
    utilisation: float = 0.298,
    status: Status = Status.WITHIN,
    **more: Any,
) -> Finding:
    def traced(symbol: str, value: float | Traced | None) -> Traced | None:
        return given(symbol, [value], unit, "by hand") if isinstance(value, (int, float)) else value

    return Finding(
        limit=limit,
        duty=duty,
        half=more.pop("half", None),
        applied=traced("applied", applied),
        allowed=traced("allowed", allowed),
        unit=unit,
        utilisation=frozen([utilisation]),
        status=np.array([int(status)], dtype=np.int64),
        where=more.pop("where", where()),
        basis=more.pop("basis", "mean power against P_tot at the case temperature reached"),
        **more,
    )


def reason(text: str, *missing: tuple[str, str], applies: bool = True) -> Reason:
    return Reason(
        text=text,
        applies=np.array([applies]),
        missing=tuple(Missing(key=key, where=place) for key, place in missing),
    )


def result(*findings: Finding, **changes: Any) -> Result:
    """A result about these findings, in the order given."""
    statuses = [Status(int(item.status[0])) for item in findings]
    fields: dict[str, Any] = {
        "stage": StageFacts(
            title="Hall amplifier, 4 ohm", file="demo/amp.toml", sha256="ab" * 32, revision="B",
        ),
        "device": DeviceFacts(
            name="EXAMPLE-NPN-160", file="/x/devices/npn160.toml", sha256="cd" * 32,
            ratings_from="invented for this example", kind="npn",
        ),
        "verdict": max(statuses, default=Status.UNPROVEN),
        "duties": (),
        "findings": findings,
        "nominal": tuple(float(item.utilisation[0]) for item in findings),
        "spread": False,
    }  # fmt: skip
    return Result(**{**fields, **changes})


def amplifier(spread: bool = False) -> Result:
    """A whole result as `check` would give it for a push-pull stage, the safe area crossed at full level."""
    idle, worst, full = heat_chain(1.3), heat_chain(), heat_chain(41.2)
    duties = tuple(
        DutyResult(
            name=name,
            half="upper",
            P_mean=chain["P_mean"],
            P_peak=given("P_peak", [peak], "W", "by hand"),
            V_peak=given("V_peak", [83.1], "V", "by hand"),
            I_peak=given("I_peak", [current], "A", "by hand"),
            T_j_peak=chain["T_j_peak"],
            T_j_mean=chain["T_j_mean"],
            T_case=chain["T_case"],
            T_heatsink=chain["T_heatsink"],
            facts=(chain["P_mean"],),
        )
        for name, chain, peak, current in (
            ("idle", idle, 1.3, 0.031),
            ("worst-level", worst, 55.125, 3.35),
            ("full-level", full, 198.0, 5.25),
        )
    )
    t_j_max = given("T_j_max", [423.15], "degC", "npn160.toml: max.T_j", "guaranteed")
    p_allowed = derived(
        "P_allowed", "(T_j_max - T_case) / R_th_jc", "W", t_j_max, worst["T_case"], worst["R_th_jc"],
        source="definition of thermal resistance",
    )  # fmt: skip
    findings = (
        finding(
            "safe-area", "full-level", 1.2, 0.851, "A", 1.2 / 0.851, Status.EXCEEDS, half="upper",
            where=where(42.1, 1.2, 0.0032, 1, 12.3), member_name="level",
            basis="residence above each printed curve, and superposition of the family; the larger counts",
            reasons=(reason("42.1 V is right of the 10 ms curve's last point for 3.2 ms of every period"),),
        ),
        finding(
            "junction-temperature", "full-level", 430.2, 423.15, "degC", 1.05, Status.EXCEEDS, half="upper",
            where=where(40.0, 1.0, 0.0051, 1),
        ),
        finding(
            "drive", "worst-level", None, None, "A", np.nan, Status.UNPROVEN, half="upper",
            reasons=(
                reason(
                    "whether saturation is reached cannot be told",
                    ("load.I_B", "the base drive of the schematic"),
                    ("typical.V_CE_sat", "data sheet, on characteristics"),
                ),
            ),
        ),
        finding(
            "drive", "idle", None, None, "A", np.nan, Status.UNPROVEN, half="upper",
            reasons=(
                reason(
                    "whether saturation is reached cannot be told",
                    ("load.I_B", "the base drive of the schematic"),
                    ("typical.V_CE_sat", "data sheet, on characteristics"),
                ),
            ),
        ),
        finding("voltage", "full-level", 134.0, 160.0, "V", 134 / 160, Status.MARGINAL, half="upper",
                where=where(134.0, 0.0, 0.01, 0), reasons=(reason("above 80 % of the rating"),)),
        finding("dissipation", "worst-level", worst["P_mean"], p_allowed, "W", 0.305, half="upper"),
        finding(
            "junction-temperature", "worst-level", worst["T_j_peak"], t_j_max, "degC", 0.62, half="upper",
        ),
        finding("current", "worst-level", 3.35, 15.0, "A", 3.35 / 15, half="upper"),
    )  # fmt: skip
    return result(
        *findings,
        duties=duties,
        spread=spread,
        nominal=tuple(0.93 * float(item.utilisation[0]) for item in findings) if spread else None
        or tuple(float(item.utilisation[0]) for item in findings),
        not_analysed=("runaway (not decided by this version)", "shorted output (no I_limit)"),
        assumptions=(
            "altitude 0 m", "every device of the stage sits on one sink: 4 devices", "R_th_enclosure 0 K/W",
        ),
        cautions=(
            Caution(id="pure-resistance", text="a pure resistance; a real load at 45 degrees would raise the "
                    "mean dissipation by 1.41 and the peak by 2.83, at 60 degrees by 1.91 and 3.60"),
            Caution(id="shared-sink", text="four devices heat the sink"),
        ),
        inputs=(t_j_max, worst["T_ambient"], given("f", [1000.0], "Hz", "amp.toml: load.f")),
    )  # fmt: skip
