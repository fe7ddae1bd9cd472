"""A column of values: its quantity, its unit, and whether the two fit each other."""

from __future__ import annotations

import re

from specflow.errors import UnitError
from specflow.importers.measured.cell_units import brought, slip_of
from specflow.importers.measured.column import ColumnMeaning, Heading
from specflow.importers.measured.context import Context
from specflow.importers.measured.correction_units import unit_when_corrected
from specflow.importers.measured.header_text import known_unit
from specflow.importers.measured.quantity_text import NamedQuantity, density_of
from specflow.importers.measured.result import Role
from specflow.importers.measured.stated import MAPPING, PERSON, Stated
from specflow.importers.measured.unit_source import FoundUnit
from specflow.model.evidence import SpectrumKind
from specflow.model.parameter import Parameter, QuantityIdentity
from specflow.parameters import suits
from specflow.units import ONE, Kind, parse_quantity, parse_unit

_RATIO = re.compile(r"^[fpnuµmkMG]?(?P<of>[VAW])(?:rms)?\s?/\s?[fpnuµmkMG]?(?P=of)(?:rms)?$")


def named_value(
    heading: Heading, named: NamedQuantity, unit: FoundUnit, context: Context, stated: Stated
) -> ColumnMeaning:
    """Read a column whose header names a parameter."""
    if len(named.candidates) > 1:
        return heading.ask_parameter(
            f"may be any of {', '.join(one.parameter.key for one in named.candidates)}"
        )
    if named.doubt:
        return heading.ask(named.doubt, named.remedy)
    found = named.candidates[0]
    reason = f"the header is the {found.reason}"
    return value_of(heading, found.parameter, named, unit, context, stated, reason)


def mapped_value(
    heading: Heading, key: str, unit: FoundUnit, context: Context, stated: Stated
) -> ColumnMeaning:
    """Read a column of which a mapping, or the person, names the parameter."""
    parameter = context.dictionary.get(key)
    if parameter is None:
        near = ", ".join(one.key for one in context.dictionary.suggest(key))
        remedy = f"nearest: {near}" if near else "add it to the parameters of the project"
        return heading.ask(f"{key!r} ({heading.said_by}) is no known parameter", remedy)
    return value_of(heading, parameter, NamedQuantity(), unit, context, stated, heading.said_by)


def value_of(
    heading: Heading,
    parameter: Parameter,
    named: NamedQuantity,
    unit: FoundUnit,
    context: Context,
    stated: Stated,
    reason: str,
) -> ColumnMeaning:
    """Read a column of values of ``parameter``; a unit that is missing or of another kind is a question."""
    if not unit.unit and not unit.problem:
        unit = _stated_unit(parameter, stated)
    elif other := _other_unit(unit, stated):
        return heading.ask_unit(other, parameter.unit)
    doubt = _doubt_of_unit(heading, parameter, unit)
    if doubt is not None:
        return doubt
    density = density_of(parameter, unit.unit, context.dictionary)
    if density is not None:
        parameter, reason = density, f"{reason}, in {unit.unit} its density"
    doubt = _doubt_of_quantity(heading, parameter, unit.unit, context, stated)
    if doubt is not None:
        return doubt
    try:
        bandwidth = _bandwidth(heading, parameter, unit.unit, stated)
    except UnitError as error:
        return heading.ask(error.message, 'write it with its unit: bandwidth = "1 MHz"')
    quantity = QuantityIdentity(
        parameter=parameter.key,
        plane=heading.hints.plane or named.plane or stated.text("plane"),
        statistic=heading.hints.statistic or named.statistic or _stated_statistic(parameter, stated),
        bandwidth_hz=bandwidth,
        polarisation=heading.hints.polarisation or named.polarisation,
    )
    return ColumnMeaning(
        heading.header,
        heading.parts,
        Role.VALUE,
        f"{reason}; unit from {unit.source}",
        parameter=parameter,
        quantity=quantity,
        unit=unit.unit,
        unit_from=unit.source,
        by_row=unit.by_row,
        by_cell=unit.by_cell,
        spectrum=_spectrum(heading.hints.spectrum or stated.text("spectrum")),
        said_above=_said_above(heading, named, stated),
    )


def _said_above(heading: Heading, named: NamedQuantity, stated: Stated) -> tuple[str, ...]:
    """What of the quantity the file states for the table alone: it is no part of the layout."""
    own = {
        "plane": heading.hints.plane or named.plane,
        "statistic": heading.hints.statistic or named.statistic,
        "spectrum": heading.hints.spectrum,
    }
    return tuple(name for name, value in own.items() if not value and _is_of_file(stated, name))


def _is_of_file(stated: Stated, name: str) -> bool:
    return bool(stated.text(name)) and stated.by(name) not in (PERSON, MAPPING)


def _other_quantity(heading: Heading, parameter: Parameter, stated: Stated) -> str:
    """Say that the file states another plane or statistic than the mapping of the column does."""
    for name, mapped, said in (
        ("plane", heading.hints.plane, stated.text("plane")),
        ("statistic", heading.hints.statistic, _stated_statistic(parameter, stated)),
    ):
        if mapped and said and _is_of_file(stated, name) and mapped.casefold() != said.casefold():
            where = stated.by(name).removeprefix("stated in ")
            return f"{heading.said_by} says the {name} {mapped!r}, {where} says {said!r}"
    return ""


def _doubt_of_unit(heading: Heading, parameter: Parameter, unit: FoundUnit) -> ColumnMeaning | None:
    """Ask for a unit that is missing, and about a ratio of another kind than the parameter's."""
    if not unit.unit:
        return heading.ask_unit(
            unit.problem or f"{parameter.title} without a unit",
            parameter.unit,
            "" if unit.problem else "unit",
        )
    ratio = _other_ratio(heading, parameter)
    if ratio:
        return heading.ask(
            ratio, "export it in dB, or settle the parameter in a mapping: a ratio of its own kind"
        )
    return None


def _doubt_of_quantity(
    heading: Heading, parameter: Parameter, unit: str, context: Context, stated: Stated
) -> ColumnMeaning | None:
    """Ask about a unit that the parameter cannot have, and about another quantity than the file states."""
    if not suits(parameter, unit) and not suits(parameter, unit_when_corrected(unit, stated, context)):
        what = f"{parameter.title} in {unit}; {_with_article(parameter.title)} is {_kind_words(parameter)}"
        unread = f'--state "column {heading.letter}=not read"'
        remedy = f"correct the header, settle parameter and unit in a mapping, or {unread}"
        return heading.ask(what, remedy)
    other = _other_quantity(heading, parameter, stated)
    if other:
        remedy = (
            "correct the mapping, or say which holds for this file: --state plane=..., --state statistic=..."
        )
        return heading.ask(other, remedy)
    return None


def _other_ratio(heading: Heading, parameter: Parameter) -> str:
    """Say that a ratio as written is of another kind than the parameter: V/V of amplitudes, a gain of powers."""
    written = (heading.hints.unit or heading.parts.unit or heading.header.unit).strip("()[] ")
    found = _RATIO.match(written)
    if found is None or parameter.log_factor is None:
        return ""
    factor, kind = (10, "powers") if found["of"] == "W" else (20, "amplitudes")
    if factor == parameter.log_factor:
        return ""
    own = "powers" if parameter.log_factor == 10 else "amplitudes"
    return f"{written} is a ratio of {kind}, {parameter.title} is one of {own}"


def _other_unit(unit: FoundUnit, stated: Stated) -> str:
    """Say that the file states another unit of the same quantity than the column has: dBm above, dBW in the header."""
    said = stated.said.get("unit")
    if said is None or said.by in (PERSON, MAPPING) or unit.source == PERSON:
        return ""
    written, own = known_unit(said.text), known_unit(unit.unit)
    if written is None or own is None or written == own or not brought(written, own):
        return ""
    return f"{unit.source} says {own}, {said.by.removeprefix('stated in ')} says {written}"


def _stated_unit(parameter: Parameter, stated: Stated) -> FoundUnit:
    """The unit that is stated for the table; a parameter that is a plain number needs none."""
    if stated.text("unit"):
        try:
            parse_unit(stated.text("unit"))
        except UnitError as error:
            return FoundUnit(problem=f"{error.message}, {stated.by('unit')}")
        return FoundUnit(stated.text("unit"), stated.by("unit"))
    if parse_unit(parameter.unit) == ONE:
        return FoundUnit("1", f"the parameter: {parameter.title} is a plain number")
    return FoundUnit()


def _bandwidth(heading: Heading, parameter: Parameter, unit: str, stated: Stated) -> float | None:
    """The reference bandwidth in Hz: of a density from its unit, else as stated for a quantity that needs one."""
    own = parse_unit(unit).bandwidth_hz
    text = heading.hints.bandwidth
    if not text and own is None and parameter.needs_bandwidth:
        text = stated.text("bandwidth")
    if not text:
        return own
    amount = parse_quantity(text)
    if amount.unit.dimension != "frequency":
        raise UnitError(f"the bandwidth {text!r} is no frequency")
    slip = "" if heading.hints.bandwidth or stated.by("bandwidth") == PERSON else slip_of(str(amount.unit))
    if slip:
        raise UnitError(f"the bandwidth {text}: {slip}")
    return float(amount.value) * amount.unit.scale


def _stated_statistic(parameter: Parameter, stated: Stated) -> str:
    """What is stated for the table, where the parameter has such a statistic: a detector says nothing of a gain."""
    said = stated.text("statistic").casefold()
    return next((one for one in parameter.statistics if one.casefold() == said), "")


def _spectrum(text: str) -> SpectrumKind:
    plain = text.casefold().replace(" ", "-")
    return next((kind for kind in SpectrumKind if kind.value == plain), SpectrumKind.UNKNOWN)


def _with_article(title: str) -> str:
    spoken = title if title[:2].isupper() else title[:1].lower() + title[1:]
    return f"{'an' if spoken[:1].casefold() in 'aeio' else 'a'} {spoken}"


def _kind_words(parameter: Parameter) -> str:
    unit = parse_unit(parameter.unit)
    what = unit.dimension if unit.kind in (Kind.PHYSICAL, Kind.PHYSICAL_LOG) else unit.kind.value
    return f"{'an' if what[0] in 'aeio' else 'a'} {what} ({parameter.unit})"
