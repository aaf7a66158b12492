"""The one drawing: a judged value on its scale, and the small bracket sign of a statement.  Numbers in, SVG text out.

Presentation attributes and classes only, no style attributes (strict Content-Security-Policy); everything in
currentColor, so it says all it has to say in one ink.  Classes: scale, axis, rail, hatch, pointer, whisker, notch,
arrow, figure; sign, bracket, mark.
"""

import math

from fieldcheck.engine import elementary, figures, verdicts

_floor = math.floor

_WIDTH = 320.0
_LEFT = 14.0
_RIGHT = 306.0
_AXIS = 46.0
_LOG_FROM = 20.0            # ratio of largest to smallest number from which the scale is logarithmic
_WANTED_TICKS = 6.0


def escaped(text):
    """Text safe inside SVG elements and attributes."""
    return text.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;").replace('"', "&quot;")


def _at(x):
    """A coordinate as text."""
    tenths = int(_floor(x * 10.0 + 0.5))
    size = abs(tenths)
    return ("-" if tenths < 0 else "") + str(size // 10) + "." + str(size % 10)


def _line(kind, x1, y1, x2, y2, width="1"):
    return ('<line class="' + kind + '" x1="' + _at(x1) + '" y1="' + _at(y1) + '" x2="' + _at(x2) + '" y2="' + _at(y2)
            + '" stroke="currentColor" stroke-width="' + width + '"/>')


def _text(x, y, text, anchor="middle"):
    return ('<text class="figure" x="' + _at(x) + '" y="' + _at(y) + '" text-anchor="' + anchor
            + '" font-size="11" fill="currentColor">' + escaped(text) + "</text>")


def _decade(x):
    """The whole number e with 10^e <= x < 10^(e+1), x > 0, without logarithms."""
    e = 0
    while e < 300 and x >= _ten(e + 1, 1):
        e += 1
    while e > -300 and x < _ten(e, 1):
        e -= 1
    return e


def _ten(e, count):
    """count * 10^e, correctly rounded."""
    return float(count * 10 ** e) if e >= 0 else float(count) / float(10 ** -e)


def _tick_text(e, count):
    return figures.fixed(_ten(e, count), max(0, -e)) if -5 < e < 5 else figures.decimal_text(_ten(e, count))


def _linear_ticks(low, high):
    """[(value, text)] at round values within low..high."""
    raw = (high - low) / _WANTED_TICKS
    e = _decade(raw)
    step = 1
    for candidate in (1, 2, 5, 10):
        step = candidate
        if _ten(e, candidate) >= raw:
            break
    if step == 10:
        e, step = e + 1, 1
    first = int(_floor(low / _ten(e, step)))
    ticks = []
    for k in range(first, first + 15):
        value = _ten(e, k * step)
        if low <= value <= high:
            ticks.append((value, _tick_text(e, k * step)))
    return ticks


def _log_ticks(low, high):
    """[(value, text)]: the decades within low..high, with 2 and 5 when there are few."""
    decades = range(_decade(low), _decade(high) + 1)
    counts = (1, 2, 5) if len(decades) <= 3 else (1,)
    stride = 1 + len(decades) // 8
    ticks = []
    for e in decades:
        for count in counts:
            value = _ten(e, count)
            if low <= value <= high and (e - decades[0]) % stride == 0:
                ticks.append((value, _tick_text(e, count)))
    return ticks


class Axis:
    """Where numbers lie between the scale's ends.  kind: "linear" or "logarithmic", by the ratio of the numbers."""

    def __init__(self, numbers):
        low, high = min(numbers), max(numbers)
        self.log = low > 0.0 and high >= _LOG_FROM * low
        if self.log:
            self.low, self.high = low / 1.5, high * 1.5
            self.start = elementary.log10(self.low)
            self.length = elementary.log10(self.high) - self.start
            self.ticks = _log_ticks(self.low, self.high)
        else:
            pad = (high - low) * 0.12 or abs(high) * 0.1 or 1.0
            from_zero = 0.0 <= low < 0.5 * high
            self.low, self.high = (0.0 if from_zero else low - pad), high + pad
            self.start, self.length = self.low, self.high - self.low
            self.ticks = _linear_ticks(self.low, self.high)

    @property
    def kind(self):
        return "logarithmic" if self.log else "linear"

    def x(self, value):
        """Coordinate of a number; beyond the ends it stays at the end."""
        if value <= self.low:
            return _LEFT
        if value >= self.high:
            return _RIGHT
        place = elementary.log10(value) if self.log else value
        return _LEFT + (_RIGHT - _LEFT) * (place - self.start) / self.length


def _rails(axis, at_least, at_most):
    x1 = _LEFT if at_least is None else axis.x(at_least)
    x2 = _RIGHT if at_most is None else axis.x(at_most)
    parts = [_line("rail", x1, y, x2, y, "2") for y in (_AXIS - 4.0, _AXIS + 4.0)]
    for limit, x in ((at_least, x1), (at_most, x2)):
        if limit is not None:
            parts.append(_line("rail", x, _AXIS - 7.0, x, _AXIS + 7.0, "2"))
    return parts


def _hatch(axis, limit, guard):
    """Slanted strokes over the guard band, on both sides of the limit."""
    if limit is None or not guard > 0.0:
        return []
    x1, x2 = axis.x(limit - guard), axis.x(limit + guard)
    parts = []
    count = 1 + int(_floor((x2 - x1) / 4.0))
    for i in range(count):
        x = x1 + (x2 - x1) * (i + 0.5) / count
        parts.append(_line("hatch", x - 1.5, _AXIS + 4.0, x + 1.5, _AXIS - 4.0))
    return parts


def _pointer(x, filled):
    fill = "currentColor" if filled else "none"
    tip, top = _at(_AXIS - 6.0), _at(_AXIS - 20.0)
    return ('<path class="pointer" d="M' + _at(x) + " " + tip + "L" + _at(x - 5.0) + " " + top + "H"
           + _at(x + 5.0) + 'Z" fill="' + fill + '" stroke="currentColor" stroke-width="1.5"/>')


def _whisker(axis, value, wide):
    if not wide > 0.0:
        return []
    x1, x2 = axis.x(value - wide), axis.x(value + wide)
    y = _AXIS - 25.0
    return [_line("whisker", x1, y, x2, y, "1.5"), _line("whisker", x1, y - 3.0, x1, y + 3.0, "1.5"),
            _line("whisker", x2, y - 3.0, x2, y + 3.0, "1.5")]


def _notch(x):
    return ('<path class="notch" d="M' + _at(x - 4.0) + " " + _at(_AXIS + 13.0) + "L" + _at(x) + " " + _at(_AXIS + 7.0)
            + "L" + _at(x + 4.0) + " " + _at(_AXIS + 13.0) + '" fill="none" stroke="currentColor" stroke-width="1.5"/>')


def _arrow(axis, value, bound):
    """A bounded reading: an arrow from its bound (or the middle) off the end of the scale."""
    end, back = (_RIGHT + 10.0, -6.0) if bound == ">" else (_LEFT - 10.0, 6.0)
    start = axis.x(value) if value is not None else (_LEFT + _RIGHT) * 0.5
    y = _AXIS - 14.0
    return [_line("arrow", start, y, end, y, "2"), _line("arrow", start, y - 4.0, start, y + 4.0, "2"),
            _line("arrow", end, y, end + back, y - 4.0, "2"), _line("arrow", end, y, end + back, y + 4.0, "2")]


def svg(value, at_least=None, at_most=None, guard=0.0, wide=0.0, unit="", bound="", as_found=None, last=None, title=""):
    """The scale of one value as SVG text.  All numbers in the display unit.

    value: None = nothing taken yet; at_least, at_most: None = no limit on that side; guard: w; wide: U; bound: ">" or
    "<" when the reading is only a bound; as_found: an earlier value, drawn open beside the filled one; last: last
    season's value, a notch below; title: words for those who cannot see it.
    """
    numbers = [n for n in (value, at_least, at_most, as_found, last) if n is not None]
    for limit in (at_least, at_most):
        if limit is not None:
            numbers += [n for n in (limit - guard, limit + guard) if n > 0.0 or limit <= 0.0]
    if value is not None and not bound:
        numbers += [n for n in (value - wide, value + wide) if n > 0.0 or value <= 0.0]
    axis = Axis(numbers or [0.0, 1.0])
    parts = [_line("axis", _LEFT, _AXIS, _RIGHT, _AXIS)]
    if at_least is not None or at_most is not None:
        parts += _rails(axis, at_least, at_most)
    parts += _hatch(axis, at_least, guard) + _hatch(axis, at_most, guard)
    for tick, text in axis.ticks:
        x = axis.x(tick)
        parts += [_line("axis", x, _AXIS, x, _AXIS + 10.0), _text(x, _AXIS + 24.0, text)]
    parts.append(_text(_RIGHT, 82.0, (unit + ", " if unit else "") + axis.kind, "end"))
    if last is not None:
        parts.append(_notch(axis.x(last)))
    if as_found is not None:
        parts.append(_pointer(axis.x(as_found), False))
    if bound:
        parts += _arrow(axis, value, bound)
    elif value is not None:
        parts += _whisker(axis, value, wide) + [_pointer(axis.x(value), True)]
    return ('<svg class="scale" viewBox="0 0 ' + figures.fixed(_WIDTH, 0) + ' 88" role="img" xmlns="http://www.w3.org/2000/svg">'
            + "<title>" + escaped(title or "scale") + "</title>" + "".join(parts) + "</svg>")


def _same(x):
    return x


def of_verdict(verdict, convert=_same, unit="", as_found=None, last=None):
    """The scale of a Verdict; convert: SI float -> display unit; as_found, last: SI floats or None."""
    zero = convert(0.0)
    shown = verdicts.printed(verdict, convert)
    words = verdict.statement
    if shown.value:
        words = words + ": " + verdict.bound + shown.value + (" " + unit if unit else "")

    def turned(x):
        return None if x is None else convert(x)

    return svg(turned(verdict.value), turned(verdict.at_least), turned(verdict.at_most), convert(verdict.guard) - zero,
               convert(verdict.U) - zero, unit, verdict.bound, turned(as_found), turned(last), words)


_MARKS = {"pass": "6", "conditional pass": "8.6", "conditional fail": "13.4", "fail": "17.4"}
"""Centre of the mark; the bracket's right stem stands at 11."""


def sign(statement):
    """The statement's sign as SVG text: a bracket, and a mark inside, at its edge, outside, or none (not judged).

    Raises KeyError for a word that is no statement.
    """
    if statement == verdicts.NOT_JUDGED:
        mark = ""
    else:
        mark = '<circle class="mark" cx="' + _MARKS[statement] + '" cy="8" r="2" fill="currentColor"/>'
    return ('<svg class="sign" viewBox="0 0 20 16" role="img" xmlns="http://www.w3.org/2000/svg"><title>' + statement
            + '</title><path class="bracket" d="M4 2H1V14H4M8 2H11V14H8" fill="none" stroke="currentColor"'
            + ' stroke-width="1.6"/>' + mark + "</svg>")
