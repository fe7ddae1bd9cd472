"""What each column of a table is, with the reason; or the question that a person has to answer.

The order of decisions: what the mapping or the person says; columns that say the same in every row; uncertainties;
words that name a role; conditions and parameters of the dictionary. Nothing is taken that has two readings.
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping
from dataclasses import replace

from specflow.conditions import KnownDimension, find_dimension, known_dimension
from specflow.importers.measured.cell_units import is_unit_column
from specflow.importers.measured.column import ColumnMeaning, Heading
from specflow.importers.measured.condition_column import (
    axis_unit,
    condition_of,
    is_bare_level,
    is_condition,
    is_open,
    is_temperature,
    mapped_condition,
    temperature,
)
from specflow.importers.measured.constants import ConstantColumn, read_constants
from specflow.importers.measured.context import Context
from specflow.importers.measured.directions import cosine_of
from specflow.importers.measured.formats import Format, format_of, header_of, is_plain_head, phase_header
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import header_key, known_unit, read_header
from specflow.importers.measured.levels import field_of_detector, is_of_receiver, other_level
from specflow.importers.measured.mapping import ColumnMapping, LayoutMapping
from specflow.importers.measured.pairing import of_their_values, uncertainty_column, without_doubles
from specflow.importers.measured.placeholders import only_mark
from specflow.importers.measured.quantity_text import NamedQuantity, bare_word, name_quantity
from specflow.importers.measured.result import Role
from specflow.importers.measured.roles import UncertaintyWords, role_of_words, uncertainty_of
from specflow.importers.measured.scaling import scaled_unit, with_scale
from specflow.importers.measured.scattering_header import ScatteringHeader, scattering_header
from specflow.importers.measured.stated import PERSON, Stated
from specflow.importers.measured.tables import FoundTable
from specflow.importers.measured.unit_source import FoundUnit, find_unit
from specflow.importers.measured.value_column import mapped_value, named_value, value_of
from specflow.units import compatible, parse_unit

_READING_AS_TEXT = re.compile(r"^\s*[<>≤≥]\s*[+\-−]?[0-9]")
_SIZE = r"(?:\d+\.?\d*|\.\d+)(?:[eE][+\-]?\d+)?"
_NUMBER = rf"[+\-−]?{_SIZE}"
_TWO_NUMBERS = re.compile(
    rf"\(?{_NUMBER}\s*[+\-−]\s*(?:{_SIZE}\s*[ij]|[ij]\s*\*?\s*{_SIZE})\)?|"  # 0.9-0.5j
    rf"\(\s*{_NUMBER}\s*(?:dB)?\s*[,;]\s*{_NUMBER}\s*(?:°|deg|rad)?\s*\)|"  # (-3.0dB,-45°)
    rf"{_NUMBER}\s*(?:dB)?\s*[,;/∠]\s*{_NUMBER}\s*(?:°|deg)"  # 0.9 ∠ -45°
)
_MOST_TEXTS = 50
#: Headers of a column whose quantity stands in the rows.
_PLAIN_HEADS = frozenset(("value", "values", "reading", "result", "measured", "measurement", "data"))


def read_meanings(
    table: FoundTable, context: Context, mapping: LayoutMapping, stated: Stated
) -> tuple[ColumnMeaning, ...]:
    """Return the meaning of every named column, in order. What constant columns say is added to ``stated``."""
    constants = read_constants(table, mapping, stated)
    reader = _Reader(table, context, mapping, stated, constants)
    meanings = [reader.read(header) for header in table.headers]
    return tuple(of_their_values(without_doubles(meanings)))


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

    def read(self, header: HeaderCell) -> ColumnMeaning:
        """Return what a column is; a factor in its header is applied, or asked about; one never swept is not read."""
        meaning = with_scale(self._read(header), self._entry(header))
        if meaning.role not in (Role.VALUE, Role.UNRESOLVED) or self._mapping.keep_placeholders:
            return meaning
        mark = only_mark(self._table, header.column)
        if not mark:
            return meaning
        reason = f"never swept: {mark} (keep_placeholders = true in a mapping reads it)"
        return ColumnMeaning(header, meaning.parts, Role.NOT_READ, reason, of_file=True)

    def _entry(self, header: HeaderCell) -> ColumnMapping:
        mapped = self._mapping.column(header.text, header.letter)
        return self._said(header) or mapped or ColumnMapping()

    def _read(self, header: HeaderCell) -> ColumnMeaning:
        said = self._said(header)
        mapped = said or self._mapping.column(header.text, header.letter)
        by = PERSON if said else "the mapping"
        heading = Heading(self._table, header, read_header(header.text), mapped or ColumnMapping(), by)
        if mapped is not None and (mapped.role or mapped.parameter or mapped.dimension):
            return self._as_mapped(heading)
        pivot = self._mapping.pivot
        if pivot is not None and pivot.is_about(header.text, header.letter):
            return heading.means(Role.PIVOT, "the pattern of the mapping")
        if is_unit_column(self._table, header):
            return self._unit_column(heading)
        if self._seen[header_key(header.text)] > 1:
            remedy = "give the columns different names, or settle each by its letter in a mapping"
            return heading.ask(f"the header {header.text!r} occurs more than once", remedy)
        constant = self._constants.get(header.column)
        if constant is not None and constant.problem:
            remedy = 'split the table, or settle the column in a mapping (role = "not read")'
            return heading.ask(constant.problem, remedy)
        if constant is not None:
            return heading.means(constant.role, constant.reason)
        return self._by_words(heading)

    def _said(self, header: HeaderCell) -> ColumnMapping | None:
        """What the person says of this column: a role, a dimension or a parameter, perhaps "in" a unit."""
        letter = header.letter
        for key, text in self._stated.columns.items():
            if key.upper() in (letter, header.cell) or header_key(key) == header_key(header.text):
                what, _, unit = (part.strip() for part in text.partition(" in "))
                scale, unit = scaled_unit(unit)
                entry = ColumnMapping(column=letter, unit=unit, scale=scale)
                if what.casefold() in {role.value for role in Role}:
                    return replace(entry, role=what.casefold())
                is_parameter = self._context.dictionary.get(what) is not None
                if find_dimension(what) is not None and not (is_parameter and known_dimension(what) is None):
                    return replace(entry, dimension=what)
                return replace(entry, parameter=what)
        return None

    def _as_mapped(self, heading: Heading) -> ColumnMeaning:
        hints = heading.hints
        role = Role(hints.role) if hints.role else Role.VALUE if hints.parameter else Role.CONDITION
        unit = heading.unit()
        if role is Role.VALUE and hints.parameter:
            meaning = mapped_value(heading, hints.parameter, unit, self._context, self._stated)
            return meaning if heading.said_by == PERSON else self._of_format(meaning)
        if role is Role.VALUE:
            named = name_quantity(heading.parts, unit.unit, self._context.dictionary, self._context.planes)
            if not named.candidates:
                return self._unknown(heading)
            return named_value(heading, named, unit, self._context, self._stated)
        if role is Role.CONDITION:
            return mapped_condition(heading, unit)
        if role is Role.UNCERTAINTY:
            words = uncertainty_of(heading.parts) or UncertaintyWords("", False, False)
            return uncertainty_column(heading, words, unit)
        return heading.means(role, heading.said_by)

    def _by_words(self, heading: Heading) -> ColumnMeaning:
        parts = heading.parts
        texts = self._texts(heading)
        if texts and all(map(_TWO_NUMBERS.fullmatch, texts)):
            remedy = 'export the two parts as columns of their own, or role = "not read" in a mapping'
            return heading.ask(
                f"each cell holds two numbers ({texts[0][:40]}): no reading is taken of them", remedy
            )
        field = field_of_detector(parts.name, heading.unit().unit)
        if field is not None:
            return self._field(heading, field)
        raw = scattering_header(parts.text)
        if raw is not None:
            return self._scattering(heading, raw)
        direction = self._direction(heading)
        if direction:
            return condition_of(heading, direction, heading.unit(), f"the header names {direction.title}")
        words = uncertainty_of(parts)
        if words is not None:
            return uncertainty_column(heading, words, heading.unit())
        named = role_of_words(parts)
        if named is not None and not self._is_ratio(heading):
            return heading.means(*named)
        unit = heading.unit()
        dimension = find_dimension(parts.name)
        quantity = name_quantity(parts, unit.unit, self._context.dictionary, self._context.planes)
        if dimension is not None and dimension.name == "time" and not unit.unit and self._is_clock(heading):
            return heading.means(Role.REMARK, "a time of day; kept as a remark")
        if dimension is not None and (other := other_level(dimension, unit.unit, self._context.dictionary)):
            return heading.ask_parameter(*other)
        if dimension is not None and is_of_receiver(dimension, parts.name, self._table.headers):
            remedy = f'--state "column {heading.letter}=not read" and bandwidth=..., or RBW as its header'
            return heading.ask("may be the bandwidth of the receiver, or that of a channel", remedy)
        if dimension is not None and is_bare_level(dimension, quantity, heading, self._context):
            column = f"column {heading.letter}"
            remedy = f'--state "{column}=condition" or "{column}=PARAMETER", or its role in a mapping'
            return heading.ask(
                f"may be the condition {dimension.title}, or a power that was measured", remedy
            )
        if dimension is not None and (
            not quantity.candidates or is_condition(dimension, quantity, self._context)
        ):
            return condition_of(
                heading,
                dimension,
                axis_unit(dimension, unit, self._stated),
                f"the header names {dimension.title}",
            )
        if dimension is not None and is_open(dimension, quantity, self._context, self._table):
            title = quantity.candidates[0].parameter.title
            column = f"column {heading.letter}"
            remedy = f'--state "{column}=condition" or "{column}=value", or its role in a mapping'
            return heading.ask(f"may be the condition {dimension.title} or a value of {title}", remedy)
        phase = phase_header(parts.name, unit.unit)
        if phase:
            named_phase = name_quantity(
                read_header(phase), "", self._context.dictionary, self._context.planes
            )
            quantity = named_phase if named_phase.candidates else quantity
        if quantity.candidates:
            return self._of_format(named_value(heading, quantity, unit, self._context, self._stated))
        if is_temperature(parts, unit):
            return temperature(heading, unit, self._stated)
        if is_plain_head(parts.name) and self._stated.text("format"):
            return self._formatted(heading, unit)
        return self._unknown(heading)

    def _field(self, heading: Heading, statistic: str) -> ColumnMeaning:
        """A reading of a receiver that only its unit names: dBµV/m is a field strength."""
        parameter = self._context.dictionary.get("field_strength")
        assert parameter is not None
        unit, named = heading.unit(), NamedQuantity(statistic=statistic)
        reason = f"a level in {unit.unit} is a field strength"
        return value_of(heading, parameter, named, unit, self._context, self._stated, reason)

    def _scattering(self, heading: Heading, raw: ScatteringHeader) -> ColumnMeaning:
        """An entry as recorded: no gain and no return loss, before somebody says which port is what."""
        unit = FoundUnit(raw.unit, f"the header {heading.header.cell}") if raw.unit else heading.unit()
        parameter = self._context.dictionary.get(raw.parameter)
        assert parameter is not None
        named = NamedQuantity(plane=raw.plane)
        reason = (
            f"raw, as in a network file: {raw.plane}, and no port is named; --state "
            f'"column {heading.letter}=gain" (or what it is) takes it for that'
        )
        return value_of(heading, parameter, named, unit, self._context, self._stated, reason)

    def _direction(self, heading: Heading) -> KnownDimension | None:
        """The dimension of columns that say a direction by a letter, or by "angle" under a cut that is stated."""
        cosine = cosine_of(heading.parts.name, [read_header(one.text).name for one in self._table.headers])
        if cosine:
            return known_dimension(cosine)
        if header_key(heading.parts.name) not in ("angle", "cutangle"):
            return None
        varies = self._stated.text("cut_varies")
        return known_dimension(varies or ("cut_angle" if "cut_plane" in self._stated.conditions else ""))

    def _of_format(self, meaning: ColumnMeaning) -> ColumnMeaning:
        """Doubt a value that the format stated above the table contradicts: a phase is no value of a gain."""
        stated = format_of(self._stated.text("format"))
        if stated is None or meaning.role is not Role.VALUE:
            return meaning
        fits = [known_unit(read_header(one.text).unit or one.unit or "?") for one in self._table.headers]
        wanted = parse_unit(stated.unit)
        if compatible(wanted, parse_unit(meaning.unit)) or any(
            one and compatible(one, wanted) for one in fits
        ):
            return meaning
        return self._contradicted(meaning, stated)

    def _contradicted(self, meaning: ColumnMeaning, stated: Format) -> ColumnMeaning:
        what = f"{meaning.words()}, but the file says {stated.words} ({self._stated.by('format')})"
        remedy = (
            f'--state "column {meaning.letter}=PARAMETER in UNIT" if the file is wrong, or "...=not read"'
        )
        return replace(meaning, role=Role.UNRESOLVED, question=meaning.asks(what, remedy))

    def _formatted(self, heading: Heading, unit: FoundUnit) -> ColumnMeaning:
        """A column "Formatted Data": what it is stands above the table, as in "Meas Type: S21", "Format: Log Mag"."""
        measured, written = self._stated.text("measured"), self._stated.text("format")
        parts = read_header(header_of(measured, written) or "?")
        stated = format_of(written)
        named = name_quantity(parts, "", self._context.dictionary, self._context.planes)
        if stated is None or not named.candidates:
            of = f"{measured} as {written}" if measured else f"something as {written}"
            return heading.ask_parameter(
                f"holds {of}, by what stands above; of which parameter it does not say"
            )
        if unit.unit and not compatible(parse_unit(unit.unit), parse_unit(stated.unit)):
            return heading.ask_unit(f"{unit.source} says {unit.unit}, the format {written}", stated.unit)
        where = f"{measured} as {written}, {self._stated.by('format')}"
        found = unit if unit.unit else FoundUnit(stated.unit, where)
        meaning = named_value(heading, named, found, self._context, self._stated)
        reason = f"{where}; {meaning.reason}" if meaning.question is None else meaning.reason
        return replace(meaning, reason=reason, of_file=True)

    def _unit_column(self, heading: Heading) -> ColumnMeaning:
        """A column of units gives them to another column; where that is called "Value", the quantity is in the rows."""
        cell = heading.header.cell
        others = [one for one in self._table.headers if one.column != heading.header.column]
        units = [
            (one, find_unit(self._table, one, read_header(one.text), self._entry(one).unit)) for one in others
        ]
        given = [one for one, unit in units if cell in unit.source or unit.by_row == heading.header.column]
        if any(self._is_named(one) for one in given):
            return heading.means(Role.NOT_READ, "it holds the units of another column")
        if given and not any(header_key(one.text) in _PLAIN_HEADS for one in given):
            return heading.means(
                Role.NOT_READ, f"it holds the units of {given[0].line}, which names no quantity"
            )
        if given or any(cell in unit.problem for _, unit in units):
            remedy = "put each quantity into a column of its own, with its unit in the header"
            return heading.ask("holds units: a table with the quantity in the rows is not read", remedy)
        return heading.means(Role.REMARK, "units that no column needs; kept as a remark")

    def _is_named(self, header: HeaderCell) -> bool:
        """Whether a header, or what is said of its column, names what it holds."""
        entry, parts = self._entry(header), read_header(header.text)
        if entry.role or entry.parameter or entry.dimension or find_dimension(parts.name) is not None:
            return True
        return bool(
            name_quantity(parts, "", self._context.dictionary, ()).candidates or uncertainty_of(parts)
        )

    def _is_ratio(self, heading: Heading) -> bool:
        """S/N is a serial number, or a ratio of signal to noise: fractions are no serial numbers."""
        if header_key(heading.parts.name) != "s/n":
            return False
        cells = self._table.cells(heading.header.column)
        numbers = cells.numbers[cells.numeric]
        return bool((numbers != numbers.round()).any())

    def _is_clock(self, heading: Heading) -> bool:
        cells = self._table.cells(heading.header.column)
        return not cells.numeric.any()

    def _texts(self, heading: Heading) -> list[str]:
        """What stands in the first cells that hold no number."""
        cells = self._table.cells(heading.header.column)
        return [str(cells.value(row)) for row in cells.odd[:_MOST_TEXTS]]

    def _unknown(self, heading: Heading) -> ColumnMeaning:
        """Numbers that nobody can name are asked about; words are kept as a remark."""
        cells = self._table.cells(heading.header.column)
        places = self._table.rows - self._table.first_row
        texts = self._texts(heading)
        if not cells.numeric[places].any() and not any(map(_READING_AS_TEXT.match, texts)):
            return heading.means(Role.REMARK, "words that name no condition; kept as a remark")
        item, pattern = self._item_in(heading.header.text)
        if item:
            what = f"the header names the item {item}"
            remedy = (
                f'let a mapping read the items from the headers, [table.pivot] header = "{pattern}", parameter and '
                "unit; or put the items into a column of their own"
            )
            return heading.ask(what, remedy)
        bare = bare_word(heading.parts)
        if bare:
            column = f"column {heading.letter}"
            remedy = (
                f'--state "{column}=stated limit", "{column}=not read", or name the parameter in a mapping'
            )
            return heading.ask(f"{heading.parts.name!r} may mean {bare}; of what, it does not say", remedy)
        near = ", ".join(one.key for one in self._context.dictionary.suggest(heading.parts.name))
        odd = f"; {heading.parts.odd_unit!r} is no unit" if heading.parts.odd_unit else ""
        return heading.ask_parameter(f"names no parameter and no condition that is known{odd}", near)

    def _item_in(self, text: str) -> tuple[str, str]:
        """The item of the project that a header names, and the header with {item} in its place; "" without one."""
        names = {name for one in self._context.snapshot.items for name in (one.id, one.serial) if name}
        for name in sorted(names, key=lambda name: (-len(name), name)):
            found = re.search(rf"(?<!\w){re.escape(name)}(?!\w)", text, re.IGNORECASE)
            if found:
                return name, f"{text[: found.start()]}{{item}}{text[found.end() :]}"
        return "", ""
