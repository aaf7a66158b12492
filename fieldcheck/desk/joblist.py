"""Jobs in words: what lists and the phone say about them."""

from __future__ import annotations

from typing import Any

OPEN, HANDED, SIGNED, RECORDED = "open", "in hand", "signed", "recorded"
Plain = dict[str, Any]


def jobs_of(state: Any) -> list[Any]:
    """Every opened job, the one opened last first."""
    opened = [job for job in state.jobs.values() if job.opened is not None]
    return sorted(opened, key=lambda job: job.opened.order, reverse=True)


def stage(job: Any) -> str:
    """open, in hand (handed out or begun), signed, or recorded."""
    if job.signing() is not None:
        return RECORDED if job.records and job.records[-1].data.get("of_root") == job.signing().data["root"] else SIGNED
    begun = any(item.slots or item.outcomes.history for item in job.items.values())
    return HANDED if begun or job.handed.history else OPEN


def name_of(state: Any, noun: str, key: str) -> str:
    """The name that the workshop gave a thing; "" when it is not known."""
    data = state.workshop.get(noun, key) if key else None
    return str(data["name"]) if data else ""


def for_phone(state: Any, job: Any) -> Plain:
    """One job as the phone's list shows it."""
    data = job.opened.data
    handed = job.handed.event.data if job.handed.event is not None else {}
    return {
        "job": job.id, "number": data["number"], "state": stage(job), "place": data["place"],
        "reason": data.get("reason", ""), "due": data.get("due", ""), "rulebook": data["rulebook"],
        "customer": name_of(state, "customer", data["customer"]), "site": name_of(state, "site", data["site"]),
        "device": handed.get("device", ""), "person": handed.get("person", ""),
        "items": [_item(state, item) for item in job.items_in_order()],
    }


def _item(state: Any, item: Any) -> Plain:
    outcome = item.outcomes.event.data["outcome"] if item.outcomes.event is not None else ""
    return {"item": item.id, "equipment": item.equipment, "name": name_of(state, "equipment", item.equipment),
            "kind": item.kind, "procedure": item.procedure, "depth": item.depth, "outcome": outcome}
