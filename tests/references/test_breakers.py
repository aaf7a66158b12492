"""Thermal breakers against checks 7.1-7.3 (IEC 60255-8 in relay manuals), with scipy as outside reference."""

import itertools
import math

import pytest
from reference_values import check

from fieldcheck.engine import measured
from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.physics import breaker_fit, breakers

TAU, LIMIT = 60.0, 3.0
TABLE = [(3.3, "105.07608647239911", "59.91172980666765"), (4.5, "35.267199894127145", "15.185437660929713"),
         (6.0, "17.26092434710685", "6.799721118420196"), (9.0, "7.066982139383008", "2.6410131250064555"),
         (15.0, "2.449319671215312", "0.8933167496250466")]


@pytest.mark.parametrize(("i", "cold", "hot"), TABLE)
def test_trip_times(i, cold, hot):
    # checks 7.1, CALC: tau 60 s, limiting current 3 A, preload 2.4 A
    check(breakers.trip_time_cold(i, LIMIT, TAU), cold)
    check(breakers.trip_time_hot(i, 2.4, LIMIT, TAU), hot)


@pytest.mark.parametrize(("multiple", "printed"), [(1.2, "11.856236656577394"), (2.0, "2.8768207245178083"),
                                                   (6.0, "0.28170876966696223")])
def test_multiples_of_the_limiting_current(multiple, printed):
    # checks 7.1, FACT, tau 10 s
    check(breakers.trip_time_cold(multiple, 1.0, 10.0), printed)


def test_let_through_tends_to_tau_times_the_square_of_the_limit():
    # checks 7.1, CALC: 551.0969260234451 at 15 A, 540 for large currents
    check(breakers.trip_let_through(15.0, breakers.trip_time_cold(15.0, LIMIT, TAU)), "551.0969260234451")
    far = breakers.trip_let_through(3e4, breakers.trip_time_cold(3e4, LIMIT, TAU))
    assert far == pytest.approx(540.0, rel=1e-7)


@pytest.mark.parametrize(("r", "printed"), [(0.9, "6.321630939469581"), (0.7, "21.400496636323943"),
                                            (0.5, "41.58883083359672")])
def test_reclose_times(r, printed):
    # checks 7.2, DERIVED
    check(breakers.reclose_time(r, TAU), printed)
    assert breakers.reclose_share(float(printed), TAU) == pytest.approx(r, rel=1e-12)


def test_cycling_on_a_lasting_fault():
    # checks 7.2, CALC: 6 A, recloses at 0.7 of the trip rise
    check(breakers.cycling_on_time(6.0, LIMIT, 0.7, TAU), "5.718610788259496")
    check(breakers.cycling_duty(6.0, LIMIT, 0.7, TAU, TAU), "0.21087016982998422")
    check(breakers.cycling_rms_current(6.0, LIMIT, 0.7, TAU, TAU), "2.7552361267012")


def test_cold_hot_and_cycling_against_the_differential_equation():
    # tau dx/dt = (i/limit)^2 - x, trip at x = 1: integrated by scipy
    from scipy.integrate import solve_ivp

    def trip(start, i):
        def reached(t, x):
            return x[0] - 1.0

        reached.terminal = True
        run = solve_ivp(lambda t, x: [((i / LIMIT) ** 2 - x[0]) / TAU], (0.0, 500.0), [start], events=reached,
                        rtol=1e-11, atol=1e-12)
        return run.t_events[0][0]

    assert breakers.trip_time_cold(4.5, LIMIT, TAU) == pytest.approx(trip(0.0, 4.5), rel=1e-8)
    assert breakers.trip_time_hot(4.5, 2.4, LIMIT, TAU) == pytest.approx(trip((2.4 / 3.0) ** 2, 4.5), rel=1e-8)
    assert breakers.cycling_on_time(4.5, LIMIT, 0.7, TAU) == pytest.approx(trip(0.7, 4.5), rel=1e-8)


def test_preload_left_is_the_preload_of_the_rise_left():
    # a pause of t leaves the share exp(-t/tau) of the rise, and the rise goes with the square of the current
    left = breakers.preload_left(2.4, 42.0, TAU)
    assert left * left == pytest.approx(2.4 * 2.4 * math.exp(-42.0 / TAU), rel=1e-12)


def test_other_ambients():
    # checks 7.2: thresholds become (T_trip - Ta) and (T_reclose - Ta); trips at 100 degC, recloses at 76, rated at 20
    assert breakers.share_in_ambient(0.7, 100.0, 20.0, 40.0) == pytest.approx((76.0 - 40.0) / (100.0 - 40.0), rel=1e-12)
    assert breakers.limit_in_ambient(3.0, 100.0, 20.0, 40.0) == pytest.approx(3.0 * math.sqrt(60.0 / 80.0), rel=1e-12)
    assert breakers.cool_down_time(60.0) == 300.0


# --- the fit, checks 7.3 ---

CURRENTS = [i for i, cold, hot in TABLE]
COLD = [float(cold) for i, cold, hot in TABLE]


def test_two_trips_are_solved_exactly():
    # checks 7.3: 4.5 and 9 A of the table give 3 A and 60 s
    fit = breaker_fit.fit([4.5, 9.0], [35.267199894127145, 7.066982139383008])
    assert fit.i_limit == pytest.approx(3.0, rel=1e-12)
    assert fit.tau == pytest.approx(60.0, rel=1e-12)
    assert fit.scatter is None and fit.dof == 0


@pytest.mark.parametrize("pair", [(0, 1), (0, 4), (1, 2), (3, 4), (4, 0)])
def test_any_two_trips_of_the_table(pair):
    # equations nearly depend on each other at high multiples: the bar is what the printed digits allow
    fit = breaker_fit.fit([CURRENTS[k] for k in pair], [COLD[k] for k in pair])
    assert fit.i_limit == pytest.approx(3.0, rel=1e-10)
    assert fit.tau == pytest.approx(60.0, rel=1e-10)


def test_all_trips_cold_and_hot_together():
    fit = breaker_fit.fit(CURRENTS + CURRENTS, COLD + [float(hot) for i, cold, hot in TABLE], [0.0] * 5 + [2.4] * 5)
    assert fit.i_limit == pytest.approx(3.0, rel=1e-12)
    assert fit.tau == pytest.approx(60.0, rel=1e-12)
    assert fit.scatter < 1e-12 and fit.dof == 8


RUNS = [4.5, 4.5, 4.5, 6.0, 6.0, 6.0, 9.0, 9.0, 9.0]
TIMES = [35.9, 34.7, 35.4, 17.0, 17.6, 17.1, 7.2, 6.9, 7.1]


def scipy_fit(currents, times, preloads):
    from scipy.optimize import curve_fit

    def model(rows, ln_tau, ln_limit):
        return ln_tau + [math.log(math.log((i * i - p * p) / (i * i - math.exp(2.0 * ln_limit)))) for i, p in rows]

    import numpy as np

    rows = list(zip(currents, preloads, strict=True))
    best, covariance = curve_fit(model, rows, np.log(times), p0=[math.log(50.0), math.log(2.8)], ftol=1e-15, xtol=1e-15,
                                 gtol=1e-15)
    return np.exp(best), np.sqrt(np.diag(covariance)), covariance[0, 1] / math.sqrt(covariance[0, 0] * covariance[1, 1])


@pytest.mark.parametrize("preloads", [[0.0] * 9, [0.0, 0.0, 2.0] * 3])
def test_scattered_trips_agree_with_scipy(preloads):
    times = [breakers.trip_time_hot(i, p, 3.0, 60.0) * wobble for i, p, wobble in zip(
        RUNS, preloads, [1.02, 0.98, 1.0, 0.97, 1.01, 1.03, 1.0, 0.99, 1.02], strict=True)]
    fit = breaker_fit.fit(RUNS, times, preloads)
    best, u, correlation = scipy_fit(RUNS, times, preloads)
    assert (fit.tau, fit.i_limit) == pytest.approx(tuple(best), rel=1e-6)
    assert (fit.u_ln_tau, fit.u_ln_limit) == pytest.approx(tuple(u), rel=1e-4)
    assert fit.correlation == pytest.approx(correlation, rel=1e-4)
    assert fit.dof == 7


def test_the_fit_is_the_least_of_the_sums_of_squares():
    fit = breaker_fit.fit(RUNS, TIMES)

    def squares(tau, limit):
        return sum((math.log(t) - math.log(breakers.trip_time_cold(i, limit, tau))) ** 2
                   for i, t in zip(RUNS, TIMES, strict=True))

    least = squares(fit.tau, fit.i_limit)
    for tau in (0.999, 1.0, 1.001):
        for limit in (0.999, 1.0, 1.001):
            assert squares(fit.tau * tau, fit.i_limit * limit) >= least * (1.0 - 1e-12)


def test_the_deeper_of_two_valleys_is_found():
    # hot trips mixed with a cold one leave a second, shallower valley near 12.4 A
    currents, preloads = [30.15, 38.52, 13.87], [4.62, 4.62, 0.0]
    times = [breakers.trip_time_hot(i, p, 6.6, 60.0) for i, p in zip(currents, preloads, strict=True)]
    fit = breaker_fit.fit(currents, times, preloads)
    assert (fit.tau, fit.i_limit) == pytest.approx((60.0, 6.6), rel=1e-9)


def test_two_answers_are_no_answer():
    # a cold and a hot trip of which two pairs of constants give the same times: both are exact, so neither is told
    currents, preloads = [2.0566, 5.0643], [0.0, 0.7]
    times = [breakers.trip_time_hot(i, p, 1.0, 60.0) for i, p in zip(currents, preloads, strict=True)]

    def mismatch(limit):
        shapes = [breakers.trip_time_hot(i, p, limit, 1.0) for i, p in zip(currents, preloads, strict=True)]
        return shapes[0] / shapes[1] - times[0] / times[1]

    signs = [mismatch(0.7001 + 0.002 * k) > 0.0 for k in range(678)]
    assert sum(a != b for a, b in itertools.pairwise(signs)) == 2
    with pytest.raises(OutOfRange) as caught:
        breaker_fit.fit(currents, times, preloads)
    assert caught.value.what == "two limiting currents fit the trips alike"


@pytest.mark.parametrize("seed", range(40))
def test_the_valley_is_the_deepest_of_a_fine_scan(seed):
    import numpy as np

    rng = np.random.Generator(np.random.PCG64(seed))
    n, noise = (3, 4, 6, 9)[seed % 4], (0.0, 0.01, 0.05)[seed % 3]
    currents = list(2.0 * rng.uniform(1.15, 6.0, n))
    preloads = [float(p) for p in rng.choice([0.0, 1.4], n)]
    times = [breakers.trip_time_hot(i, p, 2.0, 60.0) * math.exp(noise * x) for i, p, x in zip(
        currents, preloads, rng.standard_normal(n), strict=True)]
    logs, squares, warm = np.log(times), np.square(currents), np.square(preloads)

    def depth(limit):
        rest = logs - np.log(np.log((squares - warm) / (squares - limit * limit)))
        return float(((rest - rest.mean()) ** 2).sum())

    scan = min(depth(limit) for limit in np.linspace(max(preloads), min(currents), 3003)[1:-1])
    try:
        limit = breaker_fit.fit(currents, times, preloads).i_limit
    except OutOfRange:
        assert noise > 0.0 or n == 3  # exact trips at four or more currents are always settled
        return
    assert depth(limit) <= scan * (1.0 + 1e-6) + 1e-12


def carrying(values, name, relative_gain, u):
    gain = measured.influence(1.0, relative_gain, "gain of " + name)
    return [x * gain + measured.influence(0.0, u, f"{name} {k}") for k, x in enumerate(values)]


@pytest.mark.parametrize("view", [breaker_fit.fitted_tau, breaker_fit.fitted_limit,
                                  lambda i, t: breaker_fit.fitted_time(5.0, 1.0, i, t)])
def test_uncertainty_of_the_readings_against_numeric_derivatives(view):
    currents, times = carrying(RUNS, "A", 0.01, 0.005), carrying(TIMES, "s", 1e-4, 0.12)
    got = view(currents, times)
    for k in range(9):
        for values, name, u, which in ((RUNS, "A", 0.005, 0), (TIMES, "s", 0.12, 1)):
            h = 1e-4 * values[k]
            moved = []
            for sign in (1.0, -1.0):
                arguments = [list(RUNS), list(TIMES)]
                arguments[which][k] += sign * h
                moved.append(measured.value_of(view(*arguments)))
            assert got.parts[f"{name} {k}"] == pytest.approx((moved[0] - moved[1]) / (2.0 * h) * u, rel=1e-4, abs=1e-9)


def test_gain_of_the_ammeter_moves_the_limit_alone():
    # all currents 1 % high: the same time constant, a limiting current 1 % higher
    gain = measured.influence(1.0, 0.01, "gain")
    currents = [i * gain for i in RUNS]
    assert breaker_fit.fitted_limit(currents, TIMES).parts["gain"] == pytest.approx(
        0.01 * breaker_fit.fit(RUNS, TIMES).i_limit, rel=1e-7)
    assert abs(breaker_fit.fitted_tau(currents, TIMES).parts["gain"]) < 1e-6


def test_scatter_is_a_type_a_influence_with_n_less_two_degrees_of_freedom():
    tau = breaker_fit.fitted_tau(RUNS, TIMES)
    fit = breaker_fit.fit(RUNS, TIMES)
    assert measured.combined(tau) == pytest.approx(fit.tau * fit.u_ln_tau, rel=1e-12)
    assert measured.effective_dof(tau) == pytest.approx(7.0, rel=1e-9)
    assert measured.value_of(breaker_fit.fitted_tau([4.5, 9.0], [35.3, 7.07])) > 0.0


def test_predicted_time_has_the_scatter_that_simulation_gives():
    # 400 simulated sets of nine trips with 2 % scatter; reference: the spread of their predictions
    import numpy as np

    rng = np.random.Generator(np.random.PCG64(20260101))
    exact = [breakers.trip_time_cold(i, 3.0, 60.0) for i in RUNS]
    predicted = []
    for _ in range(400):
        times = [t * math.exp(0.02 * x) for t, x in zip(exact, rng.standard_normal(9), strict=True)]
        predicted.append(breaker_fit.fit(RUNS, times))
    spread = np.std([math.log(breakers.trip_time_cold(7.0, fit.i_limit, fit.tau)) for fit in predicted])
    wobble = [0.02 * x for x in (1.3, -0.9, -0.4, -1.2, 0.2, 1.0, 0.9, -1.3, 0.4)]
    one = breaker_fit.fitted_time(7.0, 0.0, RUNS, [t * math.exp(x) for t, x in zip(exact, wobble, strict=True)])
    scatter = breaker_fit.time_scatter(RUNS, [t * math.exp(x) for t, x in zip(exact, wobble, strict=True)])
    # scaled to the simulated 2 %; 400 sets give the spread to 3.5 % (one standard error), four of them are allowed
    assert measured.combined(one) / one.value * 0.02 / scatter == pytest.approx(spread, rel=0.15)


@pytest.mark.parametrize("wrong", [
    lambda: breaker_fit.fit([4.5], [35.0]), lambda: breaker_fit.fit([4.5, 9.0], [35.0]),
    lambda: breaker_fit.fit([4.5, 4.5], [35.0, 36.0]), lambda: breaker_fit.fit([4.5, 9.0], [0.0, 7.0]),
    lambda: breaker_fit.fit([4.5, 9.0], [7.0, 35.0]), lambda: breaker_fit.fit([4.5, 9.0], [35.0, 7.0], [5.0, 0.0]),
    lambda: breaker_fit.time_scatter([4.5, 9.0], [35.267, 7.067]),
    lambda: breaker_fit.fitted_time(2.9, 0.0, [4.5, 9.0], [35.267, 7.067]),
    lambda: breakers.trip_time_cold(3.0, 3.0, 60.0), lambda: breakers.trip_time_hot(6.0, 3.0, 3.0, 60.0),
    lambda: breakers.reclose_time(1.0, 60.0), lambda: breakers.reclose_time(0.7, 0.0),
    lambda: breakers.share_in_ambient(0.7, 100.0, 20.0, 100.0)])
def test_refusals(wrong):
    with pytest.raises(OutOfRange):
        wrong()
