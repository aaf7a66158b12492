"""What a meter does to what it measures, and what it shows of a waveform that is no sine.

Volts, amperes, ohms, radians. Source: checks 5.2 (closed forms, FACT) and 5.3 (circuit theory).
"""

from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.measured import asin, cos, sin, sqrt, value_of

PI = 3.141592653589793
SINE_FORM_FACTOR = 1.1107207345395915  # pi/(2 sqrt 2): what an average-responding meter is scaled by


def undisturbed_voltage(indicated, r_source, r_meter):
    """Voltage before the voltmeter was connected: indicated (1 + r_source/r_meter) (checks 5.3)."""
    if value_of(r_meter) <= 0.0:
        raise OutOfRange("the meter's resistance must be above zero", "r_meter")
    return indicated * (1.0 + r_source / r_meter)


def undisturbed_current(indicated, r_circuit, r_burden):
    """Current before the ammeter was inserted: indicated (r_circuit + r_burden)/r_circuit (checks 5.3)."""
    if value_of(r_circuit) <= 0.0:
        raise OutOfRange("the circuit's resistance must be above zero", "r_circuit")
    return indicated * (r_circuit + r_burden) / r_circuit


def total_rms(v_ac, v_dc):
    """True rms from an AC-coupled and a DC reading of one voltage: sqrt(v_ac^2 + v_dc^2) (checks 5.2, FACT)."""
    return sqrt(v_ac * v_ac + v_dc * v_dc)


def _cut_angle(angle):
    if not 0.0 <= value_of(angle) < PI:
        raise OutOfRange("the cut must lie from 0 to under 180 degrees", "angle")


def phase_cut_rms(v_peak, angle):
    """True rms of a sine of `v_peak` of which the first `angle` rad of each half is missing (checks 5.2, FACT)."""
    _cut_angle(angle)
    return v_peak * sqrt(0.5 * (1.0 - angle / PI + sin(2.0 * angle) / (2.0 * PI)))


def phase_cut_average(v_peak, angle):
    """Mean of the rectified phase-cut sine: v_peak (1 + cos angle)/pi (checks 5.2, FACT)."""
    _cut_angle(angle)
    return v_peak * (1.0 + cos(angle)) / PI


def phase_cut_correction(angle):
    """True rms over what an average-responding, DC-coupled meter shows of a phase-cut sine (checks 5.2)."""
    return phase_cut_rms(1.0, angle) / (SINE_FORM_FACTOR * phase_cut_average(1.0, angle))


def half_wave_shown_by_average_meter(v_peak):
    """What an average-responding meter coupled through a capacitor shows of a half-wave rectified sine (checks 5.2).

    Form factor of the sine times the mean distance of the wave from its own mean (peak/pi), in closed form.
    A published table prints 0.764 for a peak of 2 by mistake; it is 0.779376 (checks T4).
    """
    level = 1.0 / PI
    angle = asin(level)
    return v_peak * (SINE_FORM_FACTOR / PI * (2.0 * cos(angle) - level * (PI - 2.0 * angle)))
