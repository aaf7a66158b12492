"""Rounding and printing against CPython's own exact formatting and decimal.Decimal (General Decimal Arithmetic)."""

import math
import random
import struct
from decimal import ROUND_HALF_EVEN, ROUND_HALF_UP, Decimal, localcontext
from fractions import Fraction

import pytest

from fieldcheck.engine import figures
from fieldcheck.engine.errors import EntryError, OutOfRange


def _near_ties(n):
    """Numbers whose decimal text ends in 5 just after the rounding place, and random bit patterns."""
    r = random.Random(5)
    for _ in range(n):
        places = r.randrange(0, 7)
        yield float(str(r.randrange(-99999, 99999)) + "5e-" + str(places + 1)), places
    while n > 0:
        x = struct.unpack("<d", r.randbytes(8))[0]
        if math.isfinite(x):
            n -= 1
            yield x, r.randrange(0, 20)


def test_fixed_is_cpythons_format_for_near_ties_and_random_bits():
    for x, places in _near_ties(3000):
        assert figures.fixed(x, places) == f"{x:.{places}f}"
        assert figures.signed_fixed(x, places) == f"{x:+.{places}f}"


def test_fixed_rounds_the_exact_value_and_ties_to_even():
    # docs.python.org/3/tutorial/floatingpoint: 2.675 is stored a little low, 0.125 exactly
    assert [figures.fixed(x, n) for x, n in ((2.675, 2), (0.125, 2), (2.5, 0), (0.5, 0), (0.05, 1), (1e22, 1))] == [
        "2.67", "0.12", "2", "0", "0.1", "10000000000000000000000.0"]
    assert figures.fixed(-0.001, 2) == figures.fixed(-0.0, 2) == "-0.00"
    assert figures.fixed(3, 1) == "3.0"


def test_printed_never_shows_a_negative_zero_and_rounds_to_tens():
    cases = ((-0.001, 2), (-0.0, 0), (1234.5, -2), (-1250, -2), (4, -1), (0.5, 1))
    assert [figures.printed(x, n) for x, n in cases] == [
        "0.00", "0", "1200", "-1200", "0", "0.5"]


def _significant_by_decimal(x, n):
    with localcontext() as context:
        context.prec = n
        context.rounding = ROUND_HALF_EVEN
        context.Emin, context.Emax = -9999, 9999
        return +Decimal(x)


def test_significant_has_the_value_and_the_digits_of_decimal():
    for x, n in _near_ties(2000):
        n += 1
        if x == 0:
            continue
        text = figures.significant(x, n)
        assert Decimal(text) == _significant_by_decimal(x, n)
        e = Decimal(text).adjusted()
        if -6 <= e < 15:
            assert "e" not in text
        assert len(text.partition("e")[0].replace(".", "").lstrip("-0")) == (n if not -6 <= e < 15 else max(n, e + 1))


def test_significant_reads_as_a_person_writes():
    cases = ((123456, 3), (0.00012345, 3), (999.96, 4), (1.5e-9, 3), (2e20, 1), (0, 3), (-0.0999, 2), (1, 1),
             (9.5e-7, 2))
    assert [figures.significant(x, n) for x, n in cases] == [
        "123000", "0.000123", "1000", "1.50e-9", "2e20", "0.00", "-0.10", "1", "9.5e-7"]


def test_round12_is_the_float_nearest_to_the_decimal_of_twelve_digits():
    for x, _ in _near_ties(3000):
        assert figures.round12(x) == float(_significant_by_decimal(x, 12))
    assert figures.round12(0.1 + 0.2) == 0.3
    assert figures.round12(50.000000000000007) == figures.round12(49.99999999999999) == 50.0
    assert math.copysign(1, figures.round12(-0.0)) == 1


def test_half_up_works_on_the_digits_as_written():
    cases = ((2.675, 2), (0.15, 1), (-0.005, 2), (-0.004, 2), (1250, -2))
    assert [figures.round_half_up_text(x, n) for x, n in cases] == [
        "2.68", "0.2", "-0.01", "0.00", "1300"]
    for x, places in _near_ties(1500):
        if 1e-30 < abs(x) < 1e15:
            with localcontext() as context:
                context.prec = 60
                expected = Decimal(repr(x)).quantize(Decimal(1).scaleb(-places), ROUND_HALF_UP)
            assert Decimal(figures.round_half_up_text(x, places)) == expected


def test_decimal_text_reads_back_and_is_plain_from_a_millionth_to_a_thousand_million_million():
    for x, _ in _near_ties(3000):
        text = figures.decimal_text(x)
        assert float(text) == x
        assert Decimal(text).normalize().as_tuple().digits == Decimal(repr(x)).normalize().as_tuple().digits
        assert ("e" in text) == (x != 0 and not 1e-6 <= abs(x) < 1e15)
    assert [figures.decimal_text(x) for x in (2.0, -0.0, 1e-6, 123456789012345.0, 1e15, 1.5e-7, -120, 0.1)] == [
        "2", "0", "0.000001", "123456789012345", "1e15", "1.5e-7", "-120", "0.1"]


def test_engineering_takes_powers_of_a_thousand():
    cases = ((4700, 3), (0.00047, 2), (999.96, 3), (999960, 3), (-1.2e-9, 2), (0, 2), (47, 1), (0.12, 2))
    assert [figures.engineering(x, n) for x, n in cases] == [
        ("4.70", 3), ("470", -6), ("1.00", 3), ("1.00", 6), ("-1.2", -9), ("0.0", 0), ("50", 0),
        ("120", -3)]


def test_groups_of_three_as_the_si_brochure_writes_them():
    # BIPM SI brochure (9th edition) 5.4.4: 43 279.168 29; four digits stand together. NIST example 100.021 47 g.
    s = figures.NARROW_SPACE
    assert figures.grouped("43279.16829") == "43" + s + "279.168" + s + "29"
    assert figures.grouped("100.02147") == "100.021" + s + "47"
    assert figures.grouped("3279.1683") == "3279.1683"
    assert figures.grouped("-1234567") == "-1" + s + "234" + s + "567"
    assert figures.grouped("123456,5 V") == "123" + s + "456,5 V"
    assert figures.grouped("") == "" and figures.grouped("-") == "-"


def test_gum_7_2_6_examples_of_value_with_uncertainty():
    # JCGM 100:2008 7.2.6: y = 10.057 62 ohm with 27 milliohm -> 10.058 ohm; 10.47 -> 11; 28.05 -> 28
    assert figures.value_with_uncertainty(10.05762, 0.027) == ("10.058", "0.027")
    assert figures.value_with_uncertainty(0.0, 10.47)[1] == "11"
    assert figures.value_with_uncertainty(0.0, 28.05)[1] == "28"
    # NIST, examples of uncertainty statements: (100.021 47 +- 0.000 70) g
    assert figures.value_with_uncertainty(100.02147, 0.00070, "g") == ("100.02147 g", "0.00070 g")


def test_value_with_uncertainty_keeps_two_digits_when_rounding_carries():
    assert figures.value_with_uncertainty(12.3456, 0.0996) == ("12.35", "0.10")
    assert figures.value_with_uncertainty(12345.6, 996) == ("12300", "1000")
    assert figures.value_with_uncertainty(-0.004, 1.5) == ("0.0", "1.5")
    assert figures.value_with_uncertainty(2.0, 0.30000000000000004) == ("2.00", "0.30")
    assert figures.value_with_uncertainty(2.5, 0) == ("2.5", "0")
    with pytest.raises(OutOfRange):
        figures.value_with_uncertainty(1.0, -0.1)


def test_rounding_never_lowers_an_uncertainty_by_more_than_a_fortieth_nor_raises_it_by_a_whole_digit():
    r = random.Random(9)
    for _ in range(3000):
        U = 10 ** r.uniform(-9, 9)
        shown = float(figures.value_with_uncertainty(0.0, U)[1])
        assert shown >= U * (1 - 1 / 40) * (1 - 1e-11)
        assert shown <= U + 10.0 ** (math.floor(math.log10(U)) - 1)


def test_from_ratio_is_the_nearest_float():
    r = random.Random(6)
    for _ in range(3000):
        top = 10 ** r.randrange(1, 60)
        a, b = r.randrange(-top, top), r.randrange(1, 10 ** r.randrange(1, 60))
        assert figures.from_ratio(a, b) == a / b                     # CPython's int / int is correctly rounded
    for x, _ in _near_ties(2000):
        assert figures.from_ratio(*Fraction(x).as_integer_ratio()) == x
    assert figures.from_ratio(1, 2 ** 1075) == 0.0 and figures.from_ratio(3, 2 ** 1075) == 1e-323
    with pytest.raises(OutOfRange):
        figures.from_ratio(2 ** 1024 - 1, 1)


def test_parse_decimal_reads_what_cpython_reads():
    r = random.Random(8)
    for x, _ in _near_ties(1500):
        assert figures.parse_decimal(repr(x)) == x
    for _ in range(2000):
        digits = "".join(r.choice("0123456789") for _ in range(r.randrange(1, 40)))
        cut = r.randrange(1, len(digits)) if len(digits) > 1 else 1
        text = r.choice(("", "-", "+")) + digits[:cut] + ("." + digits[cut:] if digits[cut:] else "") + r.choice(
            ("", "e5", "E-7", "e+12", "e-320"))
        assert figures.parse_decimal(text) == float(text)
    # half way between two floats, and just beyond: needs every digit
    assert figures.parse_decimal("9007199254740993") == 9007199254740992.0
    assert figures.parse_decimal("9007199254740993.0000000000000000000000000000001") == 9007199254740994.0


@pytest.mark.parametrize("text", ["", "-", ".5", "5.", "1,5", "1e", "1e+", "0x10", "inf", "nan", " 1", "1 ", "1_0",
                                  "１２", "1.2.3", "--1", "1e5e3", "1e123456", "9" * 401, "\ufeff1", "+", "e5", "²"])
def test_parse_decimal_refuses_anything_else(text):
    with pytest.raises(EntryError):
        figures.parse_decimal(text)


def test_numbers_that_are_too_large_or_not_finite_are_refused():
    for text in ("1e309", "9" * 310, "1.8e308"):
        with pytest.raises(OutOfRange):
            figures.parse_decimal(text)
    for bad in (math.nan, math.inf, -math.inf):
        for call in (figures.round12, figures.decimal_text, lambda x: figures.fixed(x, 2),
                     lambda x: figures.printed(x, 2), lambda x: figures.significant(x, 2),
                     lambda x: figures.engineering(x, 2)):
            with pytest.raises(OutOfRange):
                call(bad)
