"""Step sequencers against checks 8.2-8.6, with exhaustive search and scipy's beta distribution as references."""

import itertools

import pytest
from reference_values import check

from fieldcheck.engine import measured
from fieldcheck.engine.errors import OutOfRange
from fieldcheck.engine.physics import pulses, sequencers

FOUR = ["F", "N", "R", "N"]          # two equal neutrals
THREE = ["F", "N", "R"]
TWO = ["F", "R"]
EIGHT = ["1", "2", "3", "4", "5", "6", "7", "8"]


# --- checks 8.4, DERIVED ---

def test_a_clean_run():
    run = sequencers.explain(FOUR, "F", list("NRNFNRNFN"))
    assert run.steps == (1,) * 9 and run.cost == 0.0 and run.resolved


def test_a_miss_at_the_fourth_pulse():
    run = sequencers.explain(FOUR, "F", list("NRNNFNRNF"))
    assert run.steps == (1, 1, 1, 0, 1, 1, 1, 1, 1) and run.cost == 1.0 and run.resolved
    assert sequencers.sequence_misses(FOUR, "F", list("NRNNFNRNF")) == 1.0
    assert sequencers.sequence_doubles(FOUR, "F", list("NRNNFNRNF")) == 0.0
    assert sequencers.sequence_clean_tail(FOUR, "F", list("NRNNFNRNF")) == 5.0


def test_an_ambiguous_tail():
    run = sequencers.explain(FOUR, "F", list("NNN"))
    assert run.steps == (1, 0, 0) and run.cost == 2.0 and not run.resolved
    assert run.ambiguous == (2, 3)
    assert ((1, 2, 0), 2.2) in run.alternatives
    # one explanation ends where another does, so that no further pulse can tell them apart
    assert sequencers.sequence_pulses_to_add(FOUR, "F", list("NNN")) == -1.0


def test_a_double_between_the_neutrals():
    # F N, then N again and R: from N1 a double reaches N3, whose next is F; R says that it was a miss
    assert sequencers.explain(FOUR, "F", list("NNR")).steps == (1, 0, 1)
    assert sequencers.explain(FOUR, "F", list("NNF")).steps == (1, 2, 1)


def test_position_sensed():
    assert sequencers.steps_between([0, 1, 2, 2, 3, 0, 2, 3, 0, 1], 4) == (1, 1, 0, 1, 1, 2, 1, 1, 1)


def test_symbols_in_both_shapes_of_a_layout():
    as_named = {"positions": ["F", "N1", "R", "N3"], "symbols": FOUR}
    as_shown = {"positions": FOUR, "symbols": ["F", "N", "R"]}
    assert sequencers.drum(as_named) == sequencers.drum(as_shown) == sequencers.drum(FOUR) == ("F", "N", "R", "N")


def cheapest_by_search(shown, start, seen):
    """Every sequence of steps tried: the set of those within the margin, by step."""
    found = {}
    for steps in itertools.product(range(max(4, len(shown))), repeat=len(seen)):
        cost = sum(sequencers.step_cost(step) for step in steps)
        for place in range(len(shown)):
            if shown[place] != start:
                continue
            position, agrees = place, True
            for step, symbol in zip(steps, seen, strict=True):
                position = (position + step) % len(shown)
                agrees = agrees and shown[position] == symbol
            if agrees:
                found[steps] = cost
    least = min(found.values())
    return least, {steps for steps, cost in found.items() if cost < least + sequencers.MARGIN - 1e-9}


@pytest.mark.parametrize("shown", [FOUR, THREE, TWO])
def test_least_cost_against_exhaustive_search(shown):
    symbols = sorted(set(shown))
    for start in symbols:
        for seen in itertools.product(symbols, repeat=4):
            run = sequencers.explain(shown, start, seen)
            least, within = cheapest_by_search(shown, start, seen)
            assert run.cost == pytest.approx(least, abs=1e-9)
            assert {run.steps} | {steps for steps, cost in run.alternatives} == within
            assert run.resolved == (len(within) == 1)


@pytest.mark.parametrize("shown", [FOUR, THREE, EIGHT])
def test_single_fault_in_a_long_run_is_found(shown):
    for fault, where in itertools.product((0, 2), (3, 6, 9)):
        position, seen = 0, []
        for pulse in range(14):
            position = (position + (fault if pulse == where else 1)) % len(shown)
            seen.append(shown[position])
        run = sequencers.explain(shown, shown[0], seen)
        assert run.resolved and run.steps == tuple(fault if k == where else 1 for k in range(14))


def test_two_positions_never_tell_a_miss_from_a_double():
    run = sequencers.explain(TWO, "F", list("RRFRFR"))
    assert not run.resolved and run.ambiguous == (2,)
    assert sequencers.sequence_pulses_to_add(TWO, "F", list("RRFRFR")) == -1.0
    assert sequencers.sequence_anomalies(TWO, "F", list("RRFRFR")) == 1.0


@pytest.mark.parametrize("seen", ["NRNN", "NN", "NRNFNN"])
def test_the_pulses_to_add_do_tell_apart(seen):
    more = sequencers.more_pulses(FOUR, "F", list(seen))
    assert more.count == 1 and len(more.shows) == 2
    for steps, added in more.shows:
        run = sequencers.explain(FOUR, "F", list(seen) + list(added))
        assert run.resolved and run.steps == steps + (1,) * more.count


def test_a_start_that_is_one_of_two_neutrals():
    run = sequencers.explain(FOUR, "N", list("RNFN"))
    assert run.steps == (1, 1, 1, 1) and run.resolved


def test_many_alternatives_are_cut_and_said_so():
    run = sequencers.explain(TWO, "F", ["F"] * 12)
    assert run.cost == 12.0 and run.steps == (0,) * 12
    assert not run.complete and len(run.alternatives) == sequencers.MOST_KEPT
    assert sequencers.sequence_most_anomalies(TWO, "F", ["F"] * 12) == 12.0


def test_a_thousand_pulses():
    seen = [FOUR[(k + 1) % 4] for k in range(1000)]
    assert sequencers.sequence_anomalies(FOUR, "F", seen) == 0.0


# --- checks 8.3 ---

@pytest.mark.parametrize(("x", "n", "printed"), [
    (0, 10, "0.2588655508930522"), (0, 20, "0.13910834066826516"), (0, 40, "0.07215752450551455"),
    (0, 59, "0.04950760988822693"), (0, 100, "0.029513049607039925"), (1, 40, "0.11318836094473754"),
    (2, 40, "0.14915196127321298"), (1, 100, "0.046559811453538935"), (3, 100, "0.07571079374983004"),
    (5, 10, "0.7775588989918706"), (4, 20, "0.4010281173319745"), (10, 10, "1")])
def test_upper_bound_on_the_failure_rate(x, n, printed):
    # Clopper and Pearson; CALC with statsmodels, and scipy's beta quantile here
    from scipy.stats import beta

    bound = pulses.failure_rate_upper_bound(float(x), float(n))
    check(bound, printed)
    if x < n:
        assert bound == pytest.approx(beta.ppf(0.95, x + 1, n - x), rel=1e-12)


@pytest.mark.parametrize(("rate", "n"), [(0.1, 29), (0.05, 59), (0.02, 149), (0.01, 299), (0.001, 2995)])
def test_clean_pulses_needed(rate, n):
    assert pulses.clean_pulses_needed(rate) == n
    assert pulses.failure_rate_upper_bound(0.0, float(n)) <= rate < pulses.failure_rate_upper_bound(0.0, float(n - 1))


@pytest.mark.parametrize(("n", "printed"), [(30, "0.09503385285530419"), (100, "0.029513049607039932"),
                                            (300, "0.00993608194445772")])
def test_no_failures(n, printed):
    # 1 - 0.05^(1/n)
    check(pulses.failure_rate_upper_bound(0.0, float(n)), printed)


def test_chance_of_a_clean_run():
    check(pulses.chance_of_clean_run(0.02, 40.0), "0.44570040395095073")
    assert pulses.failure_rate(3.0, 100.0) == 0.03


# --- checks 8.6, 8.2, 8.5 ---

def test_counting_many_pulses():
    clean = pulses.counted_run(FOUR, "F", 402.0, "R")
    assert clean.expected == ("R",) and clean.agrees and clean.shifts == (0,)
    short = pulses.counted_run(FOUR, "F", 403.0, "R")
    assert not short.agrees and short.expected == ("N",) and short.shifts == (-1,)
    assert pulses.count_shift(FOUR, "F", 401.0, "R") == 1.0
    # between equal neutrals a run two positions off looks right: both stay possible
    assert pulses.counted_run(FOUR, "F", 401.0, "N").shifts == (0, 2)
    assert pulses.count_agrees(EIGHT, "1", 800.0, "1") == 1.0 and pulses.count_agrees(EIGHT, "1", 800.0, "8") == 0.0


def test_hot_pull_in_rises_with_the_resistance():
    # checks 8.2: copper + 0.39 %/K where resistance dominates
    assert pulses.hot_pull_in(4.044, 20.0, 20.0 * 1.039) == pytest.approx(4.044 * 1.039, rel=1e-12)


def test_house_chain_c_against_the_pull_in_default():
    # checks 6.7 C and 8.1: 4.044 + 0.073 < 4.25
    mean = measured.mean_of_repeats([4.02, 4.11, 3.98, 4.07, 4.04], "pull-in")
    check(mean.value, "4.044")
    check(measured.combined(mean), "0.02204540768504869")


def test_bounce_and_openings():
    starts, lengths = [0.0010, 0.0030, 0.0070, 0.0250], [0.0008, 0.0003, 0.0015, 0.0012]
    assert pulses.bounce_time(starts, lengths) == pytest.approx(0.0085, rel=1e-12)
    assert pulses.open_time(starts, lengths) == pytest.approx(0.0035, rel=1e-12)
    assert pulses.longest_opening_after(starts, lengths, 0.020) == pytest.approx(0.0012, rel=1e-12)
    assert pulses.bounce_time([], []) == 0.0 and pulses.longest_opening_after([0.001], [0.001], 0.02) == 0.0


@pytest.mark.parametrize("mains", [50.0, 60.0])
def test_chatter_has_twice_the_mains_frequency(mains):
    # checks 8.5: 10 ms and 8.333 ms
    starts = [k / (2.0 * mains) for k in range(6)]
    assert pulses.chatter_period(starts, [0.001] * 6) == pytest.approx(0.5 / mains, rel=1e-12)


@pytest.mark.parametrize("wrong", [
    lambda: sequencers.explain(FOUR, "X", ["N"]), lambda: sequencers.explain(FOUR, "F", ["N", "Q"]),
    lambda: sequencers.explain(["F"], "F", ["F"]), lambda: sequencers.explain(FOUR, "F", ["N"] * 2001),
    lambda: pulses.failure_rate(3.0, 2.0), lambda: pulses.failure_rate(0.5, 2.0), lambda: pulses.failure_rate(0.0, 0.0),
    lambda: pulses.counted_run(FOUR, "X", 4.0, "F"), lambda: pulses.chance_of_clean_run(1.0, 3.0),
    lambda: pulses.bounce_time([0.1], []), lambda: pulses.bounce_time([-0.1], [0.1]),
    lambda: pulses.chatter_period([0.0, 0.01], [0.001, 0.001]), lambda: pulses.hot_pull_in(4.0, 0.0, 20.0)])
def test_refusals(wrong):
    with pytest.raises(OutOfRange):
        wrong()
