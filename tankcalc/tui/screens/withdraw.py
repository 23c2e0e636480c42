"""Taking an entry back: it stays in the log, marked."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, ClassVar

from tankcalc.tui.asks import ASK_REASON, ASK_WHO, REASON, Answers, Ask, MissingError, named
from tankcalc.tui.log_lines import log_row
from tankcalc.tui.present import Line, wrapped
from tankcalc.tui.screens.save import SaveDialog

if TYPE_CHECKING:
    from tankcalc import units
    from tankcalc.tui.log_pages import Seen
    from tankcalc.tui.logbook import LogBook, Unsaved


class SaveWithdrawal(SaveDialog):
    """Takes why an entry is taken back, and saves that."""

    TITLE_TEXT = "TAKE THIS ENTRY BACK?"
    START = REASON
    ASKS: ClassVar[Sequence[Ask]] = (ASK_WHO, ASK_REASON)

    def __init__(
        self,
        book: LogBook,
        seen: Seen,
        system: units.System,
        answers: Mapping[str, str],
        sent: Unsaved | None = None,
    ) -> None:
        super().__init__(book, answers, sent)
        self._seen, self._system = seen, system

    async def prepare(self) -> None:
        """See that it was not withdrawn meanwhile."""
        from tankcalc.shiftlog.kinds import WITHDRAWAL

        await self._book.to_correct(self._seen.history[0].entry.uid, WITHDRAWAL)

    def make(self, answers: Answers) -> Unsaved:
        """Return the entry that takes the other one back."""
        from tankcalc.shiftlog import now_us, withdrawal_entry

        who, reason = named(answers), answers.get(REASON, "").strip()
        if not reason:
            raise MissingError(REASON, "Why is it taken back? Type a reason, then Enter.")
        entry = withdrawal_entry(
            site=self._book.site,
            original=self._seen.history[0].entry,
            reason=reason,
            now_us=now_us(),
            who=who,
        )
        return self._book.with_texts(entry)

    def subject(self, _answers: Answers) -> list[Line]:
        """Return the entry, and what taking it back means."""
        width = self.size.width - 2
        number = self._seen.history[0].seq
        words = (
            f"Entry {number}, with all its amendments, then counts for nothing: not for rates, "
            "balance or handover. It stays in the log, marked. A withdrawal is final."
        )
        row = log_row(self._seen, self._book.zone, self._system, width, dated=True)
        return [row, *wrapped(words, "", width)]
