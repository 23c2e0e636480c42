"""What every short screen is made of: a title, rows of text, and the keys that act."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Generic, TypeVar

from textual.app import ComposeResult
from textual.containers import Vertical
from textual.screen import ModalScreen

from tankcalc.tui.present import Line
from tankcalc.tui.widgets.lines import Lines

T = TypeVar("T")


class Dialog(ModalScreen[T], Generic[T]):
    """A box over the foot of the screen; what lies above it stays in sight."""

    DEFAULT_CSS = """
    Dialog { align: left bottom; background: transparent; }
    Dialog #box { height: auto; max-height: 100%; width: 100%; background: ansi_default; }
    Dialog #head, Dialog #keys { height: 1; }
    Dialog #text { height: auto; }
    """

    TITLE_TEXT = ""
    KEYS_TEXT = ""

    @property
    def other_rows(self) -> int:
        """Rows that are no text: title, keys, and room for a few fields."""
        return 5

    def compose(self) -> ComposeResult:
        """Lay out title, text, fields and keys."""
        with Vertical(id="box"):
            yield Lines(id="head")
            yield Lines(id="text")
            yield from self.fields()
            yield Lines(id="keys")

    def fields(self) -> ComposeResult:
        """Yield what can be typed in; nothing here."""
        yield from ()

    def on_mount(self) -> None:
        """Show what it says."""
        self.query_one("#head", Lines).show([[(f" {self.TITLE_TEXT}", "bar")]])
        self.keys(self.KEYS_TEXT)
        self.say(self.text())

    def on_resize(self) -> None:
        """Break the text anew."""
        self.say(self.text())

    def text(self) -> list[Line]:
        """Return what the screen says."""
        return []

    def say(self, lines: Sequence[Line]) -> None:
        """Show these lines, as many as leave room for what can be typed and the keys."""
        room = max(self.size.height - self.other_rows, 1)
        shown = list(lines)
        if len(shown) > room:
            shown = [*shown[: room - 1], [(f"(+{len(shown) - room + 1} more lines)", "key")]]
        text = self.query_one("#text", Lines)
        text.styles.height = len(shown)
        text.show(shown)

    def keys(self, words: str) -> None:
        """Show which keys act."""
        self.query_one("#keys", Lines).show([[(f" {words}", "bar")]])
