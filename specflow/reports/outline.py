"""Outlines: all requirements in one line each, by hierarchy, by block, or by the document they come from."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator, Sequence

from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.outline import Outline, OutlineEntry
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import CloseOut, Compliance, Label
from specflow.reports.figures import label_tone, share
from specflow.reports.status import in_tree_order

# One short word for each label, so that a state is told without colour in a line of 30 characters.
MARKS = {
    Label.NOT_APPLICABLE: "n/a",
    Label.WAIVER_EXCEEDED: "waiver!",
    Label.FAILING: "FAILING",
    Label.PARTIALLY_COMPLIANT: "PARTLY",
    Label.CONFLICTING: "conflict",
    Label.REVERIFY: "reverify",
    Label.TBD: "TBD",
    Label.UNALLOCATED: "unalloc.",
    Label.NOT_PLANNED: "no plan",
    Label.PLANNED: "planned",
    Label.UNDECIDABLE: "undecid.",
    Label.INSUFFICIENT: "too few",
    Label.PARTIALLY_VERIFIED: "partial",
    Label.INCONCLUSIVE: "unclear",
    Label.MARGINAL: "marginal",
    Label.TBR: "TBR",
    Label.READY: "ready",
    Label.CLOSED_WAIVED: "waived",
    Label.CLOSED_VERIFIED: "verified",
}
FAILING = (Label.FAILING, Label.WAIVER_EXCEEDED, Label.PARTIALLY_COMPLIANT)


def outlines(snapshot: Snapshot, results: Results) -> tuple[Outline, ...]:
    """Return all orders in which the requirements can be looked at."""
    return (
        by_requirement(snapshot, results),
        by_block(snapshot, results),
        by_source(snapshot, results),
    )


def headline(results: Results, requirements: Sequence[Requirement]) -> str:
    """Return the total of points in a line; ``status.points_sentence`` says it with every denominator."""
    counted = [
        status
        for status in (results.of(requirement.id) for requirement in requirements)
        if status.compliance is not Compliance.NOT_APPLICABLE
    ]
    k, n = sum(status.k for status in counted), sum(status.n for status in counted)
    failing = sum(status.n_failing for status in counted)
    return f"{share(k, n)} points proved, {failing} failing"


def by_requirement(snapshot: Snapshot, results: Results) -> Outline:
    """Return the requirements with children under their first parent."""
    ordered, depths = in_tree_order(snapshot)
    entries = tuple(_entry(one, results, depths[one.id]) for one in ordered)
    return Outline(title="by requirement", entries=entries)


def by_block(snapshot: Snapshot, results: Results) -> Outline:
    """Return the product tree with the requirements on each block; those on a block not known come last."""
    entries: list[OutlineEntry] = []
    seen: set[str] = set()

    def walk(block: Block, depth: int) -> None:
        key = code_key(block.id)
        if key in seen:
            return
        seen.add(key)
        entries.append(OutlineEntry(title=_block_title(block), depth=depth))
        own = snapshot.requirements_of_block.get(key, ())
        entries.extend(_entry(one, results, depth + 1) for one in own)
        for child in sorted(snapshot.blocks_below.get(key, ()), key=lambda one: one.order):
            walk(child, depth + 1)

    for block in snapshot.blocks:
        if snapshot.find(Block, block.parent) is None:
            walk(block, 0)
    for block in snapshot.blocks:
        walk(block, 0)
    lost = [one for one in snapshot.requirements if code_key(one.block) not in seen]
    entries.extend(_group("block not known", lost, results))
    return Outline(title="by block", entries=tuple(entries))


def by_source(snapshot: Snapshot, results: Results) -> Outline:
    """Return the requirements under the document, and where none is named the workbook, that they come from."""
    groups: dict[str, list[Requirement]] = defaultdict(list)
    for requirement in snapshot.requirements:
        source = requirement.source
        document = " ".join(part for part in (source.document, source.issue) if part)
        file = requirement.origin.file if requirement.origin else ""
        groups[document or file or "no source named"].append(requirement)
    entries = [entry for title in sorted(groups) for entry in _group(title, groups[title], results)]
    return Outline(title="by source", entries=tuple(entries))


def _group(title: str, requirements: Sequence[Requirement], results: Results) -> Iterator[OutlineEntry]:
    if requirements:
        yield OutlineEntry(title=title)
        for requirement in requirements:
            yield _entry(requirement, results, 1)


def _block_title(block: Block) -> str:
    return block.id if block.name == block.id else f"{block.id} {block.name}"


def _entry(requirement: Requirement, results: Results, depth: int) -> OutlineEntry:
    status = results.of(requirement.id)
    return OutlineEntry(
        id=requirement.id,
        title=requirement.title,
        depth=depth,
        mark=MARKS[status.label],
        label=status.label.value,
        tone=label_tone(status.label),
        proved=f"{status.k}/{status.n}",
        is_open=status.close_out is CloseOut.OPEN,
        is_failing=status.label in FAILING,
    )
