"""Every guard: one stage that raises it and one that does not."""

from __future__ import annotations

from pathlib import Path

import pytest

from soacheck.result import Result, Status
from tests.whole import DEVICE, HELD, PROFILE, PUSH_PULL, put, result_of

AMBIENT_CHART = DEVICE.replace('[[soa]]\npulse = "10 ms"', '[[soa]]\nnode = "ambient"\npulse = "10 ms"')
START = DEVICE.index("[[soa]]")
NO_DC = DEVICE[:START] + DEVICE[DEVICE.index("[[soa]]", START + 5) :]
BETWEEN = '[["0 ms", "45 V", "4 A"], ["4 ms", "45 V", "4 A"], ["4 ms", "1 V", "0.1 A"], ["400 ms", "1 V", "0.1 A"]]'
AS_PRINTED = (
    '[["0 ms", "45 V", "4 A"], ["10 ms", "45 V", "4 A"], ["10 ms", "1 V", "0.1 A"], ["400 ms", "1 V", "0.1 A"]]'
)
HOT = put(HELD, T_ambient='"100 degC"', V_CC='"60 V"', R_C='"30 ohm"', I_CQ='"1 A"')

# id: (stage, device that raise it), (stage, device that do not), whether the verdict cannot be `within`
CASES: dict[str, tuple[tuple[str, str], tuple[str, str], bool]] = {
    "rth-mixed-up": ((HELD, put(DEVICE, R_th_jc='"0.833 K/W"\nR_th_ja = "5 K/W"')), (HELD, DEVICE), True),
    "rth-ptot-disagree": ((HELD, put(DEVICE, P_tot='"120 W"')), (HELD, put(DEVICE, P_tot='"145 W"')), False),
    "interface-missing": ((put(HELD, interface='"0 K/W"'), DEVICE), (HELD, DEVICE), True),
    "chart-cold": ((HOT, DEVICE), (HELD, DEVICE), True),
    "chart-node": ((HELD, AMBIENT_CHART), (HELD, DEVICE), False),
    "pulse-between": ((put(PROFILE, points=BETWEEN), DEVICE), (put(PROFILE, points=AS_PRINTED), DEVICE), False),
    "no-dc-curve": ((HELD, NO_DC), (HELD, DEVICE), True),
    "class-b-worst": ((PUSH_PULL, DEVICE), (put(PUSH_PULL, level='"100 %"'), DEVICE), False),
    "pure-resistance": (
        (PUSH_PULL, DEVICE),
        (put(PUSH_PULL, load='{ R = "6 ohm", L = "5 mH" }'), DEVICE),
        False,
    ),
    "limiter-left-out": (  # 35 V into 8.22 ohm ask for 4.26 A
        (put(PUSH_PULL, R_E='"0.22 ohm"\nI_limit = "1 A"'), DEVICE),
        (put(PUSH_PULL, R_E='"0.22 ohm"\nI_limit = "4.3 A"'), DEVICE),
        False,
    ),
    "shared-sink": ((PUSH_PULL, DEVICE), (HELD, DEVICE), False),
}


def ids(result: Result) -> set[str]:
    return {caution.id for caution in result.cautions}


@pytest.mark.parametrize("guard", sorted(CASES))
def test_the_mistake_raises_the_guard(guard: str, tmp_path: Path) -> None:
    (stage, device), _, blocks = CASES[guard]
    result = result_of(tmp_path, stage, device)
    assert guard in ids(result)
    if blocks:
        assert result.verdict in (Status.UNPROVEN, Status.EXCEEDS)


@pytest.mark.parametrize("guard", sorted(CASES))
def test_a_stage_without_the_mistake_does_not(guard: str, tmp_path: Path) -> None:
    _, (stage, device), _ = CASES[guard]
    assert guard not in ids(result_of(tmp_path, stage, device))


def test_an_absent_interface_raises_the_guard_too(tmp_path: Path) -> None:
    from tests.whole import without

    result = result_of(tmp_path, without(HELD, "interface"))
    assert "interface-missing" in ids(result)
    assert result.verdict is Status.UNPROVEN


def test_disagreeing_thermal_ratings_count_by_the_cautious_one(tmp_path: Path) -> None:
    # (150 - 25)/100 = 1.25 K/W against 0.833 K/W stated.
    result = result_of(tmp_path, HELD, put(DEVICE, P_tot='"100 W"'))
    hot = next(d for d in result.duties if d.name == "held-worst-point")
    assert hot.T_j_mean is not None
    assert hot.T_case is not None
    assert hot.P_mean is not None
    assert (hot.T_j_mean.at(0) - hot.T_case.at(0)) / hot.P_mean.at(0) == pytest.approx(1.25)
