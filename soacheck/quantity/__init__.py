"""Text to SI float and back; the unit table; the only importer of pint.

A quantity is a text "number unit". Nothing is evaluated: no arithmetic, no thousands separators, no NaN. A
temperature and a temperature difference are different kinds.
"""

from __future__ import annotations

from soacheck.quantity.pint_gate import as_pint
from soacheck.quantity.reading import Reading, read
from soacheck.quantity.refusal import a
from soacheck.quantity.units import DIMENSIONS, UNITS, Unit
from soacheck.quantity.writing import write

__all__ = ["DIMENSIONS", "UNITS", "Reading", "Unit", "a", "as_pint", "read", "write"]
