"""Dry-plate rectifiers: what forward and reverse resistance mean at the load, and the bench ratio.

A cell conducts through `r_forward` one way and leaks through `r_reverse` the other; the resistance of the
source belongs in both. Volts rms of a sine, ohm, ampere, watt; floats or measured values. The bench ohmmeter's
ratio only ranks cells measured the same way: r_forward and r_reverse here are those at the working current and
voltage (checks 4.5). All formulas: checks 4.1-4.4, DERIVED, agreed with integration and a circuit simulator.
"""

from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.measured import acos, asin, cos, exp, maximum, minimum, sin, sqrt, through, value_of

PI = 3.141592653589793
SQRT_2 = 1.4142135623730951
HALF_WAVE_IDEAL_EFFICIENCY = 4.0 / (PI * PI)
FULL_WAVE_IDEAL_EFFICIENCY = 8.0 / (PI * PI)
FULL_WAVE_IDEAL_RIPPLE = 0.483425847608679  # sqrt(pi^2/8 - 1), whatever the cells' resistances


def peak_of_sine(v_rms):
    """Peak of a sine in V."""
    return SQRT_2 * v_rms


def _cells(r_forward, r_reverse):
    if not 0.0 < value_of(r_forward) <= value_of(r_reverse):
        raise OutOfRange("the reverse resistance must not be below the forward one, and both above zero", "r_reverse",
                         "check which way round the cell was read")


def _loaded(r_forward, r_reverse, r_load):
    _cells(r_forward, r_reverse)
    if value_of(r_load) <= 0.0:
        raise OutOfRange("the load must be above zero", "r_load")


# --- half-wave ------------------------------------------------------------------------------------------------------


def half_wave_current(v_rms, r_forward, r_reverse, r_load):
    """Mean (DC) current in A through the load (checks 4.2)."""
    _loaded(r_forward, r_reverse, r_load)
    return peak_of_sine(v_rms) / PI * (1.0 / (r_forward + r_load) - 1.0 / (r_reverse + r_load))


def half_wave_volts(v_rms, r_forward, r_reverse, r_load):
    """Mean (DC) volts at the load (checks 4.2)."""
    return half_wave_current(v_rms, r_forward, r_reverse, r_load) * r_load


def half_wave_rms_current(v_rms, r_forward, r_reverse, r_load):
    """Rms current in A through the load, leakage included (checks 4.2)."""
    _loaded(r_forward, r_reverse, r_load)
    a, b = 1.0 / (r_forward + r_load), 1.0 / (r_reverse + r_load)
    return peak_of_sine(v_rms) / 2.0 * sqrt(a * a + b * b)


def half_wave_input_power(v_rms, r_forward, r_reverse, r_load):
    """Power in W taken from the source (checks 4.2)."""
    _loaded(r_forward, r_reverse, r_load)
    return v_rms * v_rms / 2.0 * (1.0 / (r_forward + r_load) + 1.0 / (r_reverse + r_load))


def half_wave_efficiency(r_forward, r_reverse, r_load):
    """DC power at the load over power from the source; at best 4/pi^2 (checks 4.2)."""
    _loaded(r_forward, r_reverse, r_load)
    gap = r_reverse - r_forward
    below = (r_forward + r_load) * (r_reverse + r_load) * (r_forward + r_reverse + 2.0 * r_load)
    return HALF_WAVE_IDEAL_EFFICIENCY * r_load * gap * gap / below


def half_wave_ripple(r_forward, r_reverse, r_load):
    """Rms of the AC part over the mean at the load: sqrt(form factor^2 - 1) (checks 4.1); r_reverse > r_forward."""
    _loaded(r_forward, r_reverse, r_load)
    a, b = 1.0 / (r_forward + r_load), 1.0 / (r_reverse + r_load)
    if value_of(a) <= value_of(b):
        raise OutOfRange("a cell equal both ways gives no DC, so there is no ripple factor", "r_reverse")
    form = PI / 2.0 * sqrt(a * a + b * b) / (a - b)
    return sqrt(form * form - 1.0)


def half_wave_best_load(r_forward, r_reverse):
    """Load in ohm of best efficiency: the positive root of 4 L^3 + 3 s L^2 - p s = 0 (checks 4.2), s sum, p product.

    In closed form by the cosine of a third of an angle; near sqrt(r_forward r_reverse/3) for a good cell.
    """
    _cells(r_forward, r_reverse)
    total = r_forward + r_reverse
    shape = 8.0 * r_forward * r_reverse / (total * total) - 1.0
    if value_of(shape) >= 1.0:  # equal both ways: the angle is zero, cos(0) = 1
        return total / 4.0
    return total / 2.0 * cos(acos(shape) / 3.0) - total / 4.0


def half_wave_best_efficiency(r_forward, r_reverse):
    """Efficiency at the best load."""
    return half_wave_efficiency(r_forward, r_reverse, half_wave_best_load(r_forward, r_reverse))


def half_wave_best_power_load(r_forward, r_reverse):
    """Load in ohm that takes the most DC power: (sqrt(s^2 + 12 p) - s)/6 (checks 4.2)."""
    _cells(r_forward, r_reverse)
    total = r_forward + r_reverse
    return (sqrt(total * total + 12.0 * r_forward * r_reverse) - total) / 6.0


# --- bridge of four equal cells, and centre-tap of two --------------------------------------------------------------


def bridge_transfer(r_forward, r_reverse, r_load):
    """Load voltage over source voltage at any instant (checks 4.3)."""
    _loaded(r_forward, r_reverse, r_load)
    return r_load * (r_reverse - r_forward) / (2.0 * r_forward * r_reverse + r_load * (r_forward + r_reverse))


def bridge_volts(v_rms, r_forward, r_reverse, r_load):
    """Mean (DC) volts at the load of a bridge (checks 4.3)."""
    return 2.0 / PI * bridge_transfer(r_forward, r_reverse, r_load) * peak_of_sine(v_rms)


def bridge_efficiency(r_forward, r_reverse, r_load):
    """DC power at the load over power from the source; at best 8/pi^2 (checks 4.3)."""
    gap = r_reverse - r_forward
    _loaded(r_forward, r_reverse, r_load)
    total = r_forward + r_reverse
    below = (2.0 * r_forward * r_reverse + r_load * total) * (2.0 * r_load + total)
    return FULL_WAVE_IDEAL_EFFICIENCY * r_load * gap * gap / below


def bridge_input_power(v_rms, r_forward, r_reverse, r_load):
    """Power in W taken from the source by a bridge: v^2 (2 RL + Rf + Rr)/(2 Rf Rr + RL (Rf + Rr)) (checks 4.3)."""
    _loaded(r_forward, r_reverse, r_load)
    total = r_forward + r_reverse
    return v_rms * v_rms * (2.0 * r_load + total) / (2.0 * r_forward * r_reverse + r_load * total)


def bridge_best_load(r_forward, r_reverse):
    """Load in ohm of best efficiency of a bridge: sqrt(r_forward r_reverse), exactly (checks 4.3)."""
    _cells(r_forward, r_reverse)
    return sqrt(r_forward * r_reverse)


def bridge_best_efficiency(r_forward, r_reverse):
    """Efficiency at the best load: (8/pi^2) ((r - 1)/(r + 1))^2, r = sqrt(r_reverse/r_forward); centre-tap the same."""
    _cells(r_forward, r_reverse)
    root = sqrt(r_reverse / r_forward)
    share = (root - 1.0) / (root + 1.0)
    return FULL_WAVE_IDEAL_EFFICIENCY * share * share


def bridge_best_power_load(r_forward, r_reverse):
    """Load in ohm that takes the most DC power from a bridge: 2 Rf Rr/(Rf + Rr) (checks 4.3)."""
    _cells(r_forward, r_reverse)
    return 2.0 * r_forward * r_reverse / (r_forward + r_reverse)


def centre_tap_transfer(r_forward, r_reverse, r_load):
    """Load voltage over the voltage of one half of the winding at any instant (checks 4.3)."""
    _loaded(r_forward, r_reverse, r_load)
    return r_load * (r_reverse - r_forward) / (r_forward * r_reverse + r_load * (r_forward + r_reverse))


def centre_tap_volts(v_rms_half, r_forward, r_reverse, r_load):
    """Mean (DC) volts at the load of a centre-tap circuit, `v_rms_half` from tap to one end (checks 4.3)."""
    return 2.0 / PI * centre_tap_transfer(r_forward, r_reverse, r_load) * peak_of_sine(v_rms_half)


def centre_tap_efficiency(r_forward, r_reverse, r_load):
    """As a bridge with twice the load (checks 4.3)."""
    return bridge_efficiency(r_forward, r_reverse, 2.0 * r_load)


def centre_tap_best_load(r_forward, r_reverse):
    """Half of a bridge's: sqrt(r_forward r_reverse)/2 (checks 4.3)."""
    return bridge_best_load(r_forward, r_reverse) / 2.0


# --- a cell with a forward threshold and no leakage, half-wave ------------------------------------------------------


def _conduction(v_rms, v_threshold, r_total):
    """Peak volts and the angle in rad at which conduction begins."""
    peak = peak_of_sine(v_rms)
    if value_of(r_total) <= 0.0:
        raise OutOfRange("the resistance of cell and load must be above zero", "r_total")
    if not 0.0 <= value_of(v_threshold) < value_of(peak):
        raise OutOfRange("the threshold must lie from zero to under the peak of the supply", "v_threshold")
    return peak, asin(v_threshold / peak)


def threshold_current(v_rms, v_threshold, r_total):
    """Mean (DC) current in A; r_total is forward resistance and load together (checks 4.4)."""
    peak, angle = _conduction(v_rms, v_threshold, r_total)
    return (peak * cos(angle) - v_threshold * (PI / 2.0 - angle)) / (PI * r_total)


def threshold_rms_current(v_rms, v_threshold, r_total):
    """Rms current in A (checks 4.4)."""
    peak, angle = _conduction(v_rms, v_threshold, r_total)
    half_square = peak * peak / 2.0
    area = ((half_square + v_threshold * v_threshold) * (PI - 2.0 * angle) + half_square * sin(2.0 * angle)
            - 4.0 * peak * v_threshold * cos(angle))
    return sqrt(area / (2.0 * PI * r_total * r_total))


def threshold_input_power(v_rms, v_threshold, r_total):
    """Power in W taken from the source (checks 4.4)."""
    peak, angle = _conduction(v_rms, v_threshold, r_total)
    area = peak * (PI - 2.0 * angle) / 2.0 + peak / 2.0 * sin(2.0 * angle) - 2.0 * v_threshold * cos(angle)
    return peak * area / (2.0 * PI * r_total)


# --- on the bench ---------------------------------------------------------------------------------------------------


def cell_ratio(r_forward, r_reverse):
    """Reverse over forward reading of one cell on one range of one meter, whose gain cancels (checks 4.5, PRACTICE)."""
    if value_of(r_forward) <= 0.0:
        raise OutOfRange("the forward reading must be above zero", "r_forward",
                         "a cell that reads zero is shorted: enter it as such")
    return r_reverse / r_forward


def mismatch(values):
    """Largest over smallest of a bridge's cells (ratios or forward readings), 1 when all are equal."""
    least = minimum(values)
    if value_of(least) <= 0.0:
        raise OutOfRange("every cell's value must be above zero", "values")
    return maximum(values) / least


def in_circuit_resistance(v, i):
    """Resistance of a cell at its working point from its drop and current, forward or reverse; i > 0."""
    if value_of(i) <= 0.0:
        raise OutOfRange("the current must be above zero", "i")
    return v / i


def range_voltage_share(v_open, cells, v_cell):
    """Open voltage of an ohmmeter range over what `cells` in series stand in reverse; refuse the range above 1.

    v_cell: about 6 V for copper oxide (checks 4.6 READ, 4.7 PRACTICE).
    """
    if value_of(cells) < 1.0 or value_of(v_cell) <= 0.0:
        raise OutOfRange("there must be one cell or more, each standing more than zero volts", "cells")
    return v_open / (cells * v_cell)


def _reading(v_open, r_source, r_series, i_saturation, n_vt, r_shunt, sign):
    """Ohmmeter reading in ohm of a modelled cell, by halving on the junction's voltage; floats only."""
    low, high = 0.0, v_open
    for _ in range(200):
        middle = 0.5 * (low + high)
        if middle == low or middle == high:
            break
        through_cell = sign * i_saturation * (exp(sign * middle / n_vt) - 1.0) + middle / r_shunt
        if (v_open - middle) / (r_source + r_series) > through_cell:
            low = middle
        else:
            high = middle
    current = (v_open - 0.5 * (low + high)) / (r_source + r_series)
    return v_open / current - r_source


def _model_reading(v_open, r_source, r_series, i_saturation, n_vt, r_shunt, sign):
    for name, value in (("v_open", v_open), ("r_source", r_source), ("i_saturation", i_saturation), ("n_vt", n_vt),
                        ("r_shunt", r_shunt)):
        if value_of(value) <= 0.0:
            raise OutOfRange(name + " must be above zero", name)
    if value_of(v_open) > 600.0 * value_of(n_vt):
        raise OutOfRange("the open voltage is too high for the model of the cell", "v_open")
    return through(_reading, [v_open, r_source, r_series, i_saturation, n_vt, r_shunt, sign])


def ohmmeter_forward(v_open, r_source, r_series, i_saturation, n_vt, r_shunt):
    """What an ohmmeter of open voltage `v_open` and source resistance `r_source` reads of a modelled cell, in ohm.

    Cell: r_series, then an exponential junction (i_saturation, n_vt in V) beside r_shunt. It shows why a ratio
    only ranks cells read on the same range (checks 4.5, DERIVED).
    """
    return _model_reading(v_open, r_source, r_series, i_saturation, n_vt, r_shunt, 1.0)


def ohmmeter_reverse(v_open, r_source, r_series, i_saturation, n_vt, r_shunt):
    """The same cell read the other way round."""
    return _model_reading(v_open, r_source, r_series, i_saturation, n_vt, r_shunt, -1.0)
