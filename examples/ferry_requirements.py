"""The specification of the invented harbour ferry terminal, as rows of the project workbook.

The budget behind the numbers (Ka band, plane array of 16 x 16 elements at half a wavelength of 30 GHz, 5 mm):

Transmit. Directivity of an element in a large array 4 pi 0.25 = 5.0 dBi; of 256 of them 29.0 dBi, less 0.5 dB of
ohmic loss and radome. 9.4 dBm a element (P1dB 13 dBm, backed off by 3.6 dB for the modulation) times 256 is 33.5 dBm
conducted (2.2 W). EIRP 33.5 + 28.5 = 62 dBm less 1 dB for phase errors, a light taper, ageing and the spread of the
tiles: 61 dBm is declared as P_rated. Scanned to 60 degrees the aperture shrinks as cos^1.3: 13 log10(cos 60) is
-3.9 dB, and 1.1 dB is granted on top of it: P_rated - 5 dB.

Off-axis density. 61 dBm (31 dBW) in the narrowest carrier of 10 MHz is 31 - 10 log10(10 MHz / 40 kHz) = 7 dBW/40 kHz on
axis. The mask is of the 25 log theta kind that satellite earth station rules use (written from memory, not a copy of
any one rule, hence invented): 19 - 25 log10(theta) from 2 to 7 degrees, flat to 9.2, 22 - 25 log10(theta) to 48 and
-20 beyond. The main beam is 6.4 degrees wide and the first side lobe 13 dB down, so the mask governs everything.

Receive. Half a wavelength of 20.2 GHz: 28.4 dBi at 18.95 GHz with losses. Antenna 50 K, radome and feed 20 K, receiver
150 K (1.8 dB): 220 K is 23.4 dBK, so G/T = 5.0 dB/K. It is 0.6 dB less at 17.7 GHz and 0.4 dB less when hot; with the
2.3 dB that the panel is allowed 3.3 dB/K remain, and that is promised.

Modulation error. Array 9 %, upconverter 4 %, oscillator 2 degrees rms = 3.5 %: root sum of squares 10.4 %, of 12.5 %.

Conditions. -25 to +55 degrees C ambient; the cold plate is 18 K warmer. LO 24.5 GHz up, 15.2 GHz down.
"""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date
from typing import Any

from ferry_product import BAND, BLOCKS, MASK, RECEIVE, SCAN, SUPPLY, TILE

Row = dict[str, Any]
SPECIFICATION = "Harbour ferry terminal specification (invented)"

EIRP_BY_SCAN = (
    "by scan_theta[deg] (0: >= P_rated[dBm] - 0.5 dB; 30: >= P_rated[dBm] - 1.5 dB; "
    "60: >= P_rated[dBm] - 5 dB)"
)
OFF_AXIS_MASK = (
    "mask(theta[deg], max dBW/40 kHz: 2..7: 11.47 to -2.13 log; 7..9.2: -2.1; "
    "9.2..48: -2.1 to -20.03 log; 48..85: -20)"
)


def requirement(
    id: str,
    title: str,
    block: str,
    parameter: str,
    limit: str,
    conditions: str,
    parents: str = "",
    **more: Any,
) -> Row:
    """Return one row of the sheet Requirements; ``more`` are further columns, with _ for a blank."""
    row = {
        "ID": id,
        "Title": title,
        "Block": block,
        "Parameter": parameter,
        "Limit": limit,
        "Conditions": conditions,
        "Parents": parents,
        "Method": "test",
        "Source document": SPECIFICATION,
        "Source issue": "3",
    }
    row |= {name.replace("_", " ").capitalize(): value for name, value in more.items()}
    row.setdefault("Owner", next(one[7] for one in BLOCKS if one[0] == block))
    if not parents:
        row.setdefault("Derived reason", "Service and interface description (invented)")
    return row


_ALONE = "no"  # proved on the terminal as a whole, nothing to hand down

SYSTEM = [
    requirement(
        "UT-EIRP-1",
        "EIRP over the scan volume",
        "UT",
        "eirp",
        EIRP_BY_SCAN,
        SCAN,
        plane="array face",
        proved_by="each of: HF-0007, HF-0008",
        greatest_uncertainty="1.2 dB",
        needs_allocation="yes",
    ),
    requirement(
        "UT-EIRP-2",
        "EIRP never above its declaration",
        "UT",
        "eirp",
        "<= P_rated[dBm] + 2.5 dB",
        SCAN,
        plane="array face",
        needs_allocation=_ALONE,
    ),
    requirement(
        "UT-OAD-1",
        "Off-axis EIRP density",
        "UT",
        "off_axis_eirp_density",
        OFF_AXIS_MASK,
        MASK,
        reference_bandwidth="40 kHz",
        method="analysis",
        rationale="The governing limit of the terminal: neighbouring satellites",
    ),
    requirement(
        "UT-EDN-1",
        "EIRP density on axis",
        "UT",
        "eirp_density",
        "<= 53.5 dBm/MHz",
        SCAN,
        needs_allocation=_ALONE,
    ),
    requirement(
        "UT-OFF-1",
        "Carrier-off EIRP density",
        "UT",
        "off_power_density",
        "< -21 dBm/MHz",
        SUPPLY,
        needs_allocation=_ALONE,
    ),
    requirement(
        "UT-SPU-1",
        "Discrete spurious emissions",
        "UT",
        "spurious_emission",
        "spurious_relative <= -60 dBc or <= -30 dBm, whichever is looser",
        SUPPLY,
        reference_bandwidth="100 kHz",
    ),
    requirement(
        "UT-EVM-1", "Modulation error", "UT", "evm", "<= 12.5 %", SCAN, decision_rule="guarded 1.0 U"
    ),
    requirement("UT-FER-1", "Frequency error", "UT", "frequency_error", "± 0.1 ppm", SUPPLY),
    requirement(
        "UT-ACL-1",
        "Adjacent channel leakage",
        "UT",
        "aclr",
        ">= 26 dB if power_level > 55 dBm",
        SCAN,
        needs_allocation=_ALONE,
    ),
    requirement(
        "UT-XPD-1",
        "Cross-polarisation discrimination",
        "UT",
        "cross_polarisation",
        ">= 22 dB",
        SCAN,
        needs_allocation=_ALONE,
    ),
    requirement(
        "UT-PTE-1",
        "Beam pointing error",
        "UT",
        "pointing_error",
        "TBR 0.4 deg max",
        SCAN,
        needs_allocation=_ALONE,
        tbr_owner="array lead",
        tbr_due=date(2026, 9, 30),
        tbr_action="Pointing budget with the ship's motion",
    ),
    requirement(
        "UT-BST-1",
        "Beam switching time",
        "UT",
        "beam_switching_time",
        "TBD µs max",
        SUPPLY,
        needs_allocation=_ALONE,
        tbr_owner="systems lead",
        tbr_due=date(2026, 5, 31),
        tbr_action="Handover timing of the network",
    ),
    requirement("UT-GOT-1", "Figure of merit", "UT", "g_over_t", ">= 3.3 dB/K", RECEIVE, method="analysis"),
    requirement("UT-DCP-1", "Power consumption", "UT", "dc_power", "<= 150 W", SUPPLY),
    requirement(
        "UT-DCP-2",
        "Power drawn from the ship",
        "UT",
        "dc_power",
        "<= 165 W",
        SUPPLY,
        needs_allocation=_ALONE,
        note="Says the same quantity as UT-DCP-1, with another number",
    ),
    requirement(
        "UT-STU-1",
        "Start-up time",
        "UT",
        "start_up_time",
        "< 90 s",
        SUPPLY,
        method="demonstration",
        note="Not shared out over the blocks yet",
    ),
    requirement(
        "UT-SCN-1",
        "Scan range",
        "UT",
        "scan_range",
        ">= 60 deg",
        "",
        method="",
        needs_allocation=_ALONE,
        note="No conditions and no verification planned yet",
    ),
]

ASSEMBLIES = [
    requirement(
        "TXA-POW-1",
        "Conducted power of all elements",
        "TXA",
        "output_power",
        "P_array[dBm] +1.5/-1 dB",
        TILE,
        "UT-EIRP-1",
    ),
    requirement(
        "TXA-SLL-1",
        "Side-lobe level",
        "TXA",
        "side_lobe_level",
        "<= -12 dB",
        MASK,
        "UT-OAD-1",
        needs_allocation=_ALONE,
    ),
    requirement(
        "TXA-PHE-1", "Phase error of the excitation", "TXA", "phase_error", "± 8 deg", TILE, "UT-OAD-1"
    ),
    requirement(
        "TXA-AME-1",
        "Amplitude error of the excitation",
        "TXA",
        "amplitude_error",
        "± 0.8 dB",
        TILE,
        "UT-OAD-1",
    ),
    requirement(
        "TXA-EVM-1",
        "Modulation error of the array",
        "TXA",
        "evm",
        "<= 9 %",
        TILE,
        "UT-EVM-1",
        needs_allocation=_ALONE,
    ),
    requirement(
        "TXA-ACT-1",
        "Active reflection while scanning",
        "TXA",
        "active_reflection",
        "<= -8 dB",
        SCAN,
        "UT-EIRP-1",
        method="analysis",
        needs_allocation=_ALONE,
    ),
    requirement(
        "TXA-DIS-1",
        "Dissipation",
        "TXA",
        "power_dissipation",
        "<= 70 W",
        SUPPLY,
        "UT-DCP-1",
        needs_allocation=_ALONE,
    ),
    requirement(
        "RXA-NF-1", "Noise figure of the panel", "RXA", "noise_figure", "<= 2.3 dB", RECEIVE, "UT-GOT-1"
    ),
    requirement("RXA-FLT-1", "Gain flatness", "RXA", "gain_flatness", "<= 1.5 dB", BAND, "UT-GOT-1"),
    requirement(
        "RXA-DIS-1",
        "Dissipation",
        "RXA",
        "power_dissipation",
        "<= 35 W",
        SUPPLY,
        "UT-DCP-1",
        needs_allocation=_ALONE,
    ),
    requirement("FEU-EVM-1", "Modulation error of the converter", "FEU", "evm", "<= 5.5 %", TILE, "UT-EVM-1"),
    requirement(
        "FEU-SPU-1", "Discrete spurious, relative", "FEU", "spurious_relative", "<= -65 dBc", TILE, "UT-SPU-1"
    ),
    requirement("FEU-FER-1", "Frequency error", "FEU", "frequency_error", "± 0.09 ppm", SUPPLY, "UT-FER-1"),
    requirement(
        "FEU-DCP-1",
        "Power consumption",
        "FEU",
        "dc_power",
        "<= 18 W",
        SUPPLY,
        "UT-DCP-1",
        needs_allocation=_ALONE,
    ),
]

PARTS = [
    requirement("TIL-GAI-1", "Gain of a channel", "TX-TILE", "gain", "20..25 dB", TILE, "TXA-POW-1"),
    requirement(
        "TIL-P1D-1",
        "Output compression point",
        "TX-TILE",
        "op1db",
        ">= 12.5 dBm",
        TILE,
        "TXA-POW-1",
        plane="element port",
    ),
    requirement(
        "TIL-PHE-1", "Phase error of a channel", "TX-TILE", "phase_error", "± 5 deg", TILE, "TXA-PHE-1"
    ),
    requirement(
        "TIL-AME-1",
        "Amplitude error of a channel",
        "TX-TILE",
        "amplitude_error",
        "± 0.5 dB",
        TILE,
        "TXA-AME-1",
    ),
    requirement(
        "TIL-NF-1", "Noise figure of a channel", "TX-TILE", "noise_figure", "<= 9 dB", TILE, "TXA-POW-1"
    ),
    requirement("DRV-GAI-1", "Gain", "TX-DRV", "gain", "18 ± 1.5 dB", TILE, "TXA-POW-1"),
    requirement(
        "DRV-P1D-1", "Output compression point", "TX-DRV", "op1db", "at least 24 dBm", TILE, "TXA-POW-1"
    ),
    requirement(
        "DRV-ISO-1", "Reverse isolation", "TX-DRV", "reverse_isolation", "> 40 dB", TILE, "TXA-AME-1"
    ),
    requirement("LNA-NF-1", "Noise figure", "RX-LNA", "noise_figure", "<= 1.8 dB", RECEIVE, "RXA-NF-1"),
    requirement("LNA-GAI-1", "Gain", "RX-LNA", "gain", "24 +3/-2 dB", RECEIVE, "RXA-NF-1"),
    requirement("LNA-IIP-1", "Input intercept point", "RX-LNA", "iip3", "> -18 dBm", RECEIVE, "RXA-NF-1"),
    requirement("LNA-RL-1", "Input return loss", "RX-LNA", "return_loss", "12 dB min", RECEIVE, "RXA-FLT-1"),
    requirement("RTL-GAI-1", "Gain of a channel", "RX-TILE", "gain", "15..19 dB", RECEIVE, "RXA-FLT-1"),
    requirement(
        "RTL-NF-1", "Noise figure of a channel", "RX-TILE", "noise_figure", "<= 6.5 dB", RECEIVE, "RXA-NF-1"
    ),
    requirement(
        "RTL-PHE-1", "Phase error of a channel", "RX-TILE", "phase_error", "± 6 deg", RECEIVE, "RXA-FLT-1"
    ),
    requirement("UPC-GAI-1", "Conversion gain", "UPC", "gain", "12 ± 2 dB", TILE, "FEU-EVM-1"),
    requirement("UPC-P1D-1", "Output compression point", "UPC", "op1db", ">= 10 dBm", TILE, "FEU-EVM-1"),
    requirement("UPC-IRJ-1", "Image rejection", "UPC", "image_rejection", ">= 40 dB", TILE, "FEU-SPU-1"),
    requirement("UPC-LOL-1", "Carrier leakage", "UPC", "carrier_leakage", "-45 dBc max", TILE, "FEU-SPU-1"),
    requirement("UPC-EVM-1", "Modulation error", "UPC", "evm", "<= 4 %", TILE, "FEU-EVM-1"),
    requirement("DNC-GAI-1", "Conversion gain", "DNC", "gain", "20 ± 2 dB", RECEIVE, "RXA-FLT-1"),
    requirement("DNC-IRJ-1", "Image rejection", "DNC", "image_rejection", ">= 45 dB", RECEIVE, "RXA-NF-1"),
    requirement("DNC-NF-1", "Noise figure", "DNC", "noise_figure", "<= 8.2 dB", RECEIVE, "RXA-NF-1"),
    requirement(
        "LO-IPE-1",
        "Integrated phase error",
        "LO",
        "integrated_phase_error",
        "<= 2.0 deg",
        SUPPLY,
        "FEU-EVM-1",
    ),
    requirement(
        "LO-FST-1", "Frequency stability", "LO", "frequency_stability", "<= 0.08 ppm", SUPPLY, "FEU-FER-1"
    ),
    requirement("LO-LEV-1", "Drive level", "LO", "lo_level", "13 ± 1.5 dBm", SUPPLY, "FEU-SPU-1"),
    requirement("PSU-EFF-1", "Efficiency", "PSU", "total_efficiency", ">= 88 %", SUPPLY, "UT-DCP-1"),
    requirement("PSU-RIP-1", "Supply ripple", "PSU", "supply_ripple", "<= 20 mV", SUPPLY, "UT-SPU-1"),
    requirement("PSU-INR-1", "Inrush current", "PSU", "inrush_current", "<= 8 A", SUPPLY, "UT-DCP-1"),
]

REQUIREMENTS: Sequence[Row] = (*SYSTEM, *ASSEMBLIES, *PARTS)
