"""Which quantity a header names: parameter, plane, statistic, polarisation; or what is unclear about it."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass, field, replace

from specflow.conditions import find_dimension
from specflow.importers.measured.header_text import HeaderText, known_unit
from specflow.model.parameter import Parameter
from specflow.parameters import Candidate, Dictionary, suits
from specflow.parameters.headers import tokens
from specflow.units import Kind

_POLARISATION = re.compile(
    r"(?<![A-Za-z])(?:(?P<a>[VH]|RHCP?|LHCP?|vertical|horizontal)[\s\-]*pol(?:ari[sz]ation|\.)?|"
    r"pol(?:ari[sz]ation|\.)?[\s\-]*(?P<b>[VH]|RHCP?|LHCP?)|(?P<c>[VH]pol|RHCP|LHCP))(?![A-Za-z])",
    re.IGNORECASE,
)
_POLARISATIONS = {
    "v": "V", "h": "H", "vertical": "V", "horizontal": "H", "vpol": "V", "hpol": "H",
    "rhc": "RHCP", "rhcp": "RHCP", "lhc": "LHCP", "lhcp": "LHCP",
}  # fmt: skip
_AT_PLANE = re.compile(r"^(?P<name>.*\S)\s+(?:at|referred to)\s+(?:the\s+)?(?P<place>\S.*)$", re.IGNORECASE)
_AMOUNT = re.compile(r"[+\-−]?[0-9][0-9.,]*|(?<!\w)_(?!\w)")
_SCATTERING = re.compile(r"(?<![A-Za-z0-9])\|?S[0-9]{2}\|?(?![A-Za-z0-9])", re.IGNORECASE)
_NOT_A_READING = {
    "min": "the smallest of several readings, or a limit",
    "minimum": "the smallest of several readings, or a limit",
    "max": "the greatest of several readings, or a limit",
    "maximum": "the greatest of several readings, or a limit",
    "typ": "a typical value, which is no reading of an item",
    "typical": "a typical value, which is no reading of an item",
    "nom": "a nominal value, which is no reading of an item",
    "nominal": "a nominal value, which is no reading of an item",
    "mean": "a mean, of power or of dB, or of the readings of several items",
    "avg": "a mean, of power or of dB, or of the readings of several items",
    "average": "a mean, of power or of dB, or of the readings of several items",
    "averaged": "a mean, of power or of dB, or of the readings of several items",
    "simulated": "a simulation, which is another method than the rest of the table may have",
    "sim": "a simulation, which is another method than the rest of the table may have",
    "std": "a standard deviation",
}


@dataclass(frozen=True, slots=True)
class NamedQuantity:
    """What a header names. ``doubt`` is the sentence that says why it may not be read so, with its ``remedy``."""

    candidates: tuple[Candidate, ...] = ()
    plane: str = ""
    statistic: str = ""
    polarisation: str = ""
    doubt: str = ""
    remedy: str = ""
    notes: tuple[str, ...] = field(default=())

    @property
    def parameter(self) -> Parameter | None:
        """The parameter when there is exactly one."""
        return self.candidates[0].parameter if len(self.candidates) == 1 else None


def name_quantity(
    parts: HeaderText, unit: str, dictionary: Dictionary, planes: Iterable[str]
) -> NamedQuantity:
    """Return what a header names; ``planes`` are the named ports of blocks, beside those of the dictionary."""
    name, polarisation = _without_polarisation(parts.name)
    bracketed = [_without_polarisation(one) for one in parts.bracketed]
    polarisation = polarisation or next((one for _, one in bracketed if one), "")
    extra = [words for words, _ in bracketed if words]
    place = parts.place
    found = _match(dictionary, " ".join([name, *extra]), unit)
    if found:
        extra = []
    else:
        found = _match(dictionary, name, unit)
    if not found and (at := _AT_PLANE.match(name)):
        found, place = _match(dictionary, at["name"], unit), at["place"]
    if not found:
        return NamedQuantity(polarisation=polarisation)
    first = found[0]
    statistic = first.statistic or _said_statistic(name, first.parameter)
    named = NamedQuantity(tuple(found), plane=first.plane, statistic=statistic, polarisation=polarisation)
    return _doubted(_placed(named, [place, *extra], planes), first, parts, unit, dictionary)


def bare_word(parts: HeaderText) -> str:
    """What a header like "Min (dB)", which names no quantity, may mean; "" for any other."""
    return _NOT_A_READING.get(parts.name.casefold().strip(" ."), "")


def density_of(parameter: Parameter, unit: str, dictionary: Dictionary) -> Parameter | None:
    """Return the parameter of the same quantity per bandwidth, where the unit is a density and there is one."""
    spelled = known_unit(unit)
    if spelled is None or spelled.kind is not Kind.LEVEL_DENSITY:
        return None
    density = dictionary.get(f"{parameter.key}_density")
    return density if density is not None and suits(density, unit) else None


def _said_statistic(name: str, parameter: Parameter) -> str:
    """The statistic that a name says although it is part of an alias: "EVM rms"."""
    words = set(tokens(name))
    return next(
        (one for one in ("rms", "peak", "median") if one in words and one in parameter.statistics), ""
    )


def _match(dictionary: Dictionary, name: str, unit: str) -> list[Candidate]:
    return dictionary.match(name, unit=unit) if name.strip() else []


def _without_polarisation(text: str) -> tuple[str, str]:
    found = _POLARISATION.search(text)
    if found is None:
        return text, ""
    word = next(group for group in found.groups() if group).casefold()
    rest = text[: found.start()] + " " + text[found.end() :]
    return " ".join(rest.split()).strip(" ,;:-"), _POLARISATIONS[word]


def _placed(named: NamedQuantity, places: list[str], planes: Iterable[str]) -> NamedQuantity:
    """Take what stands behind "@" or in brackets as a plane, where it is one that is known."""
    known = {plane.casefold(): plane for plane in planes}
    for candidate in named.candidates:
        known |= {plane.casefold(): plane for plane in candidate.parameter.planes}
    for place in filter(None, places):
        plane = known.get(place.casefold())
        if plane is None:
            return replace(named, doubt=_unknown_place(place), remedy=_place_remedy(place, known.values()))
        named = replace(named, plane=plane)
    return named


def _condition_in(place: str) -> str:
    """The dimension that a place names ("28 GHz", "baseplate temperature -20"), "" if it is none."""
    found = _AMOUNT.search(place)
    dimension = find_dimension((place[: found.start()] if found else place).strip(" =:"))
    if dimension is not None and dimension.unit:  # a port 2 may be a plane
        return dimension.name
    if found is None or found.start() > 0:
        return ""
    return "frequency" if "hz" in place.casefold() else "DIMENSION"


def _unknown_place(place: str) -> str:
    if _condition_in(place):
        return f"{place!r} is a condition in the header"
    return f"{place!r} is no plane that is known"


def _place_remedy(place: str, known: Iterable[str]) -> str:
    dimension = _condition_in(place)
    if not dimension:
        return f"name the plane in the mapping (known: {', '.join(sorted(known)) or 'none'})"
    if not re.search(r"[0-9_]", place):
        return "give the condition a column of its own"
    at = "@ " if _AMOUNT.match(place) else ""
    pattern = _AMOUNT.sub("{" + dimension + "}", place, count=1)
    return (
        f'let a mapping read it from the headers, [table.pivot] header = "... {at}{pattern} ..."; '
        "or give the condition a column of its own"
    )


def _doubted(
    named: NamedQuantity, first: Candidate, parts: HeaderText, unit: str, dictionary: Dictionary
) -> NamedQuantity:
    if named.doubt:
        return named
    for word in first.leftover:
        if word in _NOT_A_READING and not named.statistic:
            return replace(
                named,
                doubt=f"{word!r} may mean {_NOT_A_READING[word]}",
                remedy='settle it in the mapping: name the parameter and its statistic, or role = "not read"',
            )
    spelled = known_unit(unit) if unit else None
    linear = spelled is not None and not spelled.is_log and spelled.kind is Kind.RATIO
    if linear and first.parameter.log_factor == 10 and _SCATTERING.search(parts.text):
        return replace(
            named,
            doubt=f"a linear {parts.name} is an amplitude ratio; {first.parameter.title} is a ratio of powers",
            remedy="export it in dB, or settle the parameter in the mapping",
        )
    return named
