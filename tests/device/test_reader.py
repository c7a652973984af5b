"""Rating files: what is read, what is refused, what is derived."""

import dataclasses
import hashlib
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import pytest
from hypothesis import given as for_all
from hypothesis import settings
from hypothesis import strategies as st

from soacheck.device.keys import KEYS
from soacheck.device.ratings import KINDS, MaxRatings, Mechanical, Typical
from soacheck.device.reader import read_device
from soacheck.device.shown import shown
from soacheck.errors import InputError
from tests.device.files import DC, IGBT, MOSFET, NPN, problems, read

EXAMPLES = sorted((Path(__file__).parents[2] / "devices").glob("*.toml"))


def test_least_device_reads(tmp_path: Path) -> None:
    device = read(NPN, tmp_path)
    assert (device.name, device.kind, device.ratings_from) == ("T1", "npn", "a sheet, revision B")
    assert device.max.V_max.at(0) == 160
    assert device.max.V_max.symbol == "V_CEO"
    assert device.max.V_max.source == "T1.toml: max.V_CEO"
    assert device.max.T_j.at(0) == pytest.approx(423.15)
    assert device.max.T_j.symbol == "T_j_max"
    assert device.max.T_case.at(0) == pytest.approx(298.15)
    assert device.soa == ()
    assert device.thermal.form == "none"
    assert device.sha256 == hashlib.sha256(NPN.encode()).hexdigest()
    assert device.cautions == ()


@pytest.mark.parametrize(("text", "voltage", "current"), [(MOSFET, "V_DSS", "I_D"), (IGBT, "V_CES", "I_C")])
def test_ratings_carry_the_symbols_of_their_kind(tmp_path: Path, text: str, voltage: str, current: str) -> None:
    device = read(text, tmp_path)
    assert device.max.V_max.symbol == voltage
    assert device.max.I_max.symbol == current


def test_thermal_resistance_comes_from_the_power_rating_when_absent(tmp_path: Path) -> None:
    # Analytic: (150 - 25)/150 = 0.8333 K/W.
    derived = read(NPN, tmp_path).thermal
    assert derived.R_th_jc_derived
    assert derived.R_th_jc is not None
    assert derived.R_th_jc.at(0) == pytest.approx(125 / 150)
    assert derived.R_th_jc.formula == "(T_j_max - T_case) / P_tot"
    stated = read(NPN + '[thermal]\nR_th_jc = "0.7 K/W"\n', tmp_path).thermal
    assert not stated.R_th_jc_derived
    assert stated.R_th_jc is not None
    assert stated.R_th_jc.at(0) == 0.7


def test_published_transistor_thermal_resistances_follow_from_their_power_lines(tmp_path: Path) -> None:
    # Published: MIL-PRF-19500/544D, U3 package: 100 W at a case of 25 degC, T_j 200 degC, 571 mW/K, so 1.75 K/W;
    # MIL-PRF-19500/393D: 15 W at a case of 100 degC, T_j 200 degC, 150 mW/K, so 6.67 K/W.
    for power, case, per_kelvin in (("100 W", "25 degC", 0.571), ("15 W", "100 degC", 0.150)):
        text = NPN.replace('"150 W"', f'"{power}"\nT_case = "{case}"').replace('"150 degC"', '"200 degC"')
        R = read(text, tmp_path).thermal.R_th_jc
        assert R is not None
        assert 1 / R.at(0) == pytest.approx(per_kelvin, rel=2e-3)


def test_derived_thermal_resistance_is_as_weak_as_its_inputs(tmp_path: Path) -> None:
    typical = NPN.replace('P_tot = "150 W"', 'P_tot = { value = "150 W", grade = "typical" }')
    weak, firm = (read(text, tmp_path).thermal.R_th_jc for text in (typical, NPN))
    assert weak is not None
    assert firm is not None
    assert (weak.grade, firm.grade) == ("typical", "guaranteed")


def test_missing_document_is_a_caution(tmp_path: Path) -> None:
    for text in (NPN.replace('ratings_from = "a sheet, revision B"\n', ""), NPN.replace("a sheet, revision B", " ")):
        assert [name for name, _ in read(text, tmp_path).cautions] == ["ratings-from"]


def test_avalanche_energy_without_its_current_is_a_caution(tmp_path: Path) -> None:
    assert [name for name, _ in read(NPN + 'E_AS = "0.3 J"\n', tmp_path).cautions] == ["avalanche-alone"]
    assert read(NPN + 'E_AS = "0.3 J"\nI_AS = "15 A"\n', tmp_path).cautions == ()


@pytest.mark.parametrize("key", ["name", "kind", "V_CEO", "I_C", "T_j"])
def test_each_of_the_least_keys_is_wanted(tmp_path: Path, key: str) -> None:
    text = "".join(line + "\n" for line in NPN.splitlines() if not line.startswith(f"{key} "))
    found = problems(text, tmp_path)
    assert [problem.key.rpartition(".")[2] for problem in found] == [key]


def test_neither_thermal_resistance_nor_power_is_refused(tmp_path: Path) -> None:
    found = problems(NPN.replace('P_tot = "150 W"\n', ""), tmp_path)
    assert [problem.key for problem in found] == ["thermal.R_th_jc"]


@pytest.mark.parametrize(
    ("text", "key", "value", "instead"),
    [
        (MOSFET, "V_CEO", "100 V", "V_DSS"),
        (MOSFET, "I_C", "10 A", "I_D"),
        (NPN, "V_DSS", "100 V", "V_CEO"),
        (IGBT, "V_CEO", "100 V", "V_CES"),
        (IGBT, "I_DM", "100 A", "I_CM"),
    ],
)
def test_a_rating_of_another_kind_is_refused_by_name(
    tmp_path: Path, text: str, key: str, value: str, instead: str
) -> None:
    found = problems(text + f'{key} = "{value}"\n', tmp_path)
    assert [problem.key for problem in found] == [f"max.{key}"]
    assert "belongs to" in found[0].problem
    assert instead in found[0].remedy


@pytest.mark.parametrize(
    ("text", "key"),
    [
        (NPN + 'I_CM = "10 A"\n', "max.I_CM"),
        (NPN + 'V_CBO = "100 V"\n', "max.V_CBO"),
        (NPN + 'V_CEV = "100 V"\n', "max.V_CEV"),
        (NPN + 'V_CER = "180 V"\n', "max.V_CER"),
        (NPN + 'I_CM_pulse = "1 ms"\n', "max.I_CM_pulse"),
        (MOSFET + 'I_DM_pulse = "1 ms"\n', "max.I_DM_pulse"),
        (IGBT + 't_SC = "5 us"\n', "max.t_SC"),
        (IGBT + 'V_SC = "400 V"\n', "max.V_SC"),
        (NPN + 'T_case = "160 degC"\n', "max.T_case"),
        (NPN.replace('"160 V"', '"-160 V"'), "max.V_CEO"),
        (NPN.replace('"15 A"', '"0 A"'), "max.I_C"),
        (NPN.replace('"150 degC"', '"150 K"'), "max.T_j"),
        (NPN.replace('"150 W"', '"150 V"'), "max.P_tot"),
        (NPN + '[thermal]\nR_th_jcc = "1 K/W"\n', "thermal.R_th_jcc"),
        (NPN + "[typical]\nh_FE = [90, 40, 180]\n", "typical.h_FE"),
        (NPN + "[typical]\nh_FE = -40\n", "typical.h_FE"),
        (NPN + '[typical]\nV_BE_tempco = "2 mV/K"\n', "typical.V_BE_tempco"),
        (NPN + '[typical]\nI_CBO = "-1 uA"\n', "typical.I_CBO"),
        (NPN + '[typical]\nR_DS_on = "1 V"\n', "typical.R_DS_on"),
        (NPN + '[typical]\nI_DSS = "1 uA"\n', "typical.I_DSS"),
        (NPN + '[typical]\nh_FE_points = [["1 A", "25 degC", -5]]\n', "typical.h_FE_points"),
        (NPN + '[typical]\nh_FE_points = [["1 A", "25 degC", 5], ["1 A", "25 degC", 6]]\n', "typical.h_FE_points"),
        (MOSFET + '[typical]\nR_DS_on_hot = "2 ohm"\n', "typical.R_DS_on_hot"),
        (
            MOSFET + '[typical]\nR_DS_on = "2 ohm"\nR_DS_on_hot = "1 ohm"\nT_hot = "150 degC"\n',
            "typical.R_DS_on_hot",
        ),
        (MOSFET + '[typical]\nV_GS_th_tempco = "5 mV/K"\n', "typical.V_GS_th_tempco"),
        (NPN + '[mechanical]\ntab = "drian"\n', "mechanical.tab"),
    ],
)
def test_each_rating_out_of_order_is_refused(tmp_path: Path, text: str, key: str) -> None:
    assert [problem.key for problem in problems(text, tmp_path)] == [key]


def test_all_problems_come_in_one_report_in_the_order_of_the_file(tmp_path: Path) -> None:
    text = NPN.replace('"160 V"', '"160 A"') + 'I_CM = "5 A"\n' + DC.replace('"dc"', '"10 A"')
    lines = [problem.line for problem in problems(text, tmp_path)]
    assert len(lines) == 3
    assert lines == sorted(line for line in lines if line is not None)


def test_a_file_without_a_kind_is_reported_by_the_ratings_that_it_has(tmp_path: Path) -> None:
    found = problems(MOSFET.replace('kind = "n-mosfet"\n', ""), tmp_path)
    assert [problem.key for problem in found] == ["device.kind"]


# Z_th_jc


def transient(inside: str) -> str:
    return NPN + "[thermal]\nZ_th_jc = { " + inside + " }\n"


def test_three_forms_of_the_transient_curve_read(tmp_path: Path) -> None:
    pulse = read(transient('pulse = ["1 ms", "0.1 s"], value = ["0.1 K/W", "0.5 K/W"]'), tmp_path).thermal
    assert pulse.form == "pulse"
    assert pulse.pulse == pytest.approx([1e-3, 0.1])
    assert pulse.value == pytest.approx([0.1, 0.5])
    foster = read(transient('foster = [["0.1 K/W", "1 ms"], ["0.7 K/W", "10 ms"]]'), tmp_path).thermal
    assert foster.form == "foster"
    assert foster.foster == pytest.approx(np.array([(0.1, 1e-3), (0.7, 1e-2)]))
    cauer = read(transient('cauer = [["0.1 K/W", "4 mJ/K"], ["0.7 K/W", "50 mJ/K"]]'), tmp_path).thermal
    assert cauer.form == "cauer"
    assert cauer.cauer == pytest.approx(np.array([(0.1, 4e-3), (0.7, 5e-2)]))
    assert cauer.grade == "guaranteed"


def test_grade_of_the_transient_curve_is_kept(tmp_path: Path) -> None:
    text = transient('foster = [["0.1 K/W", "1 ms"]], grade = "typical"')
    assert read(text, tmp_path).thermal.grade == "typical"


@pytest.mark.parametrize(
    ("inside", "key"),
    [
        ('pulse = ["1 ms", "10 ms"], value = ["0.1 K/W", "0.2 K/W"], foster = [["0.1 K/W", "1 ms"]]', ""),
        ('foster = [["0.1 K/W", "1 ms"]], cauer = [["0.1 K/W", "1 mJ/K"]]', ""),
        ('grade = "typical"', ""),
        ('pulse = ["1 ms", "10 ms"]', ".pulse"),
        ('value = ["0.1 K/W", "0.2 K/W"]', ".value"),
        ('pulse = ["1 ms", "10 ms"], value = ["0.1 K/W"]', ".value"),
        ('pulse = ["10 ms", "1 ms"], value = ["0.1 K/W", "0.2 K/W"]', ".pulse"),
        ('pulse = ["1 ms", "1 ms"], value = ["0.1 K/W", "0.2 K/W"]', ".pulse"),
        ('pulse = ["1 ms", "10 ms"], value = ["0.2 K/W", "0.1 K/W"]', ".value"),
        ('pulse = ["1 ms"], value = ["0.2 K/W"]', ".pulse"),
        ('foster = [["-0.1 K/W", "1 ms"]]', ".foster"),
        ('foster = [["0.1 K/W", "0 ms"]]', ".foster"),
        ('cauer = [["0.1 K/W", "1 ms"]]', ".cauer[1][2]"),
    ],
)
def test_each_disorder_of_the_transient_curve_is_refused(tmp_path: Path, inside: str, key: str) -> None:
    found = problems(transient(inside), tmp_path)
    assert [problem.key for problem in found] == ["thermal.Z_th_jc" + key]


# safe area


def test_curves_keep_the_order_and_labels_of_the_file(tmp_path: Path) -> None:
    pulse = DC.replace('"dc"', '"10 ms"').replace('"15 A"', '"25 A"').replace("[[soa]]", '[[soa]]\ngrade = "typical"')
    reverse = '[[soa]]\nbias = "reverse"\nV_BE_off = "4 V"\npoints = [["9 V", "9 A"], ["90 V", "1 A"]]\n'
    device = read(NPN + DC + pulse + reverse, tmp_path)
    assert [curve.label for curve in device.soa] == ["dc", "10 ms", "reverse"]
    dc, ten, off = device.soa
    assert dc.pulse == float("inf")
    assert ten.pulse == pytest.approx(0.01)
    assert (dc.node, dc.bias, dc.single, dc.grade, dc.reading) == ("case", "forward", True, "guaranteed", 0.0)
    assert dc.points == pytest.approx(np.array([(5, 15), (10, 15), (50, 3), (160, 0.2)]))
    assert dc.source == "T1.toml: soa[dc]"
    assert ten.grade == "typical"
    assert off.bias == "reverse"
    assert off.V_BE_off is not None
    assert off.V_BE_off.at(0) == 4
    assert not dc.points.flags.writeable


def test_silence_about_temperature_and_derating_is_listed_as_assumed(tmp_path: Path) -> None:
    device = read(NPN + DC.replace('T_ref = "25 degC"\n', ""), tmp_path)
    assert device.soa[0].T_ref == pytest.approx(298.15)
    assert device.soa_derating.convention == "like-dissipation"
    assert not device.soa_derating.stated
    said = " / ".join(device.assumptions)
    assert "dc" in said
    assert "25 degC" in said
    assert "like dissipation" in said


def test_each_convention_reads(tmp_path: Path) -> None:
    for word in ("like-dissipation", "held"):
        derating = read(NPN + DC + f'[soa_derating]\nconvention = "{word}"\n', tmp_path).soa_derating
        assert (derating.convention, derating.stated, derating.points) == (word, True, None)
    line = '[soa_derating]\nconvention = "own-curve"\npoints = [["25 degC", "100 %"], ["150 degC", "45 %"]]\n'
    own = read(NPN + DC + line, tmp_path).soa_derating
    assert own.convention == "own-curve"
    assert own.points == pytest.approx(np.array([(298.15, 1.0), (423.15, 0.45)]))


def curve_with(points: str = '[["10 V", "5 A"], ["50 V", "1 A"]]', **keys: str) -> str:
    stated = {"pulse": '"dc"', "points": points, **{key: value for key, value in keys.items() if value}}
    return "[[soa]]\n" + "".join(f"{key} = {value}\n" for key, value in stated.items() if value != "-")


def derated(inside: str) -> str:
    return "[soa_derating]\n" + inside + "\n"


@pytest.mark.parametrize(
    ("text", "key"),
    [
        (curve_with('[["50 V", "1 A"], ["10 V", "5 A"]]'), "soa[1].points"),
        (curve_with('[["10 V", "5 A"], ["10 V", "1 A"]]'), "soa[1].points"),
        (curve_with('[["10 V", "5 A"], ["50 V", "0 A"]]'), "soa[1].points"),
        (curve_with('[["0 V", "5 A"], ["50 V", "1 A"]]'), "soa[1].points"),
        (curve_with('[["10 V", "-5 A"], ["50 V", "1 A"]]'), "soa[1].points"),
        (curve_with('[["10 V", "5 A"], ["20 V", "1 A"], ["50 V", "2 A"]]'), "soa[1].points"),
        (curve_with('[["10 V", "5 A"]]'), "soa[1].points"),
        (curve_with("[]"), "soa[1].points"),
        (curve_with('[["10 V", "5 A"], ["50 V", "100 kA"], ["60 V", "1 A"]]'), "soa[1].points"),
        (curve_with('[["10 A", "5 A"], ["50 V", "1 A"]]'), "soa[1].points[1][1]"),
        (curve_with(pulse="-"), "soa[1].pulse"),
        (curve_with(pulse='"DC"'), "soa[1].pulse"),
        (curve_with(pulse='"10 ms"', single="false"), "soa[1].single"),
        (curve_with(single="false", duty_factor='"10 %"'), "soa[1].single"),
        (curve_with(pulse='"10 ms"', duty_factor='"10 %"'), "soa[1].duty_factor"),
        (curve_with(T_ref='"150 degC"'), "soa[1].T_ref"),
        (curve_with(reading='"60 %"'), "soa[1].reading"),
        (curve_with(node='"sink"'), "soa[1].node"),
        (curve_with(V_BE_off='"4 V"'), "soa[1].V_BE_off"),
        (curve_with(T_j_valid='"100 degC"'), "soa[1].T_j_valid"),
        (curve_with() + curve_with(), "soa[2].pulse"),
        (curve_with(bias='"reverse"', pulse="-") * 2, "soa[2].bias"),
        (curve_with() + curve_with('[["10 V", "1 A"], ["50 V", "0.5 A"]]', pulse='"10 ms"'), "soa[2].points"),
        (derated('convention = "own-curve"'), "soa_derating.convention"),
        (derated('convention = "held"\npoints = [["25 degC", "100 %"], ["99 degC", "50 %"]]'), "soa_derating.points"),
        (derated('points = [["25 degC", "100 %"], ["99 degC", "50 %"]]'), "soa_derating.points"),
        (
            derated('convention = "own-curve"\npoints = [["99 degC", "100 %"], ["25 degC", "50 %"]]'),
            "soa_derating.points",
        ),
        (
            derated('convention = "own-curve"\npoints = [["25 degC", "50 %"], ["99 degC", "60 %"]]'),
            "soa_derating.points",
        ),
        (
            derated('convention = "own-curve"\npoints = [["25 degC", "120 %"], ["99 degC", "60 %"]]'),
            "soa_derating.points",
        ),
        (derated('convention = "own-curve"\npoints = [["25 degC", "100 %"]]'), "soa_derating.points"),
    ],
)
def test_each_disorder_of_the_safe_area_is_refused(tmp_path: Path, text: str, key: str) -> None:
    assert [problem.key for problem in problems(NPN + text, tmp_path)] == [key]


def test_turn_off_areas_for_different_drives_stand_side_by_side(tmp_path: Path) -> None:
    two = "".join(curve_with(bias='"reverse"', pulse="-", V_BE_off=f'"{volts} V"') for volts in (0, 4))
    assert len(read(NPN + two, tmp_path).soa) == 2


def test_curves_for_one_pulse_single_and_repeated_stand_side_by_side(tmp_path: Path) -> None:
    lower = curve_with('[["10 V", "4 A"], ["50 V", "0.8 A"]]', pulse='"10 ms"', single="false", duty_factor='"10 %"')
    device = read(NPN + curve_with(pulse='"10 ms"') + lower, tmp_path)
    assert [(curve.single, curve.duty_factor) for curve in device.soa] == [(True, None), (False, 0.1)]


# the shipped examples and the declarations


@pytest.mark.parametrize("file", EXAMPLES, ids=lambda file: file.stem)
def test_every_example_device_reads_without_caution_or_assumption(file: Path) -> None:
    device = read_device(file, shown_as=file.name)
    assert device.name == file.stem
    assert device.cautions == ()
    assert device.assumptions == ()
    assert device.ratings_from == "invented for examples, revision A, 2026-11-02"
    assert device.typical.leakage is not None
    assert device.typical.leakage_T is not None
    assert device.thermal.form != "none"
    assert [curve for curve in device.soa if curve.pulse < float("inf")]


def test_examples_cover_every_kind_and_every_transient_form() -> None:
    devices = [read_device(file, shown_as=file.name) for file in EXAMPLES]
    assert {device.kind for device in devices} == set(KINDS)
    assert {device.thermal.form for device in devices} == {"pulse", "foster", "cauer"}
    assert {device.soa_derating.convention for device in devices} == {"like-dissipation", "own-curve", "held"}
    without_dc = [d.name for d in devices if not any(c.label == "dc" for c in d.soa)]
    assert without_dc == ["EXAMPLE-NMOS-SW-40"]  # said in the file: many sheets of switching types have none


@pytest.mark.parametrize("file", EXAMPLES, ids=lambda file: file.stem)
def test_example_charts_stay_below_what_their_thermal_data_allow(file: Path) -> None:
    # Second way: at the corner of each curve the product V*I may not exceed (T_j - T_ref)/Z_th_jc(t_p) by more than
    # reading a chart errs. Only for curves whose Z_th_jc stands in the file as a point.
    device = read_device(file, shown_as=file.name)
    R = device.thermal.R_th_jc
    assert R is not None
    stated: dict[float, float] = {}
    if device.thermal.pulse is not None and device.thermal.value is not None:
        stated = dict(zip(device.thermal.pulse, device.thermal.value, strict=True))
    for curve in device.soa:
        Z = R.at(0) if curve.label == "dc" else stated.get(curve.pulse)
        if curve.bias == "forward" and Z is not None:
            corner = curve.points[np.flatnonzero(curve.points[:, 1] == curve.points[:, 1].max())[-1]]
            assert corner.prod() <= 1.02 * (device.max.T_j.at(0) - curve.T_ref) / Z, curve.label


def test_every_characteristic_and_rating_has_its_key() -> None:
    # A field that no key fills would be silently empty for ever.
    names = {key.name for key in KEYS}
    renamed = {"V_max", "I_max", "I_peak", "I_peak_pulse", "leakage", "leakage_T"}
    for data in (MaxRatings, Typical, Mechanical):
        assert {field.name for field in dataclasses.fields(data)} - renamed <= names
    read_keys = {field.name for data in (MaxRatings, Typical, Mechanical) for field in dataclasses.fields(data)}
    read_keys |= {"V_CEO", "V_DSS", "V_CES", "I_C", "I_D", "I_CM", "I_DM", "I_CM_pulse", "I_DM_pulse"}
    read_keys |= {f"I_{which}{end}" for which in ("CBO", "DSS", "CES") for end in ("", "_T")}
    declared = {key.name for key in KEYS if key.table in ("max", "typical", "mechanical")}
    assert declared <= read_keys


def test_every_key_says_what_it_is_and_where_a_sheet_states_it() -> None:
    for key in KEYS:
        assert key.meaning, key.path
        assert key.where, key.path


VALUES = st.one_of(
    st.text(max_size=12).map(
        lambda text: '"' + "".join(ch for ch in text if ch.isprintable() and ch not in '"\\') + '"'
    ),
    st.sampled_from(
        ["1", "-1", "1e400", "nan", "inf", "true", "[]", "{}", '""', "[[]]", "[[1, 2], [3]]", "1979-05-27"]
    ),
    st.tuples(st.floats(-1e12, 1e12), st.sampled_from(["V", "A", "W", "K/W", "degC", "K", "s", "%", "ohm"])).map(
        lambda pair: f'"{pair[0]:g} {pair[1]}"'
    ),
    st.sampled_from(
        ['[["1 V", "1 A"], ["2 V", "1 A"]]', '{ foster = [["1 K/W", "1 s"]] }', '{ value = "1 V" }', '["1 V"]']
    ),
)


@settings(max_examples=400)
@for_all(file=st.sampled_from(EXAMPLES), where=st.floats(0, 1), value=VALUES)
def test_any_value_anywhere_gives_a_device_or_an_input_error(file: Path, where: float, value: str) -> None:
    lines = file.read_text(encoding="utf-8").splitlines()
    stated = [number for number, line in enumerate(lines) if " = " in line]
    number = stated[int(where * (len(stated) - 1))]
    lines[number] = lines[number].partition(" = ")[0] + " = " + value
    with TemporaryDirectory() as folder:
        changed = Path(folder) / file.name
        changed.write_text("\n".join(lines) + "\n", encoding="utf-8")
        try:
            device = read_device(changed, shown_as=file.name)
        except InputError:
            return  # an answer too
    assert device.max.V_max.at(0) > 0
    assert shown(device)
