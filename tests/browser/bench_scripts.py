"""What is typed and tapped in each of the five procedures that ship: one thing is found outside its limit, put right
and taken again; one reading is corrected, one step left out, one reading interrupted.  All readings are invented."""

from __future__ import annotations

from typing import Any

from worker import Plan, Script

CONDITIONS: dict[str, Any] = {"ambient": "21.0", "humidity": "48", "voltage": "231", "frequency": "50.0"}

CONTACTS: Script = {
    "conditions": [CONDITIONS],
    "nameplate.n_contacts": ["1"],
    "nameplate.rated_current": ["1"],
    "nameplate.contact_type": ["sliding"],
    "surroundings": ["bare"], "surface": ["solid"], "group": ["mixed"], "method": ["four-wire"],
    "untouched": [{"v_plus": "62.0", "v_minus": "-61.8", "i": "0.500"}],
    "worked": [
        {"v1": "40.2", "v2": "39.0", "v3": "41.5", "v4": "40.8", "v5": "40.1", "v_swapped": "-39.9", "i": "0.500"},
        {"v1": "10.2", "v2": "10.0", "v3": "10.1", "v4": "10.3", "v5": "10.1", "v_swapped": "-9.9", "i": "0.500"}],
    "alignment": ["true"], "wear_track": ["even"], "insulation": ["22.0"],
    "residue": ["clean"],
    "left": [{"v_plus": "10.1", "v_minus": "-9.9", "i": "0.500"}],
    "run": ["well"],
}

GEARS: Script = {
    "conditions": [CONDITIONS],
    "nameplate.gear_material": ["brass"], "nameplate.second_material": ["steel"], "nameplate.near_plastic": ["none"],
    "nameplate.near_rubber": ["none"], "nameplate.near_finish": ["bare"], "nameplate.n_meshes": ["1"],
    "nameplate.n_bearings": ["4"], "nameplate.gear_module": ["0.5"], "nameplate.t_cold": ["10"],
    "nameplate.t_warm": ["40"], "nameplate.u_run": ["12"], "nameplate.i_known": ["0.300"],
    "nameplate.interval": ["365"],
    "lubricant_named": ["Shelf oil A and shelf grease B"], "oil_data": ["two-points"],
    "oil_base": ["synthetic-hydrocarbon"], "oil_v40": ["22"], "oil_v100": ["4.6"], "grease": ["nlgi-1"],
    "grease_base": ["synthetic-hydrocarbon"], "spot_test": ["no-change"], "agent": ["naphtha"],
    "agent_test": ["no-change"], "gears": ["sound"], "old": ["hardened"], "v_found": ["12.00"],
    "i_found": [["0.362", "0.359", "0.361"]], "coast_found": [{"stopwatch": 3}], "turn": ["stiff", "free"],
    "backlash": [{"least": "0.07", "most": "0.11"}],
    "soak": [{"used": "naphtha", "amount": "5 mL"}],
    "oil_on": [{"used": "shelf oil A", "amount": "4 drops"}],
    "grease_on": [{"used": "shelf grease B", "amount": "thin film"}],
    "drops": ["4"], "v_left": ["12.01"], "i_left": [["0.303", "0.301", "0.302"]],
    "coast_left": [["2.6", "2.7", "2.6"]], "creep": ["none"], "electrical": ["dry"], "run": ["well"],
    "next_due": ["before the next winter display"],
}

BREAKER: Script = {
    "conditions": [CONDITIONS],
    "nameplate.rated": ["2.4"], "nameplate.unattended": ["no"], "nameplate.further_means": ["no"],
    "nameplate.area": ["0.5"], "nameplate.insulation": ["pvc"], "nameplate.i_fault": ["9"],
    "nameplate.t_hot_last": ["12.2"], "nameplate.t_cold_last": ["29.0"], "nameplate.t_trip": ["95"],
    "nameplate.t_site": ["35"], "nameplate.adjustable": ["no"],
    "look": ["pitted"], "t_start": ["22.1"], "i_set": ["2.400"], "i_hold_start": ["2.402"],
    "drop": ["412.0", "170.0"], "hold_time": ["210.5", "605.0"], "i_hold_end": ["2.396"], "i_hot_start": ["4.810"],
    "t_hot": ["12.5"], "i_hot_end": ["4.790"], "recloses": ["self"], "t_reclose": ["21.4"], "waited": ["660"],
    "t_cooled": ["22.6"], "i_cold_start": ["4.806"], "t_cold": ["29.7"], "i_cold_end": ["4.794"],
    "told": ["told"], "run": ["well"],
}

CLEAN = {"start": "F", "seen": ["N", "R", "N", "F"] * 5}
MISSED = {"start": "F", "seen": ["N", "R", "N", "F", "N", "R", "R", *["N", "F", "N", "R"] * 3, "N"]}
"""The seventh pulse moved nothing."""

DRUM: Script = {
    "conditions": [CONDITIONS],
    "nameplate.drum": ["four"], "nameplate.v_min": ["5"], "nameplate.v_normal": ["12"], "nameplate.v_max": ["20"],
    "nameplate.coil_marked": ["12.0"],
    "supply_match": ["agree"], "insulation": ["52.0"], "r_cold": ["12.1"], "first_stroke": ["4.90", "4.10"],
    "pull_in": [{"texts": ["4.61", "4.55", "4.63", "4.58", "4.60"], "range": "50 V"},
                {"texts": ["4.02", "4.11", "3.98", "4.07", "4.04"], "range": "50 V"}],
    "drop_out": [["3.95", "3.92", "3.90", "3.97", "3.93"], ["3.62", "3.58", "3.60", "3.65", "3.61"]],
    "run_low": [MISSED, CLEAN], "run_normal": [CLEAN], "run_high": [CLEAN],
    "release": ["at-once"], "hand_turn": ["stiff", "free"], "finish": ["clean"], "run": ["well"],
}


def _cells(third: str) -> dict[str, Any]:
    rows = (("120", "2700"), ("124", "2650"), (third, "2740"), ("121", "2690"))
    return {f"{n}/{way}": {"text": text, "range": "5 kohm"} for n, row in enumerate(rows, 1)
            for way, text in zip(("forward", "reverse"), row, strict=True)}


STACK: Script = {
    "conditions": [CONDITIONS],
    "nameplate.cell_kind": ["copper-oxide"], "nameplate.circuit": ["bridge"], "nameplate.n_cells": ["4"],
    "nameplate.n_series": ["1"], "nameplate.v_ac": ["10.0"], "nameplate.r_load": ["500"], "nameplate.r_winding": ["0"],
    "plates": ["clean"], "may_reform": ["no"], "plate_cold": ["21.6"], "range_open": ["1.52"], "range_short": ["1.05"],
    "leads_shorted": ["0.2"], "cells": [_cells("232"), _cells("118")], "insulation": ["85.0"], "plate_hot": ["31.5"],
    "fitted": ["own"], "run": ["well"],
}

PLANS = {
    "contact-cleaning": Plan(CONTACTS, "worked|0|1/v3", {"worked|0|1/v4": "48.0"},
                             {"wiring_photo|0|": "no camera allowed in this hall"}),
    "gear-lubrication": Plan(GEARS, "backlash|0|1/most", {"v_found|0|": "21.00"},
                             {"photo|0|": "no camera allowed in this hall"}),
    "breaker-reclose": Plan(BREAKER, "t_hot|0|", {"i_hold_start|0|": "2.042"},
                            {"wiring_photo|0|": "no camera allowed in this hall"}),
    "sequencer-step": Plan(DRUM, "drop_out|0|", {"first_stroke|0|": "9.40"},
                           {"r_cold|0|": "coil ends not reached without unsoldering"}),
    "rectifier-ratio": Plan(STACK, "cells|0|2/reverse", {"cells|0|1/forward": "210"},
                            {"wiring_photo|0|": "no camera allowed in this hall"}),
}

CHAIN_A: Script = {
    **CONTACTS, "conditions": [{**CONDITIONS, "ambient": "23.4"}],
    "nameplate.rated_force": ["0.30"], "nameplate.circuit_marked": ["2.3"],
    "untouched": [{"v_plus": "11.2", "v_minus": "-11.0", "i": "0.500"}], "worked": CONTACTS["worked"][1:],
    "force": [{"f": "0.30"}], "circuit": ["yes"],
    "circuit_drop": [{"v_plus": "1.0423 V", "v_minus": "-1.0331 V", "i": {"text": "0.4500 A", "range": "5 A"}}],
}
"""House checks 6.7 A, in a full test of one sound contact."""

CHAIN_C: Script = {
    **DRUM, "first_stroke": ["4.10"], "pull_in": DRUM["pull_in"][1:], "drop_out": DRUM["drop_out"][1:],
    "run_low": [CLEAN], "hand_turn": ["free"],
}
"""House checks 6.7 C, in a routine test of a sound drum."""
