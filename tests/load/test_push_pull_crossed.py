"""Every way of writing a push-pull stage against every spread: no exception, finite loci, arrays that fit together."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from soacheck.device.ratings import Kind
from soacheck.duty import Duty
from soacheck.load import load_kind
from soacheck.load.kind import Surround
from soacheck.load.push_pull import duties
from soacheck.table import CasePlan
from tests.load.pushpull import fitted
from tests.load.stages import document

LOADS = {
    "resistance": '"8 ohm"',
    "resistance-spread": '{ value = "8 ohm", tol = "10 %" }',
    "coil": '{ R = "6 ohm", L = "1.2 mH" }',
    "coil-spread": '{ R = { value = "6 ohm", min = "5 ohm" }, L = { value = "1.2 mH", tol = "20 %" } }',
    "capacitor": '{ R = "4 ohm", C = "180 uF" }',
    "nested": '{ series = ["0.5 ohm", { parallel = ["8 ohm", { L = "1.2 mH" }, { C = "47 uF" }] }] }',
    "nested-spread": '{ series = ["1 ohm", { parallel = [{ value = "8 ohm", tol = "10 %" }, { L = "5 mH" }] }] }',
    "table": '{ table = "z.csv" }',
}
FREQUENCIES = {
    "one": 'f = "1 kHz"\n',
    "one-spread": 'f = { value = "1 kHz", min = "500 Hz", max = "2 kHz" }\n',
    "range": 'f = ["20 Hz", "20 kHz"]\n',
    "held": "",
}
LEVELS = ('"any"', '"clipped"', '"9 V"', '"60 %"', '{ value = "60 %", min = "40 %", max = "80 %" }')
SPREADS = {
    "none": {},
    "V_rail": {"V_rail": '{ value = "35 V", min = "31 V", max = "38 V" }'},
    "R_E": {"R_E": '{ value = "0.22 ohm", tol = "10 %" }'},
    "I_Q": {"I_Q": '{ value = "50 mA", min = "20 mA", max = "90 mA" }'},
    "I_Q-from-none": {"I_Q": '{ value = "0 A", max = "90 mA" }'},
    "V_sat": {"V_sat": '{ value = "2 V", max = "4 V" }'},
    "I_limit": {"I_limit": '{ value = "6 A", tol = "20 %" }'},
    "fault_time": {"I_limit": '"6 A"', "fault_time": '{ value = "1 s", max = "2 s" }'},
}
CIRCUITS = {"pair": "", "pairs": "pairs = 3\n", "bridged": "bridged = true\n"}


def text(load: str, f: str, level: str, spread: str, circuit: str) -> str:
    keys = {"V_rail": '"35 V"', "R_E": '"0.22 ohm"', "I_Q": '"50 mA"', "V_sat": '"1 V"', **SPREADS[spread]}
    lines = [f"{name} = {written}" for name, written in keys.items()]
    return "\n".join([*lines, f"load = {LOADS[load]}", f"level = {level}", FREQUENCIES[f] + CIRCUITS[circuit]])


def meets(duty: Duty, cases: int) -> None:
    """Finite, and every array of one case or of all, of one member or of all."""
    assert duty.locus is not None
    locus = duty.locus(None)
    assert locus.shape[0] in (1, cases)
    for array in (locus.t, locus.v, locus.i):
        assert bool(np.all(np.isfinite(array)))
    assert bool(np.all(locus.v >= 0))
    assert bool(np.all(locus.i >= 0))
    whole = (cases, locus.shape[1])
    for table in (duty.heat_ratio, duty.members.value, locus.p_mean):
        assert np.broadcast_shapes(table.shape, whole) == whole
    last = np.full(cases, locus.shape[1] - 1, dtype=np.int64)
    at_ends = [] if duty.facts_at is None else [*duty.facts_at(np.zeros(1, dtype=np.int64)), *duty.facts_at(last)]
    for fact in (*duty.facts, *at_ends):
        for node in fact.walk():
            assert node.value.size in (1, cases), node.symbol
            assert bool(np.all(np.isfinite(node.value))), node.symbol


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    made = tmp_path_factory.mktemp("stage")
    rows = ((10, 7.0, 10), (60, 30.0, 0), (400, 7.0, -30), (3000, 9.0, 20), (30000, 25.0, 55))
    (made / "z.csv").write_text("f,magnitude,phase\n" + "".join(f"{f},{Z},{phi}\n" for f, Z, phi in rows))
    return made


def worked_out(folder: Path, written: str, kind: Kind) -> None:
    if kind == "n-mosfet":
        written = written.replace("R_E", "R_S")
    made = document("push-pull", written, kind)
    plan = CasePlan.corners(made.spreads) if made.spreads else CasePlan()
    surround = Surround(folder=folder, device_kind=kind)
    load_kind("push-pull").read(made.table("load"), surround)
    made.finish()
    load = load_kind("push-pull").read(made.over(plan).table("load"), surround)
    for half in ("upper", "lower"):
        for duty in duties(load, fitted(kind, 1 / load.pairs, half)):
            meets(duty, plan.count)


@pytest.mark.parametrize("f", FREQUENCIES)
@pytest.mark.parametrize("load", LOADS)
def test_every_load_and_frequency_meets_every_level_spread_and_circuit(folder: Path, load: str, f: str) -> None:
    if f == "held" and not load.startswith("resistance"):
        return  # refused: a reactance needs a frequency
    refused = load == "table" or f == "held"  # clipping needs harmonics of the load, and a frequency
    levels = tuple(level for level in LEVELS if not (refused and level == '"clipped"'))
    # Levels with spreads in full, on one circuit and one kind of device each, which take turns.
    turn = 0
    for level in levels:
        for spread in SPREADS:
            circuit = tuple(CIRCUITS)[turn % 3]
            kind: Kind = ("npn", "npn-darlington", "n-mosfet", "n-igbt")[turn // 3 % 4]
            worked_out(folder, text(load, f, level, spread, circuit), kind)
            turn += 1


@pytest.mark.parametrize("circuit", CIRCUITS)
@pytest.mark.parametrize("spread", SPREADS)
def test_every_circuit_meets_every_spread_on_a_coil_over_a_range(folder: Path, circuit: str, spread: str) -> None:
    for level in LEVELS[:4]:
        worked_out(folder, text("coil-spread", "range", level, spread, circuit), "pnp")
