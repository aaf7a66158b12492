"""Every verdict explained as plain texts that both screens and the record print alike.

Built only when it is opened.  The figures are those of verdicts.printed, so the page never contradicts the verdict;
what would settle a conditional verdict is computed, not a phrase.
"""

import math

from fieldcheck.engine import distributions, figures, verdicts
from fieldcheck.engine.measured import REPEATS, Measured, budget, coverage_factor, expanded

_sqrt = math.sqrt

GLOSSES = {
    "READ": "read in the source",
    "READ-2": "read second-hand",
    "MEM": "from memory of the source",
    "MEM+": "from memory of the source",
    "MEM?": "usual range, no standard",
    "PRACTICE": "usual range, no standard",
    "DERIVED": "derived from first principles",
    "CALC": "computed",
    "FACT": "definition",
}
_MOST_REPEATS = 1000


def _same(x):
    return x


def put_in(formula, numbers):
    """The formula text with numbers in place of names.  numbers: [(name, text)]; a negative one gets brackets."""
    known = {}
    for name, text in numbers:
        known["n" + name] = "(" + text + ")" if text[:1] in ("-", "−") else text
    out = []
    word = ""
    for sign in formula + "\n":
        if sign.isalpha() or sign == "_" or (word and (sign.isdigit() or sign == ".")):
            word = word + sign
            continue
        if word:
            out.append(known.get("n" + word, word))
            word = ""
        out.append(sign)
    return "".join(out[:-1])


def percent(share):
    """A share as text, one place: "83.2 %"."""
    return figures.fixed(100.0 * share, 1) + " %"


def probability_text(p):
    """A probability as text; never a bare 0 or 100 %."""
    if p is None:
        return ""
    if p > 0.9995:
        return "more than 99.9 %"
    if p < 0.0005:
        return "less than 0.1 %"
    return percent(p)


def _floor_at(x, places):
    """The whole number of units of the last of `places` decimal places (negative: of tens) in x > 0, exactly."""
    a, b = x.as_integer_ratio()
    return a * 10 ** places // b if places >= 0 else a // (b * 10 ** -places)


def rounded_down(x, digits=2):
    """x > 0 as plain text with `digits` significant digits, never above x."""
    places = 0
    while _floor_at(x, places) < 10 ** (digits - 1):
        places += 1
    while _floor_at(x, places) >= 10 ** digits:
        places -= 1
    text = str(_floor_at(x, places))
    if places <= 0:
        return text + "0" * -places
    text = "0" * (places + 1 - len(text)) + text
    return text[:-places] + "." + text[-places:]


def _with_unit(text, unit):
    return text + " " + unit if unit else text


def _repeat_parts(value):
    return [name for name in value.parts if name.startswith(REPEATS) and name in value.dofs]


def with_repeats(value, n):
    """The value as a new set of n repeats of each repeated reading would give it, same mean and same scatter.

    n None: without scatter (infinitely many).
    """
    parts = dict(value.parts)
    dofs = dict(value.dofs)
    for name in _repeat_parts(value):
        if n is None:
            parts[name] = 0.0
        else:
            parts[name] = value.parts[name] * _sqrt((value.dofs[name] + 1.0) / n)
            dofs[name] = n - 1
    return Measured(value.value, parts, dofs, value.families)


def _gap(verdict):
    """Distance of the value from the limit that makes the verdict conditional; the guard band must be narrower."""
    y = figures.round12(verdict.value)
    gaps = []
    for edge in (verdict.at_least, verdict.at_most):
        if edge is not None:
            gaps.append(abs(y - figures.round12(edge)))
    return min(gaps)


def _statement_for(value, verdict, limit, correlations):
    """Statement at the same mean with another uncertainty, before the rule for safety limits."""
    wide = expanded(value, limit.coverage, correlations)
    guard = verdicts.guard_band(limit, verdict.rule, wide, verdict.at_least, verdict.at_most)
    return verdicts.statement_of(verdict.value, verdict.at_least, verdict.at_most, guard)


def _needed_u(verdict, limit):
    """Largest standard uncertainty, with many degrees of freedom, that leaves the value outside the guard band."""
    if verdict.rule == verdicts.PROBABILITY:
        factor = distributions.normal_quantile(limit.probability)
    else:
        factor = limit.guard * coverage_factor(None, limit.coverage)
    return _gap(verdict) / factor if factor > 0.0 else 0.0


def repeats_that_settle(verdict, limit, value, correlations=None):
    """Smallest n (2 to 1000) of a new set that gives an unconditional statement at the same mean; None if none.

    All repeated readings of the value are taken n times; everything but their type A part stays.
    """
    settled = (verdicts.PASS, verdicts.FAIL)
    if not isinstance(value, Measured) or not _repeat_parts(value):
        return None
    if _statement_for(with_repeats(value, _MOST_REPEATS), verdict, limit, correlations) not in settled:
        return None
    low, high = 1, _MOST_REPEATS
    while high - low > 1:
        middle = (low + high) // 2
        if _statement_for(with_repeats(value, middle), verdict, limit, correlations) in settled:
            high = middle
        else:
            low = middle
    return high


def _what_settles(verdict, limit, value, unit, convert, correlations):
    """{"text", "repeats" (whole number as text or ""), "u" (text or "")} for a conditional verdict, else None."""
    if verdict.statement not in (verdicts.CONDITIONAL_PASS, verdicts.CONDITIONAL_FAIL):
        return None
    if _gap(verdict) == 0.0:
        return {"text": "the value stands on the limit: no repeat at the same mean settles it", "repeats": "", "u": ""}
    n = repeats_that_settle(verdict, limit, value, correlations)
    if n is not None:
        return {"text": "a new set of " + str(n) + " repeats would settle it, at the same mean and scatter",
                "repeats": str(n), "u": ""}
    need = rounded_down(convert(_needed_u(verdict, limit)) - convert(0.0))
    text = "cannot be settled by repeats: u of at most " + _with_unit(need, unit) + " is needed"
    rows = [row for row in budget(value, correlations) if not row[0].startswith(REPEATS)]
    if rows:
        text = text + "; the largest share now: " + rows[0][0] + ", a better range or meter lowers it"
    return {"text": text, "repeats": "", "u": need}


def _limit_text(shown, unit):
    if shown.at_least and shown.at_most:
        return shown.at_least + " to " + _with_unit(shown.at_most, unit)
    if shown.at_most:
        return "at most " + _with_unit(shown.at_most, unit)
    return "at least " + _with_unit(shown.at_least, unit) if shown.at_least else ""


def _guard_text(verdict, limit, shown, unit):
    if not shown.guard:
        return "simple acceptance, no guard band"
    if verdict.rule == verdicts.PROBABILITY:
        return "guard band " + _with_unit(shown.guard, unit) + " for a conformance probability of " + \
            percent(limit.probability)
    r = figures.decimal_text(limit.guard)
    return "guard band " + _with_unit(shown.guard, unit) + " = " + r + "·U"


def _coverage_text(verdict):
    if verdict.U == 0.0 or verdict.k == 0.0:
        return ""
    dof = "infinite" if verdict.dof is None or verdict.dof > 1e7 else str(int(verdict.dof))
    k = figures.significant(verdict.k, 3)
    basis = "stated" if verdict.coverage.startswith("k") else verdict.coverage + ", Student's t"
    return "U = k·u, k = " + k + " (" + basis + "), degrees of freedom " + dof


def _budget_rows(value, unit, convert, correlations):
    rows = []
    for name, part, share in budget(value, correlations):
        size = abs(convert(part) - convert(0.0))
        text = figures.significant(size, 2) if size > 0.0 else "0"
        rows.append({"name": name, "share": percent(share), "contribution": _with_unit(text, unit)})
    return rows


def _citation_text(cite):
    return ", ".join([cite[key] for key in ("source", "clause", "edition") if cite.get(key)])


def explanation(verdict, limit, value=None, unit="", convert=_same, formula="", numbers=(), corrections=(), cite=None,
                tag="", note="", correlations=None):
    """A plain dict of texts (and lists of them) that explains a Verdict.

    value: the Measured that was judged.  unit: text of the display unit; convert: SI float -> display unit.
    formula, numbers: formula text and [(name, text with unit)] to put in.  corrections: texts.  cite: {"source",
    "clause", "edition"}; tag: provenance; note: of the limit.
    "settle" is None unless the verdict is conditional.
    """
    shown = verdicts.printed(verdict, convert)
    text = verdict.bound + _with_unit(shown.value, unit) if shown.value else ""
    if shown.value and shown.U:
        text = verdict.bound + shown.value + " ± " + _with_unit(shown.U, unit)
    return {
        "limit_id": verdict.limit,
        "statement": verdict.statement,
        "reason": verdict.reason,
        "notes": list(verdict.notes),
        "value": text,
        "coverage": _coverage_text(verdict),
        "formula": formula,
        "formula_with_numbers": put_in(formula, numbers),
        "corrections": list(corrections),
        "budget": _budget_rows(value, unit, convert, correlations),
        "limit": _limit_text(shown, unit),
        "guard": "" if verdict.statement == verdicts.NOT_JUDGED else _guard_text(verdict, limit, shown, unit),
        "citation": _citation_text(cite or {}),
        "tag": tag,
        "gloss": GLOSSES.get(tag, ""),
        "note": note,
        "probability": probability_text(verdict.probability),
        "wrong_accept": probability_text(verdict.risk),
        "settle": None if value is None else _what_settles(verdict, limit, value, unit, convert, correlations),
    }
