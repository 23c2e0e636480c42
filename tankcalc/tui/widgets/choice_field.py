"""One of a few words, chosen with left and right."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import ClassVar

from textual import events
from textual.binding import Binding, BindingType
from textual.message import Message

from tankcalc.text import clean
from tankcalc.tui.present import Line, clip
from tankcalc.tui.widgets.lines import Lines


@dataclass
class Turned(Message):
    """Another word is chosen."""

    name: str


class ChoiceField(Lines, can_focus=True):
    """The chosen word between the marks of the keys that change it; letters go to a word."""

    DEFAULT_CSS = "ChoiceField { height: 1; width: 1fr; }"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("left", "turn(-1)", show=False),
        Binding("right,space", "turn(1)", show=False),
    ]

    def __init__(self, id: str, options: Sequence[str], value: str) -> None:
        super().__init__(id=id)
        self._options = list(options)
        self._at = self._options.index(value) if value in self._options else 0
        self._typed = ""

    @property
    def value(self) -> str:
        """The chosen word."""
        return self._options[self._at]

    def freeze(self) -> None:
        """Stay with the word; disabled, the library would blend colours that there are not."""
        self.can_focus = False
        if self.has_focus:
            self.screen.set_focus(None)

    def build(self, width: int, _height: int) -> Sequence[Line]:
        """Return the word, and where in the list it is."""
        style = "focus" if self.has_focus else "figure"
        place = f"  ({self._at + 1} of {len(self._options)}: Left Right)" * self.has_focus
        word = clip(clean(self.value), max(width - len(place) - 4, 1))
        return [[(f"< {word} >", style), (place, "")]]

    def action_turn(self, by: int) -> None:
        """Choose the next word, or the one before."""
        self._typed = ""
        self._choose((self._at + by) % len(self._options))

    def on_key(self, event: events.Key) -> None:
        """Go to the first word that begins with the letters typed."""
        character = event.character or ""
        if not (character.isalnum() or character == "-"):
            return
        event.stop()
        for typed in (self._typed + character.casefold(), character.casefold()):
            for index, word in enumerate(self._options):
                if word.casefold().startswith(typed):
                    self._typed = typed
                    self._choose(index)
                    return

    def _choose(self, index: int) -> None:
        self._at = index
        self.rebuild()
        self.post_message(Turned(self.id or ""))
