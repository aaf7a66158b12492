"""The house's own list of check values (checks.json): which are reproduced, and which wait for their part of the house.

Each value is worked by the engine function named here and compared at the list's own relative tolerance. Where the
same value is also tested beside its source, this is the index; where a part is not built yet, its id stands in OPEN,
so that the list of what is missing is itself checked.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import pytest
from reference_values import CHECKS

from fieldcheck.engine import distributions, measured
from fieldcheck.engine.physics import breakers, conductors, lubricants, meter_effects, pulses, rectifiers, windings

MM2 = 1e-6
COVERED: dict[str, Callable[[dict[str, Any]], Any]] = {}
OPEN = {
    # transformer, insulation, solenoid, loops, trends, signals: later issues
    "trafo.sc.R", "trafo.sc.X", "trafo.sc.Zs", "trafo.sc.Ik", "ir.KT25.thermoplastic", "shade.2.1.50.min",
    "shade.best.q1", "ring.uniform.1", "fault.far", "norris", "signal.thd.square", "signal.rms.mix", "jcgm101.9.2.3",
    # no physics: Merkle trees and canonical JSON have tests of their own
    "merkle.root.0", "merkle.root.8", "jcs.sha256",
}


def covers(prefix: str) -> Callable[[Callable[[dict[str, Any]], Any]], Callable[[dict[str, Any]], Any]]:
    """Declare that a function of the inputs reproduces every id that begins so."""

    def note(function: Callable[[dict[str, Any]], Any]) -> Callable[[dict[str, Any]], Any]:
        for ident in CHECKS:
            if ident.startswith(prefix):
                COVERED[ident] = function
        return function

    return note


@covers("wind.factor20_75.")
def _(given):
    return windings.temperature_factor(float(given["t1"]), float(given["t2"]), float(given["K"]))


@covers("wind.rise.2345")
def _(given):
    return windings.temperature_rise(given["R1"], 20.0, given["R2"], 24.0, given["K"])


@covers("wind.rise.u")
def _(given):
    one = measured.influence
    return measured.combined(windings.temperature_rise(
        one(2.4, given["uR1"], "a"), one(20.0, given["ut1"], "b"), one(3.05, given["uR2"], "c"),
        one(24.0, given["uta"], "d"), 234.5))


@covers("rect.eta.hw.ideal")
def _(given):
    return rectifiers.HALF_WAVE_IDEAL_EFFICIENCY


@covers("rect.eta.fw.ideal")
def _(given):
    return rectifiers.FULL_WAVE_IDEAL_EFFICIENCY


def _cell(given):
    return float(given["Rf"]), float(given["Rr"])


@covers("rect.hw.eta")
def _(given):
    return rectifiers.half_wave_efficiency(*_cell(given), float(given["RL"]))


@covers("rect.hw.Lopt.")
def _(given):
    return rectifiers.half_wave_best_load(*_cell(given))


@covers("rect.hw.etamax.")
def _(given):
    return rectifiers.half_wave_best_efficiency(*_cell(given))


@covers("rect.br.eta")
def _(given):
    return rectifiers.bridge_efficiency(*_cell(given), float(given["RL"]))


@covers("rect.ct.eta")
def _(given):
    return rectifiers.centre_tap_efficiency(*_cell(given), float(given["RL"]))


@covers("meter.phasecut.rms.")
def _(given):
    return meter_effects.phase_cut_rms(1.0, math.radians(given["deg"]))


@covers("meter.phasecut.corr.")
def _(given):
    return meter_effects.phase_cut_correction(math.radians(given["deg"]))


@covers("meter.halfwave.avgAC.peak2")
def _(given):
    return meter_effects.half_wave_shown_by_average_meter(float(given["peak"]))


@covers("unc.t95.nu4")
def _(given):
    return distributions.coverage_factor(given["nu"], given["p"])


@covers("jcgm106.zener")
def _(given):
    return distributions.normal_cdf((given["TU"] - given["y"]) / given["u"])


@covers("g8.pfa.")
def _(given):
    return distributions.normal_cdf(-float(given["w/U"]) * given["k"])


@covers("brk.cold.")
def _(given):
    return breakers.trip_time_cold(float(given["I"]), float(given["It"]), float(given["tau"]))


@covers("brk.hot.")
def _(given):
    return breakers.trip_time_hot(float(given["I"]), given["Ip"], float(given["It"]), float(given["tau"]))


@covers("brk.reclose.")
def _(given):
    return breakers.reclose_time(given["r"], float(given["tau"]))


@covers("adiab.k.cu.pvc")
def _(given):
    return conductors.adiabatic_k("copper", float(given["ti"]), float(given["tf"])) * MM2


@covers("adiab.t.")
def _(given):
    return conductors.withstand_time(conductors.tabulated_withstand(given["S"] * MM2, "copper pvc"), float(given["I"]))


@covers("awg.d.")
def _(given):
    return conductors.awg_diameter(float(given["awg"])) * 1000.0


@covers("preece.")
def _(given):
    return conductors.preece_current("copper", given["d_mm"] / 1000.0)


@covers("onderdonk.")
def _(given):
    return conductors.onderdonk_current(given["cmil"] * conductors.CIRCULAR_MIL, float(given["t"]), float(given["Ta"]))


@covers("cp.")
def _(given):
    return list(distributions.clopper_pearson(given["x"], given["n"]))


@covers("zerofail.")
def _(given):
    return pulses.clean_pulses_needed(given["p"])


@covers("vi.A")
def _(given):
    return lubricants.index_from_references(*[given[name] * MM2 for name in ("U", "Y", "L", "H")])


@pytest.mark.parametrize("ident", sorted(COVERED))
def test_value(ident):
    row = CHECKS[ident]
    assert COVERED[ident](row["inputs"]) == pytest.approx(row["expected"], rel=row["rtol"], abs=1e-15)


def test_every_id_is_covered_or_said_to_be_open():
    assert set(COVERED) | OPEN == set(CHECKS)
    assert not set(COVERED) & OPEN
    assert len(COVERED) == 63
