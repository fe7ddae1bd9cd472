"""What each column of a table is, with the reason; or the question that a person has to answer."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property

from specflow.conditions import (
    Comparison,
    KnownDimension,
    find_dimension,
    is_unlocated_temperature,
    known_dimension,
    unlocated_temperature_hint,
)
from specflow.errors import UnitError
from specflow.importers.measured.constants import ConstantColumn, read_constants
from specflow.importers.measured.header_text import HeaderText, header_key, known_unit, read_header
from specflow.importers.measured.mapping import ColumnMapping, LayoutMapping
from specflow.importers.measured.quantity_text import NamedQuantity, density_of, name_quantity
from specflow.importers.measured.result import ColumnReading, Question, Role
from specflow.importers.measured.roles import role_of_words, uncertainty_of
from specflow.importers.measured.stated import PERSON, Stated
from specflow.importers.measured.tables import FoundTable, HeaderCell
from specflow.importers.measured.unit_source import FoundUnit, find_unit
from specflow.importers.readers import column_letter
from specflow.model.block import Block
from specflow.model.conditions import ConditionsSet
from specflow.model.evidence import SpectrumKind
from specflow.model.parameter import Parameter, QuantityIdentity
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary, suits
from specflow.units import Kind, compatible, parse_quantity, parse_unit


@dataclass(frozen=True)
class Context:
    """What a project knows that helps to understand a table."""

    snapshot: Snapshot
    dictionary: Dictionary

    @cached_property
    def planes(self) -> tuple[str, ...]:
        """All named ports of all blocks."""
        return tuple({plane.name for block in self.snapshot.all(Block) for plane in block.planes})

    @cached_property
    def required(self) -> frozenset[str]:
        """The parameters that some requirement is on."""
        return frozenset(requirement.quantity.parameter for requirement in self.snapshot.requirements)

    @cached_property
    def dimensions(self) -> frozenset[str]:
        """The dimensions that some conditions set speaks of."""
        return frozenset(
            dimension.name for one in self.snapshot.all(ConditionsSet) for dimension in one.dimensions
        )

    def recognises(self, text: str) -> bool:
        """Whether a header means something: it has a unit, or names a role, a condition or a parameter."""
        parts = read_header(text)
        if parts.unit or parts.odd_unit or role_of_words(parts) or uncertainty_of(parts):
            return True
        if find_dimension(parts.name) or is_unlocated_temperature(parts.name):
            return True
        return bool(name_quantity(parts, "", self.dictionary, ()).candidates)


@dataclass(frozen=True, slots=True)
class ColumnMeaning:
    """One column: its role, and what the role needs."""

    header: HeaderCell
    parts: HeaderText
    role: Role
    reason: str
    question: Question | None = None
    parameter: Parameter | None = None
    quantity: QuantityIdentity | None = None
    unit: str = ""
    unit_from: str = ""
    spectrum: SpectrumKind = SpectrumKind.UNKNOWN
    dimension: str = ""
    is_text: bool = False
    of: str = ""
    k: float | None = None
    fill_down: bool = False

    @property
    def column(self) -> int:
        """The column number."""
        return self.header.column

    def words(self) -> str:
        """The meaning in words."""
        if self.role is Role.VALUE and self.quantity is not None:
            return ", ".join([*_quantity_words(self.quantity), f"in {self.unit}"])
        if self.role is Role.CONDITION:
            return f"{self.dimension.replace('_', ' ')}" + (f" in {self.unit}" if self.unit else "")
        if self.role is Role.UNCERTAINTY:
            return f"uncertainty in {self.unit}, " + (
                "standard" if self.k == 1 else f"k = {self.k:g}" if self.k else "k?"
            )
        return str(self.role)

    def reading(self) -> ColumnReading:
        """The column as it is shown to the person."""
        reason = self.question.what if self.question else self.reason
        return ColumnReading(self.header.text, self.header.cell, self.role, self.words(), reason)


def read_meanings(
    table: FoundTable, context: Context, mapping: LayoutMapping, stated: Stated
) -> tuple[ColumnMeaning, ...]:
    """Return the meaning of every named column, in order."""
    constants = read_constants(table, mapping, stated)
    reader = _Reader(table, context, mapping, stated, constants)
    meanings = [reader.read(header) for header in table.headers]
    meanings = _of_their_values(_without_doubles(meanings), table)
    return tuple(meanings)


def _quantity_words(quantity: QuantityIdentity) -> list[str]:
    words = [quantity.parameter.replace("_", " ")]
    words += [f"at {quantity.plane}"] if quantity.plane else []
    words += [part for part in (quantity.statistic, quantity.polarisation) if part]
    words += [f"per {quantity.bandwidth_hz:g} Hz"] if quantity.bandwidth_hz else []
    return words


class _Reader:
    """Reads the columns of one table."""

    def __init__(
        self,
        table: FoundTable,
        context: Context,
        mapping: LayoutMapping,
        stated: Stated,
        constants: Mapping[int, ConstantColumn],
    ) -> None:
        self._table = table
        self._constants = constants
        self._context = context
        self._mapping = mapping
        self._stated = stated
        self._seen = Counter(header_key(header.text) for header in table.headers)
        self._pivot = pivot_pattern(mapping.pivot.header) if mapping.pivot else None

    def read(self, header: HeaderCell) -> ColumnMeaning:
        parts = read_header(header.text)
        mapped = self._mapped(header)
        if mapped is not None and (mapped.role or mapped.parameter or mapped.dimension):
            return self._as_mapped(header, parts, mapped)
        if self._pivot is not None and self._pivot.fullmatch(header.text):
            return ColumnMeaning(header, parts, Role.PIVOT, "the pattern of the mapping")
        if self._seen[header_key(header.text)] > 1:
            remedy = "name the columns apart, or settle each by its letter in a mapping"
            return self._ask(header, parts, f"the header {header.text!r} occurs more than once", remedy)
        constant = self._constants.get(header.column)
        if constant is not None and constant.problem:
            remedy = 'split the table, or settle the column in a mapping (role = "not read")'
            return self._ask(header, parts, constant.problem, remedy)
        if constant is not None:
            return ColumnMeaning(header, parts, constant.role, constant.reason)
        hints = mapped or ColumnMapping()
        return self._by_words(header, parts, hints)

    def _mapped(self, header: HeaderCell) -> ColumnMapping | None:
        letter = column_letter(header.column)
        said = self._stated.columns.get(letter) or next(
            (
                text
                for key, text in self._stated.columns.items()
                if header_key(key) == header_key(header.text)
            ),
            "",
        )
        if said:
            return _column_said(said, self._context)
        return self._mapping.column(header.text, letter)

    def _by_words(self, header: HeaderCell, parts: HeaderText, hints: ColumnMapping) -> ColumnMeaning:
        uncertainty = uncertainty_of(parts)
        if uncertainty is not None:
            return self._uncertainty(header, parts, hints, *uncertainty)
        named = role_of_words(parts)
        if named is not None and not self._is_ratio(header, parts):
            return ColumnMeaning(header, parts, named[0], named[1], fill_down=hints.fill_down)
        unit = find_unit(self._table, header, parts, hints.unit)
        dimension = find_dimension(parts.name)
        quantity = name_quantity(parts, unit.unit, self._context.dictionary, self._context.planes)
        if dimension is not None and (not quantity.candidates or self._is_condition(dimension, quantity)):
            return self._condition(header, parts, hints, dimension, unit)
        if dimension is not None and quantity.parameter and self._is_open(dimension, quantity.parameter):
            return self._either(header, parts, dimension, quantity.parameter)
        if quantity.candidates:
            return self._value(header, parts, hints, quantity, unit)
        if self._is_temperature(parts, unit):
            return self._temperature(header, parts, hints, unit)
        return self._unknown(header, parts)

    def _is_ratio(self, header: HeaderCell, parts: HeaderText) -> bool:
        """S/N is a serial number, or a ratio of signal to noise: fractions are no serial numbers."""
        if header_key(parts.name) != "s/n":
            return False
        cells = self._table.cells(header.column)
        numbers = cells.numbers[cells.numeric]
        return bool(len(numbers)) and bool((numbers != numbers.round()).any())

    def _is_condition(self, dimension: KnownDimension, quantity: NamedQuantity) -> bool:
        """A name that means a condition and a parameter: the project decides where only one of them is in use."""
        keys = {one.parameter.key for one in quantity.candidates}
        used, required = dimension.name in self._context.dimensions, bool(keys & self._context.required)
        if dimension.name in ("power_level", "input_level"):
            return used and not required
        return used or not required

    def _is_open(self, dimension: KnownDimension, parameter: Parameter) -> bool:
        """Whether a name stays ambiguous: other columns hold values, and the project does not decide."""
        if parameter.key in self._context.required and dimension.name not in self._context.dimensions:
            return False
        return any(
            name_quantity(read_header(other.text), "", self._context.dictionary, ()).candidates
            for other in self._table.headers
            if find_dimension(read_header(other.text).name) is None
        )

    def _is_temperature(self, parts: HeaderText, unit: FoundUnit) -> bool:
        if is_unlocated_temperature(parts.name):
            return True
        spelled = known_unit(unit.unit) if unit.unit else None
        return (
            parts.name.casefold() in ("t", "θ") and spelled is not None and spelled.dimension == "temperature"
        )

    def _temperature(
        self, header: HeaderCell, parts: HeaderText, hints: ColumnMapping, unit: FoundUnit
    ) -> ColumnMeaning:
        location = self._stated.text("temperature")
        dimension = find_dimension(f"{location} temperature") if location else None
        if dimension is None:
            letter = column_letter(header.column)
            remedy = (
                f"{unlocated_temperature_hint()}: --state temperature=ambient, "
                f'or dimension = "temperature_ambient" for column {letter} in a mapping'
            )
            return self._ask(header, parts, "a temperature that does not say whose", remedy)
        found = self._condition(header, parts, hints, dimension, unit)
        return replace(found, reason=f"{found.reason}; {location} is {self._stated.by('temperature')}")

    def _condition(
        self,
        header: HeaderCell,
        parts: HeaderText,
        hints: ColumnMapping,
        dimension: KnownDimension,
        unit: FoundUnit,
        reason: str = "",
    ) -> ColumnMeaning:
        reason = reason or f"the header names {dimension.title}"
        if dimension.comparison is Comparison.TEXT:
            return ColumnMeaning(
                header,
                parts,
                Role.CONDITION,
                reason,
                dimension=dimension.name,
                is_text=True,
                fill_down=hints.fill_down,
            )
        problem = unit.problem
        if not problem and not unit.unit and dimension.unit:
            problem = f"{dimension.title} without a unit"
        if not problem and not compatible(parse_unit(unit.unit or "1"), parse_unit(dimension.unit or "1")):
            problem = f"{dimension.title} in {unit.unit or 'no unit'}; expected is a unit like {dimension.unit or '1'}"
        if problem:
            return self._ask(header, parts, problem, self._unit_remedy(header, dimension.unit))
        return ColumnMeaning(
            header,
            parts,
            Role.CONDITION,
            f"{reason}; unit from {unit.source}" if unit.source else reason,
            dimension=dimension.name,
            unit=unit.unit,
            unit_from=unit.source,
            fill_down=hints.fill_down,
        )

    def _value(
        self,
        header: HeaderCell,
        parts: HeaderText,
        hints: ColumnMapping,
        named: NamedQuantity,
        unit: FoundUnit,
    ) -> ColumnMeaning:
        if len(named.candidates) > 1:
            keys = ", ".join(one.parameter.key for one in named.candidates)
            return self._ask(header, parts, f"may be any of {keys}", self._parameter_remedy(header))
        if named.doubt:
            return self._ask(header, parts, named.doubt, named.remedy)
        parameter = named.candidates[0].parameter
        reason = f"the header is the {named.candidates[0].reason}"
        return self._of_parameter(header, parts, hints, parameter, named, unit, reason)

    def _of_parameter(
        self,
        header: HeaderCell,
        parts: HeaderText,
        hints: ColumnMapping,
        parameter: Parameter,
        named: NamedQuantity,
        unit: FoundUnit,
        reason: str,
    ) -> ColumnMeaning:
        if not unit.unit and not unit.problem and self._stated.text("unit"):
            unit = FoundUnit(self._stated.text("unit"), self._stated.by("unit"))
        if unit.problem or not unit.unit:
            if parse_unit(parameter.unit).symbol == "1" and not unit.problem:
                unit = FoundUnit("1", f"{parameter.title} is a plain number")
            else:
                return self._ask(
                    header, parts, unit.problem or f"{parameter.title} without a unit",
                    self._unit_remedy(header, parameter.unit),
                )  # fmt: skip
        density = density_of(parameter, unit.unit, self._context.dictionary)
        if density is not None:
            parameter, reason = density, f"{reason}, in {unit.unit} its density"
        if not suits(parameter, unit.unit):
            what = (
                f"{parameter.title} in {unit.unit}; {_article(parameter.title)} is {_kind_words(parameter)}"
            )
            return self._ask(
                header, parts, what, "correct the header, or settle parameter and unit in a mapping"
            )
        quantity, problem = self._identity(parameter, named, hints, unit.unit)
        if problem:
            return self._ask(header, parts, problem, 'write it with its unit: bandwidth = "1 MHz"')
        return ColumnMeaning(
            header,
            parts,
            Role.VALUE,
            f"{reason}; unit from {unit.source}",
            parameter=parameter,
            quantity=quantity,
            unit=unit.unit,
            unit_from=unit.source,
            spectrum=_spectrum(hints.spectrum or self._stated.text("spectrum")),
        )

    def _identity(
        self, parameter: Parameter, named: NamedQuantity, hints: ColumnMapping, unit: str
    ) -> tuple[QuantityIdentity | None, str]:
        spelled = parse_unit(unit)
        bandwidth = spelled.bandwidth_hz
        text = hints.bandwidth or (self._stated.text("bandwidth") if parameter.needs_bandwidth else "")
        if text and (bandwidth is None or hints.bandwidth):
            try:
                amount = parse_quantity(text)
            except UnitError as error:
                return None, f"the bandwidth {text!r}: {error.message}"
            if amount.unit.dimension != "frequency":
                return None, f"the bandwidth {text!r} is no frequency"
            bandwidth = float(amount.value) * amount.unit.scale
        statistic = hints.statistic or named.statistic or self._stated.text("statistic")
        return (
            QuantityIdentity(
                parameter=parameter.key,
                plane=hints.plane or named.plane or self._stated.text("plane"),
                statistic=statistic,
                bandwidth_hz=bandwidth,
                polarisation=hints.polarisation or named.polarisation,
            ),
            "",
        )

    def _uncertainty(
        self, header: HeaderCell, parts: HeaderText, hints: ColumnMapping, of: str, standard: bool, bare: bool
    ) -> ColumnMeaning:
        k = hints.k or parts.k or (1.0 if standard else None)
        unit = find_unit(self._table, header, parts, hints.unit)
        if unit.problem or not unit.unit:
            return self._ask(
                header,
                parts,
                unit.problem or "an uncertainty without a unit",
                self._unit_remedy(header, "dB"),
            )
        if k is None:
            what = "± without k" if bare else "an expanded uncertainty U without its coverage factor k"
            remedy = "write k=2 (or what it is) into the header, or k = 2 for the column in a mapping; u is a standard one"
            return self._ask(header, parts, what, remedy)
        reason = f"the header names an uncertainty; unit from {unit.source}"
        return ColumnMeaning(
            header,
            parts,
            Role.UNCERTAINTY,
            reason,
            unit=unit.unit,
            unit_from=unit.source,
            of=hints.of or of,
            k=k,
        )

    def _as_mapped(self, header: HeaderCell, parts: HeaderText, mapped: ColumnMapping) -> ColumnMeaning:
        by = "the mapping"
        role = Role(mapped.role) if mapped.role else Role.VALUE if mapped.parameter else Role.CONDITION
        if role is Role.VALUE:
            parameter = self._context.dictionary.get(mapped.parameter) if mapped.parameter else None
            if parameter is None and mapped.parameter:
                near = ", ".join(one.key for one in self._context.dictionary.suggest(mapped.parameter))
                return self._ask(
                    header, parts, f"{by} names {mapped.parameter!r}, which is no known parameter",
                    f"nearest: {near}" if near else "add it to the project's parameters",
                )  # fmt: skip
            unit = find_unit(self._table, header, parts, mapped.unit)
            if parameter is None:
                planes = self._context.planes
                named = name_quantity(parts, unit.unit, self._context.dictionary, planes)
                if not named.candidates:
                    return self._unknown(header, parts)
                return self._value(header, parts, mapped, named, unit)
            return self._of_parameter(header, parts, mapped, parameter, NamedQuantity(), unit, by)
        if role is Role.CONDITION:
            known = known_dimension(mapped.dimension) or find_dimension(mapped.dimension or parts.name)
            unit = find_unit(self._table, header, parts, mapped.unit)
            if known is None:
                return self._own_dimension(header, parts, mapped, unit)
            return self._condition(header, parts, mapped, known, unit, by)
        if role is Role.UNCERTAINTY:
            return self._uncertainty(header, parts, mapped, mapped.of, False, False)
        return ColumnMeaning(header, parts, role, by, fill_down=mapped.fill_down)

    def _own_dimension(
        self, header: HeaderCell, parts: HeaderText, mapped: ColumnMapping, unit: FoundUnit
    ) -> ColumnMeaning:
        """A dimension that only this project knows: words, or numbers in the unit that is stated."""
        if not mapped.dimension:
            return self._ask(header, parts, "the mapping names no dimension", 'write dimension = "..."')
        if unit.problem:
            return self._ask(header, parts, unit.problem, self._unit_remedy(header, ""))
        numeric = bool(self._table.cells(header.column).numeric.any())
        return ColumnMeaning(
            header, parts, Role.CONDITION, "the mapping", dimension=mapped.dimension, unit=unit.unit,
            unit_from=unit.source, is_text=not (unit.unit and numeric), fill_down=mapped.fill_down,
        )  # fmt: skip

    def _either(
        self, header: HeaderCell, parts: HeaderText, dimension: KnownDimension, parameter: Parameter
    ) -> ColumnMeaning:
        letter = column_letter(header.column)
        return self._ask(
            header,
            parts,
            f"may be the condition {dimension.title} or a value of {parameter.title}",
            f'--state "column {letter}=condition" or "column {letter}=value", or its role in a mapping',
        )

    def _unknown(self, header: HeaderCell, parts: HeaderText) -> ColumnMeaning:
        cells = self._table.cells(header.column)
        places = self._table.rows - self._table.first_row
        if not cells.numeric[places].any() and not _readings_as_text(self._table, header.column):
            reason = "words that name no condition; kept as a remark"
            return ColumnMeaning(header, parts, Role.REMARK, reason)
        near = ", ".join(one.key for one in self._context.dictionary.suggest(parts.name))
        remedy = self._parameter_remedy(header) + (f"; near: {near}" if near else "")
        return self._ask(header, parts, "names no parameter and no condition that is known", remedy)

    def _ask(self, header: HeaderCell, parts: HeaderText, what: str, remedy: str) -> ColumnMeaning:
        question = Question(
            header.text, header.cell, f"column {column_letter(header.column)}: {what}", remedy
        )
        return ColumnMeaning(header, parts, Role.UNRESOLVED, what, question)

    def _unit_remedy(self, header: HeaderCell, example: str) -> str:
        letter = column_letter(header.column)
        return (
            f"write the unit into the header ({read_header(header.text).name or 'name'} ({example or '1'})), "
            f'or unit = "..." for column {letter} in a mapping (--propose-mapping writes one)'
        )

    def _parameter_remedy(self, header: HeaderCell) -> str:
        letter = column_letter(header.column)
        return (
            f'--state "column {letter}=PARAMETER", or parameter, dimension or role = "not read" for column {letter} '
            "in a mapping (--propose-mapping writes one)"
        )


def _readings_as_text(table: FoundTable, column: int) -> bool:
    cells = table.cells(column)
    texts = [value for row in cells.odd[:50] if isinstance(value := cells.value(row), str)]
    readings = [
        text for text in texts if re.match(r"^\s*[<>≤≥]?\s*[+\-−]?[0-9]+[.,]?[0-9]*\s*\S{0,6}$", text)
    ]
    return len(readings) * 2 > len(texts) > 0 and any(re.match(r"^\s*[<>≤≥]", text) for text in readings)


def _column_said(text: str, context: Context) -> ColumnMapping:
    """What the person says of a column: a role, a dimension or a parameter, perhaps "in" a unit."""
    what, _, unit = text.partition(" in ")
    what, unit = what.strip(), unit.strip()
    if what.casefold() in {role.value for role in Role}:
        return ColumnMapping(column="?", role=what.casefold(), unit=unit)
    parameter = context.dictionary.get(what)
    if parameter is not None and known_dimension(what) is None:
        return ColumnMapping(column="?", parameter=parameter.key, unit=unit)
    if find_dimension(what):
        return ColumnMapping(column="?", dimension=what, unit=unit)
    return ColumnMapping(column="?", parameter=what, unit=unit)


def pivot_pattern(pattern: str) -> re.Pattern[str]:
    """Return the expression for headers like ``{polarisation} @ {frequency} MHz``; blanks do not matter."""
    pieces = []
    for piece in re.split(r"(\{\w+\})", " ".join(pattern.split())):
        if re.fullmatch(r"\{\w+\}", piece):
            pieces.append(f"(?P<{piece[1:-1]}>.+?)")
        else:
            pieces.append(re.escape(piece).replace(r"\ ", r"\s*"))
    return re.compile("".join(pieces), re.IGNORECASE)


def _without_doubles(meanings: list[ColumnMeaning]) -> list[ColumnMeaning]:
    """Two columns of one quantity, or of one condition: neither is believed."""
    seen: Counter[str] = Counter(_identity_key(one) for one in meanings)
    result = []
    for one in meanings:
        key = _identity_key(one)
        if key and seen[key] > 1:
            others = ", ".join(
                other.header.cell for other in meanings if _identity_key(other) == key and other is not one
            )
            what = f"column {column_letter(one.column)}: {one.words()}, as is {others}"
            question = Question(
                one.header.text, one.header.cell, what,
                'tell them apart in a mapping (plane, statistic, polarisation), or mark one role = "not read"',
            )  # fmt: skip
            one = replace(one, role=Role.UNRESOLVED, question=question)
        result.append(one)
    return result


def _identity_key(meaning: ColumnMeaning) -> str:
    if meaning.role is Role.VALUE and meaning.quantity is not None:
        return meaning.quantity.model_dump_json().casefold()
    if meaning.role is Role.CONDITION:
        return f"condition {meaning.dimension}"
    return str(meaning.role) if meaning.role in (Role.ITEM, Role.DATE) else ""


def _of_their_values(meanings: list[ColumnMeaning], table: FoundTable) -> list[ColumnMeaning]:
    """Say of which value column each uncertainty column is: by name, else the only one, else the one to its left."""
    values = [one for one in meanings if one.role is Role.VALUE]
    spreads = [one for one in meanings if one.role is Role.UNCERTAINTY]
    result = []
    for place, one in enumerate(meanings):
        if one.role is Role.UNCERTAINTY:
            of = _named_value(one.of, values)
            before = meanings[place - 1] if place else None
            if of is None and len(values) == 1 and len(spreads) == 1:
                of = values[0]
            if of is None and not one.of and len(spreads) == len(values) and before in values:
                of = before
            if of is None:
                what = f"column {column_letter(one.column)}: of which column is this the uncertainty"
                remedy = 'say of = "HEADER" for the column in a mapping, or name it in the header: U Gain (dB), k=2'
                one = replace(
                    one,
                    role=Role.UNRESOLVED,
                    question=Question(one.header.text, one.header.cell, what, remedy),
                )
            else:
                one = replace(one, of=of.header.cell)
        result.append(one)
    return result


def _named_value(name: str, values: Sequence[ColumnMeaning]) -> ColumnMeaning | None:
    if not name:
        return None
    key = header_key(name)
    found = [
        one
        for one in values
        if key
        in (
            header_key(one.header.text),
            header_key(one.parts.name),
            header_key(one.parameter.key if one.parameter else ""),
        )
    ]
    return found[0] if len(found) == 1 else None


def _spectrum(text: str) -> SpectrumKind:
    for kind in SpectrumKind:
        if text.casefold().replace(" ", "-") == kind.value:
            return kind
    return SpectrumKind.UNKNOWN


def _article(title: str) -> str:
    return f"{'an' if title[:1].casefold() in 'aeio' else 'a'} {title[:1].lower() + title[1:] if not title[:2].isupper() else title}"


def _kind_words(parameter: Parameter) -> str:
    unit = parse_unit(parameter.unit)
    what = unit.dimension if unit.kind in (Kind.PHYSICAL, Kind.PHYSICAL_LOG) else unit.kind.value
    return f"{'an' if what[0] in 'aeio' else 'a'} {what} ({parameter.unit})"


__all__ = ["PERSON", "ColumnMeaning", "Context", "pivot_pattern", "read_meanings"]
