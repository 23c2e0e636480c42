"""A note without a reading."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from tankcalc.text import clean
from tankcalc.tui.present import Line
from tankcalc.tui.screens.save import SaveDialog

if TYPE_CHECKING:
    from tankcalc.tui.logbook import LogBook, Unsaved


class SaveNote(SaveDialog):
    """Takes a note on a tank and saves it."""

    TITLE_TEXT = "LOG A NOTE"

    def __init__(
        self, book: LogBook, tank: str, who: str, make: Callable[[str, str], Unsaved]
    ) -> None:
        super().__init__(book, who, "")
        self._tank = tank
        self._make = make

    def make(self, who: str, note: str) -> Unsaved:
        """Return the entry of the note."""
        return self._make(who, note)

    def subject(self) -> list[Line]:
        """Return which tank it is about."""
        return [[(f"A note on {clean(self._tank)}, with no reading.", "")]]
