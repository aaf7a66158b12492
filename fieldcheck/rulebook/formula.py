"""A formula's text -> tree for engine/formulas.py, with names, functions and dimensions checked.

The text is a Python expression; it is parsed with `ast`, never evaluated.  What a name stands for comes from a Scope:
name -> Type.  Problems are raised as Wrong with what and mend; the caller knows the file and line.
"""

import ast
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from fieldcheck.engine import formulas, units
from fieldcheck.engine.errors import FieldcheckError, UnitError
from fieldcheck.engine.physics.registry import REGISTRY
from fieldcheck.engine.unit_table import KELVIN, NONE, POINT, UNITS
from fieldcheck.rulebook.amounts import amount, looks_like_amount
from fieldcheck.rulebook.findings import did_you_mean

Tree = list[Any]
RUN_PARTS = {"layout": "texts", "start": "text", "seen": "texts", "end": "text"}


class Wrong(Exception):
    """what: what the formula does wrong; mend: how to put it right."""

    def __init__(self, what: str, mend: str = "") -> None:
        super().__init__(what)
        self.what = what
        self.mend = mend


@dataclass(frozen=True)
class Type:
    """what: value, list (one value a row), text, texts, run (of a drum) or truth; dimension: of value and list;
    choices: ids that a text may have; repeats: a value that stands for several readings of one question."""

    what: str
    dimension: Any = NONE
    choices: tuple[str, ...] = ()
    repeats: bool = False

    @property
    def name(self) -> str:
        """In words for messages."""
        if self.what == "value":
            return str(units.dimension_name(self.dimension))
        words = {"list": "one value for each row", "text": "a choice", "texts": "a list of words",
                 "run": "a whole run of the drum", "truth": "a yes or no"}
        return words[self.what]


@dataclass(frozen=True)
class Scope:
    """names: what each name stands for; row: the table whose rows are looked at one by one, or "";
    hidden: names that exist but cannot be had here -> why."""

    names: dict[str, Type]
    row: str
    hidden: dict[str, str]


def compiled(text: str, scope: Scope) -> tuple[Tree, Type]:
    """(tree, type) of a formula; Wrong when it is none."""
    try:
        parsed = ast.parse(text.strip(), mode="eval").body
    except (SyntaxError, ValueError, RecursionError, MemoryError):
        raise Wrong(f"\"{text}\" is not a formula", "write it as a Python expression, as \"a / (b + c)\"") from None
    return _Compiler(text.strip(), scope).node(parsed)


def bound(text: str, scope: Scope) -> tuple[Tree, Type]:
    """As compiled; a text such as "50 mohm" is a quantity by itself."""
    if looks_like_amount(text):
        try:
            return _quantity(text)
        except Wrong:
            if "(" not in text and "*" not in text:
                raise
    return compiled(text, scope)


def _quantity(text: str) -> tuple[Tree, Type]:
    try:
        dimension, number = amount(text)
    except UnitError as error:
        raise Wrong(f"\"{text}\": {error.what}", error.mend) from None
    return ["num", number], Type("value", dimension)


def _dimension(call: Callable[..., Any], *given: Any) -> Any:
    try:
        return call(*given)
    except UnitError as error:
        raise Wrong(error.what, error.mend) from None


class _Compiler:
    """Walks one parsed expression."""

    def __init__(self, text: str, scope: Scope) -> None:
        self.text = text
        self.scope = scope

    def node(self, node: ast.expr) -> tuple[Tree, Type]:
        """(tree, type) of one part of the expression."""
        handler = getattr(self, "_" + type(node).__name__.lower(), None)
        if handler is None:
            raise Wrong(f"\"{self._source(node)}\" is not allowed in a formula",
                        "use + - * /, comparisons, and, or, not, if else, names and functions")
        found: tuple[Tree, Type] = handler(node)
        return found

    def _source(self, node: ast.AST) -> str:
        return ast.get_source_segment(self.text, node) or self.text

    def _constant(self, node: ast.Constant) -> tuple[Tree, Type]:
        if isinstance(node.value, str):
            if looks_like_amount(node.value):
                return _quantity(node.value)
            return ["text", node.value], Type("text", choices=(node.value,))
        if isinstance(node.value, bool) or not isinstance(node.value, (int, float)):
            raise Wrong(f"\"{self._source(node)}\" is not allowed in a formula", "write numbers, texts and names")
        return _quantity(self._source(node))

    def _name(self, node: ast.Name) -> tuple[Tree, Type]:
        return self._named(node.id)

    def _attribute(self, node: ast.Attribute) -> tuple[Tree, Type]:
        if not isinstance(node.value, ast.Name):
            raise Wrong(f"\"{self._source(node)}\" is not allowed in a formula", "a column is written table.column")
        return self._named(node.value.id + "." + node.attr)

    def _named(self, name: str) -> tuple[Tree, Type]:
        if name in self.scope.hidden:
            raise Wrong(f"\"{name}\" cannot be had here", self.scope.hidden[name])
        if name not in self.scope.names:
            raise Wrong(f"there is no \"{name}\"", did_you_mean(name, self.scope.names,
                                                               "name a step, column, value or nameplate field"))
        return ["name", name], self.scope.names[name]

    def _unaryop(self, node: ast.UnaryOp) -> tuple[Tree, Type]:
        tree, kind = self.node(node.operand)
        if isinstance(node.op, ast.Not):
            self._truth(kind, node.operand)
            return ["not", tree], Type("truth")
        if not isinstance(node.op, ast.USub):
            raise Wrong(f"\"{self._source(node)}\" is not allowed in a formula", "leave the sign out")
        self._number(kind, node.operand)
        return ["neg", tree], Type(kind.what, kind.dimension)

    def _binop(self, node: ast.BinOp) -> tuple[Tree, Type]:
        signs = {ast.Add: "+", ast.Sub: "-", ast.Mult: "*", ast.Div: "/"}
        if type(node.op) not in signs:
            mend = "write a product, as x * x" if isinstance(node.op, ast.Pow) else "use + - * /"
            raise Wrong(f"\"{self._source(node)}\" is not allowed in a formula", mend)
        sign = signs[type(node.op)]
        left, a = self.node(node.left)
        right, b = self.node(node.right)
        self._number(a, node.left)
        self._number(b, node.right)
        ways = {"+": units.add, "-": units.subtract, "*": units.multiply, "/": units.divide}
        dimension = _dimension(ways[sign], a.dimension, b.dimension)
        return [sign, left, right], Type("list" if "list" in (a.what, b.what) else "value", dimension)

    def _compare(self, node: ast.Compare) -> tuple[Tree, Type]:
        if len(node.ops) != 1:
            raise Wrong(f"\"{self._source(node)}\" compares more than two things", "join two comparisons with and")
        signs = {ast.Lt: "<", ast.LtE: "<=", ast.Gt: ">", ast.GtE: ">=", ast.Eq: "==", ast.NotEq: "!="}
        if type(node.ops[0]) not in signs:
            raise Wrong(f"\"{self._source(node)}\" is not allowed in a formula", "use < <= > >= == !=")
        sign = signs[type(node.ops[0])]
        left, a = self.node(node.left)
        right, b = self.node(node.comparators[0])
        if "text" in (a.what, b.what):
            self._same_words(a, b, sign, node)
        else:
            self._one(a, node.left)
            self._one(b, node.comparators[0])
            _dimension(units.compare, a.dimension, b.dimension)
        return [sign, left, right], Type("truth")

    def _same_words(self, a: Type, b: Type, sign: str, node: ast.Compare) -> None:
        if a.what != b.what or sign not in ("==", "!="):
            raise Wrong(f"\"{self._source(node)}\" compares {a.name} with {b.name}", "compare a choice with == or !=")
        given, known = (a, b) if len(b.choices) > len(a.choices) else (b, a)
        for one in given.choices:
            if known.choices and one not in known.choices:
                raise Wrong(f"\"{one}\" is none of the choices", did_you_mean(one, known.choices))

    def _boolop(self, node: ast.BoolOp) -> tuple[Tree, Type]:
        sign = "and" if isinstance(node.op, ast.And) else "or"
        tree: Tree = []
        for one in node.values:
            part, kind = self.node(one)
            self._truth(kind, one)
            tree = [sign, tree, part] if tree else part
        return tree, Type("truth")

    def _ifexp(self, node: ast.IfExp) -> tuple[Tree, Type]:
        test, kind = self.node(node.test)
        self._truth(kind, node.test)
        first, a = self.node(node.body)
        second, b = self.node(node.orelse)
        if a.what != b.what:
            raise Wrong(f"\"{self._source(node)}\" gives {a.name} or {b.name}", "give the same on both sides of else")
        if a.what in ("value", "list"):
            _dimension(units.compare, a.dimension, b.dimension)
        return ["if", test, first, second], Type(a.what, a.dimension, a.choices + b.choices)

    def _call(self, node: ast.Call) -> tuple[Tree, Type]:
        if not isinstance(node.func, ast.Name):
            raise Wrong(f"\"{self._source(node.func)}\" is not a function", "call a function by its name")
        name = node.func.id
        if name in formulas.LIST_FUNCTIONS:
            return self._list_function(name, node)
        if name in formulas.MATHS:
            return self._maths(name, node)
        if name not in REGISTRY:
            known = [*formulas.LIST_FUNCTIONS, *formulas.MATHS, *REGISTRY.keys()]
            raise Wrong(f"there is no function \"{name}\"", did_you_mean(name, known, "see: fieldcheck functions"))
        return self._registered(name, node)

    def _list_function(self, name: str, node: ast.Call) -> tuple[Tree, Type]:
        if node.keywords or not node.args:
            raise Wrong(f"{name} takes a list or several values", f"write {name}(table.column) or {name}(a, b)")
        parts = [self.node(one) for one in node.args]
        kinds = [kind for _, kind in parts]
        for kind, one in zip(kinds, node.args, strict=True):
            self._number(kind, one)
            _dimension(units.compare, kinds[0].dimension, kind.dimension)
        if len(kinds) == 1 and kinds[0].what == "value" and not kinds[0].repeats:
            raise Wrong(f"\"{self._source(node)}\": there is only one value",
                        "give it a step with repeats, or a whole column in a value that has no each")
        if len(kinds) > 1 and any(kind.what == "list" for kind in kinds):
            raise Wrong(f"\"{self._source(node)}\" mixes columns and values", "give one column, or values alone")
        tree: Tree = ["call", name, [part for part, _ in parts], {}]
        if name == "count":
            return tree, Type("value")
        dimension = kinds[0].dimension
        if name == "spread" and dimension == POINT:
            dimension = KELVIN
        return tree, Type("value", dimension)

    def _maths(self, name: str, node: ast.Call) -> tuple[Tree, Type]:
        if node.keywords or len(node.args) != 1:
            raise Wrong(f"{name} takes one value", f"write {name}(x)")
        tree, kind = self.node(node.args[0])
        self._one(kind, node.args[0])
        dimension = kind.dimension
        if name == "sqrt":
            dimension = _dimension(units.root, dimension)
        elif name != "abs" and dimension != NONE:
            raise Wrong(f"{name} of {kind.name}", f"{name} takes a plain number: divide by a quantity of the same kind")
        return ["call", name, [tree], {}], Type("value", dimension)

    def _registered(self, name: str, node: ast.Call) -> tuple[Tree, Type]:
        function = REGISTRY[name]
        known = {one.name: one for one in function.parameters}
        usage = f"write {name}({', '.join(known)})"
        if len(node.args) > len(known):
            raise Wrong(f"{name} takes {len(known)} arguments, not {len(node.args)}", usage)
        given: dict[str, tuple[Tree, Type]] = {}
        for parameter, one in zip(function.parameters, node.args, strict=False):
            given[parameter.name] = self._argument(name, parameter, one)
        positional = [tree for tree, _ in given.values()]
        named: dict[str, Tree] = {}
        for keyword in node.keywords:
            if keyword.arg is None or keyword.arg not in known:
                raise Wrong(f"{name} has no argument \"{keyword.arg}\"", did_you_mean(str(keyword.arg), known))
            if keyword.arg in given:
                raise Wrong(f"{name} is given \"{keyword.arg}\" twice", usage)
            given[keyword.arg] = self._argument(name, known[keyword.arg], keyword.value)
            named[keyword.arg] = given[keyword.arg][0]
        whole_run = any(kind.what == "run" for _, kind in given.values())
        for parameter in function.parameters:
            wanted = not parameter.optional or (parameter.name == "seen" and not whole_run)
            if parameter.name not in given and wanted:
                raise Wrong(f"{name} needs \"{parameter.name}\"", usage)
        returned = units.quantity(function.returns).dimension
        return ["call", name, positional, named], Type("value", returned)

    def _argument(self, name: str, parameter: Any, node: ast.expr) -> tuple[Tree, Type]:
        if parameter.kind in ("text", "texts") and isinstance(node, ast.Constant) and isinstance(node.value, str):
            return ["text", node.value], Type("text")
        tree, kind = self.node(node)
        fits = {"value": ("value",), "list": ("value", "list"), "text": ("text",), "texts": ("texts",)}[parameter.kind]
        if kind.what == "run" and parameter.name == "layout" and any(
                one.name == "seen" for one in REGISTRY[name].parameters):
            return tree, kind
        if kind.what not in fits:
            wanted = {"value": "one value", "list": "values", "text": "a word", "texts": "a list of words"}
            raise Wrong(f"{name}, {parameter.name}: \"{self._source(node)}\" is {kind.name}, not "
                        + wanted[parameter.kind], "give it " + wanted[parameter.kind])
        if kind.what in ("value", "list"):
            wanted_dimension = units.quantity(parameter.quantity).dimension
            if kind.dimension != wanted_dimension:
                raise Wrong(f"{name}, {parameter.name}: \"{self._source(node)}\" is "
                            f"{units.dimension_name(kind.dimension)}, not {units.dimension_name(wanted_dimension)}",
                            f"{parameter.name} is a {parameter.quantity}")
        return tree, kind

    def _number(self, kind: Type, node: ast.expr) -> None:
        if kind.what not in ("value", "list"):
            raise Wrong(f"\"{self._source(node)}\" is {kind.name}, not a number", "name a reading or a value")

    def _one(self, kind: Type, node: ast.expr) -> None:
        self._number(kind, node)
        if kind.what == "list":
            raise Wrong(f"\"{self._source(node)}\" is one value for each row", "use median, maximum or minimum of it")

    def _truth(self, kind: Type, node: ast.expr) -> None:
        if kind.what != "truth":
            raise Wrong(f"\"{self._source(node)}\" is no condition", "compare something, as x > \"1 ohm\"")


def check_quantity(name: str) -> Any:
    """The dimension of a quantity's name; Wrong with the nearest name."""
    try:
        return units.quantity(name).dimension
    except FieldcheckError as error:
        raise Wrong(error.what, error.mend) from None


def check_unit(unit: str, quantity: str) -> None:
    """Wrong unless `unit` is a unit of a quantity, in the engine's ASCII spelling."""
    of = units.quantity(quantity)
    try:
        found = units.parse_unit(unit, quantity)
    except FieldcheckError as error:
        raise Wrong(error.what, error.mend) from None
    if UNITS.get("u:" + unit) is None:
        raise Wrong(f"\"{unit}\" is not spelt as rules spell it", f"write \"{found.symbol}\"")
    if found.dimension != of.dimension:
        raise Wrong(f"\"{unit}\" is not a unit of {quantity}")
