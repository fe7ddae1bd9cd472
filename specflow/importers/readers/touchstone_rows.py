"""Which numbers belong to which frequency: version 1 by the lines, version 2 by the counts it declares.

Every number has to be accounted for. A row that is short or long is refused with its line: nothing is ever shifted.
In version 1 the first line of a frequency has an odd count (the frequency and pairs), all others an even one.
"""

from __future__ import annotations

import math
from collections import Counter
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.errors import FileError
from specflow.importers.readers.touchstone_lines import FileLines
from specflow.importers.readers.touchstone_network import (
    Floats,
    Remark,
    refusal,
    values_per_frequency,
)

NOISE_VALUES = 5
_MOST_PORTS = 512
_AGAIN = "mend that line, or export the file again"

Offsets = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Rows:
    """Offsets of the first number of each frequency and of each noise frequency; what was seen on the way."""

    ports: int
    starts: Offsets
    noise: Offsets
    remarks: tuple[Remark, ...] = ()


@dataclass(frozen=True, slots=True)
class _Groups:
    """Data lines in groups that begin with an odd count: first data line, number of lines and of numbers of each."""

    first: Offsets
    lines: Offsets
    sizes: Offsets


def rows_of_version_1(lines: FileLines, ports: int | None, name: str) -> Rows:
    """Group the numbers of a version 1 file; ``ports`` by the ending of its name, None where that says nothing."""
    if not len(lines.counts):
        raise FileError(
            "not readable as a Touchstone file: it has no numbers", where=name, hint="export it again"
        )
    if lines.counts[0] % 2 == 0:
        _refuse_even_start(lines, ports, name)
    groups = _groups(lines)
    found = _ports(lines, groups, ports, name)
    size = values_per_frequency(found)
    network, noise = _parted(lines, groups, found, size, name)
    remarks = _layout_remarks(lines, groups, network, found, name)
    first = lines.offsets[groups.first]
    return Rows(found, first[:network], first[network : network + noise], remarks)


def rows_of_version_2(
    lines: FileLines, section: tuple[int, int], size: int, count: int | None, what: str, name: str
) -> Offsets:
    """Return the offset of the first number of each frequency of a section (data lines from, to).

    ``size`` numbers each, ``count`` frequencies as declared. FileError where a count does not come out.
    """
    start, stop = section
    begins = lines.offsets[start:stop]
    total = int(lines.counts[start:stop].sum())
    end = (int(begins[0]) if len(begins) else 0) + total
    groups = np.arange(int(begins[0]), end, size, dtype=np.int64) if total else np.zeros(0, np.int64)
    inside = np.flatnonzero(~np.isin(groups, begins))
    if len(inside) or total % size:
        bad = int(groups[inside[0] - 1 if len(inside) else -1])
        line, _ = lines.places.of(bad)
        stands = f"the {what} that begins here does not have {size} numbers up to the end of a line"
        raise refusal(name, line, stands, _AGAIN)
    if count is not None and count != len(groups):
        line = int(lines.numbers[stop - 1]) if total else lines.last_line
        raise refusal(
            name,
            line,
            f"{len(groups)} rows of {what} are there, {count} are declared",
            "the file is cut off, or its count is wrong: export it again",
        )
    return groups


def _refuse_even_start(lines: FileLines, ports: int | None, name: str) -> None:
    count, line = int(lines.counts[0]), int(lines.numbers[0])
    expected = _first_line_count(ports) if ports else 0
    wanted = f", {expected} are expected" if expected else " (a frequency and pairs make an odd count)"
    raise refusal(name, line, f"the row has {count} numbers{wanted}", _AGAIN)


def _first_line_count(ports: int) -> int:
    return 1 + 2 * (ports * ports if ports < 3 else min(ports, 4))


def _groups(lines: FileLines) -> _Groups:
    first = np.flatnonzero(lines.counts % 2)
    ends = np.append(first[1:], len(lines.counts))
    sums = np.append(lines.offsets, len(lines.values))
    return _Groups(first, ends - first, sums[ends] - lines.offsets[first])


def _ports(lines: FileLines, groups: _Groups, ports: int | None, name: str) -> int:
    """The ports by the ending, where the rows do not say another number; else by the rows."""
    size = int(groups.sizes[0])
    root = math.isqrt((size - 1) // 2)
    by_rows = root if root and values_per_frequency(root) == size else None
    common = Counter(groups.sizes.tolist()).most_common(1)[0]
    if ports is None:
        if by_rows is None or by_rows > _MOST_PORTS:
            line = int(lines.numbers[0])
            what = f"the first frequency has {size} numbers, which is 2n²+1 for no number of ports"
            raise refusal(name, line, what, "name the file .s2p, .s3p ... after its ports; or mend that row")
        return by_rows
    if ports < 1 or ports > _MOST_PORTS:
        raise FileError(f"{ports} ports by the ending of its name", where=name, hint="1 to 512 are read")
    same = common[0] == size and common[1] * 10 >= 9 * len(groups.sizes)
    if by_rows not in (None, ports) and same:
        raise FileError(
            f"the ending says {ports} ports, each frequency has {size} numbers, which is {by_rows} ports",
            where=f"{name}, line {int(lines.numbers[0])}",
            hint=f"name it .s{by_rows}p if its rows are complete",
        )
    return ports


def _parted(lines: FileLines, groups: _Groups, ports: int, size: int, name: str) -> tuple[int, int]:
    """How many groups are network data, and how many noise data; refuses any that is neither."""
    wrong = np.flatnonzero(groups.sizes != size)
    network = int(wrong[0]) if len(wrong) else len(groups.sizes)
    if network == len(groups.sizes):
        return network, 0
    noise = groups.sizes[network:]
    if ports != 2 or not network or noise[0] != NOISE_VALUES or groups.lines[network] != 1:
        _refuse_row(lines, groups, network, size, name)
    axis = lines.values[lines.offsets[groups.first]]
    line = int(lines.numbers[groups.first[network]])
    if axis[network] > axis[network - 1]:
        what = (
            f"a row of 5 numbers is no row of a two-port, and no noise block begins at {axis[network]:.12g}, "
            f"above the last frequency {axis[network - 1]:.12g}"
        )
        raise refusal(name, line, what, _AGAIN)
    odd = np.flatnonzero((noise != NOISE_VALUES) | (groups.lines[network:] != 1))
    if len(odd):
        place = network + int(odd[0])
        line, count = int(lines.numbers[groups.first[place]]), int(lines.counts[groups.first[place]])
        if groups.lines[place] > 1 and count == NOISE_VALUES:
            line = int(lines.numbers[groups.first[place] + 1])
            count = int(lines.counts[groups.first[place] + 1])
        raise refusal(name, line, f"a row of {count} numbers in the noise block, 5 are expected", _AGAIN)
    return network, len(noise)


def _refuse_row(lines: FileLines, groups: _Groups, place: int, size: int, name: str) -> None:
    """Name the line in which a frequency departs from the layout of the others."""
    start = int(groups.first[place])
    pattern = _usual_pattern(lines, groups, size)
    following = lines.counts[start : start + len(pattern)].tolist()
    begin = int(lines.numbers[start])
    for step, wanted in enumerate(pattern):
        if step >= len(following):
            what = (
                f"the file ends within the frequency that begins in line {begin}: "
                f"{int(groups.sizes[place])} of {size} numbers"
            )
            raise refusal(name, int(lines.numbers[-1]), what, "it is cut off: export it again")
        if following[step] != wanted:
            line, count = int(lines.numbers[start + step]), following[step]
            what = f"the row has {count} numbers, {wanted} are expected"
            if step:
                what += f" (the frequency begins in line {begin})"
            raise refusal(name, line, what, _AGAIN)
    line = int(lines.numbers[start + len(pattern)])
    count = int(lines.counts[start + len(pattern)])
    what = f"the row has {count} numbers, the next frequency should begin here with {pattern[0]}"
    raise refusal(name, line, what, _AGAIN)


def _usual_pattern(lines: FileLines, groups: _Groups, size: int) -> tuple[int, ...]:
    """The counts of the lines of most complete frequencies; by the format where none is complete."""
    good = np.flatnonzero(groups.sizes == size)[:100]
    patterns = Counter(
        tuple(lines.counts[groups.first[one] : groups.first[one] + groups.lines[one]].tolist())
        for one in good
    )
    if patterns:
        return patterns.most_common(1)[0][0]
    ports = math.isqrt((size - 1) // 2)
    if ports < 3:
        return (size,)
    rest = [min(8, 2 * ports - done) for done in range(0, 2 * ports, 8)]
    return (rest[0] + 1, *rest[1:], *(rest * (ports - 1)))


def _layout_remarks(
    lines: FileLines, groups: _Groups, network: int, ports: int, name: str
) -> tuple[Remark, ...]:
    """Say how the lines depart from the format; refuse where they do so differently from frequency to frequency."""
    first, count = groups.first[:network], groups.lines[:network]
    line = int(lines.numbers[first[0]])
    same = bool((count == count[0]).all())
    within = np.arange(int(count[0]))
    uniform = same and bool((lines.counts[first[:, None] + within] == lines.counts[first[0] + within]).all())
    if ports < 3:
        if uniform and count[0] == 1:
            return ()
        if not uniform:
            odd = int(first[np.flatnonzero(count != 1)[0]])
            what = (
                "the numbers of this frequency stand on several lines, those of others on other lines or one"
            )
            raise refusal(name, int(lines.numbers[odd]), what, _AGAIN)
        return (Remark(line, f"each frequency stands on {count[0]} lines; the format has one"),)
    row_ends = np.arange(1, ports) * 2 * ports + 1
    checked = range(1) if uniform else range(network)
    for place in checked:
        ends = np.cumsum(lines.counts[first[place] : first[place] + count[place]])
        if count[place] > 1 and not np.isin(row_ends, ends).all():
            if uniform:
                what = "rows of the matrix do not begin on lines of their own; the numbers were counted off"
                return (Remark(line, what, warns=True),)
            at = int(lines.numbers[first[place]])
            what = "the lines of this frequency do not end with the rows of the matrix"
            raise refusal(name, at, what, _AGAIN)
    if bool((count == 1).any()):
        what = f"all {ports * ports} entries of a frequency stand on one line; the format has a line for each row"
        return (Remark(line, what),)
    return ()


def check_order(axis: Floats, starts: Offsets, lines: FileLines, what: str, name: str) -> tuple[Remark, ...]:
    """Look at the order of the axis: refuse one that goes back and forth, say where it falls or stands still."""
    if not np.isfinite(axis).all():
        bad = lines.places.of(int(starts[np.flatnonzero(~np.isfinite(axis))[0]]))[0]
        raise refusal(name, bad, f"the {what} is no number", _AGAIN)
    steps = np.diff(axis)
    remarks = []
    if (steps < 0).any() and not (steps < 0).all():
        place = int(np.flatnonzero(steps < 0)[0]) + 1
        line = lines.places.of(int(starts[place]))[0]
        stands = f"the {what} goes back from {axis[place - 1]:.12g} to {axis[place]:.12g}"
        remedy = "a file holds one sweep, rising (a noise block has 5 numbers a row): split or sort it"
        raise refusal(name, line, stands, remedy)
    if len(steps) and (steps < 0).all():
        line = lines.places.of(int(starts[0]))[0]
        remarks.append(Remark(line, f"the {what} falls from row to row; the rows were read as they stand"))
    for place in np.flatnonzero(steps == 0)[:20].tolist():
        line = lines.places.of(int(starts[place + 1]))[0]
        remarks.append(Remark(line, f"{axis[place]:.12g} stands twice in a row; both rows were read", True))
    return tuple(remarks)
