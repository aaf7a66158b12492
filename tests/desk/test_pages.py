"""The desk's pages: what is entered becomes an event, refusals keep what was typed, lists search and sort."""

from __future__ import annotations

import html
import re
from typing import Any

import pytest
from devices_at_hand import Phone
from flask.testing import FlaskClient
from small_rulebook import INDEX

from fieldcheck.desk.app import ROOMS
from fieldcheck.engine import texts
from fieldcheck.engine.errors import NotFound

LISTS = ["persons", "customers", "sites", "equipment", "meters", "lubricants", "jobs", "records"]
METER = {"tag": "M1", "name": "Bench multimeter", "calibrated": "2026-03-01", "due": "2090-03-01", "checked": "yes",
         "ranges-0-function": "resistance", "ranges-0-upto": "2 ohm", "ranges-0-resolution": "0.1 mohm",
         "ranges-0-gain": "0.05 %", "ranges-0-counts": "3", "ranges-1-function": "resistance",
         "ranges-1-upto": "20 ohm", "ranges-1-resolution": "1 mohm", "ranges-1-gain": "0.05 %", "ranges-1-counts": "3"}


def events(desk: FlaskClient, type: str) -> list[dict[str, Any]]:
    """The data of every event of a type."""
    found = [texts.read(one["text"]) for one in desk.get("/api/events").json["events"]]
    return [one["data"] for one in found if one["type"] == type]


def entered(desk: FlaskClient, plural: str, noun: str, form: dict[str, Any], query: str = "") -> str:
    """Posts a new thing, checks that it was kept, and gives its identity."""
    answer = desk.post(f"/{plural}/new{query}", data=form)
    assert answer.status_code == 303, answer.text
    return str(events(desk, f"{noun}.entered")[-1][noun])


def visible(answer: Any) -> str:
    """The page's text without tags."""
    return " ".join(html.unescape(re.sub(r"<[^>]+>", " ", answer.text)).split())


class Shop:
    """A small invented workshop: one person, customer, site, meter and contact set."""

    def __init__(self, desk: FlaskClient) -> None:
        self.desk = desk
        self.person = entered(desk, "persons", "person", {"name": "Ines Example", "competences": "technician",
                                                          "active": "yes"})
        self.by = {"writer": self.person}
        self.customer = entered(desk, "customers", "customer", {"name": "Invented Arcade", "address": "1 Made Up Way",
                                                                "decimal_mark": "comma", **self.by})
        self.site = entered(desk, "sites", "site", {"name": "Back hall", "customer": self.customer, **self.by})
        self.meter = entered(desk, "meters", "meter", {**METER, **self.by})
        self.equipment = entered(desk, "equipment", "equipment", {
            "name": "Drum controller", "site": self.site, "identities-0-scheme": "workshop tag",
            "identities-0-value": "W-10", "plate-rated_current": "2,5", "plate-metal": "silver", **self.by,
        }, "?kind=contact-set")

    def job(self, **form: str) -> str:
        item = f"item-{self.equipment}-trial-contact"
        data = {"number": "J-1", "reason": "Season check", "place": "site", item: "routine", **self.by, **form}
        answer = self.desk.post(f"/jobs/new?site={self.site}", data=data)
        assert answer.status_code == 303, answer.text
        return answer.headers["Location"].rpartition("/")[2]


@pytest.fixture
def shop(desk: FlaskClient) -> Shop:
    return Shop(desk)


# ---- what is entered


def test_an_empty_workshop_says_what_to_do_first(desk):
    assert "Name the workshop" in visible(desk.get("/"))


def test_the_workshop_is_named(desk):
    assert desk.post("/workshop", data={"name": "Invented Works", "address": "2 Nowhere"}).status_code == 303
    assert events(desk, "workshop.named") == [{"name": "Invented Works", "address": "2 Nowhere"}]
    assert "Invented Works" in visible(desk.get("/"))


def test_every_entry_names_who_wrote_it_once_there_are_persons(shop):
    answer = shop.desk.post("/customers/new", data={"name": "Another", "decimal_mark": "point"})
    assert answer.status_code == 422
    assert "this is needed" in answer.text
    written = [texts.read(one["text"]) for one in shop.desk.get("/api/events").json["events"]]
    assert {one["person"] for one in written if one["type"] == "site.entered"} == {shop.person}


def test_the_last_writer_is_chosen_already(shop):
    assert f'<option value="{shop.person}" selected>' in shop.desk.get("/customers/new").text


def test_a_changed_thing_keeps_its_identity(shop):
    form = {"name": "Invented Arcade, new hall", "decimal_mark": "point", **shop.by}
    assert shop.desk.post(f"/customers/{shop.customer}", data=form).status_code == 303
    both = events(shop.desk, "customer.entered")
    assert [one["customer"] for one in both] == [shop.customer] * 2
    assert "new hall" in visible(shop.desk.get("/customers/"))
    assert 'value="Invented Arcade, new hall"' in shop.desk.get(f"/customers/{shop.customer}").text


def test_a_meters_rows_become_functions_with_ranges(shop):
    data = events(shop.desk, "meter.entered")[0]
    assert [one["function"] for one in data["functions"]] == ["resistance"]
    assert [one["name"] for one in data["functions"][0]["ranges"]] == ["2 ohm", "20 ohm"]
    assert data["functions"][0]["quantity"] == "resistance"
    assert data["checked"] is True
    assert "in calibration" in visible(shop.desk.get("/meters/"))


def test_a_meter_past_its_date_is_overdue_and_wants_attention(shop):
    form = {**METER, "tag": "M2", "calibrated": "2019-01-01", "due": "2020-01-01", **shop.by}
    entered(shop.desk, "meters", "meter", form)
    assert "overdue" in visible(shop.desk.get("/meters/"))
    assert "M2 Bench multimeter : overdue" in visible(shop.desk.get("/"))


def test_equipment_keeps_its_plate_as_typed_with_the_units_meant(shop):
    data = events(shop.desk, "equipment.entered")[0]
    assert data["nameplate"] == {"rated_current": {"text": "2,5", "unit": "A"},
                                 "metal": {"choice": "silver", "text": "silver"}}
    assert data["identities"] == [{"scheme": "workshop tag", "value": "W-10"}]
    assert data["customer"] == shop.customer


def test_not_marked_is_an_answer_to_every_nameplate_question(shop):
    form = {"name": "x", "site": shop.site, "plate-rated_current-unknown": "yes", "plate-metal": "unknown", **shop.by}
    shop.desk.post(f"/equipment/{shop.equipment}", data=form)
    assert events(shop.desk, "equipment.entered")[-1]["nameplate"] == {"rated_current": {"unknown": True},
                                                                       "metal": {"unknown": True}}
    page = shop.desk.get(f"/equipment/{shop.equipment}").text
    assert 'name="plate-rated_current-unknown" value="yes" checked' in page
    assert '<option value="unknown" selected>' in page
    assert 'name="plate-rated_current" id="plate-rated_current" value=""' in page


def test_what_another_rulebook_asked_of_the_plate_is_kept(shop):
    head = shop.desk.application.extensions["fieldcheck workshop"]
    old = {**events(shop.desk, "equipment.entered")[0], "nameplate": {"gone": {"text": "7", "unit": "V"}}}
    head.journal.append_own("equipment.entered", old)
    shop.desk.post(f"/equipment/{shop.equipment}", data={"name": "x", "site": shop.site, **shop.by})
    assert events(shop.desk, "equipment.entered")[-1]["nameplate"] == {"gone": {"text": "7", "unit": "V"}}


def test_new_equipment_first_asks_for_its_kind(desk):
    page = desk.get("/equipment/new").text
    assert all(one["title"] in page for one in INDEX["kinds"].values())
    assert "/equipment/new?kind=contact-set" in page


def test_equipment_entered_twice_is_joined_and_leaves_the_list(shop):
    form = {"name": "Controller again", "site": shop.site, **shop.by}
    other = entered(shop.desk, "equipment", "equipment", form, "?kind=contact-set")
    refused = shop.desk.post(f"/equipment/{other}/same", data={"keep": other, "reason": "Kept reason", **shop.by})
    assert refused.status_code == 422 and "Kept reason" in refused.text and 'id="keep-error"' in refused.text
    answer = shop.desk.post(f"/equipment/{other}/same", data={"keep": shop.equipment, "reason": "one plate", **shop.by})
    assert answer.status_code == 303
    assert events(shop.desk, "equipment.joined") == [{"keep": shop.equipment, "other": other, "reason": "one plate"}]
    assert names(shop.desk, "/equipment/") == ["W-10"]
    assert "Controller again" not in shop.desk.get(f"/jobs/new?site={shop.site}").text


def test_equipment_names_the_jobs_on_it(shop):
    job = shop.job()
    assert f'<a href="/jobs/{job}">J-1</a>' in shop.desk.get(f"/equipment/{shop.equipment}").text


def test_a_lubricant_is_kept(shop):
    entered(shop.desk, "lubricants", "lubricant", {"name": "Clock oil", "type": "oil", "base": "mineral",
                                                   "v40": "46", **shop.by})
    assert "Clock oil" in visible(shop.desk.get("/lubricants/"))


# ---- refusals


REFUSALS = [
    ("persons", "", {"competences": "technician"}, {"name": "this is needed"}),
    ("persons", "", {"name": "x" * 81}, {"name": "at most 80 characters"}),
    ("persons", "", {"name": "ines example"}, {"name": "there is a person of that name"}),
    ("persons", "", {"name": "a", "competences": "wizard"}, {"competences": "choose one of the list"}),
    ("customers", "", {"name": "Kept text", "decimal_mark": "dot"}, {"decimal_mark": "choose one of the list"}),
    ("sites", "", {"name": "Kept text", "customer": "nobody"}, {"customer": "choose one of the list"}),
    ("sites", "", {"name": "Kept text", "supply_voltage": "230 kelvin"}, {"supply_voltage": "kelvin"}),
    ("meters", "", {**METER, "tag": "M7", "due": "2025-01-01"}, {"due": "before it was calibrated"}),
    ("meters", "", {**METER, "tag": "M7", "due": "soon"}, {"due": "write the date as"}),
    ("meters", "", {**METER, "tag": "M1"}, {"tag": "has this tag"}),
    ("meters", "", {**METER, "tag": "M7", "ranges-0-gain": "0.05"}, {"ranges-0-gain": "write it with its sign"}),
    ("meters", "", {**METER, "tag": "M7", "ranges-0-upto": "2"}, {"ranges-0-upto": "write its unit"}),
    ("meters", "", {**METER, "tag": "M7", "ranges-0-upto": "2 V"}, {"ranges-0-upto": "V"}),
    ("meters", "", {**METER, "tag": "M7", "ranges-1-upto": ""}, {"ranges-1-upto": "this is needed"}),
    ("meters", "", {**METER, "tag": "M7", "ranges-1-function": ""}, {"ranges-1-function": "this is needed"}),
    ("equipment", "?kind=contact-set", {"name": "Kept text", "plate-rated_current": "2 V"},
     {"plate-rated_current": "V"}),
    ("equipment", "?kind=contact-set", {"name": "Kept text", "plate-rated_current": "2",
                                        "plate-rated_current-unknown": "yes"}, {"plate-rated_current": "either"}),
    ("equipment", "?kind=contact-set", {"name": "Kept", "identities-0-scheme": "workshop tag",
                                        "identities-0-value": "W-10"}, {"identities-0-value": "Drum controller"}),
    ("equipment", "?kind=contact-set", {"name": "Kept", "identities-1-value": "77"},
     {"identities-1-scheme": "this is needed"}),
    ("lubricants", "", {"name": "Kept", "type": "oil", "base": "mineral", "nlgi": "9"}, {"nlgi": "one of"}),
    ("lubricants", "", {"name": "Kept", "type": "oil", "base": "mineral", "v40": "thin"}, {"v40": "thin"}),
]


@pytest.mark.parametrize(("plural", "query", "form", "wrong"), REFUSALS)
def test_a_refused_form_says_it_beside_the_field_and_keeps_what_was_typed(shop, plural, query, form, wrong):
    form = {**({"site": shop.site} if plural == "equipment" else {}), **form, **shop.by}
    before = len(shop.desk.get("/api/events").json["events"])
    answer = shop.desk.post(f"/{plural}/new{query}", data=form)
    assert answer.status_code == 422
    for name, sentence in wrong.items():
        beside = re.search(rf'id="{name}-error">([^<]*)<', answer.text)
        assert beside and sentence in html.unescape(beside.group(1)), answer.text
    for name, value in form.items():
        if name in wrong or value in ("yes", shop.person, shop.site) or name == "competences":
            continue
        assert (f'value="{html.escape(value)}"' in answer.text or f">{html.escape(value)}</textarea>" in answer.text
                or f'value="{value}" selected' in answer.text), name
    assert len(shop.desk.get("/api/events").json["events"]) == before


def test_the_wrong_text_itself_is_still_in_its_field(shop):
    answer = shop.desk.post("/meters/new", data={**METER, "tag": "M7", "ranges-0-upto": "2 <V>", **shop.by})
    assert 'value="2 &lt;V&gt;"' in answer.text


def test_one_more_row_keeps_what_was_typed_and_writes_nothing(shop):
    before = len(shop.desk.get("/api/events").json["events"])
    page = shop.desk.post("/meters/new", data={**METER, "tag": "M7", "ranges-2-here": "yes", "more": "ranges"})
    assert page.status_code == 200
    assert 'name="ranges-3-upto"' in page.text and 'value="20 ohm"' in page.text
    assert 'name="ranges-4-upto"' not in page.text
    assert len(shop.desk.get("/api/events").json["events"]) == before


def test_text_from_a_form_is_never_markup(shop):
    form = {"name": "<script>alert(1)</script>", "decimal_mark": "point", **shop.by}
    key = entered(shop.desk, "customers", "customer", form)
    for page in ("/customers/", f"/customers/{key}"):
        assert "<script>alert" not in shop.desk.get(page).text
        assert "&lt;script&gt;" in shop.desk.get(page).text


def test_a_form_from_another_page_is_refused_on_a_page_of_words(shop):
    answer = shop.desk.post("/customers/new", data={"name": "x"}, headers={"Origin": "http://evil.example"})
    assert answer.status_code == 403
    assert "Nothing is lost" in answer.text
    assert answer.mimetype == "text/html"


# ---- lists


@pytest.mark.parametrize("plural", LISTS)
def test_every_list_opens_empty_and_says_so(desk, plural):
    assert "There are none yet." in visible(desk.get(f"/{plural}/"))


@pytest.mark.parametrize("plural", LISTS)
@pytest.mark.parametrize("query", ["?q=x", "?sort=none", "?sort=-", "?q=%00&sort=-name", "?q=" + "x" * 3000])
def test_any_search_and_sort_is_answered(desk, plural, query):
    assert desk.get(f"/{plural}/{query}").status_code == 200


def names(desk: FlaskClient, address: str) -> list[str]:
    return re.findall(r'<th scope="row"><a [^>]*>([^<]*)</a>', desk.get(address).text)


def test_a_list_is_searched_by_every_word_and_sorted_both_ways(shop):
    for name, address in (("Hall 10", "East Street"), ("Hall 9", "West Street"), ("Annex", "East Lane")):
        entered(shop.desk, "customers", "customer", {"name": name, "address": address, "decimal_mark": "point",
                                                     **shop.by})
    assert names(shop.desk, "/customers/?q=EAST+hall") == ["Hall 10"]
    assert names(shop.desk, "/customers/?q=hall") == ["Hall 9", "Hall 10"]
    assert names(shop.desk, "/customers/?q=hall&sort=-name") == ["Hall 10", "Hall 9"]
    assert names(shop.desk, "/customers/?q=street&sort=address") == ["Hall 10", "Hall 9"]
    assert "2 of 4 shown." in visible(shop.desk.get("/customers/?q=hall"))
    assert 'aria-sort="descending"' in shop.desk.get("/customers/?sort=-name").text


@pytest.mark.parametrize("plural", LISTS[:6])
def test_what_does_not_exist_is_not_found(desk, plural):
    assert desk.get(f"/{plural}/nothing").status_code == 404


@pytest.mark.parametrize(("type", "data", "plural"), [
    ("equipment.entered", {"equipment": "e" * 26, "kind": "contact-set", "name": "Odd", "identities": [{}]},
     "equipment"),
    ("meter.entered", {"meter": "m" * 26, "tag": "M9", "name": "Odd", "functions": [{"function": 1}]}, "meters"),
    ("customer.entered", {"customer": "c" * 26, "name": "Odd", "address": "", "decimal_mark": 5}, "customers"),
])
def test_an_odd_entry_of_another_program_does_not_hide_the_list(shop, type, data, plural):
    shop.desk.application.extensions["fieldcheck workshop"].journal.append_own(type, data)
    page = shop.desk.get(f"/{plural}/")
    assert page.status_code == 200 and "Odd" in visible(page)
    assert shop.desk.get("/").status_code == 200


# ---- jobs


def test_a_job_names_rulebook_customer_site_and_items(shop):
    job = shop.job(due="2026-12-24")
    data = events(shop.desk, "job.opened")[0]
    assert (data["number"], data["customer"], data["site"], data["due"]) == ("J-1", shop.customer, shop.site,
                                                                             "2026-12-24")
    assert data["rulebook"] == shop.desk.get("/api/rulebook").json["digest"]
    assert [(one["equipment"], one["procedure"], one["depth"]) for one in data["items"]] == [
        (shop.equipment, "trial-contact", "routine")]
    listed = shop.desk.get("/api/jobs").json["jobs"]
    assert [(one["job"], one["number"], one["site"], one["state"]) for one in listed] == [
        (job, "J-1", "Back hall", "open")]


def test_numbers_are_proposed_in_turn(shop):
    first = re.search(r'value="(J-\d{4}-0001)"', shop.desk.get(f"/jobs/new?site={shop.site}").text)
    shop.job(number=first.group(1))
    assert first.group(1)[:-1] + "2" in shop.desk.get(f"/jobs/new?site={shop.site}").text


@pytest.mark.parametrize(("form", "name", "sentence"), [
    ({"number": ""}, "number", "this is needed"), ({"reason": ""}, "reason", "this is needed"),
    ({"due": "31.12.2026"}, "due", "write the date as"), ({"number": "J-1"}, "number", "there is a job"),
])
def test_a_job_that_cannot_be_opened_says_why(shop, form, name, sentence):
    shop.job()
    item = f"item-{shop.equipment}-trial-contact"
    data = {"number": "J-2", "reason": "Kept reason", "place": "site", item: "full", **shop.by, **form}
    answer = shop.desk.post(f"/jobs/new?site={shop.site}", data=data)
    assert answer.status_code == 422
    assert sentence in re.search(rf'id="{name}-error">([^<]*)<', answer.text).group(1)
    assert "Kept reason" in answer.text or name == "reason"


def test_a_job_without_items_is_not_opened(shop):
    answer = shop.desk.post(f"/jobs/new?site={shop.site}", data={"number": "J-2", "reason": "r", "place": "site",
                                                                 **shop.by})
    assert answer.status_code == 422 and "at least one item" in answer.text


def test_the_kit_list_names_meters_with_their_state_and_the_cautions(shop):
    text = visible(shop.desk.get(f"/jobs/{shop.job()}"))
    assert "resistance: M1 Bench multimeter: in calibration" in text
    assert "CAUTION: Fingers." in text
    assert "5 min at work, 0 min waiting" in text


def test_a_job_is_handed_to_a_phone_and_a_person(shop):
    job = shop.job()
    phone = Phone()
    head = phone.head()
    shop.desk.post("/api/enrol", json={"text": phone.texts[0], "head": {"seq": 1, "hash": head.hash,
                                                                        "signature": head.signature}})
    refused = shop.desk.post(f"/jobs/{job}/hand", data={"device": phone.device, **shop.by})
    assert refused.status_code == 422 and 'id="person-error"' in refused.text
    form = {"device": phone.device, "person": shop.person, **shop.by}
    assert shop.desk.post(f"/jobs/{job}/hand", data=form).status_code == 303
    assert events(shop.desk, "job.handed") == [{"device": phone.device, "person": shop.person}]
    assert "in hand , with Ines Example on Phone" in visible(shop.desk.get(f"/jobs/{job}"))


class Worker(Phone):
    """A phone that sends at once."""

    def __init__(self, shop: Shop, job: str) -> None:
        super().__init__()
        self.desk, self.job = shop.desk, job
        self.item = events(shop.desk, "job.opened")[0]["items"][0]["item"]
        self.send()

    def send(self) -> None:
        head = self.head()
        answer = self.desk.post("/api/events", json={
            "device": self.device, "events": self.texts, "signatures": self.signatures,
            "head": {"seq": head.seq, "hash": head.hash, "signature": head.signature}})
        assert answer.status_code == 200, answer.text

    def read(self, shop: Shop, text: str) -> None:
        self.write("answer.given", {"item": self.item, "step": "drop", "round": 0, "index": "", "kind": "measure",
                                    "value": {"text": text, "unit": "mohm", "meter": shop.meter,
                                              "function": "resistance", "range": ""}}, job=self.job)
        self.send()


def test_the_page_follows_what_a_phone_sends(shop):
    job = shop.job()
    phone = Worker(shop, job)
    page = shop.desk.get(f"/jobs/{job}")
    cursor = re.search(r'data-cursor="(\d+)"', page.text).group(1)
    assert shop.desk.get(f"/jobs/{job}/live?after={cursor}").status_code == 204
    phone.read(shop, "31.2")
    part = shop.desk.get(f"/jobs/{job}/live?after={cursor}")
    assert part.status_code == 200 and int(part.headers["X-Cursor"]) > int(cursor)
    assert "<html" not in part.text
    assert '<svg class="scale"' in part.text and '<svg class="sign"' in part.text
    assert "31.2" in visible(part) and "pass" in visible(part)


def test_two_answers_are_shown_and_decided_with_a_reason(shop):
    job = shop.job()
    for text in ("31.2", "48.9"):
        Worker(shop, job).read(shop, text)
    page = shop.desk.get(f"/jobs/{job}")
    assert "Two answers to one question: Drum controller, Resistance, as found" in visible(page)
    assert "somebody must decide" in visible(shop.desk.get("/"))
    keep = re.search(r'value="([0-9a-f]{64})"', page.text).group(1)
    assert shop.desk.post(f"/jobs/{job}/decide", data={"keep": keep, **shop.by}).status_code == 422
    answer = shop.desk.post(f"/jobs/{job}/decide", data={"keep": keep, "reason": "second meter", **shop.by})
    assert answer.status_code == 303
    assert "Two answers" not in visible(shop.desk.get(f"/jobs/{job}"))
    assert events(shop.desk, "decision.made")[0]["keep"] == keep


# ---- headers, errors, house


def test_every_room_opens_and_says_where_it_is(desk):
    for address, words in ROOMS:
        page = desk.get(address)
        assert page.status_code == 200, address
        assert f'aria-current="true">{words}</a>' in page.text


def test_no_page_has_anything_inline(shop):
    job = shop.job()
    for address in [*(a for a, _ in ROOMS), f"/jobs/{job}", "/meters/new", "/equipment/new?kind=contact-set",
                    f"/jobs/new?site={shop.site}", "/records/verify", "/nothing"]:
        page = shop.desk.get(address).text
        assert not re.search(r"<script(?![^>]*\ssrc=)|<style|\sstyle=|\son[a-z]+=|javascript:", page), address


def test_an_uncaught_error_is_one_page_with_a_report(desk, monkeypatch):
    def broken(*_: object) -> None:
        raise ZeroDivisionError("inside")
    monkeypatch.setattr("fieldcheck.desk.joblist.jobs_of", broken)
    answer = desk.get("/jobs/")
    assert answer.status_code == 500
    text = visible(answer)
    assert "Something in the program went wrong." in text and "Nothing is lost" in text and "ZeroDivisionError" in text


@pytest.mark.parametrize("address", ["/nothing", "/jobs/none", "/records/none", "/records/none.pdf"])
def test_a_wrong_address_is_a_page_of_words(desk, address):
    answer = desk.get(address)
    assert answer.status_code == 404 and "Nothing is lost" in answer.text


def test_a_form_too_large_is_refused(desk):
    assert desk.post("/customers/new", data={"name": "x" * (2 << 20)}).status_code == 413


def test_a_part_that_is_missing_does_not_hide_the_job(shop, monkeypatch):
    job = shop.job()
    monkeypatch.setattr("fieldcheck.desk.workshop.Workshop.procedure", lambda *_: (_ for _ in ()).throw(
        NotFound("there is no such rulebook part", "part x")))
    answer = shop.desk.get(f"/jobs/{job}")
    assert answer.status_code == 200
    assert "This item cannot be shown: part x: there is no such rulebook part" in visible(answer)
