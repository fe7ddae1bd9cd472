"""The small example: a metering gateway radio below 1 GHz, one workbook of ten requirements and one csv file. Invented.

The numbers: 14 dBm of output power into an antenna of 0 dBd (the 25 mW of the short-range bands around 868 MHz, common
practice, no source). Sensitivity at 125 kHz spread-spectrum: -174 + 10 log10(125 kHz) + noise figure 6 dB - 15 dB of
signal to noise ratio = -132 dBm, of which 6 dB are kept for temperature, front end and spread: -126 dBm.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

from workbooks import Sheet, table

INVENTED = "Metering gateway radio. All data in this workbook are invented."
CHANNELS_MHZ, AMBIENT = (868.1, 868.5, 869.525), (-20, 25, 55)

_HEADERS = (
    "ID",
    "Title",
    "Block",
    "Parameter",
    "Limit",
    "Reference bandwidth",
    "Conditions",
    "Parents",
    "Method",
    "Needs allocation",
)
_REQUIREMENTS: tuple[tuple[Any, ...], ...] = (
    ("GW-POW-1", "Output power", "GW", "output_power", "14 +0/-1.5 dBm", "", "CS-GW", "", "test", ""),
    ("GW-SEN-1", "Sensitivity", "GW", "sensitivity", "-126 dBm max", "125 kHz", "CS-GW", "", "test", ""),
    ("GW-FER-1", "Frequency error", "GW", "frequency_error", "± 10 ppm", "", "CS-GW", "", "test", "no"),
    ("GW-HAR-1", "Harmonics", "GW", "harmonic_level", "<= -30 dBm", "1 MHz", "CS-GW", "", "test", "no"),
    (
        "GW-OBW-1",
        "Occupied bandwidth",
        "GW",
        "occupied_bandwidth",
        "<= 150 kHz",
        "",
        "CS-GW",
        "",
        "test",
        "no",
    ),
    ("GW-BLK-1", "Blocking", "GW", "blocking_ratio", ">= 60 dB", "", "CS-GW", "", "test", "no"),
    ("GW-DUT-1", "Duty cycle", "GW", "duty_cycle", "<= 1 %", "", "", "", "review of design", "no"),
    ("GW-SLP-1", "Sleep current", "GW", "leakage_current", "TBR < 4 µA", "", "CS-GW", "", "test", "no"),
    (
        "RFE-IL-1",
        "Loss of the front end",
        "RFE",
        "insertion_loss",
        "<= 1.8 dB",
        "",
        "CS-GW",
        "GW-POW-1",
        "test",
        "",
    ),
    ("RFE-NF-1", "Noise figure", "RFE", "noise_figure", "<= 6 dB", "", "CS-GW", "GW-SEN-1", "test", ""),
)
_BLOCKS = (
    ("GW", "Metering gateway radio", "", "radio lead"),
    ("RFE", "Front end: switch and filters", "GW", "radio lead"),
)
_ITEMS = (("GW-1", "GW", "MG-0031", "qualification"),)
_CONDITIONS = (
    ("CS-GW", "frequency", "868.1, 868.5, 869.525 MHz", "10 kHz"),
    ("CS-GW", "temperature_ambient", "-20, 25, 55 °C", "2 K"),
)


def specification_sheets() -> list[Sheet]:
    """Return the sheets of the project workbook."""
    return [
        _sheet("Requirements", _HEADERS, _REQUIREMENTS),
        _sheet("Blocks", ("ID", "Name", "Parent", "Owner"), _BLOCKS),
        _sheet("Items", ("ID", "Block", "Serial", "Hardware type"), _ITEMS),
        _sheet("Conditions", ("ID", "Dimension", "Required", "Setting tolerance"), _CONDITIONS),
    ]


def _sheet(name: str, headers: tuple[str, ...], rows: tuple[tuple[Any, ...], ...]) -> Sheet:
    records = [dict(zip(headers, row, strict=True)) for row in rows]
    widths = dict.fromkeys(range(len(headers)), 20)
    return Sheet(name, [[INVENTED], *table(headers, records)], widths=widths, bold=frozenset({1, 2}))


def write_results(path: Path) -> None:
    """Write the csv as a bench in much of Europe does: semicolons, decimal commas, facts above."""
    lines = [
        "# Metering gateway radio (invented)",
        "# Block under test: GW",
        "# DUT: SN MG-0031",
        "# Test date: 2026-03-24",
        "# Reference bandwidth: 125 kHz",
        "Frequency (MHz);Ambient temperature (°C);Output power (dBm);Output power uncertainty (dB), k=2;"
        "Sensitivity (dBm);Sensitivity uncertainty (dB), k=2;Frequency error (ppm)",
    ]
    for place, channel in enumerate(CHANNELS_MHZ):
        for ambient in AMBIENT:
            power = 13.6 - 0.006 * (ambient - 25) - 0.1 * place
            sensitivity = -128.4 + 0.012 * (ambient - 25) + 0.2 * place
            error = 1.5 - 0.0009 * (ambient - 25) ** 2 + 0.2 * place
            if (channel, ambient) == (868.5, 55):
                continue  # a gap: this corner has not been measured yet
            numbers = f"{channel:g};{ambient};{power:.2f};0.5;{sensitivity:.1f};1.0;{error:.2f}"
            lines.append(numbers.replace(".", ","))
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(("\n".join(lines) + "\n").encode())
