"""Every test is deterministic: hypothesis derives its examples from the test itself, not from a clock or a seed."""

from __future__ import annotations

import os

from hypothesis import HealthCheck, settings

settings.register_profile(
    "soacheck", derandomize=True, deadline=None, database=None, suppress_health_check=[HealthCheck.too_slow]
)
settings.load_profile("soacheck")

for name in ("FORCE_COLOR", "GITHUB_ACTIONS", "PY_COLORS"):
    os.environ.pop(name, None)
os.environ.update(COLUMNS="80", NO_COLOR="1", TERM="dumb")
