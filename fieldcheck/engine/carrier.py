"""The carrier of a measured value: arithmetic on named influences (GUM 5.1.3).  What it means: measured.py."""

import math

from fieldcheck.engine.errors import OutOfRange

_isfinite = math.isfinite

NOTHING = {}       # shared by all values without finite degrees of freedom or families; never written to


class Measured:
    """A value with named influences.

    value: float, SI.  parts: {influence name: signed contribution c_i*u_i, same unit as value}.
    dofs: {influence name: degrees of freedom} for those that have finitely many.
    families: {influence name: family} (see measured.py).  Not to be changed once made.
    Comparisons are those of `value`.
    """

    __slots__ = ("value", "parts", "dofs", "families")

    def __init__(self, value, parts, dofs=NOTHING, families=NOTHING):
        self.value = value
        self.parts = parts
        self.dofs = dofs
        self.families = families

    def __repr__(self):
        return "Measured(" + repr(self.value) + ", " + repr(self.parts) + ")"

    def __add__(self, other):
        if isinstance(other, Measured):
            return linear(self, 1.0, other, 1.0, self.value + other.value)
        return Measured(self.value + other, self.parts, self.dofs, self.families)

    __radd__ = __add__

    def __sub__(self, other):
        if isinstance(other, Measured):
            return linear(self, 1.0, other, -1.0, self.value - other.value)
        return Measured(self.value - other, self.parts, self.dofs, self.families)

    def __rsub__(self, other):
        return scaled(self, -1.0, other - self.value)

    def __mul__(self, other):
        if isinstance(other, Measured):
            return linear(self, other.value, other, self.value, self.value * other.value)
        return scaled(self, other, self.value * other)

    __rmul__ = __mul__

    def __truediv__(self, other):
        if isinstance(other, Measured):
            below = other.value
            _refuse_zero(below)
            quotient = self.value / below
            return linear(self, 1.0 / below, other, -quotient / below, quotient)
        _refuse_zero(other)
        return scaled(self, 1.0 / other, self.value / other)

    def __rtruediv__(self, other):
        below = self.value
        _refuse_zero(below)
        quotient = other / below
        return scaled(self, -quotient / below, quotient)

    def __neg__(self):
        return scaled(self, -1.0, -self.value)

    def __pos__(self):
        return self

    def __abs__(self):
        return -self if self.value < 0.0 else self

    def __eq__(self, other):
        return self.value == value_of(other)

    def __ne__(self, other):
        return self.value != value_of(other)

    def __lt__(self, other):
        return self.value < value_of(other)

    def __le__(self, other):
        return self.value <= value_of(other)

    def __gt__(self, other):
        return self.value > value_of(other)

    def __ge__(self, other):
        return self.value >= value_of(other)

    __hash__ = None


def _refuse_zero(below):
    if below == 0.0:
        raise OutOfRange("division by zero", "", "a reading below the line of a formula is zero: check it")


def merged(a, b):
    """Both dicts as one; the usual case, one empty or both the same, copies nothing."""
    if a is b or not b:
        return a
    if not a:
        return b
    both = dict(a)
    both.update(b)
    return both


def scaled(a, factor, value):
    """`value` with the partial derivative `factor` to a."""
    parts = {}
    for name, part in a.parts.items():
        parts[name] = part * factor
    return Measured(value, parts, a.dofs, a.families)


def linear(a, by_a, b, by_b, value):
    """`value` with the partial derivatives by_a and by_b (GUM 5.1.3)."""
    parts = {}
    for name, part in a.parts.items():
        parts[name] = part * by_a
    for name, part in b.parts.items():
        if name in parts:
            parts[name] = parts[name] + part * by_b
        else:
            parts[name] = part * by_b
    return Measured(value, parts, merged(a.dofs, b.dofs), merged(a.families, b.families))


def influence(value, u, name, dof=None, family=None):
    """One input quantity: `value` with standard uncertainty u >= 0 under the influence `name`.

    A name that a person typed needs a prefix of the house: names are dict keys, and a few texts are none on the phone.
    dof: degrees of freedom >= 1, None = infinite.  family: see measured.py.
    Raises OutOfRange for a value or u that is not finite, u < 0, or dof < 1.
    """
    value = float(value)
    u = float(u)
    if not (_isfinite(value) and _isfinite(u) and u >= 0.0):
        raise OutOfRange("influence \"" + name + "\" needs a finite value and an uncertainty of zero or more")
    if dof is not None and not dof >= 1:
        raise OutOfRange("influence \"" + name + "\" needs at least one degree of freedom")
    return Measured(value, {name: u}, NOTHING if dof is None else {name: dof},
                    NOTHING if family is None else {name: family})


def value_of(x):
    """The bare float of a float or a Measured."""
    return x.value if isinstance(x, Measured) else x
