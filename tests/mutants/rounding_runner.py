"""A mutant of the engine's rounding for all runtimes: the runtime's own `round` where the engine has figures."""

from fieldcheck.engine import figures


def run(case):
    text, places = case
    x = float(text)
    if places == "figures":
        return figures.fixed(x, 2)
    return repr(float(round(x, 2)))
