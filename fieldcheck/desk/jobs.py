"""Jobs: open one, hand it out, follow it, decide what is in dispute."""

from __future__ import annotations

from datetime import date
from typing import Any

from flask import Blueprint, make_response, redirect, render_template, request, url_for
from flask.typing import ResponseReturnValue

from fieldcheck.desk import entries, forms, joblist, jobsheet, jobview
from fieldcheck.desk.equipment import places
from fieldcheck.desk.lists import Column, Row, listing
from fieldcheck.desk.shared import workshop
from fieldcheck.desk.workshop import Workshop
from fieldcheck.engine.errors import FieldcheckError, NotFound
from fieldcheck.journal.forms import new_id

bp = Blueprint("jobs", __name__, url_prefix="/jobs")

COLUMNS = (Column("number", "Number"), Column("state", "State"), Column("customer", "Customer"), Column("site", "Site"),
           Column("reason", "Reason"), Column("items", "Items", True), Column("due", "Wanted by", True))


def job_row(state: Any, job: Any) -> Row:
    """One job as a line of a list."""
    data = job.opened.data
    stage = joblist.stage(job)
    cells = {"number": data["number"], "state": stage, "customer": joblist.name_of(state, "customer", data["customer"]),
             "site": joblist.name_of(state, "site", data["site"]), "reason": data.get("reason", ""),
             "items": str(len(job.items)), "due": data.get("due", "")}
    return Row(url_for("jobs.one", id=job.id), cells, past=stage == joblist.RECORDED)


def _job(state: Any, id: str) -> Any:
    job = state.jobs.get(id)
    if job is None or job.opened is None:
        raise NotFound("there is no such job", id, "go back to the list")
    return job


@bp.get("/")
def every() -> ResponseReturnValue:
    """All jobs, the newest number last."""
    with workshop().reading() as state:
        rows = [job_row(state, job) for job in joblist.jobs_of(state)]
        return render_template("jobs/list.html", list=listing(COLUMNS, rows, request.args))


@bp.route("/new", methods=("GET", "POST"))
def new() -> ResponseReturnValue:
    """First the site, then what is to be done there."""
    shop = workshop()
    with shop.reading() as state:
        site = state.workshop.get("site", request.args.get("site", ""))
        if site is None:
            return render_template("jobs/where.html", places=places(state)[1:])
        sheet = (*jobsheet.opening(shop, state, site["site"]), *entries.writer_field(state))
        if request.method == "GET":
            texts = {**jobsheet.known(state, date.today()), **entries.known_writer(state)}
            return _opening(sheet, forms.start(sheet, texts, {}), site)
        filled = forms.filled(sheet, request.form)
        data, wrong = jobsheet.opened(shop, state, filled, site)
        filled.errors.update(wrong)
        if filled.errors:
            return make_response(_opening(sheet, filled, site), 422)
        job = new_id()
        entries.write(shop, filled, "job.opened", data, job)
        return entries.remember(make_response(redirect(url_for("jobs.one", id=job), 303)), filled)


def _opening(sheet: forms.Sheet, filled: forms.Filled, site: dict[str, Any]) -> str:
    return render_template("jobs/open.html", site=site, controls=forms.controls(sheet, filled),
                           errors=len(filled.errors))


@bp.get("/<id>")
def one(id: str) -> ResponseReturnValue:
    """The job's page, which follows what the phones send."""
    shop = workshop()
    with shop.reading() as state:
        return _page(shop, state, _job(state, id), None)


@bp.get("/<id>/live")
def live(id: str) -> ResponseReturnValue:
    """The part of the job's page that changes; 204 when nothing came after the cursor that the page has."""
    shop = workshop()
    with shop.reading() as state:
        job = _job(state, id)
        if request.args.get("after", "") == str(shop.cursor):
            return "", 204
        answer = make_response(render_template("jobs/live.html", **_seen(shop, state, job)))
        answer.headers["X-Cursor"] = str(shop.cursor)
        return answer


@bp.post("/<id>/hand")
def hand(id: str) -> ResponseReturnValue:
    """Hand the job to a phone and a technician."""
    shop = workshop()
    with shop.reading() as state:
        job = _job(state, id)
        filled = forms.filled(_hand_sheet(shop, state), request.form)
        if filled.errors:
            return make_response(_page(shop, state, job, filled), 422)
        data = {"device": filled.text("device"), "person": filled.text("person")}
        entries.write(shop, filled, "job.handed", data, job.id)
        return entries.remember(make_response(redirect(url_for("jobs.one", id=id), 303)), filled)


@bp.post("/<id>/decide")
def decide(id: str) -> ResponseReturnValue:
    """Say which of several answers to one question holds, and why."""
    shop = workshop()
    with shop.reading() as state:
        job = _job(state, id)
        filled = forms.filled((*jobsheet.deciding(), *entries.writer_field(state)), request.form)
        rivals = next((slot.rivals for _, _, slot in job.conflicts()
                       if filled.text("keep") in [one.hash for one in slot.rivals]), None)
        if filled.errors or rivals is None:
            why = "; ".join(sorted(set(filled.errors.values()))) or "this is no longer in dispute"
            raise FieldcheckError(f"the decision was not kept: {why}", "", "go back, choose an answer and say why")
        data = {"between": [one.hash for one in rivals], "keep": filled.text("keep"), "reason": filled.text("reason")}
        entries.write(shop, filled, "decision.made", data, job.id)
        return entries.remember(make_response(redirect(url_for("jobs.one", id=id), 303)), filled)


def _hand_sheet(shop: Workshop, state: Any) -> forms.Sheet:
    return (*jobsheet.handing(state, shop.journal.own_device()), *entries.writer_field(state))


def _page(shop: Workshop, state: Any, job: Any, filled: forms.Filled | None) -> str:
    data = job.opened.data
    sheet = _hand_sheet(shop, state)
    if filled is None:
        filled = forms.start(sheet, {**entries.known_writer(state), **_handed(job)}, {})
    writer = forms.controls(entries.writer_field(state), forms.start((), entries.known_writer(state), {}))
    return render_template(
        "jobs/job.html", job=job, data=data, customer=joblist.name_of(state, "customer", data["customer"]),
        site=joblist.name_of(state, "site", data["site"]), kit=jobview.kit_of(shop, state, job, date.today()),
        hand=forms.controls(sheet, filled), errors=len(filled.errors), writer=writer, cursor=shop.cursor,
        conflicts=jobview.conflicts_of(shop, state, job), dates=_dates(data), **_seen(shop, state, job),
    )


def _dates(data: dict[str, Any]) -> list[tuple[str, str]]:
    return [(words, str(data[key])) for key, words in (("received", "Received"), ("due", "Wanted by")) if data.get(key)]


def _handed(job: Any) -> dict[str, str]:
    return dict(job.handed.event.data) if job.handed.event is not None else {}


def _seen(shop: Workshop, state: Any, job: Any) -> dict[str, Any]:
    """What the changing part of the page shows."""
    handed = _handed(job)
    return {
        "items": jobview.items_of(shop, state, job), "stage": joblist.stage(job), "id": job.id,
        "technician": joblist.name_of(state, "person", handed.get("person", "")),
        "phone": joblist.name_of(state, "device", handed.get("device", "")),
        "in_dispute": len(job.conflicts()), "events": len(job.events),
        "records": [one.data["number"] for one in job.records],
    }


