"""Rules about the items that evidence names."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator

from specflow.model.base import code_key
from specflow.model.requirement import Method
from specflow.model.verdict import PointResults
from specflow.rules.base import Found
from specflow.rules.facts import Facts
from specflow.rules.words import counted, listed

_OF_HARDWARE = (Method.TEST, Method.DEMONSTRATION, Method.INSPECTION)


def unknown_item(facts: Facts) -> Iterator[Found]:
    """Evidence names an item that is not registered.

    Why: its hardware type and build are unknown, so it is taken for engineering hardware; or a serial is misspelt.
    Fails: the sheet says serial SN-0017; the project has SN-0071.
    Passes: id or serial of a registered item.
    Do: register the item, or correct the serial in the mapping of the table.
    """
    found: dict[str, list[str]] = defaultdict(list)
    for requirement, status in facts.judged:
        together = requirement.provers.may_complete_each_other
        names = {item for activity in status.activities for item in activity.items if item and not together}
        for name in names:
            if code_key(name) not in facts.snapshot.items_by_name:
                found[name].append(requirement.id)
    for name, requirements in found.items():
        message = f"the item {name} is not registered; its evidence is of {listed(requirements)}"
        yield Found(name, message, related=tuple(requirements))


def unnamed_item(facts: Facts) -> Iterator[Found]:
    """A test does not say which item was tested.

    Why: nobody can tell its build, or whether a later change touches it.
    Fails: the table has no column of items and its mapping names none.
    Passes: each row names an item, or the mapping names one for the table.
    Do: name the item in the mapping of the table.
    """
    for requirement, status in facts.judged:
        counts: dict[str, int] = defaultdict(int)
        for activity in status.activities:
            nobody = activity.items.get("")
            for used in _tables(nobody) if nobody is not None else ():
                counts[used] += 1
        for name, count in counts.items():
            table = facts.table(name)
            if table is not None and table.method in _OF_HARDWARE:
                message = f"{table.id} names no item for {counted(count, 'point')} of this requirement"
                yield Found(requirement.id, message, origin=facts.place(table), related=(table.id,))


def _tables(results: PointResults) -> list[str]:
    return [results.tables[place] for place in results.table.tolist() if place >= 0]


def item_of_another_block(facts: Facts) -> Iterator[Found]:
    """Evidence of one block names an item that is a specimen of another.

    Why: the reading may stand against the wrong block.
    Fails: a table of the amplifier names the serial of a mixer.
    Passes: the item is a specimen of the block of the table.
    Do: correct the item or the block in the mapping of the table.
    """
    for requirement, status in facts.judged:
        names = {item for activity in status.activities for item in activity.items}
        for name in sorted(names):
            item = facts.snapshot.items_by_name.get(code_key(name))
            if item is not None and code_key(item.block) != code_key(requirement.block):
                message = f"the item {item.id} is a specimen of {item.block}, the requirement is on {requirement.block}"
                yield Found(requirement.id, message, origin=requirement.origin, related=(item.id,))
