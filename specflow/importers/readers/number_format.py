"""What a number format says about the number beside it: percent, date, scaling, a unit.

Format codes are those of SpreadsheetML (ECMA-376 part 1, 18.8.30 numFmts and 18.8.31 numFmt): sections parted by
``;``, text in quotes or after a backslash, ``_x`` a gap, ``*x`` a fill, ``[...]`` colours, conditions, locales.
"""

from __future__ import annotations

import re

from specflow.importers.readers.odd_cells import OddCell, OddKind

BUILT_IN = {
    0: "General", 1: "0", 2: "0.00", 3: "#,##0", 4: "#,##0.00", 9: "0%", 10: "0.00%", 11: "0.00E+00", 12: "# ?/?",
    13: "# ??/??", 14: "mm-dd-yy", 15: "d-mmm-yy", 16: "d-mmm", 17: "mmm-yy", 18: "h:mm AM/PM", 19: "h:mm:ss AM/PM",
    20: "h:mm", 21: "h:mm:ss", 22: "m/d/yy h:mm", 37: "#,##0 ;(#,##0)", 38: "#,##0 ;[Red](#,##0)",
    39: "#,##0.00;(#,##0.00)", 40: "#,##0.00;[Red](#,##0.00)", 45: "mm:ss", 46: "[h]:mm:ss", 47: "mmss.0",
    48: "##0.0E+0", 49: "@",
}  # fmt: skip
"""Formats that files name by number only (ECMA-376 part 1, 18.8.30)."""

LOCAL_CURRENCY = frozenset({5, 6, 7, 8, 41, 42, 43, 44})
"""Numbers that the program shows with the currency, or its alignment, of the place it runs at."""

LOCAL_DATES = frozenset({*range(27, 37), *range(50, 59)})
"""Numbers that are dates in East Asian locales."""

_TOKEN = re.compile(
    r'"(?P<quoted>[^"]*)"?|\\(?P<escaped>.)|[_*].|\[(?P<bracket>[^\]]*)\]?|(?P<general>General)|(?P<plain>.)',
    re.IGNORECASE | re.DOTALL,
)
_NUMBER_HERE = "\0"
_DATE_LETTERS = frozenset("ymdhsYMDHS")
_DIGITS = frozenset("0#?")


def odd_format(number: int, code: str | None) -> OddCell | None:
    """The oddity of cells in this format, or None: a plain number is shown as it is.

    ``code`` is the code that the file declares for ``number``; None takes the built-in one.
    """
    if code is None:
        if number in LOCAL_CURRENCY:
            return OddCell(OddKind.UNIT_FORMAT, f"built-in format {number}", "currency")
        if number in LOCAL_DATES:
            return OddCell(OddKind.DATE, f"built-in format {number}")
        code = BUILT_IN.get(number, "General")
    return _classify(code)


def _classify(code: str) -> OddCell | None:
    literal, bare, general = _split(code)
    if "%" in bare:
        return OddCell(OddKind.PERCENT, code, literal)
    if not general and _DATE_LETTERS & set(bare.replace("E+", "").replace("E-", "")):
        return OddCell(OddKind.DATE, code)
    if re.search(r"[0#?],+(?![0#?,])", bare):
        return OddCell(OddKind.SCALED, code, literal)
    if literal and (general or _DIGITS & set(bare)):
        return OddCell(OddKind.UNIT_FORMAT, code, literal)
    return None


def _split(code: str) -> tuple[str, str, bool]:
    """The first section of a code: the text shown beside the number (that after it, else that before it), the bare
    format signs, and whether General is named."""
    literal, bare, general = [], [], False
    for token in _TOKEN.finditer(code):
        kind, text = token.lastgroup, token[token.lastgroup] if token.lastgroup else ""
        if kind == "plain" and text == ";":
            break
        if kind == "general" or (kind == "plain" and text in _DIGITS):
            literal.append(_NUMBER_HERE)
        if kind == "general":
            general = True
        elif kind == "bracket":
            literal.append(_currency(text))
            bare.append(text if re.fullmatch(r"h+|m+|s+", text, re.IGNORECASE) else "")
        elif kind == "plain" and (text.isascii() and text not in "$()"):
            bare.append(text)
        elif kind in ("quoted", "escaped", "plain"):
            literal.append(text)
    before, _, after = "".join(literal).partition(_NUMBER_HERE)
    shown = _trim(after.replace(_NUMBER_HERE, "")) or _trim(before)
    return shown, "".join(bare), general


def _trim(text: str) -> str:
    return text.replace("\u00a0", " ").strip(" ()-+")


def _currency(bracket: str) -> str:
    """``$€-407`` shows €; other brackets (colours, conditions, locales) show nothing."""
    return bracket[1:].split("-")[0] if bracket.startswith("$") else ""
