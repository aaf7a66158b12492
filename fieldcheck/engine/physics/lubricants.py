"""Oils and greases: grade, viscosity at the working temperature, consistency, what fits and what harms.

Viscosities in m2/s (1 mm2/s = 1e-6), penetration in m (0.1 mm = 1e-4), temperatures in degC.
Floats or measured values where a number may be a reading.
"""

from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.frozen import frozen
from fieldcheck.engine.measured import log10, power, through, value_of

MM2_PER_S = 1.0e-06
TENTH_MM = 1.0e-04
KELVIN = 273.15

# ISO 3448 grade number -> midpoint at 40 degC in mm2/s; each grade reaches 10 % to either side (checks 11.1, MEM+).
ISO_VG = {2: 2.2, 3: 3.2, 5: 4.6, 7: 6.8, 10: 10.0, 15: 15.0, 22: 22.0, 32: 32.0, 46: 46.0, 68: 68.0, 100: 100.0,
          150: 150.0, 220: 220.0, 320: 320.0, 460: 460.0}

# NLGI grade -> worked penetration in 0.1 mm at 25 degC, ASTM D217 (checks 11.4, READ).
NLGI = {"000": (445, 475), "00": (400, 430), "0": (355, 385), "1": (310, 340), "2": (265, 295), "3": (220, 250),
        "4": (175, 205), "5": (130, 160), "6": (85, 115)}

# ASTM D2270: for Y (mm2/s at 100 degC) from the first number up, L = a Y^2 + b Y + c and H = d Y^2 + e Y + f.
# From memory (MEM?), each line checked against a table in tests/references; the last line READ (checks 11.3).
D2270 = (
    (2.0, 1.14673, 1.7576, -0.109, 0.84155, 1.5521, -0.077),
    (3.8, 3.38095, -15.4952, 33.196, 0.78571, 1.7929, -0.183),
    (4.4, 2.5000, -7.2143, 13.812, 0.82143, 1.5679, 0.119),
    (5.0, 0.10100, 16.6350, -45.469, 0.04985, 9.1613, -18.557),
    (6.4, 3.35714, -23.5643, 78.466, 0.22619, 7.7369, -16.656),
    (7.0, 0.01191, 21.4750, -72.870, 0.79762, -0.7321, 14.610),
    (7.7, 0.41858, 16.1558, -56.040, 0.05794, 10.5156, -28.240),
    (9.0, 0.88779, 7.5527, -16.600, 0.26665, 6.7015, -10.810),
    (12.0, 0.76720, 10.7972, -38.180, 0.20073, 8.4658, -22.490),
    (15.0, 0.97305, 5.3135, -2.200, 0.28889, 5.9741, -4.930),
    (18.0, 0.97256, 5.2500, -0.980, 0.24504, 7.4160, -16.730),
    (22.0, 0.91413, 7.4759, -21.820, 0.20323, 9.1267, -34.230),
    (28.0, 0.87031, 9.7157, -50.770, 0.18411, 10.1015, -46.750),
    (40.0, 0.84703, 12.6752, -133.310, 0.17029, 11.4866, -80.620),
    (55.0, 0.85921, 11.1009, -83.190, 0.17130, 11.3680, -76.940),
    (70.0, 0.8353, 14.67, -216.0, 0.1684, 11.85, -97.0),
)

ORDER_OF_HARM = ("ok", "care", "unknown", "never")
"""How a base goes with a material, mildest first; "unknown" is worse than "care": nobody has looked."""


# base -> word -> materials: what rules/materials.toml holds, for formulas (a test keeps the two alike). Plastics and
# rubbers: trade journal (checks 11.5, READ-2); metals, fibre, mineral oil on rubber: PRACTICE. Else: unknown.
METALS = "brass steel zinc-die-cast nickel-silver "
PLASTICS = "nylon acetal abs polystyrene polycarbonate pvc phenolic polyester ppo polysulfone "
COMPATIBILITY = {
    "mineral": {"ok": METALS + "phenolic fibre", "never": "natural-rubber"},
    "synthetic-hydrocarbon": {"ok": METALS + PLASTICS, "care": "other-plastic",
                              "never": "natural-rubber neoprene butyl buna-s other-rubber"},
    "ester": {"ok": METALS, "care": "polycarbonate polystyrene pvc polyester ppo polysulfone natural-rubber neoprene "
                                    "butyl buna-s", "never": "abs"},
    "silicone": {"ok": METALS + PLASTICS, "care": "other-plastic"},
    "fluoroether": {"ok": METALS + PLASTICS, "care": "other-plastic"},
}

# --- grades ---------------------------------------------------------------------------------------------------------


def iso_vg_midpoint(grade):
    """Viscosity in m2/s at 40 degC in the middle of an ISO 3448 grade (a whole number such as 32)."""
    for number in ISO_VG:
        if value_of(grade) == number:
            return ISO_VG[number] * MM2_PER_S
    raise OutOfRange("there is no such ISO viscosity grade", "grade",
                     "grades are " + ", ".join([str(number) for number in ISO_VG]))


def iso_vg_low(grade):
    """Lowest viscosity of the grade in m2/s at 40 degC: 10 % under the midpoint."""
    return iso_vg_midpoint(grade) * 0.9


def iso_vg_high(grade):
    """Highest viscosity of the grade in m2/s at 40 degC: 10 % over the midpoint."""
    return iso_vg_midpoint(grade) * 1.1


def _nlgi(grade):
    for name in NLGI:
        if name == grade:
            return NLGI[name]
    raise OutOfRange("there is no such grease consistency", "grade", "grades run 000, 00, 0, 1 to 6")


def nlgi_low(grade):
    """Least worked penetration of an NLGI grade (text such as "00") in m."""
    return _nlgi(grade)[0] * TENTH_MM


def nlgi_high(grade):
    """Greatest worked penetration of an NLGI grade (text such as "00") in m."""
    return _nlgi(grade)[1] * TENTH_MM


def nlgi_grade(penetration):
    """NLGI grade (text) of a worked penetration in m, or "" when it falls between two grades or beyond them."""
    tenths = value_of(penetration) / TENTH_MM
    for name in NLGI:
        low, high = NLGI[name]
        if low - 1e-6 <= tenths <= high + 1e-6:
            return name
    return ""


# --- viscosity over temperature -------------------------------------------------------------------------------------


def _double_log(nu):
    """log10(log10(nu + 0.7)), nu in mm2/s; refuses what lies outside ASTM D341."""
    if not 2.0 <= value_of(nu) <= 2.0e7:
        raise OutOfRange("the viscosity lies outside ASTM D341", "nu", "give 2 to 20000000 mm2/s")
    return log10(log10(nu + 0.7))


def walther_constants(t1, nu1, t2, nu2):
    """A and B of log10 log10(nu + 0.7) = A - B log10 T(K) through two points (checks 11.2; ASTM D341, MEM+)."""
    if value_of(t1) == value_of(t2):
        raise OutOfRange("the two points need different temperatures", "t2")
    log_t1, log_t2 = log10(t1 + KELVIN), log10(t2 + KELVIN)
    w1, w2 = _double_log(nu1 / MM2_PER_S), _double_log(nu2 / MM2_PER_S)
    slope = (w1 - w2) / (log_t2 - log_t1)
    if value_of(slope) <= 0.0:
        raise OutOfRange("the viscosity must fall with temperature", "nu2",
                         "check which value belongs to which temperature")
    return w1 + slope * log_t1, slope


def viscosity_at(t, t1, nu1, t2, nu2):
    """Viscosity in m2/s at `t` degC of an oil known at two temperatures; refuses answers outside 2 to 2e7 mm2/s."""
    a, b = walther_constants(t1, nu1, t2, nu2)
    outer = a - b * log10(t + KELVIN)
    if value_of(outer) > 0.864:  # log10(log10(2e7)): beyond it the powers would run away
        raise OutOfRange("the oil would be stiffer than ASTM D341 describes", "t",
                         "take a thinner oil or a warmer place")
    nu = power(10.0, power(10.0, outer)) - 0.7
    if value_of(nu) < 2.0:
        raise OutOfRange("the oil would be thinner than ASTM D341 describes", "t")
    return nu * MM2_PER_S


def _l_and_h(y):
    """L and H of ASTM D2270 for Y in mm2/s; piecewise, so between lines a step of up to 0.1 % remains."""
    if not 2.0 <= value_of(y) <= 500.0:
        raise OutOfRange("the viscosity at 100 degC lies outside ASTM D2270", "nu_100", "give 2 to 500 mm2/s")
    row = D2270[0]
    for line in D2270:
        if value_of(y) >= line[0]:
            row = line
    square = y * y
    return row[1] * square + row[2] * y + row[3], row[4] * square + row[5] * y + row[6]


def index_from_references(nu_40, nu_100, l_40, h_40):
    """Viscosity index from the oil's two viscosities and the two reference oils' at 40 degC, all m2/s.

    ASTM D2270 procedure A up to 100, B above (checks 11.3, READ).
    """
    if not value_of(l_40) > value_of(h_40) > 0.0:
        raise OutOfRange("reference L must lie above reference H, and both above zero", "l_40")
    if value_of(nu_40) >= value_of(h_40):
        return 100.0 * (l_40 - nu_40) / (l_40 - h_40)
    exponent = (log10(h_40) - log10(nu_40)) / log10(nu_100 / MM2_PER_S)
    return (power(10.0, exponent) - 1.0) / 0.00715 + 100.0


def viscosity_index(nu_40, nu_100):
    """Viscosity index of an oil of `nu_40` and `nu_100` (m2/s at 40 and 100 degC); ASTM D2270, not rounded."""
    low_reference, high_reference = _l_and_h(nu_100 / MM2_PER_S)
    return index_from_references(nu_40, nu_100, low_reference * MM2_PER_S, high_reference * MM2_PER_S)


def _nu_100_of(nu_40, index):
    """Float solution of viscosity_index(nu_40, x) = index by halving; the index rises with x."""
    low, high = 2.0 * MM2_PER_S, min(500.0 * MM2_PER_S, nu_40 * 0.999)
    if not low < high or not viscosity_index(nu_40, low) <= index <= viscosity_index(nu_40, high):
        raise OutOfRange("no oil has this viscosity index at this viscosity", "index",
                         "give the viscosity at 100 degC instead")
    for _ in range(200):
        middle = 0.5 * (low + high)
        if middle == low or middle == high:
            break
        if viscosity_index(nu_40, middle) < index:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)


def viscosity_at_100(nu_40, index):
    """Viscosity in m2/s at 100 degC of an oil known by its viscosity at 40 degC and its index (second point)."""
    return through(_nu_100_of, [nu_40, index])


# --- choosing -------------------------------------------------------------------------------------------------------


@frozen("lubricant", "viscosity", "fits", "reasons")
class Choice:
    """lubricant: its id; viscosity: m2/s at the working temperature or None; fits: bool; reasons: texts why not."""


def goes_with(matrix, base, materials):
    """Worst of how a base goes with each of `materials`: "ok", "care", "unknown" or "never".

    matrix: list of (base, material, one of those words), as the rulebook holds it; a pair that is not in it is
    "unknown". No materials: "unknown" too, since a gear train holds some. Source of shipped entries: checks 11.5.
    """
    worst = 0 if len(materials) > 0 else ORDER_OF_HARM.index("unknown")
    for material in materials:
        word = "unknown"
        for entry in matrix:
            if entry[0] == base and entry[1] == material:
                word = entry[2]
        if word not in ORDER_OF_HARM:
            raise OutOfRange("no such word for compatibility: " + word, "matrix", "use " + ", ".join(ORDER_OF_HARM))
        worst = max(worst, ORDER_OF_HARM.index(word))
    return ORDER_OF_HARM[worst]


def compatibility_rank(base, material):
    """0 ok, 1 extreme caution, 2 unknown, 3 never: place in ORDER_OF_HARM of a base oil on one material of a train.

    base, material: ids of rules/materials.toml; the material "none" is not there, so nothing harms it: 0.
    A base or material that nobody has looked at is unknown, 2. Source: checks 11.5 (READ-2).
    """
    if material == "none":
        return 0.0
    for known in COMPATIBILITY:
        if known == base:
            for word in COMPATIBILITY[known]:
                if material in COMPATIBILITY[known][word].split():
                    return float(ORDER_OF_HARM.index(word))
    return float(ORDER_OF_HARM.index("unknown"))


def viscosity_on_shelf(lubricant, t_work):
    """Viscosity in m2/s of a shelf lubricant at `t_work` degC, or None when the shelf knows too little.

    lubricant: dict with any of v40, v100 (m2/s), index, and temperature_1, viscosity_1, temperature_2, viscosity_2.
    """
    first, second, index = lubricant.get("v40"), lubricant.get("v100"), lubricant.get("index")
    if first is None:
        return None
    if second is None and index is not None:
        second = viscosity_at_100(first, index)
    if second is None:
        return first if value_of(t_work) == 40.0 else None
    return viscosity_at(t_work, 40.0, first, 100.0, second)


def _judge_one(lubricant, t_work, nu_low, nu_high, consistencies, matrix, materials):
    reasons, viscosity = [], None
    try:
        viscosity = viscosity_on_shelf(lubricant, t_work)
        if viscosity is None:
            reasons.append("its viscosity at the working temperature is not known")
        elif value_of(viscosity) < nu_low:
            reasons.append("too thin at the working temperature")
        elif value_of(viscosity) > nu_high:
            reasons.append("too thick at the working temperature")
    except OutOfRange as problem:
        reasons.append(problem.what)
    if lubricant.get("type") == "grease" and lubricant.get("nlgi") not in consistencies:
        reasons.append("its consistency is not among those wanted")
    word = goes_with(matrix, lubricant.get("base"), materials)
    if word != "ok":
        reasons.append({"care": "extreme caution with a material of this gear train",
                        "unknown": "how it goes with a material of this gear train is not known",
                        "never": "harms a material of this gear train"}[word])
    return Choice(lubricant["id"], viscosity, len(reasons) == 0, tuple(reasons))


def choose(shelf, t_work, nu_low, nu_high, consistencies, matrix, materials):
    """Every lubricant of the shelf as a Choice: those that fit, nearest to the band's middle first, then the rest.

    shelf: list of dicts (id, type "oil" or "grease", base, nlgi, and viscosities as viscosity_on_shelf takes them);
    t_work: degC; nu_low, nu_high: wanted band in m2/s (of a grease: of its base oil); consistencies: wanted NLGI texts.
    """
    if not 0.0 < nu_low < nu_high:
        raise OutOfRange("the wanted band of viscosity is empty", "nu_low")
    found = [_judge_one(one, t_work, nu_low, nu_high, consistencies, matrix, materials) for one in shelf]
    fitting = [choice for choice in found if choice.fits]
    middle = value_of(log10(nu_low * nu_high)) / 2.0
    fitting.sort(key=lambda choice: abs(log10(value_of(choice.viscosity)) - middle))
    return tuple(fitting + [choice for choice in found if not choice.fits])
