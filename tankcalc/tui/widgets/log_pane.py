"""The log of this shift: a window over a list, as long as the shift makes it."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import ClassVar

from textual.binding import Binding, BindingType

from tankcalc.tui.present import Line, clip, spread
from tankcalc.tui.widgets.lines import Lines

Rows = Callable[[int], Sequence[Line]]
"""Makes the rows of all entries for a width."""


class LogPane(Lines, can_focus=True):
    """A title and the newest entries; older ones by moving up."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move(-1)", show=False),
        Binding("down", "move(1)", show=False),
        Binding("home", "move(-9999)", show=False),
        Binding("end", "move(9999)", show=False),
    ]

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self._rows_for: Rows = lambda _width: ()
        self._count = 0
        self._left, self._right = "LOG", ""
        self._from_end = 0

    def update(self, rows_for: Rows, count: int, left: str, right: str) -> None:
        """Show so many entries; what is in sight stays there unless it is the end."""
        if self._from_end:
            self._from_end += count - self._count
        self._rows_for, self._count = rows_for, count
        self._left, self._right = left, right
        self.rebuild()

    def action_move(self, by: int) -> None:
        """Move down that many entries."""
        self._from_end -= by
        self.rebuild()

    def page(self, by: int) -> None:
        """Move by whole panes."""
        self.action_move(by * max(self.size.height - 1, 1))

    def build(self, width: int, height: int) -> list[Line]:
        """Return the title and the entries in sight."""
        room, rows = max(height - 1, 1), self._rows_for(width)
        self._from_end = min(max(self._from_end, 0), max(len(rows) - room, 0))
        last = len(rows) - self._from_end
        first = max(last - room, 0)
        above = f", {first} above" if first else ""
        below = f", {self._from_end} below" if self._from_end else ""
        mark = ">" if self.has_focus else " "
        left = f"{mark}{self._left}{above}{below}"
        title: Line = [(spread(clip(left, width), self._right, width), "title")]
        return [title, *rows[first:last]]
