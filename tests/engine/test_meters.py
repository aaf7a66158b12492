"""Meter data as typed at the desk, which range is taken, which influences a reading gets."""

import math

import pytest

from fieldcheck.engine import entry, meters
from fieldcheck.engine import measured as m
from fieldcheck.engine.errors import FieldcheckError, OutOfRange

DATA = {
    "id": "abc", "tag": "M1", "name": "bench multimeter", "calibrated": "2026-03-01", "due": "2027-03-01",
    "rated": {"low": "18", "high": "28", "tempco": "0.1"},
    "functions": [
        {"function": "DC voltage", "quantity": "voltage", "ranges": [
            {"name": "20 V", "upto": "20 V", "resolution": "10 mV", "gain": "0.05 %", "counts": "3"},
            {"name": "2 V", "upto": "2 V", "resolution": "0.1 mV", "gain": "0.05 %", "counts": "3"}]},
        {"function": "resistance", "quantity": "resistance", "leads": "0.02 ohm", "ranges": [
            {"name": "200 ohm", "upto": "200 ohm", "resolution": "0.1 ohm", "gain": "1 %", "counts": "2"}]},
        {"function": "pointer volts", "quantity": "voltage", "ranges": [
            {"name": "10 V", "upto": "10 V", "class": "1.5 %", "full_scale": "10 V", "division": "0.2 V"}]},
    ],
}
METER = meters.meter(DATA)


def read(text, function="DC voltage", quantity="voltage", **more):
    return meters.reading_value(entry.read(text, quantity), METER, function, slot="a", **more)


def test_the_smallest_range_that_covers_the_largest_repeat_is_taken():
    assert "gain of M1 DC voltage 2 V range" in read("2.0000 V").parts
    assert "gain of M1 DC voltage 20 V range" in read("1.9 2.1 V").parts
    assert "gain of M1 DC voltage 20 V range" in read("1.5 V", range_name="20 V").parts
    assert "gain of M1 DC voltage 2 V range" in read("-1.5 V").parts


@pytest.mark.parametrize(("call", "words"), [
    (lambda: read("25 V"), "every range"),
    (lambda: read("2.5 V", range_name="2 V"), "the 2 V range"),
    (lambda: read("1 V", range_name="7 V"), 'no range "7 V"'),
    (lambda: read("1 V", function="AC voltage"), 'no function "AC voltage"'),
    (lambda: read(">2 V"), "only a bound"),
])
def test_what_the_meter_cannot_have_shown_is_refused_in_words(call, words):
    with pytest.raises(OutOfRange, match=words):
        call()


def test_two_readings_on_one_range_share_their_gain_and_nothing_else():
    a = meters.reading_value(entry.read("1.5 V", "voltage"), METER, "DC voltage", slot="a")
    b = meters.reading_value(entry.read("0.5 V", "voltage"), METER, "DC voltage", slot="b")
    assert set(a.parts) & set(b.parts) == {"gain of M1 DC voltage 2 V range"}
    assert (a / b).parts["gain of M1 DC voltage 2 V range"] == pytest.approx(0.0, abs=1e-18)


def test_the_contributions_follow_the_sign_of_the_reading():
    plus, minus = read("1.2 V"), read("-1.2 V")
    assert minus.parts == {name: -part for name, part in plus.parts.items()}
    assert m.combined(plus) == m.combined(minus)


def test_an_analogue_meter_has_its_class_of_full_scale_and_the_smallest_step_read():
    """Checks 5.1: class% * full scale / sqrt(3), and division / sqrt(12)."""
    got = read("6.4 V", "pointer volts")
    assert m.combined(got) == pytest.approx(math.hypot(0.15 / math.sqrt(3.0), 0.2 / math.sqrt(12.0)), rel=1e-14)


def test_leads_count_only_when_they_are_in_the_reading():
    four, two = (read("120.0 ohm", "resistance", "resistance", two_wire=wires) for wires in (False, True))
    assert set(two.parts) - set(four.parts) == {"leads of M1, reading a"}
    assert two.parts["leads of M1, reading a"] == pytest.approx(0.02 / math.sqrt(3.0), rel=1e-15)


@pytest.mark.parametrize(("ambient", "factor"), [(None, 1.0), (18.0, 1.0), (28.0, 1.0), (33.0, 1.5), (8.0, 2.0)])
def test_outside_its_rated_temperature_the_specification_grows_by_a_tenth_per_kelvin(ambient, factor):
    """Design section 5; the coefficient is common practice of meter makers (PRACTICE)."""
    assert m.combined(read("1.5 V", ambient=ambient)) == pytest.approx(factor * m.combined(read("1.5 V")), rel=1e-14)


def test_repeats_are_one_reading_of_their_mean_with_a_type_a_influence():
    got = read("1.501 1.503 1.505 V")
    assert got.value == pytest.approx(1.503, rel=1e-15)
    assert got.parts["repeats of reading a"] == pytest.approx(0.002 / math.sqrt(3.0), rel=1e-9)
    assert got.dofs == {"repeats of reading a": 2}
    assert len([name for name in got.parts if name.startswith("counts")]) == 1


def test_each_repeat_as_its_own_reading_for_median_and_maximum():
    each = meters.reading_list(entry.read("1.501 1.503 1.505 V", "voltage"), METER, "DC voltage", slot="drop")
    assert [one.value for one in each] == [1.501, 1.503, 1.505]
    assert "counts of M1 DC voltage 2 V range, reading drop/2" in each[1].parts
    assert not [name for one in each for name in one.parts if name.startswith(m.REPEATS)]


def test_without_a_meter_the_digits_typed_are_the_only_influence():
    got = meters.reading_value(entry.read("1.50 V", "voltage"), slot="a")
    assert got.parts == {"resolution, reading a": pytest.approx(0.01 / math.sqrt(12.0), rel=1e-12)}


@pytest.mark.parametrize(("on", "state"), [
    ("2026-12-01", "in calibration"), ("2027-03-01T08:00:00.000Z", "in calibration"), ("2027-03-02", "overdue"),
    ("2026-02-28", "unknown"),
])
def test_calibration_by_date(on, state):
    assert meters.meter_state(METER, on) == state


def test_calibration_without_a_date_a_check_or_a_meter():
    assert meters.meter_state(METER.replace(due=""), "2026-12-01") == "unknown"
    assert meters.meter_state(METER.replace(checked=False), "2026-12-01") == "unchecked"
    assert meters.meter_state(METER.replace(checked=False), "2028-01-01") == "overdue"
    assert meters.meter_state(None, "2026-12-01") == "no meter"


@pytest.mark.parametrize(("text", "quantity", "meter", "range_name", "want"), [
    (">200 Mohm", "resistance", None, None, (">", 200e6)), ("<0.1 V", "voltage", METER, None, ("<", 0.1)),
    ("1.5 V", "voltage", METER, None, None), ("OL", "voltage", METER, "2 V", (">", 2.0)),
    ("OL", "voltage", METER, None, (">", 20.0)), ("OL", "voltage", None, None, (">", None)),
])
def test_what_a_bounded_reading_is_known_to_exceed(text, quantity, meter, range_name, want):
    got = meters.bound_of(entry.read(text, quantity), meter, "DC voltage", range_name)
    assert got == (want if want is None else (want[0], want[1] if want[1] is None else pytest.approx(want[1])))


def test_a_hand_stopped_time_carries_the_thumb_at_both_ends():
    """Checks 7.6 (PRACTICE): 0.2 s at each end, rectangular."""
    got = meters.stopwatch_value(entry.read("12.34 s", "time"), slot="trip")
    assert got.value == 12.34
    assert m.combined(got) == pytest.approx(0.2 * math.sqrt(2.0 / 3.0), rel=1e-14)


@pytest.mark.parametrize(("change", "words"), [
    ({"gain": "0.05"}, None), ({"gain": "a bit"}, "gain"), ({"resolution": "10 ohm"}, "resolution"),
    ({"upto": ""}, "upto"), ({"counts": "three"}, "counts"),
])
def test_a_specification_that_makes_no_sense_names_its_key_and_place(change, words):
    line = {"name": "2 V", "upto": "2 V", "resolution": "0.1 mV", "gain": "0.05 %", "counts": "3", **change}
    data = {"tag": "M9", "functions": [{"function": "DC voltage", "quantity": "voltage", "ranges": [line]}]}
    if words is None:
        assert meters.meter(data).functions[0].ranges[0].gain == 0.05      # a bare number is the ratio itself
        return
    with pytest.raises(FieldcheckError, match=words) as caught:
        meters.meter(data)
    assert caught.value.where == "meter M9 DC voltage"


@pytest.mark.parametrize("step", ["0.1 K", "0.1 degC", "0.1"])
def test_the_resolution_of_a_thermometer_is_a_difference_however_its_unit_is_written(step):
    span = {"name": "200 degC", "upto": "200 degC", "resolution": step, "counts": "5"}
    thermometer = meters.meter({"tag": "T1", "functions": [
        {"function": "temperature", "quantity": "temperature", "ranges": [span]}]})
    read = meters.reading_value(entry.read("30.5", "temperature"), thermometer, "temperature")
    assert m.combined(read) == pytest.approx(0.5 / 3 ** 0.5, rel=1e-12)  # 5 counts of 0.1 K, rectangular (GUM 4.3.7)


@pytest.mark.parametrize(("text", "bound"), [
    (">200 >100 ohm", (">", 100.0)), ("<0.2 <0.5 ohm", ("<", 0.5)), (">200 ohm", (">", 200.0)),
])
def test_of_repeats_beyond_a_bound_the_one_that_says_least_counts(text, bound):
    assert meters.bound_of(entry.read(text, "resistance"), METER, "resistance") == bound


@pytest.mark.parametrize("text", ["0.3 >200 ohm", "<0.1 >200 ohm"])
def test_repeats_of_which_only_some_are_figures_have_no_bound(text):
    with pytest.raises(OutOfRange, match="some of the repeats"):
        meters.bound_of(entry.read(text, "resistance"), METER, "resistance")
