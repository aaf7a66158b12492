"""`functions` and `evaluate` against published examples and the house chains.

GUM H.2 (JCGM 100:2008): checks 6.3, raw data MEM+, results CALC from the raw data and agreed with the published ones.
Chains A, B, C: checks 6.7 (CALC). Oracles run beside them: GTC, scipy.
"""

import json
import math
import statistics

import GTC
import pytest
from commands import run
from scipy import stats

VOLT = [5.007, 4.994, 5.005, 4.990, 4.999]
AMPERE = [19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3]
RADIAN = [1.0456, 1.0438, 1.0468, 1.0428, 1.0433]
R_VI, R_VPHI, R_IPHI = -0.3553112198174771, 0.8576242108399619, -0.6451112176892463
ROOT3 = math.sqrt(3.0)


def evaluated(model, *options):
    """What `evaluate --json` says of a model given on standard input."""
    result = run("evaluate", "-", "--json", *options, given=json.dumps(model))
    assert result.exit_code == 0 and result.stderr == ""
    return json.loads(result.stdout)


def computed(name, *arguments):
    result = run("functions", name, *arguments, "--json")
    assert result.exit_code == 0 and result.stderr == "", result.stderr
    return json.loads(result.stdout)


def close(text, wanted, rel=1e-11):
    assert float(text) == pytest.approx(wanted, rel=rel)


def mean(values, dof=True):
    """A quantity of repeats as the model file has it: mean, s/sqrt(n), n - 1."""
    found = {"value": repr(statistics.fmean(values)), "u": repr(statistics.stdev(values) / math.sqrt(len(values)))}
    return {**found, "dof": str(len(values) - 1)} if dof else found


# ---- GUM H.2

@pytest.mark.parametrize(("formula", "value", "u"), [
    ("V * cos(phi) / I", 127.73216993, 0.07107141),
    ("V * sin(phi) / I", 219.84651191, 0.29558168),
    ("V / I", 254.25970195, 0.23633613),
])
def test_gum_h2_by_evaluate(formula, value, u):
    said = evaluated({"formula": formula, "quantities": {"V": mean(VOLT), "I": mean(AMPERE), "phi": mean(RADIAN)},
                      "correlations": [["V", "I", repr(R_VI)], ["V", "phi", repr(R_VPHI)], ["I", "phi", R_IPHI]]})
    assert float(said["value"]) == pytest.approx(value, abs=5e-9)
    assert float(said["u"]) == pytest.approx(u, abs=5e-9)
    assert sum(float(one["share"].split()[0]) for one in said["budget"]) == pytest.approx(100, abs=0.2)


def test_gum_h2_from_rounded_values_gives_what_gtc_gives():
    """From rounded u and r: u(R) 0.06997872798837179 (checks 6.3, GTC agrees)."""
    given = {"V": (4.999, 3.2e-3), "I": (19.661e-3, 9.5e-6), "phi": (1.04446, 7.5e-4)}
    r = {("V", "I"): -0.36, ("V", "phi"): 0.86, ("I", "phi"): -0.65}
    said = evaluated({"formula": "V * cos(phi) / I",
                      "quantities": {k: {"value": v, "u": u} for k, (v, u) in given.items()},
                      "correlations": [[a, b, one] for (a, b), one in r.items()]})
    close(said["u"], 0.06997872798837179)
    oracle = {k: GTC.ureal(v, u, independent=False) for k, (v, u) in given.items()}
    for (a, b), one in r.items():
        GTC.set_correlation(one, oracle[a], oracle[b])
    close(said["u"], GTC.uncertainty(oracle["V"] * GTC.cos(oracle["phi"]) / oracle["I"]))


def test_without_its_correlations_gum_h2_comes_out_otherwise():
    """So the correlations do count: uncorrelated, u(R) is more than twice as large."""
    said = evaluated({"formula": "V * cos(phi) / I", "quantities": {"V": mean(VOLT), "I": mean(AMPERE),
                                                                    "phi": mean(RADIAN)}})
    assert float(said["u"]) > 2 * 0.07107141


# ---- chain A: four-wire resistance by reversal, brought to 20 degC

U_V, U_I, U_T = 0.0004727632679259251, 0.0006350852961085885, 0.5 / ROOT3


def test_chain_a_specifications_are_those_of_checks_5_1():
    """Gain and counts add up within one reading, at the mean of both: (0.05 % of it + 3 counts of 0.1 mV)/sqrt(3)."""
    close((0.0005 * (1.0423 + 1.0331) / 2 + 3e-4) / ROOT3, U_V, 1e-12)
    close((0.002 * 0.45 + 2e-4) / ROOT3, U_I, 1e-12)


def test_chain_a_by_evaluate():
    """One meter and range read both voltages: their common u(V) is one quantity, entering the half difference."""
    said = evaluated({"formula": "d / I * (k + 20) / (k + t)", "coverage": "k = 2", "quantities": {
        "d": {"value": repr((1.0423 + 1.0331) / 2), "u": repr(U_V)}, "I": {"value": "0.4500", "u": repr(U_I)},
        "t": {"value": "23.4", "u": repr(U_T)}, "k": {"value": "234.5"}}})
    close(said["value"], 2.275599069406747)
    close(said["u"], 0.004228102656474552)
    close(said["U"], 0.008456205312949104)
    assert said["k"] == "2.0" and said["dof"] == "infinite"


def test_chain_a_by_functions():
    resistance = computed("resistance_from_drop", f"v={(1.0423 + 1.0331) / 2!r}±{U_V!r} V", f"i=0.45±{U_I!r} A")
    close(resistance["value"], 2.306, 1e-13)
    close(resistance["u"], 0.0034198295826671833)
    at_20 = computed("at_reference_temperature", f"r={resistance['value']}±{resistance['u']}ohm", f"t=23.4±{U_T!r}degC",
                     "t_ref=20degC", "k=234.5K")
    close(at_20["value"], 2.275599069406747)
    close(at_20["u"], 0.004228102656474552)


def test_four_wire_reversal_by_functions_cancels_the_thermal_emf():
    close(computed("four_wire_resistance", "v_plus=1.0423V", "v_minus=-1.0331V", "i=450 mA")["value"], 2.306, 1e-13)
    close(computed("thermal_emf", "v_plus=1.0423V", "v_minus=-1.0331V")["value"], 0.0046, 1e-12)


# ---- chain C: repeats with a meter beside them

PULL_IN = [4.02, 4.11, 3.98, 4.07, 4.04]


def test_chain_c_by_evaluate():
    said = evaluated({"formula": "v + meter", "quantities": {
        "v": mean(PULL_IN), "meter": {"value": 0, "u": repr((0.007 * 4.044 + 2 * 0.01) / ROOT3)}}})
    close(said["value"], 4.044)
    close(said["u"], 0.035551197185655185)
    close(said["dof"], 27.052311120588254)
    close(said["k"], stats.t.ppf(0.975, 27))
    # The checks print 0.0729384, with 27.0523 degrees of freedom; their own rule (T10, GUM G.4.1) truncates to 27.
    close(said["U"], stats.t.ppf(0.975, 27) * 0.035551197185655185)
    assert stats.t.ppf(0.975, 27.052311120588254) * float(said["u"]) == pytest.approx(0.07293843179768968, rel=1e-11)
    parts = {one["name"]: abs(float(one["contribution"])) for one in said["budget"]}
    assert parts == {"v": pytest.approx(0.02204540768504869), "meter": pytest.approx(0.02789063680401244)}


def test_one_line_for_a_person_has_value_u_and_k():
    said = run("evaluate", "-", given=json.dumps({"formula": "v + meter", "quantities": {
        "v": mean(PULL_IN), "meter": {"value": 0, "u": "0.02789063680401244"}}})).stdout
    assert said.startswith("v + meter = 4.04") and "degrees of freedom = 27.05" in said and "budget:" in said


# ---- other values of the checks, through the command line

@pytest.mark.parametrize(("call", "value"), [
    # IEC 60034-1 (checks 1.2): rise by resistance; the ambient corrects it. (234.5 + 20)(2.9 - 2.4)/2.4 + 20 - 22
    (["temperature_rise", "r_cold=2.4", "t_cold=20", "r_hot=2.9", "t_ambient=22", "k=234.5"], 254.5 * 0.5 / 2.4 - 2.0),
    # binomial (checks 8.3): 59 clean pulses show 5 % at 95 %
    (["clean_pulses_needed", "rate=5 %"], 59.0),
    (["peak_of_sine", "v_rms=12"], 12.0 * math.sqrt(2.0)),
    (["iso_vg_midpoint", "grade=32"], 32e-6),
    (["cell_ratio", "r_forward=100", "r_reverse=2.2 kΩ"], 22.0),
    (["sequence_misses", "layout=F,N,R,N", "start=F", "seen=N,R,N,F"], 0.0),
])
def test_functions_on_values_of_the_checks(call, value):
    close(computed(*call)["value"], value, 1e-12)


def test_one_unit_serves_value_and_uncertainty_and_a_temperatures_width_has_no_zero_point():
    both = computed("winding_temperature", "r_cold=2", "t_cold=68±1.8°F", "r_hot=2.4", "k=234.5")
    assert both == computed("winding_temperature", "r_cold=2ohm", "t_cold=20±1degC", "r_hot=2.4", "k=234.5 K")
    plain = [computed("peak_of_sine", f"v_rms=12{sign}0.1{unit}")
             for sign in ("±", "+-", "+/-", " ± ") for unit in ("", " V")]
    assert all(one == plain[0] for one in plain)


def test_a_function_is_described_with_its_units_and_source():
    said = run("functions", "at_reference_temperature").stdout
    assert said.startswith("at_reference_temperature(r: ohm, t: degC, t_ref: degC, k: K) -> ohm\n")
    assert "source: IEC 60034-1" in said
    listed = json.loads(run("functions", "--json").stdout)
    assert len(listed) > 90 and all(one["source"] and one["tag"] and one["summary"] for one in listed)
