"""What `job show` says: a job's items, their limits as found and as left, the outcome."""

from typing import Any

from fieldcheck.engine import events, judging, outcomes, texts, work
from fieldcheck.engine.errors import NotFound
from fieldcheck.journal.journal import Journal


def job(journal: Journal, number: str) -> dict[str, Any]:
    """One job as plain data; NotFound names the numbers there are."""
    state = events.fold((one.hash, one.text) for one in _all(journal))
    opened = {one.opened.data["number"]: one for one in state.jobs.values() if one.opened is not None}
    if number not in opened:
        raise NotFound(f'there is no job "{number}"', "", "there are: " + (", ".join(sorted(opened)) or "none"))
    found = opened[number]
    data = found.opened.data
    index = texts.read(journal.part(data["rulebook"]), None)
    parts = {one["id"]: one["part"] for one in index["procedures"]}
    customer = state.workshop.get("customer", data["customer"]) or {"name": ""}
    return {
        "number": number, "customer": customer["name"], "place": data["place"], "reason": data.get("reason", ""),
        "signed": found.signing() is not None, "records": [one.data["number"] for one in found.records],
        "items": [_item(state, found, one, texts.read(journal.part(parts[one.procedure]), None))
                  for one in found.items_in_order()],
    }


def _all(journal: Journal) -> Any:
    after = 0
    while stored := journal.events(after):
        yield from stored
        after = stored[-1].cursor


def _item(state: Any, found: Any, item: Any, part: dict[str, Any]) -> dict[str, Any]:
    made = work.of_item(state, found, item, part, found.opened.at[:10])
    flow, rows, best, _reasons, _allowed = outcomes.closing(made)
    equipment = state.workshop.get("equipment", item.equipment) or {"name": item.equipment}
    given = item.outcomes.event.data["outcome"] if item.outcomes.event is not None else ""
    return {"name": equipment["name"], "procedure": item.procedure, "depth": item.depth, "outcome": given,
            "best_allowed": best, "next": flow.current.step["title"] if flow.current is not None else "",
            "limits": [_row(made, key, as_found, as_left) for key, as_found, as_left in rows]}


def _row(made: Any, key: str, as_found: Any, as_left: Any) -> dict[str, str]:
    def said(judged: Any) -> str:
        if judged is None:
            return ""
        value = judging.printed(made, judged)
        statement: str = judged.verdict.statement
        return f"{value} {statement}" if value else statement

    judged = as_left or as_found
    return {"limit": key, "label": judged.limit["label"], "found": said(as_found), "left": said(as_left)}


def text(said: dict[str, Any]) -> str:
    """The same for a person."""
    lines = [f"{said['number']}  {said['customer']}  {said['reason']}".rstrip(),
             "signed" if said["signed"] else "not signed" + (", in hand" if said["items"] else "")]
    for item in said["items"]:
        lines.append(f"{item['name']} ({item['procedure']}, {item['depth']}): "
                     + (item["outcome"] or f"no outcome yet, next: {item['next'] or 'outcome'}"))
        for row in item["limits"]:
            lines.append(f"  {row['label']} [{row['limit']}]: {row['found'] or '-'} as found"
                         + (f"; {row['left']} as left" if row["left"] else ""))
    if said["records"]:
        lines.append("records: " + ", ".join(said["records"]))
    return "\n".join(lines)
