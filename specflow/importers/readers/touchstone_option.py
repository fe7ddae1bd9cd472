"""The option line ``# GHz S MA R 50``: every word in any order, R and its values last when there are several."""

from __future__ import annotations

from dataclasses import dataclass

from specflow.importers.readers.touchstone_lines import OptionText
from specflow.importers.readers.touchstone_network import HERTZ, PairFormat, refusal

#: Units that files with another x axis have in the place of a frequency's: the axis is then a doubt.
OTHER_UNITS = {"dbm": "dBm", "dbw": "dBW", "v": "V", "degc": "°C"}
_UNITS = {unit.casefold(): unit for unit in HERTZ} | OTHER_UNITS
_FORMATS = {one.value.casefold(): one for one in PairFormat}
_OHM = ("ohm", "ohms", "ω")  # both signs of ohm fold to the small letter
_PARAMETERS = ("s", "y", "z", "g", "h")


@dataclass(frozen=True, slots=True)
class Option:
    """What the option line says; ``reference`` is empty where it names none (50 ohm by default)."""

    line: int
    unit: str
    parameter: str
    pair_format: PairFormat
    reference: tuple[float, ...]


def read_option(option: OptionText, name: str) -> Option:
    """Read an option line; what it leaves out has the default of the format (GHz S MA).

    Raises FileError for a word that is no option, and for one that is said twice.
    """
    said: dict[str, str] = {}
    words = option.text.split()
    reference: tuple[float, ...] = ()
    for place, word in enumerate(words):
        key = word.casefold()
        if key == "r":
            reference, rest = _reference(words[place + 1 :], option, name)
            for later in rest:
                _take(said, later, option, name)
            break
        _take(said, word, option, name)
    return Option(
        option.line,
        _UNITS[said.get("unit", "ghz")],
        said.get("parameter", "s").upper(),
        _FORMATS[said.get("format", "ma")],
        reference,
    )


def _take(said: dict[str, str], word: str, option: OptionText, name: str) -> None:
    key = word.casefold()
    kind = (
        "unit"
        if key in _UNITS
        else "format"
        if key in _FORMATS
        else "parameter"
        if key in _PARAMETERS
        else ""
    )
    known = "known are Hz kHz MHz GHz THz, S Y Z G H, DB MA RI and R with its ohms"
    if not kind:
        raise refusal(name, option.line, f"{word!r} is no option of the option line", known)
    if kind in said and said[kind] != key:
        raise refusal(
            name, option.line, f"the option line says {said[kind].upper()} and {word.upper()}", known
        )
    said[kind] = key


def _reference(words: list[str], option: OptionText, name: str) -> tuple[tuple[float, ...], list[str]]:
    """The ohms after R, and the words that follow them."""
    ohms: list[float] = []
    for word in words:
        try:
            ohms.append(float(word))
        except ValueError:
            break
    if not ohms or not all(0 < ohm < 1e9 for ohm in ohms):
        raise refusal(
            name, option.line, "R has no positive number of ohms after it", "write R 50, or leave R out"
        )
    rest = words[len(ohms) :]
    return tuple(ohms), rest[1:] if rest and rest[0].casefold() in _OHM else rest
