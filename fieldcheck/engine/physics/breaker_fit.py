"""Time constant and limiting current of a breaker from its trips: least squares on ln t over (ln tau, ln i_limit).

The model is that of breakers.py, cold trips having preload 0. Two trips are solved exactly; from three on the
scatter of the trip times about the curve is a type A influence with n - 2 degrees of freedom. The uncertainties
of the readings propagate exactly to first order: the answer is refined by one Newton step in measured
arithmetic, whose derivative at the solution is that of the solution (implicit function theorem).
Amperes and seconds; floats or measured values. Source: checks 7.3 (DERIVED).
"""

from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.frozen import frozen
from fieldcheck.engine.measured import exp, influence, log, sqrt, value_of

GRID = 20
ENDS_LOW = (0.0001, 0.001, 0.01)     # shares of the span beside the even grid, where valleys are narrow
ENDS_HIGH = (0.99, 0.999, 0.999999)
STEPS = 100
ALIKE = 4.0     # a sum of squares within four times the least, and
EXACT = 1e-16   # two that are zero but for rounding, cannot be told apart (PRACTICE)
SCATTER = "scatter of the trip times about the curve"


@frozen("tau", "i_limit", "scatter", "dof", "u_ln_tau", "u_ln_limit", "correlation")
class BreakerFit:
    """tau (s) and i_limit (A) with the readings' uncertainty only; scatter: standard deviation of ln t about the
    curve, or None for two trips; dof: n - 2; u_ln_tau, u_ln_limit, correlation: what the scatter gives them."""


def _check(currents, times, preloads):
    n = len(currents)
    if n < 2 or len(times) != n or len(preloads) != n:
        raise OutOfRange("a fit needs two or more trips, each with its current and its time", "currents")
    for k in range(n):
        if not 0.0 <= value_of(preloads[k]) < value_of(currents[k]):
            raise OutOfRange("each preload must lie below the current of its trip", "preloads")
        if value_of(times[k]) <= 0.0:
            raise OutOfRange("each trip time must be above zero", "times")


def _bracket(currents, preloads):
    """The limiting current lies above every preload and below every tripping current."""
    low = max([value_of(p) for p in preloads])
    high = min([value_of(i) for i in currents])
    if not low < high:
        raise OutOfRange("a preload is no smaller than the smallest tripping current", "preloads")
    return low, high


def _residuals(limit, squares, preload_squares, log_times):
    """ln t less ln of the model's shape, and the shape's slope d ln(shape)/d ln(limit), one of each a trip."""
    limit_square = limit * limit
    rests, slopes = [], []
    for k in range(len(squares)):
        left = squares[k] - limit_square
        shape = log((squares[k] - preload_squares[k]) / left)
        rests.append(log_times[k] - log(shape))
        slopes.append(2.0 * limit_square / (left * shape))
    return rests, slopes


def _mean(values):
    total = values[0]
    for k in range(1, len(values)):
        total = total + values[k]
    return total / float(len(values))


def _gradient(limit, data):
    """Half the derivative of the sum of squares by -ln(limit), time constant eliminated; zero at the fit."""
    rests, slopes = _residuals(limit, data[0], data[1], data[2])
    middle = _mean(rests)
    total = 0.0
    for k in range(len(rests)):
        total = total + slopes[k] * (rests[k] - middle)
    return total


def _sum_of_squares(limit, data):
    rests = _residuals(limit, data[0], data[1], data[2])[0]
    middle = _mean(rests)
    total = 0.0
    for rest in rests:
        total = total + (rest - middle) * (rest - middle)
    return total


def _solve(data, low, high):
    """Limiting current of least squares: a grid finds the valleys, `_root` the floor of each, the deepest wins.

    Hot and cold trips together may have two valleys. A second nearly as deep is refused: no answer would be right.
    """
    span = high - low
    grid = [low + span * share for share in ENDS_LOW]
    for k in range(1, GRID + 1):
        grid.append(low + span * (k / (GRID + 1.0)))
    for share in ENDS_HIGH:
        grid.append(low + span * share)
    sums = [_sum_of_squares(limit, data) for limit in grid]
    floors = []
    for k in range(1, len(grid) - 1):
        if sums[k] < sums[k - 1] and sums[k] <= sums[k + 1]:
            limit = _root(data, grid[k - 1], grid[k + 1])
            floors.append((_sum_of_squares(limit, data), limit))
    floors.sort()
    if not floors or min(sums[0], sums[-1]) < floors[0][0]:
        raise OutOfRange("the trips do not settle a limiting current", "times",
                         "add a trip at a current nearer to the rated one, and check the readings")
    if len(floors) > 1 and floors[1][0] <= ALIKE * floors[0][0] + EXACT:
        raise OutOfRange("two limiting currents fit the trips alike", "currents",
                         "add a cold trip at a current nearer to the rated one")
    return floors[0][1]


def _root(data, below, above):
    """Where the gradient is zero between two limits, by the Illinois form of false position (to about 1e-12).

    The last step of `fit` is Newton's, which takes it to the last digits.
    """
    at_below, at_above = _gradient(below, data), _gradient(above, data)
    if (at_below > 0.0) == (at_above > 0.0):
        raise OutOfRange("the trips do not settle a limiting current", "currents",
                         "trip at two currents that differ clearly")
    last, side = above, 0
    for _ in range(STEPS):
        trial = (below * at_above - above * at_below) / (at_above - at_below)
        if not below < trial < above:
            trial = 0.5 * (below + above)
        here = _gradient(trial, data)
        if here == 0.0 or abs(trial - last) <= 1e-12 * trial:
            return trial
        if (here > 0.0) == (at_below > 0.0):
            below, at_below = trial, here
            at_above = at_above * 0.5 if side == 1 else at_above
            side = 1
        else:
            above, at_above = trial, here
            at_below = at_below * 0.5 if side == -1 else at_below
            side = -1
        last = trial
    return 0.5 * (below + above)


def _covariance(slopes, scatter):
    """Standard uncertainties of ln tau and ln i_limit and their correlation from the columns (1, slope)."""
    n = float(len(slopes))
    s1 = s2 = 0.0
    for slope in slopes:
        s1 += slope
        s2 += slope * slope
    determinant = n * s2 - s1 * s1
    if determinant <= 1e-12 * n * s2:
        raise OutOfRange("the trips do not settle a limiting current", "currents",
                         "trip at two currents that differ clearly")
    root = (1.0 / determinant)
    return scatter * sqrt(s2 * root), scatter * sqrt(n * root), -s1 / sqrt(n * s2)


def fit(currents, times, preloads=None):
    """BreakerFit of the trips.

    currents: A, one a trip; times: s; preloads: A at which the breaker rested before each trip, None = all cold.
    Raises OutOfRange when there are fewer than two trips or they do not settle both constants.
    """
    if preloads is None:
        preloads = [0.0 for _ in currents]
    _check(currents, times, preloads)
    low, high = _bracket(currents, preloads)
    data = ([i * i for i in currents], [p * p for p in preloads], [log(t) for t in times])
    bare = tuple([[value_of(x) for x in column] for column in data])
    start = _solve(bare, low, high)
    limit = start - _gradient(start, data) / _slope_of_gradient(start, bare, low, high)
    rests = _residuals(limit, data[0], data[1], data[2])[0]
    tau = exp(_mean(rests))
    slopes = _residuals(start, bare[0], bare[1], bare[2])[1]
    n = len(currents)
    if n == 2:
        _covariance(slopes, 0.0)
        return BreakerFit(tau, limit, None, 0, 0.0, 0.0, 0.0)
    scatter = sqrt(_sum_of_squares(start, bare) / float(n - 2))
    u_ln_tau, u_ln_limit, correlation = _covariance(slopes, scatter)
    return BreakerFit(tau, limit, scatter, n - 2, u_ln_tau, u_ln_limit, correlation)


def _slope_of_gradient(limit, bare, low, high):
    """Derivative of the gradient by central difference: it only scales the uncertainties, good to about 1e-9."""
    step = 1e-5 * min(limit - low, high - limit)
    return (_gradient(limit + step, bare) - _gradient(limit - step, bare)) / (2.0 * step)


def _with_scatter(value, relative_u, found, what):
    """`value` with the type A influence of the scatter, or as it is when there is none."""
    if found.dof < 1 or relative_u == 0.0:
        return value
    return value + influence(0.0, value_of(value) * relative_u, SCATTER + ", " + what, found.dof)


def fitted_tau(currents, times, preloads=None):
    """Time constant in s. Not to be combined with `fitted_limit`: they are correlated; see fitted_time."""
    found = fit(currents, times, preloads)
    return _with_scatter(found.tau, found.u_ln_tau, found, "time constant")


def fitted_limit(currents, times, preloads=None):
    """Limiting current in A. Not to be combined with `fitted_tau`; see fitted_time."""
    found = fit(currents, times, preloads)
    return _with_scatter(found.i_limit, found.u_ln_limit, found, "limiting current")


def fitted_time(i, i_preload, currents, times, preloads=None):
    """Seconds to trip at `i` after `i_preload` (0 = cold) that the fitted curve predicts, scatter of the fit included.

    The correlation of the two constants is accounted for (GUM 5.2.2). Raises OutOfRange at or below the fitted limit.
    """
    found = fit(currents, times, preloads)
    square = i * i
    left = square - found.i_limit * found.i_limit
    if value_of(left) <= 0.0:
        raise OutOfRange("the breaker does not trip at or below its limiting current", "i")
    shape = log((square - i_preload * i_preload) / left)
    slope = value_of(2.0 * found.i_limit * found.i_limit / (left * shape))
    by_limit = slope * found.u_ln_limit
    variance = (found.u_ln_tau * found.u_ln_tau + by_limit * by_limit
                + 2.0 * found.correlation * found.u_ln_tau * by_limit)
    relative_u = sqrt(variance) if variance > 0.0 else 0.0
    return _with_scatter(found.tau * shape, relative_u, found, "predicted time")


def time_scatter(currents, times, preloads=None):
    """Standard deviation of ln t about the fitted curve, a ratio; needs three trips."""
    found = fit(currents, times, preloads)
    if found.scatter is None:
        raise OutOfRange("two trips fit any curve exactly: their scatter is unknown", "times", "take a third trip")
    return found.scatter
