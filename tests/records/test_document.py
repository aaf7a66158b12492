"""What a record says: the 25 points of the house's checklist (checks 16.2, after ISO/IEC 17025:2017 7.8.2.1 and 7.8.6
and 21 CFR 11.50), each by name, read back from the sealed file by outside readers; and how it says it."""

from __future__ import annotations

import json
import re
import subprocess
from pathlib import Path
from typing import Any

import pikepdf.pdfa
import pytest
import rfc8785
import trial_job
from conftest import Made

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.journal.hashing import sha256
from fieldcheck.records import data as record_data
from fieldcheck.records import document, html, make
from fieldcheck.records.words import marked, marked_figures, offset_text, time_text

POINTS: dict[str, list[str]] = {
    "01 title (a)": ["Record of inspection and service"],
    "02 workshop and technician (b)": ["Lantern Lane Bench 3 Lantern Lane Inventown 0001", "Ada Quill"],
    "03 place of the work (c)": ["Place of work at the workshop's bench", "Tidewater Model Club layout room"],
    "04 number on every part and end mark (d)": ["Record R-2026-0001 · page 1 of", "End of record R-2026-0001"],
    "05 customer (e)": ["Tidewater Model Club 1 Platform Road Inventown"],
    "06 method, its id and version (f)": ["Trial of contacts (trial-contacts), routine depth", "Method version part"],
    "07 item, identity, condition as found (g)": [
        "Reversing unit contacts", "workshop tag LL-014; serial LL-014-7",
        "Condition as found Of the limits judged as found: 1 within limit, 1 outside limit, 1 not judged.",
        "Look at the surfaces: Tarnished, whole."],
    "08 received, performed, issued (h i j)": [
        "Received 2026-11-30", "Performed 2026-12-01", "Issued 2026-12-01"],
    "09 sampling or selection (k)": ["No sampling: every item named was worked on, or is marked as not examined."],
    "10 only the items tested (l)": ["The results relate only to the items tested"],
    "11 results with units and uncertainty (m)": ["9.636 ± 0.067 mΩ", "12.50 ± 0.31 MΩ"],
    "12 exclusions (n)": ["What was not tested", "Item 2, Signal <lamp> contacts, was not examined: no access",
                          "Item 1: Contact force: no gauge on the bench"],
    "13 person authorising (o)": ["Who says so", "Ada Quill performed, 2026-12-01"],
    "14 results from others (p)": ["no result from others is included"],
    "15 as found and as left": ["87.81 ± 0.50 mΩ outside limit, service", "13.771 ± 0.088 mΩ pass"],
    "16 ambient, humidity, supply frequency": [
        "Ambient temperature 21.5 °C", "Relative humidity 48 %", "Supply frequency 50.0 Hz", "Supply voltage 229.4 V"],
    "17 instruments": [
        "M1 bench multimeter", "DC voltage, 200 mV range: 0.05 % + 3 counts, resolution 0.01 mV",
        "2026-03-01 2027-03-01 K-0412 in calibration"],
    "18 decision rule, limit, tag, guard band, statement": [
        "guarded acceptance; guard band 0.067 mΩ = 1·U", "Contact resistance 1, at most 50 mΩ",
        "PRACTICE: usual range, no standard", "MEM?: usual range, no standard",
        "IEC 62638, recurrent test and test after repair, 5.3.3, 2020", "ILAC-G8:09/2019, 4.2"],
    "19 raw readings and corrections": ["Readings as typed", "88.20 mV -87.60 mV 1.001 A", "9.91 mV -9.40 mV 1.002 A"],
    "20 parts, lubricants, cleaning agents": ["contact spring, 1 piece", "used: burnishing strip, 1"],
    "21 safety statement": ["Safety and cautions", "Gear without a protective earth by design", "WARNING Unplug first",
                            "item 1, isolated: Ada Quill"],
    "22 amendments": ["This is the first record of this customer."],
    "23 audit trail": ["2026-12-01 09:11:00 UTC+01:00 Ada Quill", "row 1, V, forward 112.4 mV 12.40 mV typed one digit "
                       "too many", "handed to a phone: Phone 1, Ada Quill"],
    "24 signature: name, time, meaning": ["Signed by Ada Quill", "Time 2026-12-01 09:19:20 UTC+01:00",
                                          "Meaning performed"],
    "25 digest, tree root, software version": ["record.json SHA-256", "Journal's tree", "Software fieldcheck "],
}


def squeezed(text: str) -> str:
    return "".join(text.split())


@pytest.mark.parametrize("point", POINTS)
def test_every_point_of_the_checklist_is_on_the_pages(made: Made, point: str) -> None:
    missing = [text for text in POINTS[point] if squeezed(text) not in made.text]
    assert missing == []


def test_the_checklist_is_whole() -> None:
    assert [point[:2] for point in POINTS] == [f"{number:02d}" for number in range(1, 26)]


def test_every_page_carries_number_and_place_and_only_the_last_the_end(made: Made, tmp_path: Path) -> None:
    (tmp_path / "r.pdf").write_bytes(made.record.pdf)
    said = subprocess.run(["pdftotext", "-layout", str(tmp_path / "r.pdf"), "-"], capture_output=True, text=True,
                          check=True)
    pages = said.stdout.split("\f")[:-1]
    assert len(pages) >= 4
    for place, page in enumerate(pages, 1):
        assert re.search(rf"Record R-2026-0001 · page {place} of {len(pages)}\s*$", page)
    assert ["End of record R-2026-0001" in page for page in pages] == [False] * (len(pages) - 1) + [True]


def test_page_one_is_a_letter_that_says_the_outcome_first(made: Made, tmp_path: Path) -> None:
    (tmp_path / "r.pdf").write_bytes(made.record.pdf)
    said = subprocess.run(["pdftotext", "-l", "1", str(tmp_path / "r.pdf"), "-"], capture_output=True, text=True,
                          check=True).stdout
    letter = squeezed(said)
    for text in ("Of 2 items, 1 is serviceable with restrictions and 1 is not examined.", "supervised running only",
                 "next service due by 2027-12-01", "This is the condition at the time of test only.",
                 "Received and explained: Bo Ferry", "fieldcheck record verify R-2026-0001.pdf"):
        assert squeezed(text) in letter
    assert letter.index("Of2items") < letter.index("Whattodo") < letter.index("Whatwasnottested") \
        < letter.index("Whosaysso")
    assert "Howtoverify" in letter
    assert "%" not in letter          # probabilities and shares stand in the reasoning, never on page one


def test_the_square_code_holds_number_and_digest_of_the_attached_data(made: Made, tmp_path: Path) -> None:
    """Read by zbar from the drawn page."""
    (tmp_path / "r.pdf").write_bytes(made.record.pdf)
    subprocess.run(["pdftoppm", "-r", "200", "-l", "1", "-png", "r.pdf", "page"], cwd=tmp_path, check=True)
    [picture] = tmp_path.glob("page*.png")
    read = subprocess.run(["zbarimg", "-q", "--raw", str(picture)], capture_output=True, text=True, check=True)
    assert read.stdout.strip() == f"R-2026-0001 {sha256(made.attached).upper()}"
    assert sha256(made.attached) in made.text


def test_the_unsealed_file_is_pdf_a_3b(unsealed: bytes, tmp_path: Path) -> None:
    """ISO 19005-3 by pikepdf's checker; with a photograph, drawn signatures and scales on the pages."""
    path = tmp_path / "unsealed.pdf"
    path.write_bytes(unsealed)
    found = pikepdf.pdfa.validate_written(path, "3b")
    assert found.passed, found.findings


def test_the_attached_data_are_canonical_and_hold_exact_texts(made: Made) -> None:
    data = json.loads(made.attached)
    assert rfc8785.dumps(data) == made.attached
    held = dict(made.trial.journal.texts_of(made.trial.job))
    for one in [*data["events"], *data["workshop_events"]]:
        assert held[one["hash"]] == one["text"]
    assert data["rulebook"]["index"] == made.trial.index
    assert data["rulebook"]["parts"] == made.trial.parts


def test_nothing_of_another_customer_nor_of_meters_not_used_gets_in(made: Made) -> None:
    for word in ("Quarry", "ZZ-9", "drawer", "K-0009", "2026-0001\\\"", made.trial.other_job):
        assert word not in made.attached.decode()
    for word in ("Quarry", "ZZ-9", "drawer"):
        assert word not in made.text


def test_the_other_customer_s_record_holds_no_word_of_this_one(made: Made) -> None:
    data = record_data.collect(made.trial.journal, made.trial.other_job, "R-2026-0099", trial_job.START,
                               made.trial.journal.tree_head(), [], None)
    attached = record_data.dumps(data).decode()
    assert "Quarrymen" in attached
    for word in ("Tidewater", "Reversing unit", "LL-014", made.trial.job, "Bo Ferry"):
        assert word not in attached
    built = repr(document.build(data, sha256(attached.encode())))
    assert "Quarrymen" in built and "Tidewater" not in built


def test_a_customer_who_reads_a_comma_gets_commas_on_the_pages_and_points_in_the_data(made_comma: Made) -> None:
    for text in ("9,636 ± 0,067 mΩ", "12,40 mV", "21,5 °C", "guard band 0,067 mΩ = 1·U", "0,05 % + 3 counts"):
        assert squeezed(text) in made_comma.text
    assert not re.search(r"\d\.\d+(±|mΩ|MΩ|mV)", made_comma.text)
    assert "5.3.3" in made_comma.text                       # a clause is no number
    assert "9.91" in made_comma.attached.decode()
    assert '"printed":"9.636 ± 0.067\u202fmΩ"' in made_comma.attached.decode()


def test_decimal_marks_go_both_ways_and_leave_identities_alone() -> None:
    assert marked("12.5 mV, 3", "comma") == "12,5 mV, 3"
    assert marked("2,75 kΩ", "point") == "2.75 kΩ"
    svg = '<line x1="1.5"/><text class="figure" x="1.5">0.5</text>'
    assert marked_figures(svg, "comma") == '<line x1="1.5"/><text class="figure" x="1.5">0,5</text>'


def test_times_are_local_with_their_offset() -> None:
    assert time_text("2026-12-01T23:30:05.120Z", 60) == "2026-12-02 00:30:05 UTC+01:00"
    assert time_text("2026-12-01T01:30:00.000Z", -210) == "2026-11-30 22:00:00 UTC−03:30"
    assert offset_text(0) == "UTC+00:00"


def test_nothing_claims_compliance(made: Made) -> None:
    assert "complie" not in made.text.lower()
    assert "compliant" not in made.text.lower()


def test_a_probability_of_practice_limits_stands_in_the_reasoning(made: Made) -> None:
    assert squeezed("conformance more than 99.9 %, risk of a wrong accept less than 0.1 %") in made.text


def test_what_a_person_typed_is_escaped_and_drawable() -> None:
    """A name with markup is printed as typed; a character that no bundled face draws is spelled out."""
    page = _page_with_name("<b>Kettle</b> & 水 {{ 7 * 7 }}")
    assert "&lt;b&gt;Kettle&lt;/b&gt; &amp; [U+6C34] {{ 7 * 7 }}" in page
    assert "<b>Kettle" not in page


def _page_with_name(name: str) -> str:
    import tempfile

    with tempfile.TemporaryDirectory() as folder:
        trial = trial_job.full_job(Path(folder), customer=name)
        data = record_data.collect(trial.journal, trial.job, "R-2026-0001", trial.now, trial.journal.tree_head(), [],
                                   None)
    return html.page(document.build(data, "0" * 64), {}).html


@pytest.mark.parametrize("blob", [
    b'<svg viewBox="0 0 9 9"><script>x</script><path d="M1 1L5 5"/></svg>',
    b'<svg viewBox="0 0 9 9"><image href="file:///etc/passwd"/><path d="M1 1L5 5" onload="x"/></svg>',
    b'<svg viewBox="0 0 9 9"><path d="M1 1L5 5"/><use href="#a"/><text>paid</text></svg>',
])
def test_of_a_drawn_signature_only_strokes_come_through(blob: bytes) -> None:
    drawn = html.strokes(blob)
    assert re.fullmatch(r'<svg class="strokes" viewBox="0 0 9 9" role="img" aria-label="drawn signature" '
                        r'xmlns="http://www.w3.org/2000/svg"><path d="M1 1L5 5" fill="none" stroke="#1B1D1F" '
                        r'stroke-width="2"/></svg>', drawn)


@pytest.mark.parametrize("blob", [b"", b"\xff\xd8\xff", b"<svg/>",
                                  b'<svg viewBox="0 0 9 9"><path d="M1 url(x)"/></svg>'])
def test_what_is_no_drawn_signature_is_not_drawn(blob: bytes) -> None:
    assert html.strokes(blob) == ""


def test_the_same_data_give_the_same_document(made: Made) -> None:
    data = json.loads(made.attached)
    first, second = document.build(data, "0" * 64), document.build(json.loads(made.attached), "0" * 64)
    assert first == second
    assert html.page(first, {}).html == html.page(second, {}).html


def test_a_photograph_that_has_not_come_in_is_said(made: Made) -> None:
    page = html.page(document.build(json.loads(made.attached), "0" * 64), {})
    assert page.assets == {}
    assert "not at hand when this record was made" in page.html


# ---- making


def test_making_twice_gives_the_same_file_and_no_second_number(made: Made) -> None:
    again = make.make(made.trial.journal, made.trial.job, made.trial.keys, made.trial.now)
    assert not again.fresh
    assert (again.number, again.pdf) == (made.record.number, made.record.pdf)


def test_the_file_is_kept_as_a_blob_and_said_in_the_journal(made: Made) -> None:
    journal = made.trial.journal
    issued = [json.loads(text) for _, text in journal.texts_of(made.trial.job, workshop=False)
              if '"type":"record.issued"' in text]
    assert [event["data"]["number"] for event in issued] == ["R-2026-0001"]
    assert journal.blob(issued[0]["data"]["sha256"]) == made.record.pdf
    from fieldcheck.journal.verify import verify as verify_journal

    assert verify_journal(made.trial.folder) == []


@pytest.fixture
def quick(monkeypatch: pytest.MonkeyPatch, unsealed: bytes) -> None:
    """Pages from a drawer: these tests look at numbers and refusals."""
    monkeypatch.setattr(make, "unsealed", lambda *given: unsealed)


def signed_job(folder: Path) -> Any:
    trial = trial_job.Trial(folder)
    owner, site = trial.customer("Tidewater Model Club")
    trial.owner, trial.site = owner, site  # type: ignore[attr-defined]
    add_job(trial, "2026-0001")
    return trial


def add_job(trial: Any, number: str) -> str:
    thing = trial.equipment("Contacts " + number, "LL-" + number, trial.owner, trial.site)
    job = trial.open_job(number, trial.owner, trial.site, [thing])
    trial.write(job, "outcome.given", {"item": trial.items[0], "outcome": "not examined", "reason": "no time",
                                       "restrictions": "", "next_due": ""})
    trial.sign()
    return str(job)


def test_numbers_are_given_out_once_however_many_ask(quick: None, tmp_path: Path) -> None:
    from concurrent.futures import ThreadPoolExecutor

    trial = signed_job(tmp_path)
    jobs = [trial.job, add_job(trial, "2026-0002"), add_job(trial, "2026-0003"), add_job(trial, "2026-0004")]
    with ThreadPoolExecutor(4) as pool:
        made_all = list(pool.map(lambda job: make.make(trial.journal, job, trial.keys, trial.now), jobs))
    assert sorted(one.number for one in made_all) == [f"R-2026-000{number}" for number in range(1, 5)]


def test_a_job_not_signed_or_reopened_is_refused(quick: None, tmp_path: Path) -> None:
    trial = signed_job(tmp_path)
    trial.write(trial.job, "defect.found", {"item": trial.items[0], "what": "crack", "level": "stop use"})
    trial.push()
    with pytest.raises(FieldcheckError, match="the job is not signed as it stands"):
        make.make(trial.journal, trial.job, trial.keys, trial.now)


def test_an_outcome_better_than_its_readings_allow_is_refused(quick: None, tmp_path: Path) -> None:
    trial = signed_job(tmp_path)
    trial.write(trial.job, "outcome.given", {"item": trial.items[0], "outcome": "serviceable", "reason": "",
                                             "restrictions": "", "next_due": ""})
    trial.sign()
    with pytest.raises(FieldcheckError, match='item 1 was called "serviceable", its readings allow at best '
                                              '"unserviceable"'):
        make.make(trial.journal, trial.job, trial.keys, trial.now)


def test_a_signing_over_other_events_is_refused(quick: None, tmp_path: Path) -> None:
    trial = signed_job(tmp_path)
    trial.write(trial.job, "job.signed", {"person": trial.person, "meaning": "performed", "name": "Ada Quill",
                                          "rulebook": "", "summary_sha256": "", "root": "0" * 64,
                                          "heads": {trial.phone: trial.seq}})
    trial.push()
    with pytest.raises(FieldcheckError, match="the events of this job are not those that were signed"):
        make.make(trial.journal, trial.job, trial.keys, trial.now)
