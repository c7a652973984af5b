"""What readers get out of a file."""

from __future__ import annotations

import pytest

from soacheck.errors import InputError
from soacheck.table import CasePlan, Document, Key, Missing, Spread, check_source, parse_source
from tests.table.declarations import COMPLETE, document


@pytest.fixture
def complete() -> Document:
    read = document(COMPLETE)
    read.finish()
    return read


def test_a_quantity_is_traced_to_file_key_and_stated_source(complete: Document) -> None:
    current = complete.table("max").quantity("I_C")
    assert current is not None
    assert current.value.tolist() == [15.0]
    assert (current.symbol, current.unit) == ("I_C", "A")
    assert (current.source, current.grade) == ("amp.toml: max.I_C; page 2", "guaranteed")


def test_a_temperature_is_held_in_kelvin_under_the_unit_degc(complete: Document) -> None:
    limit = complete.table("max").quantity("T_j")
    assert limit is not None
    assert limit.value.tolist() == [423.15]
    assert limit.unit == "degC"


def test_the_grade_is_the_stated_one_else_that_of_the_key(complete: Document) -> None:
    power, drift = complete.table("max").quantity("P_tot"), complete.table("typical").quantity("V_BE_tempco")
    assert power is not None
    assert drift is not None
    assert (power.grade, drift.grade) == ("measured", "typical")
    assert drift.value.tolist() == [-0.002]


def test_a_list_of_three_is_min_typ_max(complete: Document) -> None:
    gain = complete.table("typical").three("h_FE")
    assert gain is not None
    assert [part.at(0) for part in gain if part] == [40.0, 90.0, 180.0]
    assert [part.symbol for part in gain if part] == ["h_FE"] * 3
    assert [part.grade for part in gain if part] == ["guaranteed", "typical", "guaranteed"]
    middle = complete.table("typical").quantity("h_FE")
    assert middle is not None
    assert middle.at(0) == 90.0


def test_a_single_value_is_the_typ_of_three_and_an_inline_table_gives_its_ends(complete: Document) -> None:
    low, typ, high = complete.table("typical").three("V_CE_sat") or (None, None, None)
    assert typ is not None
    assert (low, typ.at(0), high) == (None, 0.6, None)
    spread = document('[typical]\nV_CE_sat = { value = "0.6 V", min = "0.5 V", max = "0.9 V" }').table("typical")
    ends = spread.three("V_CE_sat")
    assert ends is not None
    assert [part.at(0) for part in ends if part] == [0.5, 0.6, 0.9]


def test_an_operating_range_is_read_with_span_only(complete: Document) -> None:
    cells = complete.table("path")
    span = cells.span("V_out")
    assert span is not None
    assert (span[0].at(0), span[1].at(0)) == (0.0, 30.0)
    with pytest.raises(ValueError, match="span"):
        cells.quantity("V_out")
    alone = document('[path]\nV_out = "5 V"').table("path")
    both = alone.span("V_out")
    assert both is not None
    assert both[0].at(0) == both[1].at(0) == 5.0
    assert alone.quantity("V_out") is not None


def test_words_tables_and_quantities_share_one_key(complete: Document) -> None:
    inside = complete.table("path").inside("sink")
    assert inside is not None
    resistance = inside.quantity("R_th")
    assert resistance is not None
    assert resistance.source == "amp.toml: path.sink.R_th"
    word = document('[path]\nsink = "ideal"').table("path")
    assert (word.text("sink"), word.quantity("sink"), word.inside("sink")) == ("ideal", None, None)
    value = document('[path]\nsink = { value = "2 K/W", tol = "5 %" }').table("path")
    assert (value.text("sink"), value.inside("sink")) == (None, None)
    assert value.quantity("sink") is not None


def test_points_are_in_si_and_read_only(complete: Document) -> None:
    first, second = complete.listed("soa")
    assert first.text("pulse") == "dc"
    pulse, points = second.quantity("pulse"), second.points("points")
    assert pulse is not None
    assert points is not None
    assert pulse.at(0) == 0.01
    assert points.tolist() == [[5.0, 25.0], [160.0, 0.9]]
    assert not points.flags.writeable
    curve = complete.table("thermal").inside("Z_th_jc")
    assert curve is not None
    flat = curve.points("pulse")
    assert flat is not None
    assert flat.tolist() == [[1e-5], [1e-3]]


def test_elements_of_an_array_count_from_one(complete: Document) -> None:
    assert [cells.path for cells in complete.listed("soa")] == ["soa[1]", "soa[2]"]
    assert complete.listed("soa")[1].missing("points").key == "soa[2].points"


def test_text_flag_and_count_are_what_they_are() -> None:
    cells = document('[device]\nname = "x"\nkind = "npn"\ntested = true\npins = 3').table("device")
    assert (cells.text("name"), cells.text("kind"), cells.flag("tested"), cells.count("pins")) == ("x", "npn", True, 3)
    assert cells.count("tested") is None


def test_an_absent_key_is_none_and_an_undeclared_one_a_bug(complete: Document) -> None:
    cells = complete.table("max")
    assert cells.quantity("V_EBO") is None
    assert not cells.has("V_EBO")
    with pytest.raises(KeyError):
        cells.quantity("V_XYZ")
    with pytest.raises(KeyError):
        cells.has("V_XYZ")
    with pytest.raises(KeyError):
        complete.table("max").inside("V_XYZ")
    with pytest.raises(KeyError):
        complete.table("nowhere")


def test_a_key_of_another_kind_of_device_is_absent_and_not_a_bug(complete: Document) -> None:
    assert complete.table("max").quantity("V_DSS") is None
    assert not complete.table("max").has("V_DSS")


def test_a_default_is_listed_as_an_assumption_when_it_is_taken(complete: Document) -> None:
    assert complete.assumptions == ()
    for _ in range(2):
        extra = complete.table("path").quantity("extra")
        assert extra is not None
        assert (extra.at(0), extra.source) == (0.0, "nothing else heats the sink")
    assert complete.assumptions == ("nothing else heats the sink",)
    assert complete.table("path").count("parallel") == 1
    assert complete.assumptions == ("nothing else heats the sink",)


def test_a_stated_value_is_no_assumption() -> None:
    read = document('[path]\nextra = "3 W"')
    extra = read.table("path").quantity("extra")
    assert extra is not None
    assert (extra.at(0), read.assumptions) == (3.0, ())


def test_a_wrong_default_is_a_bug() -> None:
    keys = (Key(table="path", name="extra", dimension="power", default="0 V"),)
    read = check_source(parse_source("[path]", shown_as="amp.toml"), keys)
    with pytest.raises(ValueError, match="default"):
        read.table("path").quantity("extra")


def test_two_declarations_of_one_key_are_a_bug() -> None:
    keys = (Key(table="a", name="b", dimension="power"), Key(table="a", name="b", dimension="voltage"))
    with pytest.raises(ValueError, match="declared twice"):
        check_source(parse_source("[a]", shown_as="amp.toml"), keys, device_kind="npn")


def test_missing_names_the_key_and_where_a_sheet_states_it(complete: Document) -> None:
    cells = complete.table("max")
    assert cells.missing("P_tot") == Missing(key="max.P_tot", where="first page, absolute maximum ratings")
    assert cells.missing("I_C") == Missing(key="max.I_C", where="state max.I_C in amp.toml")


def test_spreads_are_collected_with_their_dotted_keys(complete: Document) -> None:
    assert complete.spreads == (
        Spread(key="max.P_tot", nominal=150.0, low=135.0, high=165.0),
        Spread(key="thermal.R_th_jc", nominal=0.8, low=0.6, high=1.0),
    )


def test_min_alone_leaves_the_other_side_at_the_value() -> None:
    read = document('[max]\nV_CEO = { value = "160 V", min = "150 V" }\nT_j = { value = "150 degC", tol = "5 K" }')
    assert read.spreads == (
        Spread(key="max.V_CEO", nominal=160.0, low=150.0, high=160.0),
        Spread(key="max.T_j", nominal=423.15, low=418.15, high=428.15),
    )


def test_a_tolerance_of_nothing_is_no_spread() -> None:
    assert document('[max]\nV_CEO = { value = "160 V", tol = "0 %" }').spreads == ()


def test_a_tree_is_handed_over_and_its_quantities_are_read_once(complete: Document) -> None:
    cells = complete.table("path")
    assert cells.raw("load") == {"series": ["0.5 ohm", {"value": "8 ohm", "tol": "10 %"}]}
    for _ in range(2):
        first = cells.tree_quantity("path.load.series[1]", "0.5 ohm", "resistance", (0.0, 1e6))
        second = cells.tree_quantity("path.load.series[2]", {"value": "8 ohm", "tol": "10 %"}, "resistance", (0.0, 1e6))
    assert first is not None
    assert second is not None
    assert (first.symbol, first.at(0), first.source) == ("series", 0.5, "amp.toml: path.load.series[1]")
    assert complete.spreads[-1].key == "path.load.series[2]"
    assert len(complete.spreads) == 3
    assert complete.keys_stated()[-3:] == ("path.load.series[1]", "path.load.series[2]", "path.bias.R_1")


def test_a_wrong_quantity_in_a_tree_is_reported_once_with_its_line(complete: Document) -> None:
    cells = complete.table("path")
    for _ in range(2):
        assert cells.tree_quantity("path.load.series[1]", "0.5 V", "resistance", (0.0, 1e6)) is None
    with pytest.raises(InputError) as caught:
        complete.finish()
    (problem,) = caught.value.problems
    assert (problem.line, problem.key) == (30, "path.load.series[1]")


def test_a_plan_puts_other_numbers_under_the_same_keys(complete: Document) -> None:
    plan = CasePlan.corners(complete.spreads)
    over = complete.over(plan)
    power = over.table("max").quantity("P_tot")
    resistance = over.table("thermal").quantity("R_th_jc")
    current = over.table("max").quantity("I_C")
    assert power is not None
    assert resistance is not None
    assert current is not None
    assert power.value.tolist() == [150.0, 135.0, 135.0, 165.0, 165.0]
    assert resistance.value.tolist() == [0.8, 0.6, 1.0, 0.6, 1.0]
    assert current.value.tolist() == [15.0]
    assert power.source == "amp.toml: max.P_tot"


def test_stated_quantities_come_in_the_order_of_the_file(complete: Document) -> None:
    symbols = [value.symbol for value in complete.stated()]
    assert symbols == [
        "V_CEO", "I_C", "P_tot", "T_j", "R_th_jc", "pulse", "h_FE", "h_FE", "h_FE", "V_CE_sat", "V_BE_tempco",
        "R_th", "V_out", "V_out", "R_1",
    ]  # fmt: skip


def test_a_reader_can_refuse_a_key_and_a_path_inside_it(complete: Document) -> None:
    complete.table("path").refuse("load.series[2]", "wrong", "right")
    complete.table("path").refuse("load.series[2]", "wrong", "right")
    complete.listed("soa")[1].refuse("points", "they cross", "check them")
    complete.table("max").refuse("", "all of it", "start again")
    with pytest.raises(InputError) as caught:
        complete.finish()
    found = [(problem.key, problem.line, problem.value) for problem in caught.value.problems]
    assert found == [
        ("max", 5, ""),
        ("soa[2].points", 20, '[["5 V", "25 A"], ["160 V", "0.9 A"]]'),
        ("path.load.series[2]", 30, '{ value = "8 ohm", tol = "10 %" }'),
    ]


def test_a_unit_read_through_pint_is_a_caution() -> None:
    read = document('[thermal]\nR_th_jc = "1 K*s/J"')
    assert read.cautions == (
        ("unit-read", 'amp.toml: thermal.R_th_jc: "1 K*s/J" was read as 1 K/W (kelvin * second / joule)'),
    )


def test_a_source_can_be_peeked_at_before_its_keys_are_known() -> None:
    source = parse_source(COMPLETE, shown_as="dir/amp.toml")
    assert source.peek("device", "kind") == "npn"
    assert source.peek("path.bias", "R_1") == "1 kohm"
    assert source.peek("device.name", "kind") is None
    assert source.peek("no", "kind") is None
    assert source.base_name == "amp.toml"
