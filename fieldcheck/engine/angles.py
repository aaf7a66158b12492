"""The circular functions of elementary.py (which names the methods and the rules), and what both modules share."""

import math

from fieldcheck.engine.errors import OutOfRange

sqrt = math.sqrt
_ldexp = math.ldexp

PI = 3.141592653589793
_HALF_PI = 1.5707963267948966
_HALF_PI_REST = 6.123233995736766e-17
_HALF_PI_A = _ldexp(6746518852.0, -32)      # pi / 2 in three pieces of 33 bits and the rest
_HALF_PI_B = _ldexp(4484108710.0, -66)
_HALF_PI_C = _ldexp(5127054048.0, -101)
_HALF_PI_D = 8.4784276603689e-32
_TWO_OVER_PI = 0.6366197723675814
_LARGEST = 1.7976931348623157e308
_UP = _ldexp(1.0, 100)


def refuse(name, x, allowed):
    """Raise OutOfRange for function `name`."""
    raise OutOfRange(name + " is not given for " + repr(x), name, "use " + allowed)


def product_rest(a, b, p):
    """a*b - p exactly, where p is the rounded product (Dekker; |a|, |b| < 2^995, no underflow)."""
    t = 134217729.0 * a
    ah = t - (t - a)
    al = a - ah
    t = 134217729.0 * b
    bh = t - (t - b)
    bl = b - bh
    return ((ah * bh - p) + ah * bl + al * bh) + al * bl


def nearest(x):
    """The whole number nearest to x, for |x| < 2^52."""
    return int(x + 0.5) if x >= 0 else int(x - 0.5)


def _sin_reduced(x, rest):
    z = x * x
    p = 2.7557316093198404e-06 + z * (-2.5051129896450185e-08 + z * 1.5917988979397432e-10)
    p = -0.16666666666666666 + z * (0.008333333333330936 + z * (-0.00019841269836740532 + z * p))
    v = z * x
    return x - ((0.5 * z * rest - rest) - v * p)


def _cos_reduced(x, rest):
    z = x * x
    p = -2.755731726587808e-07 + z * (2.087614504941318e-09 + z * -1.1382544645349108e-11)
    p = 0.041666666666666664 + z * (-0.0013888888888887389 + z * (2.48015872987544e-05 + z * p))
    half = 0.5 * z
    w = 1.0 - half
    return w + (((1.0 - w) - half) + (z * (z * p) - x * rest))


def _quarter_turns(name, x):
    """n, r, rest with x = n * pi/2 + r + rest and |r| <= pi/4."""
    if not -800000 <= x <= 800000:
        refuse(name, x, "an angle from -800000 to 800000 rad")
    if -0.785 < x < 0.785:
        return 0, float(x), 0.0
    n = nearest(x * _TWO_OVER_PI)
    a = x - n * _HALF_PI_A
    w = n * _HALF_PI_B
    b = a - w
    b_rest = (a - b) - w
    w = n * _HALF_PI_C
    c = b - w
    c_rest = (b - c) - w
    small = (b_rest + c_rest) - n * _HALF_PI_D
    r = c + small
    return n, r, small - (r - c)


def sin(x):
    """Sine of x in rad, for |x| <= 800000."""
    n, r, rest = _quarter_turns("sin", x)
    n = n & 3
    s = _cos_reduced(r, rest) if n & 1 else _sin_reduced(r, rest)
    return -s if n & 2 else s


def cos(x):
    """Cosine of x in rad, for |x| <= 800000."""
    n, r, rest = _quarter_turns("cos", x)
    n = (n + 1) & 3
    s = _cos_reduced(r, rest) if n & 1 else _sin_reduced(r, rest)
    return -s if n & 2 else s


def _atan_positive(x):
    """Reduced to |argument| <= 7/16 about 0, 1/2, 1, 3/2 and infinity."""
    if x < 0.4375:
        base = rest = 0.0
    elif x < 0.6875:
        base, rest, x = 0.4636476090008061, 2.2698777452961687e-17, (2.0 * x - 1.0) / (2.0 + x)
    elif x < 1.1875:
        base, rest, x = 0.7853981633974483, 3.061616997868383e-17, (x - 1.0) / (x + 1.0)
    elif x < 2.4375:
        base, rest, x = 0.982793723247329, 1.3903311031230998e-17, (x - 1.5) / (1.0 + 1.5 * x)
    else:
        base, rest, x = _HALF_PI, _HALF_PI_REST, -1.0 / x
    z = x * x
    p = -0.05033416515498231 + z * (0.03781160048461682 + z * -0.01753229599497268)
    p = 0.07692086204975024 + z * (-0.06663224869084483 + z * (0.058476124445213634 + z * p))
    p = -0.14285714283127662 + z * (0.11111110899049664 + z * (-0.0909090014058555 + z * p))
    p = -0.33333333333333326 + z * (0.19999999999987655 + z * p)
    return base + ((rest + x * (z * p)) + x)


def atan(x):
    """Angle in rad from -pi/2 to pi/2 whose tangent is x."""
    if not -_LARGEST <= x <= _LARGEST:
        refuse("atan", x, "a finite number")
    return -_atan_positive(-float(x)) if x < 0 else _atan_positive(float(x))


def atan2(y, x):
    """Angle in rad above -pi, up to pi, of the point (x, y); not given for the origin."""
    if not (-_LARGEST <= x <= _LARGEST and -_LARGEST <= y <= _LARGEST) or (x == 0 and y == 0):
        refuse("atan2", (y, x), "finite numbers that are not both zero")
    above = -float(y) if y < 0 else float(y)
    beside = -float(x) if x < 0 else float(x)
    if above == 0:
        angle = 0.0
    elif beside * _UP < above:
        angle = _HALF_PI
    else:
        angle = _atan_positive(above / beside)
    if x < 0:
        angle = PI - (angle - 2.0 * _HALF_PI_REST)
    return -angle if y < 0 else angle


def _asin_series(z):
    """(asin(s) / s - 1) for z = s^2 <= 1/4."""
    p = 0.017400879442694216 + z * (-0.014851887071247485 + z * 0.028757851367421747)
    p = 0.011479177415184902 + z * (0.010322814350185798 + z * (0.005457506718640282 + z * p))
    p = 0.02237217294214989 + z * (0.017352392720869973 + z * (0.013971212973552933 + z * p))
    p = 0.07499999999998433 + z * (0.04464285714635543 + z * (0.030381944138531247 + z * p))
    p = 0.16666666666666669 + z * p
    return z * p


def _root_pair(x):
    """asin(sqrt(x)) for 0 <= x <= 1/4 as a sum of two floats."""
    if x == 0:
        return 0.0, 0.0
    s = sqrt(x)
    q = s * s
    return s, ((x - q) - product_rest(s, s, q)) / (2.0 * s) + s * _asin_series(x)


def asin(x):
    """Angle in rad from -pi/2 to pi/2 whose sine is x, for |x| <= 1."""
    if not -1 <= x <= 1:
        refuse("asin", x, "a number from -1 to 1")
    if -0.5 < x < 0.5:
        return x + x * _asin_series(float(x) * x)
    s, rest = _root_pair(0.5 * (1.0 - (x if x > 0 else -x)))
    main = _HALF_PI - 2.0 * s
    lost = (_HALF_PI - main) - 2.0 * s
    angle = main + (lost + (_HALF_PI_REST - 2.0 * rest))
    return angle if x > 0 else -angle


def acos(x):
    """Angle in rad from 0 to pi whose cosine is x, for |x| <= 1."""
    if not -1 <= x <= 1:
        refuse("acos", x, "a number from -1 to 1")
    if -0.5 < x < 0.5:
        main = _HALF_PI - x
        return main + (((_HALF_PI - main) - x) + (_HALF_PI_REST - x * _asin_series(float(x) * x)))
    s, rest = _root_pair(0.5 * (1.0 - (x if x > 0 else -x)))
    if x > 0:
        return 2.0 * (s + rest)
    main = PI - 2.0 * s
    return main + (((PI - main) - 2.0 * s) + (2.0 * _HALF_PI_REST - 2.0 * rest))
