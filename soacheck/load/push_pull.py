"""Load kind `push-pull`: a complementary output stage, class B or AB, on two rails.

Level and frequency are searched as the file asks for. The load current is sinusoidal at any angle of the
load; the current of each half follows from the exact crossover of two exponential devices with emitter
resistors (MOSFETs and IGBTs: of two square-law devices, which errs to more current). `level = "any"` is every
level from silence to the largest unclipped swing; `"clipped"` is a sine driven 20 dB into the rails, flat for
94 % of the time, with the load's answer to it. With f absent every output voltage of either sign may be held
for ever, also the ones at which the other half carries the load.
"""

from __future__ import annotations

from typing import Literal

import numpy as np

from soacheck.device.ratings import BIPOLAR, IGBT, MOSFET
from soacheck.duty import Duty, Fitted
from soacheck.load.kind import Surround
from soacheck.load.parts.class_b import largest_swing
from soacheck.load.parts.impedance import Element, Impedance, is_resistance, read_impedance, tables
from soacheck.load.parts.push_pull_duties import every_duty
from soacheck.load.parts.push_pull_stage import PushPull, column
from soacheck.table import Cells, Key
from soacheck.trace import Traced, given

_CIRCUIT = "the circuit diagram"


def _resistor(name: str, of: frozenset[str], word: str) -> Key:
    return Key(
        table="load",
        name=name,
        dimension="resistance",
        band=(0.0, 100.0),
        sign="non-negative",
        belongs_to=of,
        role="R_E",
        default="0 ohm",
        assumption=f"no {word} resistors ({name} not stated)",
        grade="",
        meaning=f"{word.capitalize()} resistor of each device.",
        where=_CIRCUIT,
    )


KEYS: tuple[Key, ...] = (
    Key(
        table="load",
        name="V_rail",
        dimension="voltage",
        band=(0.5, 5000.0),
        required=True,
        grade="",
        meaning="Each of the two equal rails, highest mains and no load where that is possible.",
        where="the power supply: transformer, mains tolerance, regulation",
    ),
    Key(
        table="load",
        name="load",
        form="tree",
        required=True,
        grade="",
        meaning='"8 ohm", { R = "6 ohm", L = "1.2 mH" }, nested series and parallel, or { table = "z.csv" }.',
        where="the loudspeaker's, motor's or transformer's impedance curve",
    ),
    Key(
        table="load",
        name="f",
        dimension="frequency",
        band=(1e-3, 1e7),
        lists=2,
        grade="",
        meaning="Frequency, or a range that is always searched; absent: any output may be held for ever.",
        where="the signal that the stage is for",
    ),
    Key(
        table="load",
        name="level",
        form="tree",
        required=True,
        grade="",
        meaning='"any", "clipped", a peak voltage at the load, or a percentage of the largest swing.',
        where="the signal that the stage is for",
    ),
    Key(
        table="load",
        name="I_Q",
        dimension="current",
        band=(0.0, 100.0),
        sign="non-negative",
        default="0 A",
        assumption="no idle current: ideal class B (I_Q not stated); state I_Q: an idle current adds its watts",
        grade="",
        meaning="Idle current of each device.",
        where="the bias adjustment: voltage over an emitter or source resistor",
    ),
    _resistor("R_E", BIPOLAR | IGBT, "emitter"),
    _resistor("R_S", MOSFET, "source"),
    Key(
        table="load",
        name="pairs",
        form="count",
        default="1",
        assumption="one pair of devices (pairs not stated)",
        meaning="Devices in parallel in each half of each amplifier.",
        where=_CIRCUIT,
    ),
    Key(
        table="load",
        name="bridged",
        form="flag",
        meaning="true: two amplifiers in opposite phase on one load.",
        where=_CIRCUIT,
    ),
    Key(
        table="load",
        name="V_sat",
        dimension="voltage",
        band=(0.0, 1000.0),
        sign="non-negative",
        default="0 V",
        assumption="the output swings to the rails but for its resistors (V_sat not stated)",
        grade="",
        meaning="Voltage from rail to output that a half needs at its peak, resistors not counted.",
        where="the clipping level measured, or driver and device saturation added up",
    ),
    Key(
        table="load",
        name="I_limit",
        dimension="current",
        band=(1e-3, 1e4),
        grade="",
        meaning="Current of one half, all its devices together, into a shorted output.",
        where="the current limiter: sense resistor and its transistor's V_BE",
    ),
    Key(
        table="load",
        name="fault_time",
        dimension="time",
        band=(1e-6, 1e6),
        grade="",
        meaning="How long a short lasts until fuse or protection ends it; absent: for ever.",
        where="the fuse's curve or the protection's delay",
    ),
    Key(
        table="load",
        name="dc_protected",
        form="flag",
        meaning="true: a protection ends a dc offset at the output before it counts.",
        where=_CIRCUIT,
    ),
)


def read(cells: Cells, surround: Surround) -> PushPull:
    """The stage of a `[load]` table; what is wrong is reported through `cells`."""
    load = read_impedance(cells, "load", surround.folder) if cells.has("load") else None
    level, level_value = _level(cells)
    R_name = "R_S" if surround.device_kind in MOSFET else "R_E"
    stage = PushPull(
        V_rail=_or_nought(cells.quantity("V_rail"), 1.0),
        load=load or Element(kind="R", value=_nothing(1.0)),
        level=level,
        level_value=level_value,
        f=cells.span("f"),
        I_Q=_or_nought(cells.quantity("I_Q")),
        I_Q_stated=cells.has("I_Q"),
        R_E=_or_nought(cells.quantity(R_name)),
        R_name=R_name,
        pairs=cells.count("pairs") or 1,
        bridged=bool(cells.flag("bridged")),
        V_sat=_or_nought(cells.quantity("V_sat")),
        I_limit=cells.quantity("I_limit"),
        fault_time=cells.quantity("fault_time"),
        dc_protected=bool(cells.flag("dc_protected")),
    )
    _refuse_excess_current(cells, stage)
    if load is not None:
        _check_frequency(cells, stage, load)
    if stage.fault_time is not None and not cells.has("I_limit"):
        cells.refuse(
            "fault_time",
            "a short is only worked out with its current",
            'I_limit = "6 A", or leave fault_time out',
        )
    if stage.dc_protected and not cells.has("f"):
        cells.refuse(
            "dc_protected",
            "with f absent the output is held for ever, which a protection would end",
            "state f, or leave dc_protected out",
        )
    return stage


def _refuse_excess_current(cells: Cells, stage: PushPull) -> None:
    """Stated currents that the rail cannot drive through the emitter or source resistors, at any stated value."""
    room = stage.V_rail.value - stage.V_sat.value
    if cells.quantity("V_rail") is None or bool(np.any(room <= 0)):  # refused elsewhere
        return
    R = stage.R_E.value
    for name, current, ohms in (("I_Q", stage.I_Q, R), ("I_limit", stage.I_limit, R / stage.pairs)):
        with np.errstate(divide="ignore"):
            most = room / ohms
        if current is not None and bool(np.any(current.value >= most)):
            problem = f"V_rail drives less than {float(np.min(most)):.4g} A through {stage.R_name}"
            cells.refuse(name, problem, f"a smaller {name}, or the right {stage.R_name}")


def _nothing(value: float) -> Traced:
    return given("not stated", value, "", "reported as an error")


def _or_nought(value: Traced | None, instead: float = 0.0) -> Traced:
    """A stand-in for a value that has been reported as wrong, so that the rest can still be read."""
    return value if value is not None else _nothing(instead)


def _level(cells: Cells) -> tuple[Literal["any", "clipped", "voltage", "ratio"], Traced | None]:
    if not cells.has("level"):
        return "any", None
    raw = cells.raw("level")
    text = raw.get("value") if isinstance(raw, dict) else raw
    word = text.strip() if isinstance(text, str) else ""
    if word in ("any", "clipped") and isinstance(raw, str):
        return ("any" if word == "any" else "clipped"), None
    forms = 'level = "any", "clipped", "20 V" (peak at the load) or "60 %" (of the largest unclipped swing)'
    if not word or not word[0].isdigit():
        cells.refuse("level", "the level is a word, a peak voltage or a percentage", forms)
        return "any", None
    if word.endswith("%"):
        ratio = cells.tree_quantity(f"{cells.path}.level", raw, "ratio", (0.0, 10.0))
        if ratio is not None and not bool(np.all((ratio.value > 0) & (ratio.value <= 1))):
            cells.refuse("level", "the largest unclipped swing is 100 %, silence 0 %", 'level = "60 %", or "clipped"')
        return "ratio", ratio
    return "voltage", cells.tree_quantity(f"{cells.path}.level", raw, "voltage", (1e-3, 5000.0))


def _check_frequency(cells: Cells, stage: PushPull, load: Impedance) -> None:
    """What depends on the load, the frequency and the swing together."""
    if stage.f is None:
        if not cells.has("f") and cells.raw("level") == "clipped":
            cells.refuse("level", "a clipped signal passes every output voltage and needs its frequency", 'f = "1 kHz"')
        if not cells.has("f") and not is_resistance(load):
            cells.refuse(
                "load",
                "a load with reactance needs a frequency",
                'f = "1 kHz", or a range: f = ["20 Hz", "20 kHz"]',
            )
            return
        ends = None
    else:
        low, high = column(stage.f[0]), column(stage.f[1])
        for table in tables(load):
            if bool(np.any(low < table.f[0])) or bool(np.any(high > table.f[-1])):
                cells.refuse(
                    "f",
                    f"the table {table.file} covers {table.f[0]:g} Hz to {table.f[-1]:g} Hz only",
                    f'f = ["{table.f[0]:g} Hz", "{table.f[-1]:g} Hz"], or a table that covers the range',
                )
                return
        if stage.level == "clipped" and any(tables(load)):
            cells.refuse(
                "level",
                "a clipped sine needs the load's impedance at its harmonics, a table ends too early",
                "write the load with R, L and C",
            )
            return
        ends = low * (high / low) ** np.linspace(0, 1, 241)
    Z = stage.Z_at(ends if ends is not None else np.ones((1, 1)))
    if not bool(np.all(np.isfinite(Z) & (np.abs(Z) > 1e-4))):
        cells.refuse("load", "the load resonates without losses at a frequency of the range", "add its resistance")
        return
    _check_swing(cells, stage, np.abs(Z), np.angle(Z))


def _check_swing(cells: Cells, stage: PushPull, Z_mod: np.ndarray, phi: np.ndarray) -> None:
    if cells.quantity("V_rail") is None:  # reported already; there is nothing to measure a swing by
        return
    V_rail, V_sat = column(stage.V_rail), column(stage.V_sat)
    if bool(np.any(V_sat >= V_rail)):
        cells.refuse("V_sat", "nothing of the rail is left for the output", "a V_sat well below V_rail")
        return
    V_max = stage.amplifiers * largest_swing(V_rail, V_sat, column(stage.R_E) / stage.pairs, Z_mod, phi)
    least = float(np.min(V_max))
    # In a corner of the uncertainties the output swings as far as it can; nominally it must reach its level.
    if stage.level == "voltage" and stage.level_value is not None and stage.level_value.value.size == 1:
        wanted = float(stage.level_value.value[0])
        if V_max.shape[0] == 1 and wanted > least * (1 + 1e-9):
            cells.refuse(
                "level",
                f"the output clips at {least:.6g} V peak",
                f'level = "{least:.4g} V" at most, or "clipped"',
            )


def duties(load: PushPull, fitted: Fitted) -> tuple[Duty, ...]:
    """idle; worst-level, full-level and any-level, or at-level; shorted-output with I_limit."""
    return every_duty(load, fitted)


def devices(load: PushPull, parallel: int) -> int:
    """Devices of the whole stage."""
    return 2 * load.pairs * load.amplifiers


def sharing(load: PushPull, parallel: int) -> int:
    """Devices that share the current of one half."""
    return load.pairs


def halves(load: PushPull) -> int:
    """An upper and a lower half."""
    return 2


def not_analysed(load: PushPull) -> tuple[str, ...]:
    """What the file leaves open, by name."""
    left = []
    if not load.I_Q_stated:
        left.append("idle at a bias current (I_Q not stated, taken as 0)")
    if load.I_limit is None:
        left.append("shorted output (no I_limit)")
    if load.f is not None and not load.dc_protected:
        left.append("dc at the output (no dc protection stated)")
    if load.f is not None and load.level != "clipped":
        left.append('an output driven into clipping (level is not "clipped")')
    return tuple(left)
