"""Values that are computed and shown but not judged."""

from fieldcheck import rulebook
from fieldcheck.engine import assess
from fieldcheck.engine.calculated import calculated, free_values


def test_a_value_without_a_limit_is_shown_with_its_uncertainty_and_one_with_a_limit_is_not():
    shown, judged = set(), set()
    for name in ("contact-cleaning", "gear-lubrication", "breaker-reclose", "sequencer-step", "rectifier-ratio"):
        part = rulebook.part(name)
        free = {value["id"] for value in free_values(part)}
        assert not free & {limit["value"] for limit in part["limits"]}
        for _, run, _ in rulebook.runs(name):
            found = calculated(assess.fill(part, run), 0)
            shown |= {(name, one["id"]) for one in found}
            assert {one["id"] for one in found} <= free
            judged |= {one["text"] for one in found}
    assert {("contact-cleaning", "spot_temperature"), ("sequencer-step", "pulse_cycle")} <= shown
    assert any(" ± " in text for text in judged)
