"""How errors leave: one JSON shape for the API, one page for people."""

from __future__ import annotations

import logging
import traceback

from flask import Flask, Response, jsonify, make_response, render_template, request
from flask.typing import ResponseReturnValue
from werkzeug.exceptions import HTTPException

from fieldcheck import __version__
from fieldcheck.engine.errors import EventError, FieldcheckError, NotFound, ProofError
from fieldcheck.journal.database import JournalError
from fieldcheck.journal.forms import Refused, new_id

log = logging.getLogger(__name__)

STATUS: tuple[tuple[type[FieldcheckError], int], ...] = (
    (Refused, 409), (NotFound, 404), (JournalError, 503), (EventError, 422), (ProofError, 422), (FieldcheckError, 422),
)
IN_WORDS = {
    400: "the request cannot be read", 403: "this came from another page", 404: "there is nothing at this address",
    405: "this address does not take that", 408: "the request did not arrive whole",
    411: "the request does not say how long it is", 413: "this is too large",
    415: "this address takes application/json", 421: "this desk does not answer under that name",
}


def install(app: Flask) -> None:
    """Every error, expected or not, leaves through here."""
    app.register_error_handler(FieldcheckError, known)
    app.register_error_handler(HTTPException, refused)
    app.register_error_handler(Exception, unforeseen)


def for_api() -> bool:
    """Whether a program asked, not a person."""
    return request.path.startswith("/api/")


def error(status: int, what: str, where: str = "", mend: str = "", **more: str | int) -> Response:
    """The one shape: {"ok": false, "error": {"what", "where", "mend"}, "status"}; code and ack where the API says."""
    body = {"what": what, "where": where, "mend": mend}
    code = more.pop("code", None)
    if code is not None:
        body["code"] = str(code)
    answer = jsonify({"ok": False, "error": body, "status": status, **more})
    answer.status_code = status
    return answer


def page(status: int, what: str, mend: str = "", report: str = "") -> Response:
    """The error page: what happened in a sentence, that nothing is lost, and a report to copy."""
    text = f"{what}\n{mend}\n\n{request.method} {request.path}\nstatus {status}, fieldcheck {__version__}\n{report}"
    return make_response(render_template("error/error.html", status=status, what=what, mend=mend, report=text), status)


def known(problem: FieldcheckError) -> ResponseReturnValue:
    """What one of our own functions refused."""
    status = next(number for kind, number in STATUS if isinstance(problem, kind))
    if not for_api():
        where = f"{problem.where}: " if problem.where else ""
        return page(status, f"{where}{problem.what}", problem.mend)
    if isinstance(problem, Refused):
        return error(status, problem.what, problem.where, problem.mend, code=problem.code, ack=problem.ack)
    return error(status, problem.what, problem.where, problem.mend)


def refused(problem: HTTPException) -> ResponseReturnValue:
    """What the web framework or the guard refused; a redirect passes."""
    status = problem.code or 500
    if status < 400:
        return problem.get_response()
    what = IN_WORDS.get(status, problem.name.lower())
    mend = (problem.description or "") if status in (403, 421) else ""
    return error(status, what, request.path, mend) if for_api() else page(status, what, mend)


def unforeseen(problem: Exception) -> ResponseReturnValue:
    """Anything uncaught: the operator finds it in the log under the number that the page shows."""
    number = new_id()[:8]
    log.exception("uncaught number=%s method=%s path=%s", number, request.method, request.path)
    what = "Something in the program went wrong."
    if for_api():
        return error(500, what, request.path, f"report number {number}, it is in the desk's log")
    return page(500, what, "", f"number {number}\n" + "".join(traceback.format_exception(problem)))
