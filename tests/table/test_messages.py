"""What a wrong file is told: every kind of mistake, with its line, its value and a line that would be right."""

from __future__ import annotations

import pytest

from soacheck.errors import InputError, Problem
from soacheck.table import Key, check_source, parse_source
from tests.table.declarations import COMPLETE, KEYS, MOSFET, document

_HEAD = '[device]\nname = "x"\nkind = "npn"\n'


def problems(text: str, device_kind: str = "npn") -> tuple[Problem, ...]:
    with pytest.raises(InputError) as caught:
        document(text, device_kind).finish()
    return caught.value.problems


def only(line: str, table: str) -> Problem:
    (problem,) = problems(f"{_HEAD}[{table}]\n{line}\n")
    assert problem.file == "amp.toml"
    assert problem.line == 5
    return problem


def test_the_message_has_the_form_of_the_contract() -> None:
    text = str(only('P_tot = "150 V"', "max"))
    assert text == (
        "amp.toml:5: max.P_tot = '150 V'\n"
        "  problem: a power is wanted here, V measures a voltage\n"
        '  remedy:  P_tot = "150 W"'
    )


def test_all_errors_of_a_file_come_together_in_its_order() -> None:
    found = problems('[thermal]\nR_th_jc = "1 V"\n[device]\nname = 3\n[max]\nT_j = "40 K"\n')
    assert [(problem.line, problem.key) for problem in found] == [
        (2, "thermal.R_th_jc"),
        (3, "device.kind"),
        (4, "device.name"),
        (6, "max.T_j"),
    ]
    with pytest.raises(InputError, match=r"(?s)R_th_jc.*device.kind.*device.name.*T_j"):
        raise InputError(*found)


@pytest.mark.parametrize(
    ("line", "table", "key", "value", "said", "remedy"),
    [
        ('P_tott = "150 W"', "max", "max.P_tott", "'150 W'", "has no key P_tott", 'was P_tot meant? P_tot = "150 W"'),
        ('ptot = "150 W"', "max", "max.ptot", "'150 W'", "has no key ptot", 'was P_tot meant? P_tot = "150 W"'),
        ('V_DSS = "60 V"', "max", "max.V_DSS", "'60 V'", "V_DSS belongs to n-mosfet; the device here is npn",
         'here it is V_CEO: V_CEO = "60 V"'),
        ("h_FE = 3", "max", "max.h_FE", "3", "does not belong under [max]", "put h_FE under [typical]"),
        ('R_th_jc = "1 K/W"', "max", "max.R_th_jc", "'1 K/W'", "does not belong", "put R_th_jc under [thermal]"),
        ("P_tot = 150", "max", "max.P_tot", "150", "a number without a unit", 'P_tot = "150 W"'),
        ("P_tot = true", "max", "max.P_tot", "true", "true and false are not quantities", "in quotes"),
        ("P_tot = 2020-01-02", "max", "max.P_tot", "2020-01-02", "a date or time stands where", "in quotes"),
        ("P_tot = nan", "max", "max.P_tot", "nan", "a number without a unit", ""),
        ('P_tot = ["1 W", "2 W"]', "max", "max.P_tot", '["1 W", "2 W"]', "not a list", "P_tot = "),
        ('P_tot = "150 MW"', "max", "max.P_tot", "'150 MW'", "not plausible", 'was "150 mW" meant? P_tot = "150 mW"'),
        ('I_C = "15 MA"', "max", "max.I_C", "'15 MA'", "not a unit that is known", 'I_C = "15 mA"'),
        ('T_j = "40 K"', "max", "max.T_j", "'40 K'", "measures a difference", "was 40 degC meant?"),
        ('T_j = "150 C"', "max", "max.T_j", "'150 C'", "coulomb", 'T_j = "150 degC"'),
        ('doubling = "10 degC"', "typical", "typical.doubling", "'10 degC'", "states a temperature", "was 10 K meant?"),
        ('V_CEO = "-160 V"', "max", "max.V_CEO", "'-160 V'", "not plausible", ""),
        ('V_EBO = "-5 V"', "max", "max.V_EBO", "'-5 V'", "magnitudes", 'V_EBO = "5 V"'),
        ('V_EBO = "0 V"', "max", "max.V_EBO", "'0 V'", "above zero", "leave V_EBO out"),
        ('P_tot = { value = "1 W", tol = "5 %", min = "0.9 W" }', "max", "max.P_tot",
         '{ value = "1 W", tol = "5 %", min = "0.9 W" }', "tol stands beside min or max", "either tol"),
        ('P_tot = { value = "1 W", min = "2 W" }', "max", "max.P_tot", '{ value = "1 W", min = "2 W" }',
         "min <= value <= max does not hold", "check"),
        ('P_tot = { min = "2 W" }', "max", "max.P_tot", '{ min = "2 W" }', "the value is missing", "P_tot = { value"),
        ('P_tot = { value = "1 W", grade = "garanteed" }', "max", "max.P_tot.grade", "'garanteed'",
         "a grade is one of guaranteed, typical, measured, assumed", 'grade = "guaranteed"'),
        ('P_tot = { value = "1 W", mni = "1 W" }', "max", "max.P_tot.mni", "'1 W'", "not a key of a quantity",
         "was min meant?"),
        ('P_tot = { value = "1 W", source = 3 }', "max", "max.P_tot.source", "3", "a text", "source = "),
        ('P_tot = { value = "1 W", tol = 5 }', "max", "max.P_tot.tol", "5", "per cent", 'tol = "5 %"'),
        ('T_j = { value = "150 degC", tol = "5 %" }', "max", "max.T_j.tol", "'5 %'", "difference", 'tol = "5 K"'),
        ('P_tot = { value = "1.1 mW", tol = "50 %" }', "max", "max.P_tot.tol", "'50 %'", "leaves what is plausible",
         "check"),
        ("h_FE = [40, 90]", "typical", "typical.h_FE", "[40, 90]", "2 values stand here", "give 3 values"),
        ("h_FE = [90, 40, 180]", "typical", "typical.h_FE", "[90, 40, 180]", "do not rise", "smallest value first"),
        ('h_FE = "90"', "typical", "typical.h_FE", "'90'", "a bare number is wanted", "h_FE = 90"),
        ("h_FE = true", "typical", "typical.h_FE", "true", "a bare number is wanted", "h_FE = 1"),
        ("h_FE = inf", "typical", "typical.h_FE", "inf", "not finite", ""),
        ("h_FE = 1e999", "typical", "typical.h_FE", "1e999", "not finite", ""),
        ("h_FE = 0", "typical", "typical.h_FE", "0", "not plausible here: 1 to 100000 is", ""),
        ('V_CE_sat = ["0.1 V", 2, "1 V"]', "typical", "typical.V_CE_sat[2]", "2", "without a unit", '"2 V"'),
        ('V_out = ["30 V", "0 V"]', "path", "path.V_out", '["30 V", "0 V"]', "do not rise", "smallest"),
        ('V_out = ["1 V", "2 V", "3 V"]', "path", "path.V_out", '["1 V", "2 V", "3 V"]', "a list of two", "2 values"),
        ('sink = "idael"', "path", "path.sink", "'idael'", 'a quantity or one of "ideal", "none"', 'sink = "ideal"'),
        ("sink = {}", "path", "path.sink.R_th", "", "wanted and absent", "R_th"),
        ("sink = { R_th = 1 }", "path", "path.sink.R_th", "1", "without a unit", 'R_th = "1 K/W"'),
        ("parallel = 0", "path", "path.parallel", "0", "a whole number of at least 1", "parallel = 1"),
        ("parallel = 2.0", "path", "path.parallel", "2.0", "a whole number", "parallel = 1"),
        ("parallel = true", "path", "path.parallel", "true", "a whole number", "parallel = 1"),
        ('altitude = "0 m"', "path", "path.altitude", "'0 m'", "altitude is not built yet; built: sea level", "leave"),
        ("bias = 3", "path", "path.bias", "3", "bias is a table", "[path.bias]"),
        ("Z_th_jc = 3", "thermal", "thermal.Z_th_jc", "3", "a table is wanted", "Z_th_jc = {"),
        ("Z_th_jc = { pulse = [] }", "thermal", "thermal.Z_th_jc.pulse", "[]", "a list is wanted", 'pulse = ["1 s"'),
        ('Z_th_jc = { pulse = "1 s" }', "thermal", "thermal.Z_th_jc.pulse", "'1 s'", "a list is wanted", ""),
        ('Z_th_jc = { foster = ["1 K/W"] }', "thermal", "thermal.Z_th_jc.foster[1]", "'1 K/W'", "2 values", ""),
        ('Z_th_jc = { foster = [["1 K/W"]] }', "thermal", "thermal.Z_th_jc.foster[1]", '["1 K/W"]', "2 values", ""),
        ('Z_th_jc = { foster = [["1 K/W", "1,5 s"]] }', "thermal", "thermal.Z_th_jc.foster[1][2]", "'1,5 s'",
         "a decimal comma", '"1.5 s"'),
        ("Ptot = 150", "max", "max.Ptot", "150", "besides, a number without", 'was P_tot meant? P_tot = "150 W"'),
        ('Ptot = "1,5 W"', "max", "max.Ptot", "'1,5 W'", "has no key Ptot; besides, a decimal comma",
         'was P_tot meant? use a decimal point: P_tot = "1.5 W"'),
        ("hFE = 90", "typical", "typical.hFE", "90", "has no key hFE", "was h_FE meant? h_FE = 90"),
        ('P_tot = "..."', "max", "max.P_tot", "'...'", "not filled in", "fill it in, or delete the line"),
        ('P_tot = "... W"', "max", "max.P_tot", "'... W'", "not filled in", "fill it in, or delete the line"),
        ('P_tot = { value = "\u2026 W", tol = "5 %" }', "max", "max.P_tot", '{ value = "\u2026 W", tol = "5 %" }',
         "not filled in", "delete the line"),
        ('V_CE_sat = ["... V", "1 V", "... V"]', "typical", "typical.V_CE_sat", '["... V", "1 V", "... V"]',
         "not filled in", "delete the line"),
        ('P_tot = "unknown"', "max", "max.P_tot", "'unknown'", "a power is wanted", "leave the line out"),
        ('sink = "unknown"', "path", "path.sink", "'unknown'", 'one of "ideal", "none"', "leave the line out"),
        ('sink = "n/a"', "path", "path.sink", "'n/a'", 'one of "ideal", "none"', "leave the line out"),
        ('sink = "big"', "path", "path.sink", "'big'", 'one of "ideal", "none"', "leave the line out"),
        ('"P tot" = "1 W"', "max", 'max."P tot"', "'1 W'", "has no key P tot", 'P_tot = "1 W"'),
    ],
)  # fmt: skip
def test_a_mistake_is_named_at_its_key_with_its_value_and_a_remedy(
    line: str, table: str, key: str, value: str, said: str, remedy: str
) -> None:
    problem = only(line, table)
    assert (problem.key, problem.value) == (key, value)
    assert said in problem.problem
    assert remedy in problem.remedy


@pytest.mark.parametrize(
    ("line", "key", "said", "remedy"),
    [
        ("name = 3", "device.name", "a text is wanted here", 'name = "..."'),
        ('tested = "true"', "device.tested", "true or false is wanted here, without quotes", "tested = true"),
        ('kind = "nnp"', "device.kind", 'one of "npn", "n-mosfet" is wanted here', 'kind = "npn"'),
        ("kind = 3", "device.kind", 'one of "npn", "n-mosfet" is wanted here', 'kind = "npn"'),
    ],
)
def test_a_wrong_form_names_the_form(line: str, key: str, said: str, remedy: str) -> None:
    found = {problem.key: problem for problem in problems(f"[device]\n{line}\n")}
    assert said in found[key].problem
    assert remedy in found[key].remedy


@pytest.mark.parametrize(
    ("key", "remedy"),
    [
        (Key(table="a", name="x", form="flag", required=True), "add x = true (or false) under [a]"),
        (Key(table="a", name="x", form="choice", choices=("p",), required=True), 'add x = "p" under [a]'),
        (
            Key(table="a", name="x", form="choice", choices=("p", "q", "r"), required=True, where="the drawing"),
            'add x = "p" (or "q", "r") under [a] (the drawing)',
        ),
        (
            Key(table="a", name="x", form="points", columns=("time", ""), required=True),
            'add x = [["... s", ...], ...] under [a]',
        ),
        (Key(table="a", name="x", form="points", columns=("time",), required=True), 'add x = ["... s", ...] under [a]'),
        (Key(table="a", name="x", dimension="voltage", required=True), 'add x = "... V" under [a]'),
        (Key(table="a", name="x", form="text", required=True), 'add x = "..." under [a]'),
        (Key(table="a", name="x", form="count", required=True), "add x = ... under [a]"),
        (Key(table="a", name="x", form="tree", required=True), "add x = ... under [a]"),
    ],
)
def test_a_key_that_is_absent_is_asked_for_by_a_line_of_its_form(key: Key, remedy: str) -> None:
    with pytest.raises(InputError) as caught:
        check_source(parse_source("[a]\n", shown_as="f.toml"), [key]).finish()
    (problem,) = caught.value.problems
    assert (problem.problem, problem.remedy) == ("this key is wanted and absent", remedy)


def test_an_unfilled_text_is_said_to_be_unfilled() -> None:
    (problem,) = problems('[device]\nname = "..."\nkind = "npn"\n')
    assert (problem.key, problem.problem, problem.remedy) == ("device.name", "not filled in", "fill it in")


def test_a_text_that_merely_ends_in_dots_is_a_text() -> None:
    document('[device]\nname = "and so on ..."\nkind = "npn"\n').finish()


def test_keys_refused_for_one_reason_are_refused_in_one_sentence() -> None:
    waiting = [
        Key(table="a", name=name, not_built="not built yet: this is", dimension="length") for name in ("x", "y", "z")
    ]
    ready = check_source(parse_source("[a]\nz = 1\nx = 2\ny = 3\n", shown_as="f.toml"), waiting)
    with pytest.raises(InputError) as caught:
        ready.finish()
    (problem,) = caught.value.problems
    assert (problem.key, problem.line, problem.remedy) == ("a.z", 2, "leave z, x and y out")


def test_every_fault_of_a_misspelt_key_comes_in_the_same_report() -> None:
    found = problems(_HEAD + '[thermal]\nR_thjc = { value = "1,25 K/W", grade = "garanteed" }\n')
    assert "has no key R_thjc" in found[0].problem
    said = " ".join(problem.remedy for problem in found)
    assert '"1.25 K/W"' in said
    assert 'grade = "guaranteed"' in said


def test_a_characteristic_of_another_kind_is_refused_like_a_rating() -> None:
    more = [Key(table="typical", name="R_on", dimension="resistance", belongs_to=MOSFET)]
    text = _HEAD + '[typical]\nR_on = "45 mohm"\n'
    made = check_source(parse_source(text, shown_as="amp.toml"), (*KEYS, *more), device_kind="npn")
    with pytest.raises(InputError, match="R_on belongs to n-mosfet; the device here is npn"):
        made.finish()


def test_a_rating_is_never_offered_for_a_characteristic_nor_the_reverse() -> None:
    # V_CEsatt is near to V_CEO by its letters, but nearer to a characteristic: neither is offered under [max].
    wrong = only('V_CEsatt = "1 V"', "max")
    assert "meant" not in wrong.remedy
    assert "V_CE_sat" not in wrong.problem + wrong.remedy
    other = only('V_EBOO = "1 V"', "typical")
    assert "meant" not in other.remedy
    assert "V_EBO " not in other.remedy


def test_a_slip_beside_the_right_key_is_not_offered_a_duplicate() -> None:
    (problem,) = problems(_HEAD + '[max]\nP_tot = "1 W"\nPtot = "2 W"\n')
    assert problem.remedy == "P_tot is stated too: keep one of the two"
    (foreign,) = problems(_HEAD + '[max]\nV_CEO = "60 V"\nV_DSS = "60 V"\n')
    assert foreign.remedy == "leave it out: V_CEO stands here already"


def test_a_key_outside_its_table_is_told_where_it_belongs() -> None:
    (problem,) = problems('V_CEO = "160 V"\n' + _HEAD)
    assert (problem.line, problem.remedy) == (1, "put V_CEO under [max]")


def test_a_misspelt_table_is_offered_the_right_one_and_not_called_missing_as_well() -> None:
    (problem,) = problems('[devcie]\nname = "x"\nkind = "npn"\n')
    assert (problem.line, problem.key, problem.remedy) == (1, "devcie", "was [device] meant?")


def test_a_misspelt_required_key_is_not_called_missing_as_well() -> None:
    (problem,) = problems('[device]\nnmae = "x"\nkind = "npn"\n')
    assert problem.remedy == 'was name meant? name = "x"'


def test_a_required_key_of_an_absent_top_table_is_missing_and_of_an_absent_inner_table_is_not() -> None:
    found = problems('[max]\nP_tot = "1 W"\n')
    assert [(problem.key, problem.line) for problem in found] == [("device.name", None), ("device.kind", None)]


def test_a_required_key_of_an_element_is_missing_in_that_element() -> None:
    (problem,) = problems(_HEAD + '[[soa]]\npoints = [["1 V", "1 A"]]\n[[soa]]\npulse = "dc"\n')
    assert (problem.key, problem.line) == ("soa[2].points", 6)
    assert "[[soa]]" in problem.remedy


def test_an_array_of_tables_written_as_a_table_is_told_how_it_is_headed() -> None:
    (problem,) = problems(_HEAD + '[soa]\npoints = [["1 V", "1 A"]]\n')
    assert "[[soa]]" in problem.remedy


def test_an_unknown_key_with_no_near_name_is_told_what_is_known() -> None:
    problem = only("xyzzy = 1", "path")
    assert problem.remedy == "known here: V_out, extra, load, parallel, sink"


def test_a_mosfet_file_with_bipolar_keys_names_the_kind_and_the_key_that_is_meant() -> None:
    (problem,) = problems('[device]\nname = "x"\nkind = "n-mosfet"\n[max]\nV_CEO = "60 V"\n', "n-mosfet")
    assert problem.problem == "V_CEO belongs to npn; the device here is n-mosfet"
    assert problem.remedy == 'here it is V_DSS: V_DSS = "60 V"'


def test_a_foreign_key_without_a_counterpart_is_to_be_left_out() -> None:
    (problem,) = problems('[device]\nname = "x"\nkind = "n-mosfet"\n[max]\nV_EBO = "5 V"\n', "n-mosfet")
    assert problem.remedy == "leave it out"


def test_a_file_that_is_wrong_throughout_is_cut_off_after_a_hundred_errors() -> None:
    found = problems(_HEAD + "[max]\n" + "\n".join(f'V_C{number} = "1 V"' for number in range(5000)))
    assert len(found) == 101
    assert found[-1].problem == "there is more, not listed here"


def test_a_long_value_is_cut_and_control_characters_do_not_reach_a_terminal() -> None:
    problem = only('P_tot = "' + "1" * 500 + '"', "max")
    assert len(problem.value) == 60
    escape = only('P_tot = "\\u001b[31mred\\u0007\\u202e"', "max")
    assert "\x1b" in escape.value  # kept as data
    assert str(escape).replace("\n", "").isprintable()
    odd_key = only('"P\\u001b" = "1 W"', "max")
    assert str(odd_key).replace("\n", "").isprintable()


def test_the_complete_example_has_nothing_wrong() -> None:
    document(COMPLETE).finish()
