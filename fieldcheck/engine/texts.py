"""The one reader and writer of event text, in both runtimes; it reads rulebook files too.

The text is JSON with less in it: texts, integers within 2^53 - 1, true, false, null, lists, objects with
ASCII keys. No fractions or exponents (a measured value is the text as typed), no key twice, no half of a
surrogate pair, at most 64 KiB of UTF-8, at most 32 levels. An event is one line without blanks.
Nobody writes the text of an event a second time: what its device wrote is hashed, signed, stored and carried.

A text is cut at its quotation marks by the runtime's own `split`, so that only the few characters between
two texts are looked at one by one: that is what makes it fast enough on the phone.
"""

from fieldcheck.engine.errors import EventError

LIMIT = 65536               # bytes of UTF-8 in one event
LARGEST = 9007199254740991  # 2^53 - 1: the largest integer that every JSON reader keeps exactly
DEPTH = 32

DIGITS = "0123456789"
HEX = "0123456789abcdef"
WORDS = (("true", True), ("false", False), ("null", None))
BLANKS = " \n\r\t"
CONTROLS = "".join([chr(code) for code in range(32)])
SHORT = (("\n", "n"), ("\t", "t"), ("\r", "r"), ("\b", "b"), ("\f", "f"))
UNESCAPED = (("\"", "\""), ("\\", "\\"), ("/", "/"), ("n", "\n"), ("t", "\t"), ("r", "\r"), ("b", "\b"), ("f", "\f"))
# Brython keeps a dict of texts in a JavaScript object, where these two names are taken.
FORBIDDEN_KEYS = ("__proto__", "hasOwnProperty")

# what may come next; where a list or object may end at once the number is odd
VALUE, VALUE_OR_END, KEY, KEY_OR_END, COLON, COMMA, NOTHING = 0, 1, 2, 3, 4, 5, 6
WANTED = (
    "a value", 'a value or "]"', "a key", 'a key or "}"', '":"', '"," or the end of the list or object',
    "the end of the text",
)


quick = []
"""At most one reader that the phone brings along: text -> the value, or None where it leaves the text to `read`.

The browser's own is some thirty times faster. It may give a value only where `read` gives the same one.
"""


def size(text):
    """How many bytes the text takes as UTF-8; refuses half of a surrogate pair (EventError)."""
    if text.isascii():
        return len(text)
    try:
        text.encode("utf-8")
        # Where the browser lacks TextEncoder, Brython's strict form counts a surrogate pair as six bytes.
        return len(text.encode("utf-8", "surrogatepass"))
    except UnicodeEncodeError:
        raise EventError("half of a surrogate pair cannot be written", "", "type the character again") from None


def write(value):
    """The text of a value: keys in the order given, no blanks, only what must be escaped is escaped.

    Refuses (EventError) floats, integers beyond 2^53 - 1, keys that are not ASCII, other kinds of value,
    more than 32 levels, half of a surrogate pair and a text of more than 64 KiB.
    """
    out = [""]
    _put(value, out, 0, "")
    text = "".join(out)
    found = [control for control in CONTROLS if control in text]
    if found:                           # rare: only then is every text looked at for control characters
        out = [""]
        _put(value, out, 0, found)
        text = "".join(out)
    length = size(text)
    if length > LIMIT:
        raise EventError(
            "the text takes " + str(length) + " bytes, more than " + str(LIMIT), "",
            "shorten the remark, or put what is long into a file of its own",
        )
    return text


def _put(value, out, depth, controls):
    if isinstance(value, str):
        out.append(_quoted(value, controls))
    elif value is None:
        out.append("null")
    elif value is True:
        out.append("true")
    elif value is False:
        out.append("false")
    elif isinstance(value, float):
        raise EventError(
            "a fraction cannot stand in an event", "", "write the value as a text, as it was typed"
        )
    elif isinstance(value, int):
        if value > LARGEST or value < -LARGEST:
            raise EventError("the integer " + str(value) + " is beyond 2^53 - 1", "", "write it as a text")
        out.append(str(value))
    elif depth >= DEPTH:
        raise EventError("more than " + str(DEPTH) + " levels of lists and objects")
    elif isinstance(value, (list, tuple)):
        comma = "["
        for item in value:
            out.append(comma)
            _put(item, out, depth + 1, controls)
            comma = ","
        out.append("[]" if comma == "[" else "]")
    elif isinstance(value, dict):
        comma = "{"
        for key in value:
            _check_key(key)
            out.append(comma + _quoted(key, controls) + ":")
            _put(value[key], out, depth + 1, controls)
            comma = ","
        out.append("{}" if comma == "{" else "}")
    else:
        raise EventError("a " + type(value).__name__ + " cannot stand in an event")


def _check_key(key, where=""):
    if not isinstance(key, str):
        raise EventError("a key must be a text", where)
    if not key.isascii():
        raise EventError('the key "' + key + '" has letters that are not ASCII', where)
    if key in FORBIDDEN_KEYS:
        raise EventError('the key "' + key + '" is not allowed', where)


def _quoted(text, controls):
    if "\\" in text:
        text = text.replace("\\", "\\\\")
    if '"' in text:
        text = text.replace('"', '\\"')
    for control in controls:
        if control in text:
            text = text.replace(control, _escape(control))
    return '"' + text + '"'


def _escape(control):
    for character, letter in SHORT:
        if character == control:
            return "\\" + letter
    code = ord(control)
    return "\\u00" + HEX[code >> 4] + HEX[code & 15]


def read(text, limit=LIMIT):
    """The value that a text holds: str, int, True, False, None, list or dict.

    limit: most bytes of UTF-8. None is for files of ours, not for events: any length, and blanks and line
    ends may stand between the values. Raises EventError that says what is wrong and at which character.
    """
    if not isinstance(text, str):
        raise EventError("an event must be a text")
    if quick and limit is not None and len(text) * 4 <= limit:
        value = quick[0](text)
        if value is not None:
            return value
    length = size(text)
    if limit is not None and length > limit:
        raise EventError("the text takes " + str(length) + " bytes, more than " + str(limit))
    between, texts = _cut(text)
    blanks = BLANKS if limit is None else ""
    for control in CONTROLS:
        if control in text and (control not in blanks or _stands_in(control, texts)):
            raise EventError("a control character stands in the text", _place(text.split(control)[0]))
    if "\\" in text:
        plain = [_unescaped(piece) for piece in texts]
    elif length == len(text):
        plain = texts
    else:
        plain = [piece if piece.isascii() else _counted(piece) for piece in texts]
    return _parse(between, plain, blanks, texts)


def _stands_in(control, texts):
    for piece in texts:
        if control in piece:
            return True
    return False


def _cut(text):
    """(what stands between the texts, the texts still escaped); the first list is one longer."""
    pieces = text.split('"')
    count = len(pieces)
    if "\\" not in text and count & 1 == 1:
        return pieces[::2], pieces[1::2]
    between = [pieces[0]]
    texts = []
    at = 1
    while at < count:
        piece = pieces[at]
        while piece.endswith("\\") and _odd_tail(piece) and at + 1 < count:
            at += 1                     # the quotation mark was escaped: it belongs to the text
            piece = piece + '"' + pieces[at]
        at += 1
        if at >= count:
            raise EventError("a text is never closed", _place(text), 'put the missing " in')
        texts.append(piece)
        between.append(pieces[at])
        at += 1
    return between, texts


def _odd_tail(piece):
    """Does the piece end in an odd number of backslashes?"""
    return (len(piece) - len(piece.rstrip("\\"))) & 1 == 1


def _unescaped(piece):
    if "\\" not in piece:
        return piece if piece.isascii() else _counted(piece)
    parts = piece.split("\\")
    out = parts[0]
    high = 0                            # first half of a surrogate pair, waiting for the second
    at = 1
    while at < len(parts):
        part = parts[at]
        kind, rest = part[:1], part[1:]
        if high and kind != "u":
            break
        if kind == "u":
            code = _code(rest[:4])
            if high:
                if code < 0xDC00 or code > 0xDFFF:
                    break
                out = out + chr(0x10000 + ((high - 0xD800) << 10) + (code - 0xDC00))
                high = 0
            elif 0xD800 <= code <= 0xDBFF:
                high = code
                if len(rest) > 4:
                    break
            elif 0xDC00 <= code <= 0xDFFF:
                high = code
                break
            else:
                out = out + chr(code)
            out = out + rest[4:]
        elif part == "":                # an escaped backslash: the next part holds no escape
            at += 1
            out = out + "\\" + parts[at]
        else:
            out = out + _plain_escape(kind) + rest
        at += 1
    if high:
        raise EventError("half of a surrogate pair stands in the text", '"' + piece + '"')
    return _counted(out)


def _counted(text):
    """The text itself; under Brython `join`, `split` and + forget which characters take two places there."""
    return f"{text}"


def _plain_escape(kind):
    for letter, character in UNESCAPED:
        if letter == kind:
            return character
    raise EventError('"\\' + kind + '" is not an escape', "", 'write a backslash as "\\\\"')


def _code(digits):
    code = 0
    for digit in digits.lower():
        if digit not in HEX:
            code = -1
            break
        code = (code << 4) + HEX.index(digit)
    if code < 0 or len(digits) != 4:
        raise EventError('"\\u' + digits + '" is not an escape', "", 'four hexadecimal digits follow "\\u"')
    return code


def _place(before):
    """Where something stands, counted in whole characters in both runtimes."""
    return "character " + str(len(_counted(before)) + 1)


def _parse(between, texts, blanks, raw):
    """The value of a text that was cut. raw: the texts still escaped, only to say where a fault lies."""
    inner = _nothing()                  # the innermost open list or object
    in_object = False
    key = ""
    stack = [(inner, key, in_object)]   # what is open outside it
    want = VALUE
    value = _nothing()
    last = len(texts)
    for number, segment in enumerate(between):
        if want == COLON and segment == ":":
            want = VALUE
        elif want == COMMA and segment == ",":
            want = KEY if in_object else VALUE
        else:
            at = 0
            end = len(segment)
            while at < end:
                mark = segment[at]
                at += 1
                if want == COLON and mark == ":":
                    want = VALUE
                    continue
                if want == COMMA and mark == ",":
                    want = KEY if in_object else VALUE
                    continue
                if want <= VALUE_OR_END and (mark == "{" or mark == "["):
                    if len(stack) > DEPTH:
                        raise EventError("more than " + str(DEPTH) + " levels", _at(between, raw, number, at))
                    stack.append((inner, key, in_object))
                    in_object = mark == "{"
                    if in_object:
                        inner, want = {}, KEY_OR_END
                    else:
                        inner, want = [], VALUE_OR_END
                    continue
                if inner is not None and mark == ("}" if in_object else "]") and (want == COMMA or want & 1 == 1):
                    value = inner
                    inner, key, in_object = stack.pop()
                elif mark in blanks:
                    continue
                elif want <= VALUE_OR_END:
                    value, at = _scalar(segment, at - 1, between, raw, number)
                else:
                    raise _unexpected(mark, want, between, raw, number, at)
                if inner is None:
                    want = NOTHING
                else:
                    if in_object:
                        inner[key] = value
                    else:
                        inner.append(value)
                    want = COMMA
        if number == last:
            break
        piece = texts[number]
        if want <= VALUE_OR_END:
            if inner is None:
                value, want = piece, NOTHING
            else:
                if in_object:
                    inner[key] = piece
                else:
                    inner.append(piece)
                want = COMMA
        elif want <= KEY_OR_END:
            key = piece
            if key in inner or not key.isascii() or key in FORBIDDEN_KEYS:
                where = _at(between, raw, number, len(segment) + 1)
                _check_key(key, where)
                raise EventError('the key "' + key + '" stands twice', where)
            want = COLON
        else:
            raise _unexpected('"', want, between, raw, number, len(segment) + 1)
    if want != NOTHING:
        where = _at(between, raw, last, len(between[last]) + 1)
        raise EventError("the text ends where " + WANTED[want] + " is expected", where)
    return value


def _nothing():
    return None


def _scalar(segment, at, between, raw, number):
    """(value, position after it) of true, false, null or an integer that begins at `at`."""
    mark = segment[at]
    stop = at + 1 if mark == "-" else at
    first = stop
    end = len(segment)
    while stop < end and segment[stop] in DIGITS:
        stop += 1
    if stop == first:
        for word, value in WORDS:
            if segment.startswith(word, at):
                return value, at + len(word)
        raise _unexpected(mark, VALUE, between, raw, number, at + 1)
    digits = segment[at:stop]
    fault = ""
    mend = "write the value as a text, as it was typed"
    if stop < end and segment[stop] in ".eE":
        fault = "a number has a fraction or exponent"
    elif (segment[first] == "0" and stop - first > 1) or digits == "-0":
        fault, mend = digits + " is not how an integer is written", ""
    elif stop - first > 15 and (stop - first > 16 or abs(int(digits)) > LARGEST):
        fault = "the integer " + digits + " is beyond 2^53 - 1"
    if fault:
        raise EventError(fault, _at(between, raw, number, at + 1), mend)
    return int(digits), stop


def _at(between, raw, number, at):
    """Where the at-th character of a segment between two texts stands in the whole text."""
    before = ""
    for i in range(number):
        before = before + between[i] + '"' + raw[i] + '"'
    return _place(before + between[number][:at - 1])


def _unexpected(mark, want, between, raw, number, at):
    shown = '"' + mark + '"' if mark != '"' else "a text"
    return EventError(
        shown + " stands where " + WANTED[want] + " is expected", _at(between, raw, number, at)
    )
