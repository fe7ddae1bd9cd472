"""Reading text piece by piece: positions, words, numbers and units, and errors that name the column."""

from __future__ import annotations

import re
from collections.abc import Iterator
from contextlib import contextmanager
from functools import lru_cache
from typing import NoReturn

from specflow.errors import ExpressionError, UnitError
from specflow.model.expression import FUNCTIONS
from specflow.units import format_unit, parse_unit

MAX_LENGTH = 4000
MAX_DEPTH = 40

#: Characters read as a plainer one; one for one, so that columns stay those of the text as typed. The en dash is
#: kept apart: between two values it is a range, in front of one a minus sign.
_PLAINER = str.maketrans(
    {
        "\u00a0": " ",
        "\u2007": " ",
        "\u2009": " ",
        "\u202f": " ",
        "\t": " ",
        "\n": " ",
        "\r": " ",
        "\u2212": "-",
        "\u2010": "-",
        "\u2011": "-",
        "\ufe63": "-",
        "\uff0d": "-",
        "\u00d7": "*",
        "\u00f7": "/",
        "\u2044": "/",
        "\u2018": "'",
        "\u2019": "'",
        "\u201c": '"',
        "\u201d": '"',
    }
)

#: Words of the grammar: none of them is read as a unit after a number ("5 min" is a side, not five minutes).
_GRAMMAR_WORDS = (
    "min max minimum maximum or and to if in at of over with when where rounded test tolerance for by between "
    "worst mean per not else otherwise tbr tbd tbc ffs allow within whichever is from except none no about on than "
    "up down least more less linear log strict"
)
RESERVED = frozenset(_GRAMMAR_WORDS.split())

#: Words that begin a limit of several parts, with one that reads: no value is called like that.
SHAPES = {
    "cases": "cases(when frequency < 28 GHz: >= 45 dBm; otherwise: >= 46 dBm)",
    "looser": "looser(<= -36 dBm; <= -60 dBc)",
    "mask": "mask(offset[MHz], max dBm, in 1 MHz: 0..5: -5; 5..100: -13)",
    "stricter": "stricter(<= -36 dBm; <= -60 dBc)",
}

#: Words that may stand behind a number without being its unit.
_REMARKS = frozenset({"typ", "typical", "typically", "nom", "nominal"})
#: What is often written without a blank behind a unit: 20dBmin, 28VDC.
_SUFFIXES = ("minimum", "maximum", "min", "max", "typ")
#: "25 log θ"; in a mask "-20 log in 10 MHz" says how a segment runs.
_BARE_LOGARITHM = re.compile(r"(?:log10|log|lg|ln)(?!\w) *(?!in\b)(?=\w)", re.IGNORECASE)
_DIRECT_CURRENT = re.compile(r"(?:DC|dc|d\.c\.)(?!\w)")
_SUPERSCRIPTS = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁺⁻−", "0123456789+--")
#: Read from the text as typed: a factor written with * is arithmetic.
_TEN = r"(?:(?P<factor>\d+(?:\.\d+)?) *[x×·] *)"
_POWERS_OF_TEN = (
    re.compile(_TEN + r"10 *\^ *(?P<power>[-+−]?\d+)(?![\d.(])"),
    re.compile(_TEN + r"?10(?P<power>[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]+)"),
)

FUNCTION_NAMES = (*FUNCTIONS, "log")

_BLANKS = re.compile(r" *")
_NUMBER = re.compile(r"(?:\d+(?:\.(?!\.)\d*)?|\.\d+)(?:[eE][+-]?\d+)?")
_THOUSANDS_OF_BLANKS = re.compile(r"\d{1,3}(?: \d{3})+(?:\.\d+)?(?![\d.,])")
_THOUSANDS = re.compile(r"\d{1,3}(?:,\d{3})+\.\d+")
_THOUSANDS_OF_POINTS = re.compile(r"\d{1,3}(?:\.\d{3})+,\d+(?!\d)")
_COMMA = re.compile(r"\d+,\d+")
_NAME = re.compile(r"[^\W\d]\w*(?:\.[^\W\d]\w*)*")
_LETTERS = r"[A-Za-zµμΩΩ°%‰]+"
_UNIT_HEAD = re.compile(_LETTERS + r"[²³]?")
_UNIT_TAIL = re.compile(
    rf"(?:\s*/\s*|\s+per\s+)(?:\d+(?:\.\d+)?\s*)?(?:{_LETTERS}\d?[²³]?|\([^()]{{1,20}}\))|\s+(?:rms|RMS|p-p|pk-pk|peak)(?!\w)"
)
_CALL = re.compile(rf"(?:{'|'.join(FUNCTION_NAMES)}) *\(")


@lru_cache(maxsize=2048)
def canonical_unit(text: str) -> str | None:
    """Return the canonical spelling of a unit, None when it is none."""
    try:
        return format_unit(parse_unit(text))
    except UnitError:
        return None


class Reader:
    """A place in a text. A ``take`` method moves on and returns what it took, or leaves the place and says None."""

    def __init__(self, text: str) -> None:
        if len(text) > MAX_LENGTH:
            raise ExpressionError(
                f"the text has {len(text)} characters; at most {MAX_LENGTH} are read",
                where=f"column {MAX_LENGTH + 1}",
                hint="split it",
            )
        self.original = text
        self.text = text.translate(_PLAINER)
        self.place = 0
        self.depth = 0
        self.calls = 0
        self._skip()

    def _skip(self) -> None:
        match = _BLANKS.match(self.text, self.place)
        self.place = match.end() if match else self.place

    def done(self) -> bool:
        """True when nothing is left."""
        return self.place >= len(self.text)

    @property
    def rest(self) -> str:
        """The first characters of what is left, for messages."""
        rest = self.original[self.place :].strip()
        return rest if len(rest) <= 20 else rest[:20] + "..."

    @property
    def rest_of_text(self) -> str:
        """All that is left, plain characters."""
        return self.text[self.place :]

    def written_since(self, place: int) -> str:
        """Return what was read since a place, as typed."""
        return self.original[place : self.place].strip()

    def fail(self, message: str, *, hint: str = "", place: int | None = None) -> NoReturn:
        """Raise ExpressionError naming the column (counted from 1)."""
        raise self.error(message, hint=hint, place=place)

    def error(self, message: str, *, hint: str = "", place: int | None = None) -> ExpressionError:
        """Return the error that ``fail`` raises."""
        column = (self.place if place is None else place) + 1
        return ExpressionError(message, where=f"column {column}", hint=hint)

    @contextmanager
    def deeper(self) -> Iterator[None]:
        """Count one level of nesting; too many raise ExpressionError instead of exhausting the stack."""
        self.depth += 1
        if self.depth > MAX_DEPTH:
            self.fail(f"nested deeper than {MAX_DEPTH} levels", hint="name parts as declared values")
        try:
            yield
        finally:
            self.depth -= 1

    def sees(self, *symbols: str) -> bool:
        """True when one of the symbols is next."""
        return any(self.text.startswith(symbol, self.place) for symbol in symbols)

    def take(self, *symbols: str) -> str | None:
        """Take one of the symbols; the longest must be given first."""
        for symbol in symbols:
            if self.text.startswith(symbol, self.place):
                self.place += len(symbol)
                self._skip()
                return symbol
        return None

    def expect(self, symbol: str, after: str) -> None:
        """Take the symbol or fail."""
        if self.take(symbol) is None:
            found = f"found {self.rest!r}" if not self.done() else "the text ends"
            self.fail(f"expected {symbol!r} after {after}, but {found}")

    def match_words(self, phrase: str) -> int | None:
        """Return where the phrase ends when it is next as whole words, in any case; None otherwise."""
        pattern = _phrase(phrase)
        match = pattern.match(self.text, self.place)
        return match.end() if match else None

    def sees_words(self, *phrases: str) -> bool:
        """True when one of the phrases is next."""
        return any(self.match_words(phrase) is not None for phrase in phrases)

    def take_words(self, *phrases: str) -> str | None:
        """Take one of the phrases as whole words in any case; the longest must be given first."""
        for phrase in phrases:
            end = self.match_words(phrase)
            if end is not None:
                self.place = end
                self._skip()
                return phrase
        return None

    def take_pattern(self, pattern: re.Pattern[str]) -> str | None:
        """Take what the pattern matches here."""
        match = pattern.match(self.text, self.place)
        if match is None or match.end() == match.start():
            return None
        self.place = match.end()
        self._skip()
        return match.group()

    def take_name(self) -> str | None:
        """Take a name: a letter, then letters, digits, underscores; parts may be joined by dots."""
        return self.take_pattern(_NAME)

    def sees_call(self) -> bool:
        """True when a function and its opening parenthesis are next."""
        return _CALL.match(self.text, self.place) is not None

    def take_number(self) -> str | None:
        """Take an unsigned number and return it with a decimal point, digits as written.

        A comma between digits is a decimal comma where it can be nothing else; otherwise the reading is refused.
        """
        start = self.place
        for pattern in _POWERS_OF_TEN:
            if (power := pattern.match(self.original, start)) is not None:
                return self._power_of_ten(power)
        spaced = None if self.calls else self.take_pattern(_THOUSANDS_OF_BLANKS)
        if spaced is not None:
            return spaced.replace(" ", "")
        thousands = self.take_pattern(_THOUSANDS)
        if thousands is not None:
            return thousands.replace(",", "")
        pointed = None if self.calls else self.take_pattern(_THOUSANDS_OF_POINTS)
        if pointed is not None:
            return pointed.replace(".", "").replace(",", ".")
        comma = _COMMA.match(self.text, start)
        if comma is not None:
            return self._decimal_comma(comma)
        number = self.take_pattern(_NUMBER)
        if number is None:
            return None
        if not float(number) < float("inf"):
            self.fail(f"{number} is too large", place=start)
        if number.startswith("."):
            number = "0" + number
        return number.rstrip(".") if number.endswith(".") else number

    def _power_of_ten(self, match: re.Match[str]) -> str:
        """Take 2 x 10^-6 or 10⁻⁶ as the number 2e-6 or 1e-6."""
        self.place = match.end()
        self._skip()
        return f"{match['factor'] or '1'}e{match['power'].translate(_SUPERSCRIPTS)}"

    def _decimal_comma(self, match: re.Match[str]) -> str:
        whole, fraction = match.group().split(",")
        point = f"{whole}.{fraction}"
        if self.calls:
            self.fail(
                f"{match.group()} may be two values or {point}",
                hint=f"write '{whole}, {fraction}' or '{point}'",
                place=match.start() + len(whole),
            )
        if len(fraction) == 3 and whole != "0" and len(whole) <= 3:
            self.fail(
                f"{match.group()} may be {point} or {whole}{fraction}",
                hint="write a decimal point, and no separator of thousands",
                place=match.start() + len(whole),
            )
        self.place = match.end()
        self._skip()
        return point

    def take_unit(self) -> str | None:
        """Take the longest unit that is next and return its canonical spelling; None when a word or sign follows.

        A word that is neither a unit nor part of the grammar fails, with the nearest units.
        """
        if self.take_words("plain") is not None:
            return "1"
        head = _UNIT_HEAD.match(self.text, self.place)
        if head is None or head.group().lower() in RESERVED or self.sees_call():
            return None
        for end in self._unit_ends(head.end()):
            unit = canonical_unit(self.text[self.place : end].strip())
            if unit is not None:
                return self._after_unit(unit, end)
        return self._take_grown_together(head.group())

    def _after_unit(self, unit: str, end: int) -> str:
        """Move on behind a unit; the DC of volts and amperes is no part of it (28 V DC)."""
        self.place = end
        self._skip()
        if unit.endswith(("V", "A")):
            self.take_pattern(_DIRECT_CURRENT)
        return unit

    def _take_grown_together(self, word: str) -> str | None:
        """Take the unit off a word such as dBmin or VDC, and leave min, max or typ to be read next."""
        for ending in _SUFFIXES:
            stem = word.removesuffix(ending)
            if stem not in ("", word) and (unit := canonical_unit(stem)) is not None:
                self.place += len(stem)
                return unit
        stem = word.removesuffix("DC").removesuffix("dc")
        if stem.endswith(("V", "A")) and stem != word and (unit := canonical_unit(stem)) is not None:
            return self._after_unit(unit, self.place + len(word))
        return None

    def _unit_ends(self, end: int) -> list[int]:
        ends = [end]
        while (match := _UNIT_TAIL.match(self.text, ends[-1])) is not None and len(ends) < 6:
            ends.append(match.end())
        follows = re.compile(r"[\w]")
        return [end for end in reversed(ends) if not follows.match(self.text, end)]

    def refuse_unknown_unit(self) -> None:
        """Fail when a word that is no unit and no part of the grammar follows a number."""
        if _BARE_LOGARITHM.match(self.text, self.place) is not None:
            self.fail(
                "a logarithm needs its argument in parentheses",
                hint="write it as in '(29 - 25 * log10(theta)) dBi max'; log10 is to base 10, ln to base e",
            )
        name = _NAME.match(self.text, self.place)
        if name is None or name.group().lower() in RESERVED | _REMARKS or self.sees_call():
            return
        word = name.group()
        try:
            parse_unit(word)
        except UnitError as error:
            self.fail(
                f"{word!r} is not a unit: {error.message}", hint=error.hint or f"for a product write *{word}"
            )


@lru_cache(maxsize=256)
def _phrase(phrase: str) -> re.Pattern[str]:
    words = [re.escape(word) for word in phrase.split(" ")]
    return re.compile(" +".join(words) + r"(?![\w])", re.IGNORECASE)
