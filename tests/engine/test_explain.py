"""What a verdict says about itself, and what would settle a conditional one."""

import json

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldcheck.engine import explain, verdicts
from fieldcheck.engine import measured as m
from fieldcheck.engine.verdicts import Limit, judge

settings.register_profile("house", derandomize=True, deadline=None, print_blob=True, max_examples=100)
settings.load_profile("house")

LIMIT = Limit("pull_in", None, 4.25)
PULL_IN = m.mean_of_repeats([4.02, 4.11, 3.98, 4.07, 4.04], "reading pull_in")


def whole(shift=0.0, meter=0.02789063680401244):
    return PULL_IN + shift + m.influence(0.0, meter, "gain of M1 AC voltage 20 V range")


def test_a_whole_explanation_is_plain_text_that_json_can_carry():
    value = whole()
    got = explain.explanation(judge(value, LIMIT, ("in calibration",)), LIMIT, value, "V", formula="pull_in",
                              numbers=[("pull_in", "4.044 V")], corrections=["none"],
                              cite={"source": "house-practice", "clause": "8.1", "edition": "2026"}, tag="PRACTICE")
    assert got == json.loads(json.dumps(got))
    assert got["statement"] == "pass" and got["value"] == "4.044 ± 0.073 V" and got["limit"] == "at most 4.25 V"
    assert got["coverage"] == "U = k·u, k = 2.05 (95 %, Student's t), degrees of freedom 27"
    assert got["formula_with_numbers"] == "4.044 V"
    assert got["guard"] == "guard band 0.073 V = 1·U"
    assert got["citation"] == "house-practice, 8.1, 2026" and got["gloss"] == "usual range, no standard"
    assert got["probability"] == "more than 99.9 %" and got["wrong_accept"] == "less than 0.1 %"
    assert [row["name"] for row in got["budget"]] == ["gain of M1 AC voltage 20 V range", "repeats of reading pull_in"]
    assert [row["share"] for row in got["budget"]] == ["61.5 %", "38.5 %"]
    assert got["settle"] is None


def test_numbers_take_the_place_of_names_and_negative_ones_get_brackets():
    numbers = [("v_plus", "1.0423 V"), ("v_minus", "-1.0331 V"), ("sweep.drop", "0.2 V")]
    assert explain.put_in("(v_plus - v_minus) / 2", numbers) == "(1.0423 V - (-1.0331 V)) / 2"
    assert explain.put_in("sweep.drop * v", numbers) == "0.2 V * v"
    assert explain.put_in("v_plus2 + 1.5", numbers) == "v_plus2 + 1.5"


def test_enough_repeats_are_computed_and_are_the_fewest():
    value = whole(0.15)
    verdict = judge(value, LIMIT)
    assert verdict.statement == "conditional pass"
    n = explain.repeats_that_settle(verdict, LIMIT, value)
    assert n > 5
    assert judge(explain.with_repeats(value, n), LIMIT).statement == "pass"
    assert judge(explain.with_repeats(value, n - 1), LIMIT).statement == "conditional pass"
    settle = explain.explanation(verdict, LIMIT, value, "V")["settle"]
    assert settle["repeats"] == str(n) and str(n) in settle["text"]


def test_new_repeats_of_the_same_scatter_are_what_the_same_readings_would_give():
    again = explain.with_repeats(whole(), 5)
    assert m.combined(again) == pytest.approx(m.combined(whole()), rel=1e-15)
    assert m.effective_dof(again) == pytest.approx(m.effective_dof(whole()), rel=1e-12)


def test_where_repeats_cannot_settle_it_the_needed_uncertainty_is_stated_and_suffices():
    value = whole(0.18)
    verdict = judge(value, LIMIT)
    got = explain.explanation(verdict, LIMIT, value, "mV", convert=lambda x: x * 1000.0)["settle"]
    assert got["repeats"] == ""
    assert got["text"].startswith("cannot be settled by repeats: u of at most " + got["u"] + " mV")
    assert "gain of M1 AC voltage 20 V range" in got["text"]
    u = float(got["u"]) / 1000.0
    assert judge(m.influence(value.value, u, "x"), LIMIT).statement == "pass"
    assert judge(m.influence(value.value, u * 1.1, "x"), LIMIT).statement == "conditional pass"


def test_a_single_reading_is_not_told_to_repeat():
    value = m.influence(4.2, 0.04, "gain")
    got = explain.explanation(judge(value, LIMIT), LIMIT, value, "V")["settle"]
    assert got["repeats"] == "" and got["u"] == "0.025"


def test_exactly_on_the_limit_nothing_settles_it_at_the_same_mean():
    value = m.influence(4.25, 0.04, "gain")
    assert "stands on the limit" in explain.explanation(judge(value, LIMIT), LIMIT, value, "V")["settle"]["text"]


def test_a_safety_limit_says_what_to_do_and_what_settles_it():
    limit = Limit("insulation", 2e6, None, safety=True)
    value = m.influence(2.05e6, 0.1e6, "gain")
    got = explain.explanation(judge(value, limit, ("in calibration",)), limit, value, "Mohm", lambda x: x / 1e6)
    assert got["statement"] == "conditional fail" and "do not energise, repeat" in got["reason"]
    assert got["value"] == "2.05 ± 0.20 Mohm" and got["limit"] == "at least 2 Mohm"
    assert got["settle"]["u"] == "0.025" and got["wrong_accept"] == ""


def test_not_judged_explains_what_is_missing():
    got = explain.explanation(verdicts.not_judged(LIMIT, "the reading is missing"), LIMIT, None, "V")
    assert (got["statement"], got["reason"], got["value"], got["limit"]) == (
        "not judged", "the reading is missing", "", "at most 4.25 V")


def test_a_bounded_reading_shows_its_bound():
    limit = Limit("insulation", 2e6, None)
    got = explain.explanation(judge(200e6, limit, (), ">"), limit, None, "Mohm", lambda x: x / 1e6)
    assert (got["statement"], got["value"], got["probability"]) == ("pass", ">200 Mohm", "")


@given(st.floats(1e-9, 1e9), st.integers(1, 4))
def test_rounding_down_never_exceeds_and_stays_within_a_digit(x, digits):
    text = explain.rounded_down(x, digits)
    assert 0.0 <= x - float(text) <= 1.0000001 * x * 10.0 ** (1 - digits)


@given(st.integers(1, 80), st.integers(1, 60), st.sampled_from([None, "probability"]))
def test_the_fewest_repeats_are_always_the_fewest(gap_in_thousandths, meter_in_thousandths, rule):
    limit = LIMIT if rule is None else LIMIT.replace(rule=rule)
    value = PULL_IN + (4.25 - 4.044 - gap_in_thousandths / 1000.0)
    value = value + m.influence(0.0, meter_in_thousandths / 1000.0, "gain")
    verdict = judge(value, limit)
    n = explain.repeats_that_settle(verdict, limit, value)
    if n is None:
        assert judge(explain.with_repeats(value, 1000), limit).statement != "pass"
    else:
        assert judge(explain.with_repeats(value, n), limit).statement == "pass"
        assert n == 2 or judge(explain.with_repeats(value, n - 1), limit).statement != "pass"
