"""A rating file to fill in, and a rating file read back."""

import re
from pathlib import Path

import pytest

from soacheck.device.keys import KEYS
from soacheck.device.path import shipped_devices
from soacheck.device.ratings import KINDS, Kind
from soacheck.device.reader import read_device
from soacheck.device.shown import shown
from soacheck.device.template import template
from tests.device.files import DC, NPN, problems, read

_SHOWN_OTHERWISE = ("name", "kind", "package", "ratings_from", "pulse", "bias", "node", "points", "T_ref")
EXAMPLES = sorted(shipped_devices().glob("*.toml"))


def filled(text: str, numbers: dict[str, str]) -> str:
    """The template with its open keys filled in."""
    for name, value in numbers.items():
        text, count = re.subn(rf'(?m)^{name} = "\.\.\.[^"]*"', f'{name} = "{value}"', text)
        assert count == 1, name
    return text


def figures(kind: Kind) -> dict[str, str]:
    voltage, current = {"n-m": ("V_DSS", "I_D"), "p-m": ("V_DSS", "I_D"), "n-i": ("V_CES", "I_C")}.get(
        kind[:3], ("V_CEO", "I_C")
    )
    stated = {"name": "X1", "ratings_from": "a sheet", voltage: "100 V", current: "8 A"}
    return {**stated, "P_tot": "80 W", "T_j": "150 degC", "R_th_jc": "1.5 K/W"}


@pytest.mark.parametrize("kind", KINDS)
def test_filled_in_template_reads(tmp_path: Path, kind: Kind) -> None:
    device = read(filled(template(kind), figures(kind)), tmp_path)
    assert (device.name, device.kind) == ("X1", kind)
    assert device.max.V_max.at(0) == 100
    assert device.cautions == ()


@pytest.mark.parametrize("kind", KINDS)
def test_unfilled_template_names_each_open_key_and_nothing_else(tmp_path: Path, kind: Kind) -> None:
    wanted = set(figures(kind))
    found = problems(template(kind), tmp_path)
    assert {problem.key.rpartition(".")[2] for problem in found} == wanted


@pytest.mark.parametrize("kind", KINDS)
def test_template_has_every_key_of_its_kind_and_no_other(kind: Kind) -> None:
    text = template(kind)
    for key in KEYS:
        if key.table in ("", "thermal.Z_th_jc"):
            continue
        there = re.search(rf"(?m)^(# )?{key.name} = ", text) is not None
        assert there or not key.belongs(kind), key.path
        if not key.belongs(kind):
            assert not there, key.path


@pytest.mark.parametrize("kind", KINDS)
def test_template_fits_a_hundred_columns(kind: Kind) -> None:
    assert max(len(line) for line in template(kind).splitlines()) <= 100


@pytest.mark.parametrize("kind", KINDS)
def test_every_commented_key_reads_once_its_mark_and_dots_are_gone(tmp_path: Path, kind: Kind) -> None:
    # Take away every "# " in front of a key, put a number for "..."; whatever is then still refused is refused for its
    # value, never for its form or its name.
    text = re.sub(r"(?m)^# (?=\[\[soa\]\]|\w+ = )", "", template(kind))
    text = re.sub(r'"\.\.\. ([^"]+)"', r'"1 \1"', text)
    for problem in problems(text, tmp_path):
        assert "unknown" not in problem.problem
        assert "belongs to" not in problem.problem
        assert "wanted here" not in problem.problem, problem


@pytest.mark.parametrize("file", EXAMPLES, ids=lambda file: file.stem)
def test_every_figure_of_an_example_is_shown_within_eighty_columns(file: Path) -> None:
    device = read_device(file, shown_as=str(file))
    text = shown(device)
    assert max(len(line) for line in text.splitlines()) <= 80
    for line in file.read_text(encoding="utf-8").splitlines():
        name, equals, value = line.partition(" = ")
        if equals and name not in _SHOWN_OTHERWISE:
            assert name in text, name
        if equals and name == "pulse":
            assert f"Safe area, {value.split(chr(34))[1]}" in text
    assert device.sha256 in text
    assert "Cautions" not in text


def test_disagreement_of_power_and_thermal_resistance_is_shown(tmp_path: Path) -> None:
    off = shown(read(NPN + '[thermal]\nR_th_jc = "1.2 K/W"\n', tmp_path))
    assert "31 % below P_tot: the cautious one counts" in " ".join(off.split())  # 125/1.2 = 104 W against 150 W
    assert "agree" in shown(read(NPN + '[thermal]\nR_th_jc = "0.83 K/W"\n', tmp_path))


def test_derived_thermal_resistance_is_said_to_be_derived(tmp_path: Path) -> None:
    assert "R_th_jc         0.8333 K/W  from (T_j - T_case)/P_tot, not stated" in shown(read(NPN, tmp_path))


def test_what_the_file_leaves_open_is_listed(tmp_path: Path) -> None:
    bare = shown(read(NPN, tmp_path))
    for lack in ("no dc safe-area curve", "no pulse safe-area curve", "no Z_th_jc", "no peak current", "no leakage"):
        assert lack in bare
    assert "no dc safe-area curve" not in shown(read(NPN + DC, tmp_path))


def test_cautions_and_assumptions_are_shown(tmp_path: Path) -> None:
    text = shown(read(NPN.replace("a sheet, revision B", "") + DC.replace('T_ref = "25 degC"\n', ""), tmp_path))
    assert "[ratings-from]" in text
    assert "Assumed" in text


def test_control_characters_of_the_file_do_not_reach_the_terminal(tmp_path: Path) -> None:
    text = shown(read(NPN.replace("T1", "T\\u001b[31m1").replace("a sheet", "a \\u0007 sheet"), tmp_path))
    assert "\x1b" not in text
    assert "\x07" not in text


@pytest.mark.parametrize("kind", KINDS)
def test_template_states_the_defaults_of_a_curve_and_what_a_missing_dc_curve_costs(kind: Kind) -> None:
    text = template(kind)
    assert "# single = true " in text
    assert text.index("Without a dc curve whatever lasts or is held stays unproven") < text.index("# [[soa]]")
