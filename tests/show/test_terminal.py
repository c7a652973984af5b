"""The result on the terminal."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import replace

import numpy as np
import pytest

from soacheck.result import Caution, DeviceFacts, DutyResult, StageFacts, Status
from soacheck.show.terminal import terminal, terminal_blocks
from soacheck.show.text import cells
from soacheck.trace import given

from .build import HOSTILE, amplifier, finding, reason, result, where


@pytest.mark.parametrize("spread", [False, True])
def test_every_line_fits_eighty_columns(spread: bool) -> None:
    assert all(cells(line) <= 80 for line in terminal(amplifier(spread)).splitlines())


def test_the_first_line_says_verdict_governing_limit_duty_half_and_amounts() -> None:
    head = " ".join(terminal(amplifier()).split("\n\n")[0].split())
    assert head.startswith("EXCEEDS: safe-area in full-level (upper), 141 % of the allowance, 1.2 of 0.851 A")
    assert "at 42.1 V, 1.2 A, level 12.3 V, t = 3.2 ms, active" in head
    assert "8 findings: 2 exceeds, 2 unproven, 1 marginal, 3 within" in head


def test_the_verdict_line_says_whether_values_are_nominal_only() -> None:
    assert "(nominal values only)" in " ".join(terminal(amplifier()).split())
    spread = " ".join(terminal(amplifier(spread=True)).split())
    assert "nominal values only" not in spread
    assert "(worst corner of the stated spreads)" in spread


def test_the_blocks_come_in_the_order_verdict_duties_findings_gaps_assumptions_cautions() -> None:
    text = terminal(amplifier())
    titles = (
        "EXCEEDS:",
        "Duties",
        "Findings",
        "Not analysed",
        "Assumptions",
        "Cautions",
        "Arithmetic on the values",
    )
    places = [text.index(title) for title in titles]
    assert places == sorted(places)


def test_findings_keep_the_order_of_the_result_and_each_carries_its_word() -> None:
    rows = re.findall(r"^ +(?:[\d.]+ %|-) +(exceeds|unproven|marginal|within) ", terminal(amplifier()), re.MULTILINE)
    assert rows == ["exceeds"] * 2 + ["unproven"] * 2 + ["marginal"] + ["within"] * 3


def test_nominal_utilisations_stand_beside_those_of_the_worst_corner() -> None:
    text = terminal(amplifier(spread=True))
    assert re.search(r"used +nominal", text)
    assert re.search(r"141 % +131 % +exceeds", text)
    assert "nominal " not in terminal(amplifier()).split("Findings")[1]


def test_what_is_missing_stands_under_its_finding_with_where_to_find_it() -> None:
    text = terminal(amplifier())
    assert "missing: load.I_B (the base drive of the schematic)" in text
    assert "as for drive in worst-level (upper); missing: load.I_B, typical.V_CE_sat" in text


def test_a_reason_that_does_not_apply_is_not_printed() -> None:
    item = finding(status=Status.MARGINAL, utilisation=0.9, reasons=(reason("not here", applies=False),))
    assert "not here" not in terminal(result(item))


def test_an_unproven_verdict_names_what_is_missing() -> None:
    item = finding(
        "dissipation", "idle", 5.0, None, "W", np.nan, Status.UNPROVEN,
        reasons=(reason("no case temperature", ("heat_path.heatsink", "the sink's data sheet")),),
    )  # fmt: skip
    head = terminal(result(item)).splitlines()[0]
    assert head.startswith("UNPROVEN: dissipation in idle cannot be decided; missing: heat_path.heatsink")


def test_nothing_allowed_is_said_in_words() -> None:
    item = finding("safe-area", "held", 1.2, 0.0, "A", np.nan, Status.EXCEEDS, where=where(42.0, 1.2))
    text = terminal(result(item))
    assert "nothing is allowed, 1.2 of 0 A" in text
    assert "nan" not in text


def test_a_result_without_findings_or_duties_is_unproven_in_words() -> None:
    text = terminal(result())
    assert text.startswith("UNPROVEN: no limit could be checked (nominal values only)\n")
    assert "Duties: none" in text
    assert "Findings: none" in text


def test_unknown_figures_of_a_duty_are_dashes_with_a_legend() -> None:
    duty = DutyResult(name="held-worst-point", half=None, P_mean=given("P_mean", [np.nan], "W", ""))
    text = terminal(result(finding(), duties=(duty,)))
    assert re.search(r"held-worst-point( +-){7}$", text, re.MULTILINE)
    assert "  - not known" in text
    assert "nan" not in text


def test_a_long_duty_name_gets_a_line_of_its_own() -> None:
    duty = DutyResult(name="a-very-long-name-of-a-duty", half="lower", P_mean=given("P_mean", [2.0], "W", ""))
    text = terminal(result(finding(duty="a-very-long-name-of-a-duty"), duties=(duty,)))
    assert "\n  a-very-long-name-of-a-duty (lower)\n" in text
    assert all(cells(line) <= 80 for line in text.splitlines())


def test_kelvin_never_reaches_the_terminal() -> None:
    text = terminal(amplifier())
    assert "110.9" in text
    assert "384" not in text
    assert "423" not in text


def test_hostile_text_is_printed_without_being_obeyed() -> None:
    facts = DeviceFacts(name=HOSTILE, file=HOSTILE, sha256="", ratings_from=HOSTILE, kind="npn")
    item = finding(
        limit=HOSTILE, duty=HOSTILE, half=HOSTILE, status=Status.UNPROVEN, basis=HOSTILE, member_name="",
        reasons=(reason(HOSTILE, (HOSTILE, HOSTILE)),),
    )  # fmt: skip
    text = terminal(
        result(
            item,
            stage=StageFacts(title=HOSTILE, file=HOSTILE, sha256="", revision=HOSTILE),
            device=facts,
            complement=facts,
            duties=(DutyResult(name=HOSTILE, half=HOSTILE),),
            not_analysed=(HOSTILE,),
            assumptions=(HOSTILE,),
            cautions=(Caution(id=HOSTILE, text=HOSTILE),),
        )
    )
    assert not any(unicodedata.category(sign) in ("Cc", "Cf") for sign in text.replace("\n", ""))
    assert "[/red]$x_1$<script>" in text


def test_colour_changes_nothing_but_adds_itself() -> None:
    plain, coloured = terminal(amplifier()), terminal(amplifier(), colour=True)
    assert "\x1b" not in plain
    assert "\x1b[" in coloured
    assert re.sub("\x1b\\[[0-9;]*m", "", coloured) == plain


def test_several_stages_end_with_the_worst() -> None:
    first, second = result(finding()), amplifier()
    text = terminal_blocks([first, second])
    assert text.startswith("WITHIN: closest is dissipation in worst-level, 30 % of the allowance")
    assert text.splitlines()[-1] == "EXCEEDS: worst of 2 stages, Hall amplifier, 4 ohm (amp.toml, revision B)"
    assert terminal_blocks([first]) == terminal(first)


def test_halves_that_read_the_same_are_one_row() -> None:
    items = [finding(half=half, where=where(40.0, 1.0, t)) for half, t in (("upper", 0.0), ("lower", 0.5))]
    duties = tuple(DutyResult(name="idle", half=half) for half in ("upper", "lower"))
    text = terminal(result(*items, duties=duties))
    assert text.count("worst-level (both)") == 1
    assert text.count("idle (both)") == 1
    assert "2 findings: 2 within" in text


def test_halves_that_differ_and_findings_of_one_half_stay_apart() -> None:
    items = [finding(half="upper"), finding(half="upper"), finding(half="lower", applied=22.5)]
    rows = [line for line in terminal(result(*items)).splitlines() if "  dissipation  " in line]
    assert [row.split("worst-level ")[1] for row in rows] == ["(upper)", "(upper)", "(lower)"]


def test_an_excess_without_a_number_is_not_called_an_allowance_of_nothing() -> None:
    item = finding("safe-area", "held", 1.2, np.nan, "A", np.nan, Status.EXCEEDS)
    head = terminal(result(item)).splitlines()[0]
    assert head.startswith("EXCEEDS: safe-area in held, by an amount that has no number, 1.2 A of unknown")


def test_the_lower_half_is_described_by_the_complement() -> None:
    lower = DeviceFacts(name="EXAMPLE-P-MOS", file="p.toml", sha256="", ratings_from="", kind="p-mosfet")
    item = finding(half="lower", where=where(40.0, 1.0, region=2))
    text = terminal(replace(result(item), complement=lower))
    assert "Lower   EXAMPLE-P-MOS (p.toml), ratings: their source is not stated" in text
    assert "at 40 V, 1 A, on (nominal values only)" in text


@pytest.mark.parametrize("width", [40, 55, 79])
@pytest.mark.parametrize("spread", [False, True])
def test_a_narrow_page_is_kept_and_loses_nothing(width: int, spread: bool) -> None:
    text = terminal(amplifier(spread), width=width)
    assert all(cells(line) <= width for line in text.splitlines())
    words = " ".join(text.split())
    assert "P mean 22.3 W" in words
    assert "134 of 160 V" in words
    assert ("nominal 131 %" in words or "131 %" in words) == spread


def test_columns_of_a_duty_never_touch() -> None:
    # 0.5 mA with three digits is as wide as its column
    duty = DutyResult(
        name="switched", half=None, V_peak=given("V_peak", [24.0], "V", ""), I_peak=given("I_peak", [5e-4], "A", "")
    )
    assert "24.0 0.00050 " in terminal(result(finding(), duties=(duty,)))


@pytest.mark.parametrize("amps", [1.234e-4, 1.234e-7, 1234567.0, 1.019e-30, 0.0])
def test_the_table_of_duties_fits_whatever_the_figures(amps: float) -> None:
    duty = DutyResult(name="switched", half=None, I_peak=given("I_peak", [amps], "A", ""))
    row = next(line for line in terminal(result(finding(), duties=(duty,))).splitlines() if "switched" in line)
    assert cells(row) <= 80
    assert float(row.split()[4]) == pytest.approx(amps, rel=0.05, abs=1e-15)


def test_a_stage_without_a_title_goes_by_its_file() -> None:
    item = replace(result(finding()), stage=StageFacts(title="", file="x/t7.toml", sha256="", revision=""))
    assert "Stage   t7.toml\n" in terminal(item)


def test_a_line_does_not_end_inside_a_time() -> None:
    item = finding(where=where(40.0, 1.0, t=0.0032))
    assert all("t =" not in terminal(result(item), width=width).replace("t = 3.2 ms", "") for width in range(40, 81))


def test_a_negative_share_is_no_figure() -> None:
    item = finding("voltage", applied=-40.0, allowed=100.0, unit="V", utilisation=-0.4, status=Status.UNPROVEN)
    assert "-40 %" not in terminal(result(item))
