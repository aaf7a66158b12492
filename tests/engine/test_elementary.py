"""Elementary functions against mpmath 1.4 (170 bits): at most two units in the last place over the documented range.

Worst seen with the samples below and 9,000 more each: exp 0.79, expm1 1.25, log 0.73, log1p 1.00, log10 0.50,
power 0.81, sin 0.81, cos 0.69, atan 0.74, atan2 1.08, asin 0.58, acos 0.57, erf 0.88 ulp;
erfc 10.2 and lgamma 4.6 ulp (their promise is relative 1e-14, some 45 ulp).
"""

import math
import random

import mpmath
import pytest
from mpmath import mpf

from fieldcheck.engine import elementary
from fieldcheck.engine.errors import OutOfRange

N = 600


def _ulps(got, exact):
    if exact == 0:
        return 0.0 if got == 0 else math.inf
    return float(abs(mpf(got) - exact) / mpf(math.ulp(float(exact))))


def _worst(name, arguments):
    ours, theirs = getattr(elementary, name), getattr(mpmath, "loggamma" if name == "lgamma" else name)
    with mpmath.workprec(170):
        return max((_ulps(ours(*a), theirs(*[mpf(x) for x in a])), a) for a in arguments)


def _even(r, low, high):
    return [(r.uniform(low, high),) for _ in range(N)]


def _small_and_large(r, low, high):
    return [(10 ** r.uniform(low, high),) for _ in range(N)]


def _signed(r, arguments):
    return [(r.choice((-1, 1)) * x,) for (x,) in arguments]


def _around(r, centre):
    return [(centre + x,) for (x,) in _signed(r, _small_and_large(r, -15, -1))]


def _multiples_of_half_pi():
    return [(float(k * mpmath.pi / 2),) for k in (*range(1, 300), *range(1000, 509000, 1693))]


def _power_pairs(r):
    pairs = []
    while len(pairs) < 2 * N:
        x = r.choice((r.uniform(0.5, 2), 10 ** r.uniform(-300, 300), r.uniform(0.01, 100)))
        y = r.choice((r.uniform(-5, 5), r.uniform(-300, 300)))
        if abs(y * math.log(x)) < 708:
            pairs.append((x, y))
    return pairs


def _points(r):
    return [(y, x) for (y,), (x,) in zip(_even(r, -5, 5), _even(r, -5, 5), strict=True)] + [
        (y, x) for (y,), (x,) in zip(_signed(r, _small_and_large(r, -9, 9)), _signed(r, _small_and_large(r, -9, 9)),
                                     strict=True)]


SAMPLES = {
    "exp": lambda r: _even(r, -745, 709.78) + _even(r, -1, 1) + _signed(r, _small_and_large(r, -20, 0)),
    "expm1": lambda r: _even(r, -45, 709.78) + _even(r, -2, 2) + _signed(r, _small_and_large(r, -20, 1)),
    "log": lambda r: _small_and_large(r, -307, 308) + _even(r, 0.5, 2) + _around(r, 1) + [(5e-324,), (1e-310,)],
    "log1p": lambda r: _small_and_large(r, -20, 300) + _even(r, -0.9999, 2) + _around(r, 0)
    + [(x - 2,) for (x,) in _around(r, 1) if x > 1],
    "log10": lambda r: _small_and_large(r, -307, 308) + _even(r, 0.5, 2) + _around(r, 1),
    "power": _power_pairs,
    "sin": lambda r: _even(r, -800000, 800000) + _even(r, -7, 7) + _around(r, 0) + _multiples_of_half_pi(),
    "cos": lambda r: _even(r, -800000, 800000) + _even(r, -7, 7) + _around(r, 0) + _multiples_of_half_pi(),
    "atan": lambda r: _even(r, -5, 5) + _signed(r, _small_and_large(r, -20, 20)),
    "atan2": _points,
    "asin": lambda r: _even(r, -1, 1) + [(x - 1,) for (x,) in _around(r, 1)]
    + _signed(r, [(1 - 10 ** r.uniform(-15, -1),) for _ in range(N)]),
    "acos": lambda r: _even(r, -1, 1) + _signed(r, [(1 - 10 ** r.uniform(-15, -1),) for _ in range(N)]),
    "erf": lambda r: _even(r, -6.5, 6.5) + _even(r, -1.5, 1.5) + _around(r, 0),
}


@pytest.mark.parametrize("name", sorted(SAMPLES))
def test_within_two_units_in_the_last_place_of_mpmath(name):
    worst, at = _worst(name, SAMPLES[name](random.Random(name)))
    assert worst <= 2, at


def _worst_relative(ours, theirs, arguments):
    with mpmath.workprec(170):
        return max(float(abs(mpf(ours(x)) / theirs(mpf(x)) - 1)) for (x,) in arguments)


def test_erfc_keeps_fourteen_digits_down_to_the_smallest_normal_numbers():
    r = random.Random(11)
    arguments = _even(r, -6, 6) + _even(r, 0.3, 3.2) + _even(r, 3, 26.5)
    assert _worst_relative(elementary.erfc, mpmath.erfc, arguments) < 1e-14


def test_lgamma_keeps_fourteen_digits_also_near_its_zeros_at_one_and_two():
    r = random.Random(12)
    arguments = (_small_and_large(r, -20, 300) + _even(r, 0.01, 3) + _even(r, 2, 12)
                 + [(1 + x,) for (x,) in _signed(r, _small_and_large(r, -12, -1))]
                 + [(2 + x,) for (x,) in _signed(r, _small_and_large(r, -12, -1))])
    assert _worst_relative(elementary.lgamma, mpmath.loggamma, arguments) < 1e-14


def test_stirling_rest_is_what_stirlings_formula_leaves():
    r = random.Random(13)
    with mpmath.workprec(170):
        for (x,) in _even(r, 0.25, 12) + _small_and_large(r, 0, 6):
            exact = mpmath.loggamma(x) - ((mpf(x) - 0.5) * mpmath.log(x) - x + mpmath.log(2 * mpmath.pi) / 2)
            assert abs(elementary.stirling_rest(x) - exact) < 5e-15


def test_exact_cases_come_out_exact():
    assert [elementary.log10(10.0 ** k) for k in range(23)] == [float(k) for k in range(23)]
    assert [elementary.power(x, 3) for x in range(1, 60)] == [float(x ** 3) for x in range(1, 60)]
    assert elementary.exp(0) == elementary.cos(0) == elementary.power(-7.5, 0) == 1.0
    assert elementary.sin(0) == elementary.log(1) == elementary.erf(0) == elementary.atan2(0, 3) == 0.0
    assert elementary.lgamma(1) == elementary.lgamma(2) == 0.0
    assert elementary.acos(-1) == elementary.atan2(0, -3) == elementary.PI == math.pi
    assert elementary.asin(1) == elementary.atan2(1e300, 1e-300) == math.pi / 2


def test_powers_of_negative_numbers_take_whole_exponents_only():
    assert elementary.power(-2, 5) == -32.0
    assert elementary.power(-2, -2) == 0.25
    with pytest.raises(OutOfRange):
        elementary.power(-2, 0.5)


def test_results_below_the_smallest_number_are_zero():
    assert elementary.exp(-746) == elementary.exp(-1e300) == elementary.power(10, -330) == elementary.erfc(1e9) == 0.0


REFUSED = [("exp", (709.8,)), ("expm1", (710,)), ("log", (0,)), ("log", (-1,)), ("log10", (-0.0,)), ("log1p", (-1,)),
           ("power", (0, 0.0 - 1)), ("power", (10, 309)), ("sin", (800001,)), ("cos", (-1e9,)), ("asin", (1.0000001,)),
           ("acos", (-1.1,)), ("atan2", (0, 0)), ("lgamma", (0,)), ("lgamma", (-0.5,)), ("lgamma", (1e306,))]


@pytest.mark.parametrize("name, arguments", REFUSED)
def test_outside_the_documented_range_is_refused(name, arguments):
    with pytest.raises(OutOfRange) as caught:
        getattr(elementary, name)(*arguments)
    assert caught.value.where == name and caught.value.mend.startswith("use ")


@pytest.mark.parametrize("bad", [math.nan, math.inf, -math.inf])
@pytest.mark.parametrize("name", ["exp", "expm1", "log", "log1p", "log10", "sin", "cos", "atan", "asin", "acos", "erf",
                                  "erfc", "lgamma", "stirling_rest"])
def test_nan_and_infinity_are_refused_everywhere(name, bad):
    with pytest.raises(OutOfRange):
        getattr(elementary, name)(bad)


@pytest.mark.parametrize("name", ["power", "atan2"])
def test_nan_and_infinity_are_refused_as_either_argument(name):
    for arguments in ((math.nan, 1), (2, math.nan), (math.inf, 1), (2, -math.inf)):
        with pytest.raises(OutOfRange):
            getattr(elementary, name)(*arguments)
