"""Which mapping holds for a table: from the file that the person gave, else one that the project keeps."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field

from specflow.exchange import digest
from specflow.importers.measured.context import Context
from specflow.importers.measured.facts import Fact
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.layout import name_pattern
from specflow.importers.measured.mapping_parts import LayoutMapping
from specflow.importers.readers import Grid


@dataclass(frozen=True, slots=True)
class GivenMappings:
    """The layouts of the mapping file that the person gave, and its name; none without a file."""

    layouts: tuple[LayoutMapping, ...] = ()
    name: str = ""


@dataclass(frozen=True, slots=True)
class Settled:
    """A mapping and where it is from; ``by_hand``: from the file that the person gave."""

    mapping: LayoutMapping
    source: str
    by_hand: bool


@dataclass
class Mappings:
    """All mappings that may hold for the tables of a file; those that did are remembered."""

    given: GivenMappings
    context: Context
    used: list[LayoutMapping] = field(default_factory=list)

    def of_areas(self, grid: Grid) -> Iterator[Settled]:
        """Those that name an area of this sheet."""
        for one in self._all():
            if one.mapping.area and _is_of(grid, one):
                yield one

    def of_table(self, key: str, facts: Iterable[Fact], has_words: bool) -> Settled | None:
        """The one for a layout: with the facts that it asks for, else the one that asks for none."""
        told = list(facts)
        fitting = [
            one
            for one in self._all()
            if not one.mapping.area
            and (has_words or one.by_hand)
            and (
                one.mapping.layout == key or (not one.mapping.layout and one.by_hand and self._fits_all(one))
            )
            and holds(one.mapping, told)
        ]
        fitting.sort(key=lambda one: (not one.by_hand, not one.mapping.layout, -len(one.mapping.when)))
        if not fitting:
            return None
        self.used.append(fitting[0].mapping)
        return fitting[0]

    def unused(self) -> list[str]:
        """The entries of the mapping file that fit no table: it was made for another file, or the layout changed."""
        return [
            mapping.layout or f"in the area {mapping.area}"
            for mapping in self.given.layouts
            if (mapping.layout or mapping.area) and mapping not in self.used and not mapping.skip
        ]

    def _fits_all(self, one: Settled) -> bool:
        """Whether an entry that names no layout may be meant for any table: the only one, or one with facts."""
        plain = [mapping for mapping in self.given.layouts if not mapping.area]
        return len(plain) == 1 or bool(one.mapping.when)

    def _all(self) -> Iterator[Settled]:
        for mapping in self.given.layouts:
            yield Settled(mapping, f"the mapping file {self.given.name}", True)
        for stored, mapping in self.context.mappings:
            source = f"{stored.id} revision {stored.revision}, recognised by its layout"
            yield Settled(mapping, source, False)


def holds(mapping: LayoutMapping, facts: Iterable[Fact]) -> bool:
    """Whether all facts that a mapping asks for are stated."""
    told = {(header_key(fact.key), " ".join(fact.value.casefold().split())) for fact in facts}
    return all(
        (header_key(key), " ".join(value.casefold().split())) in told for key, value in mapping.when.items()
    )


def kept_under(key: str, mapping: LayoutMapping) -> str:
    """The key under which a mapping is kept: that of the layout, and of the facts that it asks for."""
    if not mapping.when:
        return key
    return f"{key}+{digest(sorted((header_key(key), value) for key, value in mapping.when.items()))[:8]}"


def _is_of(grid: Grid, one: Settled) -> bool:
    """Whether a mapping speaks of this sheet; one from the person's file may leave the sheet out."""
    if not one.mapping.sheet:
        return one.by_hand or grid.name == grid.file
    return name_pattern(one.mapping.sheet) == name_pattern(grid.name)
