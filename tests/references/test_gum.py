"""JCGM 100:2008 (GUM) examples and the house chains that lean on it (checks 6.1 to 6.3, 6.7, 2.1, 4.5, 5.1)."""

import math

import GTC
import pytest
from scipy import stats

from fieldcheck.engine import entry, meters
from fieldcheck.engine import measured as m

VOLT = [5.007, 4.994, 5.005, 4.990, 4.999]
AMPERE = [19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3]
RADIAN = [1.0456, 1.0438, 1.0468, 1.0428, 1.0433]


def near(value, rel=1e-11):
    return pytest.approx(value, rel=rel)


def correlation(a, b, given):
    joint = (m.combined(a + b, given) ** 2 - m.combined(a, given) ** 2 - m.combined(b, given) ** 2) / 2.0
    return joint / (m.combined(a, given) * m.combined(b, given))


class Impedance:
    """GUM H.2, approach 1: means of five sets read together."""

    def __init__(self):
        self.v = m.mean_of_repeats(VOLT, "V")
        self.i = m.mean_of_repeats(AMPERE, "I")
        self.phi = m.mean_of_repeats(RADIAN, "phi")
        name = m.REPEATS
        self.given = {
            (name + "V", name + "I"): m.correlation_of_repeats(VOLT, AMPERE),
            (name + "V", name + "phi"): m.correlation_of_repeats(VOLT, RADIAN),
            (name + "I", name + "phi"): m.correlation_of_repeats(AMPERE, RADIAN),
        }
        self.r = self.v * m.cos(self.phi) / self.i
        self.x = self.v * m.sin(self.phi) / self.i
        self.z = self.v / self.i


H2 = Impedance()


def test_gum_h2_means_uncertainties_and_correlations_of_the_readings():
    """Raw data and results: checks 6.3 (CALC from raw data; rounded values READ in the GTC manual)."""
    assert m.combined(H2.v) == pytest.approx(3.20936131e-03, abs=5e-12)
    assert m.combined(H2.i) == pytest.approx(9.47100839e-06, abs=5e-15)
    assert m.combined(H2.phi) == pytest.approx(7.52063827e-04, abs=5e-13)
    assert list(H2.given.values()) == [near(-0.3553112198174771), near(0.8576242108399619), near(-0.6451112176892463)]


@pytest.mark.parametrize(("name", "value", "u"), [("r", 127.73216993, 0.07107141), ("x", 219.84651191, 0.29558168),
                                                  ("z", 254.25970195, 0.23633613)])
def test_gum_h2_resistance_reactance_impedance(name, value, u):
    got = getattr(H2, name)
    assert got.value == pytest.approx(value, abs=5e-9)
    assert m.combined(got, H2.given) == pytest.approx(u, abs=5e-9)


def test_gum_h2_correlations_of_the_results():
    """Published -0.588, -0.485, 0.993 (MEM+); 13 and more digits from raw data (CALC)."""
    assert correlation(H2.r, H2.x, H2.given) == near(-0.5884297844682517, 1e-10)
    assert correlation(H2.r, H2.z, H2.given) == near(-0.4852592242570642, 1e-10)
    assert correlation(H2.x, H2.z, H2.given) == near(0.9925116489488434, 1e-10)


def test_gum_h2_by_gtc_from_the_same_raw_data():
    v, i, phi = GTC.ta.multi_estimate_real([VOLT, AMPERE, RADIAN])
    theirs = v * GTC.cos(phi) / i
    assert m.combined(H2.r, H2.given) == near(GTC.uncertainty(theirs), 1e-10)
    assert m.effective_dof(H2.r, H2.given) == near(GTC.dof(theirs), 1e-10) == near(4.0)


def test_gum_h2_approach_2_the_mean_of_five_results():
    each = [VOLT[j] * math.cos(RADIAN[j]) / AMPERE[j] for j in range(5)]
    got = m.mean_of_repeats(each, "R")
    assert got.value == pytest.approx(127.73163048, abs=5e-9)
    assert m.combined(got) == pytest.approx(0.07127354, abs=5e-9)


def test_gum_h2_from_rounded_figures_gives_another_uncertainty():
    """Checks 6.3 note: rounded u and r (READ in the GTC manual) give u(R) 0.06997872798837179."""
    v, i = m.influence(4.999, 3.2e-3, "V"), m.influence(19.661e-3, 9.5e-6, "I")
    phi = m.influence(1.04446, 7.5e-4, "phi")
    given = {("V", "I"): -0.36, ("V", "phi"): 0.86, ("I", "phi"): -0.65}
    r, x, z = v * m.cos(phi) / i, v * m.sin(phi) / i, v / i
    assert m.combined(r, given) == near(0.06997872798837179)
    assert [round(correlation(a, b, given), 4) for a, b in ((r, x), (r, z), (x, z))] == [-0.5915, -0.4906, 0.9928]


def test_gum_h1_effective_degrees_of_freedom_are_truncated():
    """GUM H.1.6 (MEM+): contributions 25 (18), 9.7 (25.6), 2.9 (50), 16.6 nm (2) give 16.7, used as 16; k99 = 2.92."""
    length = m.influence(50000838.0, 25.0, "standard", 18) + m.influence(0.0, 9.7, "difference", 25.6)
    length = length + m.influence(0.0, 2.9, "expansion", 50) + m.influence(0.0, 16.6, "temperature", 2)
    dof = m.effective_dof(length)
    # From these printed (rounded) contributions 16.76; the tolerance is what their last digits allow.
    assert dof == pytest.approx(16.7, abs=0.1)
    assert m.coverage_factor(dof, "99 %") != m.coverage_factor(17, "99 %")
    assert m.coverage_factor(dof, "99 %") == m.coverage_factor(16, "99 %") == pytest.approx(2.92, abs=0.005)
    assert m.combined(length) == pytest.approx(32.0, abs=0.5)


G2 = {  # GUM table G.2 (MEM+), two-sided; checks 6.1 prints four decimals (CALC by scipy)
    1: (1.8374, 6.3138, 12.7062, 13.9678, 63.6567, 235.7837), 2: (1.3213, 2.9200, 4.3027, 4.5266, 9.9248, 19.2060),
    3: (1.1969, 2.3534, 3.1824, 3.3068, 5.8409, 9.2187), 4: (1.1417, 2.1318, 2.7764, 2.8693, 4.6041, 6.6201),
    5: (1.1105, 2.0150, 2.5706, 2.6487, 4.0321, 5.5070), 6: (1.0906, 1.9432, 2.4469, 2.5165, 3.7074, 4.9040),
    7: (1.0767, 1.8946, 2.3646, 2.4288, 3.4995, 4.5299), 8: (1.0666, 1.8595, 2.3060, 2.3664, 3.3554, 4.2766),
    9: (1.0588, 1.8331, 2.2622, 2.3198, 3.2498, 4.0942), 10: (1.0526, 1.8125, 2.2281, 2.2837, 3.1693, 3.9569),
    16: (1.0323, 1.7459, 2.1199, 2.1689, 2.9208, 3.5441), 20: (1.0257, 1.7247, 2.0860, 2.1330, 2.8453, 3.4221),
    30: (1.0170, 1.6973, 2.0423, 2.0868, 2.7500, 3.2703), 50: (1.0101, 1.6759, 2.0086, 2.0513, 2.6778, 3.1571),
    None: (1.0, 1.6449, 1.9600, 2.0000, 2.5758, 3.0000),
}


@pytest.mark.parametrize("dof", G2)
def test_coverage_factors_of_gum_table_g2(dof):
    coverages = ("68.27 %", "90 %", "95 %", "95.45 %", "99 %", "99.73 %")
    for coverage, printed in zip(coverages, G2[dof], strict=True):
        # The table's 68.27, 95.45, 99.73 % stand for 1, 2, 3 sigma to more digits than the column head.
        tolerance = 5e-5 if coverage in ("90 %", "95 %", "99 %") else 3e-4 * printed
        assert m.coverage_factor(dof, coverage) == pytest.approx(printed, abs=tolerance)
        if dof is not None:
            assert m.coverage_factor(dof + 0.999, coverage) == m.coverage_factor(dof, coverage)


# --- house chains (CALC) --------------------------------------------------------------------------------------------


def bench_meter(function, quantity, *ranges, **more):
    return meters.meter({"tag": "M1", "functions": [{"function": function, "quantity": quantity,
                                                     "ranges": list(ranges), **more}]})


def spec(name, resolution, gain, counts):
    return {"name": name, "upto": name, "resolution": resolution, "gain": gain, "counts": counts}


def read(text, quantity, meter, function, slot, range_name=None):
    return meters.reading_value(entry.read(text, quantity), meter, function, range_name, slot=slot)


@pytest.mark.parametrize(("text", "quantity", "line", "u"), [
    ("15.00 V", "voltage", spec("20 V", "10 mV", "0.5 %", "3"), 0.060621778264910706),
    ("2.500 A", "current", spec("10 A", "1 mA", "1.5 %", "5"), 0.024537386440559094),
    ("12.4 Mohm", "resistance", spec("200 Mohm", "0.1 Mohm", "3 %", "2"), 0.330244353976466e6),
])
def test_a_single_reading_adds_gain_and_counts_before_dividing(text, quantity, line, u):
    """Checks 5.1, rectangular after GUM 4.3.7 (MEM+)."""
    meter = bench_meter("f", quantity, line)
    assert m.combined(read(text, quantity, meter, "f", "a")) == near(u, 1e-12)


def test_resolution_stands_alone_only_without_counts():
    """Checks 5.1: LSD/sqrt(12) = 0.002886751345948129 for 10 mV; not added to counts of 1 and more."""
    bare = bench_meter("f", "voltage", {"name": "20 V", "upto": "20 V", "resolution": "10 mV"})
    assert m.combined(read("15.00 V", "voltage", bare, "f", "a")) == near(0.002886751345948129, 1e-12)
    covered = read("15.00 V", "voltage", bench_meter("f", "voltage", spec("20 V", "10 mV", "0.5 %", "1")), "f", "a")
    assert not [name for name in covered.parts if name.startswith("resolution")]


def test_regulation_keeps_the_counts_of_both_readings_and_loses_the_shared_gain():
    """Checks 2.1.  Independent readings: 0.4750460 %.  One range: checks print 0.1207172 %; the formula, GTC and this
    engine give 0.1207372 %, so the printed fifth digit is taken as a slip and only four are held to it."""
    meter = bench_meter("AC voltage", "voltage", spec("20 V", "10 mV", "0.5 %", "3"))
    v0 = read("19.00 V", "voltage", meter, "AC voltage", "open")
    vl = read("16.50 V", "voltage", meter, "AC voltage", "loaded")
    shared = 100.0 * m.combined((v0 - vl) / v0)
    gain, count_a, count_b = GTC.ureal(0, 0.005 / math.sqrt(3)), *(GTC.ureal(0, 0.03 / math.sqrt(3)) for _ in "ab")
    a, b = 19.0 * (1 + gain) + count_a, 16.5 * (1 + gain) + count_b
    assert shared == near(100.0 * GTC.uncertainty((a - b) / a), 1e-12)
    assert shared == pytest.approx(0.1207172, rel=2e-4)
    other = meters.meter({"tag": "M2", "functions": [{"function": "AC voltage", "quantity": "voltage",
                                                      "ranges": [spec("20 V", "10 mV", "0.5 %", "3")]}]})
    vl = read("16.50 V", "voltage", other, "AC voltage", "loaded")
    assert 100.0 * m.combined((v0 - vl) / v0) == pytest.approx(0.4750460, abs=5e-8)


def test_cell_ratio_over_two_ranges_of_one_meter():
    """Checks 4.5: the two readings have different resolutions, so they stand on two ranges and share no gain."""
    meter = bench_meter("resistance", "resistance", spec("400 ohm", "0.1 ohm", "1 %", "2"),
                        spec("4 kohm", "1 ohm", "1 %", "2"))
    q = read("2740 ohm", "resistance", meter, "resistance", "reverse") / read("118.0 ohm", "resistance", meter,
                                                                            "resistance", "forward")
    assert q.value == near(23.220338983050848, 1e-12)
    assert m.combined(q) == near(0.21277669578080677, 1e-12)


def chain_a():
    volt = bench_meter("DC voltage", "voltage", spec("2 V", "0.1 mV", "0.05 %", "3"))
    ampere = bench_meter("DC current", "current", spec("2 A", "0.1 mA", "0.2 %", "2"))
    plus = read("1.0423 V", "voltage", volt, "DC voltage", "v_plus")
    minus = read("-1.0331 V", "voltage", volt, "DC voltage", "v_minus")
    return (plus - minus) / 2.0, read("0.4500 A", "current", ampere, "DC current", "current")


def test_chain_a_four_wire_with_reversal():
    """Checks 6.7 A (CALC): counts of the two polarities are not averaged away, 1.0377 V has the whole specification.

    t = 23.4 +- 0.5 degC enters as a rectangular half-width.
    """
    v, i = chain_a()
    r = v / i
    assert m.combined(v) == near(0.0004727632679259251, 1e-12)
    assert m.combined(i) == near(0.0006350852961085885, 1e-12)
    assert r.value == near(2.306, 1e-12)
    assert m.combined(r) == near(0.0034198295826671833, 1e-12)
    r20 = r * (234.5 + 20.0) / (234.5 + m.influence(23.4, 0.5 / math.sqrt(3.0), "thermometer"))
    assert r20.value == near(2.275599069406747, 1e-12)
    assert m.expanded(r20, "k = 2").u == near(0.004228102656474552, 1e-12)
    assert near(0.008456205312949104, 1e-12) == m.expanded(r20, "k = 2").U


def test_chain_c_pull_in_voltage():
    """Checks 6.7 C (CALC): five repeats, one reading of their mean, nu_eff 27.05 to be used as 27.

    The U95 printed there, 0.07293843179768968, was computed with 27.0523 degrees of freedom against its own remark
    and rule (checks T10, GUM G.4.1: truncate); with 27 it is 0.07294503128293532 (scipy).
    """
    meter = bench_meter("AC voltage", "voltage", spec("20 V", "10 mV", "0.7 %", "2"))
    got = read("4.02 4.11 3.98 4.07 4.04 V", "voltage", meter, "AC voltage", "pull_in")
    wide = m.expanded(got)
    assert got.value == near(4.044, 1e-12)
    assert m.standard_deviation([4.02, 4.11, 3.98, 4.07, 4.04]) == near(0.04929503017546515, 1e-12)
    assert got.parts[m.REPEATS + "reading pull_in"] == near(0.02204540768504869, 1e-12)
    assert wide.u == near(0.035551197185655185, 1e-12)
    assert wide.dof == near(27.052311120588254, 1e-12)
    assert near(0.07294503128293532, 1e-12) == wide.U
    assert stats.t.ppf(0.975, wide.dof) * wide.u == near(0.07293843179768968, 1e-11)
    assert pytest.approx(0.073, abs=5e-4) == wide.U                       # as checks 8.1 uses it
    single = read("4.044 V", "voltage", meter, "AC voltage", "pull_in")
    assert m.combined(single) == near(0.02789063680401244, 1e-12)


def test_winding_rise_uncertainty():
    """Checks 1.2 (CALC): u(dT) = 1.423799678213772 K."""
    r1, r2 = m.influence(2.4, 0.006, "r1"), m.influence(3.05, 0.008, "r2")
    t1, ta = m.influence(20.0, 0.5, "t1"), m.influence(24.0, 0.5, "ta")
    rise = (r2 - r1) / r1 * (234.5 + t1) - (ta - t1)
    assert rise.value == near(64.92708333333333, 1e-12)
    assert m.combined(rise) == near(1.423799678213772, 1e-12)
