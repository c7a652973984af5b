"""The shipped examples: stages and the invented devices that they use."""

from __future__ import annotations

from pathlib import Path

from soacheck.device.path import shipped_devices

EXAMPLES = Path(__file__).resolve().parent.parent / "examples"


def examples() -> tuple[tuple[str, bytes], ...]:
    """(relative file name, content) of every example stage, and of every invented device under `devices/`."""
    stages = [(path.name, path.read_bytes()) for path in sorted(EXAMPLES.glob("*.toml"))]
    devices = [(f"devices/{path.name}", path.read_bytes()) for path in sorted(shipped_devices().glob("*.toml"))]
    return tuple(stages + devices)
