"""Faults put into the engine on purpose: each must fail the check from outside that guards against it.

A mutant is a change to one function of the engine; the check is a test of tests/references, which holds without it.
"""

import itertools
from pathlib import Path

import pytest
import rounding_runner
import test_conformance
import test_contacts
import test_figures
import test_gum
import test_house
import test_windings
from parity_answers import answers
from v8 import run_in_v8

from fieldcheck.engine import budgets, carrier, explain, figures, meters, verdicts
from fieldcheck.engine import measured as engine_measured
from fieldcheck.engine.physics import contacts, windings

COUNTER = itertools.count()
FOUND = (AssertionError, pytest.fail.Exception)


def caught(check, *arguments):
    """Whether a check fails with the mutant in place."""
    try:
        check(*arguments)
    except FOUND:
        return True
    return False


def gain_of_its_own(name, contribution, family):
    """A gain error of every reading for itself, with no family, in place of one a range."""
    return carrier.Measured(0.0, {f"{name}, {next(COUNTER)}": contribution}, {}, {})


def without_family(name, contribution, family):
    """Gain and counts squared and summed, as if they were independent."""
    return carrier.Measured(0.0, {name: contribution}, {}, {})


def runtimes_round12(x):
    """Twelve decimals by the runtime instead of twelve significant digits."""
    return round(x, 12)


def whole_freedom_upward(dof, coverage="95 %"):
    return REAL_FACTOR(None if dof is None else float(int(dof) + 1), coverage)


def scatter_of_one(values, name):
    deviation = engine_measured.standard_deviation(values)
    return carrier.influence(sum(values) / len(values), deviation, "repeats of " + name, len(values) - 1)


def given_away(y, low, high, guard):
    return "fail" if REAL_STATEMENT(y, low, high, guard) == "fail" else "pass"


def strict_at_the_limit(y, low, high, guard):
    return "fail" if y in (low, high) else REAL_STATEMENT(y, low, high, guard)


REAL_FACTOR = budgets.coverage_factor
REAL_STATEMENT = verdicts.statement_of
SINGLE = test_gum.test_a_single_reading_adds_gain_and_counts_before_dividing

MUTANTS = {
    "a correction to 20 degC dropped": (
        windings, "at_reference_temperature", lambda r, t, t_ref, k: r,
        test_windings.test_resistance_at_20_degc, 234.5, "1.241316205533597"),
    "a correction to 20 degC dropped, chain A": (
        windings, "at_reference_temperature", lambda r, t, t_ref, k: r, test_contacts.test_house_chain_a),
    "a correction to 20 degC the wrong way": (
        windings, "temperature_factor", lambda t, t_ref, k: (k + t) / (k + t_ref),
        test_windings.test_factor_from_20_to_75_degc, 234.5, "1.2161100196463654"),
    "leads not taken off": (
        contacts, "two_wire_resistance", lambda shown, leads: shown, test_contacts.test_two_wire_with_the_leads_nulled),
    "the reversal left out": (
        contacts, "four_wire_resistance", lambda plus, minus, i: plus / i, test_contacts.test_a_thermal_emf_cancels),
    "gain errors of one range taken as independent": (
        meters, "_signed", gain_of_its_own,
        test_gum.test_regulation_keeps_the_counts_of_both_readings_and_loses_the_shared_gain),
    "gain errors of one range taken as independent, chain A": (
        meters, "_signed", gain_of_its_own, test_gum.test_chain_a_four_wire_with_reversal),
    "gain and counts of one reading not added": (
        meters, "_signed", without_family, SINGLE, "15.00 V", "voltage",
        test_gum.spec("20 V", "10 mV", "0.5 %", "3"), 0.060621778264910706),
    "a rectangular half-width taken as a standard uncertainty": (
        meters, "_ROOT3", 1.0, SINGLE, "15.00 V", "voltage", test_gum.spec("20 V", "10 mV", "0.5 %", "3"),
        0.060621778264910706),
    "degrees of freedom rounded upward": (
        budgets, "coverage_factor", whole_freedom_upward, test_gum.test_chain_c_pull_in_voltage),
    "scatter of one reading in place of that of the mean": (
        engine_measured, "mean_of_repeats", scatter_of_one,
        test_conformance.test_pull_in_of_chain_c_against_the_running_voltage),
    "no guard band": (
        verdicts, "guard_band", lambda *given: 0.0, test_conformance.test_chain_b_temperature_rise),
    "the guard band given to the item": (
        verdicts, "statement_of", given_away,
        test_conformance.test_boundaries_of_the_four_statements, 2.0, "conditional fail"),
    "the limit itself not accepted": (
        verdicts, "statement_of", strict_at_the_limit,
        test_conformance.test_simple_acceptance_passes_up_to_and_including_the_limit, 60.0, "pass"),
    "Student's t left out": (
        verdicts, "_whole", lambda dof: None, test_conformance.test_few_degrees_of_freedom_use_students_t),
    "the runtime's round for twelve digits": (
        figures, "round12", runtimes_round12,
        test_figures.test_round12_is_the_float_nearest_to_the_decimal_of_twelve_digits),
    "the runtime's round for halves": (
        figures, "round_half_up_text", lambda x, places: f"{round(x, places):.{max(0, places)}f}",
        test_figures.test_half_up_works_on_the_digits_as_written),
}


@pytest.mark.parametrize("name", MUTANTS)
def test_a_mutant_is_caught(name, monkeypatch):
    module, attribute, mutant, check, *arguments = MUTANTS[name]
    assert not caught(check, *arguments), "the check holds without the mutant"
    monkeypatch.setattr(module, attribute, mutant)
    assert caught(check, *arguments)


@pytest.mark.parametrize(("module", "right", "mutant"), [
    (verdicts, "round12(value)", "round(value, 12)"),
    (explain, "figures.fixed(100.0 * share, 1)", "str(round(100.0 * share, 1))"),
    (meters, "parse_decimal(text)", "float(format(float(text), '.12g'))"),
])
def test_the_runtimes_own_round_in_an_engine_module_is_caught_by_the_lint(module, right, mutant):
    source = Path(module.__file__).read_text(encoding="utf-8")
    assert test_house.faults_of(source, module.__name__) == []
    assert right in source
    changed = source.replace(right, mutant)
    assert [one for one in test_house.faults_of(changed, module.__name__) if "the runtimes" in one]


def test_the_runtimes_own_round_is_caught_by_parity(phone_build):
    """Near ties (notes: round(2.675, 2) is 2.67 here and 2.68 there); the engine's own figures are the same in both."""
    texts = [f"{n / 1000}" for n in range(5, 4005, 10)]
    folder = Path(__file__).parent
    own = [[text, "figures"] for text in texts]
    assert run_in_v8(own, "rounding_runner", phone_build, folder) == answers(rounding_runner.run, own)
    runtimes = [[text, "round"] for text in texts]
    assert run_in_v8(runtimes, "rounding_runner", phone_build, folder) != answers(rounding_runner.run, runtimes)
