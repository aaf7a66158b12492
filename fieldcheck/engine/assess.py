"""Judges a filled-in run without any journal: what the command line and the cases beside each procedure use.

A run: {"procedure", "depth", "on", "nameplate": {field: "1 A" | "unknown" | choice id}, "meters": [meter data],
"conditions": {"ambient": "23.4 °C", ...}, "answers": [{"step", "round"?, "index"?, "text"?, "texts"?, "unit"?,
"meter"?, "function"?, "range"?, "choice"?, "start"?, "seen"?, "pulses"?, "end"?}], "left": [{"step", "round"?,
"index"?, "reason"}], "defects": [{"what", "level"}]}.
A meter is named by its id or tag.  The order of the list is the order of the work.
"""

from fieldcheck.engine import entry, events, judging, meters, outcomes
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.work import Answer, Work


def fill(part, run):
    """The Work of a run.  FieldcheckError names what in the run does not fit the procedure."""
    work = Work(part, run.get("depth") or "routine", run.get("on") or "9999-12-31")
    for field in part["nameplate"]:
        text = (run.get("nameplate") or {}).get(field["id"])
        if text is None:
            text = "unknown"
        work.nameplate[field["id"]] = plate_value(field, text)
    for name in run.get("conditions") or {}:
        work.conditions[name] = {"text": run["conditions"][name]}
    for data in run.get("meters") or []:
        described = dict(data)
        described["id"] = data.get("id") or data["tag"]
        work.meters[described["id"]] = meters.meter(described)
    place = 0
    for given in run.get("answers") or []:
        place += 1
        step = work.step(given["step"]) if given["step"] not in ("supply", "nameplate") else {"kind": "confirm"}
        check_answer(work, step, given)
        value = {}
        for key in given:
            if key not in ("step", "round", "index"):
                value[key] = given[key]
        if value.get("meter"):
            value["meter"] = meter_named(work, value["meter"], given["step"])
        put(work, given, Answer(step["kind"], value, place))
    for given in run.get("left") or []:
        place += 1
        put(work, given, Answer("left", {}, place, None, given.get("reason") or "no reason given"))
    work.defects = list(run.get("defects") or [])
    return work


def put(work, given, answer):
    work.put(events.slot_key(given["step"], int(given.get("round") or 0), given.get("index") or ""), answer)


def check_answer(work, step, given):
    """Refuses an answer that cannot be read, at its place in the run."""
    where = given["step"] + (" " + given["index"] if given.get("index") else "")
    column = step
    if step["kind"] == "table":
        name = (given.get("index") or "").split("/")[-1]
        found = [one for one in step["columns"] if one["id"] == name]
        if not found:
            raise FieldcheckError("this table has no such cell", where, "index is row/column, columns: "
                                  + ", ".join([one["id"] for one in step["columns"]]))
        column = found[0]
    texts = given.get("texts") or ([given["text"]] if given.get("text") else [])
    if column.get("quantity"):
        for text in texts:
            try:
                entry.read(text, column["quantity"], default_unit=given.get("unit") or column.get("unit"))
            except FieldcheckError as error:
                raise FieldcheckError(error.what, where, error.mend) from error


def plate_value(field, text):
    """A nameplate answer from a text: "unknown", a choice's id, or a value with its unit."""
    if text == "unknown":
        return {"unknown": True}
    if field.get("choices"):
        known = [one["id"] for one in field["choices"]]
        if text not in known:
            raise FieldcheckError('"' + text + '" is not a choice', "nameplate " + field["id"],
                                  "use one of: " + ", ".join(known) + ", unknown")
        return {"choice": text}
    return {"text": text}


def meter_named(work, name, where):
    """The id of a meter given by id or tag."""
    if name in work.meters:
        return name
    for key in work.meters:
        if work.meters[key].tag == name:
            return key
    raise FieldcheckError('there is no meter "' + name + '" in this run', where, "list it under meters")


def assess(part, run, confirm=True):
    """What the engine says of a run, as plain data.

    confirm: hold points of supply and plain confirmations that the run leaves out count as done, so that a run needs
    only its readings; with False they must be given.  Result: {"verdicts": {key: {"found", "left", "value",
    "reason", ...}}, "explanations": {key: ...}, "outcome", "reasons", "allowed", "open_entries", "called_for",
    "complete", "next"}.
    """
    work = fill(part, run)
    if confirm:
        _confirm(work)
    flow, rows, best, reasons, allowed = outcomes.closing(work)
    said = {}
    for key, found, left in rows:
        judged = left or found
        said[key] = {"found": found.verdict.statement if found is not None else "",
                     "left": left.verdict.statement if left is not None else "",
                     "final": judged.verdict.statement, "value": judging.printed(work, judged),
                     "reason": judged.verdict.reason, "label": judged.limit["label"], "row": judged.row}
    return {"procedure": part["id"], "verdicts": said, "outcome": best, "reasons": reasons, "allowed": allowed,
            "open_entries": [one["text"] for one in flow.open_entries], "called_for": outcomes.called_for(flow),
            "complete": flow.complete, "next": flow.current.key if flow.current is not None else ""}


def explanations(part, run):
    """key -> {"found": explanation, "left": explanation or None} of every limit of a run."""
    work = fill(part, run)
    _confirm(work)
    _, rows, _, _, _ = outcomes.closing(work)
    result = {}
    for key, found, left in rows:
        result[key] = {"found": judging.explained(work, found) if found is not None else None,
                       "left": judging.explained(work, left) if left is not None else None}
    return result


def _confirm(work):
    """Answers, in their order, every confirmation, action, note and photograph that a run leaves out.

    Actions that lift, link or change something and those that restore it are answered only where the run says so:
    an entry left open must show.
    """
    from fieldcheck.engine.procedures import Flow
    for _ in range(400):
        flow = Flow(work)
        waiting = [one for one in flow.instances if one.ready and one.state == "to do"
                   and one.step["kind"] in ("confirm", "note", "photograph", "nameplate")
                   and not one.step.get("restores")]
        if not waiting:
            return
        for one in waiting:
            for index in one.missing:
                key = events.slot_key(one.step["id"], one.round, index)
                order = max([a.order for a in work.answers.values()] or [0]) if one.step["phase"] == "close" else 0
                work.put(key, Answer(one.step["kind"], {"done": True}, order))
