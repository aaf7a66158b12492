"""Winding resistance and temperature: correction to a reference, rise by resistance, back to switch-off.

Resistances in ohm, temperatures in degC, differences in K, times in s. Every argument may be a plain float
or a measured value; the answer then carries the uncertainty. `k` is the temperature constant of the metal:
the size, in K, of the degC temperature at which its extrapolated resistance would be zero.
"""

from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.measured import exp, log, value_of

COPPER = 234.5      # K; appliance-standard text and a maker's page on EN 61558-1 14.2 (checks 1.1, READ-2)
COPPER_IEC = 235.0  # K; IEC 60034-1 8.6.2.3.2, IEC 60076 (checks 1.1, MEM+)
ALUMINIUM = 225.0   # K; IEC 60034-1 (checks 1.1, READ-2)
ALUMINIUM_PURE = 228.0  # K; handbook, and the beta of IEC 60364-5-54 (checks 1.1, READ-2)


def temperature_factor(t, t_ref, k):
    """Factor that takes a resistance at `t` to `t_ref` (both degC): (k + t_ref)/(k + t).

    Good for copper and aluminium from -50 to +200 degC; not for resistance alloys or iron.
    Raises OutOfRange when a temperature lies at or below -k. Source: IEC 60034-1 (checks 1.1).
    """
    for name, temperature in (("t", t), ("t_ref", t_ref)):
        if value_of(k) + value_of(temperature) <= 0.0:
            raise OutOfRange("the temperature lies below the metal's zero of resistance", name,
                             "give degrees Celsius above -" + repr(value_of(k)))
    return (k + t_ref) / (k + t)


def at_reference_temperature(r, t, t_ref, k):
    """Resistance `r` (ohm) taken at `t`, as it would be at `t_ref` (degC). Source: IEC 60034-1 (checks 1.1)."""
    return r * temperature_factor(t, t_ref, k)


def temperature_coefficient(t, k):
    """Relative change of resistance per kelvin at `t` degC, in 1/K: 1/(k + t)."""
    if value_of(k) + value_of(t) <= 0.0:
        raise OutOfRange("the temperature lies below the metal's zero of resistance", "t")
    return 1.0 / (k + t)


def temperature_rise(r_cold, t_cold, r_hot, t_ambient, k):
    """Mean rise of a winding above the ambient at the end of the run, in K.

    r_cold at t_cold before, r_hot at switch-off, t_ambient at the end. Raises OutOfRange unless r_cold > 0.
    Source: resistance method of IEC 60034-1 and EN 61558-1 14.2 (checks 1.2, READ-2).
    """
    if value_of(r_cold) <= 0.0:
        raise OutOfRange("the cold resistance must be above zero", "r_cold")
    return (r_hot - r_cold) / r_cold * (k + t_cold) - (t_ambient - t_cold)


def winding_temperature(r_cold, t_cold, r_hot, k):
    """Mean temperature of the hot winding in degC; the ambient drops out. Source: as `temperature_rise`."""
    if value_of(r_cold) <= 0.0:
        raise OutOfRange("the cold resistance must be above zero", "r_cold")
    return (r_hot - r_cold) / r_cold * (k + t_cold) + t_cold


def _cooling_line(times, resistances, r_settled):
    """Least-squares line ln(r - r_settled) = a + b t; returns (a, b). Two readings or more."""
    n = len(times)
    if n != len(resistances) or n < 2:
        raise OutOfRange("a cooling curve needs two or more times and as many resistances", "times")
    logs = []
    for r in resistances:
        if value_of(r) <= value_of(r_settled):
            raise OutOfRange("a reading lies at or below the settled resistance", "resistances",
                             "leave out readings taken after the winding had cooled")
        logs.append(log(r - r_settled))
    t_mean, log_mean = times[0], logs[0]
    for i in range(1, n):
        t_mean, log_mean = t_mean + times[i], log_mean + logs[i]
    t_mean, log_mean = t_mean / float(n), log_mean / float(n)
    sxx, sxy = 0.0, 0.0
    for i in range(n):
        from_mean = times[i] - t_mean
        sxx, sxy = sxx + from_mean * from_mean, sxy + from_mean * (logs[i] - log_mean)
    if value_of(sxx) <= 0.0:
        raise OutOfRange("the readings of a cooling curve need different times", "times")
    slope = sxy / sxx
    return log_mean - slope * t_mean, slope


def resistance_at_switch_off(times, resistances, r_settled):
    """Resistance at t = 0 from readings `times` (s after switch-off), `resistances` (ohm).

    r_settled: the cold value corrected to the ambient. Model r_settled + A exp(-t/tau), fitted by least
    squares on the logarithm (checks 1.3, DERIVED). Raises OutOfRange for fewer than two readings.
    """
    intercept, slope = _cooling_line(times, resistances, r_settled)
    return r_settled + exp(intercept)


def cooling_time_constant(times, resistances, r_settled):
    """Time constant in s of the curve that `resistance_at_switch_off` fits. Refuses readings that do not fall."""
    intercept, slope = _cooling_line(times, resistances, r_settled)
    if value_of(slope) >= 0.0:
        raise OutOfRange("the resistance does not fall with time", "resistances")
    return -1.0 / slope
