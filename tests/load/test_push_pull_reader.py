"""The `[load]` table of a push-pull stage as a file has it."""

from __future__ import annotations

import os
from pathlib import Path

import numpy as np
import pytest

from soacheck.errors import InputError
from soacheck.load import push_pull
from soacheck.load.kind import Surround
from soacheck.load.parts.push_pull_stage import PushPull
from soacheck.table import CasePlan

from . import stages

PLAIN = 'V_rail = "35 V"\nload = "8 ohm"\nlevel = "any"\nf = "1 kHz"\n'


def read(text: str, device_kind: str = "npn", *, corners: bool = False) -> PushPull:
    stage = stages.read("push-pull", text, device_kind, corners=corners)
    assert isinstance(stage, PushPull)
    return stage


def refused(text: str, device_kind: str = "npn") -> list[tuple[str, str]]:
    return [(key, problem) for key, problem, _ in stages.refusals("push-pull", text, device_kind)]


def from_folder(folder: Path, load: str, rest: str = 'f = ["20 Hz", "2 kHz"]\nlevel = "any"\n') -> PushPull:
    made = stages.document("push-pull", f'V_rail = "35 V"\nload = {load}\n{rest}')
    stage = push_pull.read(made.table("load"), Surround(folder=folder, device_kind="npn"))
    made.finish()
    return stage


def Z_of(stage: PushPull, f: float) -> complex:
    return complex(stage.Z_at(np.array([[f]]))[0, 0])


def test_a_plain_stage_is_read_and_its_natural_zeros_are_listed() -> None:
    made = stages.document("push-pull", PLAIN)
    stage = push_pull.read(made.table("load"), Surround(folder=Path("."), device_kind="npn"))
    made.finish()
    assert stage.V_rail.at(0) == 35.0
    assert stage.resistive
    assert stage.one_frequency
    assert stage.pairs == 1
    assert stage.class_b
    said = " ".join(made.assumptions)
    for name in ("I_Q", "R_E", "V_sat", "pairs"):
        assert f"{name} not stated" in said
    assert "R_S" not in said


@pytest.mark.parametrize(
    ("load", "expected"),
    [
        ('"8 ohm"', 8 + 0j),
        ('{ value = "8 ohm", tol = "10 %" }', 8 + 0j),
        ('{ R = "6 ohm", L = "1.2 mH" }', 6 + 7.5398j),
        ('{ L = "1.2 mH", R = "6 ohm", C = "100 uF" }', 6 + 5.9483j),
        ('{ series = ["0.5 ohm", { parallel = ["8 ohm", { L = "1.2 mH" }] }] }', 4.2633 + 3.9930j),
        ('{ parallel = ["8 ohm", "8 ohm"] }', 4 + 0j),
    ],
)
def test_every_form_of_load_is_understood(load: str, expected: complex) -> None:
    # Second way: worked by hand at 1 kHz, four decimals.
    stage = read(f'V_rail = "35 V"\nload = {load}\nlevel = "any"\nf = "1 kHz"\n')
    assert Z_of(stage, 1000.0) == pytest.approx(expected, abs=2e-4)


@pytest.mark.parametrize(
    ("load", "key", "said"),
    [
        ('{ R = "6 ohm", X = "3 ohm" }', "load.load.X", "no part of a load"),
        ('{ series = ["6 ohm"], R = "3 ohm" }', "load.load.series", "stands alone"),
        ("{ series = [] }", "load.load.series", "list of impedances"),
        ('{ series = ["6 ohm", 3] }', "load.load.series[2]", "text or an inline table"),
        ("8", "load.load", "text or an inline table"),
        ("{}", "load.load", "empty"),
        ('"8 mH"', "load.load", "resistance"),
        ('{ parallel = ["8 ohm", { L = "1.2 H V" }] }', "load.load.parallel[2].L", ""),
        ('"0 ohm"', "load.load", ""),
    ],
)
def test_a_load_that_is_none_is_refused_where_it_stands(load: str, key: str, said: str) -> None:
    found = refused(f'V_rail = "35 V"\nload = {load}\nlevel = "any"\nf = "1 kHz"\n')
    assert [one[0] for one in found] == [key]
    assert said in found[0][1]


def test_a_deeply_nested_load_is_refused() -> None:
    load = "{ series = [" * 20 + '"8 ohm"' + "] }" * 20
    assert "deep" in refused(f'V_rail = "35 V"\nload = {load}\nlevel = "any"\nf = "1 kHz"\n')[0][1]


@pytest.mark.parametrize(
    ("level", "kind", "number"),
    [
        ('"any"', "any", None),
        ('"clipped"', "clipped", None),
        ('"20 V"', "voltage", 20.0),
        ('"60 %"', "ratio", 0.6),
        ('{ value = "60 %", tol = "5 %" }', "ratio", 0.6),
    ],
)
def test_every_form_of_level_is_understood(level: str, kind: str, number: float | None) -> None:
    stage = read(f'V_rail = "35 V"\nload = "8 ohm"\nf = "1 kHz"\nlevel = {level}\n')
    assert stage.level == kind
    assert (stage.level_value is None) == (number is None)
    if stage.level_value is not None:
        assert stage.level_value.at(0) == pytest.approx(number)


@pytest.mark.parametrize("level", ['"loud"', '"120 %"', '"0 %"', '"-3 V"', "20", '"36 V"', '"20 A"', '"0 V"', "true"])
def test_a_level_that_is_none_is_refused(level: str) -> None:
    found = refused(f'V_rail = "35 V"\nload = "8 ohm"\nf = "1 kHz"\nlevel = {level}\n')
    assert [key for key, _ in found] == ["load.level"]


def test_a_level_above_the_largest_swing_says_where_the_output_clips() -> None:
    text = 'V_rail = "35 V"\nload = "8 ohm"\nf = "1 kHz"\nlevel = "33 V"\nV_sat = "3 V"\n'
    assert refused(text) == [("load.level", "the output clips at 32 V peak")]
    assert read(text + "bridged = true\n").bridged  # two outputs: 64 V across the load


@pytest.mark.parametrize("missing", ["V_rail", "load", "level"])
def test_what_decides_the_stage_must_be_stated(missing: str) -> None:
    text = "\n".join(line for line in PLAIN.splitlines() if not line.startswith(missing))
    assert [key for key, _ in refused(text)] == [f"load.{missing}"]


def test_a_load_with_reactance_needs_a_frequency() -> None:
    text = 'V_rail = "35 V"\nlevel = "any"\nload = { R = "6 ohm", L = "1 mH" }\n'
    assert refused(text)[0][0] == "load.load"
    assert "frequency" in refused(text)[0][1]
    assert read('V_rail = "35 V"\nlevel = "any"\nload = "8 ohm"\n').f is None


def test_a_fault_time_without_its_current_and_a_protection_of_a_held_line_are_refused() -> None:
    assert refused(PLAIN + 'fault_time = "1 s"\n')[0][0] == "load.fault_time"
    held = PLAIN.replace('f = "1 kHz"\n', "")
    assert refused(held + "dc_protected = true\n")[0][0] == "load.dc_protected"
    assert read(PLAIN + 'fault_time = "1 s"\nI_limit = "6 A"\ndc_protected = true\n').dc_protected


def test_a_saturation_that_eats_the_rail_is_refused() -> None:
    assert refused(PLAIN + 'V_sat = "36 V"\n')[0][0] == "load.V_sat"


@pytest.mark.parametrize(
    ("more", "key", "problem"),
    [
        # 30 V - 1 A * 47 ohm leaves nothing of the rail: 0.47 ohm was meant.
        ('R_E = "47 ohm"\nI_Q = "1 A"\n', "load.I_Q", "V_rail drives less than 0.6383 A through R_E"),
        ('R_E = "30 ohm"\nI_Q = "1 A"\n', "load.I_Q", "V_rail drives less than 1 A through R_E"),
        ('R_E = "29 ohm"\nI_Q = "1 A"\nV_sat = "2 V"\n', "load.I_Q", "V_rail drives less than 0.9655 A through R_E"),
        ('R_E = "22 ohm"\nI_Q = "0 A"\npairs = 2\nI_limit = "6 A"\n', "load.I_limit",
         "V_rail drives less than 2.727 A through R_E"),
    ],
)  # fmt: skip
def test_a_current_that_the_rail_cannot_drive_through_the_resistors_is_refused(
    more: str, key: str, problem: str
) -> None:
    text = PLAIN.replace('"35 V"', '"30 V"') + more
    found = stages.refusals("push-pull", text)
    assert [(one, said) for one, said, _ in found] == [(key, problem)]
    assert found[0][2] == f"a smaller {key[5:]}, or the right R_E"
    assert refused(text.replace("R_E", "R_S"), "n-mosfet") == [(key, problem.replace("R_E", "R_S"))]
    assert not refused(text.replace("47 ohm", "0.47 ohm").replace("30 ohm", "29 ohm").replace('"2 V"', '"0.9 V"')
                       .replace('"22 ohm"', '"0.22 ohm"'))  # fmt: skip


def test_a_corner_in_which_the_rail_cannot_drive_the_idle_current_is_refused() -> None:
    text = PLAIN + 'I_Q = "1 A"\nR_E = { value = "34 ohm", tol = "5 %" }\n'
    assert refused(text) == []
    made = stages.document("push-pull", text)
    over = made.over(CasePlan.corners(made.spreads))
    push_pull.read(over.table("load"), Surround(folder=Path("."), device_kind="npn"))
    with pytest.raises(InputError, match="V_rail drives less than"):
        over.finish()


def test_a_rail_that_is_not_stated_brings_no_second_problem() -> None:
    text = PLAIN.replace('V_rail = "35 V"\n', "").replace('"any"', '"20 V"')
    more = 'V_sat = "3 V"\nI_Q = "1 A"\nR_E = "2 ohm"\n'
    assert [key for key, _ in refused(text + more)] == ["load.V_rail"]


def test_an_idle_current_that_is_not_stated_is_asked_for_and_counts_as_nothing() -> None:
    made = stages.document("push-pull", PLAIN)
    stage = push_pull.read(made.table("load"), Surround(folder=Path("."), device_kind="npn"))
    assert any("I_Q not stated" in said and "state I_Q" in said for said in made.assumptions)
    assert "idle at a bias current (I_Q not stated, taken as 0)" in push_pull.not_analysed(stage)
    assert list(stages.duties("push-pull", PLAIN)) == ["idle", "worst-level", "full-level", "any-level"]
    stated = PLAIN + 'I_Q = "0 A"\n'
    assert not any("idle" in said for said in push_pull.not_analysed(read(stated)))
    assert next(iter(stages.duties("push-pull", stated))) == "idle"


def test_a_mosfet_stage_says_source_resistor() -> None:
    assert read(PLAIN + 'R_S = "0.22 ohm"\n', "n-mosfet").R_E.at(0) == pytest.approx(0.22)
    assert read(PLAIN + 'R_E = "0.22 ohm"\n').R_E.at(0) == pytest.approx(0.22)
    assert refused(PLAIN + 'R_E = "0.22 ohm"\n', "n-mosfet")[0][0] == "load.R_E"
    assert refused(PLAIN + 'R_S = "0.22 ohm"\n')[0][0] == "load.R_S"


def test_a_lossless_resonance_in_the_range_is_refused() -> None:
    # 1 mH and 1/(4 pi^2) mF resonate at 1 kHz exactly.
    text = 'V_rail = "35 V"\nlevel = "any"\nf = "1 kHz"\nload = { L = "1 mH", C = "25.330295910584444 uF" }\n'
    assert "resonates" in refused(text)[0][1]


def test_uncertainties_of_the_load_become_cases() -> None:
    text = (
        'V_rail = { value = "35 V", tol = "10 %" }\nlevel = "any"\nf = "1 kHz"\n'
        'load = { series = [{ value = "6 ohm", tol = "5 %" }, '
        '{ L = { value = "1 mH", min = "0.8 mH", max = "1.4 mH" } }] }\n'
    )
    stage = read(text, corners=True)
    assert stage.V_rail.value.shape == (9,)
    Z = stage.Z_at(np.array([[1000.0]]))[:, 0]
    assert Z[0] == pytest.approx(6 + 2j * np.pi)
    assert set(np.round(Z.real[1:], 6)) == {5.7, 6.3}
    found = stages.duties("push-pull", text, corners=True)
    assert stages.locus(found["worst-level"]).shape[0] == 9
    assert found["any-level"].members.value.shape[0] == 9


def test_a_stated_level_is_cut_to_the_swing_of_each_corner() -> None:
    text = 'V_rail = { value = "35 V", tol = "10 %" }\nlevel = "34 V"\nf = "1 kHz"\nload = "8 ohm"\n'
    i = stages.locus(stages.duties("push-pull", text, corners=True)["at-level"]).i_peak[:, 0] * 8
    assert i == pytest.approx([34.0, 31.5, 34.0])


def test_a_table_is_found_beside_the_stage_file(tmp_path: Path) -> None:
    (tmp_path / "box.csv").write_text("f;Z;phi\n20;8,0;0\n200;16,0;30\n2000;8,0;-40\n", encoding="utf-8-sig")
    stage = from_folder(tmp_path, '{ table = "box.csv" }')
    assert abs(Z_of(stage, 200.0)) == pytest.approx(16.0)
    nested = from_folder(tmp_path, '{ series = ["0.5 ohm", { table = "box.csv" }] }')
    assert Z_of(nested, 20.0) == pytest.approx(8.5)


@pytest.mark.parametrize(
    ("rest", "key"),
    [
        ('f = ["10 Hz", "2 kHz"]\nlevel = "any"\n', "load.f"),
        ('f = ["20 Hz", "20 kHz"]\nlevel = "any"\n', "load.f"),
        ('f = "100 Hz"\nlevel = "clipped"\n', "load.level"),
        ('level = "any"\n', "load.load"),
    ],
)
def test_a_table_is_not_used_outside_its_rows(tmp_path: Path, rest: str, key: str) -> None:
    (tmp_path / "box.csv").write_text("20,8,0\n200,16,30\n2000,8,-40\n")
    with pytest.raises(InputError) as caught:
        from_folder(tmp_path, '{ table = "box.csv" }', rest)
    assert [problem.key for problem in caught.value.problems] == [key]


def test_a_table_that_cannot_be_read_is_an_input_error(tmp_path: Path) -> None:
    (tmp_path / "bytes.csv").write_bytes(b"\xff\xfe20,8,0")
    (tmp_path / "long.csv").write_text("20,8,0\n" * 200_000)
    (tmp_path / "folder.csv").mkdir()
    os.mkfifo(tmp_path / "pipe.csv")
    said = {
        "none.csv": "cannot be read",
        "bytes.csv": "not UTF-8",
        "long.csv": "larger than",
        "folder.csv": "not a file",
        "pipe.csv": "not a file",
    }
    for name, problem in said.items():
        with pytest.raises(InputError, match=problem):
            from_folder(tmp_path, f'{{ table = "{name}" }}')
    with pytest.raises(InputError, match="name of a file"):
        from_folder(tmp_path, "{ table = 3 }")
    (tmp_path / "bad.csv").write_text("f,Z,phi\n20,8,0\n200,OL,30\n")
    with pytest.raises(InputError, match=r"bad\.csv, line 3"):
        from_folder(tmp_path, '{ table = "bad.csv" }')


@pytest.mark.parametrize(
    ("load", "key", "remedy"),
    [
        ('{ parallel = ["8 ohm", "180 uF"] }', "load.load.parallel[2]", '{ C = "180 uF" }'),
        ('{ series = ["8 ohm", { parallel = ["1.2 mH"] }] }', "load.load.series[2].parallel[1]", '{ L = "1.2 mH" }'),
        ('"180 uF"', "load.load", 'load = { C = "180 uF" }'),
    ],
)
def test_a_capacitor_written_as_a_text_is_told_how_it_is_written(load: str, key: str, remedy: str) -> None:
    found = stages.refusals("push-pull", PLAIN.replace('"8 ohm"', load))
    assert [(one, offer) for one, _, offer in found] == [(key, remedy)]


def test_a_clipped_signal_needs_its_frequency() -> None:
    text = PLAIN.replace('"any"', '"clipped"')
    without_f = "\n".join(line for line in text.split("\n") if not line.startswith("f = "))
    assert [key for key, _ in refused(without_f)] == ["load.level"]
