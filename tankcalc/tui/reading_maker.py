"""The entry of a reading, or of what it should have been, from what a dialog has asked."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any

from tankcalc.errors import TimeError
from tankcalc.tui.asks import (
    AT,
    JUDGED,
    NOTE,
    REASON,
    REJECT,
    WITNESS,
    Answers,
    MissingError,
    declared,
    named,
    typed_time,
)
from tankcalc.tui.logbook import Earlier, LogBook, Unsaved

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.result import Result
    from tankcalc.shiftlog import Entry
    from tankcalc.tank import Tank
    from tankcalc.tui.desk import Answer

ASK_WHY = "Why is it {} all the same? Type a reason; Enter once more logs it without one."


class ReadingMaker:
    """Holds one answer against the log, and makes its entry.

    Parameters
    ----------
    answer : Answer
        With a result, and with what its figures are worth.
    now_us : int
        When it is entered; without another time also when it was read.
    original, held : Entry or None
        Of an amendment: the reading itself, and the entry that stood for it until now.
    """

    def __init__(
        self,
        book: LogBook,
        answer: Answer,
        now_us: int,
        original: Entry | None = None,
        held: Entry | None = None,
    ) -> None:
        assert answer.tank is not None
        assert answer.fluid is not None
        assert answer.result is not None
        self._book, self._answer = book, answer
        self.tank: Tank = answer.tank
        self._fluid: Fluid = answer.fluid
        self._result: Result = answer.result
        self._now_us = now_us
        self._original, self._held = original, held
        self._earlier = Earlier()

    async def look_back(self) -> None:
        """Read the entries that this one is held against."""
        self._earlier = await self._book.earlier(self.tank)

    async def check(self, kind: str) -> None:
        """See that the original can still be corrected; an InputError where it cannot."""
        if self._original is not None:
            await self._book.to_correct(self._original.uid, kind)

    def read_at(self, answers: Answers) -> int:
        """Return when it was read; a TimeError where that cannot be known."""
        t_us = typed_time(answers.get(AT, ""), self._book.zone, self._now_us)
        usual = self._now_us if self._held is None else self._held.t_us
        return usual if t_us is None else t_us

    def answer(self, answers: Answers) -> Answer:
        """Return the answer with what is odd about it, seen against the log."""
        from tankcalc.shiftlog import held_against_log

        try:
            at_us = self.read_at(answers)
        except TimeError:
            # Said when it is to be saved; until then it is seen as of now.
            at_us = self._now_us
        result = held_against_log(
            self._result,
            self._earlier.rows,
            self.tank,
            self._fluid,
            self._answer.typed,
            at_us,
            declared(answers),
            None if self._original is None else self._original.uid,
        )
        return replace(self._answer, result=result)

    def doubt(self, answers: Answers) -> str:
        """Return what to ask before it is logged; empty where nothing is in doubt."""
        result = self.answer(answers).result
        if result is None or result.status == "good" or answers.get(REASON, "").strip():
            return ""
        what = "The result is in doubt" if result.status == "check" else "The result is refused"
        return f"{what}. {ASK_WHY.format('logged' if result.status == 'refused' else 'accepted')}"

    def make(self, answers: Answers) -> Unsaved:
        """Return the entry; an InputError where something is missing."""
        from tankcalc.shiftlog import amended_reading, reading_entry

        who, reason = named(answers), answers.get(REASON, "").strip()
        rejected = answers.get(JUDGED) == REJECT
        if not reason and (rejected or self._original is not None):
            what = "amended" if self._original is not None else "rejected"
            raise MissingError(REASON, f"Why is it {what}? Type a reason, then Enter.")
        result = self.answer(answers).result
        assert result is not None
        facts: dict[str, Any] = {
            "site": self._book.site,
            "tank": self.tank,
            "fluid": self._fluid,
            "typed": self._answer.typed,
            "result": result,
            "now_us": self._now_us,
            "t_us": self.read_at(answers),
            "note": answers.get(NOTE, "").strip(),
            "who": who,
            "movement": declared(answers),
            "reason": reason,
            "rejected": rejected,
            "witness": answers.get(WITNESS, "").strip(),
            "seen": self._earlier.seen,
        }
        if self._original is None:
            return self._book.with_texts(reading_entry(**facts))
        return self._book.with_texts(amended_reading(original=self._original, **facts))
