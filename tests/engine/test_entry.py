"""What a thumb types. Letter codes: IEC 60062 as read for checks section 15; values of a series: package eseries."""

from fractions import Fraction

import eseries
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldcheck.engine import units
from fieldcheck.engine.entry import Entry, echo, read
from fieldcheck.engine.errors import EntryError, FieldcheckError, UnitError

THIN, NARROW_NO_BREAK, NO_BREAK, MINUS = "\u2009", "\u202f", "\u00a0", "\u2212"


def refused(text, name="voltage", **options):
    with pytest.raises(EntryError) as caught:
        read(text, name, **options)
    assert caught.value.mend.startswith("type one " + name)
    assert units.quantity(name).example in caught.value.mend
    return caught.value


# (typed, quantity, value in the unit, unit, base, size of the last digit in the base)
PLAIN = [
    ("120", "resistance", 120.0, "ohm", 120.0, 1.0),
    ("-0,5", "voltage", -0.5, "V", -0.5, 0.1),
    (MINUS + "0.5", "voltage", -0.5, "V", -0.5, 0.1),
    ("+3.30", "voltage", 3.3, "V", 3.3, 0.01),
    ("1.50", "voltage", 1.5, "V", 1.5, 0.01),
    ("2.75 k\u2126", "resistance", 2.75, "kohm", 2750.0, 10.0),
    ("2.75k\u03a9", "resistance", 2.75, "kohm", 2750.0, 10.0),
    ("2,75" + NARROW_NO_BREAK + "k\u03a9", "resistance", 2.75, "kohm", 2750.0, 10.0),
    ("2.75 k", "resistance", 2.75, "kohm", 2750.0, 10.0),
    ("5 m", "resistance", 5.0, "mohm", 0.005, 0.001),
    ("1.5e3 ohm", "resistance", 1500.0, "ohm", 1500.0, 100.0),
    ("1.5E-3", "current", 0.0015, "A", 0.0015, 0.0001),
    ("72 °F", "temperature", 72.0, "degF", 200 / 9, 5 / 9),
    ("72 F", "temperature", 72.0, "degF", 200 / 9, 5 / 9),
    ("22,5 ° C", "temperature", 22.5, "degC", 22.5, 0.1),
    ("300 K", "temperature", 300.0, "K", 26.85, 1.0),
    ("90 µWb", "flux", 90.0, "uWb", 9e-5, 1e-6),
    ("90 \u03bcWb", "flux", 90.0, "uWb", 9e-5, 1e-6),
    ("90 uWb", "flux", 90.0, "uWb", 9e-5, 1e-6),
    (".5", "voltage", 0.5, "V", 0.5, 0.1),
    ("1.", "voltage", 1.0, "V", 1.0, 1.0),
    ("12,", "voltage", 12.0, "V", 12.0, 1.0),
    ("-0.00", "voltage", 0.0, "V", 0.0, 0.01),
    ("32 cSt", "viscosity", 32.0, "mm2/s", 32e-6, 1e-6),
    ("265", "penetration", 265.0, "0.1 mm", 0.0265, 0.0001),
    ("265 × 0.1 mm", "penetration", 265.0, "0.1 mm", 0.0265, 0.0001),
    ("45 %", "humidity", 45.0, "%RH", 0.45, 0.01),
    ("22.5", "ratio", 22.5, "1", 22.5, 0.1),
    ("40", "count", 40.0, "1", 40.0, 1.0),
    ("0.00393 1/K", "temperature coefficient", 0.00393, "1/K", 0.00393, 1e-5),
    ("1:23.4", "time", 83.4, "s", 83.4, 0.1),
    ("1:23,45", "time", 83.45, "s", 83.45, 0.01),
    ("0:07", "time", 7.0, "s", 7.0, 1.0),
    ("1:02:03", "time", 3723.0, "s", 3723.0, 1.0),
    ("1:23.4 s", "time", 83.4, "s", 83.4, 0.1),
    ("2.5 min", "time", 2.5, "min", 150.0, 6.0),
]


@pytest.mark.parametrize(("text", "name", "value", "symbol", "base", "resolution"), PLAIN)
def test_one_value(text, name, value, symbol, base, resolution):
    found = read(text, name)
    assert (found.kind, found.text, len(found.values)) == ("value", text, 1)
    number = found.values[0]
    assert (number.value, number.unit.symbol, number.base, number.bound) == (value, symbol, base, "")
    assert number.resolution_base == pytest.approx(resolution, rel=1e-15)
    assert found.unit == number.unit


# IEC 60062, checks section 15: R47 = 0.47 ohm, 4R7, 470R, 4K7, 47K, 47K3 = 47.3 k, 470K, 4M7; L milliohm, G giga;
# capacitors p n u m F; R300 = 0.300 ohm, R10 = 0.1 ohm. The resolution is one of the last digit.
CODES = [("R47", "resistance", 0.47, 0.01), ("4R7", "resistance", 4.7, 0.1), ("470R", "resistance", 470.0, 1.0),
         ("4K7", "resistance", 4700.0, 100.0), ("47K", "resistance", 47e3, 1e3), ("47K3", "resistance", 47300.0, 100.0),
         ("470K", "resistance", 470e3, 1e3), ("4M7", "resistance", 4.7e6, 1e5), ("470L", "resistance", 0.47, 0.001),
         ("4L7", "resistance", 0.0047, 0.0001), ("4G7", "resistance", 4.7e9, 1e8), ("2k75", "resistance", 2750.0, 10.0),
         ("R300", "resistance", 0.3, 0.001), ("R10", "resistance", 0.1, 0.01), ("4R7 Ω", "resistance", 4.7, 0.1),
         ("4n7", "capacitance", 4.7e-9, 1e-10), ("p47", "capacitance", 4.7e-13, 1e-14),
         ("100n", "capacitance", 1e-7, 1e-9), ("2µ2", "capacitance", 2.2e-6, 1e-7),
         ("3m3", "capacitance", 3.3e-3, 1e-4)]


@pytest.mark.parametrize(("text", "name", "base", "resolution"), CODES)
def test_letter_codes(text, name, base, resolution):
    number = read(text, name).values[0]
    assert number.base == base
    assert number.resolution_base == pytest.approx(resolution, rel=1e-15)


@pytest.mark.parametrize(("letter", "power"), [("L", -3), ("R", 0), ("K", 3), ("M", 6), ("G", 9)])
def test_every_value_of_a_series_reads_from_its_letter_code(letter, power):
    """Values: IEC 60063 E24 of the package eseries; the code is written as IEC 60062 says."""
    for mantissa in eseries.series(eseries.E24):
        digits = str(mantissa)
        for code, shift in ((letter + digits, -2), (digits[0] + letter + digits[1], -1), (digits + letter, 0)):
            number = read(code, "resistance").values[0]
            assert number.base == float(Fraction(int(digits)) * Fraction(10) ** (shift + power)), code


@pytest.mark.parametrize("text", ["4RK7", "4R7K", "4K7K3", "4.7K3", "4,7R1", "R", "RR47", "4R7.5", "2k75e3",
                                  "4m7", "4R7 kΩ", "4R7J", "K", "4Ω7"])
def test_a_letter_code_holds_exactly_one_letter(text):
    assert refused(text, "resistance").what.startswith('"' + text + '" ')


def test_letter_codes_belong_to_resistance_and_capacitance():
    assert refused("4R7").what == '"4R7" has "R7" after the number, which is not a unit of voltage'


# ---- several readings -------------------------------------------------------------------------------------------

@pytest.mark.parametrize("text", ["1.20 1.31 1.4 mΩ", "1.20;1.31;1.4mΩ", "1.20, 1.31, 1.4 mΩ", "1,20 1,31 1,4 mΩ",
                                  "1,20; 1,31; 1,4 mΩ", "1.20 mΩ 1.31 mΩ 1.4 mΩ", "1.20\n1.31\t1.4 m", "1L20 1L31 1L4"])
def test_repeats(text):
    found = read(text, "resistance")
    assert found.kind == "repeats"
    assert [number.digits for number in found.values] == ["1.20", "1.31", "1.4"]
    assert [number.base for number in found.values] == [0.0012, 0.00131, 0.0014]
    assert [number.resolution_base for number in found.values] == [1e-5, 1e-5, 1e-4]
    assert echo(found) == "1.20; 1.31; 1.4 mΩ"


def test_each_reading_may_have_its_own_unit():
    found = read("2.7 kΩ; 2810 Ω", "resistance")
    assert [number.base for number in found.values] == [2700.0, 2810.0]
    assert found.unit is None
    assert echo(found) == "2.7 kΩ; 2810 Ω"


@pytest.mark.parametrize(("text", "name"), [("1 V 2", "voltage"), ("1 V 2 3 mV", "voltage"), ("5 4R7", "resistance"),
                                            ("4R7 5", "resistance")])
def test_a_unit_for_some_readings_only_is_refused(text, name):
    assert "write it once at the end, or with each" in refused(text, name).what


def test_whole_readings_that_look_alike_are_repeats():
    assert [number.value for number in read("120 121 119", "voltage").values] == [120.0, 121.0, 119.0]
    assert [number.value for number in read("98 101.5", "voltage").values] == [98.0, 101.5]


@pytest.mark.parametrize("text", ["10/12", "12-13", "1|2", "1:23", "1 & 2", "5V;V6"])
def test_other_separators_are_refused(text):
    refused(text)


def test_minutes_beside_seconds_are_not_taken_for_repeats():
    assert refused("1 min 23 s", "time").what.endswith("write minutes and seconds as 1:23.4")
    for text in ("1:3", "1:60", "1:2:3", "1:23:45:12", ":23", "1:", "1:23.4.5", "1:23 min"):
        refused(text, "time")
    assert "ms or min" in refused("5 m", "time").what


# ---- read in two ways -------------------------------------------------------------------------------------------

@pytest.mark.parametrize(("text", "decimal", "choices"), [
    ("1,234", "either", ("1.234", "1234")),
    ("-12,345 kΩ", "either", ("-12.345 kΩ", "-12345 kΩ")),
    ("1,204 1,198 Ω", "either", ("1.204; 1.198 Ω", "1204; 1198 Ω")),
    ("1,234e3", "either", ("1.234e3", "1234e3")),
    ("1.234", "comma", ("1,234", "1234")),
    ("1 234 Ω", "either", ("1; 234 Ω", "1234 Ω")),
    ("1 234.5", "either", ("1; 234.5", "1234.5")),
    ("> 1 000", "either", (">1; 000", ">1000")),
    ("150 000", "point", ("150; 000", "150000")),
    ("-1 050", "either", ("-1; 050", "-1050")),
])
def test_what_can_be_read_in_two_ways_is_asked_about(text, decimal, choices):
    found = refused(text, "resistance", decimal=decimal)
    assert found.choices == choices
    assert choices[0] + " or " + choices[1] + "?" in found.what
    values = []
    for choice in choices:  # each choice is an answer: it is not asked about again
        values.append([number.base for number in read(choice, "resistance", decimal=decimal).values])
    assert values[0] != values[1]


@pytest.mark.parametrize(("text", "decimal", "value"), [
    ("1,234", "comma", 1.234), ("1,234", "point", 1234.0), ("1.234", "either", 1.234), ("1.234", "point", 1.234),
    ("0,234", "either", 0.234), ("1,23", "either", 1.23), ("1,2345", "either", 1.2345),
    ("1234,567", "either", 1234.567), ("1,23", "point", 1.23), ("12.5", "comma", 12.5)])
def test_what_is_clear_or_settled_is_read(text, decimal, value):
    assert read(text, "voltage", decimal=decimal).values[0].value == value


@pytest.mark.parametrize("text", ["1,234.5", "1.234,5", "1" + THIN + "234.5", "1" + NARROW_NO_BREAK + "234,5",
                                  "1" + NO_BREAK + "234.5"])
def test_clear_thousands(text):
    number = read(text, "voltage").values[0]
    assert (number.value, number.digits, number.resolution_base) == (1234.5, "1234.5", 0.1)


def test_more_groups():
    assert read("1,234,567", "resistance").values[0].value == 1234567.0
    assert read("1.234.567", "resistance").values[0].value == 1234567.0
    # BIPM writes digits in threes on both sides of the mark (checks section 15: 100.021 47).
    assert read("100.021" + THIN + "47", "voltage").values[0].digits == "100.02147"


@pytest.mark.parametrize("text", ["12,34,567", "1.2.3", "1,234.567.8", "1" + THIN + "23", "12.5" + THIN + "1300",
                                  "1234,567,890", "1,,2", "..5"])
def test_marks_in_no_order(text):
    refused(text)


# ---- out of range -----------------------------------------------------------------------------------------------

@pytest.mark.parametrize(("text", "kind"), [("OL", "over"), ("ol", "over"), ("O.L", "over"), ("0.L", "over"),
                                            (".OL", "over"), ("OL.", "over"), ("-OL", "under"), ("OL OL", "over"),
                                            ("OL MΩ", "over"), ("OFL", "over")])
def test_beyond_the_range(text, kind):
    found = read(text, "resistance")
    assert (found.kind, found.values) == (kind, ())
    assert read(echo(found), "resistance").kind == kind


def test_zero_and_letter_l():
    assert read("0L", "voltage").kind == "over"
    assert refused("0L", "resistance").choices == ("OL", "0 mΩ")
    assert read("0 mΩ", "resistance").values[0].base == 0.0


@pytest.mark.parametrize(("text", "kind", "bound", "base"), [
    (">200 M", "over", ">", 2e8), ("> 200 MΩ", "over", ">", 2e8), ("<0.1", "under", "<", 0.1),
    ("<0,1 Ω", "under", "<", 0.1), (">4M7", "over", ">", 4.7e6)])
def test_bounded_values(text, kind, bound, base):
    found = read(text, "resistance")
    assert (found.kind, found.values[0].bound, found.values[0].base) == (kind, bound, base)


@pytest.mark.parametrize("text", ["OL 5", "5 OL", "OL -OL", ">=5", "≥5", ">", ">OL", "~5", "5±0.1", "O-L", "OLL"])
def test_what_is_no_bound(text):
    refused(text)


def test_a_bound_among_repeats_is_kept():
    assert [number.bound for number in read("150 >200 180 M", "resistance").values] == ["", ">", ""]


# ---- what is allowed --------------------------------------------------------------------------------------------

def test_allow():
    assert "2 values where one is wanted" in refused("1.1 1.2", allow=("bounds",)).what
    assert "2 readings where one is wanted" in refused("OL OL", allow=("bounds",)).what
    for text in ("OL", ">5"):
        assert "where a value is wanted" in refused(text, allow=("repeats",)).what
    assert "below zero" in refused("-5", allow=()).what
    assert read("5", "voltage", allow=()).values[0].value == 5.0


@pytest.mark.parametrize(("text", "name"), [("-5", "time"), ("-1", "count"), ("-3", "mass"), ("1.5", "count"),
                                            ("-273.16", "temperature"), ("-460 °F", "temperature")])
def test_what_cannot_be(text, name):
    refused(text, name)


def test_absolute_zero_itself_is_a_temperature():
    assert read("-273.15", "temperature").values[0].base == -273.15
    assert read("0 K", "temperature").values[0].base == -273.15


def test_the_unit_that_is_meant():
    assert read("5", "resistance", default_unit="kΩ").values[0].base == 5000.0
    assert read("5", "resistance", default_unit=units.unit("Mohm")).values[0].base == 5e6
    assert read("5 Ω", "resistance", default_unit="kΩ").values[0].base == 5.0
    assert read("300", "temperature", default_unit="K").values[0].base == 26.85
    with pytest.raises(UnitError):
        read("5", "resistance", default_unit="V")
    with pytest.raises(UnitError):
        read("5", "no such quantity")


# ---- refusals ---------------------------------------------------------------------------------------------------

def test_a_refusal_says_what_was_typed_and_what_is_allowed():
    found = refused("5 kg", "resistance")
    assert found.what == '"5 kg" has "kg" after the number, which is not a unit of resistance'
    assert found.mend == ("type one resistance, or several readings with a space or ; between, in Ω, kΩ, MΩ, mΩ, µΩ "
                          "or GΩ; OL, > or < as the meter shows it; for example 2.75 kΩ")
    assert found.choices == ()
    assert refused("").what == "nothing was typed"


@pytest.mark.parametrize("text", ["１２", "1２", "٣", "5²", "x１"])
def test_only_plain_digits_are_digits(text):
    assert refused(text).what == '"' + text + '" holds digits other than 0 to 9 in their plain form'


@pytest.mark.parametrize("text", ["0x10", "1e400", "1e31", "nan", "inf", "-inf", "1_000", "1e", "e5", "--5", "+-5",
                                  "5+", "1/2", "__proto__", "5 __proto__", "hasOwnProperty", "\ufeff12", "5 MV", "five",
                                  "()", "\x00", "123456789012345678", "5 V V", "#5", "1'000"])
def test_other_texts_are_refused(text):
    refused(text)


def test_quotes_are_cut_by_characters():
    assert refused("x" * 300).what == '"' + "x" * 40 + '…" is longer than 200 characters'
    assert refused("\U0001d7cf" * 50).what.startswith('"' + "\U0001d7cf" * 40 + '…"')
    assert refused("a\ud800b\udc00").what.startswith('"a\ufffdb\ufffd"')  # lone halves can be printed and stored
    assert refused("a\ud835\udfcf").what.startswith('"a\U0001d7cf"')  # two halves side by side are one character


def test_what_is_not_text():
    for value in (None, 5, 5.0, b"5"):
        refused(value)


# ---- properties -------------------------------------------------------------------------------------------------

ALPHABET = st.sampled_from([*"0123456789.,;:/ -+<>eEkKMmRLGnpuFVAOLΩµ°C%sh²'", THIN, NO_BREAK, MINUS, "\U0001d7cf",
                            "OL", "kΩ", " V", "e3", "4R7", "\ud800", "min", "１"])
TEXTS = st.one_of(st.lists(ALPHABET, max_size=14).map("".join), st.text(max_size=30))
NAMES = st.sampled_from(units.quantity_names())
DECIMALS = st.sampled_from(["either", "point", "comma"])


def settles(choice, name, decimal):
    try:
        read(choice, name, decimal)
    except EntryError as problem:
        assert problem.choices == (), choice


def value_or_clear_error(text, name, decimal):
    try:
        found = read(text, name, decimal)
    except EntryError as problem:
        assert problem.what and problem.mend and isinstance(problem.choices, tuple)
        (problem.what + problem.mend).encode("utf-8")
        for choice in problem.choices:  # a choice settles the question, whatever else may be wrong with it
            settles(choice, name, decimal)
        return
    assert isinstance(found, Entry) and found.text == text
    assert found.kind in ("value", "repeats", "over", "under")
    assert bool(found.values) or found.kind in ("over", "under")
    for number in found.values:
        assert number.base - number.base == 0.0  # finite
        assert number.resolution_base > 0.0
        assert number.unit.dimension == units.quantity(name).dimension
    again = read(echo(found), name, "point")
    assert again.values == found.values and again.kind == found.kind


@settings(max_examples=3000, derandomize=True, deadline=None)
@given(TEXTS, NAMES, DECIMALS)
def test_any_text_gives_a_value_or_a_clear_error(text, name, decimal):
    value_or_clear_error(text, name, decimal)


@pytest.mark.full
def test_a_million_random_texts_give_a_value_or_a_clear_error():
    """Fixed seed; pieces of plausible entries and single characters of all planes, strung together."""
    import random

    dice = random.Random(60062)
    parts = [*"01234567890123456789.,;:/ -+<>eEkKMmRLGnpuFVAOLΩµ°C%sh", THIN, MINUS, "OL", "kΩ", " V", "e3", "4R7",
             "2k75", " mΩ", "min", "１", "\ud800", " 120", ", ", "1,234"]
    names = units.quantity_names()
    for _ in range(1_000_000):
        text = "".join(dice.choice(parts) for _ in range(dice.randrange(12)))
        if dice.random() < 0.1:
            text += chr(dice.randrange(0x110000))
        value_or_clear_error(text, dice.choice(names), dice.choice(("either", "point", "comma")))


@settings(max_examples=800, derandomize=True, deadline=None)
@given(st.integers(-10**9, 10**9), st.integers(0, 6), st.sampled_from([
    (name, key) for name in ("resistance", "voltage", "current", "temperature difference", "length", "force")
    for key in units.quantity(name).units]))
def test_the_base_is_the_nearest_float(mantissa, places, which):
    """Oracle: exact fractions. Equal where the unit is a power of ten, else within two roundings."""
    name, key = which
    text = str(abs(mantissa)).rjust(places + 1, "0")
    cut = len(text) - places
    text = ("-" if mantissa < 0 else "") + text[:cut] + ("." if places else "") + text[cut:]
    of = units.parse_unit(key, name) if "@" not in key else units.parse_unit("degF", name)
    number = read(text + " " + of.printed, name).values[0]
    exact = Fraction(mantissa, 10**places) * Fraction(of.num, of.den)
    tolerance = 4.5e-16 if key in ("in", "ft", "lbf", "ozf", "degF@difference") else 0
    assert number.base == pytest.approx(float(exact), rel=tolerance, abs=0)
    assert Fraction(number.digits) == Fraction(mantissa, 10**places)


def test_errors_are_of_the_house():
    assert issubclass(EntryError, FieldcheckError)
