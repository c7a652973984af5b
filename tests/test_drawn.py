"""What pictures draw is what the findings rest on."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import soacheck
from soacheck.check import check
from soacheck.stage import stage_from_text
from tests.whole import HELD, PUSH_PULL, put, result_of, without

EXAMPLES = Path(soacheck.__file__).parent / "examples"


def test_curves_are_scaled_to_the_temperature_of_the_point_that_governs(tmp_path: Path) -> None:
    # On this line second breakdown governs to the right of the point of greatest dissipation, where the case is cooler.
    result = result_of(tmp_path, put(HELD, V_CC='"140 V"', R_C='"160 ohm"', I_CQ='"0.4 A"'))
    finding = next(f for f in result.findings if f.limit == "safe-area")
    duty = next(d for d in result.duties if d.name == finding.duty)
    assert duty.series is not None
    at = int(np.argmin(np.abs(duty.series.v - finding.where.v[0])))
    assert duty.series.T_case[at] < duty.series.T_case.max() - 1
    (picture,) = result.safe_area
    assert np.isclose(picture.T, duty.series.T_case[at], rtol=1e-9)


def test_levels_at_many_frequencies_make_one_line_of_the_worst() -> None:
    text = (EXAMPLES / "hall-amplifier-60-degrees.toml").read_text()
    text = text.replace('f = "1 kHz"', 'f = ["100 Hz", "5 kHz"]')
    result = check(stage_from_text(text, shown_as="amp.toml", folder=EXAMPLES))
    sweep = next(s for s in result.sweeps if s.half == "upper")
    assert np.all(np.diff(sweep.x) > 0)
    # each frequency has its own levels: joined in the order of the level they would go up and down at every point
    steps = np.sign(np.diff(sweep.P_mean)[np.abs(np.diff(sweep.P_mean)) > 0.01 * sweep.P_mean.max()])
    assert np.count_nonzero(np.diff(steps)) <= 1
    worst = max(f.applied.at(0) for f in result.findings if f.limit == "dissipation" and f.applied is not None)
    assert sweep.P_mean.max() == pytest.approx(worst, rel=1e-9)
    tightest = min(
        f.allowed.at(0) for f in result.findings
        if (f.limit, f.duty, f.half) == ("dissipation", "any-level", "upper") and f.allowed is not None
    )  # fmt: skip
    assert np.nanmin(sweep.P_allowed) == pytest.approx(tightest, rel=1e-6)


def test_a_held_push_pull_line_is_drawn_as_it_runs_not_between_its_rails(tmp_path: Path) -> None:
    # Class B into 8 ohm: the conducting half stands at i = (V_rail - v)/8 below the rail and at 0 above it.
    stage = put(without(PUSH_PULL, "f"), I_Q='"0 A"', R_E='"0 ohm"')
    result = result_of(tmp_path, stage)
    picture = result.safe_area[0]
    assert picture.i == pytest.approx(np.maximum(35 - picture.v, 0) / 8, abs=1e-9)
    assert picture.v.max() == pytest.approx(70)
    for duty in result.duties:
        assert duty.series is not None
        assert duty.series.v.size == 1, duty.name
    (line,) = result.lines
    assert line.name == "any-level"
    assert line.series is not None
    assert line.series.i == pytest.approx(np.maximum(35 - line.series.v, 0) / 8, abs=1e-9)
