"""Density as a drawn curve, or the words that say why there is none."""

from __future__ import annotations

from collections.abc import Sequence

from tankcalc.tui.chart import ASCII, UNICODE, Plot, chart
from tankcalc.tui.present import Line, clip, spread, wrapped
from tankcalc.tui.widgets.lines import Lines


class ProfileChart(Lines):
    """A plot under its title, in the room there is."""

    def __init__(self, title: str, *, id: str) -> None:
        super().__init__(id=id)
        self._title = title
        self._plot: Plot | str = ""

    def draw(self, plot: Plot | str) -> None:
        """Show a plot, or words in its place."""
        self._plot = plot
        self.rebuild()

    def build(self, width: int, height: int) -> Sequence[Line]:
        """Return the title and the curve."""
        if isinstance(self._plot, str):
            title: Line = [(clip(self._title, width), "title")]
            return [title, *wrapped(self._plot, "", width)]
        strokes = ASCII if self.app.has_class("-ascii") else UNICODE
        words = spread(self._title, f"{self._plot.y.unit} / {self._plot.x.unit}", width)
        return [[(words, "title")], *chart(self._plot, width, height - 1, strokes)]
