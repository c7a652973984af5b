"""drive: ratings of base and gate, and whether saturation or the on-state is reached."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from soacheck.device.ratings import Device, Triple, Typical
from soacheck.duty import Drive
from soacheck.limit import drive
from soacheck.result import Finding, Status
from tests.limit.build import device, held, judged, only, said, status, value

NPN = device(
    V_EBO=value("V_EBO", 7, "V"),
    I_B=value("I_B", 1.5, "A"),
    typical=Typical(
        h_FE=Triple(min=value("h_FE", 20), typ=value("h_FE", 50), max=value("h_FE", 90)),
        h_FE_I_C=value("h_FE_I_C", 8, "A"),
    ),
)
FET = device("n-mosfet", V_GSS=value("V_GSS", 20, "V"), typical=Typical(R_DS_on_V_GS=value("R_DS_on_V_GS", 10, "V")))


def ask(part: Device, **given: Any) -> tuple[Finding, ...]:
    return drive.find(judged(held(1, 1), part, drive=Drive(**given)))


def test_nothing_is_judged_where_no_drive_is_stated() -> None:
    assert drive.find(judged(held(1, 1), NPN)) == ()
    assert ask(NPN) == ()


def test_reverse_base_voltage_has_a_rating() -> None:
    finding = only(ask(NPN, V_off=value("V_BE_off", 5, "V")))
    assert finding.utilisation[0] == pytest.approx(5 / 7)
    unknown = only(ask(device(), V_off=value("V_BE_off", 5, "V")))
    assert status(unknown) is Status.UNPROVEN
    assert unknown.missing(0) == ("max.V_EBO",)


def test_gate_voltage_of_either_sign_has_a_rating() -> None:
    off, on = ask(FET, V_off=value("V_GS_off", 15, "V"), V_on=value("V_GS", 21, "V"))
    assert status(off) is Status.WITHIN
    assert status(on) is Status.EXCEEDS
    assert on.allowed is not None
    assert on.allowed.formula == "k_V * V_GSS"


def test_saturation_needs_the_least_gain() -> None:
    base, saturated = ask(NPN, I_B=value("I_B", 0.4, "A"), I_on=value("I_on", 6, "A"), saturates=True)
    assert base.utilisation[0] == pytest.approx(0.4 / 1.5)
    assert saturated.utilisation[0] == pytest.approx(6 / (20 * 0.4))
    assert status(saturated) is Status.WITHIN
    _, short = ask(NPN, I_B=value("I_B", 0.25, "A"), I_on=value("I_on", 6, "A"), saturates=True)
    assert status(short) is Status.EXCEEDS


def test_a_typical_gain_decides_nothing() -> None:
    part = device(I_B=value("I_B", 1.5, "A"), typical=Typical(h_FE=Triple(typ=value("h_FE", 50))))
    _, finding = ask(part, I_B=value("I_B", 0.4, "A"), I_on=value("I_on", 2, "A"), saturates=True)
    assert status(finding) is Status.UNPROVEN
    assert finding.missing(0) == ("typical.h_FE",)
    assert "forced gain" in said(finding)


def test_a_gain_at_a_lower_current_decides_nothing() -> None:
    _, finding = ask(NPN, I_B=value("I_B", 1.0, "A"), I_on=value("I_on", 12, "A"), saturates=True)
    assert status(finding) is Status.UNPROVEN
    part = device(I_B=value("I_B", 1.5, "A"), typical=Typical(h_FE=Triple(min=value("h_FE", 20))))
    _, finding = ask(part, I_B=value("I_B", 1.0, "A"), I_on=value("I_on", 2, "A"), saturates=True)
    assert finding.missing(0) == ("typical.h_FE_I_C",)


def test_an_igbt_is_on_from_15_V_by_common_practice_only() -> None:
    part = device("n-igbt", V_GSS=value("V_GSS", 20, "V"))
    _, full = ask(part, V_on=value("V_GS", 15, "V"), saturates=True)
    _, low = ask(part, V_on=value("V_GS", 10, "V"), saturates=True)
    assert status(full) is Status.MARGINAL
    assert "common practice" in said(full)
    assert (status(low), low.missing(0)) == (Status.UNPROVEN, ("typical.V_CE_TO",))
    unknown = only(ask(part, saturates=True))
    assert (status(unknown), unknown.missing(0)) == (Status.UNPROVEN, ("load.V_GS",))


def test_what_the_stage_leaves_out_is_named() -> None:
    finding = only(ask(NPN, I_on=value("I_on", 6, "A"), saturates=True))
    assert (status(finding), finding.missing(0)) == (Status.UNPROVEN, ("load.I_B",))
    finding = only(ask(FET, saturates=True))
    assert (status(finding), finding.missing(0)) == (Status.UNPROVEN, ("load.V_GS",))
    bare = device("n-mosfet", V_GSS=value("V_GSS", 20, "V"))
    _, finding = ask(bare, V_on=value("V_GS", 10, "V"), saturates=True)
    assert (status(finding), finding.missing(0)) == (Status.UNPROVEN, ("typical.R_DS_on_V_GS",))


def test_on_resistance_counts_only_at_its_gate_voltage() -> None:
    _, full = ask(FET, V_on=value("V_GS", 10, "V"), saturates=True)
    _, low = ask(FET, V_on=value("V_GS", 4.5, "V"), saturates=True)
    assert status(full) is Status.WITHIN
    assert status(low) is Status.UNPROVEN
    assert np.isnan(low.utilisation[0])
    assert "threshold" in said(low)
