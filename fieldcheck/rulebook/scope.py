"""What the names in a procedure's formulas stand for, and which steps a name leads back to."""

from fieldcheck.engine import units
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.formulas import names_in
from fieldcheck.engine.unit_table import NONE
from fieldcheck.rulebook.formula import RUN_PARTS, Scope, Tree, Type
from fieldcheck.rulebook.shapes import Limit, Plate, Procedure, Step, Value

CONDITIONS = {"ambient": "temperature", "humidity": "humidity", "supply_voltage": "voltage",
              "supply_frequency": "frequency"}
NO_VALUE = ("confirm", "action", "photograph", "note")


def scope_of(procedure: Procedure, row: str = "") -> Scope:
    """The names that a formula of this procedure may use; row: id of the table whose rows it looks at, or ""."""
    names = {name: Type("value", _dimension(quantity)) for name, quantity in CONDITIONS.items()}
    hidden: dict[str, str] = {}
    for field in procedure.nameplate:
        names[field.id] = _plate(field)
    for step in procedure.step:
        _step(step, row, names, hidden)
    for value in procedure.value:
        _value(value, row, names, hidden)
    return Scope(names, row, hidden)


def _dimension(quantity: str) -> object:
    try:
        return units.quantity(quantity).dimension
    except FieldcheckError:
        return NONE


def _plate(field: Plate) -> Type:
    if field.choices:
        return Type("text", choices=tuple(one.id for one in field.choices))
    return Type("value", _dimension(field.quantity))


def _step(step: Step, row: str, names: dict[str, Type], hidden: dict[str, str]) -> None:
    if step.kind in NO_VALUE:
        hidden[step.id] = f"a step of kind {step.kind} gives no value"
    elif step.kind == "choice":
        names[step.id] = Type("text", choices=tuple(one.id for one in step.choices if one.id != "unknown"))
    elif step.kind == "sequence":
        names[step.id] = Type("run")
        names[step.id + ".pulses"] = Type("value")
        for part, what in RUN_PARTS.items():
            names[step.id + "." + part] = Type(what)
    elif step.kind == "table":
        hidden[step.id] = "name one of its columns: " + ", ".join(f"{step.id}.{one.id}" for one in step.columns)
        for column in step.columns:
            _row_wise(f"{step.id}.{column.id}", _dimension(column.quantity), step.id, row, names, hidden)
    else:
        quantity = step.quantity or ("time" if step.kind == "timing" else "")
        several = step.kind == "timing" or (isinstance(step.repeats, int) and step.repeats > 1)
        names[step.id] = Type("value", _dimension(quantity), repeats=several)


def _value(value: Value, row: str, names: dict[str, Type], hidden: dict[str, str]) -> None:
    if value.each:
        _row_wise(value.id, _dimension(value.quantity), value.each, row, names, hidden)
    else:
        names[value.id] = Type("value", _dimension(value.quantity))


def _row_wise(name: str, dimension: object, table: str, row: str, names: dict[str, Type],
              hidden: dict[str, str]) -> None:
    """A column or a value of each row: the list of all rows, this row's value, or out of reach from other rows."""
    if row and row != table:
        hidden[name] = f"it belongs to the rows of \"{table}\"; gather it in a value of its own, without each"
    else:
        names[name] = Type("value" if row else "list", dimension)


def certain_names(tree: Tree) -> list[str]:
    """The names without which a tree has no value: what stands only behind an if is left out."""
    if tree[0] == "name":
        return [tree[1]]
    if tree[0] in ("num", "text"):
        return []
    parts = [tree[1]] if tree[0] == "if" else tree[1:]
    if tree[0] == "call":
        parts = [*tree[2], *tree[3].values()]
    return [name for part in parts for name in certain_names(part)]


def steps_behind(names: list[str], procedure: Procedure, trees: dict[str, Tree], certain: bool = False) -> list[str]:
    """Ids of the steps that names lead back to, through values; trees: value id -> its compiled formula.

    certain: leave out what only one side of an if needs.
    """
    steps = {one.id for one in procedure.step if one.kind not in NO_VALUE}
    found: list[str] = []
    seen: set[str] = set()
    waiting = list(names)
    while waiting:
        name = waiting.pop(0)
        if name in seen:
            continue
        seen.add(name)
        if name in trees:
            waiting += certain_names(trees[name]) if certain else names_in(trees[name])
        head = name.split(".")[0]
        if head in steps and head not in found:
            found.append(head)
    return found


def row_table(limit: Limit, procedure: Procedure) -> str:
    """The table on whose rows an each-limit looks, or "" where there is none."""
    for value in procedure.value:
        if value.id == limit.value:
            return value.each
    head, dot, _ = limit.value.partition(".")
    tables = [one.id for one in procedure.step if one.kind == "table"]
    return head if dot and head in tables else ""
