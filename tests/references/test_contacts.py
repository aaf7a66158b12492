"""Contacts against checks 5.3, 6.7 A, 12.1 and 12.2 (Holm, Electric Contacts; four-wire practice)."""

import math

import pytest
from reference_values import check

from fieldcheck.engine import measured
from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.physics import contacts, meter_effects, windings


def test_four_wire_with_reversal():
    # checks 5.3, CALC (the page gives 2 I = 1 A, so that the figure is half the difference of the drops)
    check(contacts.four_wire_resistance(1.0423, -1.0331, 1.0), "1.0377")
    check(contacts.thermal_emf(1.0423, -1.0331), "0.0046")


def test_a_thermal_emf_cancels():
    for emf in (-0.02, 0.0, 0.005):
        assert contacts.four_wire_resistance(1.0 + emf, -1.0 + emf, 0.5) == pytest.approx(2.0, rel=1e-12)


def test_house_chain_a():
    # checks 6.7 A: u(V) and u(I) as printed there
    v_plus = measured.influence(1.0423, 0.0004727632679259251, "V+")
    v_minus = measured.influence(-1.0331, 0.0004727632679259251, "V-")
    current = measured.influence(0.45, 0.0006350852961085885, "I")
    r = contacts.four_wire_resistance(v_plus, v_minus, current)
    check(r.value, "2.306")
    at_20 = windings.at_reference_temperature(r, measured.influence(23.4, 0.5 / math.sqrt(3.0), "t"), 20.0, 234.5)
    check(at_20.value, "2.275599069406747")


def test_two_wire_with_the_leads_nulled():
    check(contacts.two_wire_resistance(0.35, 0.22), "0.13")


def test_voltmeter_loading_and_ammeter_burden():
    # checks 5.3, CALC: 1 Mohm source, 10 Mohm meter; 6.0 ohm circuit, 0.1 ohm burden
    assert meter_effects.undisturbed_voltage(0.9090909, 1e6, 10e6) == pytest.approx(1.0, abs=1e-7)
    assert meter_effects.undisturbed_voltage(1.0, 1e6, 10e6) == pytest.approx(1.1, rel=1e-12)
    check(1.0 / meter_effects.undisturbed_current(1.0, 6.0, 0.1), "0.9836065573770493")


def test_holm_constriction():
    # checks 12.1, CALC: copper 1.724e-8 ohm m and brass 7e-8 ohm m, spot radius 50 um; hardness 0.8 GPa
    check(contacts.constriction_resistance(1.724e-8, 50e-6) * 1e3, "0.1724")
    check(contacts.constriction_resistance(7e-8, 50e-6) * 1e3, "0.7")
    check(contacts.constriction_under_force(1.724e-8, 0.8e9, 1.0) * 1e3, "0.4321427145")
    check(contacts.constriction_under_force(1.724e-8, 0.8e9, 0.2) * 1e3, "0.9663004857")
    assert contacts.constriction_of_two_metals(1.724e-8, 1.724e-8, 50e-6) == pytest.approx(
        contacts.constriction_resistance(1.724e-8, 50e-6), rel=1e-12)


@pytest.mark.parametrize(("volts", "printed"), [(0.1, "160.41"), (0.12, "209.42"), (0.43, "1131.37")])
def test_voltage_and_temperature_of_the_spot(volts, printed):
    # checks 12.1, CALC from 20 degC; Holm's softening voltage of copper 0.12 V, melting 0.43 V (MEM+)
    check(contacts.contact_spot_temperature(volts, 20.0), printed)


def test_drop_and_resistance():
    # checks 12.2, CALC: 0.08 V at 2 A
    check(contacts.resistance_from_drop(0.08, 2.0), "0.04")
    check(contacts.drop_at_current(0.04, 2.0), "0.08")


def test_like_with_like():
    # checks 12.2: investigate above 1.5 x the lowest, 20 -> 30
    assert contacts.like_with_like(0.030, [0.020, 0.025, 0.030]) == pytest.approx(1.5, rel=1e-12)
    lowest = measured.influence(0.020, 0.001, "gain")
    assert contacts.like_with_like(lowest, [lowest, 0.025]).parts["gain"] == pytest.approx(0.0, abs=1e-15)


def test_improvement():
    assert contacts.improvement(0.080, 0.020) == pytest.approx(0.75, rel=1e-12)
    assert contacts.improvement(0.020, 0.030) == pytest.approx(-0.5, rel=1e-12)


def test_uncertainty_of_the_spot_temperature_against_numeric_derivatives():
    got = contacts.contact_spot_temperature(measured.influence(0.1, 0.002, "v"), measured.influence(20.0, 0.5, "t"))
    spot = contacts.contact_spot_temperature
    by_volts = (spot(0.1001, 20.0) - spot(0.0999, 20.0)) / 2e-4
    by_degrees = (spot(0.1, 20.01) - spot(0.1, 19.99)) / 0.02
    assert got.parts["v"] == pytest.approx(0.002 * by_volts, rel=1e-6)
    assert got.parts["t"] == pytest.approx(0.5 * by_degrees, rel=1e-6)


@pytest.mark.parametrize("wrong", [
    lambda: contacts.four_wire_resistance(1.0, -1.0, 0.0), lambda: contacts.constriction_resistance(1e-8, 0.0),
    lambda: contacts.contact_spot_radius(0.0, 1e9), lambda: contacts.like_with_like(1.0, []),
    lambda: contacts.like_with_like(1.0, [0.0, 1.0]), lambda: contacts.improvement(0.0, 1.0),
    lambda: contacts.contact_spot_temperature(0.1, -300.0), lambda: meter_effects.undisturbed_voltage(1.0, 1.0, 0.0),
    lambda: meter_effects.undisturbed_current(1.0, 0.0, 0.1)])
def test_refusals(wrong):
    with pytest.raises(OutOfRange):
        wrong()
