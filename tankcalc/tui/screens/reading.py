"""Saving a reading, or what a reading should have been."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, ClassVar

from tankcalc.tui.asks import (
    ASK_AT,
    ASK_JUDGED,
    ASK_MOVING,
    ASK_NOTE,
    ASK_REASON,
    ASK_WHO,
    ASK_WITNESS,
    AT,
    REASON,
    Answers,
    Ask,
)
from tankcalc.tui.log_lines import clock
from tankcalc.tui.present import Line, log_subject
from tankcalc.tui.screens.save import SaveDialog

if TYPE_CHECKING:
    from tankcalc import units
    from tankcalc.tui.logbook import LogBook, Unsaved
    from tankcalc.tui.reading_maker import ReadingMaker


class SaveReading(SaveDialog):
    """Shows a reading and what it came to, and saves it."""

    TITLE_TEXT = "LOG THIS READING?"
    LIVE = frozenset({AT})
    ASKS: ClassVar[Sequence[Ask]] = (
        *(ASK_WHO, ASK_NOTE, ASK_MOVING, ASK_JUDGED, ASK_REASON, ASK_WITNESS, ASK_AT),
    )

    def __init__(
        self,
        book: LogBook,
        maker: ReadingMaker,
        system: units.System,
        answers: Mapping[str, str],
        sent: Unsaved | None = None,
    ) -> None:
        super().__init__(book, answers, sent)
        self._maker = maker
        self._system = system

    async def prepare(self) -> None:
        """Read the entries that this one is held against."""
        await self._maker.look_back()

    def make(self, answers: Answers) -> Unsaved:
        """Return the entry."""
        return self._maker.make(answers)

    def doubt(self, answers: Answers) -> tuple[str, str]:
        """Ask once why a result in doubt is logged."""
        words = self._maker.doubt(answers)
        return (REASON, words) if words else ("", "")

    def subject(self, answers: Answers) -> Sequence[Line]:
        """Return tank, time, readings as typed, and the result."""
        from tankcalc.errors import TimeError
        from tankcalc.report import rows

        width = self.size.width - 2
        answer = self._maker.answer(answers)
        try:
            sent = self._sent and self._sent.entry.t_us
            time = clock(sent or self._maker.read_at(answers), self._book.zone)
        except TimeError as error:
            time = str(error)
        result = answer.result
        figures = [] if result is None or result.status == "refused" else rows(result, self._system)
        tank = self._maker.tank.file or self._maker.tank.name
        return log_subject(answer, figures, tank, time, width)


class SaveAmendment(SaveReading):
    """Shows what a reading should have been, and saves that; why is asked first."""

    TITLE_TEXT = "LOG WHAT THE READING SHOULD HAVE BEEN?"
    START = REASON
    ASKS: ClassVar[Sequence[Ask]] = (
        *(ASK_WHO, ASK_REASON, ASK_NOTE, ASK_MOVING, ASK_JUDGED, ASK_WITNESS, ASK_AT),
    )

    async def prepare(self) -> None:
        """See that the reading was not withdrawn meanwhile."""
        from tankcalc.shiftlog.kinds import AMENDMENT

        await self._maker.check(AMENDMENT)
        await super().prepare()
