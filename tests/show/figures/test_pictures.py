"""The four pictures by their properties: what is in them, and that no text stands on another."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from itertools import combinations
from pathlib import Path

import numpy as np
import pytest
from matplotlib.figure import Figure
from matplotlib.text import Text

from soacheck.errors import InputError, OutputError
from soacheck.result import Result, Series, Status
from soacheck.show import figures
from soacheck.show.figures import canvas, palette
from tests.show.figures import build

RESULTS = {
    "held": build.held_line(),
    "held, hot": build.held_line(hot=1.6),
    "held, long title": build.held_line(title="W" * 100),
    "push-pull": build.push_pull(),
    "one half": build.push_pull(complement=False),
    "one shot": build.one_shot(),
    "no temperatures": build.without_temperatures(build.push_pull()),
}


@cache
def drawn_once(which: str, name: str, half: str | None) -> Figure:
    return figures.draw(RESULTS[which], name, half)


def pictures() -> list[tuple[str, str, str | None]]:
    return [
        (which, name, half)
        for which, result in RESULTS.items()
        for name in figures.NAMES
        for half in figures.halves(result)
        if not figures.lacks(result, name, half)
    ]


def texts(figure: Figure, *gids: str) -> list[str]:
    found = [artist for artist in figure.findobj(Text) if artist.get_text() and artist.get_gid() in gids]
    return [artist.get_text() for artist in found]


def key(figure: Figure) -> list[str]:
    return [text.get_text() for legend in figure.legends for text in legend.get_texts()]


def visible(figure: Figure) -> list[tuple[str, tuple[float, float, float, float]]]:
    """Every text that is drawn, with its box in pixels."""
    with canvas.settings():
        figure.draw_without_rendering()
        renderer = canvas.renderer_of(figure)
        artists: list[Text] = [
            a for a in figure.findobj(Text) if a.get_gid() in ("label", "heading", "note", "row title")
        ]
        artists += [text for legend in figure.legends for text in legend.get_texts()]
        for axes in figure.axes:
            artists += [axes.xaxis.label, axes.yaxis.label]
            for axis in (axes.xaxis, axes.yaxis):
                low, high = sorted(axis.get_view_interval())
                ticks = zip(axis.get_majorticklocs(), axis.get_majorticklabels(), strict=True)
                artists += [text for at, text in ticks if low <= at <= high]
        shown = [artist for artist in artists if artist.get_text() and artist.get_visible()]
        # the text itself, without the white ground around it
        boxes = [(a.get_text(), Text.get_window_extent(a, renderer).extents) for a in shown]
    return [(text, tuple(float(edge) for edge in box)) for text, box in boxes]


@pytest.mark.parametrize(("which", "name", "half"), pictures())
def test_no_text_stands_on_another_or_leaves_the_picture(which: str, name: str, half: str | None) -> None:
    figure = drawn_once(which, name, half)
    found = visible(figure)
    assert len(found) > 10
    width, height = figure.get_size_inches() * figure.dpi
    for text, (left, bottom, right, top) in found:
        assert left >= 0, text
        assert bottom >= 0, text
        assert right <= width, text
        assert top <= height, text
    for (text, box), (other, where) in combinations(found, 2):
        apart = box[2] <= where[0] or where[2] <= box[0] or box[3] <= where[1] or where[3] <= box[1]
        assert apart, f"{text!r} on {other!r}"


@pytest.mark.parametrize(("which", "name", "half"), pictures())
def test_every_axis_has_its_quantity_and_its_unit(which: str, name: str, half: str | None) -> None:
    for axes in drawn_once(which, name, half).axes:
        for label in (axes.get_xlabel(), axes.get_ylabel()):
            assert label.endswith(("V)", "A)", "W)", "s)", "°C)")), label
            assert len(label) > 5


@pytest.mark.parametrize(("which", "name", "half"), pictures())
def test_every_picture_stands_on_white(which: str, name: str, half: str | None) -> None:
    figure = drawn_once(which, name, half)
    grounds = [figure.get_facecolor(), *(axes.get_facecolor() for axes in figure.axes)]
    assert all(ground == (1.0, 1.0, 1.0, 1.0) for ground in grounds)


def test_the_safe_area_says_the_margin_in_words_at_the_hot_spot() -> None:
    figure = figures.draw(build.held_line(), "safe-area")
    (label,) = (text for text in texts(figure, "label") if text.startswith("safe-area"))
    assert label == "safe-area 9.0 % of the allowance\n0.589 A of 6.58 A at 12.1 V\nheld-worst-point: within"


def test_the_hot_spot_of_any_level_names_the_level() -> None:
    figure = figures.draw(build.push_pull(), "safe-area", "lower")
    assert any("any-level (level 38 V): exceeds" in text for text in texts(figure, "label"))
    assert any(text == "Safe area, lower half: EXAMPLE-PNP-160" for text in texts(figure, "heading"))


def test_a_locus_that_two_duties_share_is_drawn_once() -> None:
    assert "locus, any-level = worst-level" in key(figures.draw(build.push_pull(), "safe-area", "upper"))


def test_the_safe_area_has_log_axes_with_plain_numbers() -> None:
    (axes,) = figures.draw(build.held_line(), "safe-area").axes
    assert axes.get_xscale() == axes.get_yscale() == "log"
    ticks = [text.get_text() for text in (*axes.get_xticklabels(), *axes.get_yticklabels())]
    assert {"10", "100", "0.1", "1"} <= set(ticks)
    assert all(float(text) > 0 for text in ticks)


def test_printed_and_allowed_curves_are_drawn_as_given_and_told_apart() -> None:
    figure = figures.draw(build.held_line(), "safe-area")
    (axes,) = figure.axes
    drawn = {line.get_xydata().tobytes(): line for line in axes.lines if line.get_color() == palette.LIMIT}
    for printed, allowed in ((build.DC, build.DC_HOT), (build.TEN_MS, build.TEN_MS_HOT)):
        assert drawn[printed.tobytes()].is_dashed()
        assert not drawn[allowed.tobytes()].is_dashed()
        assert drawn[allowed.tobytes()].get_linewidth() > 1.5 * drawn[printed.tobytes()].get_linewidth()
    assert {"allowed at 89 °C", "as printed, for 25 °C", "rating"} <= set(key(figure))
    assert {"dc", "10 ms", "$I_C$ 15 A", "$I_{CM}$ 25 A", "$V_{CEO}$ 160 V"} <= set(texts(figure, "label"))


def test_a_factor_of_the_rules_is_named_beside_the_allowed_curves() -> None:
    result = replace(build.held_line(), safe_area=(build.picture("held-worst-point", factor=0.8),))
    assert "allowed at 89 °C, 80 % by the rules" in key(figures.draw(result, "safe-area"))


def test_a_curve_without_an_allowance_says_so() -> None:
    curves = (("dc", build.DC, np.empty((0, 2))), ("10 ms", build.TEN_MS, build.TEN_MS_HOT))
    result = replace(build.held_line(), safe_area=(build.picture("held-worst-point", curves=curves),))
    figure = figures.draw(result, "safe-area")
    assert {"(dc)", "10 ms"} <= set(texts(figure, "label"))
    assert any(text.startswith("In brackets, printed only: allows nothing") for text in texts(figure, "note"))


def test_the_key_explains_only_lines_that_are_drawn() -> None:
    curves = (("dc", build.DC, np.empty((0, 2))), ("10 ms", build.TEN_MS, np.empty((0, 2))))
    nothing = build.picture("held-worst-point", curves=curves, V_max=np.nan, I_max=np.nan, I_peak=np.nan)
    words = key(figures.draw(replace(build.held_line(), safe_area=(nothing,)), "safe-area"))
    assert "as printed, for 25 °C" in words
    assert not any(word == "rating" or word.startswith("allowed at") for word in words)


@pytest.mark.parametrize("which", ["held", "held, hot", "push-pull", "one shot"])
def test_no_label_of_the_safe_area_lies_on_a_locus(which: str) -> None:
    result = RESULTS[which]
    for half in figures.halves(result):
        figure = drawn_once(which, "safe-area", half)
        (axes,) = figure.axes
        loci = [line for line in axes.lines if line.get_color() == palette.LOAD and line.get_linestyle() != "None"]
        boxes = [box for text, box in visible(figure) if text in texts(figure, "label") and "allowance" in text]
        for line in loci:
            points = line.get_transform().transform(np.asarray(line.get_xydata(), dtype=np.float64))
            for left, bottom, right, top in boxes:
                inside = (points > (left, bottom)).all(axis=1) & (points < (right, top)).all(axis=1)
                assert not inside.any()


@pytest.mark.parametrize(("watts", "text", "axis"), [(850.0, "850 W", "(W)"), (0.02, "20 mW", "(mW)")])
def test_a_label_has_the_unit_of_its_axis(watts: float, text: str, axis: str) -> None:
    t = np.linspace(0.0, 1e-3, 5)
    pulse = build.series(t, np.full(5, 10.0), watts / 10 * np.array([0.0, 0.5, 1.0, 0.5, 0.0]), "repeated")
    figure = figures.draw(build.result((build.duty("profile", pulse, P_mean=watts / 500),), ()), "dissipation")
    assert figure.axes[0].get_ylabel().endswith(axis)
    assert f"peak {text}" in texts(figure, "label")
    assert any(label.startswith("mean") and label.endswith(axis.strip("()")) for label in texts(figure, "label"))


def test_a_shot_is_not_said_to_lack_an_allowance() -> None:
    notes = texts(figures.draw(build.one_shot(), "dissipation"), "note")
    assert any("one shot has no allowance of mean power" in note for note in notes)


def test_an_end_of_the_line_that_is_the_q_point_is_named_once() -> None:
    t, v, i = np.array([0.0, 0.5, 1.0]), np.array([0.8, 12.0, 24.0]), np.array([2.0, 1.0, 0.001])
    duties = (
        build.duty("idle", build.series([0.0], [24.0], [0.001], "held")),
        build.duty("switched", build.series(t, v, i, "repeated")),
    )
    labels = texts(figures.draw(build.result(duties, ()), "line"), "label")
    assert "Q point (idle)\n24 V, 0.001 A" in labels
    assert not any(label.startswith("greatest voltage") for label in labels)


def test_an_unproven_safe_area_says_why_below_the_picture() -> None:
    figure = figures.draw(build.one_shot(), "safe-area")
    assert any("longer than the longest printed pulse" in text for text in texts(figure, "note"))
    assert any("unproven" in text for text in texts(figure, "label"))


@pytest.mark.parametrize(("allowed", "words"), [(0.0, "nothing is allowed here"), (build.NAN, "has no figure")])
def test_an_exceeded_safe_area_without_a_figure_says_which_of_the_two_it_is(allowed: float, words: str) -> None:
    because = build.reason("The case is at the limit of the junction.")
    hot = build.finding(
        "safe-area", "held-worst-point", build.NAN, allowed=allowed, unit="A", at=(build.NAN, 12.0, 0.59),
        status=Status.EXCEEDS, reasons=(because,),
    )  # fmt: skip
    figure = figures.draw(replace(build.held_line(), findings=(hot,)), "safe-area")
    assert any(words in text and "exceeds" in text for text in texts(figure, "label"))
    assert "Hot spot: The case is at the limit of the junction." in texts(figure, "note")


def test_a_straight_line_of_operation_is_a_curve_on_log_paper() -> None:
    (axes,) = figures.draw(build.one_shot(), "safe-area").axes
    (locus,) = (line for line in axes.lines if line.get_color() == palette.LOAD)
    v, i = locus.get_xydata().T
    from_end = (v > 13) & (v < 36) & (i < 0.39)  # back from 12 V, 0.4 A to 60 V, 0 A
    assert i[from_end] == pytest.approx(0.4 * (60 - v[from_end]) / 48, rel=1e-6)
    assert np.count_nonzero(from_end) > 100


def test_the_line_shows_ends_q_point_and_regions() -> None:
    found = texts(figures.draw(build.held_line(), "line"), "label")
    assert "Q point (idle)\n21 V, 0.1 A" in found
    assert "0.6 V, 1.16 A, saturation" in found
    assert "24 V, 0 A, cutoff" in found
    assert "active" in found
    assert {"4 mA", "8 mA", "12 mA", "16 mA", "20 mA"} <= set(found)


def test_a_mosfet_is_named_by_its_own_symbols_and_regions() -> None:
    figure = figures.draw(build.one_shot(), "line")
    assert "V_{DS}" in figure.axes[0].get_xlabel()
    assert "off" in texts(figure, "label")
    assert any("bipolar transistors only" in text for text in texts(figure, "note"))


def test_a_closed_path_comes_back_to_its_start() -> None:
    figure = figures.draw(build.push_pull(), "line", "upper")
    line = next(entry for entry in figure.axes[0].lines if entry.get_linewidth() == palette.LOCI[0].width)
    path = line.get_xydata()
    assert path[0] == pytest.approx(path[-1])


def test_the_dissipation_shows_the_allowance_at_each_held_point() -> None:
    result = build.held_line()
    figure = figures.draw(result, "dissipation")
    series = result.duties[1].series
    assert series is not None
    drawn = [line.get_ydata() for line in figure.axes[0].lines if line.get_color() == palette.LIMIT]
    assert np.asarray(drawn[0]) == pytest.approx(series.P_allowed)
    # Analytic: a resistive line is worst at half the supply, V^2/(4 R) = 24^2/(4 x 20.2) = 7.13 W.
    assert "greatest 7.13 W" in texts(figure, "label")


def test_the_dissipation_of_a_stage_with_levels_shows_power_over_level_first() -> None:
    figure = figures.draw(build.push_pull(), "dissipation", "upper")
    assert [axes.get_xlabel() for axes in figure.axes] == ["peak voltage at the load (V)", "time (ms)", "time (ms)"]
    assert {"mean 42.5 W", "allowed mean 46 W"} <= set(texts(figure, "label"))


def test_a_level_at_two_frequencies_is_drawn_as_the_worse() -> None:
    result = build.push_pull(complement=False)
    (sweep,) = result.sweeps
    both = {
        name: np.concatenate([column, column * factor])
        for name, factor, column in (("x", 1.0, sweep.x), ("P_mean", 1.2, sweep.P_mean), ("T_case", 1.1, sweep.T_case))
    }
    twice = replace(sweep, P_allowed=np.concatenate([sweep.P_allowed, sweep.P_allowed * 0.9]), **both)
    figure = figures.draw(replace(result, sweeps=(twice,)), "dissipation")
    drawn = {line.get_color(): line.get_ydata() for line in figure.axes[0].lines if len(line.get_xdata()) > 2}
    assert np.asarray(drawn[palette.LOAD]) == pytest.approx(1.2 * sweep.P_mean)
    assert np.asarray(drawn[palette.LIMIT]) == pytest.approx(0.9 * sweep.P_allowed)


def test_an_allowance_far_above_the_power_is_told_not_drawn() -> None:
    line = build.held_line()
    series = line.duties[1].series
    assert series is not None
    far = replace(line.duties[1], series=replace(series, P_allowed=series.P_allowed * 100))
    figure = figures.draw(replace(line, duties=(line.duties[0], far)), "dissipation")
    assert any("above the picture" in text for text in texts(figure, "note"))


def test_the_temperatures_are_those_of_the_result_in_celsius() -> None:
    result = build.held_line()
    figure = figures.draw(result, "temperature")
    series = result.duties[1].series
    assert series is not None
    (junction,) = (line for line in figure.axes[0].lines if line.get_color() == palette.JUNCTION.colour)
    assert np.asarray(junction.get_ydata()) == pytest.approx(series.T_j - 273.15)
    assert {"junction may reach 150 °C", "air 40 °C"} <= set(texts(figure, "label"))


def test_temperatures_that_are_not_known_are_not_drawn_and_the_picture_says_so() -> None:
    result = build.push_pull(complement=False)
    worst = result.duties[1]
    assert worst.series is not None
    unknown = replace(
        worst,
        series=replace(worst.series, T_j=np.full(worst.series.v.shape, np.nan)),
        T_j_mean=build.value("T_j_mean", 365.15, "degC"),
    )
    figure = figures.draw(replace(result, duties=(result.duties[0], unknown), sweeps=()), "temperature")
    (axes,) = figure.axes
    assert not [line for line in axes.lines if line.get_color() == palette.JUNCTION.colour]
    (note,) = (text for text in texts(figure, "note") if "junction" in text)
    assert "not known" in note
    assert "92 °C" in note


def test_a_temperature_known_in_part_is_a_broken_line_with_a_note() -> None:
    line = build.held_line()
    series = line.duties[1].series
    assert series is not None
    T_j = np.where(series.v > 15, np.nan, series.T_j)
    result = replace(line, duties=(line.duties[0], replace(line.duties[1], series=replace(series, T_j=T_j))))
    assert any("broken" in text for text in texts(figures.draw(result, "temperature"), "note"))


def test_a_picture_with_nothing_to_show_is_left_out_with_the_reason(tmp_path: Path) -> None:
    result = replace(build.without_temperatures(build.held_line()), safe_area=())
    written = figures.write_figures(result, tmp_path, which=None, fmt="svg")
    assert [path.name for path in written.paths] == ["line.svg", "dissipation.svg"]
    reasons = dict(written.left_out)
    assert "safe-area curve" in reasons["safe-area"]
    assert "surroundings.T_ambient" in reasons["temperature"]
    assert sorted(path.name for path in tmp_path.iterdir()) == ["dissipation.svg", "line.svg"]


def test_a_result_without_any_locus_leaves_out_all_pictures(tmp_path: Path) -> None:
    result = build.result((build.duty("held-worst-point", None),), ())
    written = figures.write_figures(result, tmp_path / "none", which=None, fmt="png")
    assert written.paths == ()
    assert [name for name, _ in written.left_out] == list(figures.NAMES)
    assert not (tmp_path / "none").exists()


def test_a_picture_that_cannot_be_drawn_is_refused_with_the_reason() -> None:
    with pytest.raises(InputError, match="safe-area curve"):
        figures.draw(replace(build.held_line(), safe_area=()), "safe-area")


def test_each_half_has_its_own_files(tmp_path: Path) -> None:
    written = figures.write_figures(build.push_pull(), tmp_path / "new", which="line", fmt="pdf", prefix="hall-")
    assert [path.name for path in written.paths] == ["hall-line-upper.pdf", "hall-line-lower.pdf"]
    assert all(path.read_bytes().startswith(b"%PDF") for path in written.paths)


@pytest.mark.parametrize(("which", "fmt"), [("heat-chain", "png"), ("line", "gif"), ("Line", "png")])
def test_an_unknown_picture_or_format_is_refused_by_name(which: str, fmt: str, tmp_path: Path) -> None:
    with pytest.raises(InputError, match=r"heat-chain|gif|Line"):
        figures.write_figures(build.held_line(), tmp_path, which=which, fmt=fmt)


def test_a_folder_that_cannot_be_made_is_an_output_error(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("")
    with pytest.raises(OutputError):
        figures.write_figures(build.held_line(), tmp_path / "file", which="line", fmt="png")


def long_record(count: int) -> Result:
    t = np.linspace(0.0, 1.0, count)
    v, i = 30 + 20 * np.sin(60 * t), 2 + 1.5 * np.cos(47 * t)
    i[count // 3] = 9.0  # one sample
    known: dict[str, np.ndarray] = {"T_j": 350 + 10 * np.sin(3 * t), "T_case": np.full(count, 345.0)}
    series: Series = build.series(t, v, i, "once", **known)
    return build.result((build.duty("recorded", series),), (), safe_area=(build.picture("recorded"),))


@pytest.mark.parametrize("name", figures.NAMES)
def test_a_long_record_is_drawn_as_its_envelope_and_says_so(name: str) -> None:
    result = long_record(300_000)
    figure = figures.draw(result, name)
    assert any("envelope" in text for text in texts(figure, "note"))
    sizes = [len(line.get_xydata()) for axes in figure.axes for line in axes.lines]
    assert max(sizes) < 12_000
    if name in ("safe-area", "line"):
        highest = max(float(np.nanmax(line.get_ydata())) for line in figure.axes[0].lines)
        assert highest >= 9.0


def test_duties_with_one_and_the_same_run_share_a_row_and_a_line() -> None:
    result = build.push_pull(complement=False)
    worst = result.duties[1]
    same = replace(result, duties=(*result.duties[:2], replace(worst, name="full-level")), sweeps=())
    for name in ("dissipation", "temperature"):
        figure = figures.draw(same, name)
        assert [axes.get_title(loc="left") for axes in figure.axes] == ["worst-level = full-level: one period"]
    assert key(figures.draw(same, "line")) == ["path, worst-level = full-level"]


def test_a_locus_that_stands_still_is_drawn_as_a_point() -> None:
    still = build.series(np.array([0.0, 0.5, 1.0]), np.full(3, 60.0), np.full(3, 0.75), "repeated")
    result = build.result((build.duty("profile", still),), (), safe_area=(build.picture("profile"),))
    assert "profile\n60 V, 0.75 A" in texts(figures.draw(result, "line"), "label")
    assert "profile" in texts(figures.draw(result, "safe-area"), "label")
    figure = figures.draw(result, "dissipation")
    assert texts(figure, "label") == ["power 45 W"]  # a constant power has no peak to mark, and is its own mean
    assert "mean" not in key(figure)


def test_a_locus_with_no_current_at_all_can_be_drawn() -> None:
    off = build.series(np.array([0.0, 1e-3]), np.array([24.0, 24.0]), np.zeros(2), "repeated")
    result = build.result((build.duty("idle", off),), (), safe_area=(build.picture("idle"),))
    for name in ("safe-area", "line", "dissipation"):
        assert figures.rendered(result, name)


def test_a_negative_voltage_is_inside_the_linear_picture() -> None:
    swing = build.series(
        np.linspace(0, 1, 5), np.array([-5.0, 0, 10, 20, -5]), np.array([0.1, 1, 1, 0, 0.1]), "repeated"
    )
    result = build.result((build.duty("profile", swing),), (), safe_area=(build.picture("profile"),))
    assert figures.draw(result, "line").axes[0].get_xlim()[0] < -5.0
    assert figures.rendered(result, "safe-area")


def test_temperatures_below_zero_are_drawn() -> None:
    line = build.held_line()
    series = line.duties[1].series
    assert series is not None
    cold = replace(series, T_j=series.T_j - 60, T_case=series.T_case - 60, T_heatsink=series.T_heatsink - 60)
    result = replace(line, duties=(replace(line.duties[1], series=cold),))
    assert figures.draw(result, "temperature").axes[0].get_ylim()[0] < -15
