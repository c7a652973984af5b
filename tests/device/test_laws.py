"""Regions of operation, and characteristics against temperature and current."""

from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given as for_all
from hypothesis import strategies as st

from soacheck.device import laws
from soacheck.device.path import shipped_devices
from soacheck.device.ratings import Device
from soacheck.device.reader import read_device
from tests.device.files import IGBT, MOSFET, NPN, read


def example(stem: str) -> Device:
    return read_device(shipped_devices() / f"{stem}.toml", shown_as=stem)


def test_words_of_the_regions_follow_the_kind() -> None:
    codes = (laws.CUTOFF, laws.ACTIVE, laws.SATURATION, laws.BREAKDOWN)
    assert codes == (0, 1, 2, 3)
    assert [laws.region_word(code, "pnp") for code in codes] == ["cutoff", "active", "saturation", "breakdown"]
    assert [laws.region_word(code, "n-igbt") for code in codes] == ["cutoff", "active", "saturation", "breakdown"]
    assert [laws.region_word(code, "p-mosfet") for code in codes] == ["off", "active", "on", "breakdown"]
    assert laws.region_word(-1, "npn") is None


def test_leakage_level_is_the_stated_hot_leakage_or_a_thousandth_of_the_rating(tmp_path: Path) -> None:
    assert laws.leakage_level(read(NPN, tmp_path)) == pytest.approx(15e-3)
    hot = NPN + '[typical]\nI_CBO = ["1 uA", "10 uA", "2 mA"]\nI_CBO_T = "125 degC"\n'
    assert laws.leakage_level(read(hot, tmp_path)) == pytest.approx(2e-3)
    cold = NPN + '[typical]\nI_CBO = "50 uA"\nI_CBO_T = "25 degC"\n'
    assert laws.leakage_level(read(cold, tmp_path)) == pytest.approx(15e-3)
    bound = laws.leakage_bound(read(NPN, tmp_path))
    assert bound.source == "common practice"
    assert bound.formula == "0.001 * I_C"


def test_regions_of_a_bipolar_transistor() -> None:
    device = example("EXAMPLE-NPN-160")  # 160 V, V_CE_sat 0.6 V, hot leakage 1 mA
    volts = np.array([0.3, 0.6, 0.7, 100.0, 160.0, 160.1, 200.0, np.nan])
    amps = np.array([5.0, 5.0, 5.0, 1.0, 1.0, 1.0, 0.5e-3, 1.0])
    assert list(laws.regions(device, volts, amps)) == [2, 2, 1, 1, 1, 3, 0, -1]


def test_regions_of_a_mosfet_follow_its_hot_on_resistance() -> None:
    device = example("EXAMPLE-NMOS-SW-100")  # hot 16 mohm
    assert list(laws.regions(device, np.array([0.80, 0.81]), np.array([50.0, 50.0]))) == [2, 1]
    assert list(laws.regions(device, np.array([0.80]), np.array([25.0]))) == [1]


def test_regions_of_an_igbt_follow_its_hot_line() -> None:
    device = example("EXAMPLE-NIGBT-600")  # hot 0.85 V + 38 mohm * I: 1.99 V at 30 A
    assert list(laws.regions(device, np.array([1.98, 2.0]), np.array([30.0, 30.0]))) == [2, 1]


def test_regions_broadcast_over_case_member_and_time() -> None:
    device = example("EXAMPLE-NPN-160")
    volts, amps = np.linspace(0.1, 200, 4)[None, None, :], np.array([1e-4, 1.0])[None, :, None]
    found = laws.regions(device, volts, amps)
    assert found.shape == (1, 2, 4)
    assert (found[0, 0] == laws.CUTOFF).all()


def test_saturation_voltage_has_a_common_value_where_none_is_stated(tmp_path: Path) -> None:
    stated = laws.V_CE_sat(example("EXAMPLE-NPN-60"))
    assert stated.at(0) == 0.8  # the largest stated one
    for kind, volts in (("npn", 1.0), ("npn-darlington", 2.0)):
        absent = laws.V_CE_sat(read(NPN.replace('kind = "npn"', f'kind = "{kind}"'), tmp_path))
        assert (absent.at(0), absent.source) == (volts, "common practice")


@pytest.mark.parametrize(("celsius", "factor"), [(125, 1.94495), (150, 2.23737), (175, 2.55313)])
def test_hot_on_resistance_follows_the_power_law_where_none_is_stated(
    tmp_path: Path, celsius: int, factor: float
) -> None:
    # Second way: (T/298.15 K)^2.3 to six digits.
    text = MOSFET.replace('"175 degC"', f'"{celsius} degC"') + '[typical]\nR_DS_on = "10 mohm"\n'
    hot = laws.R_DS_on_hot(read(text, tmp_path))
    assert hot is not None
    assert hot.at(0) == pytest.approx(0.01 * factor, rel=3e-6)
    assert hot.source == "common practice"


def test_stated_hot_on_resistance_outranks_the_law(tmp_path: Path) -> None:
    hot = laws.R_DS_on_hot(example("EXAMPLE-NMOS-LIN-200"))
    assert hot is not None
    assert hot.at(0) == pytest.approx(0.092)
    assert laws.R_DS_on_hot(read(MOSFET, tmp_path)) is None


def test_gain_is_straight_over_the_logarithm_of_current(tmp_path: Path) -> None:
    points = '[["0.1 A", "25 degC", 80], ["10 A", "25 degC", 40], ["0.1 A", "125 degC", 160], ["10 A", "125 degC", 60]]'
    device = read(NPN + f"[typical]\nh_FE_points = {points}\n", tmp_path)
    gain = laws.current_gain(device, np.array([0.01, 0.1, 1.0, 10.0, 11.0]))
    assert gain is not None
    assert gain[:4] == pytest.approx([80, 80, 60, 40])
    assert np.isnan(gain[4])
    assert laws.current_gain(device, np.array(1.0), 348.15) == pytest.approx((60 + 110) / 2)
    assert laws.current_gain(device, np.array(1.0), 500.0) == pytest.approx(110)
    assert laws.current_gain(read(NPN, tmp_path), np.array(1.0)) is None


def test_single_gain_stands_for_every_current(tmp_path: Path) -> None:
    device = read(NPN + "[typical]\nh_FE = [40, 90, 180]\n", tmp_path)
    assert laws.current_gain(device, np.array([0.1, 10.0])) == pytest.approx([90, 90])


def test_output_characteristics_start_at_zero_and_lie_one_above_the_other() -> None:
    curves = laws.characteristics(example("EXAMPLE-NPN-160"), 60.0, 5.0)
    assert len(curves) == 5
    for label, volts, amps in curves:
        assert label.endswith(" mA")
        assert (volts[0], amps[0]) == (0.0, 0.0)
        assert volts[-1] == 60.0
        assert np.all(np.diff(amps) >= 0)  # the Early voltage makes them rise
    assert all(np.all(high.i[1:] > low.i[1:]) for low, high in pairwise(curves))


def test_output_characteristics_are_empty_without_their_data(tmp_path: Path) -> None:
    for text in (NPN, MOSFET, IGBT):
        assert laws.characteristics(read(text, tmp_path), 60.0, 5.0) == ()


@for_all(v=st.floats(0, 300), i=st.floats(0, 30), stem=st.sampled_from(["NPN-160", "NMOS-LIN-200", "NIGBT-600"]))
def test_more_voltage_at_one_current_never_leads_back_into_saturation(v: float, i: float, stem: str) -> None:
    device = example(f"EXAMPLE-{stem}")
    low, high = laws.regions(device, np.array([v, 1.5 * v + 0.1]), np.array([i, i]))
    assert not (high == laws.SATURATION and low != laws.SATURATION)


def test_output_characteristics_keep_their_order_where_the_gain_falls_steeply(tmp_path: Path) -> None:
    # Repetition of I_C = I_B * h_FE(I_C) swings between two currents where the gain falls faster than the current
    # rises; each curve must stand where I_C / h_FE(I_C) is its base current.
    points = '[["0.1 A", "25 degC", 120], ["2 A", "25 degC", 100], ["6 A", "25 degC", 30], ["15 A", "25 degC", 5]]'
    device = read(NPN + f'[typical]\nh_FE_points = {points}\nV_CE_sat = "1 V"\n', tmp_path)
    curves = laws.characteristics(device, 60.0, 15.0)
    assert all(high.i[-1] > low.i[-1] for low, high in pairwise(curves))
    for label, _, amps in curves:
        gain = laws.current_gain(device, amps[-1:])
        assert gain is not None
        assert amps[-1] / gain[0] == pytest.approx(float(label.removesuffix(" mA")) * 1e-3, rel=1e-3)


def test_output_characteristics_of_the_pnp_example_keep_their_order() -> None:
    curves = laws.characteristics(example("EXAMPLE-PNP-160"), 60.0, 16.0)
    assert all(np.all(high.i[1:] > low.i[1:]) for low, high in pairwise(curves))
