"""Guards about the signal and the load of a stage."""

from __future__ import annotations

import numpy as np

from soacheck.duty import Level
from soacheck.guard.seen import Raised, Seen
from soacheck.limit.judged import Judged
from soacheck.locus import Use
from soacheck.quantity import write

# Multiples of the resistive case at the same modulus of impedance (derivation: class-B stage on a sine, ideal swing;
# mean maximum 1/cos(phi) up to 50.46 degrees, then at full drive; peak 8 sin^3(30 deg + phi/3)).
ANGLES = ((45, 1.41421, 2.82843), (60, 1.90789, 3.59627))


def _at(seen: Seen, level: Level) -> Judged | None:
    return next((judged for judged in seen.judged if judged.duty.level == level), None)


def _mean(judged: Judged) -> float:
    return float(np.max(judged.operating.P_mean)) if judged.operating.locus is not None else float("nan")


def class_b_worst(seen: Seen) -> tuple[Raised, ...]:
    """class-b-worst: full power is not what heats a class-B stage most."""
    worst, full = _at(seen, "worst"), _at(seen, "full")
    if worst is None or full is None or not _mean(worst) > 1.005 * _mean(full):
        return ()
    locus = worst.operating.locus
    held = locus is not None and locus.use is Use.HELD
    where = "an output held at half of the rail" if held else "a sine of 2/pi of the rail"
    return (
        Raised(
            id="class-b-worst",
            text=(
                f"The greatest mean dissipation, {_mean(worst):.3g} W a device, is not at full level "
                f"({_mean(full):.3g} W): into a resistance and in class B it stands at {where}."
            ),
        ),
    )


def pure_resistance(seen: Seen) -> tuple[Raised, ...]:
    """pure-resistance: a loudspeaker or motor has a load angle."""
    levels: tuple[Level, ...] = ("worst", "stated")
    for level in levels:
        judged = _at(seen, level)
        angle = judged.duty.load_angle if judged is not None else None
        if judged is None or angle is None or bool(np.any(np.abs(angle.value) > 1e-9)):
            continue
        P_mean, P_peak = _mean(judged), float(np.max(judged.operating.P_peak))
        watts = level == "worst"
        said = "; ".join(
            f"{degrees} degrees mean x {mean:.3g}, peak x {peak:.3g}"
            + (f" ({mean * P_mean:.3g} W, {peak * P_peak:.3g} W a device)" if watts else "")
            for degrees, mean, peak in ANGLES
        )
        return (
            Raised(
                id="pure-resistance",
                text=(
                    "The load is taken as a pure resistance. A loudspeaker or motor of the same impedance at "
                    f"{said}, against the worst level of the resistance (class B)."
                ),
            ),
        )
    return ()


def limiter_left_out(seen: Seen) -> tuple[Raised, ...]:
    """limiter-left-out: levels that ask for more current than the limiter lets through into a short."""
    for judged in seen.judged:
        limiter = judged.duty.limiter
        if limiter is None or not bool(np.any(limiter.I_peak.value > limiter.I_limit.value)):
            continue
        asked, through = (write(float(one.value.max()), "current", 3) for one in (limiter.I_peak, limiter.I_limit))
        return (
            Raised(
                id="limiter-left-out",
                text=(
                    f"Levels are worked out without the limiter: they ask for up to {asked} from one half, and I_limit "
                    f"is {through}. A limiter that follows the output voltage may let them pass; one that does not "
                    "cuts them off, and of what it then does only the shorted output is worked out."
                ),
            ),
        )
    return ()
