"""The desk's first page: what is in hand, what waits, which meters want attention; and the workshop's own name."""

from __future__ import annotations

from datetime import date, timedelta
from typing import Any

from flask import Blueprint, make_response, redirect, render_template, request, url_for
from flask.typing import ResponseReturnValue

from fieldcheck.desk import entries, forms, joblist, meters
from fieldcheck.desk.forms import Field
from fieldcheck.desk.jobs import COLUMNS, job_row
from fieldcheck.desk.lists import listing
from fieldcheck.desk.shared import workshop

bp = Blueprint("home", __name__)

SOON = timedelta(days=30)
SHEET: forms.Sheet = (
    Field("name", "The workshop's name", required=True, longest=64, hint="It stands on every record."),
    Field("address", "Address", "lines", longest=400),
)


@bp.get("/")
def page() -> ResponseReturnValue:
    """Jobs that are not done with, and meters that want attention."""
    with workshop().reading() as state:
        jobs = joblist.jobs_of(state)
        groups = [(title, listing(COLUMNS, [job_row(state, job) for job in jobs if joblist.stage(job) in stages],
                                  {"sort": request.args.get("sort", "")}))
                  for title, stages in (("In hand", (joblist.HANDED,)), ("Open, not handed out", (joblist.OPEN,)),
                                        ("Signed, record to be made", (joblist.SIGNED,)))]
        disputes = [(url_for("jobs.one", id=job.id), job.opened.data["number"]) for job in jobs if job.conflicts()]
        return render_template("home/home.html", name=_named(state).get("name", ""), groups=groups,
                               meters=_wanting(state, date.today()), disputes=disputes, jobs=len(jobs))


@bp.route("/workshop", methods=("GET", "POST"))
def named() -> ResponseReturnValue:
    """The workshop's name and address, and the devices that have enrolled."""
    shop = workshop()
    with shop.reading() as state:
        sheet = (*SHEET, *entries.writer_field(state))
        known = {**_named(state), **entries.known_writer(state)}
        filled = forms.start(sheet, known, {}) if request.method == "GET" else forms.filled(sheet, request.form)
        if request.method == "GET" or filled.errors:
            shown = render_template("home/workshop.html", controls=forms.controls(sheet, filled),
                                    devices=state.workshop.all("device"), errors=len(filled.errors))
            return make_response(shown, 422 if filled.errors else 200)
        entries.write(shop, filled, "workshop.named", {key: filled.text(key) for key in ("name", "address")})
        return entries.remember(make_response(redirect(url_for("home.page"), 303)), filled)


def _named(state: Any) -> dict[str, str]:
    slot = state.workshop.named
    event = slot.event or (slot.rivals[-1] if slot.rivals else None)
    return {key: str(event.data[key]) for key in ("name", "address")} if event else {}


def _wanting(state: Any, today: date) -> list[tuple[str, str, str]]:
    """(link, meter, what it wants) of every meter out of calibration, not checked, or due within a month."""
    found = []
    for data in state.workshop.all("meter"):
        said = meters.state_on(data, today)
        due = str(data.get("due", ""))
        if said == "in calibration" and due <= (today + SOON).isoformat():
            said = f"due on {due}"
        if said != "in calibration":
            found.append((url_for("meters.one", id=data["meter"]), f"{data['tag']} {data['name']}", said))
    return found
