"""What comments of a Touchstone file say about how it is to be read: columns, x axis, port names, port impedances.

Comments are no part of the format, so nothing here changes a number. What speaks against the plain reading becomes a
doubt, which a person settles; the rest is said.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from specflow.importers.readers.touchstone_impedances import read_impedances
from specflow.importers.readers.touchstone_network import (
    Comment,
    Complexes,
    Doubt,
    DoubtKind,
    PairFormat,
    Remark,
)
from specflow.importers.readers.touchstone_shape import Shape, outside_data

_ENTRY = re.compile(
    r"(?:^|(?<=[^A-Za-z0-9])|(?<=mag)|(?<=ang)|(?<=db)|(?<=re)|(?<=im)|(?<=deg)|(?<=arg)|(?<=phase))"
    r"(?P<letter>[SYZGH])[ _]?"
    r"(?:[(\[]\s*(\d+)\s*[,;:]\s*(\d+)\s*[)\]]|(\d)(\d)(?!\d)|(\d+)[_,:](\d+))",
    re.IGNORECASE,
)
_FREQUENCY = re.compile(r"freq|hz\b|^\W*f\b", re.IGNORECASE)
_OTHER_AXIS = re.compile(
    r"\b(?:p_?in|p_?out|p_?avs?|p_?drive|p_?rf|power|pwr|dbm|v_?bias|voltage|current|bias|temp\w*|time|v_?gs?|v_?ds?)\b",
    re.IGNORECASE,
)
_VARIABLE = r"(?:power|pwr|p_?in|level|v_?gs?|bias|voltage|temp(?:erature)?|(?<!real[ -])time|cw)"
_SWEPT = re.compile(
    rf"\b{_VARIABLE}[ _-]+(?:(?:is|was)\s+)?(?:sweep|swept)\b|\bswept[ _-]+{_VARIABLE}\b"
    r"|\b(?:start|stop)(?: power| level)?\s*[=:]?\s*[-+\d.]+\s*dBm\b"
    r"|\bfrom [-+\d.]+(?: ?dBm)? to [-+\d.]+ ?dBm\b"
    rf"|sweep(?:[ _](?:type|mode|variable|parameter))?\s*[:=]\s*(?:\w+ )*{_VARIABLE}\b"
    r"|x[ -]?axis\s*[:=](?!\s*freq)",
    re.IGNORECASE,
)
_PORT_IS = re.compile(
    r"\bport\s*[\[<(]?\s*(?P<number>\d+)\s*[\]>)]?\s*(?:=|:|is\b|->)\s*(?P<name>[^,;=]+)", re.IGNORECASE
)
_IS_PORT = re.compile(r"(?P<name>[A-Za-z][\w /-]*?)\s*=\s*port\s*[\[<(]?\s*(?P<number>\d+)", re.IGNORECASE)
_A_FIGURE = re.compile(r"^[-+]?[\d.]+\s*\w{0,4}$")


@dataclass(frozen=True, slots=True)
class Told:
    """What comments tell: doubts, remarks, names of the ports ("" where none), impedances (n, p) or None."""

    doubts: tuple[Doubt, ...]
    remarks: tuple[Remark, ...]
    port_names: tuple[str, ...]
    impedances: Complexes | None


def read_comments(comments: Sequence[Comment], shape: Shape) -> Told:
    """Read the comments of a file; those between frequencies are looked through for impedances only."""
    outside = outside_data(comments, shape.lines)
    doubts = [*_column_doubts(outside, shape), *_axis_doubts(outside, shape)]
    remarks = [*_other_entry(outside, shape), *_ports_of_analyser(outside, shape)]
    impedances = read_impedances(comments, shape, remarks, doubts)
    names = _port_names(outside, shape.ports)
    return Told(tuple(doubts), tuple(remarks), names, impedances)


def mentions(text: str, parameter: str) -> list[tuple[int, int]]:
    """Return the entries that a text names, in its order: S21, S(2,1), S2_1, dB(S21), magS21 are all (2, 1)."""
    found = []
    for match in _ENTRY.finditer(text):
        if match["letter"].upper() == parameter:
            numbers = [int(group) for group in match.groups()[1:] if group is not None]
            found.append((numbers[0], numbers[1]))
    return found


def _runs(comments: Sequence[Comment]) -> Iterator[list[Comment]]:
    """Comments on lines that follow each other, none of them beside data."""
    run: list[Comment] = []
    for comment in comments:
        if comment.beside_data:
            continue
        if run and comment.line != run[-1].line + 1:
            yield run
            run = []
        run.append(comment)
    if run:
        yield run


def _column_doubts(comments: Sequence[Comment], shape: Shape) -> Iterator[Doubt]:
    """Doubts about headers in comments: another order of the entries than the format's, or other numbers in a pair."""
    wanted = [(i + 1, j + 1) for i, j in shape.order]
    for run in _runs(comments):
        named = [(one, found) for one in run if (found := mentions(one.text, shape.parameter))]
        listed = list(dict.fromkeys(entry for _, found in named for entry in found))
        if not named or (set(listed) != set(wanted) and not _FREQUENCY.search(named[0][0].text)):
            continue
        line, text = named[0][0].line, named[0][0].text
        if set(listed) <= set(wanted) and listed != [one for one in wanted if one in listed]:
            has, says = _names(wanted, shape.parameter), _names(listed, shape.parameter)
            what = f"the comment names the columns {says}; by the format they are {has}"
            yield Doubt(DoubtKind.COLUMN_ORDER, line, what, tuple(listed))
        meant = _format_named(text)
        if meant is not None and meant is not shape.pair_format:
            first, second = meant.parts
            what = (
                f"the comment names columns of {first} and {second}, "
                f"the option line says {shape.pair_format.value}"
            )
            yield Doubt(DoubtKind.PAIR_FORMAT, line, what)


def _other_entry(comments: Sequence[Comment], shape: Shape) -> Iterator[Remark]:
    """Say where the header of a one-port names another entry than S11: the analyser measured that port."""
    for comment in comments:
        found = mentions(comment.text, shape.parameter)
        is_header = len(set(found)) == 1 and _FREQUENCY.search(comment.text)
        if shape.ports == 1 and is_header and found[0] != (1, 1):
            says = _names(found[:1], shape.parameter)
            yield Remark(
                comment.line, f"the comment calls the one entry {says}; it is kept as {shape.parameter}11"
            )


def _ports_of_analyser(comments: Sequence[Comment], shape: Shape) -> Iterator[Remark]:
    """Say which ports of the analyser those of the file are, where comments name the entries by them: S33 S13 ..."""
    for run in _runs(comments):
        named = [(one, found) for one in run if (found := mentions(one.text, shape.parameter))]
        listed = list(dict.fromkeys(entry for _, found in named for entry in found))
        numbers = [i for i, j in listed if i == j]
        wanted = [(i, j) for i, j in shape.order]
        if len(numbers) != shape.ports or numbers == list(range(1, shape.ports + 1)) or shape.ports == 1:
            continue
        if listed == [(numbers[i], numbers[j]) for i, j in wanted]:
            shown = ", ".join(f"port {place} is {number}" for place, number in enumerate(numbers, 1))
            yield Remark(
                named[0][0].line, f"by the comments, of the file and of the analyser: {shown}", warns=True
            )


def _names(entries: Sequence[tuple[int, int]], parameter: str) -> str:
    joint = "" if all(i < 10 and j < 10 for i, j in entries) else "_"
    shown = " ".join(f"{parameter}{i}{joint}{j}" for i, j in entries[:12])
    return shown + (" ..." if len(entries) > 12 else "")


def _format_named(text: str) -> PairFormat | None:
    """The format that the words of a header mean, None where they mean none or several."""
    words = set(re.findall(r"[a-z]+", _ENTRY.sub(" ", text).casefold()))
    if {"re", "im"} <= words or {"real", "imag"} <= words or {"real", "imaginary"} <= words:
        return PairFormat.RI
    if words & {"db", "logmag", "dbmag"}:
        return PairFormat.DB
    if words & {"mag", "magn", "magnitude", "lin", "linmag", "abs"} and words & {
        "ang", "angle", "arg", "deg", "phase", "degree", "degrees", "phi",
    }:  # fmt: skip
        return PairFormat.MA
    return None


def _axis_doubts(comments: Sequence[Comment], shape: Shape) -> Iterator[Doubt]:
    """Doubts about the x axis: a header or a sentence that speaks of another sweep, or frequencies below zero."""
    below = np.flatnonzero(shape.axis < 0)
    if len(below):
        value = shape.axis[below[0]]
        what = f"the first number of the row is {value:.12g}, which is no frequency"
        yield Doubt(DoubtKind.X_AXIS, int(shape.lines[below[0]]), what)
    first_data = int(shape.lines[0])
    above = [one for one in comments if one.line < first_data and one.text]
    for comment in comments:
        match = _ENTRY.search(comment.text)
        head = comment.text[: match.start()] if match else ""
        is_last = bool(above) and comment is above[-1]
        if not match and is_last and not re.search(r"[:=\d]", comment.text):
            head = " ".join(comment.text.split()[:2])
        swept = _SWEPT.search(comment.text)
        is_header = head and not re.search(r"\d", head) and not _FREQUENCY.search(head)
        header = is_header and _OTHER_AXIS.search(head)
        several = match is None or len(mentions(comment.text, shape.parameter)) > 1
        begins = is_last and _OTHER_AXIS.match(head.strip()) is not None
        if (header and (several or begins)) or swept:
            what = f"the comment {comment.text[:60]!r} speaks of an x axis that is no frequency"
            yield Doubt(DoubtKind.X_AXIS, comment.line, what)


def _port_names(comments: Sequence[Comment], ports: int) -> tuple[str, ...]:
    names = [""] * ports
    for comment in comments:
        for match in (*_IS_PORT.finditer(comment.text), *_PORT_IS.finditer(comment.text)):
            number = int(match["number"])
            name = " ".join(match["name"].split()).strip("\"'")
            if 1 <= number <= ports and name and not _A_FIGURE.match(name) and not names[number - 1]:
                names[number - 1] = name[:60]
    return tuple(names) if any(names) else ()
