"""The shipped examples: stages and the invented devices that they use."""

from __future__ import annotations

from pathlib import Path

from soacheck.device.path import shipped_devices

MAIN = "greenhouse-vent.toml"  # comes first: the one to start from
EXAMPLES = Path(__file__).resolve().parent.parent / "examples"


def _order(path: Path) -> tuple[bool, str]:
    return path.name != MAIN, path.name


def examples() -> tuple[tuple[str, bytes], ...]:
    """(relative file name, content) of every example stage, and of every invented device under `devices/`."""
    stages = [(path.name, path.read_bytes()) for path in sorted(EXAMPLES.glob("*.toml"), key=_order)]
    devices = [(f"devices/{path.name}", path.read_bytes()) for path in sorted(shipped_devices().glob("*.toml"))]
    return tuple(stages + devices)
