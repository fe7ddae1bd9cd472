"""What is doubtful in a network, settled by what was said: x axis, order of columns, format, angles, reference."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np

from specflow.conditions import Comparison, find_dimension
from specflow.errors import UnitError
from specflow.importers.measured.result import Question
from specflow.importers.readers.touchstone_matrix import complex_of
from specflow.importers.readers.touchstone_network import HERTZ, Doubt, DoubtKind, NetworkFile, PairFormat
from specflow.units import compatible, format_unit, parse_unit

#: What is said of a file without an option line, before it can be read at all.
OPTION_LINE = "option line"

#: What may be said of a network, beside what may be said of any table and "port N".
NETWORK_KEYS = (OPTION_LINE, "x axis", "column order", "format", "angles", "reference", "derive", "spacing")

_REMEDIES = {
    DoubtKind.X_AXIS: '--state "x axis=frequency" (or "frequency in GHz") if it is one, else its condition: '
    '"x axis=input_level in dBm"',
    DoubtKind.COLUMN_ORDER: '--state "column order=format" if the file keeps to the format, "column order=comment" if '
    "the comment is right",
    DoubtKind.PAIR_FORMAT: "--state format=DB, MA or RI, as the numbers are meant",
    DoubtKind.REFERENCE: '--state "reference=50 ohm" (one, or one for each port) as the entries are referred to it, or '
    "--state reference=comments",
    DoubtKind.ANGLES: "--state angles=degrees, as the format has them, or --state angles=radians",
}


@dataclass(frozen=True, slots=True)
class Axis:
    """The condition that the rows are over, its unit, and who said so."""

    dimension: str
    unit: str
    by: str


@dataclass
class SettledNetwork:
    """A network with what was settled, its axis, open questions, and what was done in words."""

    network: NetworkFile
    axis: Axis
    questions: list[Question] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)


def settle(network: NetworkFile, said: Mapping[str, str]) -> SettledNetwork:
    """Settle the doubts of a network by what was said (x axis, column order, format ...); ask about the rest."""
    settled = SettledNetwork(network, Axis("frequency", network.axis_unit, "the option line"))
    text = said.get("format", "")
    if text:
        _settle_format(settled, text)
    reference = said.get("reference", "")
    if reference:
        _settle_reference(settled, reference)
    angles = said.get("angles", "")
    if angles:
        _settle_angles(settled, angles)
    order = said.get("column order", "")
    if order:
        _settle_order(settled, order)
    axis = said.get("x axis", "")
    if axis:
        _settle_axis(settled, axis)
    settled_kinds = {
        kind
        for kind, words in (
            (DoubtKind.X_AXIS, axis),
            (DoubtKind.COLUMN_ORDER, order),
            (DoubtKind.PAIR_FORMAT, text),
            (DoubtKind.ANGLES, angles),
            (DoubtKind.REFERENCE, reference),
        )
        if words
    }
    first = {one.kind: one for one in reversed(network.doubts) if one.kind not in settled_kinds}
    settled.questions += [_question(one) for one in network.doubts if one is first.get(one.kind)]
    return settled


def _question(doubt: Doubt) -> Question:
    return Question(doubt.kind.value, f"line {doubt.line}", doubt.what, _REMEDIES[doubt.kind])


def _settle_format(settled: SettledNetwork, text: str) -> None:
    network = settled.network
    known = {one.value.casefold(): one for one in PairFormat}
    meant = known.get(text.strip().casefold())
    if meant is None:
        settled.questions.append(Question("format", "", f"{text!r} is no format", "say DB, MA or RI"))
        return
    if meant is network.pair_format:
        return
    if network.parameter != "S":
        what = f"another format cannot be stated for {network.parameter} parameters"
        settled.questions.append(Question("format", "", what, "mend the option line of the file"))
        return
    recorded = complex_of(network.first, network.second, meant)
    settled.notes.append(
        f"the pairs were read as {meant.value}, as stated; the option line says {network.pair_format}"
    )
    settled.network = replace(network, pair_format=meant, recorded=recorded, s=recorded)


def _settle_reference(settled: SettledNetwork, text: str) -> None:
    """The entries stand as written; what is settled is the impedance at which they hold, which the title then says."""
    network, words = settled.network, re.sub(r"\b(?:ohms?)\b|ω|[,;]", " ", text.casefold()).split()
    if words == ["comments"] and network.impedances is not None:
        settled.network = replace(network, at_impedances=True)
        settled.notes.append("the entries are referred to the impedances of the comments, as stated")
        return
    try:
        ohms = [float(word) for word in words]
    except ValueError:
        ohms = []
    if (
        network.parameter != "S"
        or len(ohms) not in (1, network.ports)
        or not all(0 < ohm < 1e9 for ohm in ohms)
    ):
        what = f"{text!r} is no reference of the {network.parameter} parameters of {network.ports} ports"
        settled.questions.append(Question("reference", "", what, _REMEDIES[DoubtKind.REFERENCE]))
        return
    stated = np.broadcast_to(np.asarray(ohms), (network.ports,)).copy()
    noise = network.noise
    if noise is not None and network.version.startswith("1"):  # where Rn is divided by the reference
        noise = replace(noise, rn_unit_ohm=float(stated[0]))
    settled.network = replace(network, reference_ohm=stated, noise=noise)
    settled.notes.append(f"the entries are referred to {settled.network.reference_words}, as stated")


def _settle_angles(settled: SettledNetwork, text: str) -> None:
    """Degrees are kept as recorded; radians are converted, so that every angle of the store is in degrees."""
    network, word = settled.network, text.strip().casefold()
    if word in ("degrees", "degree", "deg"):
        settled.notes.append("the angles are in degrees, as stated")
        return
    if word not in ("radians", "radian", "rad"):
        what = f"{text!r} is no unit of the angles"
        settled.questions.append(Question("angles", "", what, _REMEDIES[DoubtKind.ANGLES]))
        return
    if network.pair_format is PairFormat.RI or network.parameter != "S":
        what = f"{network.parameter} parameters in {network.pair_format} have no angles to be stated"
        settled.questions.append(Question("angles", "", what, "leave the statement out"))
        return
    degrees = np.rad2deg(network.second)
    recorded = complex_of(network.first, degrees, network.pair_format)
    settled.network = replace(network, second=degrees, recorded=recorded, s=recorded)
    settled.notes.append("the angles are radians, as stated, and are kept in degrees")


def _settle_order(settled: SettledNetwork, text: str) -> None:
    word = text.strip().casefold()
    if word in ("format", "as the format", "by the format"):
        settled.notes.append("the columns stand in the order of the format, as stated")
        return
    network = settled.network
    doubt = next((one for one in network.doubts if one.kind is DoubtKind.COLUMN_ORDER), None)
    complete = doubt is not None and len(doubt.named) == network.ports**2 and network.matrix_format == "Full"
    if word not in ("comment", "as the comment", "by the comment") or doubt is None or not complete:
        what = f"{text!r} does not settle the order of the columns"
        remedy = _REMEDIES[DoubtKind.COLUMN_ORDER]
        settled.questions.append(Question("column order", "", what, remedy))
        return
    if network.parameter != "S":
        what = f"another order cannot be stated for {network.parameter} parameters"
        settled.questions.append(
            Question("column order", "", what, "mend the comment or export S parameters")
        )
        return
    settled.network = _reordered(network, doubt.named)
    settled.notes.append(
        "the columns stand in the order of the comment, as stated, not in that of the format"
    )


def _reordered(network: NetworkFile, named: tuple[tuple[int, int], ...]) -> NetworkFile:
    """The network with its k-th pair taken as the k-th entry that was named."""
    pairs = np.empty(network.pair_places.shape, np.int64)
    for pair, (i, j) in enumerate(named):
        pairs[i - 1, j - 1] = pair
    by_pair = {int(network.pair_places[i, j]): (i, j) for i, j in np.ndindex(*pairs.shape)}
    from_rows = np.empty(pairs.shape, np.int64)
    from_columns = np.empty(pairs.shape, np.int64)
    for i, j in np.ndindex(*pairs.shape):
        from_rows[i, j], from_columns[i, j] = by_pair[1 + 2 * int(pairs[i, j])]
    return replace(
        network,
        first=network.first[:, from_rows, from_columns],
        second=network.second[:, from_rows, from_columns],
        recorded=network.recorded[:, from_rows, from_columns],
        s=network.s[:, from_rows, from_columns],
        pair_places=1 + 2 * pairs,
    )


def _settle_axis(settled: SettledNetwork, text: str) -> None:
    name, _, unit = text.strip().partition(" in ")
    if name.strip().casefold() in ("frequency", "freq"):
        _settle_frequency(settled, unit)
        return
    known = find_dimension(name)
    if known is None or known.comparison is Comparison.TEXT:
        what = f"{name!r} is no condition that an axis can have"
        settled.questions.append(Question("x axis", "", what, _REMEDIES[DoubtKind.X_AXIS]))
        return
    unit = unit.strip() or known.unit
    try:
        fits = compatible(parse_unit(unit or "1"), parse_unit(known.unit or "1"))
    except UnitError:
        fits = False
    if not fits:
        what = f"{unit!r} is no unit of {known.title}"
        settled.questions.append(Question("x axis", "", what, f"say it in {known.unit}"))
        return
    settled.axis = Axis(known.name, format_unit(parse_unit(unit)) if unit else "", "stated by the person")
    settled.notes.append(
        f"the first number of each row is {known.title} in {unit}, as stated; the option line says "
        f"{settled.network.axis_unit}"
    )


def _settle_frequency(settled: SettledNetwork, unit: str) -> None:
    """The axis is frequency: in the unit of the option line, or in another that is stated."""
    own = settled.network.axis_unit
    stated = next((one for one in HERTZ if one.casefold() == (unit.strip() or own).casefold()), None)
    if stated is None:
        what = f"{unit.strip() or own} is no unit of frequency"
        settled.questions.append(
            Question("x axis", "", what, 'say "x axis=frequency in GHz" (Hz, kHz, MHz, GHz)')
        )
        return
    settled.axis = Axis("frequency", stated, "stated by the person" if unit else settled.axis.by)
    settled.network = replace(settled.network, axis_unit=stated)
    settled.notes.append(
        "the x axis is frequency, as stated" + (f", in {stated}, not in {own}" if stated != own else "")
    )
