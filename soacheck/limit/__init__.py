"""Limits: one module per limit, data in, findings out.

A limit is a function from `Judged` to findings. The tuple LIMITS is what `check` asks, and NAMES what each is called.
"""

from __future__ import annotations

from collections.abc import Callable

from soacheck.limit import (
    current,
    dissipation,
    drive,
    junction_temperature,
    peak_current,
    safe_area,
    voltage,
)
from soacheck.limit.judged import Judged
from soacheck.result import Finding

Limit = Callable[[Judged], tuple[Finding, ...]]

_MODULES = (voltage, current, peak_current, dissipation, safe_area, junction_temperature, drive)

LIMITS: tuple[Limit, ...] = tuple(module.find for module in _MODULES)
NAMES: tuple[str, ...] = tuple(module.NAME for module in _MODULES)

__all__ = ["LIMITS", "NAMES", "Limit", "dissipation", "safe_area"]
