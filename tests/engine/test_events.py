"""The fold: a function of the set of events, causal order, conflicts and decisions (design section 7)."""

import hashlib

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldcheck.engine import events
from fieldcheck.engine.errors import EventError


class Pen:
    """A device of the test that writes events knowing what it was shown."""

    def __init__(self, name):
        self.name = name * 26
        self.seq = 0
        self.prev = ""
        self.known = []

    def write(self, job, kind, data):
        self.seq += 1
        seen = events.seen_by(self.known, self.name, job)
        text = events.make(self.name, self.seq, self.prev, "2026-12-01T10:00:00.000Z", 60, "", job, seen, kind, data)
        digest = hashlib.sha256(b"fieldcheck event 1\n" + text.encode()).hexdigest()
        self.prev = digest
        self.learn((digest, text))
        return digest, text

    def learn(self, *pairs):
        self.known += [events.Event(*pair) for pair in pairs]


JOB = "j" * 26
OPENED = {"number": "1", "customer": "c", "site": "s", "place": "bench", "rulebook": "", "items": [
    {"item": "i", "equipment": "e", "kind": "contact-set", "procedure": "p", "depth": "routine"}]}


def answer(text):
    return {"item": "i", "step": "r", "round": 0, "index": "", "kind": "measure", "value": {"text": text}}


def conflict():
    desk, a, b = Pen("d"), Pen("a"), Pen("b")
    opened = desk.write(JOB, "job.opened", OPENED)
    a.learn(opened)
    b.learn(opened)
    first = a.write(JOB, "answer.given", answer("1"))
    second = b.write(JOB, "answer.given", answer("2"))
    return desk, opened, first, second


def slot_of(pairs):
    return events.fold(pairs).jobs[JOB].items["i"].slots["r|0|"]


def test_two_answers_neither_of_which_saw_the_other_are_a_conflict():
    _, opened, first, second = conflict()
    slot = slot_of([opened, first, second])
    assert slot.event is None and {one.hash for one in slot.rivals} == {first[0], second[0]}


def test_a_decision_that_names_both_settles_a_conflict_and_one_that_saw_neither_does_not():
    desk, opened, first, second = conflict()
    blind = desk.write(JOB, "decision.made", {"between": [first[0], second[0]], "keep": first[0], "reason": "x"})
    assert slot_of([opened, first, second, blind]).event is None
    desk.learn(first, second)
    seeing = desk.write(JOB, "decision.made", {"between": [first[0], second[0]], "keep": first[0], "reason": "x"})
    assert slot_of([opened, first, second, blind, seeing]).event.hash == first[0]


def test_an_answer_that_saw_the_other_wins_whatever_the_clock_says():
    desk, opened, first, _ = conflict()
    desk.learn(first)
    later = desk.write(JOB, "answer.given", answer("3"))
    assert slot_of([later, opened, first]).event.hash == later[0]


def test_a_signing_is_reopened_by_any_later_event_but_the_record():
    pen = Pen("a")
    pairs = [pen.write(JOB, "job.opened", OPENED)]
    pairs.append(pen.write(JOB, "job.signed", {"person": "p", "meaning": "performed", "name": "n", "rulebook": "",
                                               "summary_sha256": "", "root": "", "heads": {}}))
    assert events.fold(pairs).jobs[JOB].signing() is not None
    pairs.append(pen.write(JOB, "record.issued", {"number": "R", "sha256": ""}))
    assert events.fold(pairs).jobs[JOB].signing() is not None
    pairs.append(pen.write(JOB, "answer.given", answer("1")))
    assert events.fold(pairs).jobs[JOB].signing() is None


@pytest.mark.parametrize(("kind", "job", "data", "said"), [
    ("reading.taken", JOB, OPENED, "is not a kind of event of a job"),
    ("job.opened", "", OPENED, "is not a kind of event of the workshop"),
    ("job.opened", JOB, {}, 'its data lack "number"'),
])
def test_an_event_of_no_known_kind_or_without_its_data_is_refused(kind, job, data, said):
    with pytest.raises(EventError) as refused:
        Pen("a").write(job, kind, data)
    assert said in refused.value.what


def summary(state):
    """All of a state that anyone may look at, as plain data."""
    result = []
    for job in sorted(state.jobs):
        one = state.jobs[job]
        result.append((job, one.opened and one.opened.hash, [e.hash for e in one.events],
                       one.signing() and one.signing().hash, one.conditions.event and one.conditions.event.hash))
        for item in one.items_in_order():
            result.append((item.id, item.kind, [e.hash for e in item.defects], sorted(
                (key, slot.event and slot.event.hash, [e.hash for e in slot.rivals], [e.hash for e in slot.history])
                for key, slot in item.slots.items())))
    for noun in sorted(state.workshop.entries):
        result.append((noun, sorted((key, state.workshop.get(noun, key)["name"])
                                    for key in state.workshop.entries[noun])))
    return result


STEP = st.tuples(st.integers(0, 2), st.sampled_from(["answer", "correct", "left", "defect", "person", "sync", "sign",
                                                     "decide", "item", "conditions"]), st.integers(0, 2))


@settings(max_examples=120, deadline=None, derandomize=True)
@given(st.lists(STEP, max_size=25), st.randoms(use_true_random=False))
def test_the_fold_gives_the_same_state_for_any_order_of_the_same_events(plan, random):
    pens = [Pen("a"), Pen("b"), Pen("c")]
    pairs = [pens[0].write(JOB, "job.opened", OPENED)]
    for who, what, number in plan:
        pen = pens[who]
        if what == "sync":
            pen.learn(*[pair for pair in pairs if pair[0] not in [e.hash for e in pen.known]])
            continue
        kind, data = {
            "answer": ("answer.given", answer(str(number))),
            "correct": ("answer.corrected", dict(answer(str(number)), corrects="", reason="slip")),
            "left": ("step.left", {"item": "i", "step": "r", "round": 0, "index": "", "reason": "no time"}),
            "defect": ("defect.found", {"item": "i", "what": "crack", "level": "watch"}),
            "person": ("person.entered", {"person": "p", "name": str(number), "competences": [], "active": True}),
            "sign": ("job.signed", {"person": "p", "meaning": "performed", "name": "n", "rulebook": "",
                                    "summary_sha256": "", "root": "", "heads": {}}),
            "decide": ("decision.made", {"between": [p[0] for p in pairs], "keep": pairs[-1][0], "reason": "r"}),
            "item": ("item.added", {"item": "i" * (number + 1), "equipment": str(who), "kind": "k", "procedure": "p",
                                    "depth": "full"}),
            "conditions": ("conditions.taken", {"ambient": {"text": str(number)}}),
        }[what]
        job = "" if what == "person" else JOB
        pairs.append(pen.write(job, kind, data))
    forward = summary(events.fold(pairs))
    shuffled = list(pairs)
    random.shuffle(shuffled)
    assert summary(events.fold(shuffled + pairs[:3])) == forward


@pytest.mark.parametrize(("kind", "data", "words"), [
    ("answer.given", answer("1") | {"item": []}, 'its "item" is not a text'),
    ("answer.given", answer("1") | {"round": "x"}, 'its "round" is not a whole number'),
    ("answer.given", answer("1") | {"round": True}, 'its "round" is not a whole number'),
    ("answer.given", answer("1") | {"value": "1"}, 'its "value" is not an object'),
    ("job.opened", OPENED | {"items": 5}, 'its "items" is not a list'),
    ("job.opened", OPENED | {"items": [5]}, 'one of its "items" is not an object'),
    ("job.opened", OPENED | {"items": [{"item": "i"}]}, 'its data lack "equipment"'),
    ("decision.made", {"between": 5, "keep": "", "reason": ""}, 'its "between" is not a list'),
])
def test_an_event_that_would_stop_the_fold_is_refused(kind, data, words):
    with pytest.raises(EventError) as caught:
        Pen("a").write(JOB, kind, data)
    assert words in str(caught.value)
