"""The keys of a rating file, each declared once: identity, ratings, thermal data, mounting.

The safe area stands in `soacheck.device.soa_keys`, characteristics in `soacheck.device.typical_keys`.
"""

from __future__ import annotations

from typing import Any

from soacheck.device.ratings import BIPOLAR, BIPOLAR_OR_IGBT, IGBT, INSULATED_GATE, KINDS, MOSFET
from soacheck.device.soa_keys import SOA_KEYS
from soacheck.device.typical_keys import TYPICAL_KEYS
from soacheck.table import GRADES, Key

_RATINGS = "table of absolute maximum ratings"
_THERMAL = "table of thermal characteristics"


def _rating(
    name: str,
    dimension: str,
    band: tuple[float, float],
    meaning: str,
    *,
    kinds: frozenset[str] | None = None,
    where: str = _RATINGS,
    **more: Any,
) -> Key:
    return Key(
        table="max",
        name=name,
        dimension=dimension,
        band=band,
        meaning=meaning,
        belongs_to=kinds,
        where=where,
        **more,
    )


DEVICE_KEYS: tuple[Key, ...] = (
    Key(
        table="device",
        name="name",
        form="text",
        required=True,
        meaning="Type number; a stage may call the device by it.",
        where="head of the data sheet",
    ),
    Key(
        table="device",
        name="kind",
        form="choice",
        choices=KINDS,
        required=True,
        meaning="What sort of transistor it is; decides which keys belong in the file.",
        where="head of the data sheet",
    ),
    Key(
        table="device",
        name="package",
        form="text",
        meaning="Package outline.",
        where="head of the data sheet, outline drawing",
    ),
    Key(
        table="device",
        name="ratings_from",
        form="text",
        meaning="The document the figures were copied from, with revision and date; printed on every report.",
        where="first or last page of the data sheet",
    ),
)

_VOLTS, _AMPS = (0.5, 2e4), (1e-3, 2e4)

MAX_KEYS: tuple[Key, ...] = (
    _rating(
        "V_CEO",
        "voltage",
        _VOLTS,
        "Collector-emitter voltage, base open.",
        kinds=BIPOLAR,
        required=True,
        role="V_max",
    ),
    _rating(
        "V_DSS",
        "voltage",
        _VOLTS,
        "Drain-source voltage, gate shorted.",
        kinds=MOSFET,
        required=True,
        role="V_max",
    ),
    _rating(
        "V_CES",
        "voltage",
        _VOLTS,
        "Collector-emitter voltage, gate shorted.",
        kinds=IGBT,
        required=True,
        role="V_max",
    ),
    _rating("V_CBO", "voltage", _VOLTS, "Collector-base voltage, emitter open.", kinds=BIPOLAR),
    _rating("V_CEV", "voltage", _VOLTS, "Collector-emitter voltage, base reverse-biased.", kinds=BIPOLAR),
    _rating("V_CER", "voltage", _VOLTS, "Collector-emitter voltage with R_BE from base to emitter.", kinds=BIPOLAR),
    _rating("R_BE", "resistance", (0.1, 1e6), "Resistor that V_CER is stated for.", kinds=BIPOLAR),
    _rating("V_EBO", "voltage", (0.1, 200), "Emitter-base voltage, collector open.", kinds=BIPOLAR),
    _rating("V_GSS", "voltage", (1, 200), "Gate-source (IGBT: gate-emitter) voltage.", kinds=INSULATED_GATE),
    _rating(
        "I_C",
        "current",
        _AMPS,
        "Continuous collector current.",
        kinds=BIPOLAR_OR_IGBT,
        required=True,
        role="I_max",
    ),
    _rating(
        "I_D",
        "current",
        _AMPS,
        "Continuous drain current at T_case.",
        kinds=MOSFET,
        required=True,
        role="I_max",
    ),
    _rating("I_CM", "current", _AMPS, "Peak collector current.", kinds=BIPOLAR_OR_IGBT, role="I_peak"),
    _rating("I_DM", "current", _AMPS, "Peak drain current.", kinds=MOSFET, role="I_peak"),
    _rating(
        "I_CM_pulse",
        "time",
        (1e-7, 10),
        "Longest pulse that I_CM is stated for.",
        kinds=BIPOLAR_OR_IGBT,
        role="I_peak_pulse",
    ),
    _rating(
        "I_DM_pulse",
        "time",
        (1e-7, 10),
        "Longest pulse that I_DM is stated for.",
        kinds=MOSFET,
        role="I_peak_pulse",
    ),
    _rating("I_B", "current", (1e-5, 2e3), "Continuous base current.", kinds=BIPOLAR),
    _rating("I_S", "current", _AMPS, "Continuous current of the body diode.", kinds=INSULATED_GATE),
    _rating("P_tot", "power", (0.01, 2e4), "Total dissipation at T_case."),
    _rating(
        "T_case",
        "temperature",
        (223.15, 523.15),
        "Case temperature that P_tot (and I_D of a MOSFET) is stated at.",
        sign="any",
        default="25 degC",
        grade="",
    ),
    _rating("T_j", "temperature", (323.15, 673.15), "Greatest junction temperature.", sign="any", required=True),
    _rating("E_AS", "energy", (1e-6, 100), "Single-shot avalanche energy from T_j = 25 degC, with I_AS."),
    _rating("I_AS", "current", _AMPS, "Avalanche current that E_AS is stated for."),
    _rating("E_AR", "energy", (1e-7, 100), "Repetitive avalanche energy."),
    _rating("t_SC", "time", (1e-7, 1), "Short-circuit withstand time, at V_SC.", kinds=INSULATED_GATE),
    _rating("V_SC", "voltage", _VOLTS, "Supply voltage that t_SC is stated at.", kinds=INSULATED_GATE),
)

_PAIRS = "table of a thermal model, or read off the transient thermal impedance chart"
_Z_TABLE = "thermal.Z_th_jc"

THERMAL_KEYS: tuple[Key, ...] = (
    Key(
        table="thermal",
        name="R_th_jc",
        dimension="thermal resistance",
        band=(1e-3, 1e3),
        meaning="Junction to case (mounting base); absent: (T_j - T_case)/P_tot.",
        where=_THERMAL,
    ),
    Key(
        table="thermal",
        name="R_th_ja",
        dimension="thermal resistance",
        band=(0.1, 5e3),
        meaning="Junction to ambient without a sink, mounted as `mounting` says.",
        where=_THERMAL,
    ),
    Key(
        table="thermal",
        name="mounting",
        form="text",
        meaning="How the device is mounted for R_th_ja.",
        where=f"notes to the {_THERMAL}",
    ),
    Key(
        table="thermal",
        name="Z_th_jc",
        form="table",
        meaning="Transient thermal impedance, in one of three forms: pulse and value, foster, or cauer.",
        where="transient thermal impedance chart, single-pulse line",
    ),
    Key(
        table=_Z_TABLE,
        name="pulse",
        form="points",
        columns=("time",),
        band=(1e-8, 1e4),
        meaning="Pulse widths of the single-pulse curve, rising.",
        where="transient thermal impedance chart, single-pulse line",
    ),
    Key(
        table=_Z_TABLE,
        name="value",
        form="points",
        columns=("thermal resistance",),
        band=(1e-6, 1e3),
        meaning="Z_th_jc at each pulse width.",
        where="transient thermal impedance chart, single-pulse line",
    ),
    Key(
        table=_Z_TABLE,
        name="foster",
        form="points",
        columns=("thermal resistance", "time"),
        meaning="Pairs of resistance and time constant, added one to another.",
        where=_PAIRS,
    ),
    Key(
        table=_Z_TABLE,
        name="cauer",
        form="points",
        columns=("thermal resistance", "heat capacity"),
        meaning="Pairs of resistance and heat capacity, from the junction outwards.",
        where=_PAIRS,
    ),
    Key(
        table=_Z_TABLE,
        name="grade",
        form="choice",
        choices=GRADES,
        default="guaranteed",
        meaning="What the maker says of the curve.",
        where="title of the chart",
    ),
)

MECHANICAL_KEYS: tuple[Key, ...] = (
    Key(
        table="mechanical",
        name="pinout",
        form="text",
        meaning='Order of the leads seen from the front, such as "B C E".',
        where="outline drawing",
    ),
    Key(
        table="mechanical",
        name="tab",
        form="choice",
        choices=("collector", "drain", "isolated"),
        meaning="What the tab or case is connected to.",
        where="outline drawing",
    ),
    Key(
        table="mechanical",
        name="hole",
        dimension="length",
        band=(1e-3, 0.05),
        grade="",
        meaning="Diameter of the mounting hole.",
        where="outline drawing",
    ),
    Key(
        table="mechanical",
        name="insulation_voltage",
        dimension="voltage",
        band=(50, 2e4),
        meaning="Test voltage between leads and tab of an isolated package.",
        where=_RATINGS,
    ),
)

KEYS: tuple[Key, ...] = (
    *DEVICE_KEYS,
    *MAX_KEYS,
    *THERMAL_KEYS,
    *SOA_KEYS,
    *TYPICAL_KEYS,
    *MECHANICAL_KEYS,
)
