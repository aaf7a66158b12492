"""The engine: pure Python that judges readings, the same source under CPython and Brython.

It imports `math` and nothing else, does no input or output, knows no clock and logs nothing.
A house lint (tests/test_house.py) keeps the runtime's own rounding, formatting, `%`, `//`, `sum`
and elementary functions of floats out of it, because they differ between the two runtimes.
"""
