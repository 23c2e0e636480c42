"""Acknowledging an alert, setting it aside, bringing it back: by name, and logged."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from datetime import timedelta
from typing import TYPE_CHECKING, ClassVar

from tankcalc.errors import InputError, QuantityError, TankcalcError
from tankcalc.tui.asks import ASK_NOTE, ASK_REASON, ASK_WHO, Answers, Ask, MissingError, named
from tankcalc.tui.log_lines import clock
from tankcalc.tui.present import Line, wrapped
from tankcalc.tui.screens.save import SaveDialog

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.limits.alerts import Alert
    from tankcalc.limits.latch import What
    from tankcalc.tank import Tank
    from tankcalc.tui.logbook import LogBook, Unsaved

UNTIL = "until"
ASK_UNTIL = Ask(UNTIL, "until", longest=40)
UNTIL_HELP = 'Until: "8 h" from now, "06:00" (the next one), or "2026-12-02T06:00".'

LONGEST_US = 366 * 86_400_000_000
"""A longer time is a slip of the fingers."""

TITLES: Mapping[What, str] = {
    "acknowledge": "ACKNOWLEDGE THIS ALERT?",
    "set aside": "SET THIS ALERT ASIDE?",
    "bring back": "BRING THIS ALERT BACK?",
}
DOES: Mapping[What, str] = {
    "acknowledge": "It stays open while its condition holds; nothing in the plant changes.",
    "set aside": "It is not told any more until then; its condition may well go on.",
    "bring back": "It stands raised again, to be acknowledged by itself.",
}

_CLOCK = re.compile(r"([01]?\d|2[0-3]):[0-5]\d", re.ASCII)


class SaveAction(SaveDialog):
    """Asks who, and for setting aside why and until when; saves on Enter."""

    START = "note"
    LIVE: ClassVar[frozenset[str]] = frozenset({UNTIL})

    def __init__(
        self,
        book: LogBook,
        what: What,
        tank: Tank,
        alert: Alert,
        answers: Mapping[str, str],
        sent: Unsaved | None = None,
    ) -> None:
        super().__init__(book, answers, sent)
        self.TITLE_TEXT = TITLES[what]
        self._what, self._tank, self._alert = what, tank, alert
        if what == "set aside":
            self.START = "reason"

    @property
    def asks(self) -> Sequence[Ask]:
        """What is asked, by what is done."""
        if self._what == "set aside":
            return (ASK_WHO, ASK_REASON, ASK_UNTIL)
        return (ASK_WHO, ASK_NOTE)

    def make(self, answers: Answers) -> Unsaved:
        """Return the entry of it."""
        from tankcalc.shiftlog import acknowledgement_entry, now_us

        who, now = named(answers), now_us()
        reason = answers.get("reason", "").strip()
        if self._what == "set aside" and not reason:
            raise MissingError("reason", "Why is it set aside? Type the reason, then Enter.")
        until = until_of(answers.get(UNTIL, ""), self._book.zone, now)
        back = self._alert.until_us
        if self._what == "bring back" and back is not None and back <= now:
            raise InputError("It has come back by itself meanwhile. Esc goes back.")
        entry = acknowledgement_entry(
            site=self._book.site,
            of="alert",
            what=self._alert.key,
            who=who,
            now_us=now,
            tank=self._tank,
            reason=reason,
            note=answers.get("note", "").strip(),
            until_us=until if self._what == "set aside" else None,
        )
        return self._book.with_texts(entry)

    def subject(self, answers: Answers) -> list[Line]:
        """Return the alert, what this does, and until when."""
        width = self.size.width - 2
        alert = self._alert
        lines = wrapped(f"{self._tank.file or alert.tank}: {alert.text}", "figure", width)
        for consequence in alert.consequences:
            lines += wrapped(f"with it: {consequence}", "", width)
        lines += wrapped(DOES[self._what], "", width)
        if self._what == "set aside":
            lines += wrapped(self._until_words(answers.get(UNTIL, "")), "key", width)
        return lines

    def _until_words(self, text: str) -> str:
        from tankcalc.shiftlog import now_us

        try:
            until = until_of(text, self._book.zone, now_us())
        except TankcalcError:
            return UNTIL_HELP
        return f"It comes back by itself {clock(until, self._book.zone)}."


def until_of(text: str, zone: ZoneInfo, now_us: int) -> int:
    """Return the instant that is meant by how long, by a time of day to come, or by a date.

    Raises
    ------
    MissingError
        It is none of these, or past.
    """
    from tankcalc import units
    from tankcalc.shiftlog import parse_time

    typed = text.strip()
    try:
        if _CLOCK.fullmatch(typed):
            return _next(typed, zone, now_us)
        until = now_us + round(units.si(typed, "time") * 1e6)
    except QuantityError:
        try:
            until = parse_time(typed, zone)
        except TankcalcError as error:
            raise MissingError(UNTIL, f"{error} {UNTIL_HELP}") from error
    if not now_us < until <= now_us + LONGEST_US:
        raise MissingError(UNTIL, f"That is past, or more than a year away. {UNTIL_HELP}")
    return until


def _next(typed: str, zone: ZoneInfo, now_us: int) -> int:
    """Return when it is that time of day next."""
    from tankcalc.shiftlog import parse_time
    from tankcalc.shiftlog.times import local_date

    today = local_date(now_us, zone).date()
    for day in (today, today + timedelta(days=1)):
        until = parse_time(f"{day.isoformat()}T{typed.rjust(5, '0')}", zone)
        if until > now_us:
            return until
    raise MissingError(UNTIL, UNTIL_HELP)
