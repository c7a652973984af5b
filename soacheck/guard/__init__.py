"""Guards: checks for known mistakes of use, one module per family.

A guard adds a caution or lowers findings; it is never an input error. The tuple GUARDS is what `check` asks.
"""

from __future__ import annotations

from collections.abc import Callable

from soacheck.guard import chart, heat, signal
from soacheck.guard.seen import Raised, Seen

Guard = Callable[[Seen], tuple[Raised, ...]]

GUARDS: tuple[Guard, ...] = (
    heat.rth_mixed_up,
    heat.rth_ptot_disagree,
    heat.interface_missing,
    heat.shared_sink,
    chart.chart_cold,
    chart.chart_node,
    chart.pulse_between,
    chart.no_dc_curve,
    signal.class_b_worst,
    signal.pure_resistance,
    signal.limiter_left_out,
)

__all__ = ["GUARDS", "Guard", "Raised", "Seen"]
