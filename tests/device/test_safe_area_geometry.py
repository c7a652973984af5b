"""What a printed safe-area curve allows against voltage and temperature."""

import numpy as np
import pytest
from hypothesis import given as for_all
from hypothesis import strategies as st

from soacheck.device import soa
from soacheck.device.ratings import SafeAreaCurve, SafeAreaDerating

INF = float("inf")


def kelvin(celsius: float) -> float:
    return celsius + 273.15


def curve(points: list[tuple[float, float]], *, pulse: float = INF, reading: float = 0.0) -> SafeAreaCurve:
    return SafeAreaCurve(
        label="dc" if pulse == INF else f"{pulse} s",
        pulse=pulse,
        points=np.array(points, dtype=float),
        T_ref=kelvin(25),
        reading=reading,
    )


# A hypothetical part: I_C 20 A, R_th_jc 0.7 K/W, T_j_max 200 degC, second-breakdown points 50 V / 5 A and
# 100 V / 1 A, second breakdown falling by 0.4 % per kelvin above 25 degC.
HYPOTHETICAL = curve([(5, 20), (12.5, 20), (50, 5), (100, 1), (140, 0.5)])
FOUR_PER_MILLE = SafeAreaDerating(
    convention="own-curve", points=np.array([(kelvin(25), 1.0), (kelvin(200), 1 - 0.004 * 175)]), stated=True
)
HELD = SafeAreaDerating(convention="held", stated=True)
LIKE_DISSIPATION = SafeAreaDerating()


def allowed_by_hypothetical(volts: float, celsius: float) -> soa.Allowed:
    return soa.allowed_current(
        HYPOTHETICAL,
        np.array(volts),
        T=np.array(kelvin(celsius)),
        T_j_max=kelvin(200),
        derating=FOUR_PER_MILLE,
        Z=np.array(0.7),
        I_rating=20.0,
        voltage_scaled=False,
    )


@pytest.mark.parametrize(
    ("volts", "celsius", "amps", "rating"),
    [
        (10, 25, 20.0000, True),
        (60, 25, 3.27429, False),  # second breakdown
        (60, 100, 2.29200, False),
        (80, 100, 1.17521, False),
        (40, 100, 3.57143, False),  # dissipation
    ],
)
def test_hypothetical_part_allows_what_the_formulas_give(
    volts: float, celsius: float, amps: float, rating: bool
) -> None:
    # Second way: hyperbola (T_j_max - T)/(R*V) and I_1*(V/V_1)^-n with n = ln 5/ln 2, evaluated by hand to six digits
    # in the form of makers' bipolar safe-area charts with separate thermal and second-breakdown derating.
    allowed = allowed_by_hypothetical(volts, celsius)
    assert float(allowed.current) == pytest.approx(amps, rel=2e-6)
    assert bool(allowed.rating_limited) == rating


def test_slope_of_second_breakdown_is_log_log() -> None:
    # Second way: n = ln(5)/ln(2) = 2.32193 between 50 V / 5 A and 100 V / 1 A.
    amps = soa.printed_current(HYPOTHETICAL, np.array([60.0, 80.0]))
    assert np.log(amps[0] / amps[1]) / np.log(80 / 60) == pytest.approx(2.32193, rel=1e-5)


def test_forty_milliseconds_between_two_printed_points_reads_as_on_log_log_paper() -> None:
    # Published rule, value by hand: 3 A at 10 and 1.2 A at 100, read at 40 on log-log paper: 1.73 A.
    points = np.array([(10.0, 3.0), (100.0, 1.2)])
    assert float(soa.curve_current(points, np.array(40.0))) == pytest.approx(1.73, abs=0.005)


@pytest.mark.parametrize(
    ("convention", "celsius", "factor"),
    [
        # Analytic: (150 - T)/(150 - 25).
        (LIKE_DISSIPATION, 50, 0.8),
        (LIKE_DISSIPATION, 75, 0.6),
        (LIKE_DISSIPATION, 100, 0.4),
        (LIKE_DISSIPATION, 0, 1.0),
        (LIKE_DISSIPATION, 160, 0.0),
        # Analytic: 1 - 0.004*(T - 25).
        (FOUR_PER_MILLE, 50, 0.9),
        (FOUR_PER_MILLE, 75, 0.8),
        (FOUR_PER_MILLE, 100, 0.7),
        (HELD, 100, 1.0),
    ],
)
def test_factor_follows_the_convention(convention: SafeAreaDerating, celsius: float, factor: float) -> None:
    found = soa.breakdown_factor(convention, np.array(kelvin(celsius)), kelvin(25), kelvin(150))
    assert float(found) == pytest.approx(factor, abs=1e-12)


def test_above_its_last_temperature_an_own_curve_gives_way_to_the_cautious_convention() -> None:
    short = SafeAreaDerating(convention="own-curve", points=np.array([(kelvin(25), 1.0), (kelvin(75), 0.9)]))
    at = np.array([kelvin(75), kelvin(100), kelvin(151)])
    assert soa.breakdown_factor(short, at, kelvin(25), kelvin(150)) == pytest.approx([0.9, 0.4, 0.0])


def test_mosfet_voltage_halves_where_the_temperature_distance_halves() -> None:
    # Published: application note AN11158 rev. 4 (2014), 3.1.2.2: 30 A for 1 ms at 20 V and 25 degC; at a mounting base
    # of 100 degC (T_j_max 175 degC) 10 V is allowed at 30 A, 15 V is not.
    chart = curve([(1, 240), (2.5, 240), (20, 30), (55, 8)], pulse=1e-3)

    def amps(volts: float, celsius: float) -> float:
        found = soa.allowed_current(
            chart,
            np.array(volts),
            T=np.array(kelvin(celsius)),
            T_j_max=kelvin(175),
            derating=LIKE_DISSIPATION,
            Z=None,
            I_rating=240.0,
            voltage_scaled=True,
        )
        return float(found.current)

    assert amps(20, 25) == pytest.approx(30)
    assert amps(10, 100) == pytest.approx(30)
    assert amps(15, 100) < 30
    # The current of the flat is kept, its voltage is not.
    assert amps(1.2, 100) == pytest.approx(240)
    assert amps(2.4, 100) < 240


def test_mosfet_curve_goes_on_at_its_last_slope_to_the_printed_end() -> None:
    # Analytic: a curve of slope -2 from 10 V / 10 A to 100 V / 0.1 A; halved voltages end at 50 V, and at 100 V the
    # same slope gives 0.1 A/4.
    chart = curve([(10, 10), (100, 0.1)])
    found = soa.allowed_current(
        chart,
        np.array([50.0, 100.0, 100.001]),
        T=np.array(kelvin(87.5)),
        T_j_max=kelvin(150),
        derating=LIKE_DISSIPATION,
        Z=None,
        I_rating=10.0,
        voltage_scaled=True,
    )
    assert found.current[:2] == pytest.approx([0.1, 0.025])
    assert np.isnan(found.current[2])


def test_electronic_load_transistor_loses_half_of_its_dc_area_when_hot() -> None:
    # Second way: slope -1 chart through 60 V / 0.9 A; case 86 degC of 150 degC: factor 64/125, so 0.46 A (by hand).
    chart = curve([(1.35, 40), (54, 1), (60, 0.9), (200, 0.27)])
    found = soa.allowed_current(
        chart,
        np.array(60.0),
        T=np.array(kelvin(86)),
        T_j_max=kelvin(150),
        derating=LIKE_DISSIPATION,
        Z=np.array(0.4),
        I_rating=40.0,
        voltage_scaled=True,
    )
    assert float(found.current) == pytest.approx(0.46, abs=0.005)


def test_points_left_of_the_highest_current_are_for_display_only() -> None:
    with_line = curve([(1.8, 20), (3.6, 40), (7.8, 40), (60, 0.9)])
    assert soa.effective_points(with_line) == pytest.approx(np.array([(7.8, 40), (60, 0.9)]))
    assert soa.printed_current(with_line, np.array([0.5, 1.8, 7.8])) == pytest.approx([40, 40, 40])


def test_reading_lowers_the_whole_curve() -> None:
    lowered = curve([(10, 15), (50, 3)], reading=0.1)
    assert soa.printed_current(lowered, np.array([5.0, 50.0])) == pytest.approx([13.5, 2.7])


def test_right_of_the_last_point_nothing_is_known() -> None:
    allowed = allowed_by_hypothetical(140.01, 25)
    assert np.isnan(allowed.current)
    assert not allowed.rating_limited


@pytest.mark.parametrize("voltage_scaled", [False, True])
def test_an_unknown_temperature_gives_no_number(voltage_scaled: bool) -> None:
    for Z in (None, np.array(0.7)):
        for convention in (HELD, LIKE_DISSIPATION, FOUR_PER_MILLE):
            found = soa.allowed_current(
                HYPOTHETICAL,
                np.array([1.0, 60.0]),
                T=np.array(np.nan),
                T_j_max=kelvin(200),
                derating=convention,
                Z=Z,
                I_rating=20.0,
                voltage_scaled=voltage_scaled,
            )
            assert np.isnan(found.current).all()
            assert not found.rating_limited.any()


@pytest.mark.parametrize("voltage_scaled", [False, True])
@pytest.mark.parametrize("Z", [None, np.array(0.7)])
def test_at_the_greatest_junction_temperature_nothing_is_allowed(Z: np.ndarray | None, voltage_scaled: bool) -> None:
    found = soa.allowed_current(
        HYPOTHETICAL,
        np.array([1.0, 60.0]),
        T=np.array(kelvin(200)),
        T_j_max=kelvin(200),
        derating=HELD,
        Z=Z,
        I_rating=20.0,
        voltage_scaled=voltage_scaled,
    )
    assert (found.current == 0).all()
    assert not found.rating_limited.any()


def test_without_a_transient_value_even_a_held_curve_falls_like_dissipation() -> None:
    found = soa.allowed_current(
        HYPOTHETICAL,
        np.array(60.0),
        T=np.array(kelvin(112.5)),
        T_j_max=kelvin(200),
        derating=HELD,
        Z=None,
        I_rating=20.0,
        voltage_scaled=False,
    )
    printed = float(soa.printed_current(HYPOTHETICAL, np.array(60.0)))
    assert float(found.current) == pytest.approx(0.5 * printed)


def test_flat_is_not_scaled_where_no_line_below_it_reaches() -> None:
    # Held, T far below its maximum in power: at 2 V the hyperbola allows 71 A, the flat stays.
    allowed = allowed_by_hypothetical(2, 100)
    assert float(allowed.current) == 20.0
    assert allowed.rating_limited


def test_corner_of_a_hot_curve_is_continuous() -> None:
    # The scaled line goes on to the left under the flat: no jump by the whole factor at the corner.
    found = soa.allowed_current(
        HYPOTHETICAL,
        np.array([12.499, 12.501]),
        T=np.array(kelvin(100)),
        T_j_max=kelvin(200),
        derating=FOUR_PER_MILLE,
        Z=np.array(1e-3),
        I_rating=20.0,
        voltage_scaled=False,
    )
    assert found.current[0] == pytest.approx(found.current[1], rel=1e-3)


def test_a_flat_below_the_current_rating_counts_as_safe_area() -> None:
    def limited(rating: float) -> bool:
        found = soa.allowed_current(
            HYPOTHETICAL,
            np.array(1.0),
            T=np.array(kelvin(25)),
            T_j_max=kelvin(200),
            derating=HELD,
            Z=np.array(0.7),
            I_rating=rating,
            voltage_scaled=False,
        )
        return bool(found.rating_limited)

    assert limited(15.0)
    assert limited(20.0)
    assert not limited(30.0)


def test_arrays_give_what_their_scalars_give_over_case_member_and_time() -> None:
    volts = np.linspace(1, 139, 5)[None, None, :]
    T = np.array([300.0, 350.0, 400.0])[:, None, None]
    Z = np.array([0.7, 0.3])[None, :, None]
    for scaled in (False, True):
        whole = soa.allowed_current(
            HYPOTHETICAL, volts, T=T, T_j_max=kelvin(200), derating=FOUR_PER_MILLE, Z=Z, I_rating=20.0,
            voltage_scaled=scaled,
        )  # fmt: skip
        assert whole.current.shape == (3, 2, 5)
        for index in np.ndindex(3, 2, 5):
            one = soa.allowed_current(
                HYPOTHETICAL, volts[0, 0, index[2]], T=T[index[0], 0, 0], T_j_max=kelvin(200),
                derating=FOUR_PER_MILLE, Z=Z[0, index[1], 0], I_rating=20.0, voltage_scaled=scaled,
            )  # fmt: skip
            assert float(one.current) == pytest.approx(whole.current[index], rel=1e-13)


CONVENTIONS = st.sampled_from([HELD, LIKE_DISSIPATION, FOUR_PER_MILLE])
TEMPERATURES = st.floats(220, 500)


@st.composite
def charts(draw: st.DrawFn) -> SafeAreaCurve:
    count = draw(st.integers(2, 6))
    volts = np.cumprod(draw(st.lists(st.floats(1.05, 5), min_size=count, max_size=count)))
    amps = 50 / np.cumprod(draw(st.lists(st.floats(1.0, 8), min_size=count, max_size=count)))
    return curve(list(zip(volts, amps, strict=True)), reading=draw(st.sampled_from([0.0, 0.1])))


@for_all(
    chart=charts(),
    share=st.floats(0.001, 1.0),
    cold=TEMPERATURES,
    hot=TEMPERATURES,
    derating=CONVENTIONS,
    Z=st.sampled_from([None, 0.05, 1.0]),
    voltage_scaled=st.booleans(),
)
def test_allowance_never_rises_with_temperature_nor_above_the_printed_curve(
    chart: SafeAreaCurve,
    share: float,
    cold: float,
    hot: float,
    derating: SafeAreaDerating,
    Z: float | None,
    voltage_scaled: bool,
) -> None:
    cold, hot = sorted((cold, hot))
    volts = np.array(share * chart.points[-1, 0])
    found = [
        float(
            soa.allowed_current(
                chart,
                volts,
                T=np.array(T),
                T_j_max=kelvin(200),
                derating=derating,
                Z=None if Z is None else np.array(Z),
                I_rating=30.0,
                voltage_scaled=voltage_scaled,
            ).current
        )
        for T in (cold, hot)
    ]
    printed = float(soa.printed_current(chart, volts))
    assert found[1] <= found[0] * (1 + 1e-12)
    assert 0 <= found[0] <= printed * (1 + 1e-12)


@for_all(chart=charts(), T=TEMPERATURES, derating=CONVENTIONS, voltage_scaled=st.booleans(), known=st.booleans())
def test_allowance_never_rises_with_voltage(
    chart: SafeAreaCurve, T: float, derating: SafeAreaDerating, voltage_scaled: bool, known: bool
) -> None:
    volts = np.geomspace(0.01, chart.points[-1, 0] * (1 - 1e-12), 200)
    found = soa.allowed_current(
        chart, volts, T=np.array(T), T_j_max=kelvin(200), derating=derating,
        Z=np.array(0.3) if known else None, I_rating=30.0, voltage_scaled=voltage_scaled,
    )  # fmt: skip
    assert np.all(np.diff(found.current) <= 1e-9 * found.current[:-1] + 1e-15)
    assert not np.isnan(found.current).any()


@for_all(chart=charts(), T=st.floats(300, 460), scale_v=st.floats(0.1, 10), scale_i=st.floats(0.1, 10))
def test_scaling_volts_and_amps_of_everything_changes_nothing(
    chart: SafeAreaCurve, T: float, scale_v: float, scale_i: float
) -> None:
    grown = curve([(v * scale_v, i * scale_i) for v, i in chart.points], reading=chart.reading)
    volts = np.geomspace(0.1, chart.points[-1, 0] * 0.999, 20)
    for voltage_scaled in (False, True):
        small, large = (
            soa.allowed_current(
                each,
                volts * factor_v,
                T=np.array(T),
                T_j_max=kelvin(200),
                derating=FOUR_PER_MILLE,
                Z=np.array(0.5 / (factor_v * factor_i)),
                I_rating=30.0 * factor_i,
                voltage_scaled=voltage_scaled,
            )
            for each, factor_v, factor_i in ((chart, 1.0, 1.0), (grown, scale_v, scale_i))
        )
        assert large.current == pytest.approx(small.current * scale_i, rel=1e-9)


def test_a_first_segment_that_is_nearly_flat_does_not_drag_the_flat_down() -> None:
    # Analytic: left of the corner no line falls slower than constant power: at 1 V a tenth of the corner's voltage
    # allows ten times 0.4 * 15 A, so the flat stands; at 8 V it is 0.4 * 15 A * 10/8 = 7.5 A.
    nearly = curve([(10, 15), (12, 14.9), (100, 1)])
    found = soa.allowed_current(
        nearly,
        np.array([1.0, 8.0]),
        T=np.array(kelvin(100)),
        T_j_max=kelvin(150),
        derating=LIKE_DISSIPATION,
        Z=None,
        I_rating=15.0,
        voltage_scaled=False,
    )
    assert found.current == pytest.approx([15.0, 7.5])
