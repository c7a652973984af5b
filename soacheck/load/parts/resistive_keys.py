"""The keys of a `resistive` stage: tables `[load]` and `[load.bias]`."""

from __future__ import annotations

from soacheck.device.ratings import INSULATED_GATE, MOSFET
from soacheck.load.parts.family import BASE_DRIVEN, NAMED_AS_BIPOLAR
from soacheck.load.parts.turn_off_drive import KEYS as TURN_OFF
from soacheck.table import Key

_DIAGRAM = "the circuit diagram"
_NO_LOWER = "no resistor at the {0} ([load] {1} not stated): 0 ohm, the larger current"

_VOLTS, _OHMS, _AMPERES, _SECONDS = (0.1, 2e4), (1e-5, 1e8), (1e-9, 1e4), (1e-9, 100.0)


def _volts(
    name: str,
    belongs: frozenset[str] | None,
    role: str,
    meaning: str,
    *,
    where: str = _DIAGRAM,
    table: str = "load",
) -> Key:
    return Key(
        table=table,
        name=name,
        dimension="voltage",
        band=_VOLTS,
        belongs_to=belongs,
        role=role,
        grade="",
        meaning=meaning,
        where=where,
    )


def _amperes(name: str, belongs: frozenset[str] | None, role: str, meaning: str, *, where: str = _DIAGRAM) -> Key:
    return Key(
        table="load",
        name=name,
        dimension="current",
        band=_AMPERES,
        belongs_to=belongs,
        role=role,
        grade="",
        meaning=meaning,
        where=where,
    )


def _upper(name: str, belongs: frozenset[str], at: str) -> Key:
    return Key(
        table="load",
        name=name,
        dimension="resistance",
        sign="non-negative",
        band=(0.0, _OHMS[1]),
        belongs_to=belongs,
        grade="",
        role="upper",
        meaning=f"Load resistance between supply and {at}; 0 ohm where the load is the other resistor.",
        where="the circuit diagram or the load's label",
    )


def _lower(name: str, belongs: frozenset[str], at: str) -> Key:
    return Key(
        table="load",
        name=name,
        dimension="resistance",
        sign="non-negative",
        band=(0.0, _OHMS[1]),
        belongs_to=belongs,
        grade="",
        role="lower",
        default="0 ohm",
        assumption=_NO_LOWER.format(at, name),
        meaning=f"Resistor at the {at}; each device's own where several share the current.",
        where=_DIAGRAM,
    )


def _bias_ohms(name: str, belongs: frozenset[str] | None, meaning: str) -> Key:
    return Key(
        table="load.bias",
        name=name,
        dimension="resistance",
        band=_OHMS,
        belongs_to=belongs,
        grade="",
        meaning=meaning,
        where=_DIAGRAM,
    )


_QUIESCENT = "Whole current of the stage without a signal."

KEYS: tuple[Key, ...] = (
    Key(
        table="load",
        name="use",
        form="choice",
        choices=("held", "swing", "switched"),
        required=True,
        grade="",
        meaning='What the stage is asked to do: "held" at any point of its load line for ever, "swing" by a '
        'sine about its quiescent point, or be "switched" fully on and off.',
        where="the circuit's task",
    ),
    _volts(
        "V_CC",
        NAMED_AS_BIPOLAR,
        "supply",
        "Supply voltage.",
        where="the circuit diagram, or a measurement at high line",
    ),
    _volts(
        "V_DD",
        MOSFET,
        "supply",
        "Supply voltage.",
        where="the circuit diagram, or a measurement at high line",
    ),
    _upper("R_C", NAMED_AS_BIPOLAR, "collector"),
    _upper("R_D", MOSFET, "drain"),
    _lower("R_E", NAMED_AS_BIPOLAR, "emitter"),
    _lower("R_S", MOSFET, "source"),
    Key(
        table="load",
        name="R_ac",
        dimension="resistance",
        band=_OHMS,
        grade="",
        meaning="Whole resistance that an alternating current through the device meets, where a coupled load "
        "or a bypassed resistor makes it differ from the direct one; the swing runs on this line.",
        where="the circuit diagram: load in parallel with R_C, plus what is not bypassed below",
    ),
    _amperes(
        "I_CQ",
        NAMED_AS_BIPOLAR,
        "quiescent",
        _QUIESCENT,
        where="the circuit diagram, or a measurement without a signal",
    ),
    _amperes(
        "I_DQ",
        MOSFET,
        "quiescent",
        _QUIESCENT,
        where="the circuit diagram, or a measurement without a signal",
    ),
    Key(
        table="load",
        name="bias",
        form="table",
        grade="",
        meaning="The network that sets the quiescent point.",
        where=_DIAGRAM,
    ),
    _bias_ohms("R_1", None, "Divider resistor from the supply to base or gate."),
    _bias_ohms("R_2", None, "Divider resistor from base or gate to the common rail."),
    _bias_ohms("R_B", BASE_DRIVEN, "Base resistor, from the supply, or from V_BB where that is stated."),
    _volts("V_BB", BASE_DRIVEN, "bias", "Voltage of a separate base supply.", table="load.bias"),
    _volts(
        "V_GG",
        INSULATED_GATE,
        "bias",
        "Voltage of a separate gate supply, against the common rail.",
        table="load.bias",
    ),
    Key(
        table="load",
        name="f",
        dimension="frequency",
        band=(1e-3, 1e8),
        grade="",
        meaning='Frequency; absent with use = "swing" means slow: each point of it may be held for ever.',
        where="the circuit's task",
    ),
    Key(
        table="load",
        name="duty_factor",
        dimension="ratio",
        band=(1e-6, 1.0 - 1e-6),
        grade="",
        meaning="Share of the period from the start of turn-on to the start of turn-off.",
        where="the circuit's task",
    ),
    Key(
        table="load",
        name="t_r",
        dimension="time",
        band=_SECONDS,
        grade="",
        meaning="Time in which voltage and current change over at turn-on; absent: the device's.",
        where="a scope picture, or the data sheet at this current and drive",
    ),
    Key(
        table="load",
        name="t_f",
        dimension="time",
        band=_SECONDS,
        grade="",
        meaning="Time in which voltage and current change over at turn-off; absent: the device's.",
        where="a scope picture, or the data sheet at this current and drive",
    ),
    *TURN_OFF,
    _amperes("I_B", BASE_DRIVEN, "", "Base current of each device while on.", where="the drive circuit"),
    _volts("V_GS", INSULATED_GATE, "", "Gate-source (gate-emitter) voltage while on.", where="the drive circuit"),
)

# Which keys of [load] only some of the uses read.
ONLY_WITH: tuple[tuple[tuple[str, ...], tuple[str, ...]], ...] = (
    (("R_ac",), ("swing",)),
    (("f",), ("swing", "switched")),
    (("duty_factor", "t_r", "t_f", "V_BE_off", "V_GS_off", "I_B2", "I_B", "V_GS", "R_G"), ("switched",)),
    (("I_CQ", "I_DQ", "bias"), ("held", "swing")),
)
