"""Statements under every circumstance: missing, bounded, unproved meters, safety; and what the page prints."""

from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldcheck.engine import measured as m
from fieldcheck.engine import verdicts
from fieldcheck.engine.errors import RuleError
from fieldcheck.engine.verdicts import Limit, judge, printed

settings.register_profile("house", derandomize=True, deadline=None, print_blob=True, max_examples=200)
settings.load_profile("house")

ORDER = ("pass", "conditional pass", "conditional fail", "fail")


def value(y, u, dof=None):
    return m.influence(y, u, "reading", dof)


def test_a_missing_reading_is_not_judged_and_says_so():
    got = judge(None, Limit("x", None, 1.0))
    assert (got.statement, got.reason) == ("not judged", "the reading is missing")


def test_without_a_known_meter_the_value_is_judged_by_simple_acceptance_and_says_so():
    got = judge(value(0.99, 0.01 / 12.0**0.5), Limit("x", None, 1.0), ("no meter",))
    assert (got.statement, got.rule, got.guard) == ("pass", "simple", 0.0)
    assert got.notes == ("read without a known meter: simple acceptance, no guard band",)
    assert (got.probability, got.risk, got.k) == (None, None, 0.0)
    assert (printed(got).value, printed(got).U, printed(got).guard) == ("0.990", "", "")


@pytest.mark.parametrize("state", ["no meter", "unknown", "overdue", "unchecked"])
def test_a_safety_limit_needs_a_proved_meter(state):
    limit = Limit("insulation", 2e6, None, safety=True)
    got = judge(value(50e6, 1e6), limit, ("in calibration", state))
    assert got.statement == "not judged" and "meter" in got.reason
    assert judge(value(50e6, 1e6), limit, ("in calibration",)).statement == "pass"
    assert judge(None, limit, (state,), ">").statement == "not judged"


def test_an_overdue_meter_is_noted_on_an_ordinary_limit():
    got = judge(value(0.5, 0.01), Limit("x", None, 1.0), ("overdue",))
    assert (got.statement, got.notes) == ("pass", ("calibration of a meter: overdue",))


@pytest.mark.parametrize("y", [2.05e6, 1.95e6, 2.0e6])
def test_a_safety_limit_inside_the_guard_band_is_a_conditional_fail_on_either_side(y):
    got = judge(value(y, 0.1e6), Limit("insulation", 2e6, None, safety=True), ("in calibration",))
    assert got.statement == "conditional fail"
    assert got.reason.endswith("do not energise, repeat")
    assert got.risk is None


def test_of_two_limits_the_worse_statement_holds():
    limit = Limit("band", 9.0, 11.0, coverage="k = 2")
    for y, want in ((10.0, "pass"), (10.9, "conditional pass"), (9.1, "conditional pass"), (11.1, "conditional fail"),
                    (8.9, "conditional fail"), (11.3, "fail"), (8.7, "fail")):
        assert judge(value(y, 0.1), limit).statement == want
    assert judge(value(10.0, 0.6), limit).statement == "conditional pass"


@pytest.mark.parametrize(("limit", "bound", "at", "want"), [
    (Limit("x", 2e6, None), ">", 200e6, "pass"), (Limit("x", None, 2e6), ">", 200e6, "fail"),
    (Limit("x", 300e6, None), ">", 200e6, "not judged"), (Limit("x", None, 300e6), ">", 200e6, "not judged"),
    (Limit("x", None, 1.0), "<", 0.1, "pass"), (Limit("x", 1.0, None), "<", 0.1, "fail"),
    (Limit("x", 0.05, None), "<", 0.1, "not judged"), (Limit("x", 1.0, 5.0), ">", 2.0, "not judged"),
    (Limit("x", 1.0, 5.0), ">", 6.0, "fail"), (Limit("x", 1.0, 5.0), "<", 0.5, "fail"),
    (Limit("x", 1.0, 5.0), "<", 2.0, "not judged"), (Limit("x", 1.0, None), ">", None, "not judged"),
])
def test_a_bounded_reading_is_judged_only_when_its_bound_settles_it(limit, bound, at, want):
    got = judge(at, limit, ("in calibration",), bound)
    assert got.statement == want and got.reason


def test_a_bound_with_an_uncertainty_must_clear_the_guard_band_too():
    limit = Limit("x", 195e6, None, coverage="k = 2")
    assert judge(value(200e6, 5e6), limit, (), ">").statement == "not judged"
    assert judge(value(206e6, 5e6), limit, (), ">").statement == "pass"


def test_a_limit_computed_from_readings_brings_its_own_uncertainty_and_shares_the_gain():
    """Investigate above 1.5 x the lowest of similar contacts: one meter, so its gain cancels in the comparison."""
    lowest = m.influence(0.020, 0.0002, "gain")
    mine = m.influence(0.030, 0.0003, "gain")
    got = judge(mine, Limit("like with like", None, 1.5 * lowest))
    assert got.u < 1e-17 and got.at_most == pytest.approx(0.030)
    apart = judge(mine, Limit("like with like", None, 1.5 * m.influence(0.020, 0.0002, "other gain")))
    assert apart.u == pytest.approx(0.0003 * 2.0**0.5)


def test_values_that_differ_only_beyond_twelve_digits_are_equal():
    limit = Limit("x", None, 0.3, "simple")
    assert 0.1 + 0.2 > 0.3 and judge(0.1 + 0.2, limit).statement == "pass"


@pytest.mark.parametrize("wrong", [
    {"at_most": None}, {"rule": "strict"}, {"guard": -1.0}, {"guard": 0.001}, {"guard": float("nan")},
    {"probability": 1.0}, {"probability": 0.4},
    {"at_least": 2.0},
])
def test_limits_without_sense_are_refused(wrong):
    with pytest.raises(RuleError):
        Limit(**{"id": "x", "at_most": 1.0, **wrong})


def test_as_found_says_at_most_outside_limit_service():
    words = {statement: verdicts.as_found_word(statement) for statement in verdicts.STATEMENTS}
    assert words["fail"] == words["conditional fail"] == "outside limit, service"
    assert words["pass"] == "within limit"
    assert not [word for word in words.values() if "reject" in word or "replace" in word]


# --- laws -----------------------------------------------------------------------------------------------------------

numbers = st.integers(-20000, 20000).map(lambda n: n / 1000.0)
widths = st.integers(0, 3000).map(lambda n: n / 1000.0)
rules = st.sampled_from(["simple", "guarded", "probability"])


@st.composite
def limits(draw, **fixed):
    low, high = sorted((draw(numbers), draw(numbers)))
    sides = draw(st.sampled_from([(low, None), (None, high), (low, high)]))
    given_to = {"rule": draw(rules), "guard": draw(st.integers(0, 300)) / 100.0, "safety": draw(st.booleans()), **fixed}
    return Limit("x", *sides, **given_to)


@given(limits(rule="guarded"), numbers, widths, st.integers(1, 200).map(lambda n: n / 100.0))
def test_a_wider_guard_band_never_accepts_more(limit, y, u, extra):
    narrow, wide = judge(value(y, u), limit), judge(value(y, u), limit.replace(guard=limit.guard + extra))
    assert (wide.statement == "pass") <= (narrow.statement == "pass")
    accepts = ("pass", "conditional pass")
    assert (wide.statement in accepts) <= (narrow.statement in accepts)


@given(numbers, numbers, numbers, st.integers(0, 200), widths, rules)
def test_lowering_a_reading_never_betters_it_against_an_at_least_limit(edge, a, b, gain_in_thousandths, counts, rule):
    low, high = sorted((abs(a), abs(b)))
    gain = gain_in_thousandths / 1000.0

    def rank(y):
        reading = m.Measured(y, {"gain": gain * y, "counts": counts}, {}, {})
        return ORDER.index(judge(reading, Limit("x", edge, None, rule, coverage="k = 2")).statement)

    assert rank(low) >= rank(high)


@given(limits(), numbers, widths)
def test_a_safety_limit_is_never_conditionally_passed(limit, y, u):
    assert judge(value(y, u), limit.replace(safety=True), ("in calibration",)).statement != "conditional pass"


def statement_by_hand(shown):
    """What a reader finds from the printed texts alone, in exact fractions."""
    y, w = Fraction(shown.value), Fraction(shown.guard or "0")
    worst = "pass"
    for side, text in ((1, shown.at_most), (-1, shown.at_least)):
        if not text:
            continue
        over = side * (y - Fraction(text))
        found = "pass"
        if w == 0:
            found = "fail" if over > 0 else "pass"
        elif over > w:
            found = "fail"
        elif over > 0:
            found = "conditional fail"
        elif over >= -w:
            found = "conditional pass"
        worst = max(worst, found, key=ORDER.index)
    return worst


@given(limits(safety=False), numbers, widths, st.sampled_from([1.0, 1e-6, 7e3]), st.integers(-3, 3))
def test_the_printed_figures_alone_give_the_same_statement(limit, y, u, scale, nudge):
    """Also close to each edge: the value is pushed to within a few parts in 1e9 of an acceptance limit."""
    got = judge(value(y, u), limit)
    targets = [y] + [edge for edge in (got.accept_low, got.accept_high, got.at_least, got.at_most) if edge is not None]
    for target in targets:
        got = judge(value(target * (1.0 + nudge * 1e-9), u), limit)
        for convert in (lambda x: x, lambda x, s=scale: x / s, lambda x: x * 9.0 / 5.0 + 32.0):
            assert statement_by_hand(printed(got, convert)) == got.statement


def test_printed_adds_digits_only_where_they_are_needed():
    """U to two digits (GUM 7.2.6); 57.1600001 against 60 - 2.84 needs seven places."""
    limit = Limit("rise", None, 60.0, coverage="k = 2")
    easy, close = judge(value(56.2, 1.42), limit), judge(value(57.1600001, 1.42), limit)
    shown = printed(easy)
    assert (shown.value, shown.U, shown.guard, shown.at_most) == ("56.2", "2.8", "2.8", "60")
    assert close.statement == "conditional pass" and printed(close).value == "57.2"
    close = judge(value(57.1599999, 1.42), limit)
    assert close.statement == "pass"
    assert (printed(close).value, printed(close).guard) == ("57.1599999", "2.8400000")
