"""The registry of physics functions: every row is complete, calls what it names, and refuses what it should."""

import inspect

import pytest

from fieldcheck.engine import measured, units
from fieldcheck.engine.errors import FieldcheckError, NotFound
from fieldcheck.engine.physics import registry
from fieldcheck.engine.physics.registry import REGISTRY, call

TAGS = {"READ", "READ-2", "MEM", "MEM+", "MEM?", "PRACTICE", "DERIVED", "CALC", "FACT"}
FOUR = ["F", "N", "R", "N"]


def signature(function):
    return inspect.signature(getattr(registry._module(function.module), function.target))


@pytest.mark.parametrize("name", list(REGISTRY))
def test_row_agrees_with_the_function_it_names(name):
    function = REGISTRY[name]
    given = signature(function).parameters
    assert [one.name for one in function.parameters] == list(given), name
    for one in function.parameters:
        has_default = given[one.name].default is not inspect.Parameter.empty
        # a run of a sequencer may be given whole, so its parts are optional in the row alone
        assert one.optional == has_default or (function.module == "sequencers" and one.name in ("start", "seen"))


@pytest.mark.parametrize("name", list(REGISTRY))
def test_row_is_complete(name):
    function = REGISTRY[name]
    assert function.tag in TAGS
    assert function.source and function.summary and not function.summary.endswith(".")
    assert units.quantity(function.returns).base_unit == function.unit
    for one in function.parameters:
        assert one.kind in ("value", "list", "text", "texts")
        assert (one.quantity == "") == (one.kind in ("text", "texts"))
        if one.quantity:
            assert units.quantity(one.quantity).base_unit == one.unit
    assert name.isidentifier() and name == name.lower()


def test_reads_like_a_mapping():
    assert len(REGISTRY) == len(list(REGISTRY)) == len(REGISTRY.keys()) > 90
    assert "trip_time_cold" in REGISTRY and "trip_time" not in REGISTRY
    assert REGISTRY.get("trip_time") is None
    assert REGISTRY["trip_time_cold"] is REGISTRY["trip_time_cold"]


def test_a_function_says_what_it_takes_and_gives():
    function = REGISTRY["trip_time_hot"]
    assert [(one.name, one.quantity, one.unit, one.kind) for one in function.parameters] == [
        ("i", "current", "A", "value"), ("i_preload", "current", "A", "value"), ("i_limit", "current", "A", "value"),
        ("tau", "time", "s", "value")]
    assert (function.returns, function.unit, function.module) == ("time", "s", "breakers")


# one call a module; the values stand in the checks at the section named
@pytest.mark.parametrize(("name", "given", "expected"), [
    ("at_reference_temperature", {"r": 1.234, "t": 18.5, "t_ref": 20, "k": 234.5}, 1.241316205533597),       # 1.1
    ("half_wave_best_load", {"r_forward": 120, "r_reverse": 2700}, 307.09415652737),                         # 4.2
    ("undisturbed_voltage", {"indicated": 1.0, "r_source": 1e6, "r_meter": 1e7}, 1.1),                       # 5.3
    ("trip_time_cold", {"i": 4.5, "i_limit": 3.0, "tau": 60.0}, 35.267199894127145),                         # 7.1
    ("breaker_fit_tau", {"currents": [4.5, 9.0], "times": [35.267199894127145, 7.066982139383008]}, 60.0),   # 7.3
    ("breaker_fit_limiting_current", {"currents": [4.5, 9.0], "times": [35.267199894127145, 7.066982139383008],
                                      "preloads": [0.0, 0.0]}, 3.0),
    ("awg_diameter", {"gauge": 18}, 1.0236873428326523e-3),                                                  # 7.5
    ("preece_current", {"metal": "copper", "diameter": 5e-4}, 28.292674383760424),
    ("failure_rate_upper_bound", {"failures": 0, "pulses": 40}, 0.07215752450551455),                        # 8.3
    ("sequence_misses", {"layout": FOUR, "start": "F", "seen": list("NRNNFNRNF")}, 1.0),                     # 8.4
    ("viscosity_at", {"t": 20.0, "t1": 40.0, "nu1": 32e-6, "t2": 100.0, "nu2": 5.4e-6}, 86.27785737773178e-6),  # 11.2
    ("like_with_like", {"r": 0.030, "group": [0.020, 0.030]}, 1.5)])                                         # 12.2
def test_calls_reach_the_function(name, given, expected):
    assert measured.value_of(call(name, given)) == pytest.approx(expected, rel=2e-12)


def test_a_run_may_be_given_whole():
    run = {"layout": {"positions": ["F", "N1", "R", "N3"], "symbols": FOUR}, "start": "F", "seen": list("NRNNFNRNF")}
    assert call("sequence_misses", {"layout": run}) == 1.0
    assert call("sequence_resolved", {"layout": run}) == 1.0


def test_measured_values_pass_through_whole():
    r = measured.influence(1.0, 0.01, "gain")
    assert call("improvement", {"found": r, "left": r * 0.25}).parts["gain"] == pytest.approx(0.0, abs=1e-16)


def test_whole_numbers_become_floats_and_a_lone_value_a_list():
    assert isinstance(call("peak_of_sine", {"v_rms": 10}), float)
    assert call("mismatch", {"values": 20.0}) == 1.0


@pytest.mark.parametrize(("name", "given", "error", "said"), [
    ("trip_time_colt", {}, NotFound, "there is no function trip_time_colt\n    did you mean trip_time_cold?"),
    ("reclose_time", {"r": 0.7}, FieldcheckError,
     "reclose_time: reclose_time needs tau_cooling\n    its arguments are r, tau_cooling"),
    ("reclose_time", {"r": 0.7, "tau_cooling": 60.0, "tau": 1.0}, FieldcheckError,
     "reclose_time: reclose_time has no argument tau\n    its arguments are r, tau_cooling"),
    ("reclose_time", {"r": [0.7, 0.8], "tau_cooling": 60.0}, FieldcheckError,
     "reclose_time, r: this argument is one value, not a list\n    name one row, or take the median"),
    ("reclose_time", {"r": "0.7", "tau_cooling": 60.0}, FieldcheckError, "reclose_time, r: this argument is a number"),
    ("resistivity_of", {"metal": 3.0}, FieldcheckError, "resistivity_of, metal: this argument is a word"),
    ("sequence_misses", {"layout": FOUR}, FieldcheckError,
     "sequence_misses: sequence_misses needs what the drum showed after each pulse"),
    ("sequence_misses", {"layout": 4.0, "start": "F", "seen": ["N"]}, FieldcheckError,
     "sequence_misses, layout: this argument is a list of words")])
def test_refusals_say_what_and_how_to_mend(name, given, error, said):
    with pytest.raises(error) as caught:
        call(name, given)
    assert str(caught.value) == said


def test_modules_needed_are_what_a_module_imports():
    assert registry.modules_needed("trip_time_cold") == ("breakers",)
    assert registry.modules_needed("count_agrees") == ("sequencers", "pulses")
    for name in REGISTRY:
        module = registry._module(REGISTRY[name].module)
        own = {word.split(".")[3] for word in inspect.getsource(module).split() if
               word.startswith("fieldcheck.engine.physics.")}
        assert own == set(registry.modules_needed(name)[:-1])
