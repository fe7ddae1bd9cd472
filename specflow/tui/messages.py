"""What widgets and threads tell the app."""

from __future__ import annotations

from textual.message import Message

from specflow.model.card import Card
from specflow.model.finding import Finding
from specflow.workflows.browse import BrowseData


class DataLoaded(Message):
    """The project was judged, at first or again."""

    def __init__(self, data: BrowseData) -> None:
        super().__init__()
        self.data = data


class CardMade(Message):
    """The card that was asked for is there."""

    def __init__(self, data: BrowseData, card: Card) -> None:
        super().__init__()
        self.data = data
        self.card = card


class FindingsMade(Message):
    """The findings of a card that was made before the rules ran."""

    def __init__(self, data: BrowseData, id: str, findings: tuple[Finding, ...]) -> None:
        super().__init__()
        self.data = data
        self.id = id
        self.findings = findings


class RevisionSeen(Message):
    """The project is at this revision now."""

    def __init__(self, revision: int) -> None:
        super().__init__()
        self.revision = revision


class WorkFailed(Message):
    """Something could not be done; ``what`` and what the person can do."""

    def __init__(self, what: str, hint: str = "") -> None:
        super().__init__()
        self.what = what
        self.hint = hint


class RequirementChosen(Message):
    """The cursor of the tree is on a requirement, or on a heading ("")."""

    def __init__(self, id: str) -> None:
        super().__init__()
        self.id = id


class CardWanted(Message):
    """The card of this requirement is to be shown."""

    def __init__(self, id: str) -> None:
        super().__init__()
        self.id = id


class SearchChanged(Message):
    """The words to look for changed."""

    def __init__(self, words: str) -> None:
        super().__init__()
        self.words = words


class SearchEnded(Message):
    """The person is done typing; ``kept`` tells whether the words go on filtering."""

    def __init__(self, kept: bool) -> None:
        super().__init__()
        self.kept = kept
