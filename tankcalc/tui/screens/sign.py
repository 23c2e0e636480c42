"""Signing on and off the shift."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, ClassVar

from tankcalc.text import clean
from tankcalc.tui.asks import ASK_NOTE, ASK_WHO, NOTE, Answers, Ask, named
from tankcalc.tui.log_lines import clock
from tankcalc.tui.present import Line, wrapped
from tankcalc.tui.screens.save import SaveDialog

if TYPE_CHECKING:
    from tankcalc.tui.logbook import Unsaved

SIGN, ON, OFF = "sign", "on", "off"


class SaveSign(SaveDialog):
    """Takes who takes over the shift, or leaves it, and saves it."""

    TITLE_TEXT = "SIGN ON OR OFF"
    START = SIGN
    ASKS: ClassVar[Sequence[Ask]] = (ASK_WHO, Ask(SIGN, "sign", (ON, OFF)), ASK_NOTE)

    def make(self, answers: Answers) -> Unsaved:
        """Return the entry of signing on or off."""
        from tankcalc.shiftlog import now_us, sign_entry

        entry = sign_entry(
            site=self._book.site,
            on=answers.get(SIGN, ON) == ON,
            who=named(answers),
            now_us=now_us(),
            note=answers.get(NOTE, "").strip(),
        )
        return self._book.with_texts(entry)

    def subject(self, answers: Answers) -> list[Line]:
        """Return what is being said, and by whom the operating system says."""
        from tankcalc.shiftlog import login_name, now_us

        now = now_us()
        shift = self._book.shift(now)
        does = "take over" if answers.get(SIGN, ON) == ON else "leave"
        words = f"You {does} the {clean(shift.name, 20)} shift, {clock(now, self._book.zone)}."
        login = f"Logged in as {clean(login_name(), 40)}; that is kept as well."
        width = self.size.width - 2
        return [*wrapped(words, "key", width), *wrapped(login, "", width)]
