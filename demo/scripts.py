"""What the invented technician reads and does, item by item: step -> answers, one for each time the step comes up."""

ORDER = ("fingers",)

FINGERS = {
    "nameplate.n_contacts": ["2"],
    "nameplate.rated_current": ["1"],
    "nameplate.contact_type": ["sliding"],
    "surroundings": ["bare"],
    "surface": ["solid"],
    "group": ["alike"],
    "method": ["four-wire"],
    "untouched": [{"1/v_plus": "42.6", "1/v_minus": "-42.1", "1/i": "0.500",
                   "2/v_plus": "11.9", "2/v_minus": "-11.6", "2/i": "0.500"}],
    "worked": [
        {"1/v1": "39.1", "1/v2": "41.6", "1/v3": "38.4", "1/v4": "40.2", "1/v5": "39.5", "1/v_swapped": "-39.2",
         "1/i": "0.500",
         "2/v1": "10.4", "2/v2": "10.1", "2/v3": "10.2", "2/v4": "10.6", "2/v5": "10.3", "2/v_swapped": "-10.0",
         "2/i": "0.500"},
        {"1/v1": "29.8", "1/v2": "28.1", "1/v3": "28.9", "1/v4": "29.4", "1/v5": "28.6", "1/v_swapped": "-28.7",
         "1/i": "0.500",
         "2/v1": "10.2", "2/v2": "10.0", "2/v3": "10.1", "2/v4": "10.3", "2/v5": "10.1", "2/v_swapped": "-9.9",
         "2/i": "0.500"},
        {"1/v1": "10.9", "1/v2": "10.6", "1/v3": "10.8", "1/v4": "11.1", "1/v5": "10.7", "1/v_swapped": "-10.5",
         "1/i": "0.500",
         "2/v1": "10.1", "2/v2": "9.9", "2/v3": "10.0", "2/v4": "10.2", "2/v5": "10.0", "2/v_swapped": "-9.8",
         "2/i": "0.500"},
    ],
    "alignment": ["true"],
    "wear_track": ["even"],
    "insulation": ["31.5"],
    "residue": ["clean"],
    "left": [{"1/v_plus": "10.8", "1/v_minus": "-10.5", "1/i": "0.500",
              "2/v_plus": "10.0", "2/v_minus": "-9.8", "2/i": "0.500"}],
    "run": ["well"],
}

SCRIPTS = {"fingers": FINGERS}

CORRECTION = {"item": "fingers", "slot": "untouched|0|2/v_plus", "text": "11.8",
              "reason": "read 11.8, typed 11.9"}
"""A slip of the thumb, put right without erasing it."""
