"""The log of the shift: a window over a list of any length."""

from __future__ import annotations

import time
from typing import TYPE_CHECKING, ClassVar

from textual.binding import Binding, BindingType

from tankcalc.tui.commands import PANE_COMMANDS
from tankcalc.tui.messages import CommandGiven
from tankcalc.tui.present import CAUTION, Line, clip, spread, wrapped
from tankcalc.tui.widgets.lines import Lines

if TYPE_CHECKING:
    from tankcalc.tui.log_front import LogFront

SHORT_CAUTION = "no safety function"
"""Said of the program while the title of the log needs the room."""


class LogPane(Lines, can_focus=True):
    """A title and the newest entries; older ones by moving up, one of them opens with Enter."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move(-1)", show=False),
        Binding("down", "move(1)", show=False),
        Binding("home", "home", show=False),
        Binding("end", "end", show=False),
        *(Binding(c.key, f"give('{c.id}')", c.label, show=False) for c in PANE_COMMANDS),
    ]

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self._front: LogFront | None = None
        self._trouble = ""

    def open(self, front: LogFront) -> None:
        """Show a log from now on."""
        self._front = front
        self.rebuild()

    def fail(self, trouble: str) -> None:
        """Say that there is no log to show."""
        self._front, self._trouble = None, trouble
        self.rebuild()

    def action_give(self, command: str) -> None:
        """Pass a command on."""
        self.post_message(CommandGiven(command))

    def action_move(self, by: int) -> None:
        """Mark the entry that many rows below."""
        if self._front is not None:
            self._front.move(by)

    def action_home(self) -> None:
        """Go to the oldest entry."""
        if self._front is not None:
            self._front.home()

    def action_end(self) -> None:
        """Go to the newest entry."""
        if self._front is not None:
            self._front.end(time.time_ns() // 1000)

    def page(self, by: int) -> None:
        """Move by whole panes."""
        if self._front is not None:
            self._front.page(by)

    def build(self, width: int, height: int) -> list[Line]:
        """Return the title and the entries in sight."""
        if self._front is None:
            return [self._title("LOG", width), *wrapped(self._trouble, "refused", width)]
        title, *rows = self._front.lines(width, height, focused=self.has_focus)
        return [self._title(title[0][0], width), *rows]

    def _title(self, words: str, width: int) -> Line:
        caution = SHORT_CAUTION if self.has_focus else CAUTION
        left = clip(f"{'>' if self.has_focus else ' '}{words}", width - len(caution) - 1)
        return [(spread(left, caution, width), "title")]
