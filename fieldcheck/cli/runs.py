"""What `assess` does: the form of a run, a template to fill in, the answer in words."""

import json
from typing import Any

from fieldcheck.engine import entry, units
from fieldcheck.engine.errors import FieldcheckError

TEXT = {"type": "string"}
RANGE = {"type": "object", "required": ["name", "upto"], "additionalProperties": TEXT}
METER = {
    "type": "object", "required": ["tag", "functions"],
    "properties": {
        "tag": TEXT, "id": TEXT, "name": TEXT, "calibrated": TEXT, "due": TEXT, "checked": {"type": "boolean"},
        "rated": {"type": "object", "additionalProperties": TEXT},
        "functions": {"type": "array", "items": {
            "type": "object", "required": ["function", "quantity", "ranges"],
            "properties": {"function": TEXT, "quantity": TEXT, "leads": TEXT,
                           "ranges": {"type": "array", "items": RANGE}}}},
    },
}


def run_schema() -> dict[str, Any]:
    """JSON Schema of a run; published by `fieldcheck assess --schema`."""
    answer = {"step": TEXT, "round": {"type": "integer", "minimum": 0}, "index": TEXT, "text": TEXT,
              "texts": {"type": "array", "items": TEXT}, "unit": TEXT, "meter": TEXT, "function": TEXT, "range": TEXT,
              "choice": TEXT, "start": TEXT, "seen": {"type": "array", "items": TEXT}, "end": TEXT,
              "pulses": {"type": "integer", "minimum": 1}, "mode": TEXT, "done": {"type": "boolean"}}
    left = {"step": TEXT, "round": {"type": "integer", "minimum": 0}, "index": TEXT, "reason": TEXT}
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema", "title": "fieldcheck run", "type": "object",
        "required": ["procedure"], "additionalProperties": False,
        "properties": {
            "procedure": TEXT, "depth": {"enum": ["routine", "full"]},
            "on": {"type": "string", "pattern": "^[0-9]{4}-[0-9]{2}-[0-9]{2}$"},
            "nameplate": {"type": "object", "additionalProperties": TEXT},
            "conditions": {"type": "object", "additionalProperties": False,
                           "properties": {k: TEXT for k in ("ambient", "humidity", "voltage", "frequency")}},
            "meters": {"type": "array", "items": METER},
            "answers": {"type": "array", "items": {"type": "object", "required": ["step"], "properties": answer,
                                                   "additionalProperties": False}},
            "left": {"type": "array", "items": {"type": "object", "required": ["step", "reason"], "properties": left,
                                                "additionalProperties": False}},
            "defects": {"type": "array", "items": {
                "type": "object", "required": ["what", "level"],
                "properties": {"what": TEXT, "level": {"enum": ["stop use", "repair before next use", "watch"]}}}},
        },
    }


def checked_run(data: Any) -> dict[str, Any]:
    """The run when it has the right form; FieldcheckError names the first place that has not."""
    schema = run_schema()
    _check(data, schema, "run")
    result: dict[str, Any] = data
    return result


def check_against(part: dict[str, Any], run: dict[str, Any]) -> None:
    """FieldcheckError at the first name or condition of a run that its procedure does not know."""
    steps = {step["id"]: step for step in part["steps"]}
    fields = [field["id"] for field in part["nameplate"]]
    for name in run.get("nameplate", {}):
        _known(name, fields, "nameplate field", "run.nameplate")
    for kind in ("answers", "left"):
        for i, given in enumerate(run.get(kind, [])):
            where = f"run.{kind}[{i}]"
            _known(given["step"], [*steps, "supply", "nameplate"], "step", where)
            choices = [one["id"] for one in (steps.get(given["step"]) or {}).get("choices") or []]
            if choices and given.get("choice"):
                _known(given["choice"], [*choices, "unknown"], f"choice of {given['step']}", where)
    quantities = {"ambient": "temperature", "humidity": "humidity", "voltage": "voltage", "frequency": "frequency"}
    for name, text in run.get("conditions", {}).items():
        try:
            entry.read(text, quantities[name])
        except FieldcheckError as error:
            raise FieldcheckError(error.what, f"run.conditions.{name}", error.mend) from error


def answered(run: dict[str, Any]) -> dict[str, Any]:
    """The run without the answers that are still empty as in a template."""
    def filled(one: dict[str, Any]) -> bool:
        if "done" in one:
            return bool(one["done"])
        given = [one[key] for key in ("text", "texts", "choice", "start", "seen", "pulses", "end") if key in one]
        return not given or any(given)

    return {**run, "answers": [one for one in run.get("answers", []) if filled(one)]}


def _known(name: str, known: list[str], what: str, where: str) -> None:
    if name not in known:
        near = units.nearest(name, known)
        raise FieldcheckError(f'there is no {what} "{name}"', where,
                              f"did you mean {near}?" if near else "known: " + ", ".join(known))


def _check(data: Any, schema: dict[str, Any], where: str) -> None:
    kinds = {"object": dict, "array": list, "string": str, "integer": int, "boolean": bool}
    kind = schema.get("type")
    if kind and (not isinstance(data, kinds[kind]) or (kind == "integer" and isinstance(data, bool))):
        article = "an" if kind[0] in "aoi" else "a"
        raise FieldcheckError(f"this must be {article} {kind}", where, "compare with --template")
    if "enum" in schema and data not in schema["enum"]:
        raise FieldcheckError(f"{json.dumps(data)} is not allowed", where, "use one of: " + ", ".join(schema["enum"]))
    if kind == "integer" and data < schema.get("minimum", data):
        raise FieldcheckError(f"this must be at least {schema['minimum']}", where)
    if "pattern" in schema and (len(data) != 10 or not data.replace("-", "").isdigit()):
        raise FieldcheckError(f'"{data}" is not a date', where, "write it as 2026-03-01")
    if kind == "array":
        for i, one in enumerate(data):
            _check(one, schema.get("items", {}), f"{where}[{i}]")
    if kind == "object":
        _check_object(data, schema, where)


def _check_object(data: dict[str, Any], schema: dict[str, Any], where: str) -> None:
    for name in schema.get("required", []):
        if name not in data:
            raise FieldcheckError(f'"{name}" is missing', where, "compare with --template")
    properties = schema.get("properties", {})
    more = schema.get("additionalProperties", True)
    for name in data:
        if name in properties:
            _check(data[name], properties[name], f"{where}.{name}")
        elif isinstance(more, dict):
            _check(data[name], more, f"{where}.{name}")
        elif not more:
            near = units.nearest(name, list(properties))
            raise FieldcheckError(f'unknown key "{name}"', where, f"did you mean {near}?" if near else
                                  "known: " + ", ".join(properties))


def template(part: dict[str, Any]) -> dict[str, Any]:
    """A run of a procedure to fill in: every question, with empty texts and the units that it is asked in.

    What stays empty counts as not answered, an action with "done": false as not done (`answered`).
    """
    answers = []
    for step in part["steps"]:
        if step["phase"] == "service" and step["kind"] == "action":
            continue
        answers += _questions(step)
    return {
        "procedure": part["id"], "depth": "routine", "on": "2026-12-01",
        "nameplate": {field["id"]: "unknown" for field in part["nameplate"]},
        "conditions": {"ambient": "20 °C"},
        "meters": [{"tag": "M1", "calibrated": "2026-03-01", "due": "2027-03-01", "functions": [
            {"function": function, "quantity": quantity, "ranges": [
                {"name": "2", "upto": "2", "resolution": "0.001", "gain": "0.5 %", "counts": "3"}]}
            for function, quantity in _functions(part)]}],
        "answers": answers, "left": [], "defects": [],
    }


def _functions(part: dict[str, Any]) -> list[tuple[str, str]]:
    found: list[tuple[str, str]] = []
    for step in part["steps"]:
        for one in step["columns"] if step["kind"] == "table" else [step]:
            if one.get("meter") and (one["meter"], one["quantity"]) not in found:
                found.append((one["meter"], one["quantity"]))
    return found


def _questions(step: dict[str, Any]) -> list[dict[str, Any]]:
    kind = step["kind"]
    if kind == "measure":
        return [{"step": step["id"], "text": "", "unit": step["unit"], **_meter(step)}]
    if kind == "timing":
        return [{"step": step["id"], "text": "", "unit": "s"}]
    if kind == "table":
        rows = (step.get("rows") or {}).get("labels") or ["1"]
        return [{"step": step["id"], "index": f"{row}/{column['id']}", "text": "", "unit": column["unit"],
                 **_meter(column)} for row in rows for column in step["columns"]]
    if kind == "sequence":
        return [{"step": step["id"], "start": "", "seen": []}]
    if kind == "choice":
        return [{"step": step["id"], "choice": ""}]
    if kind == "action":
        return [{"step": step["id"], "done": False}]
    return []


def _meter(column: dict[str, Any]) -> dict[str, str]:
    return {"meter": "M1"} if column.get("meter") else {}


def assessment_text(said: dict[str, Any]) -> str:
    """What `assess` says, for a person."""
    lines = [f"{said['procedure']}: {said['outcome']}"]
    for key, row in said["verdicts"].items():
        words = row["final"] if not row["left"] or row["left"] == row["found"] else \
            f"{row['found'] or 'not judged'} as found, {row['left']} as left"
        lines.append(f"  {key}: {words}" + (f", {row['value']}" if row["value"] else "") +
                     (f" ({row['reason']})" if row["reason"] else ""))
    if said["reasons"]:
        lines.append("why not better:")
        lines += ["  " + one for one in said["reasons"]]
    if said["called_for"]:
        lines.append("called for: " + ", ".join(said["called_for"]))
    if said["next"]:
        lines.append("next: " + said["next"])
    return "\n".join(lines)
