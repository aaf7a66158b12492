"""What may be typed into a field that means a quantity, said in the engine's own words."""

from __future__ import annotations

from fieldcheck.desk.forms import Check
from fieldcheck.engine import entry, units
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.figures import parse_decimal


def of_quantity(quantity: str, unit: str = "", needs_unit: bool = False) -> Check:
    """One value of a quantity.  unit: meant when none is typed.  needs_unit: a bare number is refused."""
    def check(text: str) -> str:
        try:
            read = entry.read(text, quantity, default_unit=unit or None, allow=("negative",))
        except FieldcheckError as error:
            return f"{error.what}; {error.mend}" if error.mend else str(error.what)
        if needs_unit and text.strip()[-1] in "0123456789.,":
            return f"write its unit too, as {text.strip()} {units.symbol_text(read.unit)}"
        return ""
    return check


def count(text: str) -> str:
    """A plain number of counts, divisions or pieces."""
    try:
        return "" if parse_decimal(text) >= 0 else "zero or more"
    except FieldcheckError as error:
        return str(error.what)


def share(text: str) -> str:
    """A share of the reading or of full scale: the sign must stand there, since 0.05 and 0.05 % are far apart."""
    if text.strip()[-1] in "0123456789.,":
        return f"write it with its sign, as {text.strip()} %"
    return of_quantity("ratio")(text)


def unit_text(symbol: str) -> str:
    """A unit key as people write it: Ω, µ, °C; "" for none."""
    return str(units.symbol_text(units.unit(symbol))) if symbol else ""
