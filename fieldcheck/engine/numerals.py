"""How a person writes a number: digits, decimal marks, groups of thousands, letter codes, minutes and seconds.

Cuts a typed text into pieces, one a number with the unit word that follows it. Knows nothing of quantities;
entry.py gives the pieces their meaning. Works on a list of characters, never on slices of the text, because
the two runtimes count characters above U+FFFF differently.
"""

DIGITS = "0123456789"
NARROW = "\u2009"  # every kind of narrow or unbreakable space becomes this one
SPACES = " \u2009"
MOST_DIGITS = 17  # a float holds no more
MOST_EXPONENT = 30

_CHARACTERS = {"\u2212": "-", "\u00b5": "u", "\u03bc": "u", "\u00a0": NARROW, "\u202f": NARROW, "\u2009": NARROW,
               "\t": " ", "\n": " ", "\r": " ", "\x0b": " ", "\x0c": " ", "\u2002": " ", "\u2003": " ", "\u3000": " "}
OVERRANGE = ("OL", "OL.", ".OL", "O.L", "O.L.", "OFL", "OVER", "OVERLOAD")


class Malformed(Exception):
    """why: the rest of a sentence that begins with what was typed. choices: texts to pick from, or ()."""

    def __init__(self, why, choices=()):
        Exception.__init__(self, why)
        self.why = why
        self.choices = choices


class Piece:
    """One number as typed. own: letter of an IEC 60062 code, ":" for minutes and seconds, or "".

    alternatives: (as decimals, as thousands) where one comma or point could mean either. over: "OL" or "-OL".
    """

    def __init__(self):
        self.bound = ""
        self.sign = ""
        self.run = ""        # as typed
        self.digits = ""     # with a point, no groups
        self.exponent = 0
        self.own = ""
        self.word = ""
        self.over = ""
        self.before = ""     # what separated it from the piece before
        self.alternatives = ()

    def whole(self):
        """Digits alone, whatever bound or sign stands before them."""
        return not (self.own or self.over or self.exponent) and len([ch for ch in self.run if ch not in DIGITS]) == 0


def quoted(text, most=40):
    """The text in double quotes, cut to so many characters, safe to print: never half of a surrogate pair."""
    parts = []
    high = 0
    for ch in text:
        code = ord(ch)
        if high:
            joined = 0xDC00 <= code <= 0xDFFF
            parts.append(chr(0x10000 + (high - 0xD800) * 0x400 + code - 0xDC00) if joined else "\ufffd")
            high = 0
            if joined:
                continue
        if len(parts) >= most:
            return '"' + "".join(parts) + '…"'
        if 0xD800 <= code <= 0xDBFF:
            high = code
        elif code < 32 or code == 127 or 0xDC00 <= code <= 0xDFFF:
            parts.append(" " if code in (9, 10, 13) else "\ufffd")
        else:
            parts.append(ch)
    if high:
        parts.append("\ufffd")
    return '"' + "".join(parts) + '"'


def characters(text):
    """The characters of a text, with one spelling each for minus, micro and spaces."""
    return [_CHARACTERS.get(ch, ch) for ch in text]


def pieces(chars, letters, decimal, clock):
    """List of Piece. letters: those of a letter code, "" for none; decimal: "either", "point" or "comma";
    clock: whether 1:23.4 is allowed. Raises Malformed."""
    found = []
    at, count = 0, len(chars)
    between = " "
    while at < count:
        if _separates(chars, at):
            between += chars[at]
            at += 1
        elif _number_starts(chars, at, letters):
            if between == "":
                raise Malformed("runs two numbers together; put a space or ; between readings")
            piece, at = _number(chars, at, letters, decimal, clock)
            piece.before, between = between, ""
            found.append(piece)
        else:
            word, at = _word(chars, at)
            if word.startswith("×"):  # a unit with a number in it: 265 × 0.1 mm
                word, at = word + "".join([ch for ch in chars[at:] if ch not in SPACES]), count
            _place(found, word, between)
            between = ""
    return found


def _at(chars, at):
    return chars[at] if at < len(chars) else " "


def _is_digit(ch):
    return ch in DIGITS  # each `ch` is one character


def _separates(chars, at):
    ch = chars[at]
    return ch in SPACES or ch == ";" or (ch == "," and (_at(chars, at + 1) in SPACES or chars[at + 1] == ";"))


def _number_starts(chars, at, letters):
    if chars[at] == "1" and _at(chars, at + 1) == "/" and not _is_digit(_at(chars, at + 2)):
        return False  # the unit 1/K, not the number one
    if chars[at] in "<>":
        at += 1
        while at < len(chars) and chars[at] in SPACES:
            at += 1
    if _at(chars, at) in "+-":
        at += 1
    first = _at(chars, at)
    if first in ".," or (first in letters and first != " "):
        return _is_digit(_at(chars, at + 1))
    return _is_digit(first)


def _word(chars, at):
    parts = []
    while at < len(chars) and not _separates(chars, at):
        parts.append(chars[at])
        at += 1
    return "".join(parts), at


def _place(found, word, between):
    """A word is what the meter shows out of range, or belongs to the number before it."""
    upper = word.upper()
    sign = "-" if upper.startswith("-") else ""
    if between != "" and upper in [sign + shown for shown in OVERRANGE]:
        piece = Piece()
        piece.over = sign + "OL"
        piece.before = between
        found.append(piece)
    elif not found and upper[0] in "<>=≥≤~≈±+-":
        raise Malformed("begins with a sign that may not stand there; >, <, + or - go right before a number")
    elif not found:
        raise Malformed("does not begin with a number")
    elif between == "" and found[-1].run in ("0", "0.") and upper in ("L", "L.") and found[-1].word == "":
        found[-1].over = found[-1].sign + "OL"
        found[-1].word = "L"
    else:
        found[-1].word += word


def _digits(chars, at):
    parts = []
    while _is_digit(_at(chars, at)):
        parts.append(chars[at])
        at += 1
    return "".join(parts), at


def _number(chars, at, letters, decimal, clock):
    piece = Piece()
    if chars[at] in "<>":
        piece.bound = chars[at]
        at += 1
        while chars[at] in SPACES:
            at += 1
    if chars[at] in "+-":
        piece.sign = "-" if chars[at] == "-" else ""
        at += 1
    piece.run, at = _run(chars, at)
    following = _at(chars, at)
    if clock and following == ":":
        at = _clock(piece, chars, at)
    elif following in letters and following != " " and _is_digit(_at(chars, at + 1)):
        at = _letter_code(piece, chars, at)
    else:
        at = _exponent(piece, chars, at)
        piece.digits, piece.alternatives = decimals(piece.run, decimal)
    piece.digits = _trimmed(piece.digits)
    if len(piece.digits.replace(".", "").lstrip("0")) > MOST_DIGITS:
        raise Malformed("has more than " + str(MOST_DIGITS) + " digits")
    return piece, at


def _trimmed(digits):
    whole, mark, fraction = digits.partition(".")
    whole = whole.lstrip("0")
    return (whole if whole else "0") + mark + fraction


def _run(chars, at):
    parts = []
    while at < len(chars):
        ch = chars[at]
        further = _is_digit(_at(chars, at + 1))
        if _is_digit(ch) or ch == "." or (ch == "," and further) or (
                ch == NARROW and further and parts and _is_digit(parts[-1])):
            parts.append(ch)
            at += 1
        else:
            break
    return "".join(parts), at


def _exponent(piece, chars, at):
    if _at(chars, at) not in "eE":
        return at
    sign = _at(chars, at + 1)
    start = at + 2 if sign in "+-" else at + 1
    digits, end = _digits(chars, start)
    if digits == "":
        return at
    if len(digits) > 3 or int(digits) > MOST_EXPONENT:
        raise Malformed("has an exponent beyond " + str(MOST_EXPONENT))
    piece.exponent = -int(digits) if sign == "-" else int(digits)
    return end


def _letter_code(piece, chars, at):
    """IEC 60062: the letter stands for the decimal mark and the multiplier, with digits on at least one side."""
    for ch in piece.run:
        if not _is_digit(ch):
            raise Malformed("has both a decimal mark and a letter in its place; write one of them")
    fraction, end = _digits(chars, at + 1)
    piece.own = chars[at]
    piece.digits = (piece.run if piece.run else "0") + "." + fraction
    piece.run = piece.run + chars[at] + fraction
    return end


def _clock(piece, chars, at):
    """Minutes and seconds, or hours, minutes and seconds, each part but the first of two digits below 60."""
    parts = [piece.run]
    while _at(chars, at) == ":":
        part, at = _run(chars, at + 1)
        parts.append(part)
    last, mark, fraction = parts[-1].replace(",", ".").partition(".")
    written = ":".join(parts)
    total = 0
    wholes = parts[:-1] + [last]
    for place, part in enumerate(wholes):
        plain = part != "" and len([ch for ch in part if not _is_digit(ch)]) == 0
        if not plain or (place > 0 and (len(part) != 2 or int(part) > 59)) or len(part) > 9:
            raise Malformed("is not minutes and seconds; write them as 1:23.4")
        total = total * 60 + int(part)
    if len(wholes) > 3 or len([ch for ch in fraction if not _is_digit(ch)]) > 0:
        raise Malformed("is not minutes and seconds; write them as 1:23.4")
    piece.own, piece.run = ":", written
    piece.digits = str(total) + (mark + fraction if fraction else "")
    return at


# ---- decimal marks and thousands --------------------------------------------------------------------------------

def decimals(run, decimal):
    """(digits with a point, alternatives) of digits, points, commas and narrow spaces as typed.

    A single mark before exactly three digits is thousands or decimals: `decimal` may settle it, else both are
    returned as alternatives. A single point counts as decimal unless the house writes commas.
    Raises Malformed where the marks are in no order.
    """
    points, commas = run.count("."), run.count(",")
    if points + commas == 0:
        return _joined(run.split(NARROW)), ()
    if points and commas:
        mark = "." if run.rfind(".") > run.rfind(",") else ","
        if run.count(mark) != 1 or NARROW in run:
            raise _disorder()
        whole, _, fraction = run.partition(mark)
        return _joined(whole.split("," if mark == "." else ".")) + "." + fraction, ()
    mark = "." if points else ","
    if points + commas > 1:
        if NARROW in run:
            raise _disorder()
        return _joined(run.split(mark)), ()
    return _single_mark(run, mark, decimal)


def _single_mark(run, mark, decimal):
    whole, _, fraction = run.partition(mark)
    as_decimal = (_joined(whole.split(NARROW)) if whole else "0") + _fraction(fraction.split(NARROW))
    if NARROW in run or len(fraction) != 3 or not 1 <= len(whole) <= 3 or whole.startswith("0"):
        return as_decimal, ()
    if mark == "," and decimal == "point":
        return whole + fraction, ()
    if (mark == "." and decimal != "comma") or (mark == "," and decimal == "comma"):
        return as_decimal, ()
    return as_decimal, (whole + ("," if decimal == "comma" else ".") + fraction, whole + fraction)


def _fraction(groups):
    for group in groups[:-1]:
        if len(group) != 3:
            raise _disorder()
    if len(groups) > 1 and len(groups[-1]) > 3:
        raise _disorder()
    text = "".join(groups)
    return "." + text if text else ""


def _joined(groups):
    """Digits of groups of thousands: the first of one to three, the others of exactly three."""
    if len(groups) > 1:
        if not 1 <= len(groups[0]) <= 3:
            raise _disorder()
        for group in groups[1:]:
            if len(group) != 3:
                raise _disorder()
    return "".join(groups)


def _disorder():
    return Malformed("has its marks in no order that makes a number")
