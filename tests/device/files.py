"""Rating files for the tests of this room: a minimal one, and changes to it."""

from __future__ import annotations

from pathlib import Path

import pytest

from soacheck.device.ratings import Device
from soacheck.device.reader import read_device
from soacheck.errors import InputError, Problem

NPN = """\
[device]
name = "T1"
kind = "npn"
ratings_from = "a sheet, revision B"
[max]
V_CEO = "160 V"
I_C = "15 A"
P_tot = "150 W"
T_j = "150 degC"
"""
MOSFET = """\
[device]
name = "T2"
kind = "n-mosfet"
ratings_from = "a sheet, revision B"
[max]
V_DSS = "100 V"
I_D = "40 A"
P_tot = "125 W"
T_j = "175 degC"
"""
IGBT = """\
[device]
name = "T3"
kind = "n-igbt"
ratings_from = "a sheet, revision B"
[max]
V_CES = "600 V"
I_C = "30 A"
P_tot = "125 W"
T_j = "175 degC"
"""
DC = """
[[soa]]
pulse = "dc"
T_ref = "25 degC"
points = [["5 V", "15 A"], ["10 V", "15 A"], ["50 V", "3 A"], ["160 V", "0.2 A"]]
"""


def read(text: str, folder: Path, name: str = "T1.toml") -> Device:
    """The device in a text, through a file."""
    file = folder / name
    file.write_text(text, encoding="utf-8")
    return read_device(file, shown_as=str(file))


def problems(text: str, folder: Path) -> tuple[Problem, ...]:
    """What is wrong with a text."""
    with pytest.raises(InputError) as caught:
        read(text, folder)
    return caught.value.problems
