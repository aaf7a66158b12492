"""Accuracy specification of a meter -> named influences on a reading.

One reading has the half-width A = gain*|reading| + counts*resolution and u = A/sqrt(3) (rectangular, GUM 4.3.7).
Gain and counts are kept apart: the gain is one influence a range and follows the reading's sign, so it cancels in a
ratio; the counts are one influence a reading.  Both belong to one family a range (measured.py), which adds them
linearly within one reading and never lets counts cancel.  Resolution counts only where no counts cover it.
Data are texts as typed at the desk:

    {"id", "tag": "M1", "name", "calibrated": "2026-03-01", "due": "2027-03-01", "checked": true,
     "rated": {"low": "18", "high": "28", "tempco": "0.1"},      degC; specification per kelvin outside
     "functions": [{"function": "DC voltage", "quantity": "voltage", "leads": "0.02 ohm",
         "ranges": [{"name": "2 V", "upto": "2 V", "resolution": "0.1 mV", "gain": "0.05 %", "counts": "3"},
                    {"name": "10 V", "upto": "10 V", "class": "1.5 %", "full_scale": "10 V", "division": "0.2 V"}]}]}

Of these only tag, function, quantity, range name and upto must be there.  A class of full scale has
u = class*full_scale/sqrt(3); `division` is the smallest step that a person reads off the scale, u = division/sqrt(12).
Sources: checks 5.1; the rated window and its coefficient are common practice of meter makers (PRACTICE).
"""

import math

from fieldcheck.engine import entry
from fieldcheck.engine.errors import FieldcheckError, OutOfRange
from fieldcheck.engine.figures import decimal_text, parse_decimal
from fieldcheck.engine.frozen import frozen
from fieldcheck.engine.measured import Measured, influence, mean_of_repeats

_ROOT3 = math.sqrt(3.0)
_ROOT12 = math.sqrt(12.0)

IN_CALIBRATION = "in calibration"
OVERDUE = "overdue"
UNKNOWN = "unknown"
UNCHECKED = "unchecked"
NO_METER = "no meter"

REACTION_S = 0.2
"""Thumb reaction at each end of a timed interval, half-width in seconds (common practice, no source)."""


@frozen("name", "upto", "resolution", "gain", "counts", "full_scale_error", "division")
class Range:
    """One range, SI.  upto: largest reading; gain: ratio; counts: number of last digits; full_scale_error:
    half-width from the class; resolution, division: SI; 0.0 where not stated."""


@frozen("function", "quantity", "ranges", "leads")
class Function:
    """What a meter can be set to.  ranges: tuple of Range, smallest first; leads: half-width in ohm, 0.0 = none."""


@frozen("id", "tag", "name", "functions", "low", "high", "tempco", "calibrated", "due", "checked")
class Meter:
    """A meter read from its data.  functions: tuple; low, high: rated temperature in degC; tempco: share of the
    specification per kelvin outside; calibrated, due: ISO dates or ""; checked: False = the daily check is not done
    or failed."""


def _number(data, key, quantity, where):
    """The SI value of data[key], 0.0 when absent; a bare number is taken in the quantity's SI unit."""
    text = data.get(key) or ""
    if text == "":
        return 0.0
    try:
        if quantity == "count" or text[-1] in "0123456789.":
            return parse_decimal(text)
        return entry.read(text, quantity).values[0].base
    except FieldcheckError as error:
        raise FieldcheckError(key + " \"" + text + "\" is not understood: " + error.what, where, error.mend) from error


def _range(data, quantity, where):
    for key in ("name", "upto"):
        if not data.get(key):
            raise FieldcheckError("a range needs its " + key, where, "give the range's largest reading, as \"2 V\"")
    full_scale = _number(data, "full_scale", quantity, where) or _number(data, "upto", quantity, where)
    # The step of a thermometer is a difference: "0.1 K" read as a temperature would be near absolute zero.
    step = "temperature difference" if quantity == "temperature" else quantity
    return Range(data["name"], _number(data, "upto", quantity, where), _number(data, "resolution", step, where),
                 _number(data, "gain", "ratio", where), _number(data, "counts", "count", where),
                 _number(data, "class", "ratio", where) * full_scale, _number(data, "division", step, where))


def _function(data, where):
    for key in ("function", "quantity"):
        if not isinstance(data, dict) or not isinstance(data.get(key), str):
            raise FieldcheckError("a function needs its " + key, where, "enter it at the desk")
    where = where + " " + data["function"]
    ranges = [_range(one, data["quantity"], where) for one in data.get("ranges") or []]
    if not ranges:
        raise FieldcheckError("a function needs at least one range", where, "enter the range that is used")
    ranges.sort(key=lambda one: one.upto)
    return Function(data["function"], data["quantity"], tuple(ranges), _number(data, "leads", "resistance", where))


def _is_day(text):
    """True for a date in ISO form, so that dates compare as texts."""
    if not isinstance(text, str) or len(text) < 10:
        return False
    return text[4] + text[7] == "--" and (text[:4] + text[5:7] + text[8:10]).strip("0123456789") == ""


def meter(data):
    """The Meter of its data (see the head of this module).  FieldcheckError names the key that does not do."""
    if not isinstance(data.get("tag"), str):
        raise FieldcheckError("a meter needs a tag", "meter", "enter it at the desk")
    where = "meter " + data["tag"]
    for key in ("calibrated", "due"):
        if not _is_day(data.get(key) or "0000-00-00"):
            raise FieldcheckError(key + " is no date", where, "write it as 2026-03-01")
    rated = data.get("rated") or {}
    tempco = rated.get("tempco") or "0.1"
    return Meter(data.get("id", ""), data["tag"], data.get("name", ""),
                 tuple([_function(one, where) for one in data.get("functions") or []]),
                 parse_decimal(rated.get("low") or "18"), parse_decimal(rated.get("high") or "28"),
                 parse_decimal(tempco), data.get("calibrated") or "", data.get("due") or "",
                 data.get("checked") is not False)


def meter_state(meter, on_date):
    """"in calibration", "overdue" or "unknown" on an ISO date (its first ten characters count), or "unchecked"
    when in calibration but its check at the start or end of the day is missing or failed."""
    day = on_date[:10]
    if meter is None:
        return NO_METER
    if meter.due == "" or (meter.calibrated != "" and day < meter.calibrated[:10]):
        return UNKNOWN
    if day > meter.due[:10]:
        return OVERDUE
    return IN_CALIBRATION if meter.checked else UNCHECKED


def function_of(meter, function):
    """The Function of that name; OutOfRange names those there are."""
    for one in meter.functions:
        if one.function == function:
            return one
    known = ", ".join([one.function for one in meter.functions])
    raise OutOfRange("meter " + meter.tag + " has no function \"" + function + "\"", "",
                     "it has: " + known if known else "enter its specification at the desk")


def range_of(meter, function, range_name, size):
    """The Range that shows |reading| = size: the one named, else the smallest that covers it.  OutOfRange if none."""
    ranges = function_of(meter, function).ranges
    for one in ranges:
        if range_name and one.name != range_name:
            continue
        if size <= one.upto:
            return one
    if range_name and range_name not in [one.name for one in ranges]:
        raise OutOfRange("meter " + meter.tag + ", " + function + ": there is no range \"" + range_name + "\"", "",
                         "its ranges: " + ", ".join([one.name for one in ranges]))
    what = "the " + range_name + " range" if range_name else "every range"
    raise OutOfRange(decimal_text(size) + " (SI) is above " + what + " of meter " + meter.tag + ", " + function, "",
                     "check the entry, or name the range that was used")


def numbers_of(readings):
    """The list of numbers in an Entry, a Number or a list of Numbers."""
    if isinstance(readings, list):
        return readings
    values = getattr(readings, "values", None)
    return [readings] if values is None else list(values)


def _enlarged(meter, ambient):
    """Factor on the specification at an ambient temperature in degC (None = not taken = rated)."""
    if ambient is None:
        return 1.0
    outside = max(0.0, meter.low - ambient, ambient - meter.high)
    return 1.0 + meter.tempco * outside


def _with_range(value, one, factor, place, slot):
    """`value` with the influences of range `one` (its name in the meter: `place`) on the reading `slot`."""
    centre = value.value
    sign = -1.0 if centre < 0.0 else 1.0
    reading = ", reading " + slot
    result = value
    if one.gain:
        result = result + _signed("gain of " + place, one.gain * centre * factor / _ROOT3, place)
    if one.counts:
        result = result + _signed("counts of " + place + reading, sign * one.counts * one.resolution * factor / _ROOT3,
                                  place)
    if one.full_scale_error:
        result = result + _signed("class of " + place + reading, sign * one.full_scale_error * factor / _ROOT3, place)
    if one.division:
        result = result + influence(0.0, one.division / _ROOT12, "scale of " + place + reading)
    return result


def _signed(name, contribution, family):
    return Measured(0.0, {name: contribution}, {}, {name: family})


def _resolved(value, resolution, slot):
    return value + influence(0.0, resolution / _ROOT12, "resolution, reading " + slot)


def reading_value(readings, meter=None, function="", range_name=None, ambient=None, slot="", two_wire=False):
    """One reading, or the mean of its repeats, as a Measured in SI with all influences of its meter.

    readings: entry.Entry, entry.Number or list of Number, none of them bounded.  meter: Meter or None (then the
    resolution typed is the only influence and the verdict says so).  range_name: None = the smallest range that
    covers the largest repeat.  ambient: degC or None.  slot: names the reading.  two_wire: the leads are in it.
    Repeats are one reading: gain and counts are taken once, of the mean, and s/sqrt(n) beside them.
    OutOfRange when no range covers it, or a number is only a bound.
    """
    numbers = numbers_of(readings)
    for one in numbers:
        if one.bound:
            raise OutOfRange("reading " + slot + " is only a bound", "", "it can be judged, not calculated with")
    value = mean_of_repeats([float(one.base) for one in numbers], "reading " + slot)
    typed = max([float(one.resolution_base) for one in numbers])
    if meter is None:
        return _resolved(value, typed, slot)
    size = max([abs(float(one.base)) for one in numbers])
    used = range_of(meter, function, range_name, size)
    place = meter.tag + " " + function + " " + used.name + " range"
    result = _with_range(value, used, _enlarged(meter, ambient), place, slot)
    if not (used.counts >= 1.0 and used.resolution) and not used.division:
        result = _resolved(result, used.resolution or typed, slot)
    leads = function_of(meter, function).leads
    if two_wire and leads:
        result = result + influence(0.0, leads / _ROOT3, "leads of " + meter.tag + ", reading " + slot)
    return result


def reading_list(readings, meter=None, function="", range_name=None, ambient=None, slot="", two_wire=False):
    """Each repeat as a reading of its own (for median, maximum, spread): a list of Measured, no type A influence."""
    numbers = numbers_of(readings)
    return [reading_value(numbers[i], meter, function, range_name, ambient, slot + "/" + str(i + 1), two_wire)
            for i in range(len(numbers))]


MIXED_REPEATS = ("some of the repeats are out of the meter's range and some are not", "",
                 "repeat the set on a range that shows them all")
"""What is said of repeats of which only some are figures."""


def bound_of(readings, meter=None, function="", range_name=None):
    """(">" or "<", bound in SI or None) when a reading is only a bound, else None.

    An overload without a figure lies above the range named, else above the meter's largest; without a meter its
    bound is unknown (None).  Of repeats that all lie beyond a bound the one that says least counts; OutOfRange when
    only some do, for then neither their mean nor its bound is known.
    """
    kind = getattr(readings, "kind", "value")
    numbers = numbers_of(readings)
    sides = [one.bound for one in numbers if one.bound]
    if sides:
        if len(sides) < len(numbers) or [side for side in sides if side != sides[0]]:
            raise OutOfRange(*MIXED_REPEATS)
        sizes = [float(one.base) for one in numbers]
        return (sides[0], min(sizes) if sides[0] == ">" else max(sizes))
    if kind not in ("over", "under"):
        return None
    if kind == "under" or meter is None:
        return ("<" if kind == "under" else ">", None)
    ranges = function_of(meter, function).ranges
    named = [one for one in ranges if one.name == range_name]
    return (">", (named or [ranges[-1]])[0].upto)


def stopwatch_value(readings, slot="", reaction_s=REACTION_S):
    """A time by hand, or the mean of its repeats: the thumb's reaction at both ends, rectangular, once a reading.

    Checks 7.6 (common practice, no source): 0.2 s at each end, so u = 0.2*sqrt(2)/sqrt(3) s.
    """
    numbers = numbers_of(readings)
    value = mean_of_repeats([float(one.base) for one in numbers], "reading " + slot)
    for end in ("start", "end"):
        value = value + influence(0.0, reaction_s / _ROOT3, "reaction at the " + end + ", reading " + slot)
    return value
