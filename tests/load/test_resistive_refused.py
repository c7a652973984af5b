"""Resistive stages that lack something, and those that are refused."""

from __future__ import annotations

import pytest

from tests.load.stages import (
    HELD,
    PULSED,
    SATURATES,
    SWING,
    device,
    document,
    duties,
    refusals,
)

# what is not stated


@pytest.mark.parametrize(
    ("text", "key", "names"),
    [
        (HELD, "V_CC", {"held-worst-point"}),
        (HELD, "R_C", {"held-worst-point"}),
        (SWING + 'I_CQ = "1 A"', "V_CC", {"idle", "full-swing"}),
        (SWING + 'I_CQ = "1 A"', "R_C", {"idle", "full-swing"}),
        (PULSED, "V_CC", {"idle", "switched"}),
        (PULSED, "R_C", {"idle", "switched"}),
        (PULSED, "f", {"switched"}),
        (PULSED, "duty_factor", {"switched"}),
        (PULSED, "t_r", {"switched"}),
        (PULSED, "t_f", {"switched"}),
    ],
)
def test_a_value_that_is_not_stated_leaves_its_duties_unknown_by_name(text: str, key: str, names: set[str]) -> None:
    lines = [line for line in text.splitlines() if not line.startswith(f"{key} =")]
    assert len(lines) == len(text.splitlines()) - 1
    all_of_them = duties("resistive", "\n".join(lines), device(**SATURATES))
    unknown = {name: duty for name, duty in all_of_them.items() if duty.locus is None}
    assert set(unknown) == names
    for duty in unknown.values():
        assert [one.key for one in duty.unknown] == [f"load.{key}"]
        assert duty.unknown[0].where


@pytest.mark.parametrize(
    ("kind", "missing"),
    [("npn", ["typical.V_CE_sat"]), ("n-igbt", ["typical.V_CE_TO", "typical.r_CE"]), ("n-mosfet", ["typical.R_DS_on"])],
)
def test_conduction_without_an_on_state_names_what_the_device_lacks(kind: str, missing: list[str]) -> None:
    text = PULSED if kind != "n-mosfet" else PULSED.replace("V_CC", "V_DD").replace("R_C", "R_D")
    duty = duties("resistive", text, device(kind))["switched"]  # type: ignore[arg-type]  # one of the kinds
    assert duty.locus is None
    assert [one.key for one in duty.unknown] == missing


def test_an_absent_emitter_resistor_is_zero_and_a_listed_assumption() -> None:
    made = document("resistive", HELD)
    table = made.table("load")
    zero = table.quantity("R_E")
    assert zero is not None
    assert zero.at(0) == 0.0
    assert any("R_E" in text and "0 ohm" in text for text in made.assumptions)


# what is refused


@pytest.mark.parametrize(
    ("text", "key", "problem", "remedy"),
    [
        ('V_CC = "24 V"\nR_C = "8 ohm"', "load.use", "absent", "use = "),
        ('use = "hold"\nV_CC = "24 V"\nR_C = "8 ohm"', "load.use", "is wanted here", "held"),
        ('use = "held"\nV_CC = "24 V"\nR_C = "0 ohm"', "load.R_C", "no resistance limits the current", "R_C = "),
        (HELD + 'R_ac = "3 ohm"', "load.R_ac", 'use = "held" does not read it', 'use = "swing"'),
        (HELD + 'f = "1 kHz"', "load.f", 'only use = "swing" or use = "switched" does', "leave f out"),
        (HELD + 'I_B = "1 A"', "load.I_B", 'use = "held" does not read it', 'use = "switched"'),
        (SWING + 'I_CQ = "1 A"\nduty_factor = "50 %"', "load.duty_factor", 'use = "swing" does not read it', "leave"),
        (PULSED + 'I_CQ = "1 A"', "load.I_CQ", 'use = "switched" does not read it', 'use = "held"'),
        (PULSED + '[load.bias]\nR_B = "1 kohm"', "load.bias", 'use = "switched" does not read it', "leave bias out"),
        (PULSED.replace("1 us", "50 us"), "load.t_r", "longer than the on time of a period, 4e-05 s", "shorter time"),
        (PULSED.replace("2 us", "90 us"), "load.t_f", "longer than the off time of a period, 6e-05 s", "shorter time"),
        (HELD + 'I_CQ = "1 A"\n[load.bias]\nR_B = "1 kohm"', "load.I_CQ", "[load.bias] sets it as well", "not both"),
        (HELD + 'I_CQ = "4 A"', "load.I_CQ", "V_CC drives no more than 3 A through R_C", "a smaller I_CQ"),
        (HELD + "[load.bias]", "load.bias", "states nothing", "R_1 and R_2, or V_BB, or R_B"),
        (HELD + '[load.bias]\nR_1 = "1 kohm"', "load.bias", "R_2 is not stated", "R_2 = "),
        (HELD + '[load.bias]\nR_2 = "1 kohm"', "load.bias", "R_1 is not stated", "R_1 = "),
        (
            HELD + '[load.bias]\nR_1 = "1 kohm"\nR_2 = "1 kohm"\nV_BB = "3 V"',
            "load.bias",
            "two ways",
            "one of them: R_1 and R_2, or V_BB, or R_B",
        ),
        (HELD + '[load.bias]\nR_1 = "1 kohm"\nR_2 = "1 kohm"\nR_B = "1 kohm"', "load.bias", "two ways", "one of"),
        (HELD + 'R_e = "1 ohm"', "load.R_e", "no key", "R_E"),
        (HELD + 'R_L = "1 A"', "load.R_L", "no key", ""),
        (HELD + 'R_E = "1 A"', "load.R_E", "", ""),
    ],
)
def test_what_is_wrong_with_a_resistive_stage_is_said(text: str, key: str, problem: str, remedy: str) -> None:
    found = refusals("resistive", text)
    assert len(found) == 1, found
    assert found[0][0] == key
    assert problem in found[0][1]
    assert remedy in found[0][2]


@pytest.mark.parametrize(
    ("text", "device_kind", "written", "right"),
    [
        ('use = "held"\nV_CC = "24 V"\nR_D = "8 ohm"', "n-mosfet", "load.V_CC", "V_DD"),
        ('use = "held"\nV_DD = "24 V"\nR_C = "8 ohm"', "p-mosfet", "load.R_C", "R_D"),
        ('use = "held"\nV_DD = "24 V"\nR_D = "8 ohm"\nR_E = "1 ohm"', "n-mosfet", "load.R_E", "R_S"),
        ('use = "held"\nV_DD = "24 V"\nR_D = "8 ohm"\nI_CQ = "1 A"', "n-mosfet", "load.I_CQ", "I_DQ"),
        (HELD.replace("V_CC", "V_DD"), "npn", "load.V_DD", "V_CC"),
        (HELD + '[load.bias]\nV_GG = "5 V"', "npn-darlington", "load.bias.V_GG", "V_BB"),
        (HELD + '[load.bias]\nV_BB = "5 V"', "n-igbt", "load.bias.V_BB", "V_GG"),
    ],
)
def test_a_name_of_another_family_is_refused_with_the_right_one(
    text: str, device_kind: str, written: str, right: str
) -> None:
    found = {key: remedy for key, _, remedy in refusals("resistive", text, device_kind)}
    assert right in found[written]


def test_a_base_resistor_does_not_belong_to_a_gate() -> None:
    text = 'use = "held"\nV_DD = "24 V"\nR_D = "8 ohm"\n[load.bias]\nR_B = "1 kohm"\nV_GG = "5 V"'
    assert [key for key, _, _ in refusals("resistive", text, "n-mosfet")] == ["load.bias.R_B"]


def test_a_reason_that_only_a_profile_reads_is_not_taken_for_the_use() -> None:
    ((key, problem, remedy),) = refusals("resistive", HELD + 'because = "a loop holds the current"\n')
    assert (key, problem) == ("load.because", "[load] has no key because")
    assert "use is stated" not in remedy
    assert remedy.startswith("known here: ")
