"""The keywords of version 2, and which data lines each of them is followed by."""

from __future__ import annotations

import re
from dataclasses import dataclass

from specflow.importers.readers.touchstone_lines import FileLines, Keyword
from specflow.importers.readers.touchstone_network import Remark, refusal

VERSIONS = ("2.0", "2.1")
_KNOWN = (
    "version", "number of ports", "two-port data order", "number of frequencies", "number of noise frequencies",
    "reference", "matrix format", "mixed-mode order", "network data", "noise data", "end",
)  # fmt: skip
_WITH_DATA = ("reference", "network data", "noise data")
_ORDERS = ("12_21", "21_12")
_AGAIN = "export the file again, or add it"


@dataclass(frozen=True, slots=True)
class Sections:
    """What the keywords of a version 2 file say.

    ``order`` is "12_21", "21_12" or "" (not a two-port); ``reference`` is empty where no keyword gives it; ``network``
    and ``noise`` are data lines (from, to).
    """

    version: str
    ports: int
    order: str
    frequencies: int | None
    noise_frequencies: int | None
    reference: tuple[float, ...]
    matrix_format: str
    modes: tuple[str, ...]
    network: tuple[int, int]
    noise: tuple[int, int] | None
    mode_line: int = 0
    remarks: tuple[Remark, ...] = ()


def read_sections(lines: FileLines, name: str) -> Sections:
    """Read the keywords. Raises FileError for one that is unknown, missing, doubled or has a value it cannot have."""
    found = _by_name(lines, name)
    remarks: list[Remark] = []
    version = _version(lines, found, name, remarks)
    ports = _count(found, "number of ports", name)
    if ports is None:
        raise _missing(lines, "Number of Ports", name)
    network = _section(lines, found, "network data")
    if network is None:
        raise _missing(lines, "Network Data", name)
    _check_data_lines(lines, found, name)
    if "number of frequencies" not in found:
        remarks.append(Remark(0, "[Number of Frequencies] is missing; the frequencies were counted", True))
    if "end" not in found:
        remarks.append(Remark(lines.last_line, "[End] is missing; every count came out all the same", True))
    mixed = found.get("mixed-mode order")
    return Sections(
        version=version,
        ports=ports,
        order=_order(lines, found, ports, name),
        frequencies=_count(found, "number of frequencies", name),
        noise_frequencies=_count(found, "number of noise frequencies", name),
        reference=_reference(lines, found, ports, name),
        matrix_format=_matrix_format(found, name),
        modes=_modes(mixed, ports, name),
        network=network,
        noise=_section(lines, found, "noise data"),
        mode_line=mixed.line if mixed else 0,
        remarks=tuple(remarks),
    )


def _by_name(lines: FileLines, name: str) -> dict[str, Keyword]:
    found: dict[str, Keyword] = {}
    for keyword in lines.keywords:
        if keyword.name not in _KNOWN:
            hint = "known are " + ", ".join(f"[{one.title()}]" for one in _KNOWN)
            raise refusal(name, keyword.line, f"the keyword [{keyword.name.title()}] is not known", hint)
        if keyword.name in found:
            before = found[keyword.name].line
            what = f"[{keyword.name.title()}] stands here and in line {before}"
            raise refusal(name, keyword.line, what, "keep one of them")
        found[keyword.name] = keyword
    return found


def _version(lines: FileLines, found: dict[str, Keyword], name: str, remarks: list[Remark]) -> str:
    version = found.get("version")
    if version is None:
        line = lines.keywords[0].line
        raise refusal(name, line, "keywords in [ ] belong to version 2, and [Version] is missing", _AGAIN)
    if version.value not in VERSIONS:
        what = f"[Version] {version.value!r} is not known"
        raise refusal(
            name, version.line, what, f"known are {', '.join(VERSIONS)}, and files without [Version]"
        )
    first = lines.keywords[0].line
    if version.line != first or (lines.options and lines.options[0].line < version.line):
        remarks.append(Remark(version.line, "[Version] is not the first line that counts"))
    return version.value


def _missing(lines: FileLines, keyword: str, name: str) -> Exception:
    return refusal(name, lines.keywords[0].line, f"version 2 needs [{keyword}], which is missing", _AGAIN)


def _count(found: dict[str, Keyword], key: str, name: str) -> int | None:
    keyword = found.get(key)
    if keyword is None:
        return None
    if not (keyword.value.isascii() and keyword.value.isdecimal() and 0 < int(keyword.value) <= 10**8):
        what = f"[{key.title()}] {keyword.value[:20]!r} is no count"
        raise refusal(name, keyword.line, what, "write a whole number above 0")
    return int(keyword.value)


def _order(lines: FileLines, found: dict[str, Keyword], ports: int, name: str) -> str:
    keyword = found.get("two-port data order")
    if ports != 2:
        return ""
    if keyword is None:
        what = (
            "version 2 needs [Two-Port Data Order] in a two-port file, which is missing: "
            "S12 and S21 cannot be told apart"
        )
        raise refusal(
            name, lines.keywords[0].line, what, "add 21_12 (S21 first) or 12_21, as the file was written"
        )
    if keyword.value not in _ORDERS:
        what = f"[Two-Port Data Order] {keyword.value[:20]!r} is not known"
        raise refusal(name, keyword.line, what, "write 12_21 or 21_12")
    return keyword.value


def _section(lines: FileLines, found: dict[str, Keyword], key: str) -> tuple[int, int] | None:
    """The data lines that follow a keyword, up to the next one."""
    keyword = found.get(key)
    if keyword is None:
        return None
    place = lines.keywords.index(keyword)
    following = lines.keywords[place + 1 :]
    return keyword.at, following[0].at if following else len(lines.counts)


def _check_data_lines(lines: FileLines, found: dict[str, Keyword], name: str) -> None:
    """Refuse numbers that follow no keyword which has any."""
    held = [part for key in _WITH_DATA if (part := _section(lines, found, key))]
    covered = sorted(held)
    place = 0
    for start, stop in [*covered, (len(lines.counts), len(lines.counts))]:
        if place < start:
            what = "numbers stand outside [Reference], [Network Data] and [Noise Data]"
            raise refusal(name, int(lines.numbers[place]), what, "export the file again")
        place = max(place, stop)


def _reference(lines: FileLines, found: dict[str, Keyword], ports: int, name: str) -> tuple[float, ...]:
    """The ohms after [Reference], on its line and on those below."""
    keyword = found.get("reference")
    if keyword is None:
        return ()
    try:
        ohms = [float(word) for word in keyword.value.split()]
    except ValueError:
        raise refusal(name, keyword.line, "[Reference] has a word that is no number", "give ohms") from None
    start, stop = _section(lines, found, "reference") or (0, 0)
    for line in range(start, stop):
        first = int(lines.offsets[line])
        ohms += lines.values[first : first + int(lines.counts[line])].tolist()
    if len(ohms) != ports:
        what = f"[Reference] has {len(ohms)} values for {ports} ports"
        raise refusal(name, keyword.line, what, "give one for each port, in ohm")
    if not all(0 < ohm < 1e9 for ohm in ohms):
        raise refusal(
            name, keyword.line, "[Reference] has a value that is no positive resistance", "give ohms"
        )
    return tuple(ohms)


def _matrix_format(found: dict[str, Keyword], name: str) -> str:
    keyword = found.get("matrix format")
    if keyword is None:
        return "Full"
    value = keyword.value.capitalize()
    if value not in ("Full", "Lower", "Upper"):
        what = f"[Matrix Format] {keyword.value[:20]!r} is not known"
        raise refusal(name, keyword.line, what, "write Full, Lower or Upper")
    return value


def _modes(keyword: Keyword | None, ports: int, name: str) -> tuple[str, ...]:
    if keyword is None:
        return ()
    modes = tuple(word.upper() for word in keyword.value.split())
    if len(modes) != ports:
        what = f"[Mixed-Mode Order] names {len(modes)} modes for {ports} ports"
        raise refusal(name, keyword.line, what, "name one for each row of the matrix: D1,2 C1,2 S3 ...")
    for mode in modes:
        numbers = [int(number) for number in re.findall(r"\d+", mode)]
        if not re.fullmatch(r"S\d+|[DC]\d+,\d+", mode) or not all(0 < one <= ports for one in numbers):
            what = f"[Mixed-Mode Order] {mode[:20]!r} is no mode of {ports} ports"
            raise refusal(name, keyword.line, what, "a mode is D1,2, C1,2 or S3")
    return modes


def mode_reference(
    modes: tuple[str, ...], ohms: tuple[float, ...], line: int, name: str
) -> tuple[float, ...]:
    """Return the reference of each mode: 2·R of a differential one, R/2 of a common one.

    Source: Touchstone File Format Specification 2.1, [Mixed-Mode Order]; the ports of a pair have one R.
    """
    references = []
    for mode in modes:
        ports = [int(number) - 1 for number in re.findall(r"\d+", mode)]
        if len({ohms[port] for port in ports}) > 1:
            what = f"the ports of {mode} have unlike references"
            raise refusal(name, line, what, "a pair has one reference impedance")
        references.append(ohms[ports[0]] * {"D": 2.0, "C": 0.5, "S": 1.0}[mode[0]])
    return tuple(references)
