"""One row of a table of published limits, and its limit in the words of the grammar."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cached_property

from specflow.importers.published_conditions import (
    PublishedCondition,
    WrittenCondition,
    parse_condition_value,
    split_conditions,
)

#: Conditions that say how to read the row; they go into the limit and are no conditions of a measurement.
_READING = frozenset({"strict", "value_kind", "rule", "between", "asymmetric"})
_BOUNDS = {"max": ("<=", "<"), "min": (">=", ">")}
_PERCENTILE = re.compile(
    r"(?P<of>\w+) at (?P<percent>\d+)(?:th)? %-tile of (?P<sense>C?CDF) over (?P<over>[\w ]+)"
)
_DIFFERENCE = re.compile(
    r"(?P<percent>\d+)(?:th)? %-tile (?P<sense>C?CDF) of \((?P<first>[\w ]+) - (?P<second>[\w ]+)\)"
    r" over (?P<over>[\w ]+) in the top (?P<top>\d+) %-tile of (?P<rank>[\w ]+)"
)
_GATE = re.compile(r"(?P<name>[A-Za-z][\w ]*) (?P<sign>[<>]=?) (?P<value>-?\d+(?:\.\d+)?) (?P<unit>[\w/]+)")


def slug(words: str) -> str:
    """Make a name of words: adjacent channel power is adjacent_channel_power."""
    return re.sub(r"\W+", "_", words.strip()).strip("_")


@dataclass(frozen=True)
class PublishedRow:
    """A row as written; ``number`` counts from 1 with the header, as a spreadsheet does."""

    number: int
    id: str
    document: str
    version: str
    clause: str
    parameter: str
    bound: str
    value: str
    unit: str
    conditions: str

    @cached_property
    def written(self) -> tuple[WrittenCondition, ...]:
        """The conditions as written."""
        return split_conditions(self.conditions)

    @cached_property
    def _by_key(self) -> dict[str, str]:
        return {condition.key: condition.value for condition in self.written}

    def said(self, key: str) -> str:
        """Return the value of a condition, "" when the row does not have it."""
        return self._by_key.get(key, "")

    @property
    def strict(self) -> bool:
        """Whether the row excludes equality."""
        return self.said("strict") == "yes"

    @property
    def bandwidth(self) -> str:
        """The measurement bandwidth, as the grammar writes it; "" when none is given."""
        for key, unit in (("rbw_MHz", " MHz"), ("rbw_kHz", " kHz"), ("rbw", "")):
            if re.fullmatch(r"\d+(?:\.\d+)? ?(?:[kMG]?Hz)?", self.said(key)):
                return f"{self.said(key)}{unit}"
        return ""

    def bound_text(self) -> str:
        """Return the bound without what follows it: sign, value, unit."""
        if self.bound == "abs":
            return f"± {self.value} {self.unit}"
        if self.bound == "range":
            low, _, high = self.value.partition("..")
            return f"{low} {self.unit}..{high} {self.unit}"
        alternatives = self._units_apart()
        if alternatives:
            return alternatives
        sign = _BOUNDS[self.bound][self.strict]
        value = self.value if re.fullmatch(r"-?[\w.]+", self.value) else f"({self.value})"
        return f"{sign} {value} {self.unit}".rstrip()

    def _units_apart(self) -> str:
        """Read ``max(-40 dBr, -39 dBm/MHz)`` with two units as alternatives: the larger of upper limits is looser."""
        units = self.unit.split(" or ")
        match = re.fullmatch(r"(max|min)\((.+), (.+)\)", self.value)
        if len(units) < 2 or match is None:
            return ""
        looser = (match.group(1) == "max") == (self.bound == "max")
        name = "looser" if looser else "stricter"
        sign = _BOUNDS[self.bound][self.strict]
        return f"{name}({sign} {match.group(2)}; {sign} {match.group(3)})"

    def limit_text(self) -> str:
        """Return the whole limit of the row: bound, bandwidth, statistic and gate."""
        parts = [self.bound_text()]
        if self.bandwidth:
            parts.append(f"in {self.bandwidth}")
        parts += [part for part in (self.statistic_text(), self.gate_text()) if part]
        return " ".join(parts)

    def statistic_text(self) -> str:
        """Return the statistic that the row asks for, "" when it asks for none that is understood."""
        said = self.said("statistic")
        percentile = _PERCENTILE.fullmatch(said)
        if percentile is not None:
            over = slug(percentile["over"])
            return f"at {percentile['percent']} % of {percentile['sense']} over {over}"
        difference = _DIFFERENCE.fullmatch(said)
        if difference is not None:
            of = f"{slug(difference['first'])} - {slug(difference['second'])}"
            # The top half by rank: those whose cumulative share is at least the rest.
            rank = f"rank_of_{slug(difference['rank'])}[%] >= {100 - int(difference['top'])}"
            over = slug(difference["over"])
            return f"at {difference['percent']} % of {difference['sense']} of ({of}) over {over} where {rank}"
        if said.startswith("minimum over ") and self.bound == "min":
            return f"worst over {slug(said.removeprefix('minimum over '))}"
        return ""

    def gate_text(self) -> str:
        """Return the condition under which the row counts at all."""
        match = _GATE.fullmatch(self.said("applies_if"))
        return f"if {slug(match['name'])} {match['sign']} {match['value']} {match['unit']}" if match else ""

    def keys_in_limit(self) -> frozenset[str]:
        """Return the keys of the conditions that the limit itself says."""
        keys = set(_READING & set(self._by_key))
        if self.bandwidth:
            keys |= {"rbw_MHz", "rbw_kHz", "rbw"} & set(self._by_key)
        if self.statistic_text():
            keys.add("statistic")
        if self.gate_text():
            keys.add("applies_if")
        return frozenset(keys)

    def parsed(self, without: frozenset[str]) -> tuple[dict[str, PublishedCondition], tuple[str, ...]]:
        """Return the parsed conditions by name and the unparsed ones verbatim, those in ``without`` left out."""
        conditions: dict[str, PublishedCondition] = {}
        unparsed: list[str] = []
        for written in self.written:
            if written.key in without:
                continue
            # A reference to other rows is no condition; what it names was joined, or is kept as written.
            condition, leftover = (None, True) if written.key == "or_with" else parse_condition_value(written)
            if condition is not None and condition.name not in conditions:
                conditions[condition.name] = condition
            else:
                leftover = True
            if leftover:
                unparsed.append(written.verbatim)
        return conditions, tuple(unparsed)
