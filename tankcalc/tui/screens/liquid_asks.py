"""What the trying of a liquid asks: where to begin, whether to save, whether something is lost."""

from __future__ import annotations

from collections.abc import Sequence
from typing import ClassVar

from textual.binding import Binding, BindingType

from tankcalc.profiles.fluid_users import Users
from tankcalc.tui.liquid_draft import LiquidDraft
from tankcalc.tui.liquid_present import to_save
from tankcalc.tui.present import Line, wrapped
from tankcalc.tui.screens.dialog import Dialog
from tankcalc.tui.screens.pick import PickFluid


class PickOrigin(PickFluid):
    """Chooses the fluid file to begin from."""

    KEYS_TEXT = "Up Down and first letters move   Enter begins from it   Esc stays"

    def __init__(self, names: Sequence[str], at: str) -> None:
        super().__init__("", names, at, "")
        self.TITLE_TEXT = "BEGIN FROM WHICH LIQUID?"


class AskLoss(Dialog[bool]):
    """Asks before what was typed is lost; Enter is yes, Esc is no."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("enter", "answer(True)", show=False),
        Binding("escape", "answer(False)", show=False),
    ]
    KEYS_TEXT = "Enter goes on   Esc stays"

    def __init__(self, title: str, words: str) -> None:
        super().__init__()
        self.TITLE_TEXT = title
        self._words = words

    def text(self) -> list[Line]:
        """Say what would be lost."""
        return wrapped(self._words, "key", self.size.width - 2)

    def action_answer(self, yes: bool) -> None:
        """Close with the answer."""
        self.dismiss(yes)


class AskSave(AskLoss):
    """Shows what will be written, and where; Enter is yes."""

    KEYS_TEXT = "Enter saves it   Esc goes back"

    def __init__(self, draft: LiquidDraft, users: Users) -> None:
        super().__init__("WRITE OVER IT?" if draft.in_place else "SAVE THIS LIQUID?", "")
        self._draft, self._users = draft, users

    def text(self) -> list[Line]:
        """Say which file, what becomes of the old one, the figures, and who uses them."""
        return to_save(self._draft, self._users, self.size.width - 2)
