"""Points: what governs each required point of one activity, item by item, and whether it is proved.

At one point of one item: readings that count go before those that do not, then the highest rank, then the worst
verdict, then the smallest guarded margin. No averaging. Evidence about the design (analysis without an item) holds
for every item; items never complete each other's points unless the requirement says so.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.match import Matching
from specflow.conditions.points import Points
from specflow.conditions.proof import proves
from specflow.model.evidence import EvidenceTable
from specflow.model.verdict import PointResults, Verdict
from specflow.verification.credit import Credit, is_of_design
from specflow.verification.readings import Readings
from specflow.verification.records import Records

T = TypeVar("T", bound=np.generic)
Codes = NDArray[np.int8]
Flags = NDArray[np.bool_]
Rows = NDArray[np.intp]

#: Name of the item that stands for all of them where they may complete each other.
ALL_ITEMS = "all items"


@dataclass(frozen=True, slots=True)
class Bench:
    """Everything known at the required points of one activity, before items are told apart.

    ``nothing_required`` (n,): points at which the limit asks for nothing. ``together``: the limit is on all items at
    once.
    """

    points: Points
    matching: Matching
    records: Records
    readings: Readings
    credit: Credit
    nothing_required: Flags | None = None
    conditional_pass_counts: bool = True
    together: bool = False


@dataclass(frozen=True, slots=True)
class ItemPoints:
    """One item at every point (n,).

    ``effective`` is the verdict that rolls up (codes of Verdict): NONE where nothing that counts stands, or where a
    pass does not prove the point. ``rank`` is that of the governing reading, -1 without one; ``stale``: something there
    is stale; ``marginal``: the governing reading is near its limit. ``tables`` are those that ``results.table`` counts.
    """

    item: str
    results: PointResults
    tables: Sequence[EvidenceTable]
    effective: Codes
    counts: Flags
    rank: Codes
    stale: Flags
    marginal: Flags

    @property
    def proved(self) -> Flags:
        """Which points are proved."""
        return self.results.proved


def item_points(bench: Bench, *, together: bool) -> list[ItemPoints]:
    """Return the state of every point for each item that has evidence (for all as one item with ``together``)."""
    names, pair, item = _by_item(bench, together or bench.together)
    counts = _counting(bench, pair, item)
    governing, group = _governing(bench, pair, item, counts)
    found = []
    for code, name in enumerate(names):
        chosen = governing[group == code] if len(names) > 1 else governing
        own = item == code if len(names) > 1 else np.ones(len(pair), bool)
        found.append(_one_item(bench, name, pair[chosen], counts[chosen], pair[own]))
    return found


def _by_item(bench: Bench, together: bool) -> tuple[Sequence[str], Rows, NDArray[np.int32]]:
    """Return item names, and for every (pair, item) the pair and the code of the item it is evidence of."""
    pair = np.arange(bench.readings.size)
    if together:
        return (ALL_ITEMS,), pair, np.zeros(len(pair), np.int32)
    names = bench.records.items
    item = bench.records.item[bench.readings.record]
    if len(names) == 1:
        return names, pair, item
    if "" in names and any(is_of_design(source) for source in bench.records.sources):
        return _with_design(bench, names, pair, item)
    return _present(names, pair, item)


def _present(
    names: Sequence[str], pair: Rows, item: NDArray[np.int32]
) -> tuple[Sequence[str], Rows, NDArray[np.int32]]:
    """Keep the items that have evidence at a required point (one item at least), in their order."""
    seen = np.unique(item)
    if len(seen) == len(names):
        return names, pair, item
    if len(seen) == 0:
        return ("",), pair, item
    return [names[code] for code in seen], pair, np.searchsorted(seen, item).astype(np.int32)


def _with_design(
    bench: Bench, names: Sequence[str], pair: Rows, item: NDArray[np.int32]
) -> tuple[Sequence[str], Rows, NDArray[np.int32]]:
    """Give evidence about the design to every item that has evidence of its own."""
    of_design = np.array([is_of_design(source) for source in bench.records.sources])
    common = of_design[bench.records.source[bench.readings.record]] & (item == list(names).index(""))
    own = np.unique(item[~common])
    if len(own) == 0:
        return _present(names, pair, item)
    pairs, items = [pair[~common]], [item[~common]]
    for code in own:
        pairs.append(pair[common])
        items.append(np.full(int(common.sum()), code, np.int32))
    return _present(names, np.concatenate(pairs), np.concatenate(items))


def _counting(bench: Bench, pair: Rows, item: NDArray[np.int32]) -> Flags:
    """Return which readings weigh: those with credit, and fails without it unless they were re-verified.

    A stale fail is lifted by a reading with credit, of the same or a higher rank, of the same item at the point.
    """
    verdict = bench.readings.verdict[pair]
    credit = bench.credit.counts[pair]
    failing = (verdict == Verdict.FAIL) | (verdict == Verdict.CONDITIONAL_FAIL)
    counts = (credit & (verdict != Verdict.NONE)) | failing
    lifted = failing & ~credit & bench.credit.stale[pair]
    if lifted.any():
        key = item.astype(np.int64) * bench.points.size + bench.readings.point[pair]
        best = np.full(int(key.max()) + 1, -1, np.int8)
        np.maximum.at(best, key[credit], bench.credit.rank[pair][credit])
        counts &= ~(lifted & (bench.credit.rank[pair] <= best[key]))
    return np.asarray(counts)


def _governing(
    bench: Bench, pair: Rows, item: NDArray[np.int32], counts: Flags
) -> tuple[Rows, NDArray[np.int32]]:
    """Return the governing reading of each item at each of its points (places in ``pair``), and its item."""
    point = bench.readings.point[pair].astype(np.int64)
    place = (item.astype(np.int64) * bench.points.size + point) << 9
    order_key = (
        place
        | ((~counts).astype(np.int64) << 8)
        | ((7 - bench.credit.rank[pair].astype(np.int64)) << 4)
        | (15 - bench.readings.verdict[pair].astype(np.int64))
    )
    margin = bench.readings.guarded[pair]
    order = np.lexsort((margin, order_key))
    group = place[order]
    first = np.empty(len(order), bool)
    first[:1] = True
    np.not_equal(group[1:], group[:-1], out=first[1:])
    governing = order[first]
    return governing, item[governing]


def _one_item(bench: Bench, name: str, pair: Rows, counts: Flags, own: Rows) -> ItemPoints:
    """Spread the governing readings of one item over all points."""
    n = bench.points.size
    readings = bench.readings
    point = readings.point[pair]
    verdict = _filled(n, np.int8(Verdict.NONE), point, readings.verdict[pair])
    counted = _filled(n, np.bool_(False), point, counts)
    good = _passing(verdict, bench.conditional_pass_counts) & counted
    good &= _proved(bench, own)
    if bench.nothing_required is not None:
        free = bench.nothing_required & ~_marked(n, point)
        verdict[free], counted[free], good[free] = Verdict.NOT_TRIGGERED, True, True
    effective = np.where(counted, verdict, np.int8(Verdict.NONE))
    effective[_passing(effective, True) & ~good] = Verdict.NONE
    stale = _marked(n, readings.point[own[bench.credit.stale[own]]])
    results = _results(bench, name, pair, point, verdict, good)
    rank = _filled(n, np.int8(-1), point, bench.credit.rank[pair])
    marginal = _filled(n, np.bool_(False), point, readings.marginal[pair] & counts)
    tables = [source.table for source in bench.records.sources]
    return ItemPoints(name, results, tables, effective, counted, rank, stale, marginal)


def _proved(bench: Bench, own: Rows) -> Flags:
    """Ask the one place that decides whether readings with credit that pass prove each point."""
    good = np.zeros(bench.records.size, bool)
    passing = _passing(bench.readings.verdict[own], bench.conditional_pass_counts) & bench.credit.counts[own]
    good[bench.readings.record[own[passing]]] = True
    return proves(bench.points, bench.matching, good)


def _passing(verdict: Codes, conditional: bool) -> Flags:
    """Return where a verdict may prove its point: pass, not triggered, and a conditional pass where it counts."""
    return np.asarray(verdict <= (Verdict.CONDITIONAL_PASS if conditional else Verdict.PASS))


def _filled(n: int, rest: T, point: NDArray[np.int32], values: NDArray[T]) -> NDArray[T]:
    array = np.full(n, rest)
    array[point] = values
    return array


def _marked(n: int, point: NDArray[np.int32]) -> Flags:
    marked = np.zeros(n, bool)
    marked[point] = True
    return marked


def _results(
    bench: Bench, name: str, pair: Rows, point: NDArray[np.int32], verdict: Codes, proved: Flags
) -> PointResults:
    n, readings, records = bench.points.size, bench.readings, bench.records
    record = readings.record[pair]
    source = records.source[record]

    def numbers(values: NDArray[np.float64]) -> NDArray[np.float64]:
        array = np.full(n, np.nan)
        array[point] = values[pair]
        return array

    def places(values: NDArray[np.int32]) -> NDArray[np.int32]:
        array = np.full(n, -1, np.int32)
        array[point] = values
        return array

    columns: NDArray[np.int32] = np.array([one.place for one in records.sources], np.int32)
    low = numbers(readings.low)
    return PointResults(
        name,
        verdict,
        proved,
        numbers(readings.margin),
        numbers(readings.guarded),
        low,
        low if readings.high is readings.low else numbers(readings.high),
        numbers(readings.u),
        numbers(readings.lower),
        numbers(readings.upper),
        places(source),
        places(columns[source] if len(columns) else source),
        places(records.row[record]),
        tuple(one.table.id for one in records.sources),
    )
