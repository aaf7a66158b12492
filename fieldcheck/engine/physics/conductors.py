"""Wires: gauge and resistance, what they withstand for seconds, what melts them.

Coherent SI: m, m2, ohm, ohm m, A2s, s, degC. Floats or measured values.
"""

from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.measured import log, log10, power, sqrt, value_of

PI = 3.141592653589793
INCH = 0.0254
CIRCULAR_MIL = PI / 4.0 * 2.54e-05 * 2.54e-05  # m2
COPPER_100_IACS = 1.0 / 58.0e6                 # ohm m at 20 degC: 58 MS/m

# IEC 60364-5-54 annex A (checks 7.4, MEM+): beta in degC, Qc in J/(K m3), resistivity at 20 degC in ohm m.
METALS = {
    "copper": (234.5, 3.45e6, 1.7241e-08),
    "aluminium": (228.0, 2.5e6, 2.8264e-08),
    "steel": (202.0, 3.8e6, 1.38e-07),
}

# k in A sqrt(s)/mm2 as tabulated, IEC 60364 tables 43.1 and 54.2-54.6 in a pocket guide (checks 7.4, READ-2).
TABULATED_K = {
    "copper pvc": 115.0,
    "copper pvc over 300 mm2": 103.0,
    "copper pvc bare start 30": 143.0,
    "copper pvc bare start 30 over 300 mm2": 133.0,
    "copper xlpe": 143.0,
    "copper rubber 60": 141.0,
    "aluminium xlpe": 95.0,
}

# Maximum ohm/km at 20 degC of plain copper, IEC 60228 classes 1/2 and 5/6 (checks 7.5, READ-2), by area in mm2 x 100.
IEC_60228 = {
    "solid": {50: 36.0, 75: 24.5, 100: 18.1, 150: 12.1, 250: 7.41, 400: 4.61},
    "flexible": {50: 39.0, 75: 26.0, 100: 19.5, 150: 13.3, 250: 7.98, 400: 4.95,
                 14: 134.0, 22: 96.0, 25: 76.0, 34: 53.0},  # the last four: VDE 0295, plain
}

# Preece's constants in A/inch^1.5 (checks 7.5, READ).
PREECE = {"copper": 10244.0, "aluminium": 7585.0, "nickel silver": 5230.0, "iron": 3148.0, "tin": 1642.0}

# Resistivity at 20 degC, ohm m (checks 12.3: READ unless said).
RESISTIVITY = {
    "copper": 1.0 / 58.0e6,
    "aluminium": 2.82e-08,
    "zinc": 5.9e-08,
    "nickel": 6.9e-08,
    "tin": 1.09e-07,
    "brass": 6.7e-08,          # CuZn40, READ-2
    "iron": 1.0e-07,
    "carbon steel": 1.43e-07,
    "nickel silver": 2.9e-07,  # 18 % nickel, MEM?
}


def _known(table, name, where):
    """Look `name` up among the table's own keys, and say which there are when it is none of them."""
    for key in table:
        if key == name:
            return table[key]
    raise OutOfRange("unknown: " + str(name), where, "known are: " + ", ".join([str(key) for key in table]))


def resistivity_of(metal):
    """Resistivity in ohm m at 20 degC of a metal named in RESISTIVITY."""
    return _known(RESISTIVITY, metal, "metal")


def wire_resistance(rho, length, area):
    """rho length/area in ohm."""
    if value_of(area) <= 0.0:
        raise OutOfRange("the area must be above zero", "area")
    return rho * length / area


def awg_diameter(gauge):
    """Diameter in m of a round wire of American gauge: 0.127 mm x 92^((36 - n)/39). 00 is -1, 000 is -2.

    Source: ASTM B258 (checks 7.5, FACT). Gauges -3 (0000) to 50.
    """
    if not -3.0 <= value_of(gauge) <= 50.0:
        raise OutOfRange("the gauge must lie from -3 (0000) to 50", "gauge")
    return 0.000127 * power(92.0, (36.0 - gauge) / 39.0)


def awg_area(gauge):
    """Area in m2 of a round wire of American gauge."""
    return round_area(awg_diameter(gauge))


def round_area(diameter):
    """Area in m2 of a round wire of `diameter` in m."""
    return PI / 4.0 * diameter * diameter


def awg_resistance_per_length(gauge):
    """Ohm per metre at 20 degC of a solid copper wire (58 MS/m) of American gauge."""
    return COPPER_100_IACS / awg_area(gauge)


def iec_60228_resistance_per_length(area, build):
    """Largest ohm per metre at 20 degC that IEC 60228 allows plain copper of nominal `area` (m2).

    build: "solid" (classes 1 and 2) or "flexible" (5 and 6). A sound conductor reads less.
    Raises OutOfRange for an area that is not in the table.
    """
    table = _known(IEC_60228, build, "build")
    hundredths = value_of(area) * 1.0e8
    for nominal in table:
        if abs(hundredths - float(nominal)) < 1.0e-6:
            return table[nominal] / 1000.0
    raise OutOfRange("no such nominal area in the table", "area", "nominal areas run from 0.5 to 4 mm2")


def iec_60228_temperature_factor(t):
    """Factor that takes a cable's resistance at `t` degC to 20 degC, as IEC 60228 tabulates it: 1/(1 + 0.004 (t - 20)).

    Do not mix with the winding factor: they differ by up to 0.002 (checks 1.1).
    """
    return 1.0 / (1.0 + 0.004 * (t - 20.0))


def adiabatic_k(metal, t_start, t_end):
    """k in A sqrt(s)/m2: sqrt(Qc (B + 20)/rho20 ln((B + t_end)/(B + t_start))).

    Source: IEC 60364-5-54 annex A (checks 7.4, MEM+). Divide by 1e6 for the tabulated A sqrt(s)/mm2.
    """
    return sqrt(_k_squared(metal, t_start, t_end))


def _k_squared(metal, t_start, t_end):
    beta, heat, rho = _known(METALS, metal, "metal")
    if value_of(t_start) + beta <= 0.0 or value_of(t_end) < value_of(t_start):
        raise OutOfRange("the end temperature must not lie below the start", "t_end")
    return heat * (beta + 20.0) / rho * log((beta + t_end) / (beta + t_start))


def withstand(area, metal, t_start, t_end):
    """Let-through in A2s that a conductor of `area` (m2) withstands between two temperatures; up to 5 s.

    k^2 S^2 with k computed. Source: IEC 60364-5-54 annex A (checks 7.4, MEM+).
    """
    return _k_squared(metal, t_start, t_end) * area * area


def tabulated_withstand(area, insulation):
    """Let-through in A2s from the tabulated k of `insulation` (a key of TABULATED_K) and `area` in m2; up to 5 s."""
    k = _known(TABULATED_K, insulation, "insulation") * 1.0e6
    return (k * area) * (k * area)


def withstand_time(let_through, i):
    """Longest time in s at current `i` (A) for a withstand in A2s; believe it up to 5 s only (checks 7.4)."""
    if value_of(i) <= 0.0:
        raise OutOfRange("the current must be above zero", "i")
    return let_through / (i * i)


def preece_current(metal, diameter):
    """Current in A that melts a round wire of `diameter` (m) in free air, slowly. Source: Preece (checks 7.5, READ)."""
    inches = diameter / INCH
    return _known(PREECE, metal, "metal") * inches * sqrt(inches)


def preece_diameter(metal, i):
    """Diameter in m of the round wire that current `i` (A) melts slowly. Source: Preece (checks 7.5, READ)."""
    return INCH * power(i / _known(PREECE, metal, "metal"), 2.0 / 3.0)


def onderdonk_current(area, t, t_ambient):
    """Current in A that melts a copper wire of `area` (m2) in `t` s (under about 10 s) from `t_ambient` degC.

    Source: Onderdonk's equation as corrected in checks 7.5 (READ-2).
    """
    if value_of(t) <= 0.0:
        raise OutOfRange("the time must be above zero", "t")
    if not -234.0 < value_of(t_ambient) < 1083.0:
        raise OutOfRange("the ambient must lie below copper's melting point", "t_ambient")
    rise = log10((1083.0 - t_ambient) / (234.0 + t_ambient) + 1.0)
    return area / CIRCULAR_MIL * sqrt(rise / (33.0 * t))
