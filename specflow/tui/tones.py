"""How a state looks. Each has a word or a mark of its own, so that nothing is told by colour alone."""

from __future__ import annotations

from specflow.model.card import PointState
from specflow.model.report import CellTone

# Theme variables, so that a person's own colours (or none, with NO_COLOR) take their place.
STYLES = {
    CellTone.PLAIN: "$text",
    CellTone.GOOD: "$success",
    CellTone.DOUBTFUL: "$warning",
    CellTone.BAD: "bold $error",
    CellTone.QUIET: "$secondary",
}
POINT_MARKS = {
    PointState.PROVED: "■",
    PointState.FAILING: "×",
    PointState.UNDECIDED: "~",
    PointState.WITHOUT_EVIDENCE: "·",
}
POINT_STYLES = {
    PointState.PROVED: "$success",
    PointState.FAILING: "bold $error",
    PointState.UNDECIDED: "$warning",
    PointState.WITHOUT_EVIDENCE: "$secondary",
}
