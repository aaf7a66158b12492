"""Exit 0 fine, 1 the check failed, 2 used wrongly; results on standard output, talk on standard error; no traceback."""

import json
import subprocess
import sys

import pytest
from commands import run

FOUR_WIRE = ["functions", "four_wire_resistance", "v_minus=-1", "i=1"]


def refused(*arguments, given=""):
    """What is said on standard error of a call that is refused with 2 and prints no result."""
    result = run(*arguments, given=given)
    assert result.exit_code == 2 and result.stdout == "", result.stdout
    assert "Traceback" not in result.stderr
    return result.stderr


@pytest.mark.parametrize(("arguments", "said"), [
    (["functions", "nosuch"], "there is no function nosuch"),
    (["functions", "at_reference_tempreature"], "did you mean at_reference_temperature?"),
    (["functions", "__proto__"], "there is no function __proto__"),
    (["functions", "peak_of_sine", "v_rms"], '"v_rms" is not an argument'),
    (["functions", "peak_of_sine", "volts=5"], "v_rms: V"),
    (["functions", "at_reference_temperature", "r=5"], "needs t"),
    (["functions", "peak_of_sine", "v_rms=5 ohm"], "which is not a unit of voltage"),
    (["functions", "peak_of_sine", "v_rms="], "nothing was typed"),
    (["functions", "peak_of_sine", "v_rms=1,234"], "1.234 or 1234?"),
    (["functions", "peak_of_sine", "v_rms=OL"], "out of range where a value is wanted"),
    (["functions", "peak_of_sine", "v_rms=1 2 3"], "holds 3 values where one is wanted"),
    (["functions", "peak_of_sine", "v_rms=1e309"], "exponent beyond 30"),
    (["functions", "mismatch", "values=1,,2"], "values[1]: nothing was typed"),
    (["functions", "awg_diameter", "gauge=12.5"], "not a whole number"),
    (["functions", "resistivity_of", "metal=unobtainium"], "known are: copper"),
    (["functions", "sequence_misses", "layout=FNRN", "start=F", "seen=NRNX"], 'does not show "X"'),
    ([*FOUR_WIRE, "v_plus=1±V"], "does not begin with a number"),
    ([*FOUR_WIRE, "v_plus=±0.1V"], "does not begin with a number"),
    ([*FOUR_WIRE, "v_plus=1±-0.1V"], "a standard uncertainty is zero or more"),
    ([*FOUR_WIRE, "v_plus=1±0.1A"], "not a unit of voltage"),
    ([*FOUR_WIRE, "v_plus=1±2±3"], "not a unit of voltage"),
    ([*FOUR_WIRE, "v_plus=1", "v_plus=2"], "v_plus is given twice"),
    (["functions", "four_wire_resistance", "v_plus=1", "v_minus=-1", "i=0"], "must be above zero"),
    (["evaluate", "nosuch.json"], "cannot read nosuch.json"),
    (["evaluate", "."], "cannot read ."),
    (["assess"], "name a run file"),
    (["assess", "nosuch.json"], "cannot read nosuch.json"),
    (["assess", "--template", "nosuch"], 'there is no procedure "nosuch"'),
    (["rules", "show", "nosuch"], 'there is no procedure "nosuch"'),
    (["rules", "check", "nosuch"], "does not exist"),
    (["job", "list"], "there is no journal here"),
    (["job", "show", "5"], "there is no journal here"),
    (["journal", "verify"], "there is no journal here"),
    (["journal", "rebuild"], "there is no journal here"),
    (["record", "make", "5"], "there is no workshop here"),
    (["record", "verify", "nosuch.pdf"], "does not exist"),
    (["serve", "--port", "x"], "not a valid integer"),
    (["nosuch"], "No such command"),
    (["--nosuch"], "No such option"),
])
def test_wrong_use_is_refused_with_what_and_mend(arguments, said):
    assert said in refused(*arguments)


VOLTS, AMPS = {"value": 1, "u": 0.1}, {"value": 2, "u": 0.1}


def model(formula="V / I", **more):
    return {"formula": formula, "quantities": {"V": VOLTS, "I": AMPS}, **more}


@pytest.mark.parametrize(("given", "said"), [
    ("", "not JSON"), ("{", "-:1: not JSON"), ("\n\n{,}", "-:3: not JSON"),
    ("[]", 'needs a "formula"'), ("null", "formula"),
    ({"formula": 5, "quantities": {}}, 'needs a "formula"'), ({"formula": "V"}, 'needs "quantities"'),
    (model(quantities=[]), 'needs "quantities"'),
    (model(quantities={"V": 5}), 'quantities.V: a quantity needs a "value"'),
    (model(quantities={"V": VOLTS}), 'there is no "I"'), (model("V /"), "is not a formula"),
    (model("__import__('os')"), 'there is no function "__import__"'), (model("V ** 2"), "not allowed in a formula"),
    (model("V < I"), "it gives no value"), (model("sqrt(-V)"), "square root of a negative value"),
    (model("V / (I - 2)"), "a divisor is zero"),
    (model(coverage="120 %"), 'write "95 %"'), (model(coverage=95), "coverage 95"),
    (model(unit="V"), 'unknown key "unit"'), (model(quantities={"V": {"value": 1, "unit": "V"}}), 'unknown key "unit"'),
    (model(quantities={"V": {"value": "1,5"}}), "not a plain decimal number"),
    (model("V", quantities={"V": {"value": True}}), "true is not a number"),
    (model("V", quantities={"V": {"value": "1e999"}}), "too large"),
    ('{"formula": "V", "quantities": {"V": {"value": NaN}}}', "must be finite"),
    (model("V", quantities={"V": {"value": 1, "u": -1}}), "a standard uncertainty is zero or more"),
    (model("V", quantities={"V": {"value": 1, "u": 1, "dof": 0}}), "degrees of freedom are 1 or more"),
    (model("V * V", quantities={"V": {"value": 1e300, "u": 1e300}}), "too large to be computed with"),
    (model(correlations=[["V", "I", 1.5]]), "correlations[0]: a correlation lies between -1 and 1"),
    (model(correlations=[["V", "Q", 0.5]]), '"Q" is not among the quantities'),
    (model(correlations=[["V", "I"]]), "two names and a number"), (model(correlations="V"), "correlations are a list"),
    (model(correlations=[["V", "V", 0.5]]), "stands on both sides"),
    (model(correlations=[["V", "I", 0.5], ["I", "V", -0.5]]), "is given twice"),
    (model("V + I + W", quantities={"V": VOLTS, "I": AMPS, "W": VOLTS},
           correlations=[["V", "I", -0.9], ["I", "W", -0.9], ["V", "W", -0.9]]), "no quantities can be correlated so"),
])
def test_a_model_that_cannot_be_meant_is_refused(given, said):
    assert said in refused("evaluate", "-", given=given if isinstance(given, str) else json.dumps(given))


def a_run(**more):
    return {"procedure": "contact-cleaning", **more}


@pytest.mark.parametrize(("given", "said"), [
    ("{", "not JSON"), ([], "must be an object"), ({}, '"procedure" is missing'),
    ({"procedure": 5}, "must be a string"),
    ({"procedure": "nosuch"}, 'there is no procedure "nosuch"'), (a_run(anwsers=[]), "did you mean answers?"),
    (a_run(depth="deep"), "use one of: routine, full"), (a_run(on="yesterday"), "is not a date"),
    (a_run(answers=[{"text": "5"}]), '"step" is missing'), (a_run(answers=[{"step": "nosuch"}]), 'no step "nosuch"'),
    (a_run(left=[{"step": "nosuch", "reason": "x"}]), 'no step "nosuch"'),
    (a_run(left=[{"step": "run"}]), '"reason" is missing'),
    (a_run(nameplate={"nosuch": "1"}), 'no nameplate field "nosuch"'),
    (a_run(conditions={"ambient": "hot"}), "run.conditions.ambient"),
    (a_run(conditions={"ambience": "20 °C"}), "did you mean ambient?"),
    (a_run(meters=[{"tag": 5, "functions": []}]), "run.meters[0].tag"),
    (a_run(meters=[{"tag": "M1", "functions": [{}]}]), '"function" is missing'),
    (a_run(meters=[{"tag": "M1", "functions": [{"function": "x", "quantity": "voltage", "ranges": []}]}]),
     "at least one range"),
    (a_run(meters=[{"tag": "M1", "functions": [{"function": "x", "quantity": "voltage", "ranges": [
        {"name": "2 V", "upto": "2 ohm"}]}]}]), 'upto "2 ohm" is not understood'),
    (a_run(defects=[{"what": "x", "level": "bad"}]), "use one of: stop use"),
])
def test_a_run_that_cannot_be_meant_is_refused(given, said):
    assert said in refused("assess", "-", given=given if isinstance(given, str) else json.dumps(given))


def test_a_reading_that_cannot_be_read_is_refused_at_its_place():
    given = a_run(answers=[{"step": "insulation", "text": "12 volts"}])
    assert refused("assess", "-", given=json.dumps(given)).startswith("insulation: ")


def test_an_empty_template_is_not_judged_and_says_what_comes_next():
    """Exit 1: the readings allow less than serviceable. What stays empty is not answered, let alone passed."""
    template = run("assess", "--template", "contact-cleaning")
    assert template.exit_code == 0 and template.stderr == ""
    said = run("assess", "-", "--json", given=template.stdout)
    found = json.loads(said.stdout)
    assert said.exit_code == 1 and found["outcome"] == "unserviceable" and not found["complete"] and found["next"]
    assert {one["final"] for one in found["verdicts"].values()} == {"not judged"}


def test_a_check_that_fails_exits_with_1_and_talks_on_standard_error(tmp_path):
    (tmp_path / "procedures").mkdir()
    result = run("rules", "check", str(tmp_path))
    assert result.exit_code == 1 and result.stderr.endswith(" errors\n") and "cannot be read" in result.stdout
    (tmp_path / "a.pdf").write_bytes(b"no PDF")
    result = run("record", "verify", str(tmp_path / "a.pdf"))
    assert (result.exit_code, result.stdout, result.stderr) == (1, "This is not a PDF file.\n", "")


@pytest.mark.parametrize(("arguments", "code"), [
    (["--version"], 0), (["functions", "peak_of_sine", "v_rms=12"], 0), (["functions", "nosuch"], 2),
    (["job", "list"], 2)])
def test_a_process_of_its_own_says_the_same(arguments, code, tmp_path):
    done = subprocess.run([sys.executable, "-m", "fieldcheck", *arguments], capture_output=True, text=True, check=False,
                          env={"HOME": str(tmp_path), "PATH": "/usr/bin:/bin", "PYTHONPATH": ":".join(sys.path)})
    assert done.returncode == code and "Traceback" not in done.stderr
    assert bool(done.stdout) == (code == 0) and bool(done.stderr) == (code != 0)


def test_a_reader_that_stops_reading_is_no_error():
    environment = {"PATH": "/usr/bin:/bin", "PYTHONPATH": ":".join(sys.path)}
    done = subprocess.run(f"{sys.executable} -m fieldcheck functions --json | head -c 10", shell=True,
                          capture_output=True, text=True, check=False, env=environment)
    assert len(done.stdout) == 10 and "Traceback" not in done.stderr
