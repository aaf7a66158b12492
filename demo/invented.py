"""The invented workshop of the demo: every name, place, number and reading here is made up."""

WORKSHOP = {"name": "Quillfeather bench and field service", "address": "3 Lampwick Yard, Ostermoor"}

PERSONS = {
    "ida": {"name": "Ida Quillfeather", "competences": ["low voltage", "mains-competent"]},
    "tobin": {"name": "Tobin Ashgrove", "competences": ["low voltage"]},
}

CUSTOMERS = {
    "museum": {"name": "Wexmoor Cabinet of Small Engines", "address": "Old Customs House, Wexmoor",
               "decimal_mark": "point"},
    "window": {"name": "Pellworm's Winter Window", "address": "12 Bell Street, Ostermoor", "decimal_mark": "comma"},
}

SITES = {
    "gallery": {"customer": "museum", "name": "Upper gallery, case 4", "address": "Old Customs House, Wexmoor",
                "supply_voltage": "230 V", "supply_frequency": "50 Hz"},
    "shopfront": {"customer": "window", "name": "Shop front", "address": "12 Bell Street, Ostermoor",
                  "supply_voltage": "230 V", "supply_frequency": "50 Hz"},
}

EQUIPMENT = {
    "fingers": {"kind": "contact-set", "name": "Drum finger set of the harbour railway", "tag": "QF-0107",
                "object": "WX 1938.44 b"},
    "gears": {"kind": "gear-train", "name": "Gear train of the harbour crane", "tag": "QF-0108",
              "object": "WX 1938.44 c"},
    "breaker": {"kind": "thermal-breaker", "name": "Reclosing breaker of the harbour railway", "tag": "QF-0109",
                "object": "WX 1938.44 d"},
    "drum": {"kind": "step-sequencer", "name": "Reversing drum of the shunting engine", "tag": "QF-0110",
             "object": "WX 1938.44 e"},
    "stack": {"kind": "dry-plate-rectifier", "name": "Plate stack of the signal lamps", "tag": "QF-0111",
              "object": "WX 1938.44 f"},
}


def _range(name, resolution, gain, counts):
    return {"name": name, "upto": name, "resolution": resolution, "gain": gain, "counts": counts}


METERS = {
    "bench": {
        "tag": "M1", "name": "Bench multimeter", "calibrated": "2026-02-10", "due": "2027-02-10",
        "certificate": "QF-C-26-014", "checked": True,
        "rated": {"low": "18", "high": "28", "tempco": "0.1"},
        "functions": [
            {"function": "DC voltage", "quantity": "voltage", "ranges": [
                _range("50 mV", "0.001 mV", "0.05 %", "8"), _range("500 mV", "0.01 mV", "0.05 %", "5"),
                _range("5 V", "0.1 mV", "0.05 %", "3"), _range("50 V", "1 mV", "0.05 %", "3")]},
            {"function": "AC voltage", "quantity": "voltage", "ranges": [
                _range("500 mV", "0.1 mV", "0.7 %", "5"), _range("5 V", "1 mV", "0.7 %", "5"),
                _range("50 V", "10 mV", "0.7 %", "2")]},
            {"function": "DC current", "quantity": "current", "ranges": [
                _range("500 mA", "0.01 mA", "0.2 %", "2"), _range("5 A", "0.1 mA", "0.2 %", "2"),
                _range("10 A", "1 mA", "0.5 %", "5")]},
            {"function": "AC current", "quantity": "current", "ranges": [
                _range("5 A", "0.1 mA", "1.0 %", "10"), _range("20 A", "10 mA", "1.5 %", "5")]},
            {"function": "low resistance", "quantity": "resistance", "leads": "0.02 ohm", "ranges": [
                _range("5 ohm", "1 mohm", "0.5 %", "10")]},
            {"function": "resistance", "quantity": "resistance", "leads": "0.02 ohm", "ranges": [
                _range("50 ohm", "0.01 ohm", "0.5 %", "10"), _range("500 ohm", "0.1 ohm", "1 %", "2"),
                _range("5 kohm", "1 ohm", "1 %", "2"), _range("50 kohm", "10 ohm", "1 %", "2")]},
        ],
    },
    "insulation": {
        "tag": "N1", "name": "Insulation tester", "calibrated": "2026-02-12", "due": "2027-02-12", "checked": True,
        "certificate": "QF-C-26-019",
        "functions": [{"function": "insulation resistance", "quantity": "resistance",
                       "ranges": [_range("20 Mohm", "0.01 Mohm", "3 %", "2"),
                                  _range("200 Mohm", "0.1 Mohm", "3 %", "2")]}],
    },
    "thermometer": {
        "tag": "T1", "name": "Contact thermometer", "calibrated": "2026-01-20", "due": "2027-01-20", "checked": True,
        "functions": [{"function": "temperature", "quantity": "temperature", "ranges": [
            {"name": "200 degC", "upto": "200 degC", "resolution": "0.1 K", "counts": "5"}]}],
    },
    "feelers": {
        "tag": "L1", "name": "Dial indicator", "calibrated": "2026-04-02", "due": "2027-04-02", "checked": True,
        "functions": [{"function": "length", "quantity": "length", "ranges": [_range("10 mm", "0.01 mm", "0 %", "1")]}],
    },
    "gauge": {
        "tag": "G1", "name": "Spring gauge", "calibrated": "2026-03-02", "due": "2027-03-02", "checked": True,
        "functions": [{"function": "force", "quantity": "force",
                       "ranges": [_range("2 N", "0.02 N", "2 %", "1")]}],
    },
}

LUBRICANTS = {
    "light oil": {"name": "Shelf oil A, synthetic hydrocarbon, VG 22", "type": "oil", "base": "synthetic-hydrocarbon",
                  "grade": "VG 22", "v40": "22 mm2/s", "v100": "4.6 mm2/s"},
    "soft grease": {"name": "Shelf grease B, synthetic hydrocarbon, NLGI 1", "type": "grease",
                    "base": "synthetic-hydrocarbon", "nlgi": "1", "v40": "30 mm2/s", "v100": "5.9 mm2/s"},
}
