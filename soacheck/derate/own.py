"""[derating]: the user's own factors. Published rules by document number come with a later version."""

from __future__ import annotations

from soacheck.limit.rules import Rules
from soacheck.table import Cells, Key
from soacheck.trace import Traced, given

_FACTOR = (0.05, 1.0)
_NOT_BUILT = (
    'published rules are not built in yet; write rules = "none" and your own factors: voltage, current, power, '
    "safe_area, T_j_max, T_j_below_max"
)
MARGINAL_PLAIN, MARGINAL_DERATED = 0.80, 1.00


def _factor(name: str, meaning: str) -> Key:
    return Key(
        table="derating",
        name=name,
        dimension="ratio",
        band=_FACTOR,
        grade="",
        meaning=meaning,
        where="the house rule or guideline that the stage is judged by",
    )


KEYS: tuple[Key, ...] = (
    Key(
        table="derating",
        name="rules",
        form="text",
        meaning="Published derating guideline by document number, or none.",
        where="the order or the design specification",
    ),
    _factor("voltage", "Share of the voltage rating that may be used."),
    _factor("current", "Share of the current ratings that may be used."),
    _factor("power", "Share of the dissipation allowance that may be used."),
    _factor("safe_area", "Share of the safe-area current that may be used."),
    Key(
        table="derating",
        name="T_j_max",
        dimension="temperature",
        band=(233.15, 773.15),
        sign="any",
        grade="",
        meaning="Own limit of the junction temperature.",
        where="the house rule",
    ),
    Key(
        table="derating",
        name="T_j_below_max",
        dimension="temperature difference",
        band=(0.0, 200.0),
        sign="non-negative",
        grade="",
        meaning="How far the junction has to stay below its rating.",
        where="the house rule",
    ),
    Key(
        table="derating",
        name="marginal_from",
        dimension="ratio",
        band=(0.05, 1.0),
        grade="",
        meaning="Share of an allowance from which a finding is marginal.",
        where="the house rule",
    ),
    Key(
        table="derating",
        name="pulse_between",
        form="choice",
        choices=("next-longer", "log-log"),
        default="next-longer",
        meaning="How pulse times between two printed curves are read.",
        where="the house rule",
    ),
    Key(
        table="derating",
        name="soa_duty_factor_max",
        dimension="ratio",
        band=(0.0, 1.0),
        grade="",
        meaning="Duty factor up to which published pulse curves hold.",
        where="note on the safe-area chart",
    ),
)


def read(cells: Cells) -> Rules:
    """The margins in force. Own factors switch `marginal_from` to 100 % unless it is stated."""
    rules = cells.text("rules")
    if rules not in (None, "none"):
        cells.refuse("rules", f"derating rules {rules!r} are not built in", _NOT_BUILT)

    def factor(name: str) -> Traced:
        stated = cells.quantity(name)
        return stated if stated is not None else given(name, 1.0, "1", "the rating itself")

    own = ("voltage", "current", "power", "safe_area", "T_j_max", "T_j_below_max")
    stated = any(cells.has(name) for name in own)
    marginal = cells.quantity("marginal_from")
    if marginal is None:
        value = MARGINAL_DERATED if stated else MARGINAL_PLAIN
        why = "own factors are stated" if stated else "common practice on plain ratings"
        marginal = given("marginal_from", value, "1", why)
    duty_factor = cells.quantity("soa_duty_factor_max")
    if duty_factor is None:
        duty_factor = given(
            "soa_duty_factor_max",
            0.10,
            "1",
            "makers publish second-breakdown pulse curves for duty factors to 10 %",
        )
    return Rules(
        voltage=factor("voltage"),
        current=factor("current"),
        power=factor("power"),
        safe_area=factor("safe_area"),
        T_j_max=cells.quantity("T_j_max"),
        T_j_below_max=cells.quantity("T_j_below_max"),
        marginal_from=marginal,
        pulse_between="log-log" if cells.text("pulse_between") == "log-log" else "next-longer",
        soa_duty_factor_max=duty_factor,
        name=rules or "none",
        stated=stated,
    )
