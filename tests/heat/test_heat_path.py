"""[heat_path] and [surroundings]: what is read, what is missing, what is refused by name."""

from __future__ import annotations

from pathlib import Path

import pytest

from soacheck.errors import InputError, Problem
from soacheck.heat import path
from soacheck.heat.path import HeatPath
from soacheck.table import Document, read_document

GOOD = {
    "heat_path": {"interface": '"0.4 K/W"', "heatsink": '"1.6 K/W"'},
    "surroundings": {"T_ambient": '"40 degC"'},
}


def opened(folder: Path, **changes: str | None) -> tuple[HeatPath, Document]:
    """The good file with keys added, changed or (None) left out: heat_path__interface = ..."""
    tables = {table: dict(keys) for table, keys in GOOD.items()}
    for dotted, text in changes.items():
        table, _, name = dotted.partition("__")
        tables[table].pop(name, None)
        if text is not None:
            tables[table][name] = text
    lines = [f"[{table}]\n" + "".join(f"{k} = {v}\n" for k, v in keys.items()) for table, keys in tables.items()]
    file = folder / "stage.toml"
    file.write_text("\n".join(lines), encoding="utf-8")
    document = read_document(file, path.KEYS, shown_as="stage.toml")
    read = path.read(document.table("heat_path"), document.table("surroundings"))
    document.finish()
    return read, document


def refused(folder: Path, **changes: str | None) -> Problem:
    with pytest.raises(InputError) as caught:
        opened(folder, **changes)
    return caught.value.problems[0]


def test_a_plain_path_is_read_in_si(tmp_path: Path) -> None:
    read, document = opened(tmp_path)
    assert read.interface is not None
    assert read.R_th_sink is not None
    assert read.T_ambient is not None
    assert (read.sink, read.interface.at(0), read.R_th_sink.at(0)) == ("resistance", 0.4, 1.6)
    assert read.T_ambient.at(0) == pytest.approx(313.15)
    assert (read.missing, read.C_th_sink, read.shared_by) == ((), None, None)
    said = " ".join(document.assumptions)
    for key in ("surroundings.altitude", "heat_path.extra_heat", "surroundings.R_th_enclosure"):
        assert f"{key} not stated" in said


def test_a_sink_with_heat_capacity_has_both_figures(tmp_path: Path) -> None:
    read, _ = opened(tmp_path, heat_path__heatsink='{ R_th = "1.6 K/W", C_th = "210 J/K" }')
    assert read.R_th_sink is not None
    assert read.C_th_sink is not None
    assert (read.R_th_sink.at(0), read.C_th_sink.at(0)) == (1.6, 210.0)


def test_a_sink_with_an_uncertainty_is_still_a_resistance(tmp_path: Path) -> None:
    read, document = opened(tmp_path, heat_path__heatsink='{ value = "1.6 K/W", tol = "10 %" }')
    assert read.sink == "resistance"
    assert [spread.key for spread in document.spreads] == ["heat_path.heatsink"]


def test_every_other_key_is_read(tmp_path: Path) -> None:
    read, document = opened(
        tmp_path, heat_path__shared_by="4", heat_path__separate_sinks="true", heat_path__extra_heat='"12 W"',
        heat_path__working_voltage='"60 V"', surroundings__altitude='"0 m"', surroundings__R_th_enclosure='"0.05 K/W"',
        surroundings__extra_box_heat='"8 W"', surroundings__sink_outside="true", surroundings__touchable="false",
    )  # fmt: skip
    assert read.working_voltage is not None
    assert (read.shared_by, read.separate_sinks, read.sink_outside) == (4, True, True)
    assert [v.at(0) for v in (read.extra_heat, read.R_th_enclosure, read.extra_box_heat, read.working_voltage)] == [
        12.0, 0.05, 8.0, 60.0,
    ]  # fmt: skip
    assert document.assumptions == ()


@pytest.mark.parametrize(
    ("changes", "missing"),
    [
        ({"surroundings__T_ambient": None}, ["surroundings.T_ambient"]),
        ({"heat_path__heatsink": None}, ["heat_path.heatsink"]),
        ({"heat_path__interface": None}, ["heat_path.interface"]),
        ({"heat_path__interface": None, "heat_path__heatsink": '"ideal"'}, ["heat_path.interface"]),
        ({"heat_path__interface": None, "heat_path__heatsink": '"none"'}, []),
        ({"heat_path__interface": '"0 K/W"'}, []),
    ],
)
def test_what_is_absent_is_named_and_no_error(
    tmp_path: Path, changes: dict[str, str | None], missing: list[str]
) -> None:
    read, _ = opened(tmp_path, **changes)
    assert [item.key for item in read.missing] == missing
    assert all(item.where for item in read.missing)


def test_an_interface_without_a_sink_is_said_to_play_no_part(tmp_path: Path) -> None:
    read, _ = opened(tmp_path, heat_path__heatsink='"none"')
    assert len(read.unused) == 1
    assert read.unused[0].startswith("heat_path.interface plays no part")
    assert opened(tmp_path)[0].unused == ()


@pytest.mark.parametrize(
    ("changes", "key"),
    [
        ({"heat_path__interface": '{ material = "mica-greased" }'}, "heat_path.interface.material"),
        ({"heat_path__interface": '{ k = "3 W/(m K)", thickness = "0.2 mm" }'}, "heat_path.interface.k"),
        ({"heat_path__heatsink": '{ shape = "vertical-fins" }'}, "heat_path.heatsink.shape"),
        ({"heat_path__heatsink": '{ R_th = "1.6 K/W", at_rise = "75 K" }'}, "heat_path.heatsink.at_rise"),
        ({"heat_path__cutout": '{ node = "heatsink" }'}, "heat_path.cutout"),
        ({"heat_path__neighbours": '[{ P = "3 W" }]'}, "heat_path.neighbours"),
        ({"surroundings__altitude": '"300 m"'}, "surroundings.altitude"),
        ({"surroundings__touchable": "true"}, "surroundings.touchable"),
        ({"surroundings__touch_limit": '"60 degC"'}, "surroundings.touch_limit"),
    ],
)
def test_what_is_not_built_is_refused_by_name(tmp_path: Path, changes: dict[str, str | None], key: str) -> None:
    problem = refused(tmp_path, **changes)
    assert problem.key == key
    assert problem.problem.startswith("not built yet")
    assert problem.line is not None


def test_a_refused_sink_or_interface_lists_what_is_built(tmp_path: Path) -> None:
    sink = refused(tmp_path, heat_path__heatsink='{ shape = "vertical-fins" }').problem
    assert all(word in sink for word in ('"1.6 K/W"', "C_th", '"ideal"', '"none"'))
    assert '"0.4 K/W"' in refused(tmp_path, heat_path__interface='{ material = "mica" }').problem


@pytest.mark.parametrize(
    "changes",
    [
        {"heat_path__heatsink": '{ C_th = "210 J/K" }'}, {"heat_path__heatsink": '"0 K/W"'},
        {"heat_path__heatsink": '"nnone"'}, {"heat_path__interface": '"-0.1 K/W"'},
        {"heat_path__extra_heat": '"-3 W"'}, {"heat_path__shared_by": "0"}, {"surroundings__T_ambient": '"40 K"'},
        {"heat_path__heatsinks": '"1 K/W"'}, {"heat_path__heatsink": '{ R_th = "1.6 K/W", R_ht = "2 K/W" }'},
        {"surroundings__R_th_enclosure": '"0.05 W"'},
    ],
)  # fmt: skip
def test_a_wrong_value_is_an_input_error(tmp_path: Path, changes: dict[str, str | None]) -> None:
    problem = refused(tmp_path, **changes)
    assert problem.remedy
    assert problem.line is not None


def test_a_stated_case_temperature_takes_the_place_of_sink_and_interface(tmp_path: Path) -> None:
    read, _ = opened(
        tmp_path, heat_path__interface=None, heat_path__heatsink=None, heat_path__T_case='"80 degC"',
        surroundings__T_ambient=None,
    )  # fmt: skip
    assert read.T_case is not None
    assert read.T_ambient is not None
    assert (read.sink, read.missing) == ("case", ())
    assert read.T_case.at(0) == read.T_ambient.at(0) == pytest.approx(353.15)
    assert refused(tmp_path, heat_path__T_case='"80 degC"').key in {"heat_path.interface", "heat_path.heatsink"}


def test_every_key_says_what_it_means_and_none_is_declared_twice() -> None:
    dotted = [key.path for key in path.KEYS]
    assert len(set(dotted)) == len(dotted)
    assert all(key.meaning.endswith(".") for key in path.KEYS)


@pytest.mark.parametrize(
    "changes",
    [
        {"heat_path__heatsink": '"unknown"'},
        {"heat_path__heatsink": '"?"'},
        {"heat_path__interface": '"not known"'},
        {"surroundings__T_ambient": '"tbd"'},
    ],
)
def test_what_is_not_known_is_to_be_left_out_and_never_replaced_by_something_kinder(
    tmp_path: Path, changes: dict[str, str | None]
) -> None:
    remedy = refused(tmp_path, **changes).remedy
    assert remedy == "leave the line out when it is not known; the findings that need it become unproven"


def test_an_altitude_is_not_to_be_written_down_as_sea_level(tmp_path: Path) -> None:
    for text in ('"1500 m"', '"unknown"'):
        remedy = refused(tmp_path, surroundings__altitude=text).remedy
        assert "0 m" not in remedy
        assert "out" in remedy
    assert "R_th at that altitude" in refused(tmp_path, surroundings__altitude='"1500 m"').remedy


def test_a_sink_by_its_geometry_is_refused_in_one_sentence(tmp_path: Path) -> None:
    with pytest.raises(InputError) as caught:
        opened(tmp_path, heat_path__heatsink='{ shape = "vertical-fins", width = "200 mm", fins = 21 }')
    (problem,) = caught.value.problems
    assert problem.remedy == "leave shape, width and fins out"


@pytest.mark.parametrize(
    ("changes", "key"),
    [
        ({"heat_path__interface": '"0.4 K/W"'}, "heat_path.interface"),
        ({"heat_path__heatsink": '"none"'}, "heat_path.heatsink"),
        ({"heat_path__shared_by": "2"}, "heat_path.shared_by"),
        ({"heat_path__separate_sinks": "true"}, "heat_path.separate_sinks"),
        ({"heat_path__extra_heat": '"5 W"'}, "heat_path.extra_heat"),
        ({"surroundings__R_th_enclosure": '"0.5 K/W"'}, "surroundings.R_th_enclosure"),
        ({"surroundings__extra_box_heat": '"20 W"'}, "surroundings.extra_box_heat"),
        ({"surroundings__sink_outside": "true"}, "surroundings.sink_outside"),
    ],
)
def test_what_lies_behind_a_held_case_is_refused_beside_it(
    tmp_path: Path, changes: dict[str, str | None], key: str
) -> None:
    held: dict[str, str | None] = {"heat_path__interface": None, "heat_path__heatsink": None}
    problem = refused(tmp_path, **{**held, "heat_path__T_case": '"80 degC"', **changes})
    assert problem.key == key
    assert "T_case" in problem.problem
    assert problem.remedy == f"T_case or {key.rpartition('.')[2]}, not both"


BESIDE: dict[str, str | None] = {
    "heat_path__interface": None, "heat_path__separate_sinks": "true", "heat_path__shared_by": "1",
    "heat_path__extra_heat": '"5 W"', "heat_path__working_voltage": '"60 V"', "surroundings__extra_box_heat": '"9 W"',
}  # fmt: skip
IN_A_BOX = {"surroundings__R_th_enclosure": '"0.5 K/W"'}
OUTSIDE = {**IN_A_BOX, "surroundings__sink_outside": "true"}


@pytest.mark.parametrize(
    ("sink", "box", "idle"),
    [
        ('"none"', {}, "shared_by separate_sinks working_voltage extra_heat extra_box_heat"),
        ('"none"', IN_A_BOX, "shared_by separate_sinks working_voltage"),
        ('"ideal"', {}, "shared_by separate_sinks extra_heat extra_box_heat"),
        ('"ideal"', IN_A_BOX, "shared_by separate_sinks"),
        ('"1.6 K/W"', {}, "extra_box_heat"),
        ('"1.6 K/W"', IN_A_BOX, ""),
        ('"1.6 K/W"', OUTSIDE, "R_th_enclosure extra_box_heat"),
    ],
)
def test_what_plays_no_part_beside_such_a_sink_is_said(
    tmp_path: Path, sink: str, box: dict[str, str | None], idle: str
) -> None:
    read, _ = opened(tmp_path, **{**BESIDE, **box, "heat_path__heatsink": sink})
    assert [said.partition(" ")[0].rpartition(".")[2] for said in read.unused] == idle.split()


def test_a_sink_that_is_not_there_cannot_stand_outside_the_box(tmp_path: Path) -> None:
    # the bare device itself sits in the warm air of the box
    problem = refused(tmp_path, **{**OUTSIDE, "heat_path__heatsink": '"none"'})
    assert problem.key == "surroundings.sink_outside"
