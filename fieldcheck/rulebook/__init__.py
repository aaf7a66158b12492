"""Rules as data: rules/*.toml -> checked, unit-checked and compiled to an index and one JSON part a procedure.

    load(folder, own=None) -> Rulebook(index, digest, parts, by_id)
    check(folder, own=None) -> (findings, what was checked)
    show(procedure, folder=None) -> text      schema() -> JSON Schema of a procedure file
    part(procedure, folder=None) -> compiled part as data
    runs(procedure, folder=None) -> [(case name, run, what it must say)]
"""

from pathlib import Path
from typing import Any

from fieldcheck.rulebook import book as _book
from fieldcheck.rulebook.book import Rulebook, check, load
from fieldcheck.rulebook.findings import Finding, Findings
from fieldcheck.rulebook.shapes import Procedure
from fieldcheck.rulebook.show import shown

__all__ = ["Finding", "Rulebook", "check", "load", "part", "rules_folder", "runs", "schema", "show"]


def rules_folder() -> Path:
    """The rules that ship with fieldcheck: inside the installed package, else beside it in a checkout."""
    package = Path(__file__).resolve().parent.parent
    shipped = package / "_data" / "rules"
    return shipped if shipped.is_dir() else package.parent / "rules"


def show(procedure: str, folder: Path | None = None) -> str:
    """A procedure as a senior technician would read it."""
    draft = _book.drafted(folder or rules_folder(), None, Findings())
    return shown(_book.find(draft, procedure), draft.shelf)


def part(procedure: str, folder: Path | None = None) -> dict[str, Any]:
    """The compiled part of one procedure as data."""
    return _book.part(procedure, folder or rules_folder())


def runs(procedure: str, folder: Path | None = None) -> list[tuple[str, dict[str, Any], dict[str, Any]]]:
    """Every case of a procedure as (name, run for engine/assess.py, what it must say)."""
    return _book.runs(procedure, folder or rules_folder())


def schema() -> dict[str, Any]:
    """JSON Schema of a procedure file, for editors."""
    return Procedure.model_json_schema(by_alias=True)
