"""Names and numbers as the pictures write them. Formula markup ($...$) stands in our own fixed texts only."""

from __future__ import annotations

import math

from soacheck.device.ratings import BIPOLAR, MOSFET
from soacheck.show.text import ZERO_CELSIUS, number, quantity

_PREFIXES = ((1e-9, "n"), (1e-6, "µ"), (1e-3, "m"), (1.0, ""))
_KILO_FROM = 1e4  # below, a label beside the axis reads better in watts


def amount(value: float, unit: str) -> str:
    """A value with its unit, three digits."""
    return quantity(value, unit, 3).replace(" u", " µ") if math.isfinite(value) else "not known"


def on_axis(value: float, factor: float, sign: str, unit: str) -> str:
    """A value in the unit of the axis it stands at, three digits: at an axis in kW, 850 W is "0.85 kW"."""
    return f"{number(value / factor, 3)} {sign}{unit}" if math.isfinite(value) else "not known"


def celsius(kelvin: float) -> str:
    """A temperature in whole degrees: "89 °C"."""
    return f"{round(kelvin - ZERO_CELSIUS):d} °C" if math.isfinite(kelvin) else "not known"


def prefix(largest: float) -> tuple[float, str]:
    """Factor and prefix for an axis that ends at `largest`: 0.003 -> (1e-3, "m")."""
    size = abs(largest)
    if not math.isfinite(size) or size == 0:
        return 1.0, ""
    if size >= _KILO_FROM:
        return 1e3, "k"
    return [entry for entry in _PREFIXES if 0.3 * entry[0] <= max(size, 1e-9)][-1]


def voltage_axis(kind: str) -> str:
    """Name of the voltage across the device."""
    symbol = " $V_{DS}$" if kind in MOSFET else " $V_{CE}$" if kind else ""
    return f"voltage across the device{symbol} (V)"


def current_axis(kind: str, sign: str = "") -> str:
    """Name of the current through the device; `sign` is the prefix of the ampere."""
    symbol = " $I_D$" if kind in MOSFET else " $I_C$" if kind else ""
    return f"current through the device{symbol} ({sign}A)"


def voltage_rating(kind: str) -> str:
    """Symbol of the greatest voltage."""
    if kind in MOSFET:
        return "$V_{DSS}$"
    return "$V_{CEO}$" if kind in BIPOLAR else "$V_{CES}$" if kind else "$V_{max}$"


def current_rating(kind: str) -> str:
    """Symbol of the continuous current."""
    return "$I_D$" if kind in MOSFET else "$I_C$" if kind else "$I_{max}$"


def peak_rating(kind: str) -> str:
    """Symbol of the peak current."""
    return "$I_{DM}$" if kind in MOSFET else "$I_{CM}$" if kind else "$I_{peak}$"
