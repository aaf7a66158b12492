"""Thermal breakers with one time constant: trip, reclose, cycling on a fault.

Amperes, seconds, A2s; floats or measured values. `i_limit` is the limiting current: the largest that the breaker
carries for ever. Valid for one thermal time constant, constant ambient and t well above the adiabatic start; a
bimetal with its own heater has two, so fit separately above about five times i_limit.
Source: IEC 60255-8 (now 60255-149) in three protection-relay manuals (checks 7.1, READ-2); 7.2 DERIVED.
"""

from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.measured import exp, log, sqrt, value_of

COOL_TIME_CONSTANTS = 5.0  # cool-down between trips (checks 7.3, PRACTICE)


def _above_limit(i, i_limit):
    if not 0.0 < value_of(i_limit) < value_of(i):
        raise OutOfRange("the breaker does not trip at or below its limiting current", "i",
                         "ask for a current above " + repr(value_of(i_limit)) + " A")


def _positive(value, name):
    if value_of(value) <= 0.0:
        raise OutOfRange(name + " must be above zero", name)


def _share(r):
    if not 0.0 < value_of(r) < 1.0:
        raise OutOfRange("the reclose share of the trip rise must lie between 0 and 1", "r")


def trip_time_cold(i, i_limit, tau):
    """Seconds to trip at current `i` from cold: tau ln(i^2/(i^2 - i_limit^2)) (checks 7.1)."""
    return trip_time_hot(i, 0.0, i_limit, tau)


def trip_time_hot(i, i_preload, i_limit, tau):
    """Seconds to trip at `i` after resting at `i_preload`: tau ln((i^2 - ip^2)/(i^2 - i_limit^2)) (checks 7.1)."""
    _above_limit(i, i_limit)
    _positive(tau, "tau")
    if not 0.0 <= value_of(i_preload) < value_of(i_limit):
        raise OutOfRange("the preload must lie below the limiting current", "i_preload")
    square = i * i
    return tau * log((square - i_preload * i_preload) / (square - i_limit * i_limit))


def trip_let_through(i, t):
    """Let-through of a trip in A2s: i^2 t."""
    return i * i * t


def reclose_time(r, tau_cooling):
    """Seconds from trip to reclose without current: tau_cooling ln(1/r) (checks 7.2).

    r: the rise at which it recloses, as a share of the rise at which it trips.
    """
    _share(r)
    _positive(tau_cooling, "tau_cooling")
    return -tau_cooling * log(r)


def reclose_share(t_reclose, tau_cooling):
    """Share of the trip rise at which it recloses, from the time it took: exp(-t/tau_cooling) (checks 7.2)."""
    _positive(tau_cooling, "tau_cooling")
    return exp(-(t_reclose / tau_cooling))


def share_in_ambient(r, t_trip, t_rated, t_ambient):
    """Reclose share at another ambient: (T_reclose - Ta)/(T_trip - Ta), all degC, r being that at t_rated (7.2)."""
    if value_of(t_ambient) >= value_of(t_trip):
        raise OutOfRange("the ambient must lie below the trip temperature", "t_ambient")
    return (t_rated + r * (t_trip - t_rated) - t_ambient) / (t_trip - t_ambient)


def limit_in_ambient(i_limit, t_trip, t_rated, t_ambient):
    """Limiting current at another ambient: i_limit sqrt((T_trip - Ta)/(T_trip - T_rated)) (checks 7.2, DERIVED)."""
    if value_of(t_ambient) >= value_of(t_trip) or value_of(t_rated) >= value_of(t_trip):
        raise OutOfRange("the ambient must lie below the trip temperature", "t_ambient")
    return i_limit * sqrt((t_trip - t_ambient) / (t_trip - t_rated))


def cycling_on_time(i, i_limit, r, tau):
    """Seconds closed in each cycle on a lasting fault: tau ln((i^2 - r il^2)/(i^2 - il^2)) (checks 7.2)."""
    _above_limit(i, i_limit)
    _share(r)
    _positive(tau, "tau")
    limit_square, square = i_limit * i_limit, i * i
    return tau * log((square - r * limit_square) / (square - limit_square))


def cycling_duty(i, i_limit, r, tau, tau_cooling):
    """Share of the time that a lasting fault is fed (checks 7.2)."""
    on = cycling_on_time(i, i_limit, r, tau)
    return on / (on + reclose_time(r, tau_cooling))


def cycling_rms_current(i, i_limit, r, tau, tau_cooling):
    """Rms current in A that wires carry while the breaker cycles on a lasting fault (checks 7.2)."""
    return i * sqrt(cycling_duty(i, i_limit, r, tau, tau_cooling))


def cool_down_time(tau_cooling):
    """Seconds to wait before a cold trip: five time constants leave 0.7 % (checks 7.3, PRACTICE)."""
    return COOL_TIME_CONSTANTS * tau_cooling


def preload_left(i_preload, t, tau_cooling):
    """Preload current in A of equal heating after `t` s without current: ip exp(-t/(2 tau)) (DERIVED from 7.1)."""
    _positive(tau_cooling, "tau_cooling")
    return i_preload * exp(-(t / (2.0 * tau_cooling)))
