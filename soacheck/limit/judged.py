"""What a limit is given: one duty of one device at its operating temperatures, and the rules in force."""

from __future__ import annotations

from dataclasses import dataclass

from soacheck.balance.operating import Operating
from soacheck.device.ratings import Device
from soacheck.duty import Duty, Fitted
from soacheck.limit.rules import Rules


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Judged:
    """Input of every limit: `find(judged) -> tuple[Finding, ...]` in each module of this room.

    cases: number of cases of the batch; every array of a finding has this length.
    """

    device: Device
    fitted: Fitted
    duty: Duty
    operating: Operating
    rules: Rules
    cases: int
