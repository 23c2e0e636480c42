"""Choosing one of several names."""

from __future__ import annotations

from collections.abc import Sequence
from typing import ClassVar

from textual.binding import Binding, BindingType

from tankcalc.text import clean
from tankcalc.tui.present import Line, clip
from tankcalc.tui.screens.dialog import Dialog

ROWS = 14


class PickFluid(Dialog[str | None]):
    """Chooses a density profile; None: stay with the one there is."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move(-1)", show=False),
        Binding("down", "move(1)", show=False),
        Binding("home", "move(-9999)", show=False),
        Binding("end", "move(9999)", show=False),
        Binding("enter", "choose", show=False),
        Binding("escape", "dismiss(None)", show=False),
    ]
    KEYS_TEXT = "Up Down and first letters move   Enter takes it   Esc stays with what there is"

    def __init__(self, tank: str, names: Sequence[str], chosen: str, usual: str) -> None:
        super().__init__()
        self.TITLE_TEXT = f"DENSITY PROFILE FOR {clean(tank)}"
        self._names = list(names)
        self._usual = usual
        self._at = self._names.index(chosen) if chosen in self._names else 0

    def text(self) -> list[Line]:
        """Return the names around the one that is marked."""
        first = min(max(self._at - ROWS // 2, 0), max(len(self._names) - ROWS, 0))
        lines: list[Line] = []
        for index, name in enumerate(self._names[first : first + ROWS], start=first):
            at = index == self._at
            usual = "  (usual contents)" if name == self._usual else ""
            words = clip(f"{'>' if at else ' '} {clean(name)}{usual}", self.size.width - 1)
            lines.append([(words, "focus" if at else "")])
        return lines

    def action_move(self, by: int) -> None:
        """Mark the name that many rows below."""
        self._at = min(max(self._at + by, 0), len(self._names) - 1)
        self.say(self.text())

    def action_choose(self) -> None:
        """Take the marked one."""
        self.dismiss(self._names[self._at])

    def on_key(self, event: object) -> None:
        """Go to the next name that begins with the letter typed."""
        character = getattr(event, "character", None) or ""
        count = len(self._names)
        for step in range(1, count + 1):
            index = (self._at + step) % count
            if character.isalnum() and self._names[index].lower().startswith(character.lower()):
                self.action_move(index - self._at)
                return
