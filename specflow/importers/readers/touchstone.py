"""Touchstone files 1.0, 1.1, 2.0 and 2.1 of any number of ports, read strictly.

Source of the rules: Touchstone File Format Specification 2.1, IBIS Open Forum, 26 January 2024. We parse ourselves,
because a lenient reader shifts what is short, and because each number must be walked back to its line; scikit-rf reads
the same files independently in the tests.
"""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import numpy as np

from specflow.errors import FileError
from specflow.importers.readers.encoding import decode
from specflow.importers.readers.source import Source
from specflow.importers.readers.touchstone_comments import read_comments
from specflow.importers.readers.touchstone_lines import FileLines, OptionText, read_lines
from specflow.importers.readers.touchstone_matrix import (
    complex_of,
    denormalised,
    pair_order,
    scattering_of,
)
from specflow.importers.readers.touchstone_network import (
    Complexes,
    Floats,
    NetworkFile,
    NoiseBlock,
    Remark,
    refusal,
    values_per_frequency,
)
from specflow.importers.readers.touchstone_option import Option, read_option
from specflow.importers.readers.touchstone_plausible import (
    angle_doubts,
    axis_doubts,
    number_remarks,
    pair_doubts,
)
from specflow.importers.readers.touchstone_rows import (
    NOISE_VALUES,
    Offsets,
    Rows,
    check_order,
    rows_of_version_1,
    rows_of_version_2,
)
from specflow.importers.readers.touchstone_sections import Sections, mode_reference, read_sections
from specflow.importers.readers.touchstone_shape import Shape

DEFAULT_OHM = 50.0

_HEAD_BYTES = 16384
_STATE_OPTION = 'say what holds for the numbers above it, as in --state "option line=# GHz S MA R 50"'
_WHOLE_OPTION = re.compile(
    r"#\s*(?=.*\b[kMGT]?Hz\b)(?=.*\b[SYZGH]\b)(?=.*\b(?:DB|MA|RI)\b)[\w\s.+-]*(?:!.*)?$", re.IGNORECASE
)
_ENDING = re.compile(r"\.s(?P<ports>\d{1,4})p", re.IGNORECASE)


def is_touchstone(name: str) -> bool:
    """Whether a file goes by the ending of a Touchstone file: .s2p, .S10P, .ts."""
    suffix = Path(name).suffix
    return _ENDING.fullmatch(suffix) is not None or suffix.casefold() == ".ts"


def has_option_line(path: Path) -> bool:
    """Whether a text file with another ending is a Touchstone file: its first line that is no comment is a whole option
    line, with unit, parameter and format.
    """
    if not path.is_file():
        return False  # a pipe would be waited for without end
    try:
        with path.open("rb") as stream:
            head = stream.read(_HEAD_BYTES)
    except OSError:
        return False  # whoever reads it will say why it cannot be read
    for line in head.decode("latin-1").splitlines():
        text = line.strip().lstrip("\ufeffï»¿")
        if text and not text.startswith("!"):
            return _WHOLE_OPTION.match(text) is not None
    return False


def ports_by_ending(name: str) -> int | None:
    """Return the number of ports that the ending of a name says, None for .ts and others."""
    match = _ENDING.fullmatch(Path(name).suffix)
    return int(match["ports"]) if match else None


def read_network(source: Source, stated_option: str = "") -> NetworkFile:
    """Read a Touchstone file. FileError with line, cause and remedy for what cannot be read rightly.

    ``stated_option`` is the option line of a file that has none above its numbers.
    """
    text, notes = decode(source)
    name = source.name
    lines = _with_stated_option(read_lines(text, name), stated_option, name)
    option = _option(lines, name)
    remarks = [*lines.remarks, *_option_remarks(lines, option)]
    sections = read_sections(lines, name) if lines.keywords else None
    if sections is None:
        rows = rows_of_version_1(lines, ports_by_ending(name), name)
    else:
        rows = _sectioned_rows(lines, sections, name)
        remarks += sections.remarks
    network = _network(source, lines, option, sections, rows)
    remarks += [*rows.remarks, *check_order(network.axis, rows.starts, lines, "frequency", name)]
    return _with_comments(
        replace(network, remarks=tuple(remarks), notes=tuple(notes)), lines, option, sections
    )


def _with_stated_option(lines: FileLines, text: str, name: str) -> FileLines:
    """The lines with an option line that a person states, where the file has none above its numbers."""
    if not text:
        return lines
    own = next((one for one in lines.options if not one.at or lines.keywords), None)
    if own is not None:
        what = f"the file has an option line of its own (#{own.text[:40]}), and another one is stated"
        raise refusal(name, own.line, what, "leave the statement out, or mend the line in the file")
    line = int(lines.numbers[0]) if len(lines.numbers) else 1
    said = OptionText(line, text.strip().removeprefix("#"), 0, 0)
    remark = Remark(line, f"the option line #{said.text} is that stated by the person")
    return replace(lines, options=(said, *lines.options), remarks=(*lines.remarks, remark))


def _option(lines: FileLines, name: str) -> Option:
    if not lines.options:
        line = int(lines.numbers[0]) if len(lines.numbers) else 1
        what = "there is no option line, which says unit and format of the numbers"
        raise refusal(name, line, what, 'say it, as in --state "option line=# GHz S MA R 50"')
    first = lines.options[0]
    if first.at and not lines.keywords:
        raise refusal(name, first.line, "numbers stand above the option line", _STATE_OPTION)
    return read_option(first, name)


def _option_remarks(lines: FileLines, option: Option) -> list[Remark]:
    later: list[OptionText] = list(lines.options[1:])
    return [
        Remark(
            one.line,
            f"another option line (#{one.text[:40]}) was ignored; the first one holds (line {option.line})",
            warns=" ".join(one.text.casefold().split()) != " ".join(lines.options[0].text.casefold().split()),
        )
        for one in later
    ]


def _sectioned_rows(lines: FileLines, sections: Sections, name: str) -> Rows:
    by_ending = ports_by_ending(name)
    if by_ending not in (None, sections.ports):
        raise FileError(
            f"the ending says {by_ending} ports, [Number of Ports] {sections.ports}",
            where=name,
            hint=f"name it .s{sections.ports}p or .ts, or mend the keyword",
        )
    size = values_per_frequency(sections.ports, sections.matrix_format)
    starts = rows_of_version_2(lines, sections.network, size, sections.frequencies, "frequency", name)
    if not len(starts):
        raise FileError(
            "not readable as a Touchstone file: it has no numbers", where=name, hint="export it again"
        )
    noise = np.zeros(0, np.int64)
    if sections.noise is not None:
        if sections.ports != 2:
            line = int(lines.numbers[sections.noise[0]]) if sections.noise[0] < len(lines.numbers) else 1
            raise refusal(name, line, "[Noise Data] belongs to two-ports only", "leave it out")
        count = sections.noise_frequencies
        noise = rows_of_version_2(lines, sections.noise, NOISE_VALUES, count, "noise frequency", name)
    return Rows(sections.ports, starts, noise)


def _reference(
    option: Option, sections: Sections | None, ports: int, name: str
) -> tuple[tuple[float, ...], bool]:
    """The reference of each port in ohm, and whether the file states it."""
    if sections is not None and sections.reference:
        return sections.reference, True
    if len(option.reference) > 1 and len(option.reference) != ports:
        what = f"R has {len(option.reference)} values for {ports} ports"
        raise refusal(name, option.line, what, "give one for all ports, or one for each")
    if len(option.reference) > 1:
        return option.reference, True
    return (option.reference or (DEFAULT_OHM,)) * ports, bool(option.reference)


def _network(
    source: Source, lines: FileLines, option: Option, sections: Sections | None, rows: Rows
) -> NetworkFile:
    name, ports = source.name, rows.ports
    if option.parameter in "GH" and ports != 2:
        what = f"{option.parameter} parameters belong to two-ports, the file has {ports}"
        raise refusal(name, option.line, what, "export S parameters")
    matrix_format = sections.matrix_format if sections else "Full"
    modes = sections.modes if sections else ()
    order = pair_order(ports, matrix_format, sections is None or sections.order == "21_12")
    places = 1 + 2 * order
    offsets = rows.starts[:, None, None] + places
    first, second = lines.values[offsets], lines.values[offsets + 1]
    recorded = complex_of(first, second, option.pair_format)
    ohms, _ = _reference(option, sections, ports, name)
    if modes and sections is not None:
        ohms = mode_reference(modes, ohms, sections.mode_line, name)
    reference = np.asarray(ohms, np.float64)
    s, conversion = _scattering(recorded, option, sections, reference, name)
    return NetworkFile(
        fingerprint=source.fingerprint,
        version=sections.version if sections else ("1.1" if len(option.reference) > 1 else "1.0"),
        parameter=option.parameter,
        pair_format=option.pair_format,
        axis=lines.values[rows.starts],
        axis_unit=option.unit,
        first=first,
        second=second,
        recorded=recorded,
        s=s,
        reference_ohm=reference,
        places=lines.places,
        starts=rows.starts,
        pair_places=places,
        matrix_format=matrix_format,
        port_modes=modes,
        conversion=conversion,
        noise=_noise(lines, rows.noise, sections, ohms, name),
        comments=lines.comments,
        holes=tuple(lines.holes[offset] for offset in sorted(lines.holes)),
    )


def _scattering(
    recorded: Complexes, option: Option, sections: Sections | None, reference: Floats, name: str
) -> tuple[Complexes, str]:
    """The scattering matrix, and how it was made where the file has another one."""
    letter = option.parameter
    if letter == "S":
        return recorded, ""
    ohms = ", ".join(f"{ohm:g}" for ohm in dict.fromkeys(reference.tolist()))
    if sections is None:
        if len(set(reference.tolist())) > 1:
            what = (
                f"{letter} parameters with a reference for each port: how they are normalised is not defined"
            )
            raise refusal(name, option.line, what, "export S parameters")
        recorded = denormalised(recorded, letter, float(reference[0]))
    normalised = " (normalised to it in version 1)" if sections is None else ""
    return scattering_of(recorded, letter, reference), f"S from {letter} at {ohms} ohm{normalised}"


def _noise(
    lines: FileLines, starts: Offsets, sections: Sections | None, ohms: tuple[float, ...], name: str
) -> NoiseBlock | None:
    if not len(starts):
        return None
    values = lines.values[starts[:, None] + np.arange(NOISE_VALUES)]
    check_order(values[:, 0], starts, lines, "noise frequency", name)
    return NoiseBlock(
        axis=values[:, 0],
        fmin_db=values[:, 1],
        magnitude=values[:, 2],
        angle_deg=values[:, 3],
        rn=values[:, 4],
        rn_unit_ohm=ohms[0] if sections is None else 1.0,
        starts=starts,
    )


def _with_comments(
    network: NetworkFile, lines: FileLines, option: Option, sections: Sections | None
) -> NetworkFile:
    """The network with what its comments tell, and with what its numbers themselves make doubtful."""
    _, stated = _reference(option, sections, network.ports, network.fingerprint.name)
    by_place = {
        int(network.pair_places[i, j]): (i, j) for i in range(network.ports) for j in range(network.ports)
    }
    order = tuple(by_place[place] for place in sorted(by_place))
    shape = Shape(
        network.parameter,
        network.pair_format,
        order,
        network.axis,
        network.lines,
        tuple(network.reference_ohm.tolist()),
        stated,
    )
    told = read_comments(network.comments, shape)
    remarks = [*network.remarks, *told.remarks, *number_remarks(network)]
    if not stated:
        remarks.append(Remark(option.line, "the option line names no R: 50 ohm by the format"))
    return replace(
        network,
        port_names=told.port_names,
        impedances=told.impedances,
        doubts=(
            *axis_doubts(network, option.line),
            *told.doubts,
            *pair_doubts(network),
            *angle_doubts(network),
        ),
        remarks=tuple(sorted(remarks, key=lambda one: one.line)),
    )
