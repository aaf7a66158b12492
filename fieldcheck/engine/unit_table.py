"""The tables of units and named quantities. What may be done with them stands in units.py.

Sources of the scales: SI brochure (BIPM, 9th edition) for prefixes and named units; exact definitions of inch
(25.4 mm), pound (0.453 592 37 kg) and standard gravity (9.806 65 m/s2).
"""

from fieldcheck.engine.frozen import frozen

POINT = "temperature point"
NONE = (0, 0, 0, 0, 0)
KELVIN = (0, 0, 0, 0, 1)


@frozen("symbol", "num", "den", "offset_num", "offset_den", "dimension", "printed")
class Unit:
    """base = (value + offset_num/offset_den) * num/den. symbol: ASCII; printed: as people write it (Ω, µ, °C)."""


@frozen("name", "dimension", "base_unit", "units", "stem", "signed", "example")
class Quantity:
    """A named kind of value, as rule files call it.

    base_unit: symbol of the coherent SI unit. units: symbols offered, the first is meant when none is typed.
    stem: symbol to which a lone prefix belongs ("k" is kohm), or "". signed: a reading below zero makes sense.
    example: what a person might type.
    """


# ---- the unit table ---------------------------------------------------------------------------------------------

PREFIXES = {"p": (1, 10**12), "n": (1, 10**9), "u": (1, 10**6), "m": (1, 1000), "c": (1, 100), "h": (100, 1),
             "k": (1000, 1), "M": (10**6, 1), "G": (10**9, 1)}
UNITS = {}
ORDER = []


def print_form(symbol):
    """The symbol with Ω, °, raised digits and the middle dot."""
    text = symbol
    for plain, pretty in (("ohm", "Ω"), ("deg", "°"), ("2", "²"), ("3", "³"), ("4", "⁴"), (".", "·")):
        text = text.replace(plain, pretty)
    return text


def _put(key, symbol, num, den, dimension, offset=(0, 1), printed=None):
    text = print_form(symbol) if printed is None else printed
    UNITS["u:" + key] = Unit(symbol, num, den, offset[0], offset[1], dimension, text)
    ORDER.append(key)


def _define(stem, dimension, prefixes="", num=1, den=1):
    """The unit itself and its prefixed forms (one letter each)."""
    _put(stem, stem, num, den, dimension)
    for letter in prefixes:
        up, down = PREFIXES[letter]
        printed = ("µ" if letter == "u" else letter) + print_form(stem)
        _put(letter + stem, letter + stem, num * up, den * down, dimension, printed=printed)


OHM, VOLT, AMPERE, WATT = (1, 2, -3, -2, 0), (1, 2, -3, -1, 0), (0, 0, 0, 1, 0), (1, 2, -3, 0, 0)
SECOND, HERTZ, METRE, KILOGRAM = (0, 0, 1, 0, 0), (0, 0, -1, 0, 0), (0, 1, 0, 0, 0), (1, 0, 0, 0, 0)
NEWTON, PASCAL, JOULE = (1, 1, -2, 0, 0), (1, -1, -2, 0, 0), (1, 2, -2, 0, 0)
WEBER, HENRY, FARAD, TESLA = (1, 2, -2, -1, 0), (1, 2, -2, -2, 0), (-1, -2, 4, 2, 0), (1, 0, -2, -1, 0)


def _define_all():
    for stem, dimension, prefixes in (
            ("ohm", OHM, "numkMG"), ("V", VOLT, "numk"), ("A", AMPERE, "numk"), ("W", WATT, "umkM"),
            ("VA", WATT, "mk"), ("s", SECOND, "num"), ("Hz", HERTZ, "mkM"), ("m", METRE, "numck"),
            ("N", NEWTON, "umck"), ("Pa", PASCAL, "mhkMG"), ("J", JOULE, "umk"), ("Wb", WEBER, "num"),
            ("H", HENRY, "num"), ("F", FARAD, "pnum"), ("T", TESLA, "um"), ("S", (-1, -2, 3, 2, 0), "num"),
            ("A2s", (0, 0, 1, 2, 0), "k"), ("N.m", JOULE, "um"), ("ohm/m", (1, 1, -3, -2, 0), "um"),
            ("ohm.m", (1, 3, -3, -2, 0), "nu"), ("Pa.s", (1, -1, -1, 0, 0), "m"), ("V/s", (1, 2, -4, -1, 0), "m"),
            ("V/m", (1, 1, -3, -1, 0), "k"), ("A/m", (0, -1, 0, 1, 0), "k")):
        _define(stem, dimension, prefixes)
    for symbol, num, den, dimension in (
            ("min", 60, 1, SECOND), ("h", 3600, 1, SECOND), ("d", 86400, 1, SECOND),
            ("in", 127, 5000, METRE), ("ft", 381, 1250, METRE),
            ("m2", 1, 1, (0, 2, 0, 0, 0)), ("cm2", 1, 10**4, (0, 2, 0, 0, 0)), ("mm2", 1, 10**6, (0, 2, 0, 0, 0)),
            ("m3", 1, 1, (0, 3, 0, 0, 0)), ("mL", 1, 10**6, (0, 3, 0, 0, 0)), ("uL", 1, 10**9, (0, 3, 0, 0, 0)),
            ("L", 1, 1000, (0, 3, 0, 0, 0)),
            ("m/s", 1, 1, (0, 1, -1, 0, 0)), ("mm/s", 1, 1000, (0, 1, -1, 0, 0)),
            ("mm/h", 1, 3600000, (0, 1, -1, 0, 0)),
            ("m2/s", 1, 1, (0, 2, -1, 0, 0)), ("mm2/s", 1, 10**6, (0, 2, -1, 0, 0)),
            ("kg", 1, 1, KILOGRAM), ("g", 1, 1000, KILOGRAM), ("mg", 1, 10**6, KILOGRAM),
            ("lb", 45359237, 10**8, KILOGRAM), ("kg/m3", 1, 1, (1, -3, 0, 0, 0)), ("g/cm3", 1000, 1, (1, -3, 0, 0, 0)),
            ("gf", 980665, 10**8, NEWTON), ("kgf", 980665, 10**5, NEWTON),
            ("lbf", 8896443230521, 2 * 10**12, NEWTON), ("ozf", 8896443230521, 32 * 10**12, NEWTON),
            ("bar", 10**5, 1, PASCAL), ("mbar", 100, 1, PASCAL), ("psi", 8896443230521, 1290320000, PASCAL),
            ("N/cm2", 10**4, 1, PASCAL), ("cN/cm2", 100, 1, PASCAL), ("N/m", 1, 1, (1, 0, -2, 0, 0)),
            ("N/mm", 1000, 1, (1, 0, -2, 0, 0)),
            ("ohm/km", 1, 1000, (1, 1, -3, -2, 0)), ("ohm.mm2/m", 1, 10**6, (1, 3, -3, -2, 0)),
            ("A/m2", 1, 1, (0, -2, 0, 1, 0)), ("A/cm2", 10**4, 1, (0, -2, 0, 1, 0)),
            ("A/mm2", 10**6, 1, (0, -2, 0, 1, 0)),
            ("1", 1, 1, NONE), ("%", 1, 100, NONE), ("ppm", 1, 10**6, NONE), ("%RH", 1, 100, NONE),
            ("rad", 1, 1, NONE), ("1/s", 1, 1, HERTZ), ("rpm", 1, 60, HERTZ),
            ("K", 1, 1, KELVIN), ("1/K", 1, 1, (0, 0, 0, 0, -1)), ("%/K", 1, 100, (0, 0, 0, 0, -1)),
            ("ppm/K", 1, 10**6, (0, 0, 0, 0, -1)), ("K/s", 1, 1, (0, 0, -1, 0, 1)),
            ("K/min", 1, 60, (0, 0, -1, 0, 1))):
        _put(symbol, symbol, num, den, dimension, printed="" if symbol == "1" else None)
    # The degree is pi/180: a convergent of its continued fraction, off by 1.5e-24, is the same float.
    _put("deg", "deg", 2339260349, 134029745180, NONE, printed="°")
    _put("0.1 mm", "0.1 mm", 1, 10**4, METRE, printed="× 0.1 mm")
    _put("degC", "degC", 1, 1, POINT)
    _put("degF", "degF", 5, 9, POINT, offset=(-32, 1))
    _put("K@point", "K", 1, 1, POINT, offset=(-5463, 20))
    _put("degF@difference", "degF", 5, 9, KELVIN)


_define_all()

# ---- the named quantities ---------------------------------------------------------------------------------------

QUANTITIES = {}
NAMES = []


def _name(name, base, units, stem="", signed=False, example=""):
    keys = tuple(units.split(","))
    QUANTITIES["q:" + name] = Quantity(name, UNITS["u:" + base].dimension, base, keys, stem, signed, example)
    NAMES.append(name)


for _row in (
        ("resistance", "ohm", "ohm,kohm,Mohm,mohm,uohm,Gohm", "ohm", True, "2.75 kΩ"),
        ("voltage", "V", "V,mV,uV,kV", "V", True, "12.05 V"),
        ("current", "A", "A,mA,uA,kA", "A", True, "1.25 A"),
        ("power", "W", "W,mW,kW", "W", True, "15 W"),
        ("apparent power", "VA", "VA,mVA,kVA", "VA", False, "150 VA"),
        ("time", "s", "s,ms,us,min,h,d", "", False, "83.4 s"),
        ("frequency", "Hz", "Hz,kHz,mHz,MHz", "Hz", False, "50.02 Hz"),
        ("rotation", "1/s", "rpm,1/s", "", False, "3200 rpm"),
        ("rate", "1/s", "1/s", "", False, "2.5"),
        ("temperature", "degC", "degC,degF,K@point", "", True, "22.5 °C"),
        ("temperature difference", "K", "K,degF@difference", "", True, "45 K"),
        ("temperature coefficient", "1/K", "1/K,%/K,ppm/K", "", True, "0.393 %/K"),
        ("temperature rate", "K/s", "K/s,K/min", "", True, "0.2 K/min"),
        ("length", "m", "mm,um,cm,m,km,in,ft", "", True, "4.5 mm"),
        ("penetration", "m", "0.1 mm", "", False, "265"),
        ("area", "m2", "mm2,cm2,m2", "", False, "0.5 mm²"),
        ("volume", "m3", "mL,uL,L,m3", "", False, "0.5 mL"),
        ("speed", "m/s", "m/s,mm/s,mm/h", "", True, "20 mm/s"),
        ("mass", "kg", "g,mg,kg,lb", "", False, "25 mg"),
        ("density", "kg/m3", "kg/m3,g/cm3", "", False, "870 kg/m³"),
        ("force", "N", "N,mN,cN,kN,gf,kgf,ozf,lbf", "N", True, "0.25 N"),
        ("torque", "N.m", "mN.m,N.m,uN.m", "", True, "1.5 mN·m"),
        ("stiffness", "N/m", "N/m,N/mm", "", False, "120 N/m"),
        ("pressure", "Pa", "kPa,Pa,hPa,MPa,GPa,bar,mbar,psi,N/cm2,cN/cm2", "Pa", True, "20 kPa"),
        ("energy", "J", "J,mJ,uJ,kJ", "J", False, "1.2 J"),
        ("viscosity", "m2/s", "mm2/s,m2/s", "", False, "32 mm²/s"),
        ("dynamic viscosity", "Pa.s", "mPa.s,Pa.s", "", False, "28 mPa·s"),
        ("let-through", "A2s", "A2s,kA2s", "", False, "540 A²s"),
        ("flux", "Wb", "Wb,mWb,uWb", "Wb", True, "90 µWb"),
        ("flux density", "T", "T,mT,uT", "T", True, "0.9 T"),
        ("inductance", "H", "H,mH,uH,nH", "H", False, "31.4 mH"),
        ("capacitance", "F", "F,mF,uF,nF,pF", "F", False, "100 nF"),
        ("conductance", "S", "S,mS,uS", "S", False, "20 mS"),
        ("resistance per length", "ohm/m", "mohm/m,ohm/m,ohm/km", "", False, "32 mΩ/m"),
        ("resistivity", "ohm.m", "ohm.m,nohm.m,uohm.m,ohm.mm2/m", "", False, "17.2 nΩ·m"),
        ("current density", "A/m2", "A/mm2,A/cm2,A/m2", "", False, "3 A/mm²"),
        ("voltage rate", "V/s", "V/s,mV/s", "", True, "0.2 V/s"),
        ("electric field", "V/m", "V/m,kV/m", "", True, "500 V/m"),
        ("magnetic field", "A/m", "A/m,kA/m", "", True, "800 A/m"),
        ("angle", "rad", "deg,rad", "", True, "60°"),
        ("ratio", "1", "1,%,ppm", "", True, "22.5"),
        ("count", "1", "1", "", False, "40"),
        ("humidity", "1", "%RH", "", False, "45 %RH")):
    _name(*_row)


# ---- spellings ---------------------------------------------------------------------------------------------------

SPELLED = {"\u2126": "ohm", "\u03a9": "ohm", "\u00b5": "u", "\u03bc": "u", "\u00b2": "2", "\u00b3": "3",
            "\u00b0": "deg", "\u00ba": "deg", "\u2103": "degC", "\u2109": "degF", "\u00b7": ".", "\u22c5": ".",
            " ": "", "\u00a0": "", "\u2009": "", "\u202f": ""}
# (quantity, spelling after SPELLED was applied, key of the unit)
ALIASES = (("temperature", "C", "degC"), ("temperature", "F", "degF"), ("temperature difference", "degC", "K"),
            ("temperature difference", "C", "K"), ("time", "sec", "s"), ("time", "S", "s"),
            ("rotation", "r/min", "rpm"), ("rotation", "1/min", "rpm"), ("rotation", "/s", "1/s"),
            ("rate", "/s", "1/s"), ("rate", "Hz", "1/s"),
            ("temperature coefficient", "/K", "1/K"), ("viscosity", "cSt", "mm2/s"),
            ("dynamic viscosity", "cP", "mPa.s"),
            ("let-through", "A2.s", "A2s"), ("torque", "Nm", "N.m"), ("torque", "mNm", "mN.m"),
            ("humidity", "%", "%RH"), ("ratio", "", "1"), ("count", "", "1"),
            ("length", '"', "in"), ("penetration", "0.1mm", "0.1 mm"), ("penetration", "×0.1mm", "0.1 mm"),
            ("volume", "ml", "mL"), ("volume", "cm3", "mL"))
