"""Loads as impedances: elements, groups, tables."""

from __future__ import annotations

import cmath
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from soacheck.load.parts.impedance import (
    Element,
    Group,
    Impedance,
    Sampled,
    elements,
    impedance,
    is_resistance,
    traced_elements,
)
from soacheck.load.parts.impedance_table import Refused, parse

from .pushpull import part


def at(load: Impedance, f: float) -> complex:
    return complex(impedance(load, np.array([[f]]))[0, 0])


def by_hand(load: Impedance, f: float) -> complex:
    """Python's complex numbers, element by element."""
    if isinstance(load, Element):
        number, omega = float(load.value.value[0]), 2 * math.pi * f
        return {"R": complex(number), "L": 1j * omega * number, "C": 1 / (1j * omega * number)}[load.kind]
    assert isinstance(load, Group)
    parts = [by_hand(p, f) for p in load.parts]
    return sum(parts) if load.kind == "series" else 1 / sum(1 / p for p in parts)


leaves = st.one_of(
    st.floats(0.1, 1e3).map(lambda x: part("R", x)),
    st.floats(1e-5, 0.1).map(lambda x: part("L", x)),
    st.floats(1e-9, 1e-4).map(lambda x: part("C", x)),
)
trees = st.recursive(
    leaves,
    lambda inner: st.builds(
        lambda kind, parts: Group(kind=kind, parts=tuple(parts)),
        st.sampled_from(["series", "parallel"]),
        st.lists(inner, min_size=1, max_size=3),
    ),
    max_leaves=8,
)


@given(load=trees, f=st.floats(10.0, 1e5))
def test_nested_loads_agree_with_complex_arithmetic(load: Impedance, f: float) -> None:
    # Second way: Python complex numbers. Resonances lose digits by cancellation: compare on the scale of the parts.
    try:
        expected = by_hand(load, f)
    except ZeroDivisionError:
        return
    scale = max(abs(by_hand(element, f)) for element in elements(load))
    if 1e-6 * scale < abs(expected) < 1e6 * scale:
        assert cmath.isclose(at(load, f), expected, rel_tol=1e-7, abs_tol=1e-9 * scale)


def test_the_contract_example_has_the_impedance_worked_by_hand() -> None:
    # 0.5 ohm in series with 8 ohm parallel to 1.2 mH at 1 kHz: X = 7.5398 ohm;
    # 8 || j7.5398 = 8 X^2/(64 + X^2) + j 64 X/(64 + X^2) = 3.7633 + j3.9930.
    load = Group(
        kind="series",
        parts=(part("R", 0.5), Group(kind="parallel", parts=(part("R", 8.0), part("L", 1.2e-3)))),
    )
    Z = at(load, 1000.0)
    assert Z.real == pytest.approx(4.2633, abs=2e-4)
    assert Z.imag == pytest.approx(3.9930, abs=2e-4)


def test_values_over_cases_stay_apart() -> None:
    Z = impedance(part("R", np.array([4.0, 8.0])), np.array([[50.0, 1000.0]]))
    np.testing.assert_array_equal(Z.real, [[4.0, 4.0], [8.0, 8.0]])


def test_only_resistances_make_a_resistance() -> None:
    assert is_resistance(Group(kind="parallel", parts=(part("R", 8.0), part("R", 8.0))))
    assert not is_resistance(Group(kind="series", parts=(part("R", 8.0), part("L", 1e-6))))
    flat = Sampled(file="z.csv", f=np.array([10.0, 20.0]), magnitude=np.array([8.0, 8.0]), phase=np.zeros(2))
    assert not is_resistance(flat)


def test_elements_of_one_letter_are_numbered() -> None:
    load = Group(kind="series", parts=(part("R", 1.0), part("R", 2.0), part("L", 1e-3)))
    assert [value.symbol for value in traced_elements(load)] == ["R_1", "R_2", "L"]


TABLE = "f/Hz,|Z|/ohm,phase/deg\n20,8.0,10\n200,32,-20\n2000,8,0\n"


def test_a_table_is_straight_on_log_paper_between_its_rows() -> None:
    # Analytic: half way on log paper between 8 and 32 ohm is 16 ohm, at sqrt(20 * 200) Hz; the phase is halved too.
    rows = parse(TABLE, "z.csv")
    load = Sampled(file=rows.file, f=rows.f, magnitude=rows.magnitude, phase=rows.phase)
    Z = at(load, math.sqrt(20 * 200))
    assert abs(Z) == pytest.approx(16.0)
    assert math.degrees(cmath.phase(Z)) == pytest.approx(-5.0)
    assert abs(at(load, 200.0)) == pytest.approx(32.0)
    assert math.isnan(at(load, 19.0).real)


@pytest.mark.parametrize(
    "text",
    [
        "20,8.0,10\n200,32,-20\n2000,8,0",
        "f;Z;phi\r\n20;8,0;10\r\n200;32;-20\r\n2000;8;0\r\n",
        "# loudspeaker\n\nf\tZ\tphi\n20\t8.0\t10\n200\t3.2e1\t-20\n\n2000\t8\t0\n   \n",
        " 20 , 8. , +10 \n200 , 32 , -20\n2000 , 8 , 0\n",
    ],
)
def test_separators_headers_and_decimal_commas_are_understood(text: str) -> None:
    rows = parse(text, "z.csv")
    np.testing.assert_array_equal(rows.f, [20, 200, 2000])
    np.testing.assert_array_equal(rows.magnitude, [8, 32, 8])
    np.testing.assert_array_equal(rows.phase, [10, -20, 0])


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("f,Z,p\n20,8,0\n200,8\n", "line 3: 2 fields"),
        ("20,8,0\n200,OL,0\n", "line 2: 'OL' is not a number"),
        ("20,8,0\n\n20,8,0\n", "line 3: the frequency 20 Hz does not rise"),
        ("20,8,0\n200,-8,0\n", "line 2: the magnitude -8 ohm is not positive"),
        ("20,8,0\n200,8,120\n", "line 2: the phase 120 degrees"),
        ("20,8,0\n200,8,nan\n", "line 2: 'nan' is not a number"),
        ("20,8,0\n1e999,8,0\n", "line 2: the frequency 1e999 Hz is not positive"),
        ("0,8,0\n200,8,0\n", "line 1: the frequency 0 Hz is not positive"),
        ("20,8,0,\n200,8,0,\n", "line 1: 4 fields"),
        ("20,8,0\nend\n", "line 2: 1 fields"),
        ("20,8,0\n", "1 rows of numbers"),
        ("", "0 rows of numbers"),
    ],
)
def test_a_bad_table_is_refused_with_its_line(text: str, said: str) -> None:
    with pytest.raises(Refused, match=said.replace("(", r"\(")):
        parse(text, "z.csv")


@given(text=st.text(max_size=200))
def test_any_text_is_a_table_or_refused(text: str) -> None:
    try:
        rows = parse(text, "z.csv")
    except Refused:
        return
    assert rows.f.size >= 2
    assert bool(np.all(np.diff(rows.f) > 0))
