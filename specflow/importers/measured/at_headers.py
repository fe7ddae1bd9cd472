"""Headers that state a condition: "Gain @ 28 GHz (dB)" beside "Gain @ 29 GHz (dB)" is one quantity at two of them."""

from __future__ import annotations

import re
from collections import defaultdict

from specflow.conditions import KnownDimension, find_dimension
from specflow.importers.measured.context import Context
from specflow.importers.measured.header_text import header_key, known_unit, read_header
from specflow.importers.measured.mapping_parts import UNLOCATED, PivotMapping
from specflow.importers.measured.quantity_text import name_quantity
from specflow.importers.measured.result import Question
from specflow.importers.measured.tables import FoundTable
from specflow.parameters import suits

_AMOUNT = re.compile(
    r"@\s*(?P<number>[+\-−]?\s?[0-9]+(?:[.,][0-9]+)?)\s*(?P<unit>°\s?[CFK]|[kMGT]?Hz|K|degC)(?=\s*(?:$|[(\[]))"
)

_MANY = 4

#: Quantities over an offset or at a spacing: a frequency behind their "@" is not the one that was set.
_OF_OFFSETS = frozenset(
    ("phase_noise", "aclr", "acpr_relative", "aclr_absolute", "imd2", "imd3", "imd_level", "mask_emission",
     "mask_emission_relative", "spurious_emission", "spurious_relative", "acs", "blocking_level", "blocking_ratio",
     "receiver_intermodulation", "iip3", "oip3", "iip2", "oip2", "sfdr", "integrated_phase_error", "noise_power_ratio",
     "integrated_phase_noise_relative", "jitter", "harmonics", "harmonic_level", "in_band_emission")
)  # fmt: skip


def pivots_of_headers(
    table: FoundTable, context: Context
) -> tuple[tuple[PivotMapping, ...], tuple[Question, ...]]:
    """Return one pivot for each quantity whose headers state a frequency or a temperature behind "@".

    Many such headers that name no quantity make one question.
    """
    found: dict[str, list[int]] = defaultdict(list)
    dimensions: dict[str, tuple[str, str]] = {}
    columns = {dimension.name for dimension in _dimensions(table)}
    for place, header in enumerate(table.headers):
        amount = _AMOUNT.search(header.text)
        spelled = known_unit(amount["unit"].replace(" ", "")) if amount else None
        if amount is None or spelled is None or header.text.count("@") > 1:
            continue
        name = "frequency" if spelled.dimension == "frequency" else UNLOCATED
        if any(column == name or column.startswith(f"{name}_") for column in columns):
            continue
        template = f"{header.text[: amount.start('number')]}{{{name}}}{header.text[amount.end('number') :]}"
        found[template].append(place)
        dimensions[template] = name, amount["unit"].replace(" ", "")
    pivots, doubts = [], []
    for template, places in found.items():
        pivot = _pivot(table, template, places, dimensions[template], context)
        if pivot is not None:
            pivots.append(pivot)
        elif len(places) >= _MANY:
            doubts.append(_question(table, template, places, *dimensions[template]))
    return tuple(pivots), tuple(doubts)


def states_condition(header: str) -> bool:
    """Whether a header states a condition behind "@"."""
    return _AMOUNT.search(header) is not None


def _question(table: FoundTable, template: str, places: list[int], name: str, unit: str) -> Question:
    first, last = table.headers[places[0]], table.headers[places[-1]]
    what = f"{len(places)} columns from {first.letter} to {last.letter} are headed {template!r}; of which quantity"
    remedy = (
        f'in a mapping: [table.pivot] header = "{template}", parameter, unit, units = {{ {name} = "{unit}" }}; what '
        "stands before the @ may be a condition, too: {polarisation} @ ..."
    )
    return Question("", first.cell, what, remedy)


def _dimensions(table: FoundTable) -> list[KnownDimension]:
    names = [read_header(header.text).name for header in table.headers]
    return [dimension for name in names if (dimension := find_dimension(name)) is not None]


def _pivot(
    table: FoundTable, template: str, places: list[int], dimension: tuple[str, str], context: Context
) -> PivotMapping | None:
    """The pivot of headers that differ in the amount alone; None where the quantity is not clear."""
    name, unit = dimension
    first = table.headers[places[0]]
    bare = re.sub(rf"\s*@\s*\{{{name}\}}\s*{re.escape(unit)}", "", template.replace("° ", "°"))
    parts = read_header(bare)
    spelled = parts.unit or first.unit
    named = name_quantity(parts, spelled, context.dictionary, context.planes)
    parameter = named.parameter
    if parameter is None or named.doubt or not spelled or not suits(parameter, spelled):
        return None
    if len({table.headers[place].unit for place in places}) > 1:
        return None
    if len({header_key(table.headers[place].text) for place in places}) < len(places):
        return None  # the same condition twice: nobody can tell the columns apart
    if name == "frequency" and parameter.key in _OF_OFFSETS:
        return None
    return PivotMapping(
        header=template,
        parameter=parameter.key,
        unit=spelled,
        units={name: unit},
        plane=named.plane,
        statistic=named.statistic,
        polarisation=named.polarisation,
    )
