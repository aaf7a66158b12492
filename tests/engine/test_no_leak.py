"""What must not fall through to pass: answers that say less than they seem to."""

import copy

import pytest

from tests.engine.test_procedures import PART, act, run, step


def safety_part():
    """The trial procedure with one safety limit: r at least 1 milliohm, each row of a table beside it."""
    part = copy.deepcopy(PART)
    part["limits"][0].update(safety=True, value="r", unit="mohm", corrective=[])
    part["limits"][0]["entries"][0].update(at_most=None, at_least=["num", "0.001"])
    return part


def table_part():
    """As above, judged for each contact of a table whose number the nameplate gives."""
    part = safety_part()
    part["nameplate"].append({"id": "n", "label": "Contacts", "quantity": "count", "unit": None,
                              "unknown": {"then": "not judged"}})
    part["steps"][1] = step("r", kind="table", rows={"from": "n"}, columns=[
        {"id": "a", "title": "a", "quantity": "resistance", "unit": "mohm", "meter": "ohms"}])
    part["limits"][0].update(value="r.a", each=True)
    return part


@pytest.mark.parametrize("texts", [["0.3", "OL"], ["OL", "0.3"], ["0.3", ">900"]])
def test_an_overload_among_repeats_does_not_hide_the_low_reading(texts):
    said = run(act("cover_off"), {"step": "r", "texts": texts, "unit": "mohm", "meter": "M1"}, act("cover_on"),
               part=safety_part())
    assert said["verdicts"]["drop_limit"]["final"] == "not judged"
    assert "some of the repeats" in said["verdicts"]["drop_limit"]["reason"]
    assert said["complete"] and said["outcome"] == "unserviceable"


def test_overloads_alone_still_pass_a_limit_that_they_settle():
    said = run(act("cover_off"), {"step": "r", "texts": ["OL", "OL"], "unit": "mohm", "meter": "M1"},
               act("cover_on"), part=safety_part())
    assert said["verdicts"]["drop_limit"]["final"] == "pass" and said["outcome"] == "serviceable"


@pytest.mark.parametrize("count", ["0", "-1", "0.4", "2.5", "1000000000"])
def test_a_table_of_no_sensible_length_is_not_judged_rather_than_left_out(count):
    said = run(act("cover_off"), act("cover_on"), part=table_part(), nameplate={"n": count})
    assert said["verdicts"]["drop_limit"]["final"] == "not judged"
    assert "a whole number from 1" in said["verdicts"]["drop_limit"]["reason"]
    assert said["outcome"] == "unserviceable" and "serviceable" not in said["allowed"]


@pytest.mark.parametrize("value", ["OL", ">1 A", "1 2 A"])
def test_a_nameplate_value_that_is_no_single_figure_judges_nothing(value):
    said = run(act("cover_off"), {"step": "r", "text": "20", "meter": "M1"}, act("cover_on"),
               nameplate={"rated": value})
    assert said["verdicts"]["drop_limit"]["final"] == "not judged"
    assert "a single figure" in said["verdicts"]["drop_limit"]["reason"]


def test_an_ambient_that_is_no_single_figure_judges_nothing():
    said = run(act("cover_off"), {"step": "r", "text": "20", "meter": "M1"}, act("cover_on"),
               conditions={"ambient": ">40 °C"})
    assert "ambient temperature" in said["verdicts"]["drop_limit"]["reason"]


def test_a_limit_that_depends_on_a_choice_holds_where_the_choice_is_not_known():
    part = safety_part()
    part["steps"].insert(1, step("kept", kind="choice", choices=[{"id": "yes"}, {"id": "no"}]))
    part["limits"][0]["when"] = {"field": "kept", "is": ["yes"]}
    reading = {"step": "r", "text": "0.3", "meter": "M1"}

    def with_choice(choice):
        return run(act("cover_off"), {"step": "kept", "choice": choice}, reading, act("cover_on"), part=part)

    assert with_choice("yes")["outcome"] == "unserviceable"
    assert with_choice("unknown")["outcome"] == "unserviceable"
    assert with_choice("no")["verdicts"] == {}


def test_an_answer_without_its_figure_is_missing():
    said = run(act("cover_off"), {"step": "r", "meter": "M1"}, act("cover_on"), part=safety_part())
    assert said["verdicts"]["drop_limit"]["final"] == "not judged"
    assert said["outcome"] == "unserviceable"
