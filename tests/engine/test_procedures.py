"""The path of an item: phases, hold points, rounds of service, open entries, bounded outcome."""

import copy

import pytest

from fieldcheck.engine import assess, events, outcomes, procedures, work
from fieldcheck.engine.errors import FieldcheckError


def step(name, phase="as found", supply="low voltage live", **more):
    base = {"id": name, "kind": "measure", "phase": phase, "supply": supply, "title": name, "text": name, "why": "",
            "quantity": "resistance", "unit": "mohm", "meter": "ohms"}
    base.update(more)
    return base


PART = {
    "format": 1, "id": "trial", "title": "Trial", "kind": "contact-set",
    "supply": {"isolated": "Pull the plug", "low voltage live": "Switch the bench supply on"},
    "nameplate": [{"id": "rated", "label": "Rated current", "quantity": "current", "unit": "A",
                   "unknown": {"then": "default", "text": "1", "unit": "A", "tag": "PRACTICE", "note": ""}}],
    "steps": [
        step("cover_off", "prepare", "isolated", kind="action", opens={"id": "cover", "text": "cover off"}),
        step("r"),
        step("brush", "service", "isolated", kind="action", corrective=True, tries=2, repeats_steps=["r"]),
        step("solvent", "service", "isolated", kind="action", corrective=True, tries=1, repeats_steps=["r"]),
        step("cover_on", "close", "isolated", kind="action", restores="cover"),
    ],
    "values": [{"id": "drop", "label": "Drop", "formula": ["*", ["name", "r"], ["name", "rated"]],
                "formula_text": "", "quantity": "voltage", "unit": "mV"}],
    "limits": [{"id": "drop_limit", "label": "Drop at rated current", "value": "drop", "unit": "mV", "rule": "guarded",
                "guard": "1", "coverage": "95 %", "safety": False, "corrective": ["brush", "solvent"],
                "entries": [{"since": "2026-01-01", "at_most": ["num", "0.05"], "at_least": None,
                             "cite": {"source": "practice", "clause": "", "edition": ""}, "tag": "PRACTICE"}]}],
}
METER = {"tag": "M1", "name": "bench meter", "calibrated": "2026-01-01", "due": "2027-01-01", "checked": True,
         "functions": [{"function": "ohms", "quantity": "resistance", "ranges": [
             {"name": "1 ohm", "upto": "1 ohm", "resolution": "0.1 mohm", "gain": "0.5 %", "counts": "2"}]}]}


def run(*answers, left=(), part=None, **more):
    data = {"procedure": "trial", "depth": "routine", "on": "2026-06-01", "meters": [METER],
            "answers": list(answers), "left": list(left)}
    data.update(more)
    return assess.assess(part or PART, data)


def act(name, number=0):
    return {"step": name, "round": number, "done": True}


def read(text, number=0):
    return {"step": "r", "round": number, "text": text, "meter": "M1"}


def test_a_good_item_needs_no_service_and_is_serviceable():
    said = run(act("cover_off"), read("20"), act("cover_on"))
    assert said["verdicts"]["drop_limit"]["final"] == "pass"
    assert said["complete"] and said["outcome"] == "serviceable" and said["called_for"] == []


def test_a_limit_not_met_calls_for_the_mildest_action_first_and_repeats_its_readings():
    said = run(act("cover_off"), read("80"))
    assert said["called_for"] == ["brush"] and said["next"] == "brush|1"
    said = run(act("cover_off"), read("80"), act("brush", 1))
    assert said["next"] == "r|1"
    said = run(act("cover_off"), read("80"), act("brush", 1), read("21", 1), act("cover_on"))
    assert said["verdicts"]["drop_limit"] | {"value": ""} == {
        "found": "fail", "left": "pass", "final": "pass", "value": "", "label": "Drop at rated current", "row": "",
        "reason": "inside the limit by more than the guard band"}
    assert said["outcome"] == "serviceable"


def test_an_action_that_does_not_help_is_tried_as_often_as_the_rule_says_then_the_next():
    answers = [act("cover_off"), read("80"), act("brush", 1), read("79", 1), act("brush", 2), read("78", 2)]
    assert run(*answers)["next"] == "solvent|3"
    answers += [act("solvent", 3), read("77", 3)]
    said = run(*answers, act("cover_on"))
    assert said["complete"] and said["outcome"] == "serviceable with restrictions"


def test_an_entry_left_open_allows_no_outcome():
    said = run(act("cover_off"), read("20"))
    assert said["open_entries"] == ["cover off"] and said["allowed"] == [] and said["outcome"] == "unserviceable"


def test_a_reading_left_out_is_not_judged_and_names_itself():
    said = run(act("cover_off"), act("cover_on"), left=[{"step": "r", "reason": "no access to the stud"}])
    assert said["verdicts"]["drop_limit"]["final"] == "not judged"
    assert "r (not done: no access to the stud)" in said["verdicts"]["drop_limit"]["reason"]
    assert said["outcome"] == "serviceable with restrictions"


def test_an_unknown_nameplate_value_is_replaced_as_the_rule_says_and_told():
    work = assess.fill(PART, {"procedure": "trial", "on": "2026-06-01", "meters": [METER], "answers": [read("20")]})
    flow = procedures.Flow(work)
    judged = outcomes.rows(work, flow)[0][1]
    assert judged.lookup.notes == ["Rated current is not marked: 1 A assumed (PRACTICE)"]


def test_a_hold_point_stands_wherever_the_supply_changes_and_blocks_what_follows():
    work = assess.fill(PART, {"procedure": "trial", "on": "2026-06-01"})
    flow = procedures.Flow(work)
    assert [one.key for one in flow.instances] == ["supply|0|cover_off", "cover_off|0", "supply|0|r", "r|0"]
    assert [one.ready for one in flow.instances] == [True, False, False, False]


def test_a_safety_limit_read_without_a_meter_bounds_the_outcome():
    part = copy.deepcopy(PART)
    part["limits"][0]["safety"] = True
    said = run(act("cover_off"), {"step": "r", "text": "20"}, act("cover_on"), part=part)
    assert said["verdicts"]["drop_limit"]["final"] == "not judged" and said["outcome"] == "unserviceable"


@pytest.mark.parametrize(("text", "statement"),
                         [("OL", "fail"), (">200", "fail"), ("<10", "pass"), (">1", "not judged")])
def test_a_bounded_reading_counts_only_where_its_bound_settles_the_limit(text, statement):
    assert run(act("cover_off"), read(text))["verdicts"]["drop_limit"]["found"] == statement


def test_what_cannot_be_read_is_refused_with_its_place():
    with pytest.raises(FieldcheckError) as refused:
        run(read("12 volts"))
    assert refused.value.where == "r"


def table_part():
    part = copy.deepcopy(PART)
    part["steps"].insert(4, step("last", "as left", "isolated", kind="table", rows={"labels": ["a", "b"]}, columns=[
        {"id": "r", "title": "r", "quantity": "resistance", "unit": "mohm", "meter": "ohms"}]))
    return part


def test_a_closing_table_whose_cells_were_left_one_by_one_counts_as_left_and_bounds_the_outcome():
    left = [{"step": "last", "index": cell, "reason": "no light"} for cell in ("a/r", "b/r")]
    said = run(act("cover_off"), read("20"), act("cover_on"), part=table_part(), left=left)
    assert said["complete"] and said["outcome"] == "serviceable with restrictions"
    assert "not done: last (no light)" in said["reasons"]


def test_two_unsettled_entries_of_a_meter_in_use_or_of_the_conditions_are_a_conflict_of_the_item():
    state = disputed()
    job = state.jobs["j" * 26]
    made = work.of_item(state, job, job.items["i"], PART, "2026-06-01")
    assert {"meter M1", "conditions"} <= set(made.conflicts)
    assert outcomes.closing(made)[2] == "unserviceable"


def disputed():
    """A job in which two phones, neither of which saw the other, entered one meter and took the conditions."""
    from test_events import OPENED, Pen
    one, two = Pen("a"), Pen("b")
    job = "j" * 26
    pairs = [one.write(job, "job.opened", OPENED)]
    two.learn(*pairs)
    for pen in (one, two):
        pairs.append(pen.write("", "meter.entered", {"meter": "m", **METER}))
        pairs.append(pen.write(job, "conditions.taken", {"ambient": {"text": "20", "unit": "degC"}}))
    pairs.append(one.write(job, "answer.given", {"item": "i", "step": "r", "round": 0, "index": "", "kind": "measure",
                                                 "value": {"text": "20", "unit": "mohm", "meter": "m"}}))
    return events.fold(pairs)
