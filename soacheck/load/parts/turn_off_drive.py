"""How a base or gate is driven at turn-off: the conditions that a turn-off area is stated for."""

from __future__ import annotations

from dataclasses import dataclass

from soacheck.device.ratings import INSULATED_GATE
from soacheck.load.parts.family import BASE_DRIVEN
from soacheck.table import Cells, Key
from soacheck.trace import Traced

_WHERE = "the drive circuit"


def _reverse(name: str, belongs: frozenset[str], at: str) -> Key:
    return Key(
        table="load",
        name=name,
        dimension="voltage",
        band=(0.1, 100.0),
        belongs_to=belongs,
        role="reverse",
        grade="",
        meaning=f"Reverse voltage at the {at} while off: turn-off is then judged by the turn-off area.",
        where=_WHERE,
    )


KEYS: tuple[Key, ...] = (
    _reverse("V_BE_off", BASE_DRIVEN, "base"),
    _reverse("V_GS_off", INSULATED_GATE, "gate"),
    Key(
        table="load",
        name="I_B2",
        dimension="current",
        band=(1e-9, 1e3),
        belongs_to=BASE_DRIVEN,
        grade="",
        meaning="Reverse base current of each device at turn-off.",
        where=_WHERE,
    ),
    Key(
        table="load",
        name="R_G",
        dimension="resistance",
        sign="non-negative",
        band=(0.0, 1e6),
        belongs_to=INSULATED_GATE,
        grade="",
        meaning="Resistance that the gate is driven through: some turn-off areas hold only for so much of it.",
        where=_WHERE,
    ),
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TurnOffDrive:
    """Drive at turn-off as far as it is stated, magnitudes."""

    V_off: Traced | None = None  # reverse base-emitter or gate-source voltage [V]
    I_B2: Traced | None = None  # reverse base current [A]
    R_G: Traced | None = None  # [ohm]

    @property
    def reverse(self) -> bool:
        """Whether base or gate is driven in reverse."""
        return self.V_off is not None or self.I_B2 is not None


def read(cells: Cells) -> TurnOffDrive:
    """The drive of a `[load]` table; keys of another family of devices are the table's to refuse."""
    V_BE_off, V_GS_off, I_B2, R_G = (cells.quantity(key.name) for key in KEYS)
    return TurnOffDrive(V_off=V_BE_off or V_GS_off, I_B2=I_B2, R_G=R_G)
