"""A note without a reading."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, ClassVar

from tankcalc.text import clean
from tankcalc.tui.asks import (
    ASK_AT,
    ASK_NOTE,
    ASK_WHO,
    AT,
    Answers,
    Ask,
    MissingError,
    named,
    typed_time,
)
from tankcalc.tui.present import Line
from tankcalc.tui.screens.save import SaveDialog

if TYPE_CHECKING:
    from tankcalc.tank import Tank
    from tankcalc.tui.logbook import LogBook, Unsaved


class SaveNote(SaveDialog):
    """Takes a note on a tank and saves it."""

    TITLE_TEXT = "LOG A NOTE"
    ASKS: ClassVar[Sequence[Ask]] = (ASK_WHO, ASK_NOTE, ASK_AT)

    def __init__(
        self,
        book: LogBook,
        tank: Tank | None,
        answers: Mapping[str, str],
        sent: Unsaved | None = None,
    ) -> None:
        super().__init__(book, answers, sent)
        self._tank = tank

    def make(self, answers: Answers) -> Unsaved:
        """Return the entry of the note."""
        from tankcalc.shiftlog import note_entry, now_us

        who, note, now = named(answers), answers.get("note", "").strip(), now_us()
        if not note:
            raise MissingError("note", "a note without words is nothing to log.")
        entry = note_entry(
            site=self._book.site,
            note=note,
            now_us=now,
            t_us=typed_time(answers.get(AT, ""), self._book.zone, now),
            tank=self._tank,
            who=who,
        )
        return self._book.with_texts(entry)

    def subject(self, _answers: Answers) -> list[Line]:
        """Return which tank it is about."""
        of = "the site" if self._tank is None else self._tank.file or self._tank.name
        return [[(f"A note on {clean(of)}, with no reading.", "")]]
