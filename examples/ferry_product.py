"""The invented harbour ferry terminal beside its limits: blocks, items, conditions, uncertainties, decisions."""

from __future__ import annotations

from datetime import date
from typing import Any

SCAN, MASK, RECEIVE, TILE, SUPPLY = "CS-TX-SCAN", "CS-TX-MASK", "CS-RX", "CS-TX-PLATE", "CS-SUPPLY"
BAND = "CS-RX-BAND"

BLOCKS = [
    # id, name, parent, kind, quantity, planes, paths, owner, maturity
    (
        "UT",
        "Harbour ferry user terminal",
        "",
        "terminal",
        1,
        "array face (EIRP)",
        "",
        "systems lead",
        "estimated",
    ),
    (
        "TXA",
        "Transmit array panel, 256 elements",
        "UT",
        "array",
        1,
        "array face (EIRP); panel input",
        "",
        "array lead",
        "simulated",
    ),
    (
        "RXA",
        "Receive array panel, 256 elements",
        "UT",
        "array",
        1,
        "array face; panel output",
        "",
        "array lead",
        "simulated",
    ),
    (
        "FEU",
        "Frequency converter unit",
        "UT",
        "converter",
        1,
        "IF port; RF port",
        "",
        "converter lead",
        "breadboard measured",
    ),
    ("PSU", "Power supply", "UT", "supply", 1, "", "", "power lead", "datasheet limit"),
    (
        "TX-DRV",
        "Driver amplifier",
        "TXA",
        "amplifier",
        4,
        "input; output",
        "",
        "amplifier lead",
        "datasheet typical",
    ),
    (
        "TX-TILE",
        "Transmit beamformer tile, 64 elements",
        "TXA",
        "beamformer",
        4,
        "tile input; chip output; element port",
        "chip output -> element port: -0.6 dB, u 0.1 dB",
        "array lead",
        "engineering unit",
    ),
    (
        "RX-LNA",
        "Low noise amplifier",
        "RXA",
        "amplifier",
        256,
        "input; output",
        "",
        "amplifier lead",
        "engineering unit",
    ),
    (
        "RX-TILE",
        "Receive beamformer tile, 64 elements",
        "RXA",
        "beamformer",
        4,
        "element port; tile output",
        "",
        "array lead",
        "simulated",
    ),
    ("UPC", "Upconverter", "FEU", "mixer", 1, "IF port; RF port", "", "converter lead", "engineering unit"),
    ("DNC", "Downconverter", "FEU", "mixer", 1, "RF port; IF port", "", "converter lead", "engineering unit"),
    ("LO", "Local oscillator", "FEU", "synthesiser", 1, "LO port", "", "converter lead", "datasheet typical"),
]

ITEMS = [
    # id, block, serial, hardware, hardware revision, firmware, built into
    ("UT-07", "UT", "HF-0007", "qualification", "B", "1.4.2", ""),
    ("UT-08", "UT", "HF-0008", "qualification", "B", "1.4.2", ""),
    ("TILE-3", "TX-TILE", "T-0103", "engineering", "B", "1.4.2", "UT-07"),
    ("CONV-1", "UPC", "FC-021", "engineering", "A", "", "UT-07"),
    ("CONV-2", "DNC", "FC-022", "engineering", "A", "", "UT-07"),
    ("RXP-1", "RXA", "RP-0007", "engineering", "A", "", "UT-07"),
    ("LNA-1", "RX-LNA", "L-0441", "engineering", "A", "", "UT-07"),
]

CONDITIONS = [
    # id, title, dimension, required, tolerance (36, 6 ranges, 9, 3 ranges, 9 and 9 required points)
    (SCAN, "Transmit band, temperature and beam directions", "frequency", "27.5, 28.75, 30 GHz", "10 MHz"),
    (SCAN, "", "temperature_ambient", "-25, 23, 55 °C", "3 K"),
    (SCAN, "", "scan_theta; scan_phi", "0 deg; 0 deg", "1 deg; 1 deg"),
    (SCAN, "", "scan_theta; scan_phi", "30 deg; 0 deg", ""),
    (SCAN, "", "scan_theta; scan_phi", "60 deg; 0 deg", ""),
    (SCAN, "", "scan_theta; scan_phi", "60 deg; 90 deg", ""),
    (MASK, "Off-axis cuts, angle from the beam peak", "frequency", "27.5, 28.75, 30 GHz", "10 MHz"),
    (MASK, "", "theta", "2 to 60 deg step 1 deg", "0.5 deg"),
    (MASK, "", "phi", "0, 90 deg", ""),
    (RECEIVE, "Receive band and temperature", "frequency", "17.7, 18.95, 20.2 GHz", "10 MHz"),
    (RECEIVE, "", "temperature_ambient", "-25, 23, 55 °C", "3 K"),
    (BAND, "Receive band from end to end", "frequency", "17.7 to 20.2 GHz step 0.1 GHz", "10 MHz"),
    (BAND, "", "temperature_ambient", "-25, 23, 55 °C", "3 K"),
    (TILE, "Transmit band on the cold plate", "frequency", "27.5, 28.75, 30 GHz", "10 MHz"),
    (TILE, "", "temperature_baseplate", "-7, 41, 73 °C", "3 K"),
    (SUPPLY, "Ship's supply and temperature", "temperature_ambient", "-25, 23, 55 °C", "3 K"),
    (SUPPLY, "", "supply_voltage", "20, 24, 30 V", "0.2 V"),
]

MAPS = [
    ("CM-UPC", "UPC", "if_frequency = frequency - 24.5 GHz"),
    ("CM-DNC", "DNC", "if_frequency = frequency - 15.2 GHz"),
    ("CM-DNC", "", "temperature_baseplate = temperature_ambient + 18 K"),
    ("CM-LNA", "RX-LNA", "temperature_baseplate = temperature_ambient + 18 K"),
    ("CM-PLATE", "", "temperature_baseplate = temperature_ambient + 18 K"),
]

DECLARED = [
    ("P_rated", "61 dBm", "EIRP at boresight, 28.75 GHz, +23 °C"),
    ("P_array", "33.5 dBm", "conducted power of all 256 elements"),
]

UNCERTAINTY = [
    # id, set-up, parameter, expanded uncertainty, from, to, residual
    ("U-FF-1", "Far-field range 1", "eirp", "0.8 dB", "27 GHz", "31 GHz", ""),
    ("U-CB-1", "Converter bench 2", "gain", "0.4 dB", "", "", ""),
    ("U-CB-2", "Converter bench 2", "op1db", "0.5 dB", "", "", ""),
    ("U-CB-3", "Converter bench 2", "image_rejection", "1.0 dB", "", "", ""),
    ("U-CB-4", "Converter bench 2", "carrier_leakage", "1.5 dB", "", "", ""),
    ("U-CB-5", "Converter bench 2", "evm", "0.3 %", "", "", ""),
    ("U-CB-6", "Converter bench 2", "noise_figure", "0.3 dB", "", "", ""),
]

ACTIVITIES = [
    # requirement, method, stage, hardware, gate, procedure, facility
    ("UT-OAD-1", "analysis", "qualification", "", "design review", "", ""),
    ("UT-OAD-1", "test", "acceptance", "production", "delivery review", "TP-03", "far-field range 1"),
]

WAIVERS: list[dict[str, Any]] = [
    {
        "ID": "W-1",
        "Kind": "waiver",
        "Requirement": "DNC-NF-1",
        "Items": "FC-022",
        "Conditions": "temperature_ambient > 50 °C",
        "Permitted limit": "<= 8.8 dB",
        "Reason": "The first build has the older mixer; behind 41 dB of gain it hardly counts",
        "Effect": "0.01 dB on RXA-NF-1",
        "Requested by": "converter lead",
        "Approved by": "review chair",
        "Requested on": date(2026, 4, 20),
        "Decided on": date(2026, 4, 27),
        "Expires on": date(2026, 12, 31),
        "State": "approved",
    },
]
