"""One limit on one value -> a statement, with everything that led to it.

Statements and intervals: ILAC-G8:09/2019 4.2.  With a guard band w > 0 and an upper limit T: pass below T - w,
conditional pass in [T - w, T], conditional fail in (T, T + w], fail above; a lower limit is the mirror image, and of
two limits the worse statement holds.  With w = 0 (simple acceptance): pass up to and including T, fail beyond.
Conformance probability: JCGM 106:2012 7, with Student's t in place of the normal for few degrees of freedom.
Both sides of every comparison are first rounded to 12 significant digits.
"""

from fieldcheck.engine import distributions, figures
from fieldcheck.engine.errors import RuleError
from fieldcheck.engine.frozen import frozen
from fieldcheck.engine.measured import Measured, expanded, value_of
from fieldcheck.engine.meters import IN_CALIBRATION, NO_METER

PASS = "pass"
CONDITIONAL_PASS = "conditional pass"
CONDITIONAL_FAIL = "conditional fail"
FAIL = "fail"
NOT_JUDGED = "not judged"
STATEMENTS = (PASS, CONDITIONAL_PASS, CONDITIONAL_FAIL, FAIL, NOT_JUDGED)
_RANK = {PASS: 0, CONDITIONAL_PASS: 1, CONDITIONAL_FAIL: 2, FAIL: 3}

SIMPLE = "simple"
GUARDED = "guarded"
PROBABILITY = "probability"

DO_NOT_ENERGISE = "do not energise, repeat"
_WORDS = {PASS: "within limit", CONDITIONAL_PASS: "within limit, nearer than our meter can prove",
          CONDITIONAL_FAIL: "outside limit, service", FAIL: "outside limit, service", NOT_JUDGED: "not judged"}


@frozen("id", "at_least", "at_most", "rule", "guard", "probability", "coverage", "safety",
        at_least=None, at_most=None, rule=GUARDED, guard=1.0, probability=0.95, coverage="95 %", safety=False)
class Limit:
    """at_least, at_most: SI, float or Measured, at least one of them; rule: "simple", "guarded" or "probability";
    guard: r of w = r*U; probability: wanted conformance probability, 0.5 <= p < 1; coverage: "95 %" or "k = 2";
    safety: a verdict on it is never conditional pass.  RuleError when these make no sense."""

    def check(self):
        if self.at_least is None and self.at_most is None:
            raise RuleError("limit \"" + self.id + "\" limits nothing", "", "give at_least or at_most")
        if self.rule not in (SIMPLE, GUARDED, PROBABILITY):
            raise RuleError("limit \"" + self.id + "\" has the unknown rule \"" + self.rule + "\"", "",
                            "use simple, guarded or probability")
        if self.guard != 0.0 and not 0.01 <= self.guard <= 100.0:
            raise RuleError("limit \"" + self.id + "\" has a guard that is neither 0 nor within 0.01 to 100 U")
        if not 0.5 <= self.probability < 1.0:
            raise RuleError("limit \"" + self.id + "\" wants a conformance probability outside 0.5 to 1")
        if self.at_least is not None and self.at_most is not None and value_of(self.at_least) > value_of(self.at_most):
            raise RuleError("limit \"" + self.id + "\" accepts nothing: at_least is above at_most")


@frozen("limit", "statement", "reason", "value", "bound", "at_least", "at_most", "rule", "guard", "u", "dof", "k", "U",
        "coverage", "accept_low", "accept_high", "probability", "risk", "notes")
class Verdict:
    """limit: id.  statement: one of STATEMENTS.  reason: one sentence.  value: float SI or None; bound: "", ">" or
    "<".  at_least, at_most: float or None.  rule: the one that was used.  guard: w, SI.  u, dof (None = infinite),
    k (0.0: without a known meter no coverage is claimed), U, coverage.  accept_low, accept_high: acceptance limits,
    None on a side without limit.  probability: of conformance, None where not computed; risk: of a wrong accept,
    1 - probability, when the statement accepts.  notes: tuple of sentences (simple acceptance without a meter,
    overdue meter)."""


def not_judged(limit, reason, value=None, bound="", notes=()):
    """The Verdict that says so.  reason: what is missing or why it cannot be judged."""
    return Verdict(limit.id, NOT_JUDGED, reason, value, bound, _plain(limit.at_least), _plain(limit.at_most),
                   limit.rule, 0.0, 0.0, None, 0.0, 0.0, limit.coverage, _plain(limit.at_least),
                   _plain(limit.at_most), None, None, tuple(notes))


def _plain(x):
    return None if x is None else float(value_of(x))


def _statement_at(value, low, high, guard):
    """Where `value` lies between low and high (None = no limit) with the guard band; all numbers comparable."""
    worst = PASS
    for side, limit in ((1, high), (-1, low)):
        if limit is None:
            continue
        over = value - limit if side > 0 else limit - value
        worse = worst
        if guard == 0:
            worse = FAIL if over > 0 else PASS
        elif over > guard:
            worse = FAIL
        elif over > 0:
            worse = CONDITIONAL_FAIL
        elif over >= -guard:
            worse = CONDITIONAL_PASS
        if _RANK[worse] > _RANK[worst]:
            worst = worse
    return worst


def statement_of(value, at_least, at_most, guard):
    """The statement for SI floats, each side of each comparison rounded to 12 significant digits first."""
    round12 = figures.round12
    y = round12(value)
    worst = PASS
    for side, limit in ((1.0, at_most), (-1.0, at_least)):
        if limit is None:
            continue
        edge = round12(limit)
        inner = round12(limit - side * guard)
        outer = round12(limit + side * guard)
        if side * y > side * outer:
            found = FAIL
        elif side * y > side * edge:
            found = CONDITIONAL_FAIL
        elif guard > 0.0 and side * y >= side * inner:
            found = CONDITIONAL_PASS
        else:
            found = PASS
        if _RANK[found] > _RANK[worst]:
            worst = found
    return worst


def _cdf(z, dof):
    return distributions.normal_cdf(z) if dof is None else distributions.student_cdf(z, float(dof))


def _whole(dof):
    """Degrees of freedom as k uses them: truncated downward, None for infinite or beyond 10 million."""
    return None if dof is None or dof > 1e7 else max(1, int(dof))


def conformance_probability(value, u, at_least, at_most, dof=None):
    """Probability that the true value lies within the limits (JCGM 106 7.3, 7.4); u = 0 gives 0.0 or 1.0.

    dof: degrees of freedom, truncated; few of them replace the normal by Student's t (documented choice).
    """
    if u == 0.0:
        return 1.0 if statement_of(value, at_least, at_most, 0.0) == PASS else 0.0
    nu = _whole(dof)
    if at_least is None:
        return _cdf((at_most - value) / u, nu)
    if at_most is None:
        return _cdf((value - at_least) / u, nu)
    return max(0.0, _cdf((at_most - value) / u, nu) - _cdf((at_least - value) / u, nu))


def risk_at_acceptance_limit(guard_over_u_expanded, k=2.0):
    """Specific risk of a wrong accept just at the acceptance limit T - r*U, one-sided, normal (ILAC-G8 table 1)."""
    return distributions.normal_cdf(-guard_over_u_expanded * k)


def probability_guard(probability, u, at_least, at_most, dof=None):
    """Guard band w at whose inner end the conformance probability is the wanted one; JCGM 106 8.3.2.

    Where two limits stand so close that no value reaches it, w is half their distance or more: nothing is accepted.
    """
    if u == 0.0:
        return 0.0
    nu = _whole(dof)
    z = distributions.normal_quantile(probability) if nu is None else distributions.student_quantile(probability, nu)
    one_sided = z * u
    if at_least is None or at_most is None:
        return one_sided
    half = (at_most - at_least) * 0.5
    if one_sided >= half:
        return one_sided
    if conformance_probability(at_most - one_sided, u, at_least, at_most, dof) >= probability - 1e-13:
        return one_sided
    if conformance_probability(at_most - half, u, at_least, at_most, dof) < probability:
        return half
    low, high = one_sided, half
    for _ in range(60):
        middle = (low + high) * 0.5
        if conformance_probability(at_most - middle, u, at_least, at_most, dof) >= probability:
            high = middle
        else:
            low = middle
    return high


def guard_band(limit, rule, wide, at_least, at_most):
    """w of a rule for an Expanded uncertainty, SI."""
    if rule == SIMPLE:
        return 0.0
    if rule == GUARDED:
        return limit.guard * wide.U
    return probability_guard(limit.probability, wide.u, at_least, at_most, wide.dof)


def _uncertainty(value, limit, correlations):
    """Expanded uncertainty of value less limit: a limit computed from readings brings its own influences."""
    widest = None
    for edge in (limit.at_least, limit.at_most):
        if edge is None:
            continue
        wide = expanded(value - edge if isinstance(edge, Measured) else value, limit.coverage, correlations)
        if widest is None or wide.U > widest.U:
            widest = wide
    return widest


def _meter_notes(meters):
    """(every meter is proved, note or "")."""
    for state in meters:
        if state == NO_METER:
            return False, "read without a known meter: simple acceptance, no guard band"
    for state in meters:
        if state != IN_CALIBRATION:
            return False, "calibration of a meter: " + state
    return True, ""


def judge(value, limit, meters=(), bound="", correlations=None):
    """The Verdict of `limit` on `value`.

    value: Measured or float in SI, None = missing.  meters: state of each meter that took part (meters.meter_state),
    "no meter" among them.  bound: ">" or "<" when value (or None: no figure) is only a bound of the reading.
    A safety limit is not judged unless every meter is in calibration and checked.
    """
    proved, note = _meter_notes(meters)
    notes = (note,) if note else ()
    if limit.safety and not proved:
        return not_judged(limit, "a safety limit needs a meter in calibration (" + note + ")", _plain(value), bound)
    rule = SIMPLE if NO_METER in meters else limit.rule
    if bound:
        return _judge_bound(value, limit, bound, notes, correlations, rule)
    if value is None:
        return not_judged(limit, "the reading is missing", None, "", notes)
    at_least, at_most = _plain(limit.at_least), _plain(limit.at_most)
    y = _plain(value)
    wide = _uncertainty(value, limit, correlations)
    guard = guard_band(limit, rule, wide, at_least, at_most)
    statement = statement_of(y, at_least, at_most, guard)
    known = NO_METER not in meters      # the resolution alone is no uncertainty to claim anything from
    sure = conformance_probability(y, wide.u, at_least, at_most, wide.dof) if known else None
    reason = _reason(statement, y, at_least, at_most, guard)
    if limit.safety and statement in (CONDITIONAL_PASS, CONDITIONAL_FAIL):
        statement = CONDITIONAL_FAIL
        reason = reason + ": " + DO_NOT_ENERGISE
    risk = 1.0 - sure if known and statement in (PASS, CONDITIONAL_PASS) else None
    k = wide.k if known else 0.0
    return Verdict(limit.id, statement, reason, y, "", at_least, at_most, rule, guard, wide.u, wide.dof, k,
                   wide.U, limit.coverage, None if at_least is None else at_least + guard,
                   None if at_most is None else at_most - guard, sure, risk, notes)


def _reason(statement, y, at_least, at_most, guard):
    if statement == PASS and guard == 0.0:
        return "inside the limit" if at_least is None or at_most is None else "inside both limits"
    if statement == PASS:
        return "inside the limit by more than the guard band" if at_least is None or at_most is None else \
            "inside both limits by more than the guard band"
    if statement == CONDITIONAL_PASS:
        return "inside the limit, nearer than our meter can prove"
    side = "above" if at_most is not None and figures.round12(y) > figures.round12(at_most) else "below"
    if statement == CONDITIONAL_FAIL:
        return side + " the limit, nearer than our meter can prove"
    return side + " the limit"


def _judge_bound(value, limit, bound, notes, correlations, rule):
    """A bound passes or fails only what it settles: every value it allows must give the same statement.

    A Measured bound brings its meter's specification, and its guard band must be cleared too.
    """
    at_least, at_most = _plain(limit.at_least), _plain(limit.at_most)
    if value is None:
        return not_judged(limit, "the reading is out of the meter's range and its bound is not known", None, bound,
                          notes)
    wide = _uncertainty(value, limit, correlations)
    guard = guard_band(limit, rule, wide, at_least, at_most)
    side = 1.0 if bound == ">" else -1.0
    beyond, other = (at_most, at_least) if bound == ">" else (at_least, at_most)
    y = _plain(value)
    shown = side * figures.round12(y)
    statement = None
    if beyond is not None and shown >= side * figures.round12(beyond + side * guard):
        statement = FAIL
        reason = ("above" if bound == ">" else "below") + " the limit whatever the value"
    elif beyond is None and shown >= side * figures.round12(other + side * guard):
        statement = PASS
        reason = "inside the limit whatever the value"
    if statement is None:
        return not_judged(limit, "the reading is only a bound, which does not settle this limit", y, bound, notes)
    return Verdict(limit.id, statement, reason, y, bound, at_least, at_most, rule, guard, wide.u, wide.dof, wide.k,
                   wide.U, limit.coverage, None if at_least is None else at_least + guard,
                   None if at_most is None else at_most - guard, None, None, notes)


def as_found_word(statement):
    """What an as-found reading may be called: at most "outside limit, service" (reject and replace never)."""
    return _WORDS[statement]


def worse(first, second):
    """The worse of two statements; not judged is worse than conditional fail and better than fail."""
    order = {PASS: 0, CONDITIONAL_PASS: 1, CONDITIONAL_FAIL: 2, NOT_JUDGED: 3, FAIL: 4}
    return first if order[first] >= order[second] else second


# --- printing -------------------------------------------------------------------------------------------------------


def _scaled_int(text, places):
    """A plain decimal text with `places` places or fewer as a whole number of the last place."""
    sign = -1 if text[0] == "-" else 1
    whole, _, part = text.replace("-", "").partition(".")
    return sign * int(whole + part + "0" * (places - len(part)))


def _same(x):
    return x


def _first_places(verdict, convert):
    """Places at which U shows two digits, else enough for six digits of the value."""
    width = convert(verdict.U) - convert(0.0)
    if width > 0.0:
        text = figures.value_with_uncertainty(convert(verdict.value), width)[1]
        places = len(text.partition(".")[2])
        return places if verdict.k > 0.0 else max(0, places - 1)
    text = figures.decimal_text(figures.round12(convert(verdict.value))).partition(".")[2]
    return min(len(text), 6) if text != "0" else 0


def _trimmed(text):
    if "." not in text:
        return text
    text = text.rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


@frozen("value", "U", "guard", "at_least", "at_most", "places")
class Printed:
    """Texts in the display unit: value, U ("" when 0 or not claimed), guard, at_least and at_most ("" when absent);
    places: decimal places of value, U and guard."""


def printed(verdict, convert=_same):
    """Texts of value, U, guard band and limits that alone give the verdict's own comparison again.

    convert: SI float -> display unit, increasing (units.from_base with the unit bound); differences are converted
    as convert(d) - convert(0).  Starts from U to two digits and adds places until the printed figures, compared as
    exact decimals, say what was judged.  Where the guard band is so narrow that the twelve digits of the comparison
    decide (some 1e-10 of the value), the guard's last printed digit gives way by one to three.
    """
    if verdict.value is None:
        return Printed("", "", "", _limit_text(verdict.at_least, convert), _limit_text(verdict.at_most, convert), 0)
    wanted = statement_of(verdict.value, verdict.at_least, verdict.at_most, verdict.guard)
    first = _first_places(verdict, convert)
    for nudge in (0, 1, -1, 2, -2, 3, -3):
        for more in range(14):
            shown, whole = _at_places(verdict, convert, first + more, more == 0, nudge)
            if verdict.bound or (_statement_at(whole[0], whole[1], whole[2], whole[3]) == wanted
                                 and (whole[3] > 0) == (verdict.guard > 0.0)):
                return shown
    return shown


def _at_places(verdict, convert, places, by_policy, nudge):
    """(Printed, [value, at_least, at_most, guard] as whole numbers of the last place)."""
    zero = convert(0.0)
    wide = _width_text(convert(verdict.U) - zero, places, by_policy)
    guard = wide if verdict.guard == verdict.U else _width_text(convert(verdict.guard) - zero, places, False)
    if nudge:
        guard = _placed(_scaled_int(guard, places) + nudge, places)
    texts = [None if e is None else figures.fixed(convert(figures.round12(e)), places)
             for e in (verdict.value, verdict.at_least, verdict.at_most)]
    whole = [None if t is None else _scaled_int(t, places) for t in texts] + [_scaled_int(guard, places)]
    low, high = ["" if t is None else _trimmed(t) for t in texts[1:]]
    claimed = verdict.U > 0.0 and verdict.k > 0.0
    return Printed(texts[0], wide if claimed else "", guard if verdict.guard > 0.0 else "", low, high, places), whole


def _placed(whole, places):
    """A whole number >= 0 of the last place as text."""
    text = str(max(0, whole))
    text = "0" * (places + 1 - len(text)) + text
    return text[:-places] + "." + text[-places:] if places else text


def _width_text(width, places, by_policy):
    """An uncertainty with `places` places, by the rounding policy of figures where it has just two digits."""
    if by_policy and width > 0.0:
        return figures.value_with_uncertainty(0.0, width)[1]
    return figures.fixed(width, places)


def _limit_text(limit, convert):
    return "" if limit is None else figures.decimal_text(figures.round12(convert(limit)))
