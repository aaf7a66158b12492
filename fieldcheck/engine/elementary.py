"""Elementary functions that give the same bits on the phone and at the desk.

JavaScript engines and C libraries agree on + - * / and sqrt to the last bit and on nothing beyond, so everything here
is built from those, comparison, whole numbers, frexp and ldexp. Methods: Cody and Waite, Software Manual for the
Elementary Functions (1980), for the argument reductions; Dekker, Numer. Math. 18 (1971) 224, for exact products and
sums (log10, power); the Bernoulli series of x coth x (Abramowitz and Stegun 4.5.67) for exp; Shepherd and Laframboise,
Math. Comp. 36 (1981) 249, for erfc; Stirling's series (A&S 6.1.40) for lgamma. Polynomials are our own: interpolation
in Chebyshev points worked with 60 digits.

Every function takes finite numbers and returns a float. Each states its range and raises OutOfRange beyond it, for
nan and for the infinities. -0.0 counts as 0.0. Errors are against exact arithmetic, in units in the last place (ulp):
two at most, unless the function says otherwise.
"""

import math

from fieldcheck.engine.angles import PI as PI
from fieldcheck.engine.angles import acos as acos
from fieldcheck.engine.angles import asin as asin
from fieldcheck.engine.angles import atan as atan
from fieldcheck.engine.angles import atan2 as atan2
from fieldcheck.engine.angles import cos as cos
from fieldcheck.engine.angles import nearest, product_rest, refuse
from fieldcheck.engine.angles import sin as sin

sqrt = math.sqrt
_frexp = math.frexp
_ldexp = math.ldexp

LN2 = 0.6931471805599453
_LARGEST = 1.7976931348623157e308
_LN2_A = _ldexp(2977044471.0, -32)          # ln 2, first 32 bits: times any exponent it is exact
_LN2_B = 1.9082149292705877e-10
_INVERSE_LN2 = 1.4426950408889634
_INVERSE_LN10 = 0.4342944819032518
_INVERSE_LN10_REST = 1.098319650216765e-17
_HALF_LN_2PI = 0.9189385332046728
_UP = _ldexp(1.0, 100)
_DOWN = _ldexp(1.0, -100)


def _scaled(x, k):
    """x * 2^k with one rounding, for x near 1; also where the result is subnormal or 2^k too large."""
    if k > 1000:
        return _ldexp(x, k - 100) * _UP
    if k < -1000:
        return _ldexp(x, k + 100) * _DOWN
    return _ldexp(x, k)


def _expm1_reduced(hi, lo):
    """e^(hi - lo) - 1 for |hi - lo| <= 0.35, through r coth(r/2) = 2 + r^2/6 - r^4/360 + ..."""
    r = hi - lo
    t = r * r
    p = t * (0.16666666666666666 + t * (-0.002777777777777778 + t * (6.613756613756614e-05
        + t * (-1.6534391534391535e-06 + t * (4.17535139757362e-08 - t * 1.0568380277374987e-09)))))
    q = r - p
    return hi - (lo - r * q / (2.0 - q))


def exp(x):
    """e to the power x, for x <= 709.78. Below -745.14 the result is 0.0."""
    if not -_LARGEST <= x <= 709.78:
        refuse("exp", x, "a finite number, at most 709.78")
    if x < -745.14:
        return 0.0
    k = nearest(x * _INVERSE_LN2)
    return _scaled(1.0 + _expm1_reduced(x - k * _LN2_A, k * _LN2_B), k)


def expm1(x):
    """exp(x) - 1 without loss near zero, for x <= 709.78."""
    if not -_LARGEST <= x <= 709.78:
        refuse("expm1", x, "a finite number, at most 709.78")
    if x < -40.0:
        return -1.0
    if x > 40.0:
        return exp(x)
    k = nearest(x * _INVERSE_LN2)
    e = _expm1_reduced(x - k * _LN2_A, k * _LN2_B)
    return e if k == 0 else _ldexp(e, k) + (_ldexp(1.0, k) - 1.0)


def _mantissa(x):
    """m, k with x = m * 2^k and sqrt(1/2) <= m < sqrt(2), for x > 0."""
    k = 0
    if x < 1e-300:
        x = x * _UP
        k = -100
    m, e = _frexp(x)
    if m < 0.7071067811865476:
        return m * 2.0, k + e - 1
    return m, k + e


def _log_reduced(f, k):
    """ln(1 + f) + k ln 2 for sqrt(1/2) <= 1 + f < sqrt(2), through atanh(f / (2 + f))."""
    s = f / (2.0 + f)
    z = s * s
    p = 0.1818289243253687 + z * (0.15331611722055008 + z * 0.14617807153417325)
    p = 0.3999999999989889 + z * (0.28571428626253836 + z * (0.22222211089379496 + z * p))
    p = 0.666666666666667 + z * p
    half = 0.5 * f * f
    return k * _LN2_A - ((half - (s * (half + z * p) + k * _LN2_B)) - f)


def log(x):
    """Natural logarithm of x, for 0 < x."""
    if not 0 < x <= _LARGEST:
        refuse("log", x, "a finite number above zero")
    m, k = _mantissa(x)
    return _log_reduced(m - 1.0, k)


def log1p(x):
    """ln(1 + x) without loss near zero, for -1 < x."""
    if not -1 < x <= _LARGEST:
        refuse("log1p", x, "a finite number above -1")
    if -0.29 < x < 0.41:
        return _log_reduced(float(x), 0)
    u = 1.0 + x
    lost = x - (u - 1.0) if x < 1 else 1.0 - (u - x)
    m, k = _mantissa(u)
    return _log_reduced(m - 1.0, k) + lost / u


def _log_pair(x):
    """ln x as an unevaluated sum of two floats, to some 66 bits: the first two terms of the atanh series are pairs."""
    m, k = _mantissa(x)
    f = m - 1.0
    d = 2.0 + f
    s = f / d
    p = s * d
    s_rest = (((f - p) - product_rest(s, d, p)) - s * (f - (d - 2.0))) / d
    z = s * s
    z_rest = product_rest(s, s, z) + 2.0 * s * s_rest
    c = s * z
    c_rest = product_rest(s, z, c) + s * z_rest + s_rest * z
    t = c * 0.6666666666666666
    t_rest = product_rest(c, 0.6666666666666666, t) + c * 3.700743415417188e-17 + c_rest * 0.6666666666666666
    p = 0.1538557746330829 + z * (0.1328586883754184 + z * 0.1291471218397585)
    p = 0.2857142857133801 + z * (0.22222222271326808 + z * (0.1818180821092188 + z * p))
    p = 0.4000000000000003 + z * p
    base = k * _LN2_A
    first = base + 2.0 * s
    second = first + t
    rest = ((2.0 * s - (first - base)) + (t - (second - first))) + (
        2.0 * s_rest + t_rest + c * z * p + k * _LN2_B)
    high = second + rest
    return high, rest - (high - second)


def log10(x):
    """Logarithm of x to base 10, for 0 < x; whole for whole powers of ten."""
    if not 0 < x <= _LARGEST:
        refuse("log10", x, "a finite number above zero")
    h, rest = _log_pair(x)
    p = h * _INVERSE_LN10
    return p + (product_rest(h, _INVERSE_LN10, p) + h * _INVERSE_LN10_REST + rest * _INVERSE_LN10)


def power(x, y):
    """x to the power y, where x > 0, or x = 0 and y > 0, or x < 0 and y whole; the result below 1.79e308.

    Results under 2^-1075 are 0.0.
    """
    x = float(x)
    y = float(y)
    if not (-_LARGEST <= x <= _LARGEST and -_LARGEST <= y <= _LARGEST):
        refuse("power", (x, y), "finite numbers")
    if y == 0 or x == 1:
        return 1.0
    if x == 0:
        return 0.0 if y > 0 else refuse("power", (x, y), "a base other than zero, or an exponent above zero")
    odd = False
    if x < 0:
        if not -9007199254740992.0 <= y <= 9007199254740992.0 or float(int(y)) != y:
            refuse("power", (x, y), "a base above zero, or a whole exponent")
        odd = int(y) & 1 == 1
        x = -x
    h, rest = _log_pair(x)
    p = y * h
    if not p <= 709.78:
        refuse("power", (x, y), "numbers with a result below 1.79e308")
    if p < -745.14:
        return 0.0
    k = nearest(p * _INVERSE_LN2)
    low = k * _LN2_B - (product_rest(y, h, p) + y * rest)
    result = _scaled(1.0 + _expm1_reduced(p - k * _LN2_A, low), k)
    return -result if odd else result


def _erfc_tail(x):
    """erfc for x >= 0.84: exp(-x^2) / x times a smooth factor; x^2 is split so that its large part is exact."""
    if x > 27.3:
        return 0.0
    if x < 3.0:
        t = (x - 1.5) / (x + 1.5)
        p = -6.399494555004844e-05 + t * (2.3672886518403466e-05 + t * 3.595293485113362e-05)
        p = 0.0004189743830496086 + t * (-0.0001514091673627972 + t * (-0.0001920375180943088 + t * p))
        p = -0.005135845606462694 + t * (0.00048077896383272366 + t * (0.001328018041430794 + t * p))
        p = 0.06169508794374202 + t * (0.019824285860713733 + t * (-0.00879058631611744 + t * p))
        p = 0.48237812468147623 + t * (0.22845311956643244 + t * (-0.21611410197764655 + t * p))
    else:
        t = 1.0 / (x * x)
        p = 2809936.0512386872 + t * (-6285305.046794349 + t * 6598153.823234615)
        p = -27044.63483608162 + t * (163361.85388227258 + t * (-794639.2010759226 + t * p))
        p = 91.21961416620138 + t * (-579.1766154810505 + t * (3983.8454603332807 + t * p))
        p = -1.0578547206801627 + t * (3.7024000075048242 + t * (-16.653646148733753 + t * p))
        p = 0.5641895835477502 + t * (-0.2820947917661048 + t * (0.4231421842147133 + t * p))
    w = 4294967297.0 * x
    h = w - (w - x)
    return exp(-h * h) * (exp((h - x) * (h + x)) * p / x)


def erf(x):
    """Error function of x."""
    if not -_LARGEST <= x <= _LARGEST:
        refuse("erf", x, "a finite number")
    x = float(x)
    if -0.84375 < x < 0.84375:
        z = x * x
        p = 1.6399123262977372e-06 + z * (-1.569711557100414e-07 + z * 1.0675693706713943e-08)
        p = -0.0008548323506677763 + z * (0.00012055190337021296 + z * (-1.4921921653420798e-05 + z * p))
        p = 0.11283791670932594 + z * (-0.026866170640255645 + z * (0.00522397757126982 + z * p))
        p = 0.12837916709551256 + z * (-0.3761263890318335 + z * p)
        return x + x * p
    far = 1.0 - _erfc_tail(x if x > 0 else -x)
    return far if x > 0 else -far


def erfc(x):
    """1 - erf(x) without loss for large x. Relative error below 1e-14 up to x = 26.5; beyond, results are subnormal."""
    if not -_LARGEST <= x <= _LARGEST:
        refuse("erfc", x, "a finite number")
    if x >= 0.84375:
        return _erfc_tail(float(x))
    if x <= -0.84375:
        return 2.0 - _erfc_tail(-float(x))
    return 1.0 - erf(x)


def stirling_rest(x):
    """lgamma(x) - ((x - 1/2) ln x - x + ln(2 pi)/2), for 0 < x <= 1e305; absolute error below 5e-15 from x = 1/4 on."""
    if not 0 < x <= 1e305:
        refuse("stirling_rest", x, "a number above zero, at most 1e305")
    if x < 8:
        return lgamma(x) - (((x - 0.5) * log(x) - x) + _HALF_LN_2PI)
    y = 1.0 / x
    z = y * y
    return y * (0.08333333333333333 + z * (-0.002777777777777778 + z * (0.0007936507936507937
        + z * (-0.0005952380952380953 + z * (0.0008417508417508417 + z * (-0.0019175269175269176
        + z * 0.00641025641025641))))))


def lgamma(x):
    """Natural logarithm of the gamma function, for 0 < x <= 1e305. Relative error below 1e-14."""
    if not 0 < x <= 1e305:
        refuse("lgamma", x, "a number above zero, at most 1e305")
    x = float(x)
    if x >= 8:
        return (x - 0.5) * (log(x) - 1.0) + (_HALF_LN_2PI - 0.5 + stirling_rest(x))
    product = 1.0
    while x > 2.5:
        x = x - 1.0
        product = product * x
    d = x - 2.0 if x >= 1.5 else (x - 1.0 if x >= 0.5 else x)
    p = 9.242852235850117e-07 + d * (-5.811277771255503e-07 + d * 2.747538994573478e-07)
    p = -9.456288515184522e-06 + d * (4.3828545379430345e-06 + d * (-1.974310688623483e-06 + d * p))
    p = 9.945761692155938e-05 + d * (-4.4923727564231406e-05 + d * (2.0506019701844112e-05 + d * p))
    p = -0.0011927539009983087 + d * (0.0005096695196526681 + d * (-0.000223154977462929 + d * p))
    p = 0.02058080842778338 + d * (-0.007385551028935545 + d * (0.002890510330865901 + d * p))
    p = 0.42278433509846713 + d * (0.3224670334241132 + d * (-0.06735230105319563 + d * p))
    kernel = d * p
    if x >= 1.5:
        return kernel if product == 1 else kernel + log(product)
    return kernel - log1p(d) if x >= 0.5 else kernel - log1p(d) - log(x)
