"""Screens as HTML text: built by plain functions, escaped everywhere, put into the page in one piece."""


class Html:
    """Text that is HTML already."""

    def __init__(self, text):
        self.text = text


NOTHING = Html("")
VOID = ("input", "br", "img")


def esc(text):
    """Text safe between tags and inside quoted attributes."""
    return text.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;").replace('"', "&quot;")


def h(tag, *parts):
    """An element.  tag: "div" or "div.class.class"; parts: dict (attributes; None and False leave one out, True gives
    an empty one), str (escaped), Html, None, or a list of these."""
    names = tag.split(".")
    out = ["<", names[0]]
    if len(names) > 1:
        out += [' class="', " ".join(names[1:]), '"']
    inside = []
    for part in parts:
        if isinstance(part, dict):
            _attributes(part, out)
        else:
            _inside(part, inside)
    out.append(">")
    if names[0] not in VOID:
        out += inside
        out += ["</", names[0], ">"]
    return Html("".join(out))


def _attributes(given, out):
    for name in given:
        value = given[name]
        if value is None or value is False:
            continue
        out += [" ", name, '="', "" if value is True else esc(str(value)), '"']


def _inside(part, out):
    if part is None:
        return
    if isinstance(part, Html):
        out.append(part.text)
    elif isinstance(part, str):
        out.append(esc(part))
    else:
        for one in part:
            _inside(one, out)


def join(parts):
    """Html, texts and lists of them, one after the other."""
    out = []
    _inside(parts, out)
    return Html("".join(out))


def key(label, do, arg="", cls="key", **more):
    """A button that does something: `do` names the screen's method on_<do>, which gets arg."""
    attributes = {"type": "button", "data-do": do, "data-arg": arg or None}
    for name in more:
        attributes[name.replace("_", "-")] = more[name]
    return h("button." + cls, attributes, label)


def link(label, place, cls="row"):
    """A link to another screen; place: list of path segments."""
    return h("a." + cls, {"href": address(place)}, label)


def address(place):
    """The hash of a screen: its segments percent-encoded where needed."""
    return "#/" + "/".join([encoded(one) for one in place])


SAFE = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789-_.|~"


def encoded(segment):
    """Percent-encoding of a segment; characters beyond ASCII stay, browsers encode them."""
    out = []
    for ch in segment:
        out.append(ch if ch in SAFE or ord(ch) > 127 else "%" + _hex2(ord(ch)))
    return "".join(out)


def _hex2(code):
    return "0123456789ABCDEF"[code >> 4] + "0123456789ABCDEF"[code & 15]


def field(label, name, value="", kind="text", note="", **more):
    """One labelled input."""
    attributes = {"id": name, "name": name, "type": kind, "value": value, "autocomplete": "off",
                  "aria-describedby": name + "-note" if note else None}
    for one in more:
        attributes[one.replace("_", "-")] = more[one]
    return h("p.field", h("label", {"for": name}, label), h("input", attributes),
             h("span.note", {"id": name + "-note"}, note) if note else None)


def area(label, name, value="", rows=3):
    """One labelled text of several lines."""
    return h("p.field", h("label", {"for": name}, label),
             h("textarea", {"id": name, "name": name, "rows": rows, "autocomplete": "off"}, value))


def options(legend, name, choices, chosen="", titled=False):
    """Large radio keys.  choices: [(id, label)] or [(id, label, why it cannot be chosen)]; titled: the screen's title
    says the legend already, so that only a screen reader needs it."""
    rows = []
    for one in choices:
        barred = one[2] if len(one) > 2 else ""
        ident = name + "-" + one[0].replace(" ", "_")
        rows.append(h("label.option", {"for": ident},
                      h("input", {"type": "radio", "id": ident, "name": name, "value": one[0],
                                  "checked": one[0] == chosen, "disabled": bool(barred)}),
                      h("span", one[1], h("span.note", barred) if barred else None)))
    return h("fieldset.options", h("legend.said" if titled else "legend", legend), rows)
