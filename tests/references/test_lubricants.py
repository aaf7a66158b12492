"""Oils and greases against checks section 11 (ISO 3448, ASTM D341, ASTM D2270, ASTM D217/NLGI) and `chemicals`."""

import json
import random

import pytest
from reference_values import check

from fieldcheck import rulebook
from fieldcheck.engine import measured
from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.physics import lubricants as lub

MM2 = 1e-6


@pytest.mark.parametrize(("grade", "middle", "low", "high"), [
    (2, "2.2", "1.98", "2.42"), (3, "3.2", "2.88", "3.52"), (5, "4.6", "4.14", "5.06"), (7, "6.8", "6.12", "7.48"),
    (10, "10", "9", "11"), (15, "15", "13.5", "16.5"), (22, "22", "19.8", "24.2"), (32, "32", "28.8", "35.2"),
    (46, "46", "41.4", "50.6"), (68, "68", "61.2", "74.8"), (100, "100", "90", "110"), (150, "150", "135", "165"),
    (220, "220", "198", "242"), (320, "320", "288", "352"), (460, "460", "414", "506")])
def test_iso_3448_grades(grade, middle, low, high):
    # checks 11.1, MEM+
    assert lub.iso_vg_midpoint(float(grade)) / MM2 == pytest.approx(float(middle), rel=1e-12)
    assert lub.iso_vg_low(float(grade)) / MM2 == pytest.approx(float(low), rel=1e-12)
    assert lub.iso_vg_high(float(grade)) / MM2 == pytest.approx(float(high), rel=1e-12)


VG_32 = (40.0, 32.0 * MM2, 100.0, 5.4 * MM2)
PUBLISHED = (40.0, 73.30 * MM2, 100.0, 8.86 * MM2)


@pytest.mark.parametrize(("points", "a", "b"), [(VG_32, "9.53081512468776", "3.7465784240890048"),
                                                (PUBLISHED, "9.458392533459778", "3.6809458070832384")])
def test_walther_constants(points, a, b):
    # checks 11.2: ASTM D341, CALC
    got = lub.walther_constants(*points)
    check(got[0], a)
    check(got[1], b)


@pytest.mark.parametrize(("points", "t", "printed"), [
    (VG_32, 0.0, "335.9996204355527"), (VG_32, 10.0, "161.0076914385609"), (VG_32, 20.0, "86.27785737773178"),
    (VG_32, 25.0, "65.42014973785166"), (PUBLISHED, 0.0, "1233.0664345289622"), (PUBLISHED, 20.0, "240.98124166204258"),
    (PUBLISHED, 60.0, "30.082611183080694")])
def test_viscosity_over_temperature(points, t, printed):
    # checks 11.2, CALC. The double power loses two digits of the sixteen, more when it is cold: 2e-12 is allowed.
    assert lub.viscosity_at(t, *points) / MM2 == pytest.approx(float(printed), rel=2e-12)


@pytest.mark.parametrize("t", [-10.0, 0.0, 20.0, 55.0, 90.0])
def test_viscosity_over_temperature_against_mpmath(t):
    import mpmath

    with mpmath.workdps(40):
        def outer(nu):
            return mpmath.log10(mpmath.log10(mpmath.mpf(nu) + mpmath.mpf("0.7")))

        log_1, log_2 = mpmath.log10(mpmath.mpf("313.15")), mpmath.log10(mpmath.mpf("373.15"))
        slope = (outer("32") - outer("5.4")) / (log_2 - log_1)
        w = outer("32") - slope * (mpmath.log10(mpmath.mpf(t) + mpmath.mpf("273.15")) - log_1)
        exact = mpmath.power(10, mpmath.power(10, w)) - mpmath.mpf("0.7")
    assert lub.viscosity_at(t, *VG_32) / MM2 == pytest.approx(float(exact), rel=5e-12)


def test_walther_passes_through_its_points():
    assert lub.viscosity_at(40.0, *VG_32) == pytest.approx(32.0 * MM2, rel=1e-12)
    assert lub.viscosity_at(100.0, *VG_32) == pytest.approx(5.4 * MM2, rel=1e-12)


def test_viscosity_index_of_the_standards_example():
    # checks 11.3: ASTM D2270 example A, published 92.43; L and H read in its table. The page prints 92.42964734, the
    # list of check values 92.42964724534286; 4664/50.46 worked by hand is the latter
    check(lub.index_from_references(73.30 * MM2, 8.86 * MM2, 119.94 * MM2, 69.48 * MM2), "92.42964724534286")


def test_references_above_70():
    # checks 11.3, CALC for Y = 80
    low, high = lub._l_and_h(80.0)
    check(low, "6303.52")
    check(high, "1928.76")


def test_polynomials_agree_with_the_table_in_chemicals():
    # the coefficients are from memory (MEM?): each line is held against the ASTM D2270 table that `chemicals` carries
    from chemicals.viscosity import VI_Hs, VI_Ls, VI_nus

    starts = {row[0] for row in lub.D2270}
    seen = set()
    for nu, low, high in zip(VI_nus, VI_Ls, VI_Hs, strict=True):
        got = lub._l_and_h(float(nu))
        assert got == pytest.approx((low, high), rel=1e-3), nu
        seen.add(max(start for start in starts if start <= nu))
    assert seen == starts and len(VI_nus) > 300


def test_viscosity_index_agrees_with_chemicals():
    # procedures A and B; polynomial against table, so one unit of the index (its rounding) is allowed up to 150
    from chemicals.viscosity import viscosity_index

    rng = random.Random(20260101)
    compared = 0
    for _ in range(600):
        nu_100 = rng.uniform(2.2, 75.0)
        low, high = lub._l_and_h(nu_100)
        nu_40 = rng.uniform(0.8 * high, low)
        expected = viscosity_index(nu_40 * MM2, nu_100 * MM2)
        if expected <= 150.0:
            compared += 1
            assert lub.viscosity_index(nu_40 * MM2, nu_100 * MM2) == pytest.approx(expected, abs=1.0)
    assert compared > 300


@pytest.mark.parametrize("index", [0.0, 50.0, 95.0, 100.0, 140.0, 200.0])
def test_second_point_gives_the_index_back(index):
    nu_100 = lub.viscosity_at_100(32.0 * MM2, index)
    # L and H step by up to 0.1 % between the lines of the polynomials, where no viscosity gives an index exactly
    assert lub.viscosity_index(32.0 * MM2, nu_100) == pytest.approx(index, abs=0.5)


def test_uncertainty_of_the_second_point_and_of_the_working_viscosity():
    nu_40 = measured.influence(32.0 * MM2, 1.6 * MM2, "grade")
    second = lub.viscosity_at_100(nu_40, 95.0)
    slope = (lub.viscosity_at_100(32.5 * MM2, 95.0) - lub.viscosity_at_100(31.5 * MM2, 95.0)) / MM2
    assert second.parts["grade"] == pytest.approx(1.6 * MM2 * slope, rel=0.01)
    got = lub.viscosity_at(20.0, 40.0, nu_40, 100.0, 5.4 * MM2)
    slope = (lub.viscosity_at(20.0, 40.0, 32.01 * MM2, 100.0, 5.4 * MM2)
             - lub.viscosity_at(20.0, 40.0, 31.99 * MM2, 100.0, 5.4 * MM2)) / (0.02 * MM2)
    assert got.parts["grade"] == pytest.approx(1.6 * MM2 * slope, rel=1e-5)


@pytest.mark.parametrize(("grade", "low", "high"), [
    ("000", 445, 475), ("00", 400, 430), ("0", 355, 385), ("1", 310, 340), ("2", 265, 295), ("3", 220, 250),
    ("4", 175, 205), ("5", 130, 160), ("6", 85, 115)])
def test_nlgi_grades(grade, low, high):
    # checks 11.4: ASTM D217, READ (five pages agree)
    assert lub.nlgi_low(grade) == pytest.approx(low * 1e-4, rel=1e-12)
    assert lub.nlgi_high(grade) == pytest.approx(high * 1e-4, rel=1e-12)
    for tenths in (low, (low + high) / 2, high):
        assert lub.nlgi_grade(tenths * 1e-4) == grade
    assert lub.nlgi_grade((low - 10) * 1e-4) == ""


# --- choosing from the shelf; the matrix is in the form the rulebook holds, entries after checks 11.5 (READ-2) ---

MATRIX = [("mineral", "brass", "ok"), ("mineral", "steel", "ok"), ("mineral", "natural rubber", "never"),
          ("ester", "brass", "ok"), ("ester", "ABS", "never"), ("ester", "polycarbonate", "care")]
SHELF = [
    {"id": "thick", "type": "oil", "base": "mineral", "v40": 220.0 * MM2, "v100": 19.0 * MM2},
    {"id": "thin", "type": "oil", "base": "mineral", "v40": 22.0 * MM2, "v100": 4.3 * MM2},
    {"id": "middle", "type": "oil", "base": "mineral", "v40": 32.0 * MM2, "index": 100.0},
    {"id": "half known", "type": "oil", "base": "mineral", "v40": 32.0 * MM2},
    {"id": "ester", "type": "oil", "base": "ester", "v40": 32.0 * MM2, "v100": 5.9 * MM2},
    {"id": "stiff grease", "type": "grease", "base": "mineral", "v40": 32.0 * MM2, "v100": 5.4 * MM2, "nlgi": "3"},
    {"id": "soft grease", "type": "grease", "base": "mineral", "v40": 32.0 * MM2, "v100": 5.4 * MM2, "nlgi": "0"}]


def chosen(materials, low=40.0 * MM2, high=100.0 * MM2):
    return lub.choose(SHELF, 20.0, low, high, ["0", "1", "2"], MATRIX, materials)


def test_choice_by_viscosity_at_the_working_temperature():
    choices = {one.lubricant: one for one in chosen(["brass", "steel"])}
    assert {name for name, one in choices.items() if one.fits} == {"thin", "middle", "soft grease"}
    assert choices["thick"].reasons == ("too thick at the working temperature",)
    assert choices["half known"].reasons == ("its viscosity at the working temperature is not known",)
    assert choices["half known"].viscosity is None
    assert choices["stiff grease"].reasons == ("its consistency is not among those wanted",)
    assert choices["middle"].viscosity == pytest.approx(86.0 * MM2, rel=0.03)  # checks 11.2 prints 86.28 for 32/5.4


def test_those_that_fit_come_first_and_nearest_to_the_middle():
    fitting = [one for one in chosen(["brass"]) if one.fits]
    assert [one.fits for one in chosen(["brass"])] == sorted([one.fits for one in chosen(["brass"])], reverse=True)
    middle = (40.0 * 100.0) ** 0.5 * MM2
    ratios = [max(one.viscosity / middle, middle / one.viscosity) for one in fitting]
    assert ratios == sorted(ratios)


def test_materials_rule_out_and_unknown_is_no_permission():
    by_id = {one.lubricant: one for one in chosen(["ABS"])}
    assert "harms a material of this gear train" in by_id["ester"].reasons
    assert "how it goes with a material of this gear train is not known" in by_id["middle"].reasons
    assert not any(one.fits for one in chosen([]))


def test_compatibility_is_the_worst_of_the_materials():
    assert lub.goes_with(MATRIX, "mineral", ["brass", "steel"]) == "ok"
    assert lub.goes_with(MATRIX, "mineral", ["brass", "natural rubber"]) == "never"
    assert lub.goes_with(MATRIX, "ester", ["brass", "polycarbonate"]) == "care"
    assert lub.goes_with(MATRIX, "ester", ["polycarbonate", "zinc"]) == "unknown"
    assert lub.goes_with(MATRIX, "mineral", []) == "unknown"


@pytest.mark.parametrize("wrong", [
    lambda: lub.iso_vg_midpoint(33.0), lambda: lub.nlgi_low("7"), lambda: lub.nlgi_low("hasOwnProperty"),
    lambda: lub.walther_constants(40.0, 1.0 * MM2, 100.0, 5.0 * MM2),
    lambda: lub.walther_constants(40.0, 32.0 * MM2, 40.0, 5.0 * MM2),
    lambda: lub.walther_constants(40.0, 5.0 * MM2, 100.0, 32.0 * MM2), lambda: lub.viscosity_at(-120.0, *VG_32),
    lambda: lub.viscosity_at(250.0, *VG_32), lambda: lub.viscosity_index(10.0 * MM2, 1.5 * MM2),
    lambda: lub.viscosity_at_100(2.5 * MM2, 100.0), lambda: chosen(["brass"], 2.0, 1.0),
    lambda: lub.goes_with([("mineral", "brass", "fine")], "mineral", ["brass"]),
    lambda: lub.index_from_references(10.0 * MM2, 5.0 * MM2, 1.0 * MM2, 2.0 * MM2)])
def test_refusals(wrong):
    with pytest.raises(OutOfRange):
        wrong()


# --- compatibility for formulas: checks 11.5 (READ-2) word for word, and the rulebook's own matrix ---

def rank(base, *materials):
    return [lub.compatibility_rank(base, material) for material in materials]


def test_compatibility_of_checks_11_5():
    esters_care = ("polycarbonate", "polyester", "ppo", "polystyrene", "polysulfone", "pvc", "buna-s", "butyl",
                   "natural-rubber", "neoprene")
    assert rank("ester", *esters_care) == [1.0] * len(esters_care)     # "extreme caution"
    assert rank("ester", "abs") == [3.0]                               # ABS gears destroyed by an ester grease
    plastics = ("nylon", "acetal", "abs", "polystyrene", "polycarbonate", "pvc", "polyester", "ppo", "polysulfone")
    for base in ("synthetic-hydrocarbon", "silicone", "fluoroether"):
        assert rank(base, *plastics) == [0.0] * len(plastics)
    elastomers = ("natural-rubber", "neoprene", "butyl", "buna-s", "other-rubber")
    assert rank("synthetic-hydrocarbon", *elastomers) == [3.0] * len(elastomers)   # "but NOT elastomers"
    assert rank("mineral", "natural-rubber") == [3.0]                              # swelling
    assert rank("mineral", "none") == [0.0]
    assert rank("mineral", "celluloid") == rank("no such base", "brass") == rank("ester", "hasOwnProperty") == [2.0]


def test_formulas_and_the_shelf_know_the_same_materials():
    # rules/materials.toml is what the desk and `choose` go by; the formulas' table must say the same of every pair
    index = json.loads(rulebook.load(rulebook.rules_folder()).index)["materials"]
    materials = [one["id"] for one in index["materials"]]
    bases = [one["id"] for one in index["bases"]]
    assert len(materials) > 20 and len(bases) > 4
    for base in bases:
        for material in materials:
            word = lub.goes_with(index["matrix"], base, [material])
            assert lub.ORDER_OF_HARM[int(lub.compatibility_rank(base, material))] == word, (base, material)
    for base, by_word in lub.COMPATIBILITY.items():
        assert base in bases
        for text in by_word.values():
            assert set(text.split()) <= set(materials)
