"""Six influences with degrees of freedom carried through a formula, against GTC and uncertainties.

The model is the four-wire resistance with reversal and a temperature correction: all four operations, an influence
used twice, six independent inputs. Inputs are made anew each time, since readings are. The three must agree first.
"""

from __future__ import annotations

import math

from benchmarks.ratios import ROUNDS, Row, at_most, paired
from GTC import dof as gtc_dof
from GTC import uncertainty as gtc_uncertainty
from GTC import ureal
from uncertainties import ufloat

from fieldcheck.engine.measured import combined, effective_dof, influence

INPUTS = (("v+", 0.02312, 1.1e-5, 9), ("v-", -0.02288, 1.3e-5, 4), ("i", 1.0021, 2.4e-3, 12), ("lead", 1.2e-4, 3e-5, 6),
          ("alpha", 0.00393, 4e-5, 20), ("dt", 3.4, 0.5, 8))


def model(plus, minus, current, lead, alpha, kelvin):  # type: ignore[no-untyped-def]  # three libraries' own numbers
    return ((plus - minus) / (current * 2.0) - lead) / (alpha * kelvin + 1.0)


def ours() -> tuple[float, float, float]:
    """(value, u, effective degrees of freedom)."""
    y = model(*[influence(value, u, name, dof) for name, value, u, dof in INPUTS])
    return y.value, combined(y), effective_dof(y)


def by_gtc() -> tuple[float, float, float]:
    y = model(*[ureal(value, u, dof) for _, value, u, dof in INPUTS])
    return y.x, gtc_uncertainty(y), gtc_dof(y)


def by_uncertainties() -> tuple[float, float]:
    """It has no degrees of freedom."""
    y = model(*[ufloat(value, u) for _, value, u, _ in INPUTS])
    return y.nominal_value, y.std_dev


def agree() -> None:
    """All three give the same value and u, GTC the same degrees of freedom."""
    for mine, gtc in zip(ours(), by_gtc(), strict=True):
        assert math.isclose(mine, gtc, rel_tol=1e-10), (mine, gtc)
    for mine, other in zip(ours()[:2], by_uncertainties(), strict=True):
        assert math.isclose(mine, other, rel_tol=1e-10), (mine, other)


def rows(tiny: bool = False) -> list[Row]:
    agree()
    rounds, loops = (1, 5) if tiny else (ROUNDS, 300)
    gtc = paired(ours, by_gtc, rounds, loops)
    other = paired(ours, by_uncertainties, rounds, loops)
    return [
        at_most("propagation of 6 influences with dof / GTC", gtc, 1.0, 1e-6, "us", "< 1"),
        at_most("propagation of 6 influences with dof / uncertainties (no dof)", other, 2.0, 1e-6, "us"),
    ]
