"""A value that carries its influences by name; arithmetic keeps the correlations between values.

First-order propagation of JCGM 100:2008 (GUM) 5.1.2 and 5.2.2.  A `Measured` (carrier.py) holds for each named
influence the signed contribution c_i*u_i to its value, so an influence that two values share (the gain of one
range of one meter) adds or cancels with its sign.  Floats and Measured mix freely.  `combined`, `effective_dof`,
`budget` and `expanded` (budgets.py) read the result; `mean_of_repeats` makes type A influences.

Families.  Accuracy specifications do not say how the counts of two readings on one range hang together, nor counts
and gain: they may be one offset or independent.  Influences of one `family` therefore have an unknown correlation
between 0 and 1, and the worse end is taken: contributions of one sign add (r = 1), those of opposite sign do
not cancel (r = 0).  The variance of a family is P*P + N*N, with P the sum of its positive and N of its negative
contributions.  A single reading then has u = (gain + counts)/sqrt(3); a ratio or difference on one range loses
the shared gain and keeps the counts of both readings.  (Own reading, house convention; checked in
tests/references/test_gum.py.)
"""

import math

from fieldcheck.engine import elementary
from fieldcheck.engine.budgets import (
    Expanded,
    budget,
    combined,
    coverage_factor,
    effective_dof,
    expanded,
)
from fieldcheck.engine.carrier import NOTHING, Measured, influence, linear, merged, scaled, value_of
from fieldcheck.engine.errors import OutOfRange

__all__ = [
    "REPEATS", "Expanded", "Measured", "acos", "asin", "atan", "budget", "combined", "correlation_of_repeats", "cos",
    "coverage_factor", "effective_dof", "exp", "expanded", "influence", "log", "log10", "maximum", "mean",
    "mean_of_repeats", "median", "minimum", "power", "sin", "spread", "sqrt", "standard_deviation", "through",
    "value_of",
]

_sqrt = math.sqrt

REPEATS = "repeats of "
"""Influences whose name starts so are type A: n = degrees of freedom + 1, u = s/sqrt(n)."""


# --- functions of floats and Measured alike; the derivative stands beside each --------------------------------------


def sqrt(x):
    """Square root; refuses negative values, and zero when it carries an uncertainty (OutOfRange)."""
    v = value_of(x)
    if not v >= 0.0:
        raise OutOfRange("square root of a negative value")
    root = _sqrt(v)
    if not isinstance(x, Measured):
        return root
    if root == 0.0:
        raise OutOfRange("the uncertainty of a square root at zero is not defined")
    return scaled(x, 0.5 / root, root)


def exp(x):
    """e to the x."""
    y = elementary.exp(value_of(x))
    return scaled(x, y, y) if isinstance(x, Measured) else y


def log(x):
    """Natural logarithm, x > 0."""
    v = value_of(x)
    y = elementary.log(v)
    return scaled(x, 1.0 / v, y) if isinstance(x, Measured) else y


def log10(x):
    """Logarithm to base ten, x > 0."""
    v = value_of(x)
    y = elementary.log10(v)
    return scaled(x, 0.4342944819032518 / v, y) if isinstance(x, Measured) else y


def power(x, y):
    """x to the y for x > 0."""
    a = value_of(x)
    b = value_of(y)
    result = elementary.power(a, b)
    by_x = isinstance(x, Measured)
    by_y = isinstance(y, Measured)
    if by_x and by_y:
        return linear(x, b * result / a, y, result * elementary.log(a), result)
    if by_x:
        return scaled(x, b * result / a, result)
    if by_y:
        return scaled(y, result * elementary.log(a), result)
    return result


def sin(x):
    """Sine, x in radian."""
    v = value_of(x)
    y = elementary.sin(v)
    return scaled(x, elementary.cos(v), y) if isinstance(x, Measured) else y


def cos(x):
    """Cosine, x in radian."""
    v = value_of(x)
    y = elementary.cos(v)
    return scaled(x, -elementary.sin(v), y) if isinstance(x, Measured) else y


def atan(x):
    """Arc tangent in radian."""
    v = value_of(x)
    y = elementary.atan(v)
    return scaled(x, 1.0 / (1.0 + v * v), y) if isinstance(x, Measured) else y


def _arc_slope(v):
    below = (1.0 - v) * (1.0 + v)
    if not below > 0.0:
        raise OutOfRange("the uncertainty of an arc sine or arc cosine at its end is not defined")
    return 1.0 / _sqrt(below)


def asin(x):
    """Arc sine in radian, -1 <= x <= 1 (inside, when x carries an uncertainty)."""
    v = value_of(x)
    y = elementary.asin(v)
    return scaled(x, _arc_slope(v), y) if isinstance(x, Measured) else y


def acos(x):
    """Arc cosine in radian, -1 <= x <= 1 (inside, when x carries an uncertainty)."""
    v = value_of(x)
    y = elementary.acos(v)
    return scaled(x, -_arc_slope(v), y) if isinstance(x, Measured) else y


# --- over lists -----------------------------------------------------------------------------------------------------


def _ordered(values):
    """The values by size; of equal ones the first stays first.  Refuses an empty list."""
    if len(values) == 0:
        raise OutOfRange("there is no reading to work with", "", "take at least one")
    return sorted(values, key=value_of)


def minimum(values):
    """The smallest of a list, with its own influences."""
    return _ordered(values)[0]


def maximum(values):
    """The largest of a list, with its own influences."""
    return _ordered(values)[-1]


def median(values):
    """The middle value; of an even number the mean of the two middle ones."""
    ordered = _ordered(values)
    half = len(ordered) // 2
    if len(ordered) & 1:
        return ordered[half]
    return (ordered[half - 1] + ordered[half]) * 0.5


def mean(values):
    """Arithmetic mean; no type A influence (that is `mean_of_repeats`).  The order does not matter."""
    total = 0.0
    for x in _ordered(values):
        total = total + x
    return total / float(len(values))


def spread(values):
    """Largest less smallest."""
    ordered = _ordered(values)
    return ordered[-1] - ordered[0]


def through(function, args):
    """function(*args) for an iterative function of floats, with numeric partial derivatives.

    Each influence moves all arguments together by its contributions, up and down, and contributes half the
    difference: GUM 5.1.3 NOTE 2.  args: list of floats and Measured; the result is a float when none is Measured.
    """
    centre = [value_of(a) for a in args]
    value = function(*centre)
    dofs = NOTHING
    families = NOTHING
    names = {}
    for a in args:
        if isinstance(a, Measured):
            dofs = merged(dofs, a.dofs)
            families = merged(families, a.families)
            for name in a.parts:
                names[name] = True
    if not names:
        return value
    parts = {}
    for name in names:
        moves = [a.parts.get(name, 0.0) if isinstance(a, Measured) else 0.0 for a in args]
        up = function(*[centre[i] + moves[i] for i in range(len(args))])
        down = function(*[centre[i] - moves[i] for i in range(len(args))])
        parts[name] = (up - down) * 0.5
    return Measured(value, parts, dofs, families)


# --- type A ---------------------------------------------------------------------------------------------------------


def _mean_and_deviations(values):
    total = 0.0
    for x in sorted(values):
        total += x
    centre = total / len(values)
    return centre, [x - centre for x in values]


def standard_deviation(values):
    """Experimental standard deviation of a list of at least two floats (GUM 4.2.2)."""
    squares = [d * d for d in _mean_and_deviations(values)[1]]
    total = 0.0
    for square in sorted(squares):
        total += square
    return _sqrt(total / (len(values) - 1))


def mean_of_repeats(values, name):
    """Mean of n repeated readings (floats) with the type A influence s/sqrt(n), n - 1 degrees of freedom (GUM 4.2).

    n = 1 gives the value without an influence.  The order of the readings does not matter.
    """
    n = len(values)
    if n == 0:
        raise OutOfRange("there is no reading to work with", "", "take at least one")
    if n == 1:
        return Measured(float(values[0]), {})
    centre = _mean_and_deviations(values)[0]
    return influence(centre, standard_deviation(values) / _sqrt(n), REPEATS + name, n - 1)


def correlation_of_repeats(first, second):
    """Correlation coefficient of the means of two quantities read n times together (GUM 5.2.3, equation 17)."""
    a = _mean_and_deviations(first)[1]
    b = _mean_and_deviations(second)[1]
    if len(a) != len(b) or len(a) < 2:
        raise OutOfRange("a correlation needs two equally long lists of at least two readings")
    ab = aa = bb = 0.0
    for i in range(len(a)):
        ab += a[i] * b[i]
        aa += a[i] * a[i]
        bb += b[i] * b[i]
    if aa == 0.0 or bb == 0.0:
        return 0.0
    return ab / _sqrt(aa * bb)
