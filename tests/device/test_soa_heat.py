"""What second breakdown and dissipation would allow under the flat, where a current rating is the allowance."""

import numpy as np
import pytest

from soacheck.device import soa
from soacheck.device.ratings import SafeAreaCurve, SafeAreaDerating

T_25, T_J_MAX = 298.15, 423.15
CHART = np.array([(5.0, 15.0), (10.0, 15.0), (50.0, 3.0), (160.0, 0.2)])


def would(
    v: float, *, T: float = T_25, Z: float | None = 0.1, points: np.ndarray = CHART, mosfet: bool = False
) -> float:
    curve = SafeAreaCurve(label="dc", pulse=np.inf, points=points, T_ref=T_25)
    return float(
        soa.heat_current(
            curve,
            np.array(v),
            T=np.array(T),
            T_j_max=T_J_MAX,
            derating=SafeAreaDerating(),
            Z=None if Z is None else np.array(Z),
            voltage_scaled=mosfet,
        )
    )


def test_the_line_below_the_flat_goes_on_to_the_left() -> None:
    # By hand: 150 W from 10 V to 50 V, so 150 W at 5 V.
    assert would(5.0) == pytest.approx(30.0, rel=1e-12)
    assert would(20.0) == pytest.approx(7.5, rel=1e-12)


def test_dissipation_limits_it_where_it_is_lower() -> None:
    # By hand: 125 K / (2 K/W * 5 V).
    assert would(5.0, Z=2.0) == pytest.approx(12.5, rel=1e-12)


@pytest.mark.parametrize("mosfet", [False, True])
def test_it_falls_with_temperature_as_constant_power_does(mosfet: bool) -> None:
    # On a line of constant power half the voltage at one current is half the current at one voltage.
    half = T_25 + (T_J_MAX - T_25) / 2
    assert would(4.0, T=half, mosfet=mosfet) == pytest.approx(150 / 4 / 2, rel=1e-9)
    assert would(4.0, T=T_J_MAX, mosfet=mosfet) == 0.0


def test_a_rectangle_has_dissipation_alone_or_its_corner_power() -> None:
    box = np.array([(50.0, 4.0)])
    assert would(10.0, points=box) == pytest.approx(125 / (0.1 * 10), rel=1e-12)
    assert would(10.0, points=box, Z=None) == pytest.approx(20.0, rel=1e-12)


def test_nothing_is_known_right_of_the_last_point() -> None:
    assert np.isnan(would(161.0))
