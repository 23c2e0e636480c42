"""One entry of the log in full, with its history to turn through."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING, ClassVar

from textual.binding import Binding, BindingType

from tankcalc.errors import StoreError
from tankcalc.tui.log_entry import entry_lines
from tankcalc.tui.log_pages import Seen
from tankcalc.tui.present import Line, wrapped
from tankcalc.tui.screens.read import ReadScreen
from tankcalc.tui.work import begin

if TYPE_CHECKING:
    from tankcalc import units
    from tankcalc.tui.logbook import LogBook

Act = Callable[[str, Seen], None]
"""Takes an action by its id, and the entry it is to be done to."""


class EntryScreen(ReadScreen):
    """The original, its amendments and its withdrawal, a page each."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("right,tab", "turn(1)", show=False),
        Binding("left,shift+tab", "turn(-1)", show=False),
        Binding("a", "act('amend')", show=False),
        Binding("w", "act('withdraw')", show=False),
        Binding("x", "act('fault')", show=False),
    ]

    def __init__(self, book: LogBook, seen: Seen, system: units.System, act: Act) -> None:
        super().__init__("ENTRY OF THE LOG", self._page)
        self._book, self._system, self._act = book, system, act
        self._seen = seen
        self._trouble = ""

    def on_mount(self) -> None:
        """Show it, and read what became of it meanwhile."""
        super().on_mount()
        begin(self, self._renew)

    def say(self, lines: Sequence[Line]) -> None:
        """Show as much as there is room for, and which keys act."""
        super().say(lines)
        turn = "Left Right history  " if len(self._seen.history) > 1 else ""
        self.keys(f"Esc back  {turn}a amend  w withdraw  x fault  {self.below}")

    def action_turn(self, by: int) -> None:
        """Show the next entry of the history, or the one before."""
        history = self._seen.history
        at = (self._place + by) % len(history)
        self._seen = Seen(history[at], history)
        self._first = 0
        self.say(self.text())

    def action_act(self, action: str) -> None:
        """Close, and do something to the entry."""
        self.dismiss(None)
        self._act(action, self._seen)

    @property
    def _place(self) -> int:
        numbers = [row.seq for row in self._seen.history]
        return numbers.index(self._seen.row.seq)

    def _page(self, width: int) -> list[Line]:
        lines = entry_lines(self._seen, self._place, self._system, width)
        return [*wrapped(self._trouble, "refused", width), *lines]

    async def _renew(self) -> None:
        """Read the history again: another console may have added to it."""
        try:
            self._seen = await self._book.opened(self._seen.row)
        except StoreError as error:
            self._trouble = f"The log cannot be read: {error}"
        self.say(self.text())
