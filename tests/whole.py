"""Small files for tests that go the whole way: a device and stages as text, and a check of them."""

from __future__ import annotations

import re
from pathlib import Path

from soacheck.check import check
from soacheck.result import Finding, Result
from soacheck.stage import Stage, read_stage

DEVICE = """
[device]
name = "TEST-NPN"
kind = "npn"
ratings_from = "invented for tests"

[max]
V_CEO = "160 V"
V_EBO = "5 V"
I_C = "15 A"
I_CM = "25 A"
I_CM_pulse = "1 ms"
I_B = "1.5 A"
P_tot = "150 W"
T_j = "150 degC"

[thermal]
R_th_jc = "0.833 K/W"
Z_th_jc = { foster = [["0.083 K/W", "0.2 ms"], ["0.25 K/W", "5 ms"], ["0.5 K/W", "60 ms"]] }

[[soa]]
pulse = "dc"
points = [["5 V", "15 A"], ["10 V", "15 A"], ["50 V", "3 A"], ["80 V", "1.1 A"], ["160 V", "0.2 A"]]
[[soa]]
pulse = "10 ms"
points = [["5 V", "25 A"], ["20 V", "25 A"], ["160 V", "0.9 A"]]
[[soa]]
pulse = "1 ms"
points = [["5 V", "25 A"], ["40 V", "25 A"], ["160 V", "2.5 A"]]

[typical]
h_FE = [40, 90, 180]
V_BE = "0.68 V"
I_CBO = "50 uA"
V_CE_sat = "0.6 V"
"""

HEAT = """
[heat_path]
interface = "0.4 K/W"
heatsink = "1.2 K/W"
[surroundings]
T_ambient = "40 degC"
"""

HELD = (
    """
[stage]
title = "test"
device = "TEST-NPN"
[load]
kind = "resistive"
use = "held"
V_CC = "24 V"
R_C = "8 ohm"
R_E = "0.5 ohm"
I_CQ = "1.4 A"
"""
    + HEAT
)

PROFILE = (
    """
[stage]
title = "test"
device = "TEST-NPN"
[load]
kind = "profile"
points = [["0 ms", "30 V", "0.5 A"], ["5 ms", "30 V", "1.5 A"], ["5 ms", "2 V", "3 A"], ["20 ms", "2 V", "3 A"]]
repeat = true
"""
    + HEAT
)

PUSH_PULL = (
    """
[stage]
title = "test"
device = "TEST-NPN"
[load]
kind = "push-pull"
V_rail = "35 V"
load = "8 ohm"
f = "100 Hz"
level = "any"
I_Q = "30 mA"
R_E = "0.22 ohm"
"""
    + HEAT
)


def put(text: str, **values: str) -> str:
    """The text with some `key = value` lines changed; every key must be there."""
    for key, value in values.items():
        text, count = re.subn(rf"(?m)^{key} = .*$", f"{key} = {value}", text)
        if count != 1:
            raise ValueError(f"{key} stands {count} times")
    return text


def without(text: str, key: str) -> str:
    """The text without the line of a key."""
    text, count = re.subn(rf"(?m)^{key} = .*\n", "", text)
    if count < 1:
        raise ValueError(f"{key} is not there")
    return text


def stage_of(folder: Path, stage: str = HELD, device: str = DEVICE) -> Stage:
    """Read a stage and its device from a folder."""
    (folder / "TEST-NPN.toml").write_text(device, encoding="utf-8")
    file = folder / "stage.toml"
    file.write_text(stage, encoding="utf-8")
    return read_stage(file)


def result_of(folder: Path, stage: str = HELD, device: str = DEVICE) -> Result:
    """Check a stage from a folder."""
    return check(stage_of(folder, stage, device))


def finding(result: Result, limit: str, duty: str | None = None) -> Finding:
    """The worst finding of a limit, or the one of a duty."""
    return next(f for f in result.findings if f.limit == limit and (duty is None or f.duty == duty))
