"""House rules that a tool can hold: what the engine may not use, words that may not be printed, names of our own."""

import ast
import re
import subprocess
from pathlib import Path

import pytest

REPO = Path(__file__).resolve().parent.parent
ENGINE = sorted((REPO / "fieldcheck" / "engine").rglob("*.py"))
PHONE = sorted((REPO / "webui" / "app").rglob("*.py"))

MATH_ALLOWED = {"sqrt", "frexp", "ldexp", "isfinite", "isnan", "isinf", "inf", "floor"}
WHOLE_NUMBERS_ONLY = {"figures.py": "divmod"}  # exact in both runtimes for whole numbers, and used for nothing else
BUILTINS_FORBIDDEN = {
    "round": "the runtimes round differently: use figures",
    "sum": "CPython compensates, Brython does not: add in a loop",
    "divmod": "wrong for floats in Brython",
    "format": "the runtimes print differently: use figures",
    "pow": "differs in the last bit between browsers: use elementary.power",
    "eval": "nothing is evaluated", "exec": "nothing is evaluated", "compile": "nothing is evaluated",
}


def faults_of(source: str, where: str) -> list[str]:
    """What in an engine module the two runtimes do differently, as sentences with their line."""
    found = []
    for node in ast.walk(ast.parse(source)):
        line = f"{where}:{getattr(node, 'lineno', 0)}: "
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id in BUILTINS_FORBIDDEN \
                and WHOLE_NUMBERS_ONLY.get(where) != node.func.id:
            found.append(line + node.func.id + "(): " + BUILTINS_FORBIDDEN[node.func.id])
        if isinstance(node, ast.Attribute) and isinstance(node.value, ast.Name) and node.value.id == "math" \
                and node.attr not in MATH_ALLOWED:
            found.append(line + "math." + node.attr + ": the last bit depends on the browser, use elementary")
        if isinstance(node, ast.ImportFrom) and node.module == "math":
            found += [line + "math." + one.name for one in node.names if one.name not in MATH_ALLOWED]
        if isinstance(node, ast.Import):
            found += [line + "import " + one.name for one in node.names if one.name != "math"]
        if isinstance(node, ast.ImportFrom) and not (node.module or "").startswith("fieldcheck.engine") \
                and node.module != "math":
            found.append(line + "from " + str(node.module))
        if isinstance(node, ast.BinOp) and isinstance(node.op, ast.Pow) and not _whole(node):
            found.append(line + "** on floats differs between browsers: use elementary.power")
        if isinstance(node, ast.FormattedValue) and node.format_spec is not None:
            found.append(line + "a format specification: the runtimes print differently, use figures")
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Attribute) and node.func.attr == "format":
            found.append(line + ".format(): the runtimes print differently, use figures")
        if isinstance(node, ast.BinOp) and isinstance(node.op, ast.Mod) and isinstance(node.left, ast.Constant) \
                and isinstance(node.left.value, str):
            found.append(line + "% on text: the runtimes print differently, use figures")
        if isinstance(node, ast.BinOp) and isinstance(node.op, ast.Mod | ast.FloorDiv) and _has_float(node):
            found.append(line + "% or // on floats: wrong in Brython")
        if isinstance(node, ast.Dict) and any(isinstance(key, ast.Constant) and isinstance(key.value, float)
                                              for key in node.keys):
            found.append(line + "a float as key of a dict display is lost in Brython")
    return found


def _whole(node: ast.BinOp) -> bool:
    """10 ** n and 2 ** n of whole numbers are exact in both."""
    return isinstance(node.left, ast.Constant) and isinstance(node.left.value, int)


def _has_float(node: ast.BinOp) -> bool:
    return any(isinstance(one, ast.Constant) and isinstance(one.value, float) for one in (node.left, node.right))


@pytest.mark.parametrize("path", ENGINE, ids=lambda path: path.stem)
def test_the_engine_uses_nothing_that_its_two_runtimes_do_differently(path):
    assert faults_of(path.read_text(encoding="utf-8"), path.name) == []


@pytest.mark.parametrize("mutant", [
    "x = round(2.675, 2)", "import math\ny = math.exp(1.0)", "import json", "y = sum([0.1, 0.2])", "y = x ** 0.5",
    "y = f'{x:.2f}'", "y = '{}'.format(x)", "y = '%s' % x", "y = x % 1.0", "y = x // 2.0", "y = {1.5: 'a'}",
    "from math import log", "from collections import deque", "y = divmod(x, 2.0)",
])
def test_the_lint_catches_a_mutant(mutant):
    assert faults_of(mutant, "mutant.py")


def tracked() -> list[Path]:
    """The files of the repository that are text."""
    names = subprocess.run(["git", "ls-files", "-co", "--exclude-standard"], cwd=REPO, capture_output=True, text=True,
                           check=True).stdout.split("\n")
    kinds = {".py", ".toml", ".md", ".html", ".js", ".css", ".svg", ".sql", ".json", ".txt"}
    return [REPO / name for name in names if Path(name).suffix in kinds and (REPO / name).is_file()]


def test_nothing_claims_compliance():
    said = re.compile(r"compl(?:y|ies|iant) with", re.IGNORECASE)
    allowed = {"tests/test_house.py"}
    found = []
    for path in tracked():
        name = str(path.relative_to(REPO))
        if name in allowed or name.startswith("tests/") or "/fonts/" in name:
            continue
        for number, line in enumerate(path.read_text(encoding="utf-8", errors="replace").split("\n"), 1):
            if said.search(line) and "never" not in line.lower() and "forbid" not in line.lower():
                found.append(f"{name}:{number}: {line.strip()[:100]}")
    assert found == []


def test_no_module_of_ours_is_longer_than_the_alarm():
    long = {str(p.relative_to(REPO)): n for p in [*ENGINE, *PHONE, *(REPO / "fieldcheck").rglob("*.py")]
            if (n := len(p.read_text(encoding="utf-8").split("\n"))) > 420}
    assert long == {}
