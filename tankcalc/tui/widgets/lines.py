"""Rows of styled text that send only what changed: what every part of the screen is made of."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from rich.segment import Segment
from textual.geometry import Region, Size
from textual.strip import Strip
from textual.widget import Widget

from tankcalc.text import clean
from tankcalc.tui.present import Line
from tankcalc.tui.theme import STYLES

Build = Callable[[int, int], Sequence[Line]]
"""Makes the lines for a width and a height."""


class Lines(Widget):
    """A widget over a list of lines; a line is a list of (text, style name).

    The lines are built when the size is known, so the first paint shows them already, and
    again for every new size.
    """

    def __init__(self, build: Build | None = None, *, id: str) -> None:
        super().__init__(id=id)
        self._builder = build
        self._rows: Sequence[Line] = ()
        self._built_for = Size(0, 0)

    def build(self, width: int, height: int) -> Sequence[Line]:
        """Return the lines for this size."""
        return () if self._builder is None else self._builder(width, height)

    def show(self, lines: Sequence[Line]) -> None:
        """Show these lines, whatever the size."""
        self._builder = lambda _width, _height: lines
        self.rebuild()

    def rebuild(self) -> None:
        """Show what there is to show by now; rows that stay the same are not sent again."""
        if not self.size:
            return
        old, self._rows, self._built_for = self._rows, self.build(*self.size), self.size
        new = self._rows
        changed = [
            Region(0, y, self.size.width, 1)
            for y in range(min(max(len(old), len(new)), self.size.height))
            if y >= len(old) or y >= len(new) or old[y] != new[y]
        ]
        if changed:
            self.refresh(*changed)

    def watch_has_focus(self, has_focus: bool) -> None:
        """Mark where the keys go."""
        super().watch_has_focus(has_focus)
        self.rebuild()

    def render_line(self, y: int) -> Strip:
        """Return one row, cut or filled to the width of the widget."""
        if self.size != self._built_for:
            self._rows, self._built_for = self.build(*self.size), self.size
        line = self._rows[y] if y < len(self._rows) else []
        segments = [Segment(_safe(text), STYLES[style]) for text, style in line]
        fill = STYLES["bar"] if line and all(style == "bar" for _, style in line) else None
        return Strip(segments).adjust_cell_length(self.size.width, fill)


def _safe(text: str) -> str:
    """Return the text with nothing in it a terminal could act on, whoever forgot to see to it."""
    return text if text.isprintable() else clean(text)
