"""The app: loads in threads, watches the project, hands what comes back to the screen. Wiring only."""

from __future__ import annotations

from collections.abc import Callable
from typing import ClassVar

from textual import work
from textual.app import App
from textual.binding import Binding, BindingType
from textual.theme import Theme
from textual.timer import Timer

from specflow.errors import SpecflowError
from specflow.tui.messages import CardMade, CardWanted, DataLoaded, FindingsMade, RevisionSeen, WorkFailed
from specflow.tui.screens.browse import BrowseScreen
from specflow.workflows.browse import BrowseData

POLL_SECONDS = 2.0
PAUSE_SECONDS = 0.05  # who runs through the tree does not want a card of every line

THEME = Theme(
    name="specflow",
    primary="#8ab6d6",
    secondary="#8ba4b5",
    accent="#c9a46a",
    foreground="#dbe4ea",
    background="#0f161c",
    surface="#17212a",
    panel="#1d2a35",
    success="#86c9b5",
    warning="#dcb671",
    error="#f08f7a",
    dark=True,
)


class BrowseApp(App[None]):
    """Browse a project. ``load`` judges it, ``revision`` says whether it changed; both are called in threads."""

    CSS_PATH = "app.tcss"
    TITLE = "specflow"
    ENABLE_COMMAND_PALETTE = False
    BINDINGS: ClassVar[list[BindingType]] = [Binding("ctrl+c", "quit", "quit", show=False, priority=True)]

    def __init__(self, load: Callable[[], BrowseData], revision: Callable[[], int] | None = None) -> None:
        super().__init__()
        self._load = load
        self._revision = revision
        self._data: BrowseData | None = None
        self._wanted = ""
        self._pause: Timer | None = None
        self.register_theme(THEME)
        self.theme = THEME.name

    @property
    def browse(self) -> BrowseScreen:
        """The main screen."""
        screen = self.screen_stack[1]
        assert isinstance(screen, BrowseScreen)
        return screen

    async def on_mount(self) -> None:
        """Show the screen at once; what takes time follows."""
        await self.push_screen(BrowseScreen())
        self.load_data()
        if self._revision is not None:
            self.set_interval(POLL_SECONDS, self.look_for_changes)

    @work(thread=True, exclusive=True, group="load", exit_on_error=False)
    def load_data(self) -> None:
        """Judge the project."""
        try:
            self.post_message(DataLoaded(self._load()))
        except SpecflowError as error:
            self.post_message(WorkFailed(str(error.message), error.hint))

    @work(thread=True, exclusive=True, group="revision", exit_on_error=False)
    def look_for_changes(self) -> None:
        """Ask for the project revision; one that cannot be told now is told the next time."""
        if self._revision is None:
            return
        try:
            self.post_message(RevisionSeen(self._revision()))
        except SpecflowError as error:
            self.log.warning(str(error))

    @work(thread=True, exclusive=True, group="card", exit_on_error=False)
    def make_card(self, data: BrowseData, id: str) -> None:
        """Make the card of a requirement."""
        try:
            self.post_message(CardMade(data, data.card(id)))
        except SpecflowError as error:
            self.post_message(WorkFailed(str(error.message), error.hint))

    @work(thread=True, exclusive=True, group="findings", exit_on_error=False)
    def find(self, data: BrowseData, id: str) -> None:
        """Find out what the rules say about a requirement; the first time they have to run."""
        try:
            self.post_message(FindingsMade(data, id, data.findings(id)))
        except SpecflowError as error:
            self.post_message(WorkFailed(str(error.message), error.hint))

    def on_data_loaded(self, message: DataLoaded) -> None:
        """Show the project; the tree then asks for the card under its cursor."""
        again = self._data is not None
        self._data = message.data
        self.browse.show_data(message.data)
        if again:
            self.notify(f"The project is at revision {message.data.revision} now.")

    def on_revision_seen(self, message: RevisionSeen) -> None:
        """Load again what changed."""
        if self._data is not None and message.revision != self._data.revision:
            self.load_data()

    def on_card_wanted(self, message: CardWanted) -> None:
        """Make the card a moment later, if the cursor is still there."""
        self._wanted = message.id
        if self._pause is not None:
            self._pause.stop()
        self._pause = self.set_timer(PAUSE_SECONDS, self._make_wanted_card)

    def _make_wanted_card(self) -> None:
        if self._data is not None and self._wanted:
            self.make_card(self._data, self._wanted)

    def on_card_made(self, message: CardMade) -> None:
        """Show the card, unless the project or the cursor went on."""
        if message.data is self._data and message.card.id.casefold() == self._wanted.casefold():
            self.browse.show_card(message.card)
            if message.card.findings is None:  # not before: the rules would hold up the first card
                self.find(message.data, message.card.id)

    def on_findings_made(self, message: FindingsMade) -> None:
        """Add the findings to the card, if it is still the one that is shown."""
        card = self.browse.card_view.card
        if message.data is self._data and card is not None and card.id == message.id:
            self.browse.show_card(card.model_copy(update={"findings": message.findings}))

    def on_work_failed(self, message: WorkFailed) -> None:
        """Say what could not be done: in place of the card when there is nothing else to show."""
        words = f"{message.what}. {message.hint}".strip()
        if self._data is None:
            self.browse.show_failure(words)
        else:
            self.notify(words, severity="error", timeout=10)

    def action_reload(self) -> None:
        """Load the project again."""
        self.load_data()
