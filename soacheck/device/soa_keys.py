"""The keys of [[soa]] and [soa_derating], each declared once."""

from __future__ import annotations

from typing import Any

from soacheck.device.ratings import BIPOLAR, INSULATED_GATE
from soacheck.table import GRADES, Key

_CHART = "safe-operating-area chart"


def _chart(name: str, meaning: str, **more: Any) -> Key:
    return Key(table="soa", name=name, meaning=meaning, where=more.pop("where", _CHART), **more)


SOA_KEYS: tuple[Key, ...] = (
    Key(table="", name="soa", form="tables", meaning="One table per printed safe-area curve.", where=_CHART),
    _chart(
        "pulse",
        'Pulse width of the curve, or "dc".',
        dimension="time",
        band=(1e-8, 1e3),
        choices=("dc",),
        when_unknown='pulse = "dc", or pulse = "10 ms"; leave a curve out whose pulse is not known',
    ),
    _chart(
        "T_ref",
        "Temperature of `node` that the chart was drawn for.",
        dimension="temperature",
        band=(223.15, 523.15),
        sign="any",
        default="25 degC",
    ),
    _chart(
        "node",
        "Where T_ref is measured.",
        form="choice",
        choices=("case", "ambient"),
        default="case",
    ),
    _chart(
        "bias",
        "Forward: base or gate driven; reverse: turn-off area.",
        form="choice",
        choices=("forward", "reverse"),
        default="forward",
    ),
    _chart("single", "Drawn for single pulses, as when absent (false: repeated, with duty_factor).", form="flag"),
    _chart(
        "duty_factor",
        "Duty factor of a curve drawn for repeated pulses.",
        dimension="ratio",
        band=(1e-6, 1),
    ),
    _chart(
        "grade",
        "What the maker says of the curve.",
        form="choice",
        choices=GRADES,
        default="guaranteed",
    ),
    _chart(
        "reading",
        "How far below the points read off the chart to stay.",
        dimension="ratio",
        band=(0, 0.5),
        sign="non-negative",
        default="0 %",
    ),
    _chart(
        "points",
        "Corner points read off the log-log chart, voltage rising.",
        form="points",
        columns=("voltage", "current"),
        required=True,
    ),
    _chart(
        "V_BE_off",
        "Reverse base-emitter voltage that a turn-off area is drawn for.",
        dimension="voltage",
        band=(0, 50),
        sign="non-negative",
        belongs_to=BIPOLAR,
    ),
    _chart(
        "I_B2",
        "Reverse base current that a turn-off area is drawn for.",
        dimension="current",
        band=(1e-4, 1e3),
        belongs_to=BIPOLAR,
    ),
    _chart(
        "R_G",
        "Gate resistor that a turn-off area is drawn for.",
        dimension="resistance",
        band=(0, 1e5),
        sign="non-negative",
        belongs_to=INSULATED_GATE,
    ),
    _chart(
        "T_j_valid",
        "Junction temperature up to which a turn-off area holds.",
        dimension="temperature",
        band=(273.15, 673.15),
        sign="any",
    ),
    Key(
        table="soa_derating",
        name="convention",
        form="choice",
        choices=("like-dissipation", "own-curve", "held"),
        default="like-dissipation",
        meaning="How second breakdown falls with temperature: like dissipation, by its own line,"
        " or not at all (chart drawn for T_j at its maximum).",
        where=f"text beside the {_CHART}, or the power derating chart",
    ),
    Key(
        table="soa_derating",
        name="points",
        form="points",
        columns=("temperature", "ratio"),
        meaning="Temperature and factor of the second-breakdown line.",
        where="derating chart, the line named second breakdown",
    ),
)
