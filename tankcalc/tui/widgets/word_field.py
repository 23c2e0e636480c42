"""One field for words: a name, a note."""

from __future__ import annotations

from textual import events
from textual.geometry import Size
from textual.reactive import Reactive
from textual.widgets import Input

from tankcalc.text import clean
from tankcalc.tui.widgets.entry_field import EMPTY


class WordField(Input):
    """A field that takes any words."""

    # The library lays the whole screen out anew for every change of this; one row never needs it.
    virtual_size = Reactive(Size(0, 0), layout=False)

    def __init__(self, id: str, value: str, longest: int) -> None:
        super().__init__(
            value,
            EMPTY,
            id=id,
            max_length=longest,
            select_on_focus=False,
            restrict=r"[^\x00-\x1f]*",
        )
        self.cursor_blink = False

    def on_paste(self, event: events.Paste) -> None:
        """Take all of it as one line."""
        event.prevent_default()
        event.stop()
        self.replace(clean(event.text, self.max_length or 80), *self.selection)

    def restricted(self) -> None:
        """Stay silent; the field is full and shows it."""
