"""Every case of the rulebook as a record: the verdicts of the journal's way are those of the run's way, to the digit,
and the document of every kind of step can be built and set. Chains A and C of checks 6.7 stand among the cases."""

from __future__ import annotations

from itertools import groupby
from typing import Any

import case_record
import pytest

from fieldcheck.engine import assess
from fieldcheck.records import contents, document, html

IN_NORMAL_RUN = 5


def chosen() -> list[Any]:
    """The longest cases of each procedure in the normal run, all with --full."""
    marked = []
    names = case_record.all_runs()
    for _, group in groupby(names, key=lambda name: name.split(":")[0]):
        ordered = sorted(group, key=lambda name: -len(names[name]["answers"]))
        marked += [pytest.param(name, marks=[pytest.mark.full] if place >= IN_NORMAL_RUN else [])
                   for place, name in enumerate(ordered)]
    return marked


@pytest.mark.parametrize("name", chosen())
def test_a_case_gives_the_same_verdicts_through_events_and_can_be_set(name: str) -> None:
    run = case_record.all_runs()[name]
    data = case_record.data_of(run)
    said = assess.assess(case_record.part(run["procedure"]), run)
    [item] = data["verdicts"]
    recorded = {row["key"]: ((row["left"] or row["found"])["statement"], (row["left"] or row["found"])["printed"])
                for row in item["verdicts"]}
    assert recorded == {key: (one["final"], one["value"]) for key, one in said["verdicts"].items()}
    assert (item["best_outcome"], item["reasons"]) == (said["outcome"], said["reasons"])
    built = document.build(data, "0" * 64)
    page = html.page(built, {}).html
    for row in built.sections[0].rows:
        assert html.printable(row.left.value) in html_text(page)
    assert contents.CHECKS[-1](data).startswith("Verdicts: ")


def html_text(page: str) -> str:
    import html as escapes

    return escapes.unescape(page)
