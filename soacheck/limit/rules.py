"""The margins in force: plain ratings, or the user's own factors."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from soacheck.trace import Traced


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rules:
    """Factors on ratings (1 = the rating itself), each traced, shape (case,).

    T_j_max: own limit [K], None: the rating; T_j_below_max: distance from the rating [K], None: 0. The lower counts.
    marginal_from: share of the allowance from which a finding is marginal.
    """

    voltage: Traced
    current: Traced
    power: Traced
    safe_area: Traced
    T_j_max: Traced | None
    T_j_below_max: Traced | None
    marginal_from: Traced
    pulse_between: Literal["next-longer", "log-log"]
    soa_duty_factor_max: Traced
    name: str = "none"
    stated: bool = False  # rules or own factors are stated
