"""Screens to read: the help, and every figure in full."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import ClassVar

from textual.binding import Binding, BindingType

from tankcalc.tui.present import Line
from tankcalc.tui.screens.dialog import Dialog
from tankcalc.tui.widgets.lines import Lines


class ReadScreen(Dialog[None]):
    """Text over the whole screen, with keys to move in it."""

    DEFAULT_CSS = """
    ReadScreen #box { height: 100%; }
    ReadScreen #text { height: 1fr; }
    """
    ACTS: ClassVar[str] = "Esc goes back"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move(-1)", show=False),
        Binding("down", "move(1)", show=False),
        Binding("pageup", "page(-1)", show=False),
        Binding("pagedown,space", "page(1)", show=False),
        Binding("home", "move(-9999)", show=False),
        Binding("end", "move(9999)", show=False),
        Binding("escape,enter,f1,f9,q", "dismiss(None)", show=False),
    ]

    def __init__(self, title: str, lines: Callable[[int], Sequence[Line]]) -> None:
        super().__init__()
        self.TITLE_TEXT = title
        self._lines = lines
        self._first = 0
        self.below = ""

    def text(self) -> list[Line]:
        """Return all of it, broken to the width of the screen."""
        return list(self._lines(self.size.width - 1))

    def say(self, lines: Sequence[Line]) -> None:
        """Show as much as there is room for."""
        room = max(self.size.height - 2, 1)
        self._first = min(max(self._first, 0), max(len(lines) - room, 0))
        below = max(len(lines) - self._first - room, 0)
        shown = list(lines)[self._first : self._first + room]
        self.query_one("#text", Lines).show(shown)
        self.below = f"{below} more rows: Down, PgDn" if below else "end of text"
        self.keys(f"{self.ACTS}   {self.below}")

    def action_move(self, by: int) -> None:
        """Move by rows."""
        self._first += by
        self.say(self.text())

    def action_page(self, by: int) -> None:
        """Move by whole screens."""
        self.action_move(by * max(self.size.height - 3, 1))
