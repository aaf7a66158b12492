"""Step sequencers: what the drum showed after each pulse, explained at least cost.

A drum is data: the symbols it shows, in the order of its positions, such as F N R N. A pulse should advance it
one position; it may miss (0), double (2), or more. Where two positions show one symbol the steps are not seen
directly, so every path over the positions is weighed (Viterbi) and the cheapest explains the run. An explanation
within MARGIN of the cheapest cannot be ruled out: the evidence does not tell them apart, and we say so.
Source: checks 8.4 (DERIVED; the costs are PRACTICE).
"""

from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.frozen import frozen

COSTS = (0.0, 1.2, 3.0)  # of one step, two, three; each further position costs 1 more
MISS_COST = 1.0
MARGIN = 1.0       # explanations nearer than one miss are not told apart (PRACTICE)
MOST_KEPT = 50     # alternatives listed
MOST_PULSES = 2000
UNREACHED = 1e300
TINY = 1e-9        # costs are sums of decimal fractions


@frozen("steps", "cost", "positions", "resolved", "ambiguous", "alternatives", "complete")
class Explanation:
    """steps: positions advanced by each pulse; cost: of the cheapest explanation; positions: where the drum stood
    after each pulse by it (from 0); resolved: no other explanation within MARGIN; ambiguous: numbers of the pulses
    (from 1) on which those within MARGIN differ; alternatives: (steps, cost) of the others, cheapest first;
    complete: False when there were more than MOST_KEPT of them."""


@frozen("count", "shows")
class MorePulses:
    """count: clean pulses to add so that the evidence is told apart, 0 when it is already, None when none would;
    shows: (steps, symbols that those pulses would show) of each explanation still possible."""


def drum(layout):
    """Tuple of the symbols shown, in order of position, from a layout.

    layout: list of symbols, or {"positions": [...], "symbols": [...]}: where `symbols` is as long as `positions`
    it says what each position shows; otherwise the positions are the symbols themselves.
    """
    if isinstance(layout, dict):
        positions, symbols = layout["positions"], layout.get("symbols", ())
        layout = symbols if len(symbols) == len(positions) else positions
    if len(layout) < 2:
        raise OutOfRange("a drum has two positions or more", "layout")
    return tuple(layout)


def step_cost(step):
    """Cost of a pulse that advanced the drum by `step` positions (0 = miss)."""
    if step == 0:
        return MISS_COST
    return COSTS[step - 1] if step <= len(COSTS) else COSTS[-1] + float(step - len(COSTS))


def _places(shown, symbol, where):
    places = [k for k in range(len(shown)) if shown[k] == symbol]
    if not places:
        raise OutOfRange("the drum does not show \"" + str(symbol) + "\" anywhere", where,
                         "it shows " + ", ".join([str(one) for one in shown]))
    return places


def _costs_to_go(shown, seen):
    """ahead[k][p]: least cost of pulses k+1 to the end when the drum stands at p after pulse k."""
    size = len(shown)
    ahead = [[0.0] * size]  # from the last pulse backwards, turned round at the end
    for k in range(len(seen) - 1, -1, -1):
        places = _places(shown, seen[k], "pulse " + str(k + 1))
        here = []
        for p in range(size):
            best = UNREACHED
            for step in range(max(4, size)):
                target = (p + step) % size
                if target in places:
                    cost = step_cost(step) + ahead[-1][target]
                    if cost < best:
                        best = cost
            here.append(best)
        ahead.append(here)
    ahead.reverse()
    return ahead


def _paths(shown, starts, seen, ahead, bound):
    """Every (cost, steps, positions) of cost under `bound`, at most MOST_KEPT + 1 different ones in steps."""
    size, known = len(shown), {}
    found = []  # type: list[tuple[float, tuple[int, ...], tuple[int, ...]]]
    stack = []  # type: list[tuple[float, tuple[int, ...], tuple[int, ...]]]
    for start in reversed(starts):
        stack.append((0.0, (), (start,)))
    while stack and len(found) <= MOST_KEPT:
        cost, steps, positions = stack.pop()
        k = len(steps)
        if k == len(seen):
            if steps not in known:
                known[steps] = True
                found.append((cost, steps, positions[1:]))
            continue
        for step in range(max(4, size) - 1, -1, -1):
            target = (positions[-1] + step) % size
            if shown[target] == seen[k]:
                total = cost + step_cost(step)
                if total + ahead[k + 1][target] < bound - TINY:
                    stack.append((total, steps + (step,), positions + (target,)))
    return found


def explain(layout, start, seen):
    """Explanation of a run.

    layout: as `drum` takes it; start: symbol shown before the first pulse; seen: symbols shown after each pulse.
    Raises OutOfRange for a symbol that the drum does not show, and for more than MOST_PULSES pulses.
    """
    shown = drum(layout)
    if len(seen) > MOST_PULSES:
        raise OutOfRange("too many pulses to explain one by one", "seen", "use the count mode for long runs")
    starts = _places(shown, start, "start")
    ahead = _costs_to_go(shown, seen)
    least = min([ahead[0][p] for p in starts])
    found = _paths(shown, starts, seen, ahead, least + MARGIN)
    found.sort(key=lambda path: (path[0], [abs(step - 1) for step in path[1]]))
    if found[0][0] > least + TINY:  # the list was cut before the cheapest was met: fetch that alone
        found.insert(0, _paths(shown, starts, seen, ahead, least + 10.0 * TINY)[0])
    complete = len(found) <= MOST_KEPT
    best = found[0]
    ambiguous = [k + 1 for k in range(len(seen)) if any([path[1][k] != best[1][k] for path in found])]
    others = tuple([(path[1], path[0]) for path in found[1:MOST_KEPT + 1]])
    return Explanation(best[1], best[0], best[2], len(others) == 0, tuple(ambiguous), others, complete)


def more_pulses(layout, start, seen):
    """MorePulses: how many clean pulses (one step each) would tell the explanations of a run apart.

    Each explanation still possible is taken as the truth in turn; the count serves them all. On a drum of two
    positions, or where two explanations end in the same position, no number does: repeat the run instead.
    """
    shown, run = drum(layout), explain(layout, start, seen)
    candidates = [run.steps] + [steps for steps, cost in run.alternatives]
    if run.resolved:
        return MorePulses(0, ())
    ends = _ends(shown, start, seen, candidates)
    if any([ends[k] in ends[:k] for k in range(len(ends))]):
        return MorePulses(None, ())  # from one position they go on alike, and neither is ever ruled out
    for count in range(1, 2 * len(shown) + 1):
        shows = [tuple([shown[(end + k) % len(shown)] for k in range(1, count + 1)]) for end in ends]
        if all([explain(shown, start, tuple(seen) + added).resolved for added in shows]):
            return MorePulses(count, tuple(zip(candidates, shows)))
    return MorePulses(None, ())


def _ends(shown, start, seen, candidates):
    """Position after the run by each explanation, from the first start that agrees with what was seen."""
    ends = []
    for steps in candidates:
        for place in _places(shown, start, "start"):
            position, agrees = place, True
            for k in range(len(steps)):
                position = (position + steps[k]) % len(shown)
                agrees = agrees and shown[position] == seen[k]
            if agrees:
                ends.append(position)
                break
    return ends


def steps_between(positions, size):
    """Steps of a drum whose position itself is sensed (checks 8.4): differences modulo `size`."""
    return tuple([(positions[k + 1] - positions[k]) % size for k in range(len(positions) - 1)])


# --- scalar views for formulas --------------------------------------------------------------------------------------


def _count(layout, start, seen, wanted):
    total = 0
    for step in explain(layout, start, seen).steps:
        if wanted(step):
            total += 1
    return float(total)


def sequence_misses(layout, start, seen):
    """Pulses that did not advance the drum, by the cheapest explanation."""
    return _count(layout, start, seen, lambda step: step == 0)


def sequence_doubles(layout, start, seen):
    """Pulses that advanced the drum two positions, by the cheapest explanation."""
    return _count(layout, start, seen, lambda step: step == 2)


def sequence_anomalies(layout, start, seen):
    """Pulses that advanced the drum by other than one position, by the cheapest explanation."""
    return _count(layout, start, seen, lambda step: step != 1)


def sequence_most_anomalies(layout, start, seen):
    """The largest number of such pulses by any explanation that the evidence does not rule out."""
    run = explain(layout, start, seen)
    return float(max([len([step for step in steps if step != 1])
                      for steps in [run.steps] + [one[0] for one in run.alternatives]]))


def sequence_resolved(layout, start, seen):
    """1 when the evidence leaves one explanation, else 0."""
    return 1.0 if explain(layout, start, seen).resolved else 0.0


def sequence_ambiguous_pulses(layout, start, seen):
    """Number of pulses on which the explanations left differ."""
    return float(len(explain(layout, start, seen).ambiguous))


def sequence_pulses_to_add(layout, start, seen):
    """Clean pulses that would tell the explanations apart: 0 when they are, -1 when none would (repeat the run)."""
    count = more_pulses(layout, start, seen).count
    return -1.0 if count is None else float(count)


def sequence_clean_tail(layout, start, seen):
    """Good pulses after the last that was not, by the cheapest explanation; end a run with two or more (checks 8.4)."""
    steps = explain(layout, start, seen).steps
    tail = 0
    for step in reversed(steps):
        if step != 1:
            break
        tail += 1
    return float(tail)
