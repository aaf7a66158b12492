"""The rules that ship: in order, with enough cases, every limit bitten, nothing claimed that must not be."""

import copy
import json

import pytest

from fieldcheck import rulebook
from fieldcheck.engine import assess

FOLDER = rulebook.rules_folder()
PROCEDURES = sorted(one.name.removesuffix(".toml").replace("_", "-") for one in (FOLDER / "procedures").glob("*.toml")
                    if not one.name.endswith(".cases.toml"))
FAR = ["num", "1000000000"]


def test_every_shipped_rule_and_case_is_in_order():
    findings, checked = rulebook.check(FOLDER)
    assert [str(one) for one in findings] == []
    assert checked.startswith(f"{len(PROCEDURES)} procedures")


@pytest.mark.parametrize("name", PROCEDURES)
def test_each_procedure_has_at_least_twelve_cases(name):
    assert len(rulebook.runs(name)) >= 12


def wrong_cases(part, runs):
    """The names, one after the other, of the cases whose expectation a part does not meet."""
    for name, run, expect in runs:
        said = assess.assess(part, run)
        holds = said["outcome"] == expect["outcome"] and expect["called_for"] in (None, said["called_for"])
        for key in ("found", "left", "final"):
            holds = holds and all(said["verdicts"][limit][key] == word for limit, word in expect[key].items())
        if not holds:
            yield name


def moved(part, limit_id, far_above):
    """The part with every bound of a limit moved so far that nothing, or everything, meets it."""
    changed = copy.deepcopy(part)
    for limit in changed["limits"]:
        if limit["id"] == limit_id:
            for entry in limit["entries"]:
                for key, sign in (("at_most", "+"), ("at_least", "-")):
                    if entry[key] is not None:
                        entry[key] = [sign if far_above else {"+": "-", "-": "+"}[sign], entry[key], FAR]
    return changed


def nearest_first(runs, limit_id):
    """The cases with those that name a limit first: one that bites is enough."""
    def names_it(run):
        return any(key.split("/")[0] == limit_id for word in ("found", "left", "final") for key in run[2][word])
    return sorted(runs, key=lambda run: not names_it(run))


@pytest.mark.parametrize("name", PROCEDURES)
def test_every_limit_is_bitten_from_both_sides_by_a_case(name):
    part, runs = rulebook.part(name), rulebook.runs(name)
    assert list(wrong_cases(part, runs)) == []
    unbitten = [(limit["id"], "looser" if loose else "tighter") for limit in part["limits"] for loose in (True, False)
                if not any(wrong_cases(moved(part, limit["id"], loose), nearest_first(runs, limit["id"])))]
    assert unbitten == []


@pytest.mark.parametrize("name", PROCEDURES)
def test_what_is_shown_to_a_reader_holds_every_step_caution_and_limit(name):
    part, text = rulebook.part(name), " ".join(rulebook.show(name).split())
    for step in part["steps"]:
        assert " ".join(step["text"].split()) in text, step["id"]
    for caution in part["cautions"]:
        assert caution["signal"].upper() in text and caution["title"] in text
    for limit in part["limits"]:
        assert f"({limit['id']})," in text
        for entry in limit["entries"]:
            assert f"since {entry['since']}" in text and entry["tag"] in text


@pytest.mark.parametrize("name", PROCEDURES)
def test_limits_from_practice_or_memory_say_so_in_the_part(name):
    for limit in rulebook.part(name)["limits"]:
        for entry in limit["entries"]:
            assert (entry["cite"]["source"] == "practice") <= (entry["tag"] in ("PRACTICE", "MEM?", "DERIVED", "CALC"))


def test_no_rule_file_claims_conformity_or_holds_a_path_of_a_machine():
    for file in FOLDER.rglob("*.toml"):
        text = file.read_text(encoding="utf-8").lower()
        assert "complies with" not in text and "/home/" not in text and "/work/" not in text, file


def test_parts_hold_no_number_that_is_not_a_whole_one():
    def refuse(text):
        raise AssertionError(f"a float in a part: {text}")

    book = rulebook.load(FOLDER)
    for text in [book.index, *book.parts.values()]:
        json.loads(text, parse_float=refuse)
