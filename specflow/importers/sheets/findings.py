"""What loading a workbook may report, by rule: the text behind the catalogue of findings."""

from __future__ import annotations

#: Rule → what it means. Errors keep the row (or sheet) out; the rest only inform.
WORKBOOK_FINDINGS: dict[str, str] = {
    "workbook-cell": "A cell cannot be read, or says something that the document cannot hold.",
    "workbook-cycle": "Blocks, items or requirements go round in a circle.",
    "workbook-decimal-id": "An id is a decimal number in the sheet, and may have lost a zero.",
    "workbook-default-taken": "Something was not stated, and the only possible value was taken.",
    "workbook-doubled-column": "Two columns of a sheet have headers that say the same.",
    "workbook-duplicate-id": "An id is given twice; ids are compared without case.",
    "workbook-hidden-column": "A hidden column was read.",
    "workbook-hidden-row": "A hidden row was not read.",
    "workbook-hidden-sheet": "A hidden sheet was not read.",
    "workbook-left-out": "A row is left out because something it refers to was refused.",
    "workbook-limit-varies": "A limit differs by a condition of which its conditions set requires no values.",
    "workbook-merged-cells": "Merged cells do not say which rows and columns their value belongs to.",
    "workbook-missing-column": "A sheet lacks a header without which it cannot be read.",
    "workbook-no-bandwidth": "A density, noise or emission limit has no reference bandwidth.",
    "workbook-unit-conflict": "A limit has a unit of its own, and the unit column says another.",
    "workbook-no-unit": "A limit has no unit; the parameter's own is not taken by guess.",
    "workbook-nothing-to-load": "The workbook holds no row to load.",
    "workbook-plans-differ": "The methods in a requirement's row and on the sheet Activities differ.",
    "workbook-reading": "What was done to read a sheet (decimal mark, delimiter).",
    "workbook-replaces-parameter": "A parameter of the project replaces one of the built-in dictionary.",
    "workbook-row-gone": "Rows of an earlier state of the workbook are not in it any more; nothing is removed unasked.",
    "workbook-sheet-by-headers": "A sheet of an unknown name was read by its headers.",
    "workbook-sign": "A limit has the sign that its parameter does not have here.",
    "workbook-uncertainty-without-k": "An expanded uncertainty has no coverage factor.",
    "workbook-unit-kind": "The unit of a limit is of another kind than its parameter's.",
    "workbook-unknown-column": "A column is not known and was not read.",
    "workbook-unknown-input": "A limit or a condition map refers to a name that is neither declared nor a condition.",
    "workbook-unknown-parameter": "The dictionary does not know a parameter, or knows several of that name.",
    "workbook-unknown-reference": "An id refers to nothing in the workbook or the project.",
    "workbook-unknown-sheet": "A sheet is not known and was not read.",
    "workbook-unknown-word": "A plane or statistic is new to block and parameter.",
    "workbook-waives-nothing": "A waiver permits no more than the requirement does.",
}
