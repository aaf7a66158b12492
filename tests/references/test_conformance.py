"""JCGM 106:2012 conformance probability and ILAC-G8:09/2019 statements (checks 6.4, 6.5, 6.7 B, 8.1)."""

import pytest
from scipy import stats

from fieldcheck.engine import distributions, verdicts
from fieldcheck.engine import measured as m
from fieldcheck.engine.verdicts import Limit, conformance_probability, judge, risk_at_acceptance_limit


def value(y, u, dof=None):
    return m.influence(y, u, "reading", dof)


def test_zener_breakdown_voltage():
    """JCGM 106 example (inputs MEM+, published 0.92): limit -5.40 V upper, y -5.47, u 0.05; suncal agrees."""
    assert conformance_probability(-5.47, 0.05, None, -5.40) == pytest.approx(0.9192433407662273, rel=1e-12)
    assert pytest.approx(conformance_probability(-5.47, 0.05, None, -5.4), rel=1e-12) == 1.0 - 0.08075665923377273
    got = judge(value(-5.47, 0.05), Limit("zener", None, -5.40, "guarded", 0.0))
    assert got.risk == pytest.approx(0.08075665923377273, rel=1e-11)


@pytest.mark.parametrize(("p", "z"), [(0.80, 0.8416), (0.90, 1.2816), (0.95, 1.6449), (0.99, 2.3263), (0.999, 3.0902)])
def test_one_sided_guard_of_jcgm_106_table_1(p, z):
    """JCGM 106 table 1 (MEM+): z for a wanted conformance probability."""
    assert verdicts.probability_guard(p, 1.0, None, 10.0) == pytest.approx(z, abs=5e-5)
    assert verdicts.probability_guard(p, 1.0, 10.0, None) == pytest.approx(z, abs=5e-5)


def test_few_degrees_of_freedom_use_students_t():
    """Checks 6.4 (CALC): (TL - y)/u = 2.1 with 4 degrees of freedom, t against normal."""
    assert conformance_probability(0.0, 1.0, None, 2.1, 4) == pytest.approx(0.948173356841199, rel=1e-12)
    assert conformance_probability(0.0, 1.0, None, 2.1, 4.9) == pytest.approx(0.948173356841199, rel=1e-12)
    assert conformance_probability(0.0, 1.0, None, 2.1) == pytest.approx(0.9821355794371834, rel=1e-12)


def test_house_contact_example():
    """Checks 6.4: contact at most 50 mohm, u 3, y 44: pc 0.9772498680518208; AL 44 for w = U (k = 2), 45.0654392 for
    95 % (50 - 1.6448536*3 = 45.06543912, so its last printed digit is one too high)."""
    contact = value(44.0, 3.0)
    got = judge(contact, Limit("contact", None, 50.0, "guarded", 1.0, coverage="k = 2"))
    assert got.probability == pytest.approx(0.9772498680518208, rel=1e-12)
    assert got.accept_high == pytest.approx(44.0, rel=1e-15) and got.U == 6.0
    assert got.statement == "conditional pass"                             # exactly on the acceptance limit
    by_probability = judge(contact, Limit("contact", None, 50.0, "probability", probability=0.95))
    assert by_probability.accept_high == pytest.approx(45.0654392, abs=1e-7) == 50.0 - 3.0 * stats.norm.ppf(0.95)
    assert by_probability.statement == "pass"


def test_two_sided_probability_and_its_guard():
    """Two-sided form of JCGM 106 7.4 against scipy; at the guard's inner end the probability is the wanted one."""
    for y, u, low, high in ((10.0, 0.4, 9.0, 11.0), (10.7, 0.4, 9.0, 11.0), (9.4, 0.35, 9.0, 10.2)):
        want = stats.norm.cdf((high - y) / u) - stats.norm.cdf((low - y) / u)
        assert conformance_probability(y, u, low, high) == pytest.approx(want, rel=1e-12)
    for u, low, high in ((0.4, 9.0, 11.0), (0.5, 9.0, 11.0), (0.1, 9.0, 11.0)):
        guard = verdicts.probability_guard(0.95, u, low, high)
        assert conformance_probability(high - guard, u, low, high) == pytest.approx(0.95, rel=1e-12)
    assert verdicts.probability_guard(0.95, 0.8, 9.0, 11.0) >= 1.0                      # nothing reaches 95 %
    assert verdicts.probability_guard(0.95, 0.55, 9.0, 11.0) == 1.0
    assert judge(value(10.0, 0.8), Limit("x", 9.0, 11.0, "probability")).statement == "conditional pass"


@pytest.mark.parametrize(("ratio", "risk"), [
    (0.0, 0.5), (0.5, 0.15865525393145707), (1.0, 0.02275013194817921), (1.5, 0.0013498980316301035),
    (2.0, 3.167124183311998e-05), (3.0, 9.865877004244794e-10), (0.83, 0.048457226266722775),
])
def test_specific_risk_at_the_acceptance_limit(ratio, risk):
    """ILAC-G8 table 1 (MEM? but for w = U), computed with k = 2: checks 6.5."""
    assert risk_at_acceptance_limit(ratio) == pytest.approx(risk, rel=1e-11)


def test_specific_risk_with_k_of_95_percent():
    """Checks 6.5 and T11: 1.5 U is 0.16 % with k = 1.96, 0.135 % with k = 2."""
    assert risk_at_acceptance_limit(1.0, 1.96) == pytest.approx(0.024997895148220484, rel=1e-11)
    assert risk_at_acceptance_limit(1.5, 1.96) == pytest.approx(0.0016410612341569708, rel=1e-11)
    assert -distributions.normal_quantile(0.05) / 2.0 == pytest.approx(0.8224268134757361, rel=1e-12)


def test_a_wrong_accept_at_w_equal_u_stays_below_two_and_a_half_percent():
    """READ-2: w = U gives a probability of false accept below 2.5 %; here just inside the acceptance limit."""
    got = judge(value(44.0 - 1e-9, 3.0), Limit("contact", None, 50.0, coverage="k = 2"))
    assert got.statement == "pass" and got.risk < 0.025


UPPER = Limit("upper", None, 60.0, coverage="k = 2")
LOWER = Limit("lower", 60.0, None, coverage="k = 2")


@pytest.mark.parametrize(("above_limit", "statement"), [
    (-2.0000001, "pass"), (-2.0, "conditional pass"), (-1.0, "conditional pass"), (0.0, "conditional pass"),
    (0.0000001, "conditional fail"), (2.0, "conditional fail"), (2.0000001, "fail"),
])
def test_boundaries_of_the_four_statements(above_limit, statement):
    """ILAC-G8 4.2.3 (READ) with the boundary convention of checks 6.5; a lower limit is the mirror image."""
    assert judge(value(60.0 + above_limit, 1.0), UPPER).statement == statement
    assert judge(value(60.0 - above_limit, 1.0), LOWER).statement == statement


@pytest.mark.parametrize(("y", "statement"), [(59.9, "pass"), (60.0, "pass"), (60.0000001, "fail")])
def test_simple_acceptance_passes_up_to_and_including_the_limit(y, statement):
    """ILAC-G8 4.2.1 (READ): pass y <= TL."""
    assert judge(value(y, 1.0), Limit("upper", None, 60.0, "simple")).statement == statement
    assert judge(value(120.0 - y, 1.0), Limit("lower", 60.0, None, "simple")).statement == statement


def test_chain_b_temperature_rise():
    """Checks 6.7 B (CALC): 56.2 K, u 1.42, at most 60 K, w = U = 2.84: AL 57.16, pass, pc 0.9962752939142403."""
    got = judge(value(56.2, 1.42), UPPER)
    assert (got.statement, got.guard, got.accept_high) == ("pass", pytest.approx(2.84), pytest.approx(57.16))
    assert got.probability == pytest.approx(0.9962752939142403, rel=1e-12)


def test_pull_in_of_chain_c_against_the_running_voltage():
    """Checks 8.1: 4.044 + 0.073 = 4.117 < 4.25 V, pass."""
    wide = m.mean_of_repeats([4.02, 4.11, 3.98, 4.07, 4.04], "v") + m.influence(0.0, 0.02789063680401244, "meter")
    got = judge(wide, Limit("pull-in", None, 4.25))
    assert got.statement == "pass" and got.value + got.guard == pytest.approx(4.117, abs=5e-4)
    assert got.probability > 0.99999
