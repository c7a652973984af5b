"""What a load kind is: the protocol that each module `soacheck/load/<kind>.py` meets (dashes become underscores)."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any, Protocol

from soacheck.duty import Duty, Fitted
from soacheck.table import Cells, Key


@dataclass(frozen=True, slots=True, kw_only=True)
class Surround:
    """What a kind's reader may need besides its own table."""

    folder: Path  # of the stage file, for files that it names
    device_kind: str  # to say V_DD for a MOSFET where a bipolar stage says V_CC


class LoadKind(Protocol):
    """Module-level names of a load kind."""

    KEYS: tuple[Key, ...]  # tables "load", "load.bias", ...

    def read(self, cells: Cells, surround: Surround) -> Any:
        """The kind's own frozen dataclass from its table; errors are reported through `cells.refuse`. Called twice:
        once at nominal values (spreads are collected), then over the cases."""
        ...

    def duties(self, load: Any, fitted: Fitted) -> tuple[Duty, ...]:
        """All duties of this load with this device, for the worst of the parallel devices."""
        ...

    def devices(self, load: Any, parallel: int) -> int:
        """How many devices the whole stage has (push-pull: 2 x pairs, bridged 4 x pairs)."""
        ...

    def sharing(self, load: Any, parallel: int) -> int:
        """How many devices share one current (push-pull: pairs)."""
        ...

    def halves(self, load: Any) -> int:
        """2 for a kind whose circuit has a complementary half, else 1."""
        ...

    def not_analysed(self, load: Any) -> tuple[str, ...]:
        """What this kind leaves out because the file does not state it, by name: "shorted output (no I_limit)"."""
        ...
