"""Thermal and safe-operating-area checker for power transistor stages.

    >>> import soacheck
    >>> result = soacheck.check_stage(soacheck.read_stage(Path("amplifier.toml")))

Names are loaded when they are first asked for: importing the package costs nothing.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from soacheck.check import check as check_stage
    from soacheck.device.path import find_device
    from soacheck.device.ratings import Device
    from soacheck.device.reader import read_device
    from soacheck.errors import InputError, OutputError, Problem, QuantityError, SoacheckError
    from soacheck.jobs.point import point as check_point
    from soacheck.quantity import as_pint
    from soacheck.quantity import read as read_quantity
    from soacheck.quantity import write as write_quantity
    from soacheck.result import DutyResult, Finding, Result, Status
    from soacheck.show.as_json import as_json
    from soacheck.show.figures import write_figures
    from soacheck.show.sheet import sheet
    from soacheck.show.terminal import terminal
    from soacheck.stage import Stage, read_stage
    from soacheck.trace import Traced

__version__ = "0.1.0"

# public name -> (module, name there). The function of check.py cannot be called `soacheck.check`: Python puts
# the module under that name as soon as anything imports it.
_HOMES = {
    "Device": ("soacheck.device.ratings", "Device"),
    "DutyResult": ("soacheck.result", "DutyResult"),
    "Finding": ("soacheck.result", "Finding"),
    "InputError": ("soacheck.errors", "InputError"),
    "OutputError": ("soacheck.errors", "OutputError"),
    "Problem": ("soacheck.errors", "Problem"),
    "QuantityError": ("soacheck.errors", "QuantityError"),
    "Result": ("soacheck.result", "Result"),
    "SoacheckError": ("soacheck.errors", "SoacheckError"),
    "Stage": ("soacheck.stage", "Stage"),
    "Status": ("soacheck.result", "Status"),
    "Traced": ("soacheck.trace", "Traced"),
    "as_pint": ("soacheck.quantity", "as_pint"),
    "read_quantity": ("soacheck.quantity", "read"),
    "write_quantity": ("soacheck.quantity", "write"),
    "as_json": ("soacheck.show.as_json", "as_json"),
    "check_point": ("soacheck.jobs.point", "point"),
    "check_stage": ("soacheck.check", "check"),
    "find_device": ("soacheck.device.path", "find_device"),
    "read_device": ("soacheck.device.reader", "read_device"),
    "read_stage": ("soacheck.stage", "read_stage"),
    "sheet": ("soacheck.show.sheet", "sheet"),
    "terminal": ("soacheck.show.terminal", "terminal"),
    "write_figures": ("soacheck.show.figures", "write_figures"),
}

__all__ = [
    "Device",
    "DutyResult",
    "Finding",
    "InputError",
    "OutputError",
    "Problem",
    "QuantityError",
    "Result",
    "SoacheckError",
    "Stage",
    "Status",
    "Traced",
    "__version__",
    "as_json",
    "as_pint",
    "check_point",
    "check_stage",
    "find_device",
    "read_device",
    "read_quantity",
    "read_stage",
    "sheet",
    "terminal",
    "write_figures",
    "write_quantity",
]


def __getattr__(name: str) -> object:
    try:
        module, attribute = _HOMES[name]
    except KeyError:
        raise AttributeError(f"module 'soacheck' has no attribute {name!r}") from None
    value: object = getattr(import_module(module), attribute)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})
