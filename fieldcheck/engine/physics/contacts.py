"""Contacts: four-wire with reversal, lead null, constriction, spot temperature, like with like.

Ohm, volt, ampere, newton, pascal, metre, ohm metre, degC. Floats or measured values.
"""

from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.measured import minimum, sqrt, value_of

PI = 3.141592653589793
LORENZ = 2.45e-8   # (V/K)^2, Wiedemann-Franz-Lorenz constant of the voltage-temperature relation (checks 12.1)
KELVIN = 273.15


def _above_zero(value, name, what):
    if value_of(value) <= 0.0:
        raise OutOfRange(what + " must be above zero", name)


def four_wire_resistance(v_plus, v_minus, i):
    """Resistance from drops `v_plus` and `v_minus` (the latter with the current `i` reversed, so negative).

    (v_plus - v_minus)/(2 i): a thermal emf adds to both readings alike and cancels. Both drops on one range
    of one meter share their gain. Raises OutOfRange unless i > 0. Source: checks 5.3 (READ-2).
    """
    _above_zero(i, "i", "the current")
    return (v_plus - v_minus) / (2.0 * i)


def thermal_emf(v_plus, v_minus):
    """Thermal emf in V that the reversal cancelled: (v_plus + v_minus)/2. Source: checks 5.3."""
    return (v_plus + v_minus) / 2.0


def two_wire_resistance(r_indicated, r_leads):
    """Resistance less what the meter showed with its leads shorted together. Source: checks 5.3."""
    return r_indicated - r_leads


def resistance_from_drop(v, i):
    """v/i in ohm; i > 0. Source: checks 12.2."""
    _above_zero(i, "i", "the current")
    return v / i


def drop_at_current(r, i):
    """Drop in V across `r` at current `i`."""
    return r * i


def constriction_resistance(rho, radius):
    """One round spot of `radius` between equal metals: rho/(2 a). Source: Holm, Electric Contacts (12.1, MEM+)."""
    _above_zero(radius, "radius", "the radius of the spot")
    return rho / (2.0 * radius)


def constriction_of_two_metals(rho_1, rho_2, radius):
    """One round spot between unequal metals: (rho_1 + rho_2)/(4 a). Source: Holm (12.1, MEM+)."""
    _above_zero(radius, "radius", "the radius of the spot")
    return (rho_1 + rho_2) / (4.0 * radius)


def contact_spot_radius(force, hardness):
    """Radius in m of a plastic contact: sqrt(force/(pi hardness)). Source: Holm (12.1, MEM+)."""
    _above_zero(force, "force", "the contact force")
    _above_zero(hardness, "hardness", "the hardness")
    return sqrt(force / (PI * hardness))


def constriction_under_force(rho, hardness, force):
    """Constriction resistance of a clean plastic contact: (rho/2) sqrt(pi hardness/force). Source: Holm (12.1, MEM+).

    A lower bound: films decide in practice, so test at the working current.
    """
    return constriction_resistance(rho, contact_spot_radius(force, hardness))


def contact_spot_temperature(v, t_ambient):
    """Upper estimate in degC of the hottest spot from the drop `v` across the contact alone.

    V^2 = 4 L (Tm^2 - T0^2), temperatures in K. Means nothing where the drop is mostly film or spring, so no
    verdict hangs on it. Constant L overshoots near melting by about 4 % (checks 12.1).
    """
    t0 = t_ambient + KELVIN
    _above_zero(t0, "t_ambient", "the absolute temperature")
    return sqrt(t0 * t0 + v * v / (4.0 * LORENZ)) - KELVIN


def like_with_like(r, group):
    """Resistance over the lowest of its group of similar contacts (the group may hold `r` itself).

    Investigate above 1.5 (NETA by way of a testing forum, checks 12.2, READ-2).
    """
    if len(group) == 0:
        raise OutOfRange("the group of similar contacts is empty", "group")
    lowest = minimum(group)
    _above_zero(lowest, "group", "the lowest resistance of the group")
    return r / lowest


def improvement(found, left):
    """Share of the as-found value that service removed: (found - left)/found; negative when it became worse."""
    _above_zero(found, "found", "the as-found value")
    return (found - left) / found
