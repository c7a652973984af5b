"""The calculation sheet can be done again with a calculator."""

from __future__ import annotations

import math
import re
import unicodedata

import numpy as np
import pytest

from soacheck.result import Result, Status
from soacheck.show.sheet import sheet, sheets
from soacheck.show.text import cells
from soacheck.trace import Traced, derived, found, given

from .build import HOSTILE, amplifier, finding, heat_chain, reason, result, where


def flat(text: str) -> str:
    """The text with its line breaks taken out."""
    return " ".join(text.split())


def governed_by_junction() -> Result:
    chain = heat_chain()
    t_j_max = given("T_j_max", [423.15], "degC", "npn160.toml: max.T_j", "guaranteed")
    return result(
        finding("junction-temperature", "worst-level", chain["T_j_mean"], t_j_max, "degC", 0.615),
        inputs=(t_j_max, given("f", [1000.0], "Hz", "amp.toml: load.f")),
    )


def test_every_line_fits_eighty_columns() -> None:
    for item in (amplifier(), amplifier(spread=True), governed_by_junction()):
        assert all(cells(line) <= 80 for line in sheet(item).splitlines())


def test_a_step_shows_formula_numbers_result_and_source() -> None:
    text = flat(sheet(governed_by_junction()))
    # Second way, by hand: two pairs, 4 ohm: 42^2/(pi^2 * 4 * 2) = 22.34 W; 80.2, 89.2, 107.7 degC.
    assert (
        "P_mean = V_rail^2 / (pi^2 * R_load * pairs) = (42 V)^2 / (pi^2 * 4 ohm * 2) = 22.341 W [class B, 2/pi]" in text
    )
    assert "T_case = T_heatsink + R_th_cs * P_mean = 80.214 degC + 0.4 K/W * 22.341 W = 89.151 degC" in text
    assert "T_j_mean = T_case + R_th_jc * P_mean = 89.151 degC + 0.83 K/W * 22.341 W = 107.69 degC" in text


def evaluated(numbers: str) -> float:
    """What a calculator makes of a printed line: units off, ^ as a power."""
    bare = re.sub(r"(?<=\d) (degC|K/W|W|V|ohm|A)\b", "", numbers).replace("^", "**")
    return float(eval(bare, {"__builtins__": {}}, {"pi": math.pi}))  # our own printed arithmetic


def test_a_calculator_gets_the_printed_result_from_the_printed_numbers() -> None:
    text = sheet(governed_by_junction())
    steps = re.findall(r"^ += (.*[*+/-].*) = (-?[\d.]+) \w+", text, re.MULTILINE)
    assert len(steps) == 4
    for numbers, printed in steps:
        assert evaluated(numbers) == pytest.approx(float(printed), rel=1e-4)


def test_inputs_stand_with_value_unit_source_and_grade_before_the_steps() -> None:
    text = sheet(governed_by_junction())
    assert re.search(r"R_th_cs += 0\.4 K/W +amp\.toml: heat_path\.interface, guaranteed", text)
    assert text.index("R_th_cs   =") < text.index("T_case = T_heatsink")


def test_the_governing_finding_is_complete_and_comes_first() -> None:
    text = sheet(governed_by_junction())
    governing = text.split("Governing finding")[1].split("Other inputs")[0]
    for symbol in (
        "T_ambient",
        "R_th_sa",
        "R_th_cs",
        "R_th_jc",
        "V_rail",
        "P_mean",
        "T_heatsink",
        "T_case",
        "T_j_mean",
    ):
        assert re.search(rf"^\[\d+\] +{symbol} ", governing, re.MULTILINE), symbol
    assert "107.7 of 150.0 degC, 62 % of the allowance: within" in governing


def test_a_value_is_printed_once_and_referred_to_by_its_number_afterwards() -> None:
    text = sheet(amplifier())
    assert len(re.findall(r"^\[\d+\] +R_th_jc += 0\.83 K/W", text, re.MULTILINE)) == 1
    numbers = [int(number) for number in re.findall(r"^\[(\d+)\]", text, re.MULTILINE)]
    assert numbers == list(range(1, len(numbers) + 1))
    assert re.search(r"Above +T_j_peak = 110\.89 degC \[\d+\], T_j_max = 150 degC \[\d+\]", text)


def test_equal_values_that_were_made_apart_are_one_line() -> None:
    first, second = heat_chain(), heat_chain()
    item = finding("junction-temperature", applied=first["T_j_mean"], allowed=second["T_case"], unit="degC")
    assert len(re.findall("T_heatsink = T_ambient", sheet(result(item)))) == 1


def step(symbol: str, formula: str, unit: str, *inputs: Traced) -> str:
    value = derived(symbol, formula, unit, *inputs)
    return flat(sheet(result(finding(applied=value, allowed=None, unit=unit, utilisation=0.5))))


def test_absolute_temperatures_are_put_in_as_kelvin_where_degrees_celsius_would_be_wrong() -> None:
    hot, cold = given("T_j", [398.15], "degC", ""), given("T_ref", [298.15], "degC", "")
    assert "ratio = T_j / T_ref = 398.15 K / 298.15 K = 1.3354" in step("ratio", "T_j / T_ref", "1", hot, cold)
    assert "rise = T_j - T_ref = 125 degC - 25 degC = 100 K" in step("rise", "T_j - T_ref", "K", hot, cold)
    assert "T = max(T_j, T_ref) = max(125 degC, 25 degC) = 125 degC" in step("T", "max(T_j, T_ref)", "degC", hot, cold)


def test_negative_numbers_powers_and_compound_units_get_parentheses() -> None:
    a, r = given("a", [-2.0], "A", ""), given("R", [0.5], "K/W", "")
    assert "y = 3 - a = 3 - (-2 A) = 5 A" in step("y", "3 - a", "A", a)
    assert "y = a^2 = (-2 A)^2 = 4" in step("y", "a ** 2", "1", a)
    assert "y = a / R = (-2 A) / (0.5 K/W) = -4 A" in step("y", "a / R", "A", a, r)


def test_numbers_in_a_formula_are_not_taken_for_symbols() -> None:
    e, x = given("e", [2.0], "1", ""), given("x", [3.0], "1", "")
    assert "y = 1e-05 * e + x = 1e-05 * 2 + 3 = 3" in step("y", "1e-5*e + x", "1", e, x)


def test_a_line_does_not_end_inside_a_quantity() -> None:
    values = [given(f"a_long_symbol_{index}", [1.2345], "ohm", "") for index in range(8)]
    value = derived("y", "*".join(value.symbol for value in values), "ohm^8", *values)
    text = sheet(result(finding(applied=value, allowed=None)))
    assert not [line for line in text.splitlines() if line.startswith(" ") and line.lstrip().startswith("ohm")]


def test_a_value_found_by_a_search_says_how_and_from_what() -> None:
    load = given("R_load", [8.0], "ohm", "file")
    value = found("level", [12.3], "V", "greatest mean dissipation over all levels", load, source="search")
    text = flat(sheet(result(finding(applied=value, allowed=None, unit="V"))))
    assert "level = 12.3 V (greatest mean dissipation over all levels) [search] from R_load = 8 ohm [1]" in text


def test_a_missing_number_is_called_unknown() -> None:
    value = derived("y", "a * 2", "W", given("a", [np.nan], "W", ""))
    item = finding(
        applied=value, allowed=None, utilisation=np.nan, status=Status.UNPROVEN,
        reasons=(reason("no heat path", ("heat_path.heatsink", "the sink's data sheet")),),
    )  # fmt: skip
    text = flat(sheet(result(item)))
    assert "y = a * 2 = unknown * 2 = unknown" in text
    assert "Because no heat path Missing heat_path.heatsink (the sink's data sheet)" in text
    assert "nan" not in text


def test_a_deep_calculation_with_shared_parts_is_printed_in_time() -> None:
    # each step uses the one before it twice: followed path by path this would be 2**200 lines
    value = given("x0", [1.0], "1", "")
    for index in range(200):
        other = derived(f"y{index}", f"x{index} * 1", "1", value)
        value = derived(f"x{index + 1}", f"x{index} + y{index} - 1", "1", value, other)
    assert "[401]" in sheet(result(finding(applied=value, allowed=None, unit="1")))


def test_hostile_text_is_printed_without_being_obeyed() -> None:
    hostile = given(HOSTILE, [1.0], "A", HOSTILE, HOSTILE)
    item = finding(applied=hostile, allowed=found("y", [1.0], "A", HOSTILE, hostile, source=HOSTILE), basis=HOSTILE)
    text = sheet(result(item, assumptions=(HOSTILE,)))
    assert not any(unicodedata.category(sign) in ("Cc", "Cf") for sign in text.replace("\n", ""))


def test_the_point_and_the_nominal_utilisation_stand_in_the_finding() -> None:
    text = sheet(amplifier(spread=True))
    assert "Point   42.1 V, 1.2 A, level 12.3 V, t = 3.2 ms, active" in text
    assert "141 % of the allowance (nominal 131 %): exceeds" in flat(text)


def test_several_stages_give_several_sheets() -> None:
    assert sheets([amplifier(), result(finding(where=where(1.0, 1.0)))]).count("CALCULATION SHEET") == 2


def lines_of(text: str, symbol: str) -> list[str]:
    return [line for line in text.splitlines() if re.match(rf"\[\d+\] +{symbol} +=", line)]


def test_one_figure_found_on_two_roads_is_one_line_of_its_duty() -> None:
    chain = heat_chain()
    again = found("P_mean", chain["P_mean"].value, "W", "exact mean of v * i")
    t_j_max = given("T_j_max", [423.15], "degC", "npn160.toml: max.T_j")
    here = (chain["T_j_mean"], again)
    item = finding("junction-temperature", "worst-level", chain["T_j_mean"], t_j_max, "degC", 0.615, trace=here)
    text = sheet(result(item, finding("dissipation", "worst-level", again, 75.0)))
    assert len(lines_of(text, "P_mean")) == 1
    assert "Above P_mean = " in flat(text.split("Finding: dissipation")[1])


def test_equal_figures_of_two_duties_keep_their_own_lines() -> None:
    one, two = (found("P_mean", [5.0], "W", f"mean over {name}") for name in ("idle", "full"))
    text = sheet(result(finding(duty="idle", applied=one), finding(duty="full", applied=two)))
    assert len(lines_of(text, "P_mean")) == 2


def test_the_last_division_is_written_out() -> None:
    current = finding(
        "current", applied=given("I_rms", [3.0], "A", ""), allowed=given("I_C", [15.0], "A", ""), unit="A",
        utilisation=0.2,
    )  # fmt: skip
    assert "utilisation = I_rms / I_C = 3 A / 15 A = 0.2" in flat(sheet(result(current)))


def test_the_last_division_of_temperatures_counts_from_the_ambient() -> None:
    ambient = given("T_ambient", [313.15], "degC", "amp.toml")
    item = finding(
        "junction-temperature", applied=given("T_j_peak", [368.15], "degC", ""), unit="degC", utilisation=0.5,
        allowed=given("T_j_limit", [423.15], "degC", ""), trace=(ambient,),
    )  # fmt: skip
    assert (
        "utilisation = (T_j_peak - T_ambient) / (T_j_limit - T_ambient) = (95 degC - 40 degC) / (150 degC - 40 degC) "
        "= 0.5"
    ) in flat(sheet(result(item)))


def test_a_utilisation_that_is_no_division_is_not_written_as_one() -> None:
    assert "utilisation =" not in sheet(result(finding(applied=3.0, allowed=15.0, utilisation=0.9)))


def test_an_input_that_the_corner_takes_otherwise_is_called_nominal() -> None:
    high, nominal = (given("V_CC", [volts], "V", "vent.toml: load.V_CC") for volts in (27.0, 24.0))
    power = derived("P_mean", "V_CC**2 / 8", "W", high)
    text = flat(sheet(result(finding(applied=power), inputs=(nominal, given("f", [50.0], "Hz", "vent.toml: load.f")))))
    assert "V_CC = 24 V nominal, vent.toml: load.V_CC" in text
    assert "f = 50 Hz vent.toml: load.f" in text


def test_an_input_stands_once_though_the_formula_has_another_symbol_for_it() -> None:
    sink = given("R_th_sa", [0.45], "K/W", "amp.toml: heat_path.heatsink")
    text = sheet(result(finding(applied=derived("T", "R_th_sa * 2", "K/W", sink)), inputs=(sink.named("heatsink"),)))
    assert "Other inputs" not in text


@pytest.mark.parametrize("width", [40, 60])
def test_a_narrow_page_is_kept(width: int) -> None:
    assert all(cells(line) <= width for line in sheet(amplifier(spread=True), width).splitlines())
