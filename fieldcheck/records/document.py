"""The document of a record: from record.json's data alone to texts ready to be set. Nothing here asks the journal,
so that whoever holds the data can build the same document and compare it with the pages."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from fieldcheck.records import bench, closing
from fieldcheck.records.hand import Hand, mark_of
from fieldcheck.records.letter import Letter, Signature
from fieldcheck.records.letter import letter as letter_of
from fieldcheck.records.replay import Again, replay
from fieldcheck.records.words import time_text

Data = dict[str, Any]  # JSON of many kinds
STATEMENTS = (
    ("pass", "inside the limit by more than the guard band"),
    ("conditional pass", "inside the limit, nearer than our meter can prove"),
    ("conditional fail", "outside the limit, nearer than our meter can prove"),
    ("fail", "outside the limit by more than the guard band"),
    ("not judged", "something that the verdict needs is missing"),
)
DECISION_RULE = (
    "Each value is compared with its limit by the rule named in the reasoning. With a guard band w the statement is "
    "pass inside the limit by more than w, conditional pass inside by less, conditional fail outside by less, fail "
    "beyond (the four statements of ILAC-G8:09/2019, 4.2). A safety limit is never passed conditionally. U is the "
    "expanded uncertainty with the coverage stated. Limits tagged PRACTICE or MEM? are usual ranges; no standard "
    "gives them."
)
SAFETY = (
    "A verdict on a safety limit supports the decision of the person who signs; it does not replace it. Gear without "
    "a protective earth by design is never given an earth wire, nor judged by limits for earthed gear, without "
    "deciding how its metalwork is insulated. Work on mains parts is for people whom the local codes allow to do it."
)


@dataclass(frozen=True)
class Proofs:
    """What ties the pages to the data and the data to the journal. digest: SHA-256 of record.json."""

    digest: str
    version: str
    rulebook: str
    root: str
    tree_size: int
    tree_root: str
    events: int
    previous: str


@dataclass(frozen=True)
class Document:
    """All texts of a record. mark: decimal mark, point or comma."""

    number: str
    title: str
    issued: str
    mark: str
    letter: Letter
    sections: list[bench.Section]
    statements: tuple[tuple[str, str], ...]
    decision_rule: str
    arguments: list[closing.Argument]
    conditions: list[tuple[str, str]]
    instruments: list[closing.Instrument]
    safety: str
    cautions: list[closing.Caution]
    pictures: list[closing.Picture]
    changes: list[closing.Change]
    course: list[tuple[str, str, str]]
    history: list[str]
    own_results: str
    signatures: list[Signature]
    proofs: Proofs

    def blobs(self) -> list[str]:
        """SHA-256 of every photograph and drawn signature that the pages show."""
        named = [picture.sha256 for picture in self.pictures]
        named += [one.drawn for one in (*self.signatures, self.letter.signature) if one.drawn]
        named += [self.letter.acknowledged_drawn] if self.letter.acknowledged_drawn else []
        return list(dict.fromkeys(named))


def build(data: Data, digest: str, again: Again | None = None) -> Document:
    """The document of a record's data. digest: SHA-256 of record.json; again: the job seen again, where at hand."""
    again = again or replay(data)
    customer = again.state.workshop.get("customer", again.job.opened.data["customer"]) or {}
    hand = Hand(data, again, mark_of(customer))
    sections = [bench.section(hand, one, number) for number, one in enumerate(again.items, 1)]
    left = [(section.number, text) for section in sections for text in section.left_out]
    return Document(
        number=data["number"], title="Record of inspection and service",
        issued=time_text(data["issued"], data["offset"]), mark=hand.mark,
        letter=letter_of(hand, sections, left), sections=sections, statements=STATEMENTS,
        decision_rule=DECISION_RULE,
        arguments=[text for number, one in enumerate(again.items, 1) for text in closing.arguments(hand, one, number)],
        conditions=closing.conditions(hand), instruments=closing.instruments(hand), safety=SAFETY,
        cautions=closing.cautions(hand), pictures=closing.pictures(hand), changes=closing.changes(hand),
        course=closing.course(hand), history=closing.history(hand), own_results=closing.OWN_RESULTS,
        signatures=closing.signatures(hand), proofs=_proofs(data, again, digest),
    )


def _proofs(data: Data, again: Again, digest: str) -> Proofs:
    tree = data["tree"]
    previous = [f"{one['number']}, SHA-256 {one['sha256']}" for one in data["earlier"]]
    software = data["software"]
    return Proofs(
        digest=digest, version=f"{software['name']} {software['version']}", rulebook=data["rulebook"]["digest"],
        root=again.signing.data["root"], tree_size=tree["size"], tree_root=tree["root"], events=len(data["events"]),
        previous=previous[-1] if previous else "none: this is the first record of this customer",
    )


def claims(document: Document) -> list[str]:
    """The texts on which a reader relies, as the pages print them: a verifier looks for each of them there."""
    page_one = document.letter
    texts = [document.number, page_one.sentence, page_one.workshop, page_one.customer, page_one.signature.name,
             page_one.signature.when, document.proofs.digest, document.proofs.root, *page_one.todo,
             *page_one.untested, *page_one.statements]
    for section in document.sections:
        texts += [section.title, section.outcome, *section.left_out]
        for row in section.rows:
            texts += [row.label, row.accepted, row.left.word, row.left.value]
            texts += [row.found.word, row.found.value] if row.found is not None else []
    texts += [text for argument in document.arguments for label, text in argument.lines if label == "Verdict"]
    texts += [text for change in document.changes for text in (change.old, change.new, change.reason)]
    return [text for text in dict.fromkeys(texts) if text]
