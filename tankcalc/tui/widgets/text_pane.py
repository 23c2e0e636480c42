"""A text that may be longer than its place: the screen it is on moves it."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from tankcalc.tui.present import Line
from tankcalc.tui.widgets.lines import Lines

Text = Callable[[int], Sequence[Line]]
"""Makes the whole text for a width."""


class TextPane(Lines):
    """A window over a text, with a row that says how much there is below."""

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self._text: Text = lambda _width: ()
        self._first = 0

    def read(self, text: Text, *, again: bool = False) -> None:
        """Show a text from its beginning, or from where it is when it is the same ``again``."""
        self._text = text
        self._first = self._first if again else 0
        self.rebuild()

    def move(self, by: int) -> None:
        """Move down that many rows."""
        self._first += by
        self.rebuild()

    def page(self, by: int) -> None:
        """Move down that many panes."""
        self.move(by * max(self.size.height - 2, 1))

    def seek(self, by: int) -> None:
        """Go to the next heading, or to the one before."""
        lines = list(self._text(self.size.width - 1))
        heads = [n for n, line in enumerate(lines) if line and line[0][1] == "title"]
        beyond = [n for n in heads if (n > self._first if by > 0 else n < self._first)]
        if beyond:
            self._first = beyond[0] if by > 0 else beyond[-1]
            self.rebuild()

    def build(self, width: int, height: int) -> Sequence[Line]:
        """Return the rows in sight."""
        lines = list(self._text(width - 1))
        if len(lines) <= height:
            self._first = 0
            return lines
        room = max(height - 1, 1)
        self._first = min(max(self._first, 0), len(lines) - room)
        below = len(lines) - self._first - room
        more = f"-- {below} more rows: PgDn --" if below else "-- end of text: PgUp --"
        return [*lines[self._first : self._first + room], [(more, "key")]]
