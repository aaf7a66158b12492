"""Propagation of named influences against two independent libraries, and laws that must hold."""

import math
import statistics

import GTC
import pytest
import uncertainties
import uncertainties.umath as umath
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldcheck.engine import measured as m
from fieldcheck.engine.errors import OutOfRange

settings.register_profile("house", derandomize=True, deadline=None, print_blob=True, max_examples=150)
settings.load_profile("house")

INPUTS = [(4.1, 0.03), (-2.3, 0.05), (0.61, 0.004), (1.7, 0.02), (3.3, 0.07), (0.42, 0.01)]
FUNCTIONS = {
    "product": lambda f, a, b, c, d, e, g: a * b / c + d * e - g,
    "floats mixed in": lambda f, a, b, c, d, e, g: 2.0 * a - 3.0 / b + (1.5 - c) / d + e * 0.25 - (-g),
    "roots and logarithms": lambda f, a, b, c, d, e, g: f.sqrt(a * d) * f.log(e) + f.exp(b) / f.log10(a + g),
    "angles": lambda f, a, b, c, d, e, g: f.sin(a) * f.cos(c) + f.atan(b) + f.asin(g) * f.acos(c) - d / e,
    "shared influence cancels": lambda f, a, b, c, d, e, g: (a * e) / (a * d) + b * c - g,
    "squares": lambda f, a, b, c, d, e, g: a * a - (b - c) * (b + c) - b * g,
}


def ours(dofs=(None,) * 6):
    return [m.influence(x, u, f"x{i}", dof) for i, ((x, u), dof) in enumerate(zip(INPUTS, dofs, strict=True))]


@pytest.mark.parametrize("name", FUNCTIONS)
def test_value_and_uncertainty_agree_with_uncertainties(name):
    theirs = FUNCTIONS[name](umath, *[uncertainties.ufloat(x, u) for x, u in INPUTS])
    mine = FUNCTIONS[name](m, *ours())
    assert mine.value == pytest.approx(theirs.nominal_value, rel=1e-13)
    assert m.combined(mine) == pytest.approx(theirs.std_dev, rel=1e-12)


@pytest.mark.parametrize("name", FUNCTIONS)
def test_effective_degrees_of_freedom_agree_with_gtc(name):
    dofs = (4, 9, None, 3, 11.5, None)
    given_to = [GTC.ureal(x, u, math.inf if d is None else d) for (x, u), d in zip(INPUTS, dofs, strict=True)]
    theirs = FUNCTIONS[name](GTC, *given_to)
    mine = FUNCTIONS[name](m, *ours(dofs))
    assert m.combined(mine) == pytest.approx(GTC.uncertainty(theirs), rel=1e-12)
    assert m.effective_dof(mine) == pytest.approx(GTC.dof(theirs), rel=1e-10)


def test_power_agrees_with_uncertainties_in_base_and_exponent():
    x, y = uncertainties.ufloat(1.7, 0.02), uncertainties.ufloat(2.4, 0.03)
    mine = m.power(m.influence(1.7, 0.02, "x"), m.influence(2.4, 0.03, "y"))
    assert mine.value == pytest.approx((x**y).nominal_value, rel=1e-14)
    assert m.combined(mine) == pytest.approx((x**y).std_dev, rel=1e-12)
    assert m.combined(m.power(m.influence(1.7, 0.02, "x"), 2.4)) == pytest.approx((x**2.4).std_dev, rel=1e-12)
    assert m.combined(m.power(1.7, m.influence(2.4, 0.03, "y"))) == pytest.approx((1.7**y).std_dev, rel=1e-12)


def test_plain_floats_stay_floats():
    assert m.sqrt(2.25) == 1.5 and isinstance(m.sqrt(2.25), float)
    assert m.combined(3.0) == 0.0 and m.effective_dof(3.0) is None and m.budget(3.0) == []


def test_the_size_of_a_negative_value_turns_its_contributions():
    assert abs(m.influence(-2.0, 0.5, "x")).parts == {"x": -0.5} and abs(m.influence(2.0, 0.5, "x")).parts == {"x": 0.5}


def test_comparisons_are_those_of_the_value():
    a, b = m.influence(1.0, 0.5, "a"), m.influence(2.0, 0.5, "b")
    assert a < b and b > a and a <= 1.0 and b >= 2.0 and a == 1.0 and a != b and 0.5 < a < 1.5


def test_the_same_name_in_two_values_cancels_in_their_ratio():
    """GUM 5.2.2, fully correlated inputs: a common relative error drops out of a quotient."""
    a, b = m.influence(10.0, 0.1, "gain"), m.influence(5.0, 0.05, "gain")
    assert m.combined(a / b) < 1e-17
    assert m.combined(a - 2.0 * b) < 1e-16
    assert m.combined(a + b) == pytest.approx(0.15, rel=1e-15)


def test_division_by_zero_and_roots_of_negatives_are_refused():
    zero = m.influence(0.0, 1.0, "z")
    for call in (
        lambda: 1.0 / zero, lambda: zero / 0.0, lambda: zero / zero, lambda: m.sqrt(zero), lambda: m.sqrt(-1.0),
        lambda: m.acos(m.influence(1.0, 0.1, "x")), lambda: m.influence(1.0, -0.1, "x"), lambda: m.mean([]),
        lambda: m.influence(1.0, float("nan"), "x"), lambda: m.influence(1.0, 0.1, "x", 0),
    ):
        with pytest.raises(OutOfRange):
            call()


def test_numeric_partials_of_an_iterative_function_agree_with_exact_propagation():
    """GUM 5.1.3 NOTE 2; for a function with vanishing third derivative the half difference is exact."""
    a, b = m.influence(3.0, 0.02, "a"), m.influence(2.0, 0.03, "b")
    shared = a + 0.5 * b

    def iterative(x, y, z):
        return x * y - 2.0 * z

    got = m.through(iterative, [a, shared, 4.0])
    want = a * shared - 8.0
    assert got.value == pytest.approx(want.value, rel=1e-15)
    assert m.combined(got) == pytest.approx(m.combined(want), rel=1e-13)
    assert m.through(iterative, [1.0, 2.0, 3.0]) == -4.0


def test_given_correlations_follow_gum_equation_13():
    both = m.influence(1.0, 3.0, "a") + m.influence(1.0, 4.0, "b")
    for r, want in ((1.0, 7.0), (-1.0, 1.0), (0.0, 5.0), (0.5, math.sqrt(37.0))):
        assert m.combined(both, {("a", "b"): r}) == pytest.approx(want, rel=1e-15)
        assert m.combined(both, {("b", "a"): r}) == pytest.approx(want, rel=1e-15)
    with pytest.raises(OutOfRange):
        m.combined(both, {("a", "b"): 1.01})


def test_correlated_repeats_share_their_degrees_of_freedom_as_in_gtc():
    """Two quantities read five times together: GTC's ensemble gives the result n - 1 = 4 degrees of freedom."""
    x, y = GTC.multiple_ureal([5.0, 3.0], [0.02, 0.03], 4)
    GTC.set_correlation(0.4, x, y)
    theirs = x * y
    a, b = m.influence(5.0, 0.02, "a", 4), m.influence(3.0, 0.03, "b", 4)
    given_to = {("a", "b"): 0.4}
    assert m.combined(a * b, given_to) == pytest.approx(GTC.uncertainty(theirs), rel=1e-12)
    assert m.effective_dof(a * b, given_to) == pytest.approx(GTC.dof(theirs), rel=1e-12) == pytest.approx(4.0)


def test_the_budget_is_sorted_and_its_shares_sum_to_one():
    total = m.influence(1.0, 0.1, "small") + m.influence(1.0, 0.4, "large") * 2.0 - m.influence(1.0, 0.3, "middle")
    rows = m.budget(total)
    assert [row[0] for row in rows] == ["large", "middle", "small"]
    assert [row[1] for row in rows] == [0.8, -0.3, 0.1]
    assert sum(row[2] for row in rows) == pytest.approx(1.0, rel=1e-15)
    rows = m.budget(total, {("large", "middle"): 0.7})
    assert sum(row[2] for row in rows) == pytest.approx(1.0, rel=1e-14)


def test_a_family_adds_what_has_one_sign_and_never_cancels_the_rest():
    plus, minus = m.influence(0.0, 3.0, "a", None, "f"), m.influence(0.0, 4.0, "b", None, "f")
    assert m.combined(plus + minus) == 7.0
    assert m.combined(plus - minus) == 5.0
    assert sum(row[2] for row in m.budget(plus + minus)) == pytest.approx(1.0)
    assert sum(row[2] for row in m.budget(plus - minus)) == pytest.approx(1.0)


def test_coverage_is_stated_as_probability_or_as_k():
    x = m.influence(1.0, 0.5, "x", 4)
    wide = m.expanded(x)
    assert (wide.u, wide.dof, wide.coverage) == (0.5, pytest.approx(4.0), "95 %")
    assert wide.k == pytest.approx(2.7764451051977934, rel=1e-12)         # Student's t, 4, 95 %: GUM table G.2
    assert m.expanded(x, "k = 2").U == 1.0
    for wrong in ("", "95", "k=", "k = 0", "0 %", "100 %", "two sigma"):
        with pytest.raises(OutOfRange):
            m.expanded(x, wrong)


def test_one_reading_has_no_repeatability():
    alone = m.mean_of_repeats([4.2], "v")
    assert alone.value == 4.2 and m.combined(alone) == 0.0 and m.effective_dof(alone) is None


def test_median_maximum_and_spread_keep_the_influences_of_their_readings():
    low, mid, high = (m.influence(x, 0.1 * x, name) for x, name in ((1.0, "a"), (2.0, "b"), (4.0, "c")))
    assert m.median([high, low, mid]) is mid and m.maximum([low, high, mid]) is high and m.minimum([mid, low]) is low
    assert m.median([low, high]).value == 2.5
    assert m.combined(m.spread([mid, low, high])) == pytest.approx(math.hypot(0.1, 0.4), rel=1e-15)
    assert m.mean([low, mid, high]).value == pytest.approx(7.0 / 3.0, rel=1e-15)


readings = st.lists(st.integers(-10**9, 10**9).map(lambda n: n / 1000.0), min_size=2, max_size=9)


@given(readings, st.randoms(use_true_random=False))
def test_the_order_of_repeats_changes_no_bit(values, random):
    shuffled = list(values)
    random.shuffle(shuffled)
    a, b = m.mean_of_repeats(values, "v"), m.mean_of_repeats(shuffled, "v")
    assert (a.value, a.parts, a.dofs) == (b.value, b.parts, b.dofs)
    assert m.mean(values) == m.mean(shuffled) and m.median(values) == m.median(shuffled)


@given(readings)
def test_repeats_agree_with_the_standard_library(values):
    got = m.mean_of_repeats(values, "v")
    scale = max(abs(v) for v in values)
    assert got.value == pytest.approx(statistics.mean(values), abs=1e-13 * scale, rel=1e-13)
    assert m.combined(got) == pytest.approx(statistics.stdev(values) / math.sqrt(len(values)), abs=1e-13 * scale,
                                            rel=1e-9)
