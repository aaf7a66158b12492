"""Pulse statistics, long runs by count, pull-in, bounce: the rest of a sequencer's test.

Counts and ratios as plain numbers, times in s, volts, ohm.
"""

from fieldcheck.engine import distributions
from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.frozen import frozen
from fieldcheck.engine.measured import median, power, value_of
from fieldcheck.engine.physics.sequencers import drum

GAP = 0.0005     # s: a shorter opening is not counted (checks 8.5)
BOUNCE = 0.010   # s: openings that begin later are not bounce (checks 8.5, PRACTICE)


def _whole(value, name):
    """A count as int; refuses fractions, negative and huge numbers."""
    number = value_of(value)
    if not 0.0 <= number <= 1.0e9 or number != float(int(number)):
        raise OutOfRange(name + " must be a whole number", name)
    return int(number)


def _counts(failures, pulses):
    x, n = _whole(failures, "failures"), _whole(pulses, "pulses")
    if n < 1 or x > n:
        raise OutOfRange("there must be a pulse or more, and no more failures than pulses", "pulses")
    return x, n


def failure_rate(failures, pulses):
    """Share of the pulses that failed; what it says about the rate is the upper bound."""
    x, n = _counts(failures, pulses)
    return x / float(n)


def failure_rate_upper_bound(failures, pulses, confidence=0.95):
    """One-sided upper bound on the failure rate (Clopper-Pearson, checks 8.3)."""
    x, n = _counts(failures, pulses)
    return distributions.upper_bound(x, n, value_of(confidence))


def clean_pulses_needed(rate, confidence=0.95):
    """Pulses without a failure that show the failure rate to be at most `rate` (checks 8.3)."""
    return float(distributions.clean_pulses_needed(value_of(rate), value_of(confidence)))


def chance_of_clean_run(rate, pulses):
    """Probability that `pulses` in a row succeed at a failure rate: (1 - rate)^n (checks 8.3)."""
    if not 0.0 <= value_of(rate) < 1.0:
        raise OutOfRange("the rate must lie from 0 to under 1", "rate")
    return power(1.0 - rate, float(_whole(pulses, "pulses")))


@frozen("expected", "agrees", "shifts")
class CountedRun:
    """expected: symbols that a clean run may end on; agrees: the end shown is one of them; shifts: positions by which
    the drum may be off, smallest first and signed (-1 = one step short). Errors that cancel cannot be seen."""


def counted_run(layout, start, pulses, end):
    """CountedRun of `pulses` from symbol `start` to symbol `end` (checks 8.6, PRACTICE)."""
    shown, n = drum(layout), _whole(pulses, "pulses")
    size = len(shown)
    begins = [k for k in range(size) if shown[k] == start]
    ends = [k for k in range(size) if shown[k] == end]
    if not begins or not ends:
        raise OutOfRange("the drum does not show this symbol anywhere", "start" if not begins else "end",
                         "it shows " + ", ".join([str(one) for one in shown]))
    expected, shifts = [], []
    for begin in begins:
        target = (begin + n) % size
        if shown[target] not in expected:
            expected.append(shown[target])
        for place in ends:
            shift = (place - target) % size
            shift = shift - size if 2 * shift > size else shift
            if shift not in shifts:
                shifts.append(shift)
    shifts.sort(key=lambda shift: (abs(shift), shift))
    return CountedRun(tuple(expected), end in expected, tuple(shifts))


def count_agrees(layout, start, pulses, end):
    """1 when a long run ended where a clean one would, else 0; errors that cancel modulo the drum cannot be seen."""
    return 1.0 if counted_run(layout, start, pulses, end).agrees else 0.0


def count_shift(layout, start, pulses, end):
    """Smallest number of positions by which a long run is off, signed: -1 is one step short."""
    return float(counted_run(layout, start, pulses, end).shifts[0])


def hot_pull_in(pull_in_cold, r_cold, r_hot):
    """Pull-in in V to expect of the hot coil where resistance dominates: it rises with it (checks 8.2, PRACTICE)."""
    if value_of(r_cold) <= 0.0:
        raise OutOfRange("the cold resistance must be above zero", "r_cold")
    return pull_in_cold * r_hot / r_cold


# --- bounce and chatter, from openings typed or measured ------------------------------------------------------------


def _openings(starts, lengths):
    """(start, length) in s of the openings long enough to count; start is after the first closure."""
    if len(starts) != len(lengths):
        raise OutOfRange("each opening needs its start and its length", "lengths")
    for k in range(len(starts)):
        if value_of(starts[k]) < 0.0 or value_of(lengths[k]) < 0.0:
            raise OutOfRange("an opening cannot begin before the first closure or last less than nothing", "starts")
    return [(starts[k], lengths[k]) for k in range(len(starts)) if value_of(lengths[k]) >= GAP]


def bounce_time(starts, lengths):
    """Seconds from the first closure to the end of the last opening that begins within 10 ms; 0 for none (8.5)."""
    last = 0.0
    for start, length in _openings(starts, lengths):
        if value_of(start) <= BOUNCE and value_of(start + length) > value_of(last):
            last = start + length
    return last


def open_time(starts, lengths):
    """Seconds that the contact was open in all openings that count."""
    total = 0.0
    for start, length in _openings(starts, lengths):
        total = total + length
    return total


def longest_opening_after(starts, lengths, after):
    """Longest opening in s that begins at `after` s or later; 0 for none. Over 1 ms after 20 ms is chatter (8.5)."""
    longest = 0.0
    for start, length in _openings(starts, lengths):
        if value_of(start) >= value_of(after) and value_of(length) > value_of(longest):
            longest = length
    return longest


def chatter_period(starts, lengths):
    """Median time in s between openings: 10 ms at 50 Hz and 8.333 ms at 60 Hz is chatter at twice the mains (8.5)."""
    begins = [start for start, length in _openings(starts, lengths)]
    if len(begins) < 3:
        raise OutOfRange("a period needs three openings or more", "starts")
    return median([begins[k + 1] - begins[k] for k in range(len(begins) - 1)])
