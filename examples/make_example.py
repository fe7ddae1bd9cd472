"""Writes the example's workbooks. Run it after a change and commit what it writes: python examples/make_example.py

All data are invented. The same script gives the same bytes each run (see ``workbooks.py``).
"""

from __future__ import annotations

import sys
from pathlib import Path

import gateway
from ferry_results import (
    array_simulation,
    array_two_laboratories,
    converter_bench,
    receive_panel_sweep,
    tile_and_amplifier,
)
from ferry_specification import specification_sheets
from workbooks import write_book

HERE = Path(__file__).parent


def make(folder: Path = HERE) -> None:
    """Write all files below ``folder``."""
    ferry = folder / "ferry"
    results = ferry / "results"
    write_book(ferry / "ferry-requirements.xlsx", "Harbour ferry terminal", specification_sheets())
    write_book(results / "array_simulation.xlsx", "Array simulation", array_simulation())
    write_book(results / "array_two_laboratories.xlsx", "Array at two ranges", array_two_laboratories())
    write_book(results / "converter_bench.xlsx", "Converter bench", converter_bench())
    write_book(results / "receive_panel_sweep.xlsx", "Receive panel", receive_panel_sweep())
    write_book(results / "tile_and_amplifier.xlsx", "Tile and amplifier", tile_and_amplifier())
    write_book(
        folder / "gateway" / "gateway-requirements.xlsx",
        "Metering gateway radio",
        gateway.specification_sheets(),
    )
    gateway.write_results(folder / "gateway" / "gateway_bench.csv")


if __name__ == "__main__":
    make(Path(sys.argv[1]) if len(sys.argv) > 1 else HERE)
