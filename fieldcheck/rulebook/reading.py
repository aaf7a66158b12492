"""Reads a rule file into its shape; whatever does not fit becomes a finding with a mending hint."""

from pathlib import Path as FilePath
from types import UnionType
from typing import Any, TypeVar, Union, get_args, get_origin

from pydantic import BaseModel, ValidationError

from fieldcheck.rulebook.findings import Findings, Source, did_you_mean, read
from fieldcheck.rulebook.lines import Path

Shape = TypeVar("Shape", bound=BaseModel)

WANTED = {
    "string_type": "a text in quotes",
    "int_type": "a whole number",
    "bool_type": "true or false",
    "list_type": "a list in [ ]",
    "dict_type": "a table",
    "model_type": "a table",
    "model_attributes_type": "a table",
    "date_type": "a date as 2026-01-01, without quotes",
    "date_from_datetime_inexact": "a date without a time",
    "date_from_datetime_parsing": "a date as 2026-01-01",
}


def shaped(shape: type[Shape], file: FilePath, findings: Findings) -> tuple[Source | None, Shape | None]:
    """(source, the file in its shape); None for what could not be had, with findings."""
    source = read(file, findings)
    if source is None:
        return None, None
    try:
        return source, shape.model_validate(source.data)
    except ValidationError as error:
        for one in error.errors(include_url=False):
            _add(shape, source, one, findings)
        return source, None


def _add(shape: type[BaseModel], source: Source, error: Any, findings: Findings) -> None:
    path = _real(shape, source, tuple(error["loc"]))
    key = str(path[-1]) if path else ""
    kind = error["type"]
    if error["loc"][-1:] == ("[key]",):
        findings.add(source, path, f'unknown key "{key}"', did_you_mean(key, _allowed(error["ctx"]["expected"])))
    elif kind == "extra_forbidden":
        known = _keys(shape, path[:-1])
        findings.add(source, path, f'unknown key "{key}"', did_you_mean(key, known))
    elif kind == "missing":
        findings.add(source, path, f'"{key}" is missing', "add it: every " + _thing(path) + " has one")
    elif kind == "literal_error":
        given = error["input"]
        allowed = _allowed(error["ctx"]["expected"])
        findings.add(source, path, f'{_text(given)} is not allowed as "{key}"', did_you_mean(str(given), allowed))
    elif kind in WANTED:
        findings.add(source, path, f'"{key}" is {_text(error["input"])}', f"write {WANTED[kind]}")
    else:
        findings.add(source, path, f'"{key}": {error["msg"]}')


def _real(shape: type[BaseModel], source: Source, loc: Path) -> Path:
    """The path in the file: pydantic puts the tags of unions and "[key]" into it."""
    path: list[str | int] = []
    data: Any = source.data
    for one in loc:
        if one == "[key]":
            continue
        last = one == loc[-1]
        inside = (isinstance(data, dict) and one in data) or (isinstance(data, list) and isinstance(one, int))
        if not inside and not (last and isinstance(data, dict)):
            continue
        path.append(one)
        data = data[one] if inside else None
    return tuple(path)


def _keys(shape: type[BaseModel], path: Path) -> list[str]:
    """The keys that a shape knows at a path."""
    here: Any = shape
    for one in path:
        here = _models_in(here)
        if isinstance(one, int) or here is None:
            continue
        here = _field(here, str(one))
    here = _models_in(here)
    if here is None:
        return []
    return [field.alias or name for name, field in here.model_fields.items()]


def _field(shape: type[BaseModel], key: str) -> Any:
    for name, field in shape.model_fields.items():
        if key in (name, field.alias):
            return field.annotation
    return None


def _models_in(kind: Any) -> type[BaseModel] | None:
    """The model that an annotation holds: list[Model], Model | None, Model."""
    if isinstance(kind, type) and issubclass(kind, BaseModel):
        return kind
    if get_origin(kind) in (list, dict, Union, UnionType):
        for one in get_args(kind):
            found = _models_in(one)
            if found is not None:
                return found
    return None


def _thing(path: Path) -> str:
    """What holds the last key of a path, in words."""
    names = [str(one) for one in path[:-1] if not isinstance(one, int)]
    return " ".join(names[-2:]).replace("_", " ") if names else "file of this sort"


def _allowed(expected: str) -> list[str]:
    return [one.strip().strip("'") for one in expected.replace(" or ", ", ").split(",")]


def _text(given: Any) -> str:
    if isinstance(given, str):
        return f'"{given}"'
    if isinstance(given, bool):
        return "true" if given else "false"
    if isinstance(given, (list, dict)):
        return "a list" if isinstance(given, list) else "a table"
    return str(given)
