"""What every part of the document asks: names, times and numbers of one job, written for its reader."""

from __future__ import annotations

import re
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import dataclass
from typing import Any

from fieldcheck.engine import units
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.records.replay import Again
from fieldcheck.records.words import COMMA, POINT, day_text, marked, time_text

Data = dict[str, Any]  # JSON of many kinds
NOT_NOTED = "not noted"
_PLAIN_NUMBER = re.compile(r"[\s\d.,;+<>\u2212-]+(?:[eE][+-]?\d+)?")  # no unit was typed with it, nor 4R7, nor OL


@dataclass(frozen=True)
class Hand:
    """data: of record.json; again: the job seen again; mark: decimal mark of the customer, point or comma."""

    data: Data
    again: Again
    mark: str

    def entry(self, noun: str, identity: str) -> Data:
        """What the workshop entered of a thing; {} when it is not in the record."""
        found: Data | None = self.again.state.workshop.get(noun, identity) if identity else None
        return found or {}

    def name(self, noun: str, identity: str) -> str:
        """Its name, or its identity when nothing was entered."""
        return str(self.entry(noun, identity).get("name") or identity or NOT_NOTED)

    def number(self, text: str) -> str:
        """A text with numbers, with the reader's decimal mark."""
        return marked(text, self.mark)

    def amount(self, value: Mapping[str, Any] | None) -> str:
        """A value as typed with its unit: {"text", "unit"}, {"texts": [...]}; "" for none."""
        if not value:
            return ""
        typed = value.get("texts") or [value.get("text") or ""]
        bare = all(_PLAIN_NUMBER.fullmatch(text) for text in typed)
        return self.number("; ".join(typed)) + (spaced(value.get("unit") or "") if bare else "")

    def when(self, event: Any) -> str:
        """Local time of an event with its offset from UTC."""
        return time_text(event.at, event.offset)

    def day(self, event: Any) -> str:
        """Local day of an event."""
        return day_text(event.at, event.offset)

    def who(self, event: Any) -> str:
        """The person of an event, else the device that wrote it."""
        return self.name("person", event.person) if event.person else self.name("device", event.device)


def mark_of(customer: Data) -> str:
    """The decimal mark that a customer reads."""
    return COMMA if customer.get("decimal_mark") == COMMA else POINT


def spaced(unit: str) -> str:
    """A unit behind its number, after a thin space, by its symbol where the engine knows it."""
    if not unit:
        return ""
    with suppress(FieldcheckError):  # one that a person made up is printed as it stands
        unit = units.symbol_text(units.unit(unit))
    return "\u202f" + unit if unit else ""


def identities_text(equipment: Data) -> str:
    """workshop tag LL-014; serial 7"""
    return "; ".join(f"{one['scheme']} {one['value']}" for one in equipment.get("identities") or [])
