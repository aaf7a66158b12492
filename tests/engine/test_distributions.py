"""Distributions against scipy 1.17.1, mpmath 1.4 and the printed tables named at each check.

Worst relative difference seen: normal_cdf 1.8e-13 (to z = -37), normal_quantile 5e-16, student_cdf 4e-14,
student_quantile 4e-14, beta_cdf 4e-13, beta_quantile 7e-13.
"""

import math
import random

import mpmath
import pytest
from mpmath import mpf
from scipy import special, stats

from fieldcheck.engine import distributions
from fieldcheck.engine.errors import OutOfRange

NUS = [1, 1.5, 2, 2.7, 3, 4, 5, 7, 9.9, 10, 16, 30, 50, 100, 999, 1001, 12345.6, 1e6, 1e9]


def _close(got, expected, relative=1e-12):
    assert abs(got - expected) <= relative * abs(expected), (got, expected)


def _probabilities(r, n, low=-11.9):
    tails = [10 ** r.uniform(low, -0.31) for _ in range(n)]
    return tails + [1 - p for p in tails]


def test_normal_cdf_agrees_with_mpmath_far_into_the_tail():
    r = random.Random(1)
    for _ in range(500):
        z = r.uniform(-37, 8)
        _close(distributions.normal_cdf(z), mpmath.ncdf(mpf(z)))


def test_normal_quantile_agrees_with_scipy_and_near_one_half_with_mpmath():
    r = random.Random(2)
    for p in _probabilities(r, 300) + [10 ** r.uniform(-299, -1) for _ in range(200)]:
        _close(distributions.normal_quantile(p), special.ndtri(p), 1e-14 if p < 0.5 else 1e-12)
    with mpmath.workdps(40):
        for _ in range(100):
            p = 0.5 + 10 ** r.uniform(-9, -1)
            _close(distributions.normal_quantile(p), mpmath.sqrt(2) * mpmath.erfinv(2 * mpf(p) - 1), 1e-14)


def test_conformance_table_of_normal_quantiles():
    # JCGM 106:2012 Table 1: z for 0.80, 0.90, 0.95, 0.99, 0.999 (four decimals)
    for p, z in ((0.80, 0.8416), (0.90, 1.2816), (0.95, 1.6449), (0.99, 2.3263), (0.999, 3.0902)):
        assert abs(distributions.normal_quantile(p) - z) <= 5e-5


def test_conformance_probabilities_of_the_zener_and_house_examples():
    # JCGM 106:2012, breakdown voltage: (5.47 - 5.40) / 0.05 -> 0.92; t against normal; contact 50 - 44 over 3
    _close(distributions.normal_cdf((-5.40 + 5.47) / 0.05), 0.9192433407662273)
    _close(distributions.student_cdf(2.1, 4), 0.948173356841199)
    _close(distributions.normal_cdf(2.1), 0.9821355794371834)
    _close(distributions.normal_cdf(2.0), 0.9772498680518208)
    _close(50 - 3 * distributions.normal_quantile(0.95), 50 - 3 * special.ndtri(0.95))


def test_student_cdf_agrees_with_scipy():
    r = random.Random(3)
    for nu in NUS:
        for _ in range(30):
            t = r.uniform(-8, 8)
            _close(distributions.student_cdf(t, nu), stats.t.cdf(t, nu))


def test_student_quantile_agrees_with_scipy():
    r = random.Random(4)
    for nu in NUS:
        for p in _probabilities(r, 15):
            if abs(p - 0.5) > 0.01:                # nearer, scipy itself loses digits: see the next test
                _close(distributions.student_quantile(p, nu), special.stdtrit(nu, p))


def test_student_quantile_near_one_half_is_probability_over_central_density():
    for nu in NUS:
        density = stats.t.pdf(0, nu)
        for excess in (2.0 ** -30, -(2.0 ** -34)):
            _close(distributions.student_quantile(0.5 + excess, nu), excess / density, 1e-10)


def test_student_has_closed_forms_for_one_and_two_degrees_of_freedom():
    # Abramowitz and Stegun 26.7.3 and 26.7.4 solved for t
    r = random.Random(5)
    with mpmath.workdps(40):
        for p in _probabilities(r, 60):
            if abs(p - 0.5) > 1e-3:
                _close(distributions.student_quantile(p, 1), mpmath.tan(mpmath.pi * (mpf(p) - 0.5)))
                _close(distributions.student_quantile(p, 2), (2 * mpf(p) - 1) / mpmath.sqrt(2 * mpf(p) * (1 - mpf(p))))


# JCGM 100:2008 (GUM) Table G.2 to four decimals (recomputed with scipy): nu, then 68.27, 90, 95, 95.45, 99, 99.73 %
G2 = """
1 1.8374 6.3138 12.7062 13.9678 63.6567 235.7837
2 1.3213 2.9200 4.3027 4.5266 9.9248 19.2060
3 1.1969 2.3534 3.1824 3.3068 5.8409 9.2187
4 1.1417 2.1318 2.7764 2.8693 4.6041 6.6201
5 1.1105 2.0150 2.5706 2.6487 4.0321 5.5070
6 1.0906 1.9432 2.4469 2.5165 3.7074 4.9040
7 1.0767 1.8946 2.3646 2.4288 3.4995 4.5299
8 1.0666 1.8595 2.3060 2.3664 3.3554 4.2766
9 1.0588 1.8331 2.2622 2.3198 3.2498 4.0942
10 1.0526 1.8125 2.2281 2.2837 3.1693 3.9569
16 1.0323 1.7459 2.1199 2.1689 2.9208 3.5441
20 1.0257 1.7247 2.0860 2.1330 2.8453 3.4221
30 1.0170 1.6973 2.0423 2.0868 2.7500 3.2703
50 1.0101 1.6759 2.0086 2.0513 2.6778 3.1571
inf 1.0000 1.6449 1.9600 2.0000 2.5758 3.0000
"""


@pytest.mark.parametrize("row", G2.strip().splitlines())
def test_coverage_factors_of_gum_table_g_2(row):
    name, *factors = row.split()
    nu = None if name == "inf" else int(name)
    for percent, factor in zip((68.27, 90, 95, 95.45, 99, 99.73), factors, strict=True):
        assert abs(distributions.coverage_factor(nu, percent / 100) - float(factor)) <= 5.1e-5


def test_degrees_of_freedom_are_truncated_not_rounded():
    # GUM H.1: 16.7 effective degrees of freedom give t_99(16) = 2.92
    assert distributions.coverage_factor(16.7, 0.99) == distributions.coverage_factor(16, 0.99)
    assert abs(distributions.coverage_factor(16.7, 0.99) - 2.92) < 0.005
    # ... but 16 less what arithmetic lost is 16
    assert distributions.coverage_factor(15.999999999999998) == distributions.coverage_factor(16)
    assert distributions.coverage_factor(15.9999) == distributions.coverage_factor(15)
    _close(distributions.coverage_factor(1e18), distributions.coverage_factor(None))
    assert distributions.coverage_factor(math.inf) == distributions.coverage_factor(None)


def test_a_quantile_asked_again_is_the_same_and_the_store_stays_bounded():
    first = [distributions.student_quantile(0.9, 1 + n / 8) for n in range(1200)]
    assert [distributions.student_quantile(0.9, 1 + n / 8) for n in range(1200)] == first
    assert len(distributions._cache) <= distributions._CACHE_AT_MOST


def test_beta_cdf_agrees_with_scipy():
    r = random.Random(6)
    for _ in range(300):
        a, b = 10 ** r.uniform(-0.6, 4), 10 ** r.uniform(-0.6, 4)
        x = min(max(r.betavariate(a, b), 1e-9), 1 - 1e-9)
        _close(distributions.beta_cdf(x, a, b), special.betainc(a, b, x))
    assert distributions.beta_cdf(0, 2, 3) == 0.0 and distributions.beta_cdf(1, 2, 3) == 1.0


def test_beta_quantile_agrees_with_scipy():
    r = random.Random(7)
    for p in _probabilities(r, 150):
        a, b = 1 + 10 ** r.uniform(-1, 5), 1 + 10 ** r.uniform(-1, 5)
        expected = special.betaincinv(a, b, p)
        assert abs(distributions.beta_quantile(p, a, b) - expected) <= 1e-12 * expected + 1e-16


# Clopper-Pearson: two-sided 95 % and one-sided upper 95 % (statsmodels 0.15 proportion_confint, method "beta")
MISSES = [
    (0, 10, 0, 0.3084971078187607, 0.2588655508930522),
    (0, 20, 0, 0.1684334709830853, 0.13910834066826516),
    (0, 40, 0, 0.08809730287880237, 0.07215752450551455),
    (0, 59, 0, 0.060608900950339835, 0.04950760988822693),
    (0, 100, 0, 0.03621669264517641, 0.029513049607039925),
    (1, 40, 0.0006327449320494191, 0.13158585848276572, 0.11318836094473754),
    (2, 40, 0.006113646599350838, 0.16919686395941763, 0.14915196127321298),
    (1, 100, 0.00025314603297742064, 0.054459385392080645, 0.046559811453538935),
    (3, 100, 0.006229971538306395, 0.08517605297428002, 0.07571079374983004),
    (5, 10, 0.18708602844739855, 0.8129139715526015, 0.7775588989918706),
    (4, 20, 0.05733399705003277, 0.4366140029966683, 0.4010281173319745),
    (10, 10, 0.6915028921812392, 1, 1),
]


@pytest.mark.parametrize("x, n, low, high, one_sided", MISSES)
def test_exact_bounds_on_a_miss_rate(x, n, low, high, one_sided):
    got = distributions.clopper_pearson(x, n)
    _close(got[0], low)
    _close(got[1], high)
    _close(distributions.upper_bound(x, n), one_sided)


def test_exact_bounds_of_a_widely_tabulated_case_and_of_very_long_runs():
    low, high = distributions.clopper_pearson(81, 263)
    _close(low, 0.25273674558527126)
    _close(high, 0.36762192260135135)
    for x, n in ((3, 1000000), (500, 100000), (999999, 10000000)):
        low, high = distributions.clopper_pearson(x, n)
        _close(low, special.betaincinv(x, n - x + 1, 0.025), 2e-11)        # scipy's own error reaches 9e-12 here
        _close(high, special.betaincinv(x + 1, n - x, 0.975), 2e-11)
    with mpmath.workdps(40):                                               # definition: P(at most 3 of n) = 2.5 %
        high, n = mpf(distributions.clopper_pearson(3, 1000000)[1]), 1000000
        seen = sum(mpmath.binomial(n, k) * high ** k * (1 - high) ** (n - k) for k in range(4))
        assert abs(seen / 0.025 - 1) < 1e-11


def test_clean_pulses_needed_for_a_wanted_bound():
    needed = [distributions.clean_pulses_needed(p) for p in (0.10, 0.05, 0.02, 0.01, 0.001)]
    assert needed == [29, 59, 149, 299, 2995]
    for n, p in zip(needed, (0.10, 0.05, 0.02, 0.01, 0.001), strict=True):
        assert distributions.upper_bound(0, n) <= p < distributions.upper_bound(0, n - 1)
    assert distributions.clean_pulses_needed(0.5, 0.75) == 2          # exactly on the border


def test_wilson_interval_agrees_with_scipy():
    for x, n in ((1, 40), (0, 40), (40, 40), (7, 300)):
        expected = stats.binomtest(x, n).proportion_ci(method="wilson")
        got = distributions.wilson(x, n)
        assert abs(got[0] - expected.low) <= 1e-12 * expected.low + 1e-16
        _close(got[1], expected.high)


REFUSED = [
    lambda: distributions.normal_quantile(0), lambda: distributions.normal_quantile(1),
    lambda: distributions.normal_quantile(math.nan), lambda: distributions.normal_cdf(math.nan),
    lambda: distributions.student_quantile(0.9, 0.5), lambda: distributions.student_quantile(1.5, 3),
    lambda: distributions.student_cdf(math.inf, 3), lambda: distributions.student_cdf(1, math.nan),
    lambda: distributions.coverage_factor(0.9), lambda: distributions.coverage_factor(5, 1),
    lambda: distributions.coverage_factor(math.nan), lambda: distributions.beta_quantile(0.5, 0.5, 3),
    lambda: distributions.beta_cdf(1.1, 2, 3), lambda: distributions.beta_cdf(0.5, 0, 3),
    lambda: distributions.clopper_pearson(3, 2), lambda: distributions.clopper_pearson(-1, 2),
    lambda: distributions.clopper_pearson(1.5, 2), lambda: distributions.clopper_pearson(0, 0),
    lambda: distributions.upper_bound(0, 5, 1.0), lambda: distributions.wilson(0, 5, 0),
    lambda: distributions.clean_pulses_needed(0),
]


@pytest.mark.parametrize("call", REFUSED)
def test_arguments_that_make_no_sense_are_refused(call):
    with pytest.raises(OutOfRange) as caught:
        call()
    assert caught.value.what
