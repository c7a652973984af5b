"""A rating file with every key that the format has, as its description prints them, reads whole."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from soacheck.device.shown import shown
from tests.device.files import DC, IGBT, MOSFET, NPN, problems, read

FOREIGN = ("R_DS_on", "V_CE_TO")
# The format's description prints this file: keys of all kinds of device stand in it together.
PRINTED = """\
[device]
name = "EXAMPLE-NPN-160"         # invented
kind = "npn"                     # npn pnp npn-darlington pnp-darlington n-mosfet p-mosfet n-igbt
package = "TO-247"
ratings_from = "maker's document, revision, date"     # printed on every report; absence is a caution

[max]                            # absolute maximum ratings
V_CEO = "160 V"                  # MOSFET: V_DSS, IGBT: V_CES; also V_CBO V_CEV V_CER (with R_BE) V_EBO V_GSS
I_C = "15 A"                     # MOSFET: I_D;  continuous.  I_S: body diode
I_CM = "25 A"                    # MOSFET: I_DM; peak, for I_CM_pulse = "1 ms"
I_B = "1.5 A"
P_tot = "150 W"                  # at T_case (25 degC when absent)
T_j = "150 degC"
E_AS = "300 mJ"

[thermal]
R_th_jc = "0.83 K/W"             # absent: (T_j - T_case)/P_tot, and the sheet says so
R_th_ja = "40 K/W"               # without a sink, mounted as the sheet says (mounting = "...")
Z_th_jc = { pulse = ["10 us", "1 ms", "100 ms"], value = ["0.01 K/W", "0.12 K/W", "0.6 K/W"] }    # single-pulse curve
# or { foster = [["0.05 K/W", "0.2 ms"], ["0.78 K/W", "40 ms"]] }    R, tau
# or { cauer  = [["0.05 K/W", "4 mJ/K"], ...] }                      R, C from the junction outwards

[[soa]]                          # one per printed curve; points read off the log-log chart
pulse = "dc"
T_ref = "25 degC"                # temperature of `node` that the chart was drawn for
node = "case"                    # or "ambient"
single = true                    # single pulses (default of pulse curves); false: repeated, with duty_factor
grade = "guaranteed"             # or "typical"
reading = "0 %"                  # how far below the read points to stay
points = [["5 V", "15 A"], ["10 V", "15 A"], ["50 V", "3 A"], ["80 V", "1.1 A"], ["160 V", "0.2 A"]]
[[soa]]
pulse = "10 ms"
points = [["5 V", "25 A"], ["20 V", "25 A"], ["160 V", "0.9 A"]]
[[soa]]
bias = "reverse"                 # turn-off area (RBSOA), with V_BE_off, I_B2, R_G, T_j_valid; "forward" when absent
points = [["100 V", "15 A"], ["160 V", "4 A"]]

[soa_derating]                   # absent: "like-dissipation", the cautious convention
convention = "own-curve"         # "like-dissipation"; "own-curve" (needs points); "held" (drawn for T_j at its maximum)
points = [["25 degC", "100 %"], ["150 degC", "45 %"]]

[typical]                        # characteristics; a list of three is [min, typ, max]
h_FE = [40, 90, 180]             # at h_FE_I_C; or h_FE_points = [[I_C, T, h_FE], ...]
V_BE = "0.68 V"                  # at V_BE_I_C; V_BE_tempco (absent: -2 mV/K, Darlington -4 mV/K, common practice)
I_CBO = "50 uA"                  # at I_CBO_T, doubling = "10 K" (common practice when absent);  I_DSS, I_CES
V_CE_sat = "0.6 V"               # at V_CE_sat_I_C;  V_A early voltage
R_DS_on = "45 mohm"
V_CE_TO = "0.9 V"                # IGBT on-state line with r_CE, cold and hot
E_on = "1.2 mJ"
f_T = "20 MHz"

[mechanical]
"""

MORE_NPN = """
V_CBO = "180 V"
V_CEV = "175 V"
V_CER = "170 V"
R_BE = "100 ohm"
V_EBO = "5 V"
I_CM = "25 A"
I_CM_pulse = "1 ms"
I_B = "1.5 A"
T_case = "25 degC"
E_AS = "300 mJ"
I_AS = "10 A"
E_AR = "15 mJ"
[thermal]
R_th_jc = "0.83 K/W"
R_th_ja = "40 K/W"
mounting = "leads soldered, no sink"
[[soa]]
bias = "reverse"
V_BE_off = "1.5 V"
I_B2 = "0.5 A"
T_j_valid = "125 degC"
points = [["100 V", "15 A"], ["160 V", "4 A"]]
[[soa]]
pulse = "10 ms"
T_ref = "25 degC"
single = false
duty_factor = "10 %"
node = "ambient"
grade = "typical"
reading = "5 %"
points = [["5 V", "5 A"], ["160 V", "0.1 A"]]
[soa_derating]
convention = "own-curve"
points = [["25 degC", "100 %"], ["150 degC", "45 %"]]
[typical]
h_FE = [40, 90, 180]
h_FE_I_C = "2 A"
h_FE_points = [["0.1 A", "25 degC", 80], ["10 A", "25 degC", 40]]
V_BE = "0.68 V"
V_BE_I_C = "2 A"
V_BE_tempco = "-2 mV/K"
I_CBO = "50 uA"
I_CBO_T = "25 degC"
doubling = "10 K"
V_CE_sat = "0.6 V"
V_CE_sat_I_C = "5 A"
V_A = "120 V"
V_BR = "190 V"
f_T = "20 MHz"
t_r = "0.5 us"
t_f = "0.3 us"
C_oss = "300 pF"
[mechanical]
pinout = "B C E"
tab = "collector"
hole = "3.6 mm"
insulation_voltage = "2.5 kV"
"""
MORE_GATE = """
V_GSS = "20 V"
I_S = "20 A"
E_AS = "300 mJ"
I_AS = "10 A"
t_SC = "10 us"
V_SC = "50 V"
[[soa]]
bias = "reverse"
R_G = "10 ohm"
T_j_valid = "150 degC"
points = [["50 V", "40 A"], ["100 V", "20 A"]]
[typical]
V_GS_th = ["2 V", "3 V", "4 V"]
V_GS_th_tempco = "-6 mV/K"
g_fs = "20 S"
T_hot = "150 degC"
E_on = "1.2 mJ"
E_off = "0.8 mJ"
E_V_ref = "50 V"
E_I_ref = "20 A"
E_T_ref = "125 degC"
Q_g = "80 nC"
Q_rr = "1 uC"
"""
MORE_MOSFET = """R_DS_on = "45 mohm"
R_DS_on_V_GS = "10 V"
R_DS_on_hot = "90 mohm"
I_DSS = "1 uA"
I_DSS_T = "25 degC"
[mechanical]
tab = "drain"
"""
MORE_IGBT = """V_CE_TO = "0.9 V"
r_CE = "20 mohm"
V_CE_TO_hot = "0.8 V"
r_CE_hot = "28 mohm"
I_CES = "50 uA"
I_CES_T = "25 degC"
V_CE_sat = "1.6 V"
V_CE_sat_I_C = "30 A"
[mechanical]
tab = "isolated"
"""


def test_lines_of_other_kinds_in_the_printed_file_are_refused_by_name(tmp_path: Path) -> None:
    assert [one.key for one in problems(PRINTED, tmp_path)] == ["typical.R_DS_on", "typical.V_CE_TO"]


def test_the_printed_rating_file_reads_and_keeps_its_figures(tmp_path: Path) -> None:
    # without the two lines of a MOSFET and of an IGBT
    device = read("\n".join(line for line in PRINTED.split("\n") if not line.startswith(FOREIGN)), tmp_path)
    assert (device.name, device.kind, device.package) == ("EXAMPLE-NPN-160", "npn", "TO-247")
    assert device.max.V_max.at(0) == 160
    assert device.max.T_j.at(0) == pytest.approx(423.15)
    assert device.max.E_AS is not None
    assert device.thermal.pulse == pytest.approx([1e-5, 1e-3, 0.1])
    assert device.thermal.value == pytest.approx([0.01, 0.12, 0.6])
    assert [curve.label for curve in device.soa] == ["dc", "10 ms", "reverse"]
    assert device.soa[0].single
    assert device.soa[2].bias == "reverse"
    assert device.soa_derating.convention == "own-curve"
    assert device.soa_derating.points == pytest.approx(np.array([[298.15, 1.0], [423.15, 0.45]]))


@pytest.mark.parametrize(
    ("form", "said"),
    [
        ('{ foster = [["0.05 K/W", "0.2 ms"], ["0.78 K/W", "40 ms"]] }', "foster"),
        ('{ cauer  = [["0.05 K/W", "4 mJ/K"], ["0.78 K/W", "50 mJ/K"]] }', "cauer"),
    ],
)
def test_the_other_two_forms_of_the_transient_impedance_read_as_printed(tmp_path: Path, form: str, said: str) -> None:
    device = read(NPN + f"[thermal]\nZ_th_jc = {form}\n", tmp_path)
    pairs = getattr(device.thermal, said)
    assert pairs[:, 0] == pytest.approx([0.05, 0.78])
    assert device.thermal.form == said


@pytest.mark.parametrize(
    "text",
    [NPN + MORE_NPN + DC, MOSFET + MORE_GATE + MORE_MOSFET, IGBT + MORE_GATE + MORE_IGBT],
    ids=["npn", "mosfet", "igbt"],
)
def test_every_key_of_a_kind_reads_and_is_shown(tmp_path: Path, text: str) -> None:
    device = read(text, tmp_path)
    assert device.cautions == ()
    assert device.assumptions == ()
    back = shown(device)
    table = ""
    for line in text.splitlines():
        table = line.strip("[]") if line.startswith("[") else table
        name, equals, _ = line.partition(" = ")
        if equals and table != "soa" and name not in ("name", "kind", "ratings_from", "points"):
            assert name in back, name
    assert "Turn-off area" in back


def test_a_rating_of_another_kind_stays_an_error(tmp_path: Path) -> None:
    assert [one.key for one in problems(MOSFET + 'V_CEO = "60 V"\n', tmp_path)] == ["max.V_CEO"]


def test_a_source_that_is_still_a_row_of_dots_is_refused(tmp_path: Path) -> None:
    (problem,) = problems(NPN.replace("a sheet, revision B", "..."), tmp_path)
    assert (problem.key, problem.problem) == ("device.ratings_from", "not filled in")
    assert problem.remedy == "fill it in, or delete the line"


@pytest.mark.parametrize(
    ("text", "volts", "name"),
    [
        (NPN, "1 V", "V_CE_sat"),
        (NPN.replace('"npn"', '"npn-darlington"'), "2 V", "V_CE_sat"),
        (MOSFET, "1 V", "R_DS_on"),
        (IGBT, "1 V", "V_CE_TO and typical.r_CE"),
    ],
)
def test_a_drop_that_the_sheet_does_not_state_is_a_listed_assumption(
    tmp_path: Path, text: str, volts: str, name: str
) -> None:
    (said,) = read(text, tmp_path).assumptions
    assert f"at most {volts}, common practice" in said
    assert f"typical.{name} not stated" in said
