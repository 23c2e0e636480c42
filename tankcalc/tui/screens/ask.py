"""Screens that ask one question and take one key for an answer."""

from __future__ import annotations

from collections.abc import Sequence
from typing import ClassVar

from textual.binding import Binding, BindingType

from tankcalc.text import clean
from tankcalc.tui.present import Line, wrapped
from tankcalc.tui.screens.dialog import Dialog


class AskQuit(Dialog[bool]):
    """Asks before leaving; answers True for yes."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("enter", "answer(True)", show=False),
        Binding("escape", "answer(False)", show=False),
    ]
    TITLE_TEXT = "LEAVE THE CONSOLE?"
    KEYS_TEXT = "Enter leaves   Esc stays"

    def __init__(self, unfinished: Sequence[str], unsaved: Sequence[str] = ()) -> None:
        super().__init__()
        self._unfinished, self._unsaved = unfinished, unsaved

    def text(self) -> list[Line]:
        """Say what becomes of what is not in the log."""
        width = self.size.width - 2
        lines: list[Line] = []
        if self._unsaved:
            words = f"NOT SAVED: {clean(', '.join(self._unsaved), 400)}. What was typed is kept; "
            words += "it may be in the log already: look there before it is logged again."
            lines += wrapped(words, "refused", width)
        if self._unfinished:
            names = ", ".join(self._unfinished)
            words = f"Not logged: {clean(names, 400)}. It is kept, and offered at the next start."
            lines += wrapped(words, "key", width)
        return lines or [[("Everything typed was logged or cleared.", "")]]

    def action_answer(self, yes: bool) -> None:
        """Close with the answer."""
        self.dismiss(yes)


class AskDraft(Dialog[bool | None]):
    """Offers what a console that died had not logged: True keep, False discard, None later."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("enter", "answer(True)", show=False),
        Binding("delete", "answer(False)", show=False),
        Binding("escape", "answer(None)", show=False),
    ]
    TITLE_TEXT = "UNFINISHED ENTRY"
    KEYS_TEXT = "Enter keeps it, nothing is logged   Del discards it   Esc decides later"

    def __init__(self, lines: Sequence[Line]) -> None:
        super().__init__()
        self._lines = list(lines)

    def text(self) -> list[Line]:
        """Say when and what."""
        return self._lines

    def action_answer(self, answer: bool | None) -> None:
        """Close with the answer."""
        self.dismiss(answer)
