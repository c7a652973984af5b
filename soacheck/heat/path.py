"""The heat path of a stage as it stands in [heat_path] and [surroundings]."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

from soacheck.table import Cells, Key, Missing
from soacheck.trace import Traced, given

_INTERFACE_BUILT = 'not built yet: today an interface is stated by its resistance, interface = "0.4 K/W"'
_SINK_BUILT = (
    'not built yet: today a heat sink is stated as "1.6 K/W", { R_th = "1.6 K/W", C_th = "210 J/K" }, "ideal" or "none"'
)
_GEOMETRY = (
    "shape", "width", "height", "faces", "fin_height", "fin_thickness", "fins", "gap", "base_thickness", "material",
    "k", "finish", "emissivity", "velocity", "flow", "fan", "source",
)  # fmt: skip


_UNPROVEN = "leave the line out when it is not known; the findings that need it become unproven"
_MAKER = "the heat sink's data sheet, or a measurement"
_DRAWING = "the mechanical drawing"
_SPECIFICATION = "the equipment's specification"


def _key(dotted: str, meaning: str, where: str = "", **more: Any) -> Key:
    table, _, name = dotted.rpartition(".")
    return Key(table=table, name=name, meaning=meaning, where=where, grade="", **more)


def _kelvin_per_watt(dotted: str, meaning: str, where: str, low: float, high: float, **more: Any) -> Key:
    return _key(dotted, meaning, where, dimension="thermal resistance", band=(low, high), **more)


def _watts(dotted: str, meaning: str, where: str, assumption: str = "") -> Key:
    return _key(
        dotted, meaning, where,
        dimension="power", band=(0.0, 1e6), sign="non-negative", default="0 W", assumption=assumption,
    )  # fmt: skip


def _flag(dotted: str, meaning: str, default: str | None = None) -> Key:
    return _key(dotted, meaning, _DRAWING, form="flag", default=default)


def _not_built(dotted: str, meaning: str, words: str) -> Key:
    return _key(dotted, meaning, form="tree", not_built=words)


KEYS: tuple[Key, ...] = (
    _kelvin_per_watt(
        "heat_path.interface", "Thermal resistance between case and heat sink.",
        "the pad's or grease's data sheet, for the mounting force used; mounting drawing",
        0.0, 100.0, sign="non-negative", inside=True, when_unknown=_UNPROVEN,
    ),
    *(
        _not_built(f"heat_path.interface.{name}", "Interface worked out from its material.", _INTERFACE_BUILT)
        for name in ("material", "package", "k", "thickness", "area", "pressure", "torque")
    ),
    _kelvin_per_watt(
        "heat_path.heatsink",
        'Heat sink to air: resistance, { R_th, C_th }, "ideal" (at the temperature of the air) or "none".',
        _MAKER, 1e-3, 500.0, choices=("ideal", "none"), inside=True, when_unknown=_UNPROVEN,
    ),
    _kelvin_per_watt("heat_path.heatsink.R_th", "Heat sink to air.", _MAKER, 1e-3, 500.0),
    _key(
        "heat_path.heatsink.C_th",
        "Heat capacity of the heat sink; without it the sink stays at its mean temperature over a period.",
        "mass times specific heat: 0.9 J/K per gram of aluminium",
        dimension="heat capacity", band=(1e-2, 1e7),
    ),
    *(
        _not_built(f"heat_path.heatsink.{name}", "Heat sink worked out from its geometry.", _SINK_BUILT)
        for name in ("at_rise", *_GEOMETRY)
    ),
    _key("heat_path.shared_by", "Equal devices on this sink, this one included.", _DRAWING, form="count"),
    _flag("heat_path.separate_sinks", "Whether the stage's other devices have sinks of their own.", "false"),
    _watts(
        "heat_path.extra_heat", "Anything else that heats the sink.", _DRAWING,
        "nothing else heats the sink, 0 W (heat_path.extra_heat not stated)",
    ),
    _key(
        "heat_path.working_voltage", "Voltage across the insulator.", "the circuit diagram",
        dimension="voltage", band=(0.0, 1e5), sign="non-negative",
    ),
    _key(
        "heat_path.T_case", "Case temperature, held by something that the file does not describe.",
        "a measurement on the case, or what a cold plate holds", dimension="temperature", band=(198.15, 498.15),
    ),
    _not_built(
        "heat_path.cutout", "Thermal cut-out.", "not built yet: the check is made without a thermal cut-out"
    ),
    _not_built(
        "heat_path.neighbours", "Other devices on the sink, each with its heat.",
        "not built yet: today other heat on the sink is stated as extra_heat",
    ),
    _key(
        "surroundings.T_ambient", "Room air; without an enclosure the air at the sink.", _SPECIFICATION,
        dimension="temperature", band=(198.15, 498.15), when_unknown=_UNPROVEN,
    ),
    _key(
        "surroundings.altitude", "Height above sea level.", _SPECIFICATION,
        dimension="length", band=(-500.0, 20e3), sign="any", default="0 m",
        when_unknown="leave the line out; the figures then hold at sea level, and the report says so",
        assumption="the equipment stands at sea level, 0 m (surroundings.altitude not stated)",
    ),
    _kelvin_per_watt(
        "surroundings.R_th_enclosure", "Rise of the air inside a closed box per watt released in it.",
        "a measurement on the closed box", 0.0, 100.0, sign="non-negative", default="0 K/W",
        assumption="the air at the sink is room air, 0 K/W (surroundings.R_th_enclosure not stated)",
    ),
    _watts(
        "surroundings.extra_box_heat", "Heat released in the box by anything that is not on the sink.",
        "the equipment's power budget",
    ),
    _flag("surroundings.sink_outside", "Whether the sink stands in room air, outside the box.", "false"),
    _flag("surroundings.touchable", "Whether somebody can touch the sink in use."),
    _not_built(
        "surroundings.touch_limit", "Highest temperature of a part that is touched.",
        "not built yet: touch temperatures are not checked",
    ),
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class HeatPath:
    """interface [K/W]; sink: how the sink is stated; R_th_sink, C_th_sink its figures; T_ambient [K] room
    air.

    missing: what the temperatures lack (surroundings.T_ambient, heat_path.heatsink, heat_path.interface).
    shared_by: None when absent (then every device of the stage).
    T_case: held by what the file does not describe; sink is then "case".
    unused: sentences about what is stated and plays no part (an interface where there is no sink).
    """

    interface: Traced | None
    sink: Literal["resistance", "ideal", "none", "case", "absent"]
    R_th_sink: Traced | None = None
    C_th_sink: Traced | None = None
    shared_by: int | None = None
    separate_sinks: bool = False
    extra_heat: Traced
    extra_box_heat: Traced
    T_ambient: Traced | None
    T_case: Traced | None = None
    R_th_enclosure: Traced
    sink_outside: bool = False
    working_voltage: Traced | None = None
    missing: tuple[Missing, ...] = ()
    unused: tuple[str, ...] = ()


def read(heat_path: Cells, surroundings: Cells) -> HeatPath:
    """The heat path. What is wrong is reported through the cells, what is absent stands in `missing`."""
    _refuse_unbuilt(surroundings)
    if heat_path.has("T_case"):
        return _held_case(heat_path, surroundings)
    sink, R_th_sink, C_th_sink = _sink(heat_path)
    interface = heat_path.quantity("interface")
    wanted = [(surroundings, "T_ambient"), (heat_path, "heatsink")]
    if sink != "none":
        wanted.append((heat_path, "interface"))
    R_th_enclosure, outside = _with_default(surroundings, "R_th_enclosure"), bool(surroundings.flag("sink_outside"))
    if sink == "none" and outside:
        surroundings.refuse(
            "sink_outside", 'with heatsink = "none" there is no sink to stand outside', "leave sink_outside out"
        )
    boxed = bool((R_th_enclosure.value > 0).any()) and not outside
    return HeatPath(
        interface=None if interface is None else interface.named("R_th_cs"),
        sink=sink,
        R_th_sink=R_th_sink,
        C_th_sink=C_th_sink,
        shared_by=heat_path.count("shared_by"),
        separate_sinks=bool(heat_path.flag("separate_sinks")),
        extra_heat=_with_default(heat_path, "extra_heat"),
        extra_box_heat=_with_default(surroundings, "extra_box_heat"),
        T_ambient=surroundings.quantity("T_ambient"),
        R_th_enclosure=R_th_enclosure,
        sink_outside=outside,
        working_voltage=heat_path.quantity("working_voltage"),
        missing=tuple(cells.missing(name) for cells, name in wanted if not cells.has(name)),
        unused=_unused(heat_path, surroundings, sink, boxed=boxed, outside=outside),
    )


def _unused(heat_path: Cells, surroundings: Cells, sink: str, *, boxed: bool, outside: bool) -> tuple[str, ...]:
    """What is stated and plays no part, with the reason. boxed: the air at the sink is warmer than the room's."""
    idle: list[tuple[Cells, tuple[str, ...], str]] = []
    of_box = () if boxed else ("extra_heat",)  # in a box it warms the air
    if sink == "none":
        names = ("interface", "shared_by", "separate_sinks", "working_voltage", *of_box)
        idle.append((heat_path, names, 'with heatsink = "none" the case gives its heat to the air by R_th_ja'))
    if sink == "ideal":
        names = ("shared_by", "separate_sinks", *of_box)
        idle.append((heat_path, names, 'with heatsink = "ideal" the sink stays at the temperature of the air'))
    if outside:
        idle.append((surroundings, ("R_th_enclosure", "extra_box_heat"), "the sink stands in room air (sink_outside)"))
    elif not boxed:
        idle.append((surroundings, ("extra_box_heat",), "no R_th_enclosure above 0 K/W is stated"))
    return tuple(
        f"{cells.path}.{name} plays no part: {why}" for cells, names, why in idle for name in names if cells.has(name)
    )


def _held_case(heat_path: Cells, surroundings: Cells) -> HeatPath:
    """A case whose temperature is stated: nothing behind it counts, and temperatures count from it unless the room's
    is stated too."""
    for cells, names in (
        (heat_path, ("interface", "heatsink", "shared_by", "separate_sinks", "extra_heat")),
        (surroundings, ("R_th_enclosure", "extra_box_heat", "sink_outside")),
    ):
        for name in names:
            if cells.has(name):
                cells.refuse(
                    name,
                    "heat_path.T_case is stated, which takes the place of what is behind the case",
                    f"T_case or {name}, not both",
                )
    T_case = heat_path.quantity("T_case")
    T_ambient = surroundings.quantity("T_ambient") if surroundings.has("T_ambient") else T_case
    return HeatPath(
        interface=None,
        sink="case",
        T_case=T_case,
        extra_heat=given("extra_heat", 0.0, "W", "the case temperature is stated"),
        extra_box_heat=given("extra_box_heat", 0.0, "W", "the case temperature is stated"),
        T_ambient=None if T_ambient is None else T_ambient.named("T_ambient"),
        R_th_enclosure=given("R_th_enclosure", 0.0, "K/W", "the case temperature is stated"),
        working_voltage=heat_path.quantity("working_voltage"),
    )


def _sink(
    heat_path: Cells,
) -> tuple[Literal["resistance", "ideal", "none", "absent"], Traced | None, Traced | None]:
    """How the sink is stated, its resistance and its heat capacity."""
    if not heat_path.has("heatsink"):
        return "absent", None, None
    match heat_path.text("heatsink"):
        case "ideal":
            return "ideal", None, None
        case "none":
            return "none", None, None
    own = heat_path.inside("heatsink")
    if own is None:
        R = heat_path.quantity("heatsink")
        return "resistance", None if R is None else R.named("R_th_sa"), None
    if not own.has("R_th") and not any(own.has(name) for name in (*_GEOMETRY, "at_rise")):
        heat_path.refuse(
            "heatsink",
            "the heat sink's resistance is wanted here",
            'heatsink = { R_th = "1.6 K/W" }',
        )
    R, C = own.quantity("R_th"), own.quantity("C_th")
    return (
        "resistance",
        None if R is None else R.named("R_th_sa"),
        None if C is None else C.named("C_th_sink"),
    )


def _refuse_unbuilt(surroundings: Cells) -> None:
    altitude = surroundings.quantity("altitude")
    if altitude is not None and bool((altitude.value != 0).any()):
        surroundings.refuse(
            "altitude",
            "not built yet: thinner air cools less, and by how much is not worked out here",
            "state the sink's R_th at that altitude yourself in heatsink, and leave altitude out",
        )
    if surroundings.flag("touchable"):
        surroundings.refuse(
            "touchable",
            "not built yet: touch temperatures are not checked",
            "touchable = false, or leave it out",
        )


def _with_default(cells: Cells, name: str) -> Traced:
    """A value with a default in its declaration; where the file's was refused, what the default says stands
    in."""
    value = cells.quantity(name)
    return given(name, 0.0, "", f"{name} was refused, the file's errors say why") if value is None else value
