"""The dictionary of parameters: loaded from data, extended per project, searched by what sheets call things."""

from __future__ import annotations

import json
from collections import defaultdict
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cache, cached_property
from pathlib import Path

from specflow.errors import ParameterError, UnitError
from specflow.model.base import code_key
from specflow.model.parameter import Parameter
from specflow.parameters.headers import (
    Header,
    qualifier_choices,
    spelling_key,
    split_header,
    tokens,
)

_DATA = Path(__file__).with_name("dictionary.json")
_STATISTIC_WORDS = {
    "rms": "rms",
    "pk": "peak",
    "peak": "peak",
    "median": "median",
    "worst": "worst",
    "mean": "mean",
    "avg": "mean",
    "average": "mean",
    "averaged": "mean",
    "pp": "peak-to-peak",
    "std": "standard deviation",
}

_WHERE_LISTED = (
    "the template of 'specflow init' lists the dictionary on its first sheet; "
    "or add a parameter to the project, on the sheet Parameters"
)


@dataclass(frozen=True, slots=True)
class Candidate:
    """A parameter that a header may name, and why.

    ``unit`` is the unit as the header writes it ("" without one). ``leftover`` are words of the header that do not
    name the parameter (max, tx, measured); ``statistic`` is the statistic of the parameter that one of them says. An
    average of a level says none, because it may be one of power or one of dB. ``plane`` is a plane of the parameter
    that stands in brackets ("spurious (TRP)"), or the sideband convention in a name ("NF DSB").
    """

    parameter: Parameter
    reason: str
    unit: str = ""
    statistic: str = ""
    plane: str = ""
    leftover: tuple[str, ...] = ()


_MOST_KEPT = 4096
#: How a mixer's noise figure counts its image. Conventions are planes: only like is compared with like.
SIDEBAND_PLANES = ("SSB", "DSB")
_PORT_WORDS = {"INPUT": "input", "IRL": "input", "OUTPUT": "output", "ORL": "output", "S22": "port 2"}


@dataclass(frozen=True)
class Dictionary:
    """All parameters known to a project, by code key."""

    by_key: Mapping[str, Parameter]

    @property
    def all(self) -> tuple[Parameter, ...]:
        """All parameters, in the order of the data file, those of the project last."""
        return tuple(self.by_key.values())

    def get(self, key: str) -> Parameter | None:
        """Return the parameter of a key (case does not matter), or None."""
        return self.by_key.get(code_key(key))

    def match(self, header: str, *, unit: str = "") -> list[Candidate]:
        """Return the parameters that a header names: none, one, or several when it is ambiguous.

        Key, title and aliases are compared by their words. A unit in the header, words that only qualify (rms, max,
        measured) and what stands before a colon are left out where the rest names a parameter. ``unit`` is that of a
        units row, where the header has none. The unit chooses among parameters of one name and unlike kinds ("gain"
        in dB and in dBi); it never turns the only reading down.
        """
        known = self._matched.get((header, unit))
        if known is None:
            if len(self._matched) >= _MOST_KEPT:
                self._matched.clear()
            known = self._matched[header, unit] = tuple(self._match(header, unit))
        return list(known)

    @cached_property
    def _matched(self) -> dict[tuple[str, str], tuple[Candidate, ...]]:
        """Headers that were matched before: two hundred sheets have the same few."""
        return {}

    def _match(self, header: str, unit: str) -> Sequence[Candidate]:
        parts = split_header(header)
        if unit and not parts.unit:
            parts = replace(parts, unit=unit, every=(*parts.every, *tokens(unit)))
        found = next(filter(None, self._readings(parts)), [])
        if not found and ":" in header:
            before, _, after = header.rpartition(":")
            found = [
                replace(one, leftover=(*tokens(before), *one.leftover))
                for one in self.match(after, unit=unit)
            ]
        return _fitting(found, parts.unit) or found

    def parameter_for_title(self, title: str) -> Parameter | None:
        """Return the one parameter that a title names, or None when it names none or several."""
        found = self.match(title)
        return found[0].parameter if len(found) == 1 else None

    def resolve(self, text: str, *, unit: str = "") -> Parameter:
        """Return the one parameter that a text names; ParameterError when it names none or several."""
        found = self.match(text, unit=unit)
        if len(found) == 1:
            return found[0].parameter
        if found:
            keys = ", ".join(one.parameter.key for one in found)
            raise ParameterError(f"{text!r} may be any of {keys}", hint="write the one that is meant")
        near = ", ".join(parameter.key for parameter in self.suggest(text))
        hint = f"did you mean {near}?" if near else _WHERE_LISTED
        raise ParameterError(f"{text!r} is no known parameter", hint=hint)

    def suggest(self, text: str, *, most: int = 3) -> list[Parameter]:
        """Return parameters whose spelling is near, or of which an alias stands within the text; the nearest first."""
        from difflib import get_close_matches  # only an unknown name pays for it

        parts = split_header(text)
        word = spelling_key(parts.words)
        within = sorted(
            (key for key in self._index if len(key) > 2 and _stands_in(key, parts)), key=len, reverse=True
        )
        near = get_close_matches(word, self._index, n=most * 3, cutoff=0.7)
        found = {parameter.key: parameter for key in [*within, *near] for parameter, _ in self._index[key]}
        return list(found.values())[:most]

    @cached_property
    def _index(self) -> Mapping[str, Sequence[tuple[Parameter, str]]]:
        """Spelling key → the parameters it may name, each with the reason."""
        index: dict[str, dict[str, tuple[Parameter, str]]] = defaultdict(dict)
        for parameter in self.all:
            names = [(parameter.key, "key"), (parameter.title, "title")]
            names += [(alias, "alias") for alias in parameter.aliases]
            for name, what in names:
                reason = f"{what} {name!r} of {parameter.key}"
                index[spelling_key(tokens(name))].setdefault(parameter.key, (parameter, reason))
        return {key: tuple(named.values()) for key, named in index.items()}

    def _readings(self, header: Header) -> Iterator[list[Candidate]]:
        """Yield the candidates of each way to read a header, the most literal first."""
        for words in (header.every, (*header.words, *header.bracketed)):
            for kept, left_out in qualifier_choices(words):
                yield [
                    replace(_candidate(*named, header.unit, left_out), plane=_plane_said(named[0], kept))
                    for named in self._named(kept)
                ]
        plane = spelling_key(header.bracketed)
        for kept, left_out in qualifier_choices(header.words) if plane else ():
            for parameter, reason in self._named(kept):
                for one in parameter.planes:
                    if spelling_key(tokens(one)) == plane:
                        yield [replace(_candidate(parameter, reason, header.unit, left_out), plane=one)]

    def _named(self, words: Sequence[str]) -> Sequence[tuple[Parameter, str]]:
        return self._index.get(spelling_key(words), ())


@cache
def _shipped() -> Mapping[str, Parameter]:
    with _DATA.open(encoding="utf-8") as stream:
        parameters = (Parameter.model_validate(entry) for entry in json.load(stream))
        return {code_key(parameter.key): parameter for parameter in parameters}


def load_dictionary(extra: Sequence[Parameter] = ()) -> Dictionary:
    """Return the dictionary shipped with the program, with the parameters of a project.

    A parameter of the project replaces the shipped one of the same key; an alias that two parameters claim is
    ambiguous and names both.
    """
    return Dictionary({**_shipped(), **{code_key(parameter.key): parameter for parameter in extra}})


def suits(parameter: Parameter, unit: str) -> bool:
    """Say whether values in ``unit`` can be of this parameter, given a bandwidth where it needs one."""
    from specflow.units import Spectrum, converter, parse_unit  # arrays are not needed to load the dictionary

    try:
        converter(
            parse_unit(unit),
            parse_unit(parameter.unit),
            log_factor=parameter.log_factor,
            bandwidth_hz=1.0 if parameter.needs_bandwidth else None,
            spectrum=Spectrum.NOISE_LIKE,
        )
    except UnitError:
        return False
    return True


def _fitting(found: Sequence[Candidate], unit: str) -> list[Candidate]:
    if not unit or len(found) < 2:
        return list(found)
    return [one for one in found if suits(one.parameter, unit)]


def _candidate(parameter: Parameter, reason: str, unit: str, left_out: tuple[str, ...]) -> Candidate:
    said = [_STATISTIC_WORDS.get(word, "") for word in (*left_out, *tokens(unit))]
    statistic = next((one for one in said if one in parameter.statistics), "")
    if left_out:
        reason += f", leaving out {' '.join(left_out)!r}"
    return Candidate(parameter, reason, unit, statistic, leftover=left_out)


def _plane_said(parameter: Parameter, words: Sequence[str]) -> str:
    """Return the plane that a name says within an alias: a sideband convention ("NF DSB", 3 dB hang on it), or the
    port of a match ("Output return loss" and "S22" say nothing of the input).
    """
    said = {word.upper() for word in words}
    sideband = next((one for one in SIDEBAND_PLANES if one in said and one in parameter.planes), "")
    ports = (
        {_PORT_WORDS[word] for word in said if word in _PORT_WORDS} if "port" in parameter.planes else set()
    )
    return sideband or (ports.pop() if len(ports) == 1 else "")


def _stands_in(key: str, header: Header) -> bool:
    """Say whether an alias is a run of whole words of the header."""
    words = header.every
    stops = range(1, len(words) + 1)
    return any(spelling_key(words[start:stop]) == key for stop in stops for start in range(stop))
