"""Where things stand in a text."""

from __future__ import annotations

import tomllib

from hypothesis import given
from hypothesis import strategies as st

from soacheck.table.ledger import joined
from soacheck.table.positions import parts_of, place_of, places

TEXT = '''\
# [not] = "a table"
top = 1
[max] # ratings
V_CEO = "160 V"   # volts
"odd key" = 3
long = """
[soa]
""" # done
[[soa]]
points = [
  ["5 V", "15 A"],  # first, ]
  ["10 V", "15 A"],
]
[[soa]]
drive = { R_G = "10 ohm", "V.x" = [1, { y = 2 }] }
soa.sub.key = true
[[soa.part]]
z = 1
[thermal.Z_th_jc]
pulse = ["1 ms"]
'''


def test_every_key_and_element_has_its_line_and_value() -> None:
    assert tomllib.loads(TEXT)  # the index is for accepted text only
    expected = {
        "top": (2, "1"),
        "max": (3, ""),
        "max.V_CEO": (4, '"160 V"'),
        'max."odd key"': (5, "3"),
        "soa[1]": (9, ""),
        "soa[1].points[1]": (11, '["5 V", "15 A"]'),
        "soa[1].points[2][1]": (12, '"10 V"'),
        "soa[2].drive.R_G": (15, '"10 ohm"'),
        'soa[2].drive."V.x"[2].y': (15, "2"),
        "soa[2].soa.sub.key": (16, "true"),
        "soa[2].part[1].z": (18, "1"),
        "thermal.Z_th_jc": (19, ""),
        "thermal.Z_th_jc.pulse[1]": (20, '"1 ms"'),
    }
    found = {path: place_of(TEXT, path) for path in expected}
    assert {path: (place.line, place.value) for path, place in found.items() if place} == expected


def test_an_absent_key_stands_where_its_table_does() -> None:
    place = place_of(TEXT, "max.P_tot")
    assert place is not None
    assert (place.line, place.value) == (3, "")
    assert place_of(TEXT, "nowhere.P_tot") is None


@given(st.lists(st.text(min_size=1, max_size=8), min_size=1, max_size=4))
def test_a_dotted_path_of_any_names_can_be_taken_apart_again(names: list[str]) -> None:
    path = ""
    for name in names:
        path = joined(path, name)
    assert parts_of(path + "[3]") == (*names, 2)


_scalars = st.one_of(
    st.integers(-1000, 1000),
    st.booleans(),
    st.floats(-1e6, 1e6),
    st.text(st.characters(exclude_categories=("Cs", "Cc")), max_size=10),
)
_names = st.text(st.characters(exclude_categories=("Cs", "Cc")), min_size=1, max_size=6)
_values = st.recursive(
    _scalars,
    lambda inner: st.one_of(st.lists(inner, max_size=3), st.dictionaries(_names, inner, max_size=3)),
    max_leaves=8,
)
_documents = st.dictionaries(
    _names,
    st.one_of(
        _values,
        st.dictionaries(_names, _values, max_size=3),
        st.lists(st.dictionaries(_names, _values, max_size=3), min_size=1, max_size=3),
    ),
    max_size=4,
)


def _quoted(text: str) -> str:
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def _inline(value: object) -> str:
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, dict):
        return "{" + ", ".join(f"{_quoted(name)} = {_inline(inner)}" for name, inner in value.items()) + "}"
    if isinstance(value, list):
        return "[ # ]\n" + ",\n".join(_inline(inner) for inner in value) + "]"
    return _quoted(value) if isinstance(value, str) else repr(value)


def _written(data: dict[str, object]) -> str:
    """A document as TOML: tables under headers, arrays of tables, everything else inline at the top."""
    lines = [f"{_quoted(name)} = {_inline(value)}" for name, value in data.items() if not _headed(value)]
    for name, value in data.items():
        if isinstance(value, dict):
            lines.append(f"[ {_quoted(name)} ] # x")
            lines.extend(f"{_quoted(key)}={_inline(inner)}" for key, inner in value.items())
        elif isinstance(value, list) and _headed(value):
            for element in value:
                lines.append(f"[[{_quoted(name)}]]")
                lines.extend(f"{_quoted(key)} = {_inline(inner)}  # y" for key, inner in element.items())
    return "\n".join(lines)


def _headed(value: object) -> bool:
    return isinstance(value, dict) or (
        isinstance(value, list) and bool(value) and all(isinstance(element, dict) for element in value)
    )


def _paths(value: object, path: tuple[str | int, ...] = ()) -> list[tuple[tuple[str | int, ...], object]]:
    items = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    return [entry for name, inner in items for entry in [((*path, name), inner), *_paths(inner, (*path, name))]]


@given(_documents)
def test_the_index_of_any_document_finds_every_path_and_its_value(data: dict[str, object]) -> None:
    text = _written(data)
    assert tomllib.loads(text) == data
    index = places(text)
    for path, value in _paths(data):
        place = index[path]
        if place.value:  # re-read from the reported place: a second way to the same value
            assert tomllib.loads("x = " + place.value)["x"] == value
        else:
            assert isinstance(value, dict | list)
