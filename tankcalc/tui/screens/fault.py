"""A fault of an instrument: opened, and closed when it is put right."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from tankcalc.errors import InputError
from tankcalc.text import clean
from tankcalc.tui.asks import (
    ASK_NOTE,
    ASK_WHO,
    AT,
    NOTE,
    Answers,
    Ask,
    MissingError,
    named,
    typed_time,
)
from tankcalc.tui.log_lines import clock
from tankcalc.tui.present import Line, wrapped
from tankcalc.tui.screens.save import SaveDialog

if TYPE_CHECKING:
    from tankcalc.shiftlog import Row
    from tankcalc.tank import Tank
    from tankcalc.tui.logbook import LogBook, Unsaved

INSTRUMENT, WHAT = "instrument", "what"
OPENED, CLOSED = "at fault", "put right"
OTHER_INSTRUMENTS = ("level gauge", "thermometer", "barometer", "other")
"""What can be at fault beside the transmitters that are fitted."""


class SaveFault(SaveDialog):
    """Takes which instrument of a tank is at fault, or no longer, and saves it."""

    START = INSTRUMENT

    def __init__(
        self, book: LogBook, tank: Tank, answers: Mapping[str, str], sent: Unsaved | None = None
    ) -> None:
        super().__init__(book, answers, sent)
        self.TITLE_TEXT = f"FAULT OF AN INSTRUMENT OF {clean(tank.file or tank.name, 40)}"
        self._tank = tank
        self._open: Mapping[str, Row] = {}

    @property
    def asks(self) -> Sequence[Ask]:
        """What is asked; a tank has the instruments it has."""
        fitted = [*sorted(self._tank.transmitters), *(["dp"] if self._tank.dp else [])]
        return (
            ASK_WHO,
            Ask(INSTRUMENT, "instrument", (*fitted, *OTHER_INSTRUMENTS)),
            Ask(WHAT, "it is", (OPENED, CLOSED)),
            ASK_NOTE,
            Ask(AT, "since", longest=40),
        )

    async def prepare(self) -> None:
        """Find the faults that are open."""
        self._open = await self._book.open_faults(self._tank.file)

    def make(self, answers: Answers) -> Unsaved:
        """Return the note that opens the fault or closes it."""
        from tankcalc.shiftlog import fault_entry, now_us

        who, note, now = named(answers), answers.get(NOTE, "").strip(), now_us()
        instrument, opened = answers[INSTRUMENT], answers[WHAT] == OPENED
        known = self._open.get(instrument)
        if opened and known is not None:
            raise InputError(
                f"a fault of {instrument} is open since entry {known.seq}. Close it, or log a note."
            )
        if not opened and known is None:
            raise InputError(f"no fault of {instrument} is open on this tank.")
        if not note:
            raise MissingError(NOTE, "What was seen or done? Type a note, then Enter.")
        entry = fault_entry(
            site=self._book.site,
            tank=self._tank,
            instrument=instrument,
            opened=opened,
            note=note,
            now_us=now,
            t_us=typed_time(answers.get(AT, ""), self._book.zone, now),
            who=who,
            ref=None if known is None else known.entry.uid,
        )
        return self._book.with_texts(entry)

    def subject(self, _answers: Answers) -> list[Line]:
        """Return which faults of the tank are open."""
        width = self.size.width - 2
        lines = wrapped("A fault carries over from shift to shift until it is closed.", "", width)
        for instrument, row in self._open.items():
            since = clock(row.entry.t_us, self._book.zone)
            said = f"! open: {instrument} since {since}, entry {row.seq}: {clean(row.entry.note)}"
            lines += wrapped(said, "check", width)
        return lines if self._open else [*lines, [("No fault of this tank is open.", "")]]
