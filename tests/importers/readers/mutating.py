"""Files changed at random, for every reader: what comes out is the file's own numbers, or one clear refusal, soon.

``python -m tests.importers.readers.mutating 2000`` changes each seed 2000 times and prints the counts; the tests do a
few of each. A change is a flip, a cut, an insertion, a repetition or a deletion of bytes, of the file or, in archives,
of a part, so that the checksums hold and the parts themselves are wrong.
"""

from __future__ import annotations

import contextlib
import io
import json
import os
import pickle
import random
import re
import resource
import sys
import tempfile
import time
import warnings
import zipfile
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
import openpyxl

from specflow.errors import FileError, UnitError
from specflow.importers.readers import Grid, Value, csv, large_text, open_grids, read_source, xlsx
from specflow.importers.readers.bulk import BulkError, bulk_workbook
from specflow.importers.readers.touchstone import read_network

DATA = Path(__file__).parents[2] / "data"
MOST_TIMES_BARE = 100
LEAST_SECONDS = 0.5  # of processor time, for the machine is never alone
MOST_GROWN_KILOBYTES = 300_000

_NUMBER = re.compile(r"[+\-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+\-]?[0-9]+)?")
_MOST_LINES = 5  # a quoted cell may go over several
_LINE_END = re.compile(r"\r\n|\r|\n")

CSV = b'# run 3\n"Freq, GHz";Gain (dB);note\n1,5;20,25;"a;b"\n2,5;-3e1;\n\n3,5;<-90;\xc2\xb5\n4,5;21;ok\n'
TSV = b"Start,10,MHz\nStop,20,MHz\n\nf (GHz)\tG (dB)\tNF\n" + b"27.5\t20.25\t1.5\n28.5\t-2.5e1\t0.75\n" * 6
PLAIN = b"f,G,NF\n" + b"".join(b"%d.5,%d.25,-1e-%d\n" % (row, row * 7, row) for row in range(30))
JSON = b"".join(
    json.dumps({"item": f"T{row}", "f": {"value": 27.5 + row, "unit": "GHz"}, "gain": 20 - row / 8}).encode()
    + b"\n"
    for row in range(8)
)
TOUCHSTONE = (
    b"! VAR T=25\n# GHz S DB R 50\n"
    + b"".join(b"%d.5 -20.1 10 -3.25 -45.5 -3.5 44 -18 7.25\n" % row for row in range(1, 6))
    + b"2 1.5 0.3 45 0.2\n4 1.75 0.35 50 0.25\n"
)
HTML = b"<html><table><tr><th>f<th>G</tr>" + b"<tr><td>27.5<td>-1.25</tr>" * 4 + b"</table></html>"


@dataclass
class Outcome:
    """Counts of what became of the changed files of one seed, the slowest and what should not have happened."""

    counts: Counter[str] = field(default_factory=Counter)
    compared: int = 0
    slowest: float = 0.0
    faults: list[str] = field(default_factory=list)


@dataclass(frozen=True)
class Seed:
    """A small file, how it is read, and how numbers of the grid are compared with an independent reading."""

    name: str
    content: bytes
    check: Callable[[bytes, list[Grid]], int]
    read: Callable[[Path], list[Grid]] = lambda path: list(open_grids(path))
    parts: tuple[str, ...] = ()


def changed(content: bytes, draw: random.Random) -> bytes:
    """The content with one to three changes."""
    for _ in range(draw.randint(1, 3)):
        at, size = draw.randrange(len(content) + 1), draw.choice((1, 1, 1, 2, 4, 16, 200))
        new = draw.choice((draw.randbytes(min(size, 6)), draw.choice(_TOKENS), content[at : at + size]))
        match draw.randrange(5):
            case 0 if content:
                place = min(at, len(content) - 1)
                flipped = content[place] ^ (1 << draw.randrange(8))
                content = content[:place] + bytes([flipped]) + content[place + 1 :]
            case 1:
                content = content[:at] if draw.random() < 0.3 else content[:at] + content[at + size :]
            case 2:
                content = content[:at] + new + content[at:]
            case 3:
                content = content[:at] + content[at : at + size] * draw.randint(2, 50) + content[at + size :]
            case _:
                content = content[:at] + new + content[at + len(new) :]
    return content


_TOKENS = (
    b"\0", b'"', b"\n", b"\r", b"\t", b";", b",", b".", b"-", b"1e999", b"NaN", b"999999999", b"<", b">", b"&", b"/>",
    b"<v>", b"</c>", b"]]>", b"<!--", b"<![CDATA[", b"<?x", b"\xff\xfe", b"\xef\xbb\xbf", b"\xe2\x88\x92", b"{", b"}",
    b"[", b"A1", b"XFD1048576", b"=cmd", b"#", b"!", b"%",
)  # fmt: skip


def changed_part(content: bytes, part: str, draw: random.Random) -> bytes:
    """The archive with one part changed; its directory and checksums fit."""
    packed = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(content)) as before, zipfile.ZipFile(packed, "w") as after:
        for name in before.namelist():
            inside = before.read(name)
            after.writestr(name, changed(inside, draw) if name == part else inside)
    return packed.getvalue()


def run(seed: Seed, count: int, draw: random.Random, folder: Path) -> Outcome:
    """Change, read and compare ``count`` times."""
    outcome = Outcome()
    path = folder / seed.name
    path.write_bytes(seed.content)
    start = time.process_time()
    seed.read(path)
    most = max(MOST_TIMES_BARE * (time.process_time() - start), LEAST_SECONDS)
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    for _ in range(count):
        part = draw.choice((*seed.parts, "")) if seed.parts else ""
        content = changed_part(seed.content, part, draw) if part else changed(seed.content, draw)
        path.write_bytes(content)
        _one(seed, path, content, most, outcome)
    grown = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before
    if grown > MOST_GROWN_KILOBYTES:
        outcome.faults.append(f"{seed.name}: memory grew by {grown // 1024} MB")
    return outcome


def _one(seed: Seed, path: Path, content: bytes, most: float, outcome: Outcome) -> None:
    start = time.process_time()
    grids: list[Grid] | None = None
    try:
        read = seed.read(path)
        _use(read)
        grids = read
    except (FileError, UnitError) as error:
        outcome.counts["refused"] += 1
        if isinstance(error, FileError) and not (error.message and error.where and error.hint):
            outcome.faults.append(f"{seed.name}: no place or remedy: {error}")
    except Exception as error:
        outcome.counts["crashed"] += 1
        outcome.faults.append(f"{seed.name}: {type(error).__name__}: {error} in {content!r}")
    took = time.process_time() - start
    outcome.slowest = max(outcome.slowest, took)
    if took > most:
        outcome.faults.append(f"{seed.name}: took {took:.2f} s in {content!r}")
    if grids is not None:
        outcome.counts["read"] += 1
        try:
            outcome.compared += seed.check(content, grids)
        except AssertionError as error:
            outcome.counts["differs"] += 1
            outcome.faults.append(f"{seed.name}: {error} in {content!r}")


def _use(grids: list[Grid]) -> None:
    """What every importer does with a grid must not fail, either."""
    for grid in grids:
        for column in range(grid.first_column, min(grid.last_column, 30) + 1):
            numbers, _ = grid.column_floats(column, grid.first_row, grid.last_row + 1)
            assert not np.isinf(numbers).any()


def plain_numbers(grid: Grid) -> dict[tuple[int, int], float]:
    """The plain numbers of a grid by row and column, as the importer gets them."""
    found = {}
    for column in range(grid.first_column, min(grid.last_column, 60) + 1):
        numbers, _ = grid.column_floats(column, grid.first_row, grid.last_row + 1)
        for place in np.flatnonzero(~np.isnan(numbers)).tolist():
            found[grid.first_row + place, column] = float(numbers[place])
    return found


def check_openpyxl(content: bytes, grids: list[Grid]) -> int:
    """Where openpyxl reads the same bytes, its numbers are ours."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        try:
            book = openpyxl.load_workbook(io.BytesIO(content), data_only=True)
        except Exception:  # whatever it raises: there is nothing to compare with
            return 0
    compared = 0
    for grid in grids:
        if grid.name not in book.sheetnames:
            continue
        for (row, column), number in plain_numbers(grid).items():
            other = book[grid.name].cell(row, column).value
            if isinstance(other, float | int) and not isinstance(other, bool):
                assert float(other) == number, f"{grid.name} {row},{column}: {number} and {other}"
                compared += 1
    return compared


Tables = dict[str, tuple[tuple[int, int], list[list[object]]]]


def check_calamine(content: bytes, grids: list[Grid]) -> int:
    """Where python-calamine reads the same bytes, its numbers are ours."""
    compared = 0
    tables = _in_a_child(_bulk_tables, content)
    for grid in grids:
        (top, left), rows = tables.get(grid.name, ((0, 0), []))
        for (row, column), number in plain_numbers(grid).items():
            if 0 <= row - top - 1 < len(rows) and 0 <= column - left - 1 < len(rows[row - top - 1]):
                other = rows[row - top - 1][column - left - 1]
                if isinstance(other, float | int) and not isinstance(other, bool):
                    assert float(other) == number, f"{grid.name} {row},{column}: {number} and {other}"
                    compared += 1
    return compared


def _bulk_tables(content: bytes) -> Tables:
    try:
        with bulk_workbook(content) as book:
            sheets = {name: book.get_sheet_by_name(name) for name in book.sheet_names}
            return {name: (one.start or (0, 0), one.to_python()) for name, one in sheets.items()}
    except BulkError:
        return {}  # there is nothing to compare with


def _in_a_child(work: Callable[[bytes], Tables], content: bytes) -> Tables:
    """What ``work`` gives in a process of its own, which damaged bytes may take down."""
    reading, writing = os.pipe()
    child = os.fork()
    if child == 0:
        resource.setrlimit(resource.RLIMIT_AS, (4 << 30, 4 << 30))
        with os.fdopen(writing, "wb") as pipe, contextlib.suppress(Exception):
            pickle.dump(work(content), pipe)
        os._exit(0)
    os.close(writing)
    with os.fdopen(reading, "rb") as pipe:
        answer = pipe.read()
    os.waitpid(child, 0)
    found: Tables = pickle.loads(answer) if answer.endswith(b".") else {}
    return found


def check_text(content: bytes, grids: list[Grid]) -> int:
    """Each number stands so in its line, not as a piece of a longer one, and is what ``float`` makes of it."""
    if content.startswith((b"\xff\xfe", b"\xfe\xff")) or content.count(b"\0") > len(content) // 4:
        return 0  # another encoding, whose lines are not those of the bytes
    lines = _LINE_END.split(content.decode("latin-1"))
    compared = 0
    for grid in grids:
        for (row, column), number in plain_numbers(grid).items():
            written = str(grid.value(row, column)).strip()
            point = written.replace(",", ".") if grid.decimal == "," else written
            assert _NUMBER.fullmatch(point), f"{row},{column}: {written!r} is no plain number"
            assert float(point) == number, f"{row},{column}: {written!r} became {number}"
            alone = re.search(
                rf"(?<![0-9.eE+\-]){re.escape(written)}(?![0-9.])",
                "\n".join(lines[row - 1 : row + _MOST_LINES]),
            )
            assert alone, f"{row},{column}: {written!r} is not in its line {lines[row - 1]!r}"
            compared += 1
    return compared


def check_json(content: bytes, grids: list[Grid]) -> int:
    """Each number is one of those that the json module finds in its line."""
    compared = 0
    lines = _LINE_END.split(content.removeprefix(b"\xef\xbb\xbf").replace(b"\0", b"").decode("latin-1"))
    for grid in grids:
        for (row, column), number in plain_numbers(grid).items():
            try:
                record = json.loads(lines[row - 1])
            except ValueError:
                continue
            assert number in _numbers_in(record), f"{row},{column}: {number} is not in {lines[row - 1]!r}"
            compared += 1
    return compared


def _numbers_in(record: object) -> list[float]:
    if isinstance(record, dict | list):
        inside = record.values() if isinstance(record, dict) else record
        return [number for one in inside for number in _numbers_in(one)]
    return [float(record)] if isinstance(record, float | int) else []


def check_network(content: bytes, grids: list[Grid]) -> int:
    """Each number stands where the reader says that it stands."""
    lines = _LINE_END.split(content.decode("latin-1"))
    compared = 0
    for number, line, token in grids[0].rows:
        fields = lines[int(str(line)) - 1].split("!")[0].split()
        written = fields[int(str(token)) - 1].replace("\0", "")
        plain = re.sub("[dD]", "e", written)  # the exponent of FORTRAN
        assert float(plain) == number, f"line {line}, {token}: {number} in {lines[int(str(line)) - 1]!r}"
        compared += 1
    return compared


def read_network_file(path: Path) -> list[Grid]:
    """The first number of each entry of a network file, each with its place: line and number on the line."""
    network = read_network(read_source(path))
    rows: list[list[Value]] = [
        [float(network.first[point, row, column]), *network.place(point, row, column)]
        for point, row, column in np.argwhere(~np.isnan(network.first)).tolist()
    ]
    return [Grid("network", rows, is_text=True)]


def as_streamed(path: Path) -> list[Grid]:
    """As a large workbook is read."""
    kept, xlsx.STREAMED_BYTES = xlsx.STREAMED_BYTES, 0
    try:
        return list(open_grids(path))
    finally:
        xlsx.STREAMED_BYTES = kept


def as_large_text(path: Path) -> list[Grid]:
    """As a large text table is read."""
    kept = csv.LARGE_BYTES, large_text.BLOCK, large_text._HEAD
    csv.LARGE_BYTES, large_text.BLOCK, large_text._HEAD = -1, 100, 30
    try:
        return list(open_grids(path))
    finally:
        csv.LARGE_BYTES, large_text.BLOCK, large_text._HEAD = kept


def seeds() -> list[Seed]:
    """One small file of each format, and the large ways of reading."""
    book = (DATA / "readers" / "bench.xlsx").read_bytes()
    parts = ("xl/worksheets/sheet1.xml", "xl/sharedStrings.xml", "xl/styles.xml", "xl/workbook.xml")
    ods = (DATA / "readers" / "bench.ods").read_bytes()
    old = (DATA / "readers" / "bench.xls").read_bytes()
    return [
        Seed("a.xlsx", book, check_openpyxl, parts=parts),
        Seed("a.xlsm", book, check_openpyxl, parts=parts),
        Seed("large.xlsx", book, check_openpyxl, as_streamed, parts),
        Seed("a.ods", ods, check_calamine, parts=("content.xml", "content.xml", "styles.xml")),
        Seed("a.xls", old, check_calamine),
        Seed("a.csv", CSV, check_text),
        Seed("a.tsv", TSV, check_text),
        Seed("plain.csv", PLAIN, check_text),
        Seed("large.csv", PLAIN, check_text, as_large_text),
        Seed("a.jsonl", JSON, check_json),
        Seed("a.html", HTML, lambda content, grids: 0),
        Seed("a.s2p", TOUCHSTONE, check_network, read_network_file),
    ]


def main(count: int, number: int = 1) -> int:
    """Print the counts of each seed and the first faults; returns how many faults there were."""
    faults: list[str] = []
    with tempfile.TemporaryDirectory() as folder:
        for seed in seeds():
            outcome = run(seed, count, random.Random(f"{number} {seed.name}"), Path(folder))
            counts = ", ".join(f"{many} {what}" for what, many in sorted(outcome.counts.items()))
            print(
                f"{seed.name:12} {counts}; {outcome.compared} numbers compared; slowest {outcome.slowest:.3f} s"
            )
            faults += outcome.faults
    for fault in faults[:20]:
        print(fault[:1500])
    return len(faults)


if __name__ == "__main__":
    sys.exit(min(main(*map(int, sys.argv[1:])), 1))
