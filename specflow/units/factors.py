"""The text of a unit taken apart into its factors: names with exponents, and numbers as in "dBm/40 kHz"."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from fractions import Fraction

from specflow.errors import UnitError

_TOKEN = re.compile(
    r"\s*(?:(?P<number>\d+(?:\.\d+)?(?:[eE][+-]?\d{1,2})?)"
    r"|(?P<name>[^\W\d_]+|[%‰°Δ][^\W\d_]*)"
    r"|(?P<power>\^\s*-?\d+|\^\s*\(\s*-?\d+(?:/\d+)?\s*\)|-\d+)"
    r"|(?P<sign>[*/()√]))"
)


@dataclass(frozen=True, slots=True)
class Factor:
    """One factor of a unit: ``(coefficient · name) ** exponent``; a bare number has no name."""

    name: str
    exponent: Fraction = Fraction(1)
    coefficient: Fraction = Fraction(1)


def factorise(text: str) -> list[Factor]:
    """Take "mW/(cm*cm)" or "W*m-2*MHz-1" apart; a solidus puts one factor, or one bracket, below the line.

    "mW/cm*cm" is how sheets write mW/cm²: nobody multiplies by what was just divided by. "V/m*s" has two readings and
    is refused. Raises UnitError, too, when the text is not a product or quotient of names.
    """
    tokens = _tokens(text)
    factors, end = _product(tokens, 0, text)
    if end != len(tokens):
        raise UnitError(f"unit '{text}' cannot be read: a bracket does not close")
    return factors


def _tokens(text: str) -> list[tuple[str, str]]:
    tokens, place = [], 0
    while place < len(text):
        match = _TOKEN.match(text, place)
        if match is None or match.end() == place:
            raise UnitError(f"unit '{text}' cannot be read from '{text[place:].strip()}' on")
        kind = match.lastgroup or ""
        tokens.append((kind, match[kind]))
        place = match.end()
    return tokens


def _product(tokens: list[tuple[str, str]], place: int, text: str) -> tuple[list[Factor], int]:
    """Factors up to the closing bracket or the end."""
    factors: list[Factor] = []
    below: list[Factor] = []
    sign = 1
    while True:
        new, place = _factor(tokens, place, text)
        if sign == -1:
            below = new
        elif below and new == below:
            sign = -1
        elif below:
            raise UnitError(
                f"unit '{text}' has more than one meaning",
                hint="what follows the solidus may be divided by or multiplied with: write a/(b*c), or a*c/b",
            )
        factors += [replace(factor, exponent=factor.exponent * sign) for factor in new]
        if place >= len(tokens) or tokens[place][1] == ")":
            return factors, place
        if tokens[place][1] not in ("*", "/"):
            raise UnitError(f"unit '{text}' cannot be read: '{tokens[place][1]}' stands in the wrong place")
        sign = -1 if tokens[place][1] == "/" else 1
        place += 1


def _factor(tokens: list[tuple[str, str]], place: int, text: str) -> tuple[list[Factor], int]:
    """One factor, or one bracket, with its exponent."""
    root = place < len(tokens) and tokens[place][1] == "√"
    place += root
    factors, place = _bracket_or_name(tokens, place, text)
    exponent, place = _exponent(tokens, place)
    exponent = exponent / 2 if root else exponent
    return [replace(factor, exponent=factor.exponent * exponent) for factor in factors], place


def _bracket_or_name(tokens: list[tuple[str, str]], place: int, text: str) -> tuple[list[Factor], int]:
    kind, word = tokens[place] if place < len(tokens) else ("", "")
    if word == "(":
        factors, place = _product(tokens, place + 1, text)
        if place >= len(tokens):
            raise UnitError(f"unit '{text}' cannot be read: a bracket does not close")
        return factors, place + 1
    if kind == "name":
        return [Factor(word)], place + 1
    if kind == "number":
        follows = tokens[place + 1] if place + 1 < len(tokens) else ("", "")
        if follows[0] == "name":
            return [Factor(follows[1], coefficient=Fraction(word))], place + 2
        return [Factor("", coefficient=Fraction(word))], place + 1
    before = f" before '{word}'" if word else ""
    raise UnitError(f"unit '{text}' cannot be read: a unit is missing{before}")


def _exponent(tokens: list[tuple[str, str]], place: int) -> tuple[Fraction, int]:
    if place >= len(tokens):
        return Fraction(1), place
    kind, word = tokens[place]
    if kind == "power":
        return Fraction(word.strip("^() ").replace(" ", "")), place + 1
    if kind == "number" and word.isdigit() and len(word) == 1:  # m2, cm2: what is left of m² and cm²
        return Fraction(word), place + 1
    return Fraction(1), place
