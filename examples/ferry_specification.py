"""The project workbook of the ferry terminal: one sheet a noun."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from ferry_budgets import (
    ALLOCATION_HEADERS,
    ALLOCATIONS,
    BUDGET_HEADERS,
    BUDGET_LINES,
    BUDGETS,
    LINE_HEADERS,
)
from ferry_product import ACTIVITIES, BLOCKS, CONDITIONS, DECLARED, ITEMS, MAPS, UNCERTAINTY, WAIVERS
from ferry_requirements import REQUIREMENTS
from workbooks import Sheet, table

Row = dict[str, Any]
INVENTED = "All data in this workbook are invented."


def specification_sheets() -> list[Sheet]:
    """Return the sheets of the project workbook."""
    return [
        _sheet("Requirements", "Requirements of the terminal", _ordered(REQUIREMENTS)),
        _rows(
            "Blocks",
            ("ID", "Name", "Parent", "Kind", "Quantity", "Planes", "Plane paths", "Owner", "Maturity"),
            BLOCKS,
        ),
        _rows(
            "Items",
            ("ID", "Block", "Serial", "Hardware type", "Hardware revision", "Firmware", "Built into"),
            ITEMS,
        ),
        _rows("Conditions", ("ID", "Title", "Dimension", "Required", "Setting tolerance"), CONDITIONS),
        _rows(
            "Activities",
            ("Requirement", "Method", "Stage", "Hardware", "Gate", "Procedure", "Facility"),
            ACTIVITIES,
        ),
        _rows("Condition maps", ("ID", "Block", "Formula"), MAPS),
        _rows("Declared values", ("Name", "Value", "Note"), DECLARED),
        _rows(
            "Uncertainty register",
            (
                "ID",
                "Set-up",
                "Parameter",
                "Uncertainty",
                "Frequency from",
                "Frequency to",
                "Residual",
                "Coverage factor",
            ),
            [(*one, "k=2") for one in UNCERTAINTY],
        ),
        _rows("Budgets", BUDGET_HEADERS, BUDGETS),
        _rows("Budget lines", LINE_HEADERS, BUDGET_LINES),
        _rows("Allocations", ALLOCATION_HEADERS, ALLOCATIONS),
        _sheet("Waivers", "Accepted shortfalls", WAIVERS),
    ]


_ORDER = (
    "ID",
    "Title",
    "Block",
    "Parameter",
    "Limit",
    "Plane",
    "Reference bandwidth",
    "Conditions",
    "Parents",
    "Derived reason",
    "Owner",
    "Source document",
    "Source issue",
    "Method",
    "Proved by",
    "Decision rule",
    "Greatest uncertainty",
    "Needs allocation",
    "Tbr owner",
    "Tbr due",
    "Tbr action",
    "Rationale",
    "Note",
)


def _ordered(rows: Sequence[Row]) -> Sequence[Row]:
    assert all(header in _ORDER for row in rows for header in row)
    return [{header: row[header] for header in _ORDER if header in row} for row in rows]


def _rows(name: str, headers: Sequence[str], values: Sequence[Sequence[Any]]) -> Sheet:
    return _sheet(name, name, [dict(zip(headers, row, strict=True)) for row in values], headers)


def _sheet(name: str, title: str, records: Sequence[Row], headers: Sequence[str] = ()) -> Sheet:
    found = dict.fromkeys(header for record in records for header in record)
    order = headers or sorted(found, key=lambda one: _ORDER.index(one) if one in _ORDER else len(_ORDER))
    rows = [[f"{title}. {INVENTED}"], *table(list(order), records)]
    widths = {
        place: 44 if header in ("Limit", "Value", "Title", "Note") else 20
        for place, header in enumerate(order)
    }
    return Sheet(name, rows, widths=widths, bold=frozenset({1, 2}))
