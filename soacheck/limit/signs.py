"""Signs of v and i that no transistor can show: what is judged along such a locus proves nothing.

Rule: a transistor turns power into heat, so v and i never have opposite signs. A bipolar transistor conducts forwards
only, an IGBT backwards only where the rating I_S of its diode is stated. Backwards a body diode clamps the voltage: 3 V
is more than one drops (common practice). Currents up to the leakage are noise, whichever way they point.
Source: common practice; a reversed probe, a channel skew, or a P-type part whose values were not written as magnitudes
look like this.
"""

from __future__ import annotations

import numpy as np

from soacheck.device.laws import leakage_bound
from soacheck.device.ratings import Device
from soacheck.limit import body_diode, voltage
from soacheck.locus import Locus
from soacheck.result import Reason
from soacheck.table import Missing
from soacheck.trace import BoolArray

DELIVERED = 1e-9  # of the peak power: more than rounding
DIODE_DROP = 3.0  # [V] more than a body diode drops, common practice
SIGN = voltage.SIGN

_CHECK = "Check the sign of both; values of P-type devices are magnitudes."
DELIVERS = f"Voltage and current have opposite signs: the device would deliver power. {_CHECK}"
CLAMPED = (
    f"The voltage goes more than {DIODE_DROP:.3g} V negative; a body diode drops less (common practice), and no rating "
    f"covers a device without one. {_CHECK}"
)
BACKWARDS = f"Current flows out of the collector; no rating of a bipolar transistor covers that. {_CHECK}"
NO_DIODE = f"Current flows out of the collector; an IGBT has a diode for that only where I_S is stated. {_CHECK}"


def wrong_signs(device: Device, locus: Locus) -> tuple[Reason, ...]:
    """What the signs of a locus say against it, each with the cases (1 or case,) it is true of."""
    v, i, p = (np.broadcast_to(a, locus.shape) for a in (locus.v, locus.i, locus.p))
    leakage = leakage_bound(device).value[:, None, None]
    peak = np.fmax.reduce(np.abs(p), axis=2, keepdims=True)  # a point that is not a number hides nothing
    negative = v < -DIODE_DROP
    said: list[tuple[str, BoolArray, tuple[Missing, ...]]] = [(DELIVERS, p < -DELIVERED * peak, (SIGN,))]
    if device.bipolar:
        said += [(BACKWARDS, i < -leakage, (SIGN,)), (voltage.REVERSED, negative, (SIGN,))]
    else:
        said.append((CLAMPED, negative, (SIGN,)))
    if device.igbt and device.max.I_S is None:
        said.append((NO_DIODE, i < -leakage, (SIGN, body_diode.MISSING)))
    reasons = (Reason(text=text, applies=np.any(holds, axis=(1, 2)), missing=lacks) for text, holds, lacks in said)
    return tuple(reason for reason in reasons if bool(np.any(reason.applies)))
