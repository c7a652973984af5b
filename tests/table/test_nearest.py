"""Names offered for misspelt ones."""

from __future__ import annotations

import pytest

from soacheck.table.nearest import likeness, nearest

NAMES = ("V_CEO", "I_C", "P_tot", "R_DS_on", "R_th_jc", "T_ambient")


@pytest.mark.parametrize(
    ("written", "meant"),
    [
        ("RDS(on)", "R_DS_on"),
        ("rds_on", "R_DS_on"),
        ("Ptot", "P_tot"),
        ("VCEO", "V_CEO"),
        ("Rth_jc", "R_th_jc"),
        ("T_ambiant", "T_ambient"),
        ("R_th_cj", "R_th_jc"),
        ("xyzzy", None),
        ("", None),
        ("V" * 100_000, None),
    ],
)
def test_the_nearest_name_is_found_through_case_and_punctuation(written: str, meant: str | None) -> None:
    assert nearest(written, NAMES) == meant


def test_a_word_that_contains_the_letters_of_another_is_no_slip_of_the_pen() -> None:
    assert nearest("because", ("use", "V_CC")) is None
    assert nearest("usse", ("use", "V_CC")) == "use"


def test_only_case_and_punctuation_make_names_alike() -> None:
    assert likeness("RDS(on)", "R_DS_on") == 1.0
    assert likeness("R_DS_off", "R_DS_on") < 1.0
    assert nearest("anything", ()) is None
