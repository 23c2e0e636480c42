"""The commands of the log pane: what is done to the entry that is marked there."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from tankcalc.errors import TankcalcError
from tankcalc.shiftlog.kinds import AMENDABLE, MOVEMENT, WITHDRAWABLE
from tankcalc.text import clean
from tankcalc.tui.actions_log import LogActions
from tankcalc.tui.asks import JUDGED, MOVING, NOTE, REASON, REJECT, WITNESS
from tankcalc.tui.defects import note_defect
from tankcalc.tui.desk import Kept
from tankcalc.tui.fields import READINGS
from tankcalc.tui.reading_maker import ReadingMaker
from tankcalc.tui.screens.amend import AmendScreen, texts_of
from tankcalc.tui.screens.entry import EntryScreen
from tankcalc.tui.screens.fault import INSTRUMENT, SaveFault
from tankcalc.tui.screens.filter import ChooseEntries
from tankcalc.tui.screens.movement import AmendMovement, answers_of
from tankcalc.tui.screens.reading import SaveAmendment
from tankcalc.tui.screens.withdraw import SaveWithdrawal

if TYPE_CHECKING:
    from tankcalc.shiftlog import Entry, Standing
    from tankcalc.tui.log_filter import LogFilter
    from tankcalc.tui.log_pages import Seen
    from tankcalc.tui.logbook import LogBook

NO_ENTRY = "No entry is marked in the log."


class EntryActions(LogActions):
    """Opens, amends and withdraws entries, and chooses which are shown."""

    def entry(self) -> None:
        """Open the marked entry."""
        book, seen = self._app.book, self._marked
        if book is None or seen is None:
            return self._app.main.say(NO_ENTRY)
        self._app.push_screen(EntryScreen(book, seen, self._desk.units, self._do))
        return None

    def amend(self) -> None:
        """Log what the marked entry should have been."""
        self._do("amend", self._marked)

    def withdraw(self) -> None:
        """Take the marked entry back."""
        self._do("withdraw", self._marked)

    def fault(self) -> None:
        """Log a fault on the tank of the marked entry, or on the one in front."""
        self._do("fault", self._marked)

    def filter(self) -> None:
        """Choose which entries are shown."""
        from tankcalc.shiftlog import now_us

        app, log = self._app, self._app.front.log
        if app.book is None or log is None:
            return app.main.say(self._not_ready)
        now, book = now_us(), app.book
        check = partial(_sought, book=book, now_us=now)
        screen = ChooseEntries(self._desk.tank_names, log.chosen, book.shift(now).title, check)
        app.push_screen(screen, self._filtered)
        return None

    @property
    def _marked(self) -> Seen | None:
        log = self._app.front.log
        return None if log is None else log.marked

    def _filtered(self, chosen: LogFilter | None) -> None:
        from tankcalc.shiftlog import now_us

        if chosen is not None and self._app.front.log is not None:
            self._app.front.log.choose(chosen, now_us())

    def _do(self, action: str, seen: Seen | None) -> None:
        """Do something to an entry; what cannot be done is said, with why."""
        book = self._app.book
        if book is None:
            return self._app.main.say(self._not_ready)
        try:
            if action == "fault":
                self._fault(book, seen)
            elif seen is None:
                return self._app.main.say(NO_ENTRY)
            elif action == "withdraw":
                self._withdraw(book, seen)
            else:
                self._amend(book, seen)
        except TankcalcError as error:
            self._app.main.say(str(error))
        return None

    def _withdraw(self, book: LogBook, seen: Seen) -> None:
        found = self._correctable(seen, WITHDRAWABLE, "withdrawn")
        if found is not None:
            key = f"withdrawal of entry {found.row.seq}"
            kept = self.kept(key)
            dialog = SaveWithdrawal(book, seen, self._desk.units, kept.answers, kept.sent)
            self.ask(key, dialog)

    def _amend(self, book: LogBook, seen: Seen) -> None:
        found = self._correctable(seen, AMENDABLE, "amended")
        if found is None or found.entry is None:
            return
        original, held = found.row.entry, found.entry
        tank = book.site.tank(held.tank or "")
        key = f"amendment of entry {found.row.seq}"
        if original.kind == MOVEMENT:
            kept = self.kept(key, answers_of(held))
            self.ask(key, AmendMovement(book, tank, original, kept.answers, kept.sent))
            return
        fluid = book.site.fluid_for(tank, held.fluid)
        kept = self.kept(key, _at_first(held))
        title = f"WHAT ENTRY {found.row.seq} SHOULD HAVE BEEN"
        note = partial(note_defect, self._app.options.state)
        typed = {n: t for n, t in kept.answers.items() if n in (*READINGS, NOTE)}
        screen = AmendScreen(title, tank, fluid, typed, self._desk.units, note)
        then = partial(self._amended, screen, key, original, held, kept)
        self._app.push_screen(screen, lambda typed: then() if typed is not None else None)

    def _amended(
        self, screen: AmendScreen, key: str, original: Entry, held: Entry, kept: Kept
    ) -> None:
        """Ask why, and save; Esc from there goes back to the readings another time."""
        from tankcalc.shiftlog import now_us

        book = self._app.book
        assert book is not None
        rest = {n: t for n, t in kept.answers.items() if n not in READINGS}
        answers = {**rest, **screen.typed}
        same = all(kept.answers.get(n) == screen.typed.get(n) for n in (*READINGS, NOTE))
        maker = ReadingMaker(book, screen.answer, now_us(), original, held)
        sent = kept.sent if same else None
        self.ask(key, SaveAmendment(book, maker, self._desk.units, answers, sent), not same)

    def _fault(self, book: LogBook, seen: Seen | None) -> None:
        entry = None if seen is None else seen.row.entry
        tank = book.site.tank((entry and entry.tank) or self._desk.tank_name)
        key = f"fault on {clean(tank.file, 40)}"
        at_first = {} if entry is None else {INSTRUMENT: entry.typed.get(INSTRUMENT, "")}
        kept = self.kept(key, at_first)
        self.ask(key, SaveFault(book, tank, kept.answers, kept.sent))

    def _correctable(self, seen: Seen, kinds: tuple[str, ...], done: str) -> Standing | None:
        """Return the original with what became of it; None, and why, where it must stay."""
        from tankcalc.shiftlog import Corrections

        original = seen.history[0]
        found = Corrections(seen.history).of(original)
        if original.entry.kind not in kinds:
            words = f"entry {original.seq} is a {original.entry.kind}, which cannot be {done}."
            self._app.main.say(f"{words} Log a note about it.")
            return None
        if found.withdrawn_by is not None:
            self._app.main.say(f"entry {original.seq} was {found.mark} already.")
            return None
        return found


def _at_first(held: Entry) -> dict[str, str]:
    """Return what the form of an amendment holds when it opens: what stood until now."""
    said = {WITNESS: clean(held.witness), MOVING: held.movement}
    said |= {REASON: "", JUDGED: ""}
    if held.judgement == "rejected":
        said |= {REASON: clean(held.reason), JUDGED: REJECT}
    return said | texts_of(held.typed, held.note)


def _sought(chosen: LogFilter, book: LogBook, now_us: int) -> object:
    return chosen.sought(book.site, book.zone, now_us)
