"""Records: every one that was issued; make, download, verify."""

from __future__ import annotations

from flask import Blueprint, make_response, redirect, render_template, request, url_for
from flask.typing import ResponseReturnValue

from fieldcheck.desk import joblist, recordkeeping
from fieldcheck.desk.lists import Column, Row, listing
from fieldcheck.desk.shared import workshop
from fieldcheck.engine.errors import FieldcheckError, NotFound

bp = Blueprint("records", __name__, url_prefix="/records")

COLUMNS = (Column("number", "Number"), Column("issued", "Issued", True), Column("job", "Job"),
           Column("customer", "Customer"), Column("site", "Site"), Column("superseded", "Superseded by"))


@bp.get("/")
def every() -> ResponseReturnValue:
    """All records, searchable and sortable."""
    with workshop().reading() as state:
        rows = []
        for one in recordkeeping.issued(state):
            data = one.job.opened.data
            cells = {"number": one.number, "issued": one.at[:10], "job": data["number"],
                     "customer": joblist.name_of(state, "customer", data["customer"]),
                     "site": joblist.name_of(state, "site", data["site"]), "superseded": one.superseded}
            rows.append(Row(url_for("records.one", number=one.number), cells, past=bool(one.superseded),
                            fresh=one.number == request.args.get("fresh", "")))
        return render_template("records/list.html", list=listing(COLUMNS, rows, request.args))


@bp.get("/<number>")
def one(number: str) -> ResponseReturnValue:
    """One record, verified now from its file."""
    shop = workshop()
    with shop.reading() as state:
        record = recordkeeping.find(state, number)
        job = {"id": record.job.id, "number": record.job.opened.data["number"]}
        replaced = recordkeeping.find(state, record.superseded) if record.superseded else None
    later = shop.journal.blob(replaced.sha256) if replaced else None
    found = recordkeeping.verify(shop, shop.journal.blob(record.sha256), later)
    return render_template("records/record.html", record=record, found=found, job=job)


@bp.get("/<number>.pdf")
def pdf(number: str) -> ResponseReturnValue:
    """The sealed file itself."""
    shop = workshop()
    with shop.reading() as state:
        record = recordkeeping.find(state, number)
    answer = make_response(shop.journal.blob(record.sha256))
    answer.mimetype = "application/pdf"
    answer.headers["Content-Disposition"] = f'attachment; filename="{record.number}.pdf"'
    return answer


@bp.get("/of/<job_id>.pdf")
def newest(job_id: str) -> ResponseReturnValue:
    """The last record of a job."""
    with workshop().reading() as state:
        job = state.jobs.get(job_id)
        if job is None or not job.records:
            raise NotFound("this job has no record yet", job_id, "sign it, then make its record")
        return redirect(url_for("records.pdf", number=job.records[-1].data["number"]))


@bp.post("/of/<job_id>")
def make(job_id: str) -> ResponseReturnValue:
    """Make the record of a signed job."""
    shop = workshop()
    with shop.reading() as state:
        job = state.jobs.get(job_id)
        if job is None or job.opened is None:
            raise NotFound("there is no such job", job_id)
        recordkeeping.may_make(job)
        keys = recordkeeping.sealing_keys(shop.journal.folder, state)
    number = recordkeeping.make(shop, job_id, keys)
    return redirect(url_for("records.one", number=number), 303)


@bp.route("/verify", methods=("GET", "POST"))
def verify() -> ResponseReturnValue:
    """Verify any record's file, also one of another workshop."""
    if request.method == "GET":
        return render_template("records/verify.html", found=None, name="")
    sent = request.files.get("file")
    data = sent.read() if sent is not None else b""
    if sent is None or not data:
        raise FieldcheckError("no file was chosen", "", "choose the record's PDF")
    found = recordkeeping.verify(workshop(), data)
    return render_template("records/verify.html", found=found, name=sent.filename or "")
