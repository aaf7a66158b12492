"""Each folder here is a rulebook with one thing wrong; expected.txt is the exact text that `rules check` must show."""

import pytest
from bad_rules_runner import HERE, names, said

from fieldcheck import rulebook


@pytest.mark.parametrize("name", names())
def test_a_broken_rule_is_named_with_its_place_and_how_to_mend_it(name):
    expected = (HERE / name / "expected.txt").read_text(encoding="utf-8")
    assert expected.strip()
    assert said(name) == expected


def test_the_rulebook_under_the_broken_ones_is_sound():
    findings, checked = rulebook.check(HERE / "_base")
    assert findings == [] and checked == "1 procedures, 2 limits and 2 cases are in order"


def test_there_are_at_least_sixty_broken_rulebooks():
    assert len(names()) >= 60
