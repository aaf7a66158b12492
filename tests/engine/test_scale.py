"""The scale and the sign as text: what stands where, and that a strict policy and a parser accept them."""

import re
from xml.etree import ElementTree

import pytest

from fieldcheck.engine import measured as m
from fieldcheck.engine import scale
from fieldcheck.engine.verdicts import STATEMENTS, Limit, judge

NS = "{http://www.w3.org/2000/svg}"
LIMIT = Limit("x", None, 60.0, coverage="k = 2")


def tree(svg):
    assert " style=" not in svg and "<style" not in svg and "<script" not in svg
    return ElementTree.fromstring(svg)


def of_class(svg, name):
    return [one for one in tree(svg).iter() if one.get("class") == name]


def figures(svg):
    return [one.text for one in of_class(svg, "figure")]


def tip(svg, index=0):
    return float(re.match(r"M([0-9.]+) ", of_class(svg, "pointer")[index].get("d")).group(1))


def test_value_whisker_rails_and_hatch_stand_in_order():
    svg = scale.of_verdict(judge(m.influence(56.2, 1.42, "x"), LIMIT), unit="K")
    left, right = (float(of_class(svg, "whisker")[i].get("x1")) for i in (1, 2))
    rail_end = float(of_class(svg, "rail")[0].get("x2"))
    hatch = [float(one.get("x1")) for one in of_class(svg, "hatch")]
    assert left < tip(svg) < right < rail_end
    assert min(hatch) < rail_end < max(hatch)
    assert float(of_class(svg, "rail")[0].get("x1")) == 14.0                # no lower limit: the rail starts at the end
    assert tree(svg).get("role") == "img" and tree(svg).find(NS + "title").text == "pass: 56.2 K"
    assert figures(svg)[-1] == "K, linear"


def test_figures_stand_at_round_values_and_in_their_place():
    axis = scale.Axis([9.0, 11.0])
    assert [text for _, text in axis.ticks] == ["9.0", "9.5", "10.0", "10.5", "11.0"]
    assert axis.x(10.0) == pytest.approx(160.0)
    assert [text for _, text in scale.Axis([0.0, 50.0]).ticks] == ["0", "10", "20", "30", "40", "50"]
    assert [text for _, text in scale.Axis([-0.02, 0.01]).ticks] == ["-0.02", "-0.01", "0.00", "0.01"]


def test_a_wide_ratio_makes_the_scale_logarithmic_and_it_says_so():
    axis = scale.Axis([2e6, 2e8])
    assert axis.kind == "logarithmic"
    assert axis.x(2e7) == pytest.approx((axis.x(2e6) + axis.x(2e8)) / 2.0)
    assert scale.Axis([1.0, 19.9]).kind == "linear" and scale.Axis([0.0, 1e9]).kind == "linear"
    assert figures(scale.svg(50.0, 2.0, None, unit="Mohm"))[-1] == "Mohm, logarithmic"


def test_a_bounded_reading_is_an_arrow_that_leaves_the_scale():
    over, under = scale.svg(200.0, 2.0, None, bound=">"), scale.svg(0.1, None, 1.0, bound="<")
    assert not of_class(over, "pointer") and not of_class(over, "whisker")
    assert float(of_class(over, "arrow")[0].get("x2")) > 306.0
    assert float(of_class(under, "arrow")[0].get("x2")) < 14.0
    assert of_class(scale.svg(None, 2.0, None, bound=">"), "arrow")


def test_as_found_is_open_as_left_filled_and_last_season_a_notch_below():
    svg = scale.svg(52.0, None, 60.0, as_found=71.0, last=50.0)
    assert [one.get("fill") for one in of_class(svg, "pointer")] == ["none", "currentColor"]
    assert tip(svg, 0) > tip(svg, 1)
    assert len(of_class(svg, "notch")) == 1


def test_an_empty_scale_shows_its_limit_without_a_pointer():
    svg = scale.svg(None, 9.0, 11.0, guard=0.2)
    assert not of_class(svg, "pointer") and len(of_class(svg, "rail")) == 4 and of_class(svg, "hatch")


@pytest.mark.parametrize("numbers", [
    {"value": 0.0}, {"value": None}, {"value": 4.25, "at_most": 4.25},
    {"value": -3.0, "at_least": -5.0, "at_most": -1.0},
    {"value": 1e-9, "at_most": 3e-9, "wide": 1e-10}, {"value": 3e12, "at_least": 1.0}, {"value": 1e-12, "at_most": 1e9},
    {"value": 0.0, "at_most": 0.0, "guard": 0.1}, {"value": 5.0, "at_most": 1.0, "guard": 2.0, "wide": 20.0},
])
def test_every_scale_stays_within_its_frame_and_carries_figures(numbers):
    svg = scale.svg(**numbers)
    for one in tree(svg).iter():
        for key in ("x1", "x2", "x"):
            if one.get(key):
                assert 0.0 <= float(one.get(key)) <= 320.0
    assert len(figures(svg)) >= 3


def test_text_from_people_is_escaped():
    assert tree(scale.svg(1.0, None, 2.0, unit="<b>&", title='a "quoted" <word>')).find(NS + "title").text == \
        'a "quoted" <word>'


def test_the_same_numbers_give_the_same_text():
    first = scale.svg(4.044, None, 4.25, 0.073, 0.073, "V")
    assert first == scale.svg(4.044, None, 4.25, 0.073, 0.073, "V")


STEM = 11.0


@pytest.mark.parametrize(("statement", "where"), [
    ("pass", lambda x: x + 2 < STEM - 2), ("conditional pass", lambda x: STEM - 1 < x + 2 <= STEM),
    ("conditional fail", lambda x: STEM <= x - 2 < STEM + 1), ("fail", lambda x: x - 2 > STEM + 2),
])
def test_the_mark_stands_inside_at_the_edge_or_outside_its_bracket(statement, where):
    (mark,) = of_class(scale.sign(statement), "mark")
    assert where(float(mark.get("cx")))


def test_every_statement_has_its_own_sign_with_its_word():
    signs = [scale.sign(statement) for statement in STATEMENTS]
    assert len(set(signs)) == 5
    assert [tree(sign).find(NS + "title").text for sign in signs] == list(STATEMENTS)
    assert not of_class(scale.sign("not judged"), "mark")
    with pytest.raises(KeyError):
        scale.sign("passed")
