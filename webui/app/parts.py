"""Pieces that several screens are made of: statement, scale, ruler, cautions, supply words.  Html out, no state."""

from fieldcheck.engine import judging, scale, verdicts

from .markup import Html, h, key

CLASS = {"pass": "pass", "conditional pass": "near", "conditional fail": "near-out", "fail": "fail",
         "not judged": "none"}
GLOSS = {"conditional pass": "inside the limit, nearer than our meter can prove",
         "conditional fail": "outside the limit, nearer than our meter can prove"}


def sign(statement):
    """The bracket sign of a statement."""
    return Html(scale.sign(statement))


def statement(judged, value, phase):
    """Sign, word and printed value of one verdict; the reason is one tap away."""
    word = judged.verdict.statement
    label = judged.limit["label"] + (" " + judged.row if judged.row not in ("", "?") else "")
    found = verdicts.as_found_word(word) if phase == "as found" else ""
    gloss = GLOSS.get(word) or (found if found and found != word else "")
    head = [sign(word), h("span.word", word), h("span.value", value)]
    if word == verdicts.NOT_JUDGED:
        gloss = judged.verdict.reason
    return h("section.statement." + CLASS[word],
             h("p.label", label),
             h("button.verdict", {"type": "button", "data-do": "why", "data-arg": judged.key,
                                  "aria-expanded": "false", "aria-controls": "why-" + judged.key}, head),
             h("p.gloss", gloss) if gloss else None,
             h("div.why", {"id": "why-" + judged.key, "hidden": True}))


def is_drawn(judged):
    """True where a scale says more than the words: a yes or no (0 or 1, exact, against 0 or 1) is none."""
    verdict = judged.verdict
    if verdict.value is None:
        return False
    for one in (verdict.value, verdict.at_least, verdict.at_most):
        if one is not None and one not in (0.0, 1.0):
            return True
    return verdict.U > 0.0


def verdict_scale(work, judged, found=None, last=None):
    """The drawing of a verdict; found, last: SI values or None."""
    unit, convert = judging.display(work, judged)
    return Html(scale.of_verdict(judged.verdict, convert, unit, found, last))


def signal(caution):
    """One caution with its signal word."""
    return h("section.caution." + caution["signal"], h("p.signal", caution["signal"].upper()),
             h("p.caution-title", caution["title"]), h("p", caution["text"]))


def ruler(flow, current, others=(), waiting=()):
    """The path as a ruler: one tick a step; taken ones filled, those left gaps, the present one with the pointer.

    others: number of items before and after this one in the job; waiting: [(text, address)] of running stopwatches.
    """
    total = len(flow.instances) if flow is not None else 0
    before, after = others or (0, 0)
    count = max(1, total + before + after)
    step = 360.0 / count
    parts = ['<svg class="ruler" viewBox="0 0 374 26" preserveAspectRatio="none" aria-hidden="true">',
             '<path class="edge" d="M4 25H370" stroke="currentColor" fill="none"/>']
    x = 7.0 + step * 0.5
    for _ in range(before):
        parts.append(_tick(x, 6, "long"))
        x += step
    taken = 0
    for one in (flow.instances if flow is not None else ()):
        state = "taken" if one.state == "taken" else "left" if one.state == "left" else "open"
        taken += 1 if state != "open" else 0
        if state != "left":
            parts.append(_tick(x, 14, state))
        if one is current:
            parts.append('<path class="here" d="M' + coordinate(x) + ' 12l-5 -9h10z" fill="currentColor"/>')
        x += step
    for _ in range(after):
        parts.append(_tick(x, 6, "long"))
        x += step
    parts.append("</svg>")
    words = str(taken) + " of " + str(total) + " steps done; list of steps"
    return h("div.foot-line", h("button.rule", {"type": "button", "data-do": "list", "aria-label": words},
                                Html("".join(parts))),
             [h("a.waiting", {"href": one[1], "aria-label": one[2]}, h("span", {"id": one[3]}, one[0]))
              for one in waiting])


def _tick(x, top, cls):
    return ('<path class="' + cls + '" d="M' + coordinate(x) + " " + str(top) + 'V25" stroke="currentColor"/>')


def coordinate(x):
    """A coordinate with one decimal, by whole numbers."""
    tenths = int(x * 10.0 + 0.5)
    whole = tenths // 10
    return str(whole) + "." + str(tenths - whole * 10)


def explanation(said):
    """The reason of a verdict (engine explain.explanation) as a list of short lines."""
    rows = []

    def line(label, text, cls=""):
        if text:
            rows.append(h("div" + cls, h("dt", label), h("dd", text)))

    line("Because", said["reason"])
    line("Value", said["value"])
    line("Coverage", said["coverage"])
    line("Limit", said["limit"])
    line("Guard", said["guard"])
    if said["formula"]:
        line("Formula", said["formula"])
        line("With numbers", said["formula_with_numbers"])
    for text in said["corrections"]:
        line("Correction", text)
    for text in said["notes"]:
        line("Note", text)
    for one in said["budget"]:
        line(one["name"], one["contribution"] + ", " + one["share"] + " of u²")
    line("Conformance", said["probability"])
    line("Risk of a wrong accept", said["wrong_accept"])
    if said["settle"]:
        line("To settle it", said["settle"]["text"])
    line("Source", (said["citation"] + " " + said["tag"]).strip() + (", " + said["gloss"] if said["gloss"] else ""))
    line("", said["note"])
    return h("dl.reason", rows)


def more(*keys):
    """The row of quieter keys at the end of a step."""
    return h("div.more", [key(label, do, arg, "quiet-key") for label, do, arg in keys])
