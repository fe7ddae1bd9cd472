"""Port impedances in comments of a Touchstone file: kept as facts, and doubted where they are not the reference."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence

import numpy as np

from specflow.importers.readers.touchstone_network import Comment, Complexes, Doubt, DoubtKind, Remark
from specflow.importers.readers.touchstone_shape import Shape, outside_data

_IMPEDANCES = re.compile(r"^\s*port impedances?\s*:?(?P<rest>.*)$", re.IGNORECASE)
_ONE_IMPEDANCE = re.compile(
    r"\b(?:z_?[0o]|(?:port|reference|ref\.?|characteristic|system)[ _]impedance)\b[^\d!]{0,20}?(?P<ohm>\d+(?:\.\d+)?)"
    r"(?:\s*ohms?|\s*Ω)?",
    re.IGNORECASE,
)
#: A reference that is off by this share is a mismatch of |S| 0.01, 40 dB (the difference by twice the mean).
_FAR_OFF, _OFF = 0.02, 1e-3
_NUMBER = re.compile(r"[-+]?\d+(?:\.\d*)?(?:[eE][-+]?\d+)?")


def read_impedances(
    comments: Sequence[Comment], shape: Shape, remarks: list[Remark], doubts: list[Doubt]
) -> Complexes | None:
    """Port impedances (n, p) that comments give for each frequency.

    A doubt where they are far from the reference, a remark where they are not quite it.
    """
    blocks = _impedance_blocks(comments)
    wanted = shape.ports
    usable = [(line, block) for line, block in blocks if len(block) in (wanted, 2 * wanted)]
    if not usable:
        for line, ohm in _single_impedances(outside_data(comments, shape.lines)):
            away = np.abs(ohm - np.asarray(shape.reference)) / np.asarray(shape.reference)
            _compare(line, float(away.min()), f"an impedance of {ohm:g} ohm", shape, remarks, doubts)
        return None
    values = np.array([_complex_list(block, wanted) for _, block in usable], np.complex128)
    line = usable[0][0]
    if len(values) not in (1, len(shape.axis)) or len(usable) != len(blocks):
        what = (
            f"{len(blocks)} lists of port impedances in comments for {len(shape.axis)} frequencies; not used"
        )
        remarks.append(Remark(line, what, warns=True))
        return None
    away = np.abs(values - np.asarray(shape.reference)) / np.asarray(shape.reference)
    shown = ", ".join(f"port {port + 1} {_ohms(one)}" for port, one in enumerate(values[0][:4]))
    shown += ", ..." if len(values) > 1 or wanted > 4 else ""
    _compare(line, float(away.max()), f"port impedances ({shown})", shape, remarks, doubts)
    return np.broadcast_to(values, (len(shape.axis), wanted))


def _complex_list(block: list[float], wanted: int) -> Complexes:
    """Impedances from ``wanted`` real numbers, or as many pairs of real and imaginary part."""
    pairs = np.asarray(block, np.float64).reshape(wanted, -1)
    value = np.zeros(wanted, np.complex128)
    value.real = pairs[:, 0]
    value.imag = pairs[:, 1] if pairs.shape[1] > 1 else 0.0
    return value


def _compare(
    line: int, away: float, given: str, shape: Shape, remarks: list[Remark], doubts: list[Doubt]
) -> None:
    """Doubt the reference where comments give another one; say it where the other one is nearly the same."""
    what = _not_the_reference(given, shape)
    if away > _FAR_OFF and shape.parameter == "S":
        doubts.append(Doubt(DoubtKind.REFERENCE, line, what))
    elif away > _OFF:
        remarks.append(Remark(line, f"{what}; they were read as written", warns=True))


def _not_the_reference(what: str, shape: Shape) -> str:
    ohms = sorted(set(shape.reference))
    says = (
        f"the option line says R {ohms[0]:g}" if shape.reference_stated else "the file names no R (so 50 ohm)"
    )
    return f"comments give {what}, {says}: the entries may be referred to the impedances of the comments"


def _ohms(value: complex) -> str:
    return f"{value.real:.6f} ohm" if value.imag == 0 else f"{value.real:.6f}{value.imag:+.6f}j ohm"


def _impedance_blocks(comments: Sequence[Comment]) -> list[tuple[int, list[float]]]:
    """Lists that begin with "Port Impedance", over comment lines that follow each other and hold only numbers."""
    blocks: list[tuple[int, list[float]]] = []
    last = -1
    for comment in comments:
        match = _IMPEDANCES.match(comment.text)
        if match:
            numbers = _NUMBER.findall(match["rest"])
            blocks.append((comment.line, [float(one) for one in numbers]))
            last = comment.line
        elif blocks and comment.line == last + 1 and not re.search(r"[A-DF-Za-df-z]", comment.text):
            blocks[-1][1].extend(float(one) for one in _NUMBER.findall(comment.text))
            last = comment.line
    return blocks


def _single_impedances(comments: Sequence[Comment]) -> Iterator[tuple[int, float]]:
    """Impedances that comments name for the whole file, with their lines."""
    for comment in comments:
        match = _ONE_IMPEDANCE.search(comment.text)
        if match:
            yield comment.line, float(match["ohm"])
