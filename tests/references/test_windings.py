"""Winding resistance and temperature against checks section 1 (IEC 60034-1, EN 61558-1 14.2, cable tables)."""

import math

import pytest
from reference_values import check

from fieldcheck.engine import measured
from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.physics import conductors, windings


@pytest.mark.parametrize(("k", "printed"), [
    (234.5, "1.2161100196463654"), (235.0, "1.2156862745098038"), (225.0, "1.2244897959183674"),
    (228.0, "1.221774193548387")])
def test_factor_from_20_to_75_degc(k, printed):
    # checks 1.1, CALC; the constants: appliance-standard text, EN 61558-1 14.2, IEC 60034-1
    check(windings.temperature_factor(20.0, 75.0, k), printed)


@pytest.mark.parametrize(("k", "printed"), [
    (windings.COPPER, "1.241316205533597"), (windings.COPPER_IEC, "1.2413017751479292"),
    (windings.ALUMINIUM, "1.2416016427104721")])
def test_resistance_at_20_degc(k, printed):
    # checks 1.1, CALC
    check(windings.at_reference_temperature(1.234, 18.5, 20.0, k), printed)


@pytest.mark.parametrize(("k", "printed"), [
    (234.5, "0.003929273084479371"), (235.0, "0.00392156862745098"), (225.0, "0.004081632653061225"),
    (228.0, "0.004032258064516129")])
def test_coefficient_at_20_degc(k, printed):
    # checks 1.1; an engineering portal prints 0.00393 for copper and 0.00403 for aluminium (READ)
    check(windings.temperature_coefficient(20.0, k), printed)


@pytest.mark.parametrize(("t", "printed"), [(5.0, "1.064"), (10.0, "1.042"), (30.0, "0.962"), (40.0, "0.926"),
                                            (75.0, "0.820")])
def test_cable_factors_are_not_the_winding_factors(t, printed):
    # checks 1.1: factors of IEC 60228 in a cable maker's table (READ)
    check(conductors.iec_60228_temperature_factor(t), printed)


@pytest.mark.parametrize(("t", "printed"), [(5.0, "1.063"), (10.0, "1.041"), (30.0, "0.962"), (40.0, "0.927"),
                                            (75.0, "0.822")])
def test_winding_factors_beside_the_cable_factors(t, printed):
    # checks 1.1: the same temperatures by 254.5/(234.5 + t)
    check(windings.temperature_factor(t, 20.0, 234.5), printed)


@pytest.mark.parametrize(("k", "printed"), [(234.5, "64.92708333333333"), (235.0, "65.0625"),
                                            (225.0, "62.35416666666666")])
def test_rise_by_resistance(k, printed):
    # checks 1.2, CALC
    check(windings.temperature_rise(2.4, 20.0, 3.05, 24.0, k), printed)


def test_temperature_of_the_hot_winding():
    # checks 1.2, CALC
    check(windings.winding_temperature(2.4, 20.0, 3.05, 234.5), "88.92708333333333")


def test_uncertainty_of_the_rise_and_its_sensitivities():
    # checks 1.2, CALC: u(R1) 0.006, u(R2) 0.008, u(t1) = u(ta) = 0.5
    rise = windings.temperature_rise(
        measured.influence(2.4, 0.006, "cold"), measured.influence(20.0, 0.5, "t1"),
        measured.influence(3.05, 0.008, "hot"), measured.influence(24.0, 0.5, "ta"), 234.5)
    check(measured.combined(rise), "1.423799678213772")
    for name, u, printed in (("cold", 0.006, "-134.7612847222222"), ("hot", 0.008, "106.04166666666667"),
                             ("t1", 0.5, "1.2708333333333333"), ("ta", 0.5, "-1")):
        check(rise.parts[name] / u, printed)


COOLING_TIMES = [15.0, 30.0, 45.0, 60.0, 90.0, 120.0]
COOLING = [2.4 + 0.65 * math.exp(-t / 180.0) for t in COOLING_TIMES]


def test_cooling_curve_back_to_switch_off():
    # checks 1.3, DERIVED: settled 2.4, 0.65 above it at switch-off, time constant 180 s
    assert [f"{r:.6f}" for r in COOLING] == ["2.998029", "2.950213", "2.906221", "2.865745", "2.794245", "2.733721"]
    assert windings.resistance_at_switch_off(COOLING_TIMES, COOLING, 2.4) == pytest.approx(3.05, rel=1e-12)
    assert windings.cooling_time_constant(COOLING_TIMES, COOLING, 2.4) == pytest.approx(180.0, rel=1e-12)


def test_cooling_curve_with_noise_agrees_with_scipy():
    from scipy.stats import linregress

    noisy = [r + 0.002 * (-1) ** k for k, r in enumerate(COOLING)]
    line = linregress(COOLING_TIMES, [math.log(r - 2.4) for r in noisy])
    assert windings.resistance_at_switch_off(COOLING_TIMES, noisy, 2.4) == pytest.approx(
        2.4 + math.exp(line.intercept), rel=1e-12)
    assert windings.cooling_time_constant(COOLING_TIMES, noisy, 2.4) == pytest.approx(-1.0 / line.slope, rel=1e-12)


def test_uncertainty_of_switch_off_resistance_against_numeric_derivatives():
    exact = windings.resistance_at_switch_off(
        COOLING_TIMES, [measured.influence(r, 0.001, f"r{k}") for k, r in enumerate(COOLING)], 2.4)
    for k in range(len(COOLING)):
        up, down = list(COOLING), list(COOLING)
        up[k] += 1e-6
        down[k] -= 1e-6
        slope = (windings.resistance_at_switch_off(COOLING_TIMES, up, 2.4)
                 - windings.resistance_at_switch_off(COOLING_TIMES, down, 2.4)) / 2e-6
        assert exact.parts[f"r{k}"] == pytest.approx(0.001 * slope, rel=1e-6)


@pytest.mark.parametrize("wrong", [
    lambda: windings.temperature_factor(-240.0, 20.0, 234.5),
    lambda: windings.temperature_rise(0.0, 20.0, 1.0, 20.0, 234.5),
    lambda: windings.winding_temperature(-1.0, 20.0, 1.0, 234.5),
    lambda: windings.resistance_at_switch_off([15.0], [3.0], 2.4),
    lambda: windings.resistance_at_switch_off([15.0, 30.0], [3.0, 2.4], 2.4),
    lambda: windings.resistance_at_switch_off([15.0, 15.0], [3.0, 2.9], 2.4),
    lambda: windings.cooling_time_constant([15.0, 30.0], [2.9, 3.0], 2.4)])
def test_refusals(wrong):
    with pytest.raises(OutOfRange):
        wrong()
