"""Reading a measured value: combined and expanded uncertainty, degrees of freedom, budget (GUM 5, 6, annex G)."""

import math

from fieldcheck.engine import distributions
from fieldcheck.engine.carrier import Measured
from fieldcheck.engine.errors import FieldcheckError, OutOfRange
from fieldcheck.engine.figures import parse_decimal
from fieldcheck.engine.frozen import frozen

_sqrt = math.sqrt


def _family_sums(parts, families):
    """{family: [sum of the positive, sum of the negative contributions]}."""
    sums = {}
    for name, family in families.items():
        part = parts.get(name, 0.0)
        if family not in sums:
            sums[family] = [0.0, 0.0]
        sums[family][0 if part > 0.0 else 1] += part
    return sums


def _checked(correlations):
    for pair, r in correlations.items():
        if not -1.0 <= r <= 1.0:
            raise OutOfRange("the correlation of \"" + pair[0] + "\" and \"" + pair[1] + "\" is not within -1 and 1")
    return correlations


def _variance(m, correlations):
    parts = m.parts
    families = m.families
    total = 0.0
    for name, part in parts.items():
        if name not in families:
            total += part * part
    if families:
        for sums in _family_sums(parts, families).values():
            total += sums[0] * sums[0] + sums[1] * sums[1]
    if correlations:
        for pair, r in _checked(correlations).items():
            total += 2.0 * r * parts.get(pair[0], 0.0) * parts.get(pair[1], 0.0)
    return total if total > 0.0 else 0.0    # rounding may leave -1e-40 where all cancels


def combined(m, correlations=None):
    """Combined standard uncertainty of a Measured (0.0 of a float), GUM equation (13).

    correlations: {(name, name): r} between influences, each pair once, in either order.
    """
    return _sqrt(_variance(m, correlations)) if isinstance(m, Measured) else 0.0


def _clusters(dofs, correlations):
    """Influences that given correlations tie together, as lists of names; each name stands in one list."""
    home = {}
    for pair, r in correlations.items():
        if r == 0.0:
            continue
        a = home.get(pair[0], [pair[0]])
        b = home.get(pair[1], [pair[1]])
        if a is not b:
            a = a + b
        for name in a:
            home[name] = a
    lists = []
    for name in dofs:
        names = home.get(name, [name])
        if not [one for one in lists if one is names]:
            lists.append(names)
    return lists


def effective_dof(m, correlations=None):
    """Welch-Satterthwaite effective degrees of freedom (GUM G.4.1) as a float, not truncated; None = infinite.

    GUM G.4.1 holds for independent influences.  Influences tied together by given correlations are taken as one
    influence with their joint variance and the fewest degrees of freedom among them (for readings taken together
    this is the usual treatment of an ensemble).  Never less than 1.
    """
    if not isinstance(m, Measured) or not m.dofs:
        return None
    variance = _variance(m, correlations)
    if variance == 0.0:
        return None
    total = 0.0
    if not correlations:
        for name, dof in m.dofs.items():
            part = m.parts.get(name, 0.0)
            share = part * part / variance
            total += share * share / dof
    else:
        for names in _clusters(m.dofs, correlations):
            among = Measured(0.0, {n: m.parts.get(n, 0.0) for n in names})
            share = _variance(among, {p: r for p, r in correlations.items() if p[0] in names and p[1] in names})
            share = share / variance
            total += share * share / min([m.dofs[n] for n in names if n in m.dofs])
    if total == 0.0:
        return None
    return max(1.0, 1.0 / total)


def budget(m, correlations=None):
    """[(name, signed contribution, share of the variance)], largest share first, then by name.

    The shares sum to 1 (0.0 each when u = 0).  A correlated influence's share holds half of each joint term, so
    it may be negative.
    """
    if not isinstance(m, Measured):
        return []
    variance = _variance(m, correlations)
    sums = _family_sums(m.parts, m.families) if m.families else {}
    rows = []
    for name, part in m.parts.items():
        share = part * part
        if name in m.families:
            share = part * sums[m.families[name]][0 if part > 0.0 else 1]
        if correlations:
            for pair, r in correlations.items():
                if name in pair:
                    share += r * m.parts.get(pair[0], 0.0) * m.parts.get(pair[1], 0.0)
        rows.append((name, part, share / variance if variance > 0.0 else 0.0))
    rows.sort(key=lambda row: (-row[2], row[0]))
    return rows


@frozen("u", "dof", "k", "U", "coverage")
class Expanded:
    """u: combined standard uncertainty; dof: effective degrees of freedom, None = infinite; k; U = k*u;
    coverage: as asked for, "95 %" or "k = 2"."""


_COVERAGES = {}


def _coverage(text):
    """("p", 0.95) or ("k", 2.0) from "95 %" or "k = 2"; remembered."""
    if "c" + text not in _COVERAGES:
        bare = text.replace(" ", "")
        try:
            if bare.startswith("k="):
                known = ("k", parse_decimal(bare[2:]))
                good = 0.0 < known[1] < 100.0
            else:
                known = ("p", parse_decimal(bare[:-1]) / 100.0)
                good = bare.endswith("%") and 0.0 < known[1] < 1.0
        except FieldcheckError:
            good = False
        if not good:
            raise OutOfRange("coverage \"" + text + "\" is not understood", "", "write \"95 %\" or \"k = 2\"")
        _COVERAGES["c" + text] = known
    return _COVERAGES["c" + text]


def coverage_factor(dof, coverage="95 %"):
    """k for a coverage text: from Student's t with dof truncated downward (GUM G.4.1), or the k that is stated."""
    kind, number = _coverage(coverage)
    return number if kind == "k" else distributions.coverage_factor(dof, number)


def expanded(m, coverage="95 %", correlations=None):
    """Expanded uncertainty of a Measured or float.  coverage: "95 %" (Student's t) or "k = 2"."""
    u = combined(m, correlations)
    dof = effective_dof(m, correlations)
    k = coverage_factor(dof, coverage)
    return Expanded(u, dof, k, k * u, coverage)
