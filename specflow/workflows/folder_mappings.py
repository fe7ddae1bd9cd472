"""The mapping files of a folder, and the one that the person names, brought together: each layout settled once."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

from specflow.errors import DocumentError, FileError
from specflow.importers.measured.mapping import LayoutMapping, read_mappings, write_mapping
from specflow.workflows.found_files import PassedOver
from specflow.workflows.mapping_file import read_mapping_file


@dataclass
class FolderMappings:
    """Layouts with the file that settles each, and the files that are no mappings or cannot be told by their layout."""

    layouts: dict[str, tuple[LayoutMapping, Path]] = field(default_factory=dict)
    passed_over: list[PassedOver] = field(default_factory=list)

    @property
    def text(self) -> str:
        """All of them as one mapping."""
        return "\n".join(write_mapping(mapping) for mapping, _ in self.layouts.values())

    @property
    def name(self) -> str:
        """The names of the files."""
        return ", ".join(dict.fromkeys(path.name for _, path in self.layouts.values()))


def folder_mappings(named: Path | None, found: Sequence[Path]) -> FolderMappings:
    """Read the mapping that the person names and those ``found`` in folders.

    The named one must be a mapping whose layouts have their keys: over a folder a mapping without a key would fit every
    table. Those found that are not so are passed over. DocumentError where two files settle one layout differently.
    """
    mappings = FolderMappings()
    if named is not None:
        for layout in read_mappings(read_mapping_file(named), named.name):
            if not layout.layout:
                raise DocumentError(
                    "the mapping does not say which layout it is for, and over a folder it would be used for all",
                    where=str(named),
                    hint='write its layout = "L-..." (--propose-mapping gives it), or attach its file alone',
                )
            _add(mappings, layout, named)
    for path in found:
        if named is not None and path.resolve() == named.resolve():
            continue
        try:
            layouts = read_mappings(read_mapping_file(path), path.name)
        except FileError as error:
            mappings.passed_over.append(PassedOver(path, f"no mapping: {error.message}"))
            continue
        if all(layout.layout for layout in layouts):
            for layout in layouts:
                _add(mappings, layout, path)
        else:
            reason = "a mapping without the key of its layout; name it with --mapping, for one file"
            mappings.passed_over.append(PassedOver(path, reason))
    return mappings


def _add(mappings: FolderMappings, layout: LayoutMapping, path: Path) -> None:
    known = mappings.layouts.get(layout.layout)
    if known is not None and known[0] != layout:
        raise DocumentError(
            f"{known[1].name} and {path.name} settle the layout {layout.layout} differently",
            where=str(path),
            hint="keep one of them in the folder",
        )
    mappings.layouts.setdefault(layout.layout, (layout, path))
