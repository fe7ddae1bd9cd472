"""The budgets of the invented ferry terminal: receive noise and figure of merit, transmitted EIRP, error vector.

The story behind the numbers is told in ``ferry_requirements.py``. Every figure is an assumption of an invented design;
the tolerances say what they mean, so that they may be combined.
"""

from __future__ import annotations

from ferry_product import RECEIVE, SCAN

BUDGET_HEADERS = (
    "ID",
    "Title",
    "Requirements",
    "Quantity",
    "Law",
    "Conditions",
    "Input level",
    "Noise bandwidth",
    "Input plane",
    "Output plane",
    "Reserve",
    "Reserve held by",
    "Note",
)

BUDGETS = [
    (
        "B-RX-GT",
        "Figure of merit of the terminal",
        "UT-GOT-1",
        "g_over_t",
        "cascade",
        RECEIVE,
        "",
        "",
        "array face",
        "IF port",
        "0.2 dB",
        "systems lead",
        "Antenna noise at 30 degrees of elevation; the radome is at the temperature of the air",
    ),
    (
        "B-RX-NF",
        "Noise figure of the receive panel",
        "RXA-NF-1",
        "noise_figure",
        "cascade",
        RECEIVE,
        "-85 dBm",
        "40 MHz",
        "array face",
        "IF port",
        "",
        "",
        "The converter is part of it: behind 41 dB of gain it hardly counts",
    ),
    (
        "B-TX-EIRP",
        "EIRP over band, temperature and scan",
        "UT-EIRP-1",
        "eirp",
        "cascade",
        SCAN,
        "-17.5 dBm",
        "",
        "IF port",
        "array face",
        "",
        "",
        "Levels are those of all elements together; gains are per channel, dividers ideal but for their loss",
    ),
    (
        "B-EVM",
        "Modulation error of the transmit chain",
        "UT-EVM-1",
        "evm",
        "root sum of squares",
        SCAN,
        "",
        "",
        "",
        "",
        "0.5 %",
        "systems lead",
        "Parts are uncorrelated: thermal and phase noise, conversion, array",
    ),
]

LINE_HEADERS = (
    "Budget",
    "Position",
    "Block",
    "Position name",
    "N in parallel",
    "Passive",
    "Condition map",
    "Parameter",
    "Value",
    "Tolerance",
    "Tolerance means",
    "Distribution",
    "Correlation group",
    "Elements move",
    "Maturity",
    "Source",
)

_PLATE = "CM-PLATE"
_NORMAL = ("2 sigma", "normal")
_FLAT = ("limits", "uniform")
_SKEW = ("limits", "triangular")
_SIM, _DATA, _UNIT, _GUESS = "simulated", "datasheet typical", "engineering unit", "estimated"


def _line(
    budget: str,
    position: int,
    block: str,
    parameter: str,
    value: str,
    tolerance: str = "",
    spread: tuple[str, str] = ("", ""),
    *,
    name: str = "",
    count: str = "",
    passive: str = "",
    map_: str = "",
    moves: tuple[str, str] = ("", ""),
    maturity: str = _GUESS,
    source: str = "",
) -> tuple[str | int, ...]:
    """Return one row of the sheet; ``moves`` are the correlation group and how elements move."""
    means = spread if tolerance else ("", "")
    return (
        budget,
        position,
        block,
        name,
        count,
        passive,
        map_,
        parameter,
        value,
        tolerance,
        *means,
        *moves,
        maturity,
        source,
    )


def _receiver(budget: str, first: int) -> list[tuple[str | int, ...]]:
    """The panel and the converter, the same in both receive budgets."""
    feed, lna, tile, converter = range(first, first + 4)
    each = ("", "per element")
    return [
        _line(budget, feed, "RXA", "insertion_loss", "0.2 dB", "+0.1/-0.05 dB", _SKEW, name="Element feed",
              passive="yes", map_=_PLATE, maturity=_SIM, source="Array simulation"),
        _line(budget, lna, "RX-LNA", "gain", "24.6 dB - 0.01 dB/K of temperature_baseplate from 41 °C", "± 0.8 dB",
              _NORMAL, count="256", moves=each, maturity=_UNIT, source="First tile of ten"),
        _line(budget, lna, "RX-LNA", "noise_figure", "1.5 dB + 0.007 dB/K of temperature_baseplate from 41 °C",
              "± 0.15 dB", _NORMAL, moves=("LNA lot", ""), maturity=_UNIT, source="First tile of ten"),
        _line(budget, tile, "RX-TILE", "gain", "17 dB", "± 1.5 dB", _FLAT, count="4", maturity=_SIM,
              source="Chip simulation"),
        _line(budget, tile, "RX-TILE", "noise_figure", "6 dB", "± 0.5 dB", _FLAT, maturity=_SIM,
              source="Chip simulation"),
        _line(budget, converter, "DNC", "gain", "20 dB", "± 2 dB", _FLAT, maturity=_UNIT, source="First build"),
        _line(budget, converter, "DNC", "noise_figure", "table temperature_baseplate: -7 °C 7.4; 41 °C 7.8; 73 °C 8.4 "
              "dB linear", "± 0.3 dB", _NORMAL, maturity=_UNIT, source="First build"),
    ]  # fmt: skip


BUDGET_LINES = [
    _line("B-RX-GT", 1, "RXA", "antenna_gain", "table frequency: 17.7 GHz 27.8; 18.95 GHz 28.4; 20.2 GHz 28.9 dBi "
          "linear", "± 0.3 dB", _NORMAL, name="Aperture", maturity=_SIM, source="Array simulation"),
    _line("B-RX-GT", 1, "RXA", "antenna_noise_temperature", "50 K", "± 10 K", _FLAT, source="Sky at 30 degrees"),
    _line("B-RX-GT", 2, "UT", "insertion_loss", "0.3 dB", "+0.15/-0.05 dB", _SKEW, name="Radome", passive="yes",
          maturity=_DATA, source="Radome sheet, dry"),
    *_receiver("B-RX-GT", 3),
    *_receiver("B-RX-NF", 1),
    _line("B-TX-EIRP", 1, "UPC", "gain", "12 dB", "± 1 dB", _NORMAL, maturity=_UNIT, source="First build"),
    _line("B-TX-EIRP", 1, "UPC", "op1db", "11 dBm", "± 1 dB", _NORMAL, maturity=_UNIT, source="First build"),
    _line("B-TX-EIRP", 2, "TXA", "insertion_loss", "1.5 dB", "± 0.2 dB", _FLAT, name="Divider to the tiles",
          passive="yes", map_=_PLATE, maturity=_SIM, source="Board simulation"),
    _line("B-TX-EIRP", 3, "TX-DRV", "gain", "18 dB - 0.005 dB/K of temperature_baseplate from 41 °C", "± 0.5 dB",
          _NORMAL, count="4", map_=_PLATE, maturity=_DATA, source="Data sheet (invented)"),
    _line("B-TX-EIRP", 3, "TX-DRV", "op1db", "25 dBm", "± 0.5 dB", _NORMAL, maturity=_DATA,
          source="Data sheet (invented)"),
    _line("B-TX-EIRP", 4, "TX-TILE", "gain", "22.5 dB - 0.005 dB/K of temperature_baseplate from 41 °C", "± 0.8 dB",
          _NORMAL, name="Channels", count="256", map_=_PLATE, moves=("", "per element"), maturity=_UNIT,
          source="First tile of ten"),
    _line("B-TX-EIRP", 4, "TX-TILE", "op1db", "13 dBm", "± 0.5 dB", _NORMAL, maturity=_UNIT,
          source="First tile of ten"),
    _line("B-TX-EIRP", 5, "TXA", "antenna_gain", "table frequency: 27.5 GHz 28.4; 28.75 GHz 28.6; 30 GHz 28.7 dBi "
          "linear", "± 0.3 dB", _NORMAL, name="Aperture", maturity=_SIM, source="Array simulation"),
    _line("B-TX-EIRP", 5, "TXA", "scan_loss", "table scan_theta: 0 deg 0; 30 deg 0.8; 60 deg 3.9 dB linear",
          maturity=_SIM, source="Array simulation, cos^1.3"),
    _line("B-TX-EIRP", 5, "TXA", "attenuation", "0.6 dB", "+0.4/-0.2 dB", _SKEW,
          source="Phase errors, light taper, ageing"),
    _line("B-EVM", 1, "UPC", "evm", "3.2 %", "± 0.4 %", _FLAT, maturity=_UNIT, source="First build"),
    _line("B-EVM", 2, "LO", "integrated_phase_error", "2 deg", "± 0.3 deg", _FLAT, maturity=_DATA,
          source="Data sheet (invented)"),
    _line("B-EVM", 3, "TXA", "evm", "9 %", "± 1 %", _FLAT, maturity=_SIM, source="Array simulation"),
]  # fmt: skip

ALLOCATION_HEADERS = (
    "Parent requirement",
    "Child requirement",
    "Budget",
    "State",
    "Given by",
    "Taken by",
    "Agreed on",
)

ALLOCATIONS = [
    ("UT-GOT-1", "RXA-NF-1", "B-RX-GT", "agreed", "systems lead", "array lead", "2026-03-02"),
    ("RXA-NF-1", "LNA-NF-1", "B-RX-NF", "agreed", "array lead", "amplifier lead", "2026-03-09"),
    ("RXA-NF-1", "RTL-NF-1", "B-RX-NF", "agreed", "array lead", "array lead", "2026-03-09"),
    ("RXA-NF-1", "DNC-NF-1", "B-RX-NF", "agreed", "array lead", "converter lead", "2026-03-09"),
    ("UT-EIRP-1", "TXA-POW-1", "B-TX-EIRP", "agreed", "systems lead", "array lead", "2026-03-02"),
    ("UT-EVM-1", "TXA-EVM-1", "B-EVM", "agreed", "systems lead", "array lead", "2026-03-02"),
    ("UT-EVM-1", "FEU-EVM-1", "B-EVM", "proposed", "systems lead", "converter lead", ""),
]
