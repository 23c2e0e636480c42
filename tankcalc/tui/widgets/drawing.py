"""The chosen tank with its liquid."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from tankcalc.text import clean
from tankcalc.tui.desk import Answer, Desk
from tankcalc.tui.present import clip
from tankcalc.tui.widgets.lines import Lines

if TYPE_CHECKING:
    from tankcalc.tui.present import Line


class Drawing(Lines):
    """Draws the answer for the tank in front, in the room there is."""

    def __init__(self, desk: Desk, *, id: str) -> None:
        super().__init__(id=id)
        self._desk = desk
        self._answer = Answer()

    def draw(self, answer: Answer) -> None:
        """Show the tank of an answer, its layers and labels."""
        self._answer = answer
        self.rebuild()

    def build(self, width: int, height: int) -> Sequence[Line]:
        """Return the drawing; the tank's name alone until its file is read."""
        if self._answer.tank is None:
            return [[(clip(clean(self._desk.tank_name), width), "title")]]
        from tankcalc.tui.draw import ASCII, UNICODE
        from tankcalc.tui.scene import scene

        glyphs = ASCII if self.app.has_class("-ascii") else UNICODE
        return scene(self._answer, self._answer.tank, self._desk.units, width, height, glyphs)
