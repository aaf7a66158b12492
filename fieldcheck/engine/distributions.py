"""Normal, Student t and beta distributions, and what a count of misses proves.

The incomplete beta function is the continued fraction DLMF 8.17.22 by the modified Lentz method (DLMF 3.10), its
leading factor in Loader's form (C. Loader, Fast and Accurate Computation of Binomial Probabilities, 2000), which keeps
its digits for large parameters. Quantiles start from a published approximation and are refined by Halley steps:
Abramowitz and Stegun 26.2.23 (normal), G. W. Hill, Algorithm 396, Comm. ACM 13 (1970) 619 (Student),
A&S 26.5.22 (beta). Relative error about 1e-13 unless said otherwise. Bad arguments raise OutOfRange.
"""

import math

from fieldcheck.engine import elementary
from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.figures import round12

sqrt = math.sqrt
exp = elementary.exp
log = elementary.log
log1p = elementary.log1p
_INVERSE_SQRT2 = 0.7071067811865476
_INVERSE_SQRT_2PI = 0.3989422804014327
_TWO_PI = 6.283185307179586
_LARGEST = 1.7976931348623157e308
_NORMAL_FROM = 1000.0     # degrees of freedom above which Hill's expansion about the normal law is right to 14 digits
_CACHE_AT_MOST = 500
_cache = {}          # type: dict[str, float]


def _refuse(what, mend):
    raise OutOfRange(what, "", mend)


def _is_probability(p):
    if not 0 < p < 1:
        _refuse("a probability of " + repr(p) + " is not between 0 and 1", "use a value above 0 and below 1")


def _is_infinite(nu):
    if nu is None or nu > 1e300:
        return True
    if not nu >= 1:
        _refuse("degrees of freedom of " + repr(nu) + " are below 1", "use 1 or more, or none for infinitely many")
    return False


def normal_density(z):
    """Density of the standard normal law at z."""
    z = float(z)
    return 0.0 if z > 40 or z < -40 else _INVERSE_SQRT_2PI * exp(-0.5 * z * z)


def normal_cdf(z):
    """Probability that a standard normal variable is at most z (finite). Relative error below 1e-12 down to z = -37."""
    return 0.5 * elementary.erfc(-z * _INVERSE_SQRT2)


def normal_quantile(p):
    """z with normal_cdf(z) = p, for 1e-300 <= p < 1."""
    p = float(p)
    if not 1e-300 <= p < 1:
        _refuse("the normal quantile is not given for " + repr(p), "use a probability from 1e-300 to below 1")
    if p == 0.5:
        return 0.0
    q = p if p < 0.5 else 1.0 - p
    t = sqrt(-2.0 * log(q))
    z = t - (2.515517 + t * (0.802853 + t * 0.010328)) / (1.0 + t * (1.432788 + t * (0.189269 + t * 0.001308)))
    for _ in range(2):
        if q > 0.25:
            excess = (0.5 - q) - 0.5 * elementary.erf(z * _INVERSE_SQRT2)
        else:
            excess = 0.5 * elementary.erfc(z * _INVERSE_SQRT2) - q
        step = excess / normal_density(z)
        z = z + step / (1.0 - 0.5 * z * step)
    return z if p > 0.5 else -z


def _beta_factor(a, b, x, y):
    """x^a y^b / B(a, b), for x + y = 1 given separately."""
    n = a + b
    d = n * x - a if x <= y else b - n * y
    part = -a * log1p(d / a) if -0.5 * a < d < 0.5 * a else a * log(a / (n * x))
    part = part - b * log1p(-d / b) if -0.5 * b < d < 0.5 * b else part + b * log(b / (n * y))
    rest = elementary.stirling_rest
    power = rest(n) - rest(a) - rest(b) - part
    return 0.0 if power < -740 else sqrt(a / n * b / _TWO_PI) * exp(power)


def _beta_fraction(a, b, x):
    """Continued fraction of I_x(a, b), for x < (a + 1) / (a + b + 2), where it converges fast."""
    n = a + b
    c = 1.0
    d = 1.0 / (1.0 - n * x / (a + 1.0))
    h = d
    m = 0.0
    for _ in range(20000):
        m = m + 1.0
        a2 = a + m + m
        t = m * (b - m) * x / ((a2 - 1.0) * a2)
        d = 1.0 / (1.0 + t * d)
        c = 1.0 + t / c
        h = h * (d * c)
        t = -(a + m) * (n + m) * x / (a2 * (a2 + 1.0))
        d = 1.0 / (1.0 + t * d)
        c = 1.0 + t / c
        change = d * c
        h = h * change
        if -2e-16 < change - 1.0 < 2e-16:
            return h
    return _refuse("the beta distribution does not converge for " + repr((a, b)), "use smaller parameters")


def _beta_tails(a, b, x, y):
    """I_x(a, b) and its complement, and x^a y^b / B(a, b)."""
    factor = _beta_factor(a, b, x, y)
    if x * (a + b + 2.0) < a + 1.0:
        lower = factor * _beta_fraction(a, b, x) / a
        return lower, 1.0 - lower, factor
    upper = factor * _beta_fraction(b, a, y) / b
    return 1.0 - upper, upper, factor


def beta_cdf(x, a, b):
    """Regularised incomplete beta function I_x(a, b), for 0 <= x <= 1 and 1/4 <= a, b <= 1e7."""
    _are_beta_parameters(a, b)
    if not 0 <= x <= 1:
        _refuse("the beta distribution is not given at " + repr(x), "use a value from 0 to 1")
    if x == 0 or x == 1:
        return float(x)
    return _beta_tails(float(a), float(b), float(x), 1.0 - x)[0]


def _are_beta_parameters(a, b):
    if not (0.25 <= a <= 1e7 and 0.25 <= b <= 1e7):
        _refuse("beta parameters " + repr((a, b)) + " are not given", "use values from 1/4 to 1e7")


def _beta_start(p, a, b):
    """A&S 26.5.22, kept inside (0, 1)."""
    if a <= 1 or b <= 1:
        return a / (a + b)
    z = -normal_quantile(p)
    g = (z * z - 3.0) / 6.0
    s, t = 1.0 / (2.0 * a - 1.0), 1.0 / (2.0 * b - 1.0)
    h = 2.0 / (s + t)
    w = z * sqrt(h + g if h + g > 0 else h) / h - (t - s) * (g + 5.0 / 6.0 - 2.0 / (3.0 * h))
    w = 2.0 * (30.0 if w > 30 else (-30.0 if w < -30 else w))
    return a / (a + b * exp(w))


def beta_quantile(p, a, b):
    """x with beta_cdf(x, a, b) = p, for 1e-12 <= p <= 1 - 1e-12 and 1 <= a, b <= 1e7.

    Error below 1e-12 of the result, or 1e-16.
    """
    if not 1e-12 <= p <= 1 - 1e-12:
        _refuse("the beta quantile is not given for " + repr(p), "use a probability from 1e-12 to 1 - 1e-12")
    if not (1 <= a <= 1e7 and 1 <= b <= 1e7):
        _refuse("beta parameters " + repr((a, b)) + " are not given", "use values from 1 to 1e7")
    p, a, b = float(p), float(a), float(b)
    if a == 1:
        return -elementary.expm1(log1p(-p) / b)
    if b == 1:
        return exp(log(p) / a)
    x = _beta_start(p, a, b)
    if x <= 0.5:
        return _beta_quantile(p, 1.0 - p, a, b, x)
    return 1.0 - _beta_quantile(1.0 - p, p, b, a, _beta_start(1.0 - p, b, a))


def _beta_quantile(p, q, a, b, x):
    """Value with I(a, b) = p = 1 - q from the start x: not near 1, so that 1 - x keeps its digits."""
    low, high = 0.0, 1.0
    for _ in range(200):
        lower, upper, factor = _beta_tails(a, b, x, 1.0 - x)
        excess = lower - p if p <= 0.5 else q - upper
        if excess > 0:
            high = x
        else:
            low = x
        slope = factor / (x * (1.0 - x))
        step = excess / slope if slope > 0 else 2.0
        bend = 1.0 - 0.5 * step * ((a - 1.0) / x - (b - 1.0) / (1.0 - x))
        new = x - step / (bend if bend > 0.5 else 0.5)
        near = 1e-8 * x * (1.0 - x)
        if -near < step < near:                    # the step after this one would be below 1e-16
            return new
        x = new if low < new < high else 0.5 * (low + high)
    return _refuse("the beta quantile does not converge for " + repr((p, a, b)), "use a probability nearer 1/2")


def student_cdf(t, nu):
    """Probability that Student's t with nu >= 1 degrees of freedom (real; None for infinitely many) is at most t."""
    t = float(t)
    if not -_LARGEST <= t <= _LARGEST:
        _refuse("Student's distribution is not given at " + repr(t), "use a finite number")
    if _is_infinite(nu):
        return normal_cdf(t)
    centre, tail = _student_parts(t if t > 0 else -t, float(nu))[:2]
    if t < 0:
        return tail
    return 0.5 + centre if centre < 0.25 else 1.0 - tail


def _student_parts(t, nu):
    """P(0 < T < t), P(T > t) and the density at t, for t >= 0."""
    if nu > _NORMAL_FROM:
        return _student_parts_near_normal(t, nu)
    if t > 1e150:
        return 0.5, 0.0, 0.0
    square = t * t
    x, y = nu / (nu + square), square / (nu + square)
    if y == 0:
        return 0.0, 0.5, 0.0
    tail, centre, factor = _beta_tails(0.5 * nu, 0.5, x, y)
    return 0.5 * centre, 0.5 * tail, factor / t


def _student_parts_near_normal(t, nu):
    """Hill, Algorithm 395, Comm. ACM 13 (1970) 617: the normal deviate that has the same tail."""
    w = log1p(t * t / nu)
    a = nu - 0.5
    b = 48.0 * a * a
    s = w * a
    u = (((((-0.4 * s - 3.3) * s - 24.0) * s - 85.5) / (0.8 * s * s + 100.0 + b) + s + 3.0) / b + 1.0) * sqrt(s)
    centre = 0.5 * elementary.erf(u * _INVERSE_SQRT2)
    part = 0.25 / nu
    density = 0.0 if s > 1400 else _INVERSE_SQRT_2PI * (1.0 - part + 0.5 * part * part) * exp(-0.5 * (nu + 1.0) * w)
    return centre, 0.5 * elementary.erfc(u * _INVERSE_SQRT2), density


def _student_start(q, nu):
    """Hill's Algorithm 396 for the deviate with P(T > t) = q."""
    p = 2.0 * q
    a = 1.0 / (nu - 0.5)
    b = 48.0 / (a * a)
    c = ((20700.0 * a / b - 98.0) * a - 16.0) * a + 96.36
    d = ((94.5 / (b + c) - 3.0) / b + 1.0) * sqrt(a * 0.5 * elementary.PI) * nu
    y = elementary.power(d * p, 2.0 / nu)
    if y > 0.05 + a:
        x = -normal_quantile(q)
        y = x * x
        if nu < 5:
            c = c + 0.3 * (nu - 4.5) * (x + 0.6)
        c = (((0.05 * d * x - 5.0) * x - 7.0) * x - 2.0) * x + b + c
        y = (((((0.4 * y + 6.3) * y + 36.0) * y + 94.5) / c - y - 3.0) / b + 1.0) * x
        y = elementary.expm1(a * y * y)
    else:
        y = ((1.0 / (((nu + 6.0) / (nu * y) - 0.089 * d - 0.822) * (nu + 2.0) * 3.0) + 0.5 / (nu + 4.0)) * y - 1.0) * (
            nu + 1.0) / (nu + 2.0) + 1.0 / y
    return sqrt(nu * y)


def student_quantile(p, nu):
    """t with student_cdf(t, nu) = p, for 1e-12 <= p <= 1 - 1e-12 and nu >= 1 (real; None for infinitely many).

    Relative error below 1e-12. Results are kept, so that asking again costs nothing.
    """
    p = float(p)
    if not 1e-12 <= p <= 1 - 1e-12:
        _refuse("Student's quantile is not given for " + repr(p), "use a probability from 1e-12 to 1 - 1e-12")
    if _is_infinite(nu):
        return normal_quantile(p)
    if p == 0.5:
        return 0.0
    key = "t " + repr(p) + " " + repr(float(nu))
    t = _cache.get(key)
    if t is None:
        t = _student_quantile(p if p < 0.5 else 1.0 - p, float(nu))
        t = t if p > 0.5 else -t
        if len(_cache) >= _CACHE_AT_MOST:
            _cache.clear()
        _cache[key] = t
    return t


def _student_quantile(q, nu):
    """t > 0 with P(T > t) = q, for q < 1/2."""
    t = _student_start(q, nu)
    for _ in range(30):
        centre, tail, density = _student_parts(t, nu)
        excess = tail - q if q <= 0.25 else (0.5 - q) - centre
        step = excess / density
        bend = 1.0 - 0.5 * step * (nu + 1.0) * t / (nu + t * t)
        change = step / (bend if bend > 0.5 else 0.5)
        new = t + change
        t = new if new > 0 else 0.5 * t
        if -1e-6 * t < change < 1e-6 * t:          # the step after this one would be below 1e-17
            return t
    return _refuse("Student's quantile does not converge for " + repr((q, nu)), "use a probability nearer 1/2")


def coverage_factor(nu, p=0.95):
    """k of a two-sided interval with probability p: Student's t at (1 + p) / 2.

    nu: effective degrees of freedom, truncated downward to a whole number (GUM G.4.1) after rounding to 12 digits, so
    that 15.999999999999998 counts as 16; None for infinitely many.
    """
    _is_probability(p)
    if nu is not None and nu <= 1e300:
        nu = round12(nu)
        _is_infinite(nu)
        nu = float(int(nu)) if nu < 1e15 else None
    return student_quantile(0.5 + 0.5 * p, nu)


def _is_count(x, n):
    if not (int(x) == x and int(n) == n and 0 <= x <= n and 1 <= n <= 10000000):
        _refuse(repr(x) + " of " + repr(n) + " is no count", "use whole numbers, 0 <= misses <= tries <= 10000000")


def clopper_pearson(x, n, alpha=0.05):
    """(low, high): exact two-sided bounds at 1 - alpha on the proportion, x of n seen (Clopper and Pearson 1934)."""
    _is_count(x, n)
    _is_probability(alpha)
    low = 0.0 if x == 0 else beta_quantile(0.5 * alpha, x, n - x + 1)
    high = 1.0 if x == n else beta_quantile(1.0 - 0.5 * alpha, x + 1, n - x)
    return low, high


def upper_bound(x, n, confidence=0.95):
    """Exact one-sided upper bound on the proportion at `confidence`, x of n seen."""
    _is_count(x, n)
    _is_probability(confidence)
    return 1.0 if x == n else beta_quantile(confidence, x + 1, n - x)


def clean_pulses_needed(p, confidence=0.95):
    """Least whole n for which n tries without a miss show, at `confidence`, a miss rate of at most p."""
    _is_probability(p)
    _is_probability(confidence)
    exact = round12(log1p(-confidence) / log1p(-p))
    if exact > 1e15:
        _refuse("a miss rate of " + repr(p) + " would need more than 1e15 tries", "use a larger rate")
    n = int(exact)
    return n if n == exact else n + 1


def wilson(x, n, confidence=0.95):
    """(low, high): two-sided score interval on the proportion, x of n seen (E. B. Wilson 1927)."""
    _is_count(x, n)
    _is_probability(confidence)
    z = normal_quantile(0.5 + 0.5 * confidence)
    square = z * z
    centre = (x + 0.5 * square) / (n + square)
    half = z * sqrt(x * (n - x) / float(n) + 0.25 * square) / (n + square)
    return (0.0 if x == 0 else centre - half), (1.0 if x == n else centre + half)
