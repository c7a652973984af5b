"""Load kind `resistive`: one device, or several in parallel, between a supply and a resistance.

The load line v = V_CC - i (R_C + R_E) is held anywhere, swung along by a sine, or switched from end to end.
"""

from __future__ import annotations

from soacheck.load.parts.resistive_duties import duties
from soacheck.load.parts.resistive_keys import KEYS
from soacheck.load.parts.resistive_stage import Resistive, read

__all__ = ["KEYS", "devices", "duties", "halves", "not_analysed", "read", "sharing"]


def devices(load: Resistive, parallel: int) -> int:
    """All devices of the stage."""
    return parallel


def sharing(load: Resistive, parallel: int) -> int:
    """Devices that share the current."""
    return parallel


def halves(load: Resistive) -> int:
    """The stage has no other half."""
    return 1


def not_analysed(load: Resistive) -> tuple[str, ...]:
    """What the file does not state enough for, by name."""
    if load.use == "held" and load.bias is None:
        return (f"idle (no bias: neither [load] {load.family.quiescent} nor [load.bias] is stated)",)
    return ()
