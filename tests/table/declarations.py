"""A small set of declarations, of every form, for the tests of this room."""

from __future__ import annotations

from soacheck.table import Document, Key, check_source, parse_source

NPN = frozenset({"npn"})
MOSFET = frozenset({"n-mosfet"})
VOLTS, AMPERES, WATTS, KELVIN_PER_WATT = "voltage", "current", "power", "thermal resistance"

KEYS = (
    Key(table="device", name="name", form="text", required=True),
    Key(table="device", name="kind", form="choice", choices=("npn", "n-mosfet"), required=True),
    Key(table="device", name="tested", form="flag"),
    Key(table="device", name="pins", form="count"),
    Key(table="max", name="V_CEO", dimension=VOLTS, belongs_to=NPN, role="V_max", band=(1.0, 5000.0)),
    Key(table="max", name="V_DSS", dimension=VOLTS, belongs_to=MOSFET, role="V_max", band=(1.0, 5000.0)),
    Key(table="max", name="V_EBO", dimension=VOLTS, belongs_to=NPN),
    Key(table="max", name="I_C", dimension=AMPERES, belongs_to=NPN, band=(1e-9, 1e5)),
    Key(table="max", name="P_tot", dimension=WATTS, band=(1e-3, 1e5), where="first page, absolute maximum ratings"),
    Key(table="max", name="T_j", dimension="temperature", band=(273.15, 773.15)),
    Key(table="thermal", name="R_th_jc", dimension=KELVIN_PER_WATT),
    Key(table="thermal", name="Z_th_jc", form="table"),
    Key(table="thermal.Z_th_jc", name="pulse", form="points", columns=("time",)),
    Key(table="thermal.Z_th_jc", name="foster", form="points", columns=(KELVIN_PER_WATT, "time")),
    Key(table="", name="soa", form="tables"),
    Key(table="soa", name="points", form="points", columns=(VOLTS, AMPERES), required=True),
    Key(table="soa", name="pulse", form="quantity", dimension="time", choices=("dc",)),
    Key(table="typical", name="h_FE", form="number", lists=3, grade="typical", band=(1.0, 1e5)),
    Key(table="typical", name="V_CE_sat", dimension=VOLTS, lists=3, grade="typical"),
    Key(table="typical", name="V_BE_tempco", dimension="voltage tempco", sign="any", grade="typical"),
    Key(table="typical", name="doubling", dimension="temperature difference", grade="typical"),
    Key(table="path", name="sink", dimension=KELVIN_PER_WATT, choices=("ideal", "none"), inside=True, grade=""),
    Key(table="path.sink", name="R_th", dimension=KELVIN_PER_WATT, required=True),
    Key(table="path", name="V_out", dimension=VOLTS, lists=2, sign="non-negative", grade=""),
    Key(table="path", name="load", form="tree"),
    Key(
        table="path", name="extra", dimension=WATTS, sign="non-negative", grade="",
        default="0 W", assumption="nothing else heats the sink",
    ),
    Key(table="path", name="parallel", form="count", default="1"),
    Key(table="path", name="altitude", dimension="length", not_built="altitude is not built yet; built: sea level"),
    Key(table="path.bias", name="R_1", dimension="resistance", required=True),
)  # fmt: skip

COMPLETE = """\
[device]
name = "EXAMPLE"
kind = "npn"

[max]
V_CEO = "160 V"
I_C = { value = "15 A", source = "page 2" }
P_tot = { value = "150 W", tol = "10 %", grade = "measured" }
T_j = "150 °C"

[thermal]
R_th_jc = { value = "0.8 K/W", min = "0.6 K/W", max = "1 K/W", source = "page 3" }
Z_th_jc = { pulse = ["10 us", "1 ms"], foster = [["0.05 K/W", "0.2 ms"], ["0.78 K/W", "40 ms"]] }

[[soa]]
pulse = "dc"
points = [["5 V", "15 A"], ["160 V", "0.2 A"]]
[[soa]]
pulse = "10 ms"
points = [["5 V", "25 A"], ["160 V", "0.9 A"]]

[typical]
h_FE = [40, 90, 180]
V_CE_sat = "0.6 V"
V_BE_tempco = "-2 mV/K"

[path]
sink = { R_th = "1.6 K/W" }
V_out = ["0 V", "30 V"]
load = { series = ["0.5 ohm", { value = "8 ohm", tol = "10 %" }] }
[path.bias]
R_1 = "1 kohm"
"""


def document(text: str, device_kind: str | None = "npn") -> Document:
    return check_source(parse_source(text, shown_as="amp.toml"), KEYS, device_kind=device_kind)
