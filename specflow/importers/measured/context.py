"""What a project knows that helps to understand a table."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

from specflow.conditions import find_dimension, is_unlocated_temperature
from specflow.importers.measured.formats import is_formatted_data
from specflow.importers.measured.header_text import read_header
from specflow.importers.measured.mapping import read_mappings
from specflow.importers.measured.mapping_parts import LayoutMapping
from specflow.importers.measured.quantity_text import name_quantity
from specflow.importers.measured.roles import role_of_words, uncertainty_of
from specflow.importers.measured.scattering_header import scattering_header
from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.conditions import ConditionsSet
from specflow.model.evidence import TableMapping
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary


@dataclass(frozen=True)
class Context:
    """The project and the dictionary of parameters, with what is looked up often."""

    snapshot: Snapshot
    dictionary: Dictionary
    _recognised: dict[str, bool] = field(default_factory=dict, repr=False, compare=False)

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

    @cached_property
    def item_names(self) -> tuple[str, ...]:
        """Ids and serials of the items, the longest first."""
        names = {name for one in self.snapshot.items for name in (one.id, one.serial) if name}
        return tuple(sorted(names, key=lambda name: (-len(name), name)))

    @cached_property
    def mappings(self) -> tuple[tuple[TableMapping, LayoutMapping], ...]:
        """The mappings that the project keeps, the latest first."""
        return tuple(
            (one, read_mappings(one.toml, f"mapping {one.id}")[0])
            for one in reversed(list(self.snapshot.all(TableMapping)))
        )

    def recognises(self, text: str) -> bool:
        """Whether a header means something: it has a unit, or names a role, a condition or a parameter."""
        if text not in self._recognised:
            is_item = code_key(text) in self.snapshot.items_by_name
            self._recognised[text] = not is_item and self._recognises(text)
        return self._recognised[text]

    def _recognises(self, text: str) -> bool:
        parts = read_header(text)
        if parts.unit or parts.odd_unit or role_of_words(parts) or uncertainty_of(parts):
            return True
        if find_dimension(parts.name) or is_unlocated_temperature(parts.name):
            return True
        if is_formatted_data(parts.name) or scattering_header(text):
            return True
        return bool(name_quantity(parts, "", self.dictionary, ()).candidates)
