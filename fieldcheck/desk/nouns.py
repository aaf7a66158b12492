"""The pages that every noun of the workshop has: a list, a new one, a changed one."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from flask import Blueprint, make_response, redirect, render_template, request, url_for
from flask.typing import ResponseReturnValue

from fieldcheck.desk import entries, forms
from fieldcheck.desk.lists import Column, Row, listing
from fieldcheck.desk.shared import workshop
from fieldcheck.desk.workshop import Workshop
from fieldcheck.engine.errors import FieldcheckError, NotFound
from fieldcheck.journal.forms import new_id

Data = dict[str, Any]                       # an event's data: texts, numbers, lists, objects
Tables = Mapping[str, Sequence[Mapping[str, str]]]
Links = list[tuple[str, str]]


GIVEN = ("kind", "customer", "site")        # what the address of a new thing's form may say already


@dataclass(frozen=True)
class Noun:
    """One kind of thing that the workshop enters, and how it is shown and asked for.

    name: as in events (person.entered {person}); plural: its path; cells(state, data): the list's texts;
    sheet(shop, state, data): its form, data being what was entered last or what the address says; known(data): the
    texts and tables that it starts with; taken(shop, state, filled, data): (new data without the identity,
    errors by HTML name).  links(state, data): where else to go from one.  first(shop, state, args): links to choose
    from before the form of a new one, or [].
    """

    name: str
    plural: str
    title: str
    new: str
    about: str
    columns: Sequence[Column]
    cells: Callable[[Any, Data], Mapping[str, str]]
    sheet: Callable[[Workshop, Any, Data], forms.Sheet]
    known: Callable[[Data], tuple[Mapping[str, str], Tables]]
    taken: Callable[[Workshop, Any, forms.Filled, Data], tuple[Data, Mapping[str, str]]]
    past: Callable[[Data], bool] = field(default=lambda data: False)
    hidden: Callable[[Any, Data], bool] = field(default=lambda state, data: False)
    links: Callable[[Any, Data], Links] = field(default=lambda state, data: [])
    first: Callable[[Workshop, Any, Mapping[str, str]], Links] = field(default=lambda shop, state, args: [])


def blueprint(noun: Noun) -> Blueprint:
    """The noun's list, form for a new one and page of one."""
    bp = Blueprint(noun.plural, __name__, url_prefix=f"/{noun.plural}")

    @bp.get("/")
    def every() -> ResponseReturnValue:
        with workshop().reading() as state:
            return render_template("nouns/list.html", noun=noun, list=listing(noun.columns, _rows(noun, state),
                                                                              request.args))

    @bp.route("/new", methods=("GET", "POST"))
    def new() -> ResponseReturnValue:
        shop = workshop()
        with shop.reading() as state:
            first = noun.first(shop, state, request.args)
            if first:
                return render_template("nouns/first.html", noun=noun, links=first)
            return _form(noun, shop, state, "", {key: request.args[key] for key in GIVEN if key in request.args})

    @bp.route("/<id>", methods=("GET", "POST"))
    def one(id: str) -> ResponseReturnValue:
        shop = workshop()
        with shop.reading() as state:
            data = state.workshop.get(noun.name, id)
            if data is None:
                raise NotFound(f"there is no such {noun.name}", id, "go back to the list")
            return _form(noun, shop, state, id, data)

    return bp


def _rows(noun: Noun, state: Any) -> list[Row]:
    fresh = request.args.get("fresh", "")
    return [
        Row(url_for(f"{noun.plural}.one", id=data[noun.name]), _cells(noun, state, data), noun.past(data),
            data[noun.name] == fresh)
        for data in state.workshop.all(noun.name) if not noun.hidden(state, data)
    ]


def _cells(noun: Noun, state: Any, data: Data) -> Mapping[str, str]:
    """The texts of a line.  An entry that another program wrote oddly stays for ever, and must not hide the rest."""
    try:
        return noun.cells(state, data)
    except (FieldcheckError, KeyError, TypeError, AttributeError):
        first = noun.columns[0].key
        return {first: f"{data.get('name', '')} (cannot be read, enter it again)"}


def _form(noun: Noun, shop: Workshop, state: Any, id: str, data: Data) -> ResponseReturnValue:
    """Shows the form, or takes what was posted: keeps it, or shows it again as typed with what is wrong."""
    sheet = (*noun.sheet(shop, state, data), *entries.writer_field(state))

    def page(shown: forms.Filled) -> str:
        return render_template(
            "nouns/form.html", noun=noun, title=str(data["name"]) if id else noun.new, errors=len(shown.errors),
            links=noun.links(state, data) if id else [], controls=forms.controls(sheet, shown),
        )

    if request.method == "GET":
        texts, tables = noun.known(data)
        return page(forms.start(sheet, {**texts, **entries.known_writer(state)}, tables))
    shown = forms.filled(sheet, request.form)
    if request.form.get("more", ""):
        return page(forms.with_one_more(sheet, shown, request.form["more"]))
    entered, wrong = noun.taken(shop, state, shown, data) if not shown.errors else ({}, {})
    shown.errors.update(wrong)
    if shown.errors:
        return make_response(page(shown), 422)
    key = id or new_id()
    entries.write(shop, shown, f"{noun.name}.entered", {noun.name: key, **entered})
    answer = make_response(redirect(url_for(f"{noun.plural}.every", fresh=key), 303))
    return entries.remember(answer, shown)
