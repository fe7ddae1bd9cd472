"""The card of one requirement: what the terminal, the page and the command line show of it, made once as data."""

from __future__ import annotations

from enum import StrEnum

from specflow.model.base import Document
from specflow.model.finding import Finding
from specflow.model.origin import Origin
from specflow.model.picture import Picture
from specflow.model.report import CellTone


class PointState(StrEnum):
    """What is known of one required point, as the proof grid shows it."""

    PROVED = "proved"
    UNDECIDED = "undecided"
    FAILING = "failing"
    WITHOUT_EVIDENCE = "without evidence"


class BarAxis(StrEnum):
    """What a margin bar is drawn over: values, or margins where the limit differs from point to point."""

    VALUE = "value"
    MARGIN = "margin"


class MarginBar(Document):
    """Limit, guard band and spread of results on one axis, in ``unit``; None where there is none.

    ``guard`` is the widest guard band (in the unit of margins). ``words`` says the same in one sentence; the texts are
    the numbers as they are shown. ``tone``: bad where a result is beyond the limit, doubtful where one is within the
    guard band.
    """

    axis: BarAxis = BarAxis.VALUE
    unit: str
    lower: float | None = None
    upper: float | None = None
    guard: float = 0.0
    least: float | None = None
    greatest: float | None = None
    lower_text: str = ""
    upper_text: str = ""
    least_text: str = ""
    greatest_text: str = ""
    words: str = ""
    tone: CellTone = CellTone.PLAIN


class ProofCell(Document):
    """One required point: what it is in words, its state, and the value that governs it.

    ``verdict`` says the state in words, ``item`` whose value it is, ``origin`` where it stands, and ``lacks`` what is
    missing where nothing proves the point.
    """

    words: str
    state: PointState
    verdict: str = ""
    value: str = ""
    margin: str = ""
    item: str = ""
    origin: str = ""
    lacks: str = ""


class ProofGrid(Document):
    """Required points of one activity and item as cells: rows of ``row_titles``, columns of ``column_titles``.

    Where no two dimensions vary there is one row without titles. A cell is None where the combination is not required.
    ``title`` names activity and item with k of n.
    """

    title: str = ""
    row_dimension: str = ""
    column_dimension: str = ""
    row_titles: tuple[str, ...] = ()
    column_titles: tuple[str, ...] = ()
    cells: tuple[tuple[ProofCell | None, ...], ...] = ()
    note: str = ""


class TrailStep(Document):
    """One step of the trail: up to the system (``depth`` < 0), the item itself (0), down to the cell (> 0)."""

    depth: int
    kind: str
    id: str = ""
    text: str
    tone: CellTone = CellTone.PLAIN
    origin: Origin | None = None


class Card(Document):
    """Everything shown of one requirement.

    ``facts`` are (name, value) pairs; ``cautions`` the sentences that radiated power or high power call for;
    ``pictures`` those of the budgets that serve it, ``traces`` those of its raw data; ``findings`` is None as long
    as the rules have not run.
    """

    id: str
    title: str
    label: str
    tone: CellTone
    limit_words: str
    limit_text: str
    proved: str
    k: int
    n: int
    facts: tuple[tuple[str, str], ...] = ()
    bar: MarginBar | None = None
    grids: tuple[ProofGrid, ...] = ()
    trail: tuple[TrailStep, ...] = ()
    remarks: tuple[str, ...] = ()
    findings: tuple[Finding, ...] | None = ()
    cautions: tuple[str, ...] = ()
    pictures: tuple[Picture, ...] = ()
    traces: tuple[Picture, ...] = ()
