"""A record judged from its file alone: sound ones, and named attacks, each with the sentence that verify says.

In the forgeries the workshop itself changes the attached data and seals anew with its own key, so that the seal is
good and only the data give it away. Trees: RFC 6962; signatures: ECDSA P-256; seal: PAdES B-B (EN 319 142-1).
"""

from __future__ import annotations

import hashlib
import io
import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pikepdf
import pytest
import rfc8785
import trial_job
from conftest import Made

from fieldcheck.engine import chain, texts
from fieldcheck.journal.hashing import sha256
from fieldcheck.journal.verify import verify as verify_journal
from fieldcheck.keys.devices import make_device_key
from fieldcheck.keys.sealing import create_sealing_keys
from fieldcheck.records import contents, make
from fieldcheck.records import data as record_data
from fieldcheck.records.pagetext import pages_text
from fieldcheck.records.seal import seal
from fieldcheck.records.verify import ALTERED, SUPERSEDED, TRUSTED, UNKNOWN, in_workshop, verify

REPO = Path(__file__).resolve().parents[2]
Change = Callable[[dict[str, Any], Made], None]


# ---- sound files


def test_a_record_verifies_and_says_what_was_checked(made: Made) -> None:
    said = verify(made.record.pdf, made.trial.keys.root_pem)
    assert (said.state, said.number, said.sha256) == (TRUSTED, "R-2026-0001", sha256(made.record.pdf))
    assert said.sentence == ("Record R-2026-0001: the file is exactly as Lantern Lane Bench sealed it on 2026-12-01, "
                             "under the root given.")
    assert [line.split(":")[0] for line in said.details] == [
        "Seal", "Events", "Signatures", "Rulebook", "Journal", "Verdicts", "Pages"]


def test_without_a_root_the_signer_is_unknown_and_the_file_intact(made: Made) -> None:
    said = verify(made.record.pdf)
    assert said.state == UNKNOWN and said.intact
    assert "no trusted root was given" in said.sentence


def test_a_record_in_commas_verifies_too(made_comma: Made) -> None:
    assert verify(made_comma.record.pdf, made_comma.trial.keys.root_pem).state == TRUSTED


def test_verify_works_in_an_empty_home_without_the_workshop(made: Made, tmp_path: Path) -> None:
    (tmp_path / "home").mkdir()
    record, root = tmp_path / "R.pdf", tmp_path / "root.pem"
    record.write_bytes(made.record.pdf)
    root.write_bytes(made.trial.keys.root_pem)
    surroundings = {"HOME": str(tmp_path / "home"), "PATH": os.environ["PATH"], "PYTHONPATH": str(REPO)}
    command = [sys.executable, "-m", "fieldcheck", "record", "verify", str(record), "--root", str(root)]
    ran = subprocess.run(command, capture_output=True, text=True, env=surroundings, cwd=tmp_path, check=False)
    assert ran.returncode == 0, ran.stderr
    assert ran.stdout.startswith("Record R-2026-0001: the file is exactly as Lantern Lane Bench sealed it")
    assert list((tmp_path / "home").iterdir()) == []
    record.write_bytes(made.record.pdf[:-1])
    ran = subprocess.run(command, capture_output=True, text=True, env=surroundings, cwd=tmp_path, check=False)
    assert ran.returncode == 1 and ran.stderr == ""
    assert len(ran.stdout.strip().splitlines()) == 1


def test_our_reader_of_page_text_agrees_with_another(made: Made) -> None:
    """pypdf reads the same characters from each page."""
    assert sorted("".join(pages_text(made.record.pdf))) == sorted(made.text)


# ---- files changed from outside


@pytest.mark.parametrize("place", [0.02, 0.11, 0.23, 0.37, 0.52, 0.66, 0.81, 0.97])
def test_one_bit_anywhere_is_caught(made: Made, place: float) -> None:
    changed = bytearray(made.record.pdf)
    changed[int(len(changed) * place)] ^= 1
    said = verify(bytes(changed), made.trial.keys.root_pem)
    assert said.state == ALTERED and not said.intact
    assert said.sentence.endswith(".") and "\n" not in said.sentence


@pytest.mark.parametrize(("change", "sentence"), [
    (lambda pdf: pdf + b"\n%", "Something was added to the file after it was sealed."),
    (lambda pdf: pdf[: len(pdf) // 2], "The file is cut short or damaged: it cannot be read as it was sealed."),
    (lambda pdf: b"hello", "This is not a PDF file."),
    (lambda pdf: b"", "This is not a PDF file."),
])
def test_a_file_changed_after_sealing(made: Made, change: Callable[[bytes], bytes], sentence: str) -> None:
    assert verify(change(made.record.pdf), made.trial.keys.root_pem).sentence == sentence


def test_a_stranger_who_seals_the_same_data_is_not_trusted(made: Made, unsealed: bytes, tmp_path: Path) -> None:
    stranger = create_sealing_keys(tmp_path, "Lantern Lane Bench", trial_job.KEYS_SINCE)
    said = verify(seal(unsealed, stranger, trial_job.START), made.trial.keys.root_pem)
    assert said.state == UNKNOWN
    assert "was not made under the root given" in said.sentence


# ---- forgeries: the workshop changes what it attached and seals again


def reseal(unsealed: bytes, made: Made, attachments: dict[str, bytes]) -> bytes:
    """The same pages with other attachments, sealed by the workshop."""
    with pikepdf.open(io.BytesIO(unsealed)) as document:
        for name, content in attachments.items():
            document.attachments[name] = pikepdf.AttachedFileSpec(document, content, filename=name)
        held = io.BytesIO()
        document.save(held)
    return seal(held.getvalue(), made.trial.keys, trial_job.START)


def forged(unsealed: bytes, made: Made, change: Change) -> str:
    data = json.loads(made.attached)
    change(data, made)
    said = verify(reseal(unsealed, made, {"record.json": rfc8785.dumps(data)}), made.trial.keys.root_pem)
    assert said.state == ALTERED
    return said.sentence


def digest_of(text: str) -> str:
    return hashlib.sha256(b"fieldcheck event 1\n" + text.encode()).hexdigest()


def find(data: dict[str, Any], part: str, stream: str = "events") -> dict[str, Any]:
    [one] = [one for one in data[stream] if part in one["text"]]
    found: dict[str, Any] = one
    return found


def reading_altered(data: dict[str, Any], made: Made) -> None:
    one = find(data, '"text":"9.91"')
    one["text"] = one["text"].replace('"9.91"', '"8.91"')


def reading_altered_and_hashed(data: dict[str, Any], made: Made) -> None:
    one = find(data, '"text":"9.91"')
    one["text"] = one["text"].replace('"9.91"', '"8.91"')
    one["hash"] = digest_of(one["text"])


def reading_altered_and_chain_written_again(data: dict[str, Any], made: Made) -> None:
    rewrite(data, made, lambda text: text.replace('"9.91"', '"8.91"'))


def rewrite(data: dict[str, Any], made: Made, change: Callable[[str], str]) -> None:
    """Change texts of the phone and write its chain again from there, as if the device had done so."""
    prev = ""
    for one in sorted(data["events"], key=lambda one: texts.read(one["text"])["seq"]):
        event = texts.read(one["text"])
        if event["device"] != made.trial.phone:
            continue
        if prev:
            one["text"] = one["text"].replace(event["prev"], prev)
        one["text"] = change(one["text"])
        old = one["hash"]
        one["hash"] = prev = digest_of(one["text"])
        if old in data["signatures"]:
            data["signatures"][prev] = data["signatures"].pop(old)
        data["tree"]["inclusion"][prev] = data["tree"]["inclusion"].pop(old)


def reading_left_out(data: dict[str, Any], made: Made) -> None:
    data["events"].remove(find(data, '"type":"defect.found"'))


def correction_left_out(data: dict[str, Any], made: Made) -> None:
    data["events"].remove(find(data, '"type":"answer.corrected"'))


def event_doubled(data: dict[str, Any], made: Made) -> None:
    data["events"].append(find(data, '"type":"defect.found"'))


def signature_of_another(data: dict[str, Any], made: Made) -> None:
    [digest] = data["signatures"]
    data["signatures"][digest] = made.trial.desk_key.sign(b"anything")


def signature_lost(data: dict[str, Any], made: Made) -> None:
    data["signatures"] = {}


def signing_taken_out(data: dict[str, Any], made: Made) -> None:
    data["events"].remove(find(data, '"type":"job.signed"'))


def key_replaced(data: dict[str, Any], made: Made) -> None:
    """The workshop enrols the phone under a key of its own and signs with that."""
    key = make_device_key(made.trial.folder / "forged" / f"{os.urandom(4).hex()}.pem")
    one = find(data, made.trial.key.public_hex, "workshop_events")
    old = one["hash"]
    one["text"] = one["text"].replace(made.trial.key.public_hex, key.public_hex)
    one["hash"] = digest_of(one["text"])
    data["tree"]["inclusion"][one["hash"]] = data["tree"]["inclusion"].pop(old)
    signing = find(data, '"type":"job.signed"')
    data["signatures"][signing["hash"]] = key.sign(chain.signing_message(signing["text"]).encode())


def limit_widened(data: dict[str, Any], made: Made) -> None:
    [digest] = data["rulebook"]["parts"]
    data["rulebook"]["parts"][digest] = data["rulebook"]["parts"][digest].replace('["num","0.05"]', '["num","0.5"]')


def rulebook_replaced(data: dict[str, Any], made: Made) -> None:
    [digest] = data["rulebook"]["parts"]
    text = data["rulebook"]["parts"].pop(digest).replace('["num","0.05"]', '["num","0.5"]')
    data["rulebook"]["parts"][sha256(text.encode())] = text
    data["rulebook"]["index"] = data["rulebook"]["index"].replace(digest, sha256(text.encode()))
    data["rulebook"]["digest"] = sha256(data["rulebook"]["index"].encode())


def index_altered(data: dict[str, Any], made: Made) -> None:
    data["rulebook"]["index"] += " "


def statement_altered(data: dict[str, Any], made: Made) -> None:
    data["verdicts"][0]["verdicts"][1]["found"]["statement"] = "pass"


def digit_of_a_verdict_altered(data: dict[str, Any], made: Made) -> None:
    row = data["verdicts"][0]["verdicts"][3]["left"]
    row["printed"] = row["printed"].replace("12.50", "12.51")


def outcome_altered(data: dict[str, Any], made: Made) -> None:
    data["verdicts"][1]["outcome"] = "serviceable"


def proof_altered(data: dict[str, Any], made: Made) -> None:
    data["tree"]["nodes"][3] = "0" * 64


def proof_left_out(data: dict[str, Any], made: Made) -> None:
    data["tree"]["inclusion"].pop(find(data, '"type":"job.signed"')["hash"])


def event_of_another_job(data: dict[str, Any], made: Made) -> None:
    journal = made.trial.journal
    digest, text = journal.texts_of(made.trial.other_job, workshop=False)[0]
    data["events"].append({"hash": digest, "text": text})


def number_altered(data: dict[str, Any], made: Made) -> None:
    data["number"] = "R-2026-0007"


def version_of_format(data: dict[str, Any], made: Made) -> None:
    data["format"] = 2


def data_emptied(data: dict[str, Any], made: Made) -> None:
    data.clear()


ATTACKS: dict[Change, str] = {
    reading_altered: "was altered: its text no longer has the hash it is given under.",
    reading_altered_and_hashed: "does not follow the event before it.",
    reading_altered_and_chain_written_again: "The signing by Ada Quill (event ",
    reading_left_out: "covers other events than those that are attached.",
    correction_left_out: "covers other events than those that are attached.",
    event_doubled: "stands twice.",
    signature_of_another: "is not signed by that device.",
    signature_lost: "is not signed by that device.",
    signing_taken_out: "No one has signed this job.",
    key_replaced: "The journal's proofs do not hold: ",
    limit_widened: "The rulebook part ",
    rulebook_replaced: "The rulebook attached is not the one that the job names.",
    index_altered: "The rulebook's index was altered.",
    statement_altered: "Computed anew, the verdict on Contact resistance 2 of item 1 is not as recorded.",
    digit_of_a_verdict_altered: "Computed anew, the verdict on Insulation to the frame of item 1 is not as recorded.",
    outcome_altered: "Computed anew, the outcome of item 2 is not as recorded.",
    proof_altered: "The journal's proofs do not hold: ",
    proof_left_out: "it has no proof that it stands in the journal.",
    event_of_another_job: "An event of another job stands among those of this job.",
    number_altered: "Page 1 does not carry the record's number as page 1 of ",
    version_of_format: "The attached data are of format 2, which this version cannot read.",
    data_emptied: "The attached data cannot be read as a record's.",
}


@pytest.mark.parametrize("attack", ATTACKS, ids=lambda attack: attack.__name__)
def test_a_forgery_by_the_workshop_itself_is_named(made: Made, unsealed: bytes, attack: Change) -> None:
    assert ATTACKS[attack] in forged(unsealed, made, attack)


def test_the_same_data_sealed_again_are_no_forgery(made: Made, unsealed: bytes) -> None:
    """So that what the attacks are caught by is the attack, not the way in which these tests put files together."""
    again = reseal(unsealed, made, {"record.json": made.attached})
    assert verify(again, made.trial.keys.root_pem).state == TRUSTED


def test_a_record_of_another_version_is_intact_and_says_where_the_verdicts_differ(
    made: Made, unsealed: bytes
) -> None:
    """A later version may mend or word a verdict otherwise; the old record is not altered by that."""
    data = json.loads(made.attached)
    data["software"]["version"] = "0.0.1"
    data["verdicts"][0]["verdicts"][0]["found"]["reason"] = "worded as it was then"
    said = verify(reseal(unsealed, made, {"record.json": rfc8785.dumps(data)}), made.trial.keys.root_pem)
    assert said.state == TRUSTED
    assert said.sentence.endswith("this one words or finds some otherwise.")
    assert any("the verdict on Contact resistance 1 of item 1 is not the same word for word" in line
               for line in said.details)


def test_an_outcome_better_than_the_readings_allow_is_named(tmp_path: Path) -> None:
    """A maker that asks no questions: the signed outcome is recorded as it was given."""
    trial = trial_job.full_job(tmp_path)
    trial.write(trial.job, "outcome.given", {"item": trial.items[0], "outcome": "serviceable", "reason": "",
                                             "restrictions": "", "next_due": ""})
    trial.sign()
    data = record_data.collect(trial.journal, trial.job, "R-2026-0001", trial.now, trial.journal.tree_head(), [], None)
    with pytest.raises(contents.Wrong, match='The outcome does not follow from the readings: item 1 was called '
                                             '"serviceable", its readings allow at best "serviceable with'):
        contents.CHECKS[-1](data)


def test_an_attachment_too_many_is_named(made: Made, unsealed: bytes) -> None:
    said = verify(reseal(unsealed, made, {"more.txt": b"x"}), made.trial.keys.root_pem)
    assert said.sentence == "The file does not carry record.json and nothing else, as a record does."


def test_data_written_in_another_form_are_named(made: Made, unsealed: bytes) -> None:
    spaced = json.dumps(json.loads(made.attached)).encode()
    said = verify(reseal(unsealed, made, {"record.json": spaced}), made.trial.keys.root_pem)
    assert said.sentence == "The attached data are not written as a record's are (RFC 8785)."


def test_pages_that_say_other_than_the_data_are_named(made: Made, made_comma: Made) -> None:
    """The pages of one record with the data of another of the same number: here the decimal marks give it away."""
    pages = make.unsealed(json.loads(made_comma.attached), made_comma.trial.journal, trial_job.START)
    said = verify(reseal(pages, made, {"record.json": made.attached}), made.trial.keys.root_pem)
    assert said.state == ALTERED
    assert said.sentence.startswith("The pages do not say what the attached data say: ")


# ---- amendments


@pytest.fixture(scope="module")
def amended(tmp_path_factory: pytest.TempPathFactory) -> tuple[Any, Any, Any]:
    """(trial, first record, the one that replaces it): a later correction, signed anew."""
    trial = trial_job.full_job(tmp_path_factory.mktemp("amended"))
    first = make.make(trial.journal, trial.job, trial.keys, trial.tick())
    trial.write(trial.job, "outcome.given", {
        "item": trial.items[0], "outcome": "unserviceable", "reason": "spring cracked on the test run",
        "restrictions": "", "next_due": ""})
    trial.sign()
    return trial, first, make.make(trial.journal, trial.job, trial.keys, trial.tick())


def test_an_amendment_is_a_new_record_that_names_the_old(amended: tuple[Any, Any, Any]) -> None:
    _, first, second = amended
    assert (first.number, second.number) == ("R-2026-0001", "R-2026-0002")
    said = "".join(pages_text(second.pdf))
    for text in ("This record replaces record R-2026-0001, which stays as it was issued.",
                 "Record R-2026-0001, issued 2026-12-01: journal of", "1 is unserviceable: do not use",
                 "Item 1, outcome serviceable with restrictions: contact force was not measured unserviceable: "
                 "spring cracked"):
        assert "".join(text.split()) in said
    assert verify(second.pdf, amended[0].keys.root_pem).state == TRUSTED


def test_the_later_record_proves_that_the_journal_only_grew(amended: tuple[Any, Any, Any]) -> None:
    details = verify(amended[2].pdf, amended[0].keys.root_pem).details
    assert any("it only grew since 1 earlier record(s) of this customer" in line for line in details)


def test_a_replaced_record_is_told_by_the_later_one(amended: tuple[Any, Any, Any]) -> None:
    trial, first, second = amended
    said = verify(first.pdf, trial.keys.root_pem, against=second.pdf)
    assert said.state == SUPERSEDED and said.intact
    assert said.sentence == "Record R-2026-0001 is as it was sealed, but record R-2026-0002 has replaced it."
    other_way = verify(second.pdf, trial.keys.root_pem, against=first.pdf)
    assert other_way.state == TRUSTED
    assert other_way.details[-1] == "The other file, record R-2026-0001, does not replace this one."


def test_a_record_of_another_signer_replaces_nothing(amended: tuple[Any, Any, Any], made: Made) -> None:
    trial, first, _ = amended
    said = verify(first.pdf, trial.keys.root_pem, against=made.record.pdf)
    assert said.state == TRUSTED
    assert said.details[-1] == "The other file was sealed by another signer."


def test_the_workshop_knows_what_it_replaced(amended: tuple[Any, Any, Any], made: Made) -> None:
    trial, first, second = amended
    assert in_workshop(trial.journal, first.pdf, trial.keys.root_pem).state == SUPERSEDED
    assert in_workshop(trial.journal, second.pdf, trial.keys.root_pem).state == TRUSTED
    strange = in_workshop(trial.journal, made.record.pdf, made.trial.keys.root_pem)
    assert strange.state == TRUSTED
    assert strange.details[-1] == "This workshop's journal does not know this file."


def test_the_journal_is_whole_after_two_records(amended: tuple[Any, Any, Any]) -> None:
    assert verify_journal(amended[0].folder) == []


def test_a_consistency_proof_that_does_not_hold_is_named(amended: tuple[Any, Any, Any]) -> None:
    _, _, second = amended
    with pikepdf.open(io.BytesIO(second.pdf)) as document:
        data = json.loads(document.attachments["record.json"].get_file().read_bytes())
    data["tree"]["consistency"][0]["root"] = "0" * 64
    from fieldcheck.engine.errors import ProofError
    from fieldcheck.records.proof import check_tree

    with pytest.raises(ProofError, match="R-2026-0001: the consistency proof does not"):
        check_tree(data["tree"], {one["hash"]: one["text"] for one in data["events"]})


def test_a_record_replaced_twice_is_told_by_the_last(amended: tuple[Any, Any, Any]) -> None:
    trial, first, _ = amended
    trial.write(trial.job, "defect.found", {"item": trial.items[0], "what": "cracked cap", "level": "watch"})
    trial.sign()
    third = make.make(trial.journal, trial.job, trial.keys, trial.tick())
    said = verify(first.pdf, trial.keys.root_pem, against=third.pdf)
    assert said.sentence == "Record R-2026-0001 is as it was sealed, but record R-2026-0003 has replaced it."
