"""The cases of a procedure in every runtime: what the engine says of each filled-in run, and why.

A case is ["part", [JSON text]], which loads a compiled procedure, or ["assess", [JSON text of a run]] or
["explanations", [JSON text of a run]] for the procedure loaded last.
"""

from calls_runner import shown

from fieldcheck.engine import assess, texts
from fieldcheck.engine.errors import FieldcheckError

LOADED = []


def run(case):
    op, arguments = case
    data = texts.read(arguments[0], None)
    if op == "part":
        LOADED.append(data)
        return data["id"]
    try:
        if op == "assess":
            return shown(assess.assess(LOADED[-1], data), 0)
        return shown(assess.explanations(LOADED[-1], data), 0)
    except FieldcheckError as error:
        return "E:" + type(error).__name__ + "|" + error.what + "|" + error.where + "|" + error.mend
