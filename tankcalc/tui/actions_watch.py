"""The commands that look at the shift as a whole: alerts, planner, handover, balance."""

from __future__ import annotations

from contextlib import closing
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from tankcalc.text import clean
from tankcalc.tui.actions_log import LogActions
from tankcalc.tui.asks import WHO
from tankcalc.tui.balance_ask import ALL
from tankcalc.tui.defects import note_defect
from tankcalc.tui.plan_subject import Subject, subject_in_log, subject_of
from tankcalc.tui.screens.alert_ask import UNTIL, SaveAction
from tankcalc.tui.screens.alerts import AlertsScreen
from tankcalc.tui.screens.balance import BalanceScreen
from tankcalc.tui.screens.handover import HandoverScreen
from tankcalc.tui.screens.handover_ask import AskFile, SaveTakeover
from tankcalc.tui.screens.plan import Find, PlanScreen

if TYPE_CHECKING:
    from tankcalc.handover.document import Document
    from tankcalc.limits.latch import What
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Shift
    from tankcalc.tui.logbook import LogBook
    from tankcalc.tui.screens.save import Outcome, SaveDialog


class WatchActions(LogActions):
    """Opens the screens; each reads the log through a store of its own."""

    def alerts(self) -> None:
        """Show the alerts of all tanks, and the limits of the one in front."""
        opened = self._opened()
        if opened is not None:
            zone, watching = opened[1].zone, self._app.watching
            screen = AlertsScreen(watching, self._desk, zone, self._ask_action)
            self._app.push_screen(screen, self._back)

    def plan(self) -> None:
        """Plan from the reading in front, or else from the last one in the log."""
        opened = self._opened()
        if opened is not None:
            site, book = opened
            held = self._app.watching.plans.setdefault(self._desk.tank_name, {})
            find, flow = self._finder(site), partial(self._flow, self._desk.tank_name)
            screen = PlanScreen(self._desk, site, book.zone, find, flow, held, self._note_defect)
            self._app.push_screen(screen, self._back)

    def handover(self) -> None:
        """Show the handover of the shift that ends or has just ended."""
        opened = self._opened()
        if opened is not None:
            asks = (self._ask_takeover, self._ask_file)
            store = self._app.watching.store
            screen = HandoverScreen(self._desk, opened[1], store, asks, self._note_defect)
            self._app.push_screen(screen, self._back)

    def balance(self) -> None:
        """Draw a balance; it begins with the tank in front and the last week."""
        opened = self._opened()
        if opened is not None:
            site, book = opened
            held = self._app.watching.balance
            if not held:
                held |= {"since": "7 d", "every": "1 d"}
            if held.get("tank") != ALL:
                held["tank"] = self._desk.tank_name
            store = self._app.watching.store
            screen = BalanceScreen(self._desk, site, book.zone, store, held, self._note_defect)
            self._app.push_screen(screen, self._back)

    def _opened(self) -> tuple[Site, LogBook] | None:
        """Return site and log; say why where there is none."""
        app, site = self._app, self._desk.site
        if site is None or app.book is None:
            app.main.say(self._not_ready)
            return None
        return site, app.book

    def _note_defect(self, error: Exception) -> str:
        return note_defect(self._app.options.state, error)

    def _finder(self, site: Site) -> Find:
        """Return how to find what to plan from: what is typed now, or else the log."""
        from tankcalc.shiftlog import now_us

        name, store = self._desk.tank_name, self._app.watching.store
        answer = self._app.front.answer
        subject, instead = subject_of(answer, now_us()), bool(answer.typed)

        def find() -> Subject:
            if subject is not None:
                return subject
            with closing(store()) as log:
                return replace(subject_in_log(log, site, name), instead=instead)

        return find

    def _flow(self, name: str) -> tuple[float, float | None] | None:
        """Return the flow that the log shows of a tank; None while it is static or not known."""
        found = self._app.watching.found
        watched = None if found is None else found.tank(name)
        if watched is None or watched.rate is None or watched.rate.static:
            return None
        return watched.flow_m3_s

    def _ask_action(self, what: What, name: str, key: str) -> None:
        """Ask who does something about an alert, as it stands now."""
        app, found = self._app, self._app.watching.found
        watched = None if found is None else found.tank(name)
        if watched is None or watched.tank is None or app.book is None:
            return
        alert = next((one for one in watched.alerts if one.key == key), None)
        if alert is not None:
            of = f"to {what}, {clean(name, 40)}: {clean(alert.text, 80)}"
            kept = self.kept(of, {UNTIL: self._shift_end(app.book)})
            given = (kept.answers, kept.sent)
            self._save(of, SaveAction(app.book, what, watched.tank, alert, *given))

    def _shift_end(self, book: LogBook) -> str:
        """Return when the shift ends, as it is typed: whoever comes next is told again."""
        from tankcalc.shiftlog import now_us
        from tankcalc.shiftlog.times import iso_local

        return iso_local(book.shift(now_us()).end_us, book.zone)[:16]

    def _ask_takeover(self, shift: Shift) -> None:
        assert self._app.book is not None
        of = f"taking over {clean(shift.title, 40)}"
        kept = self.kept(of, {WHO: ""})
        giver = self._desk.who
        dialog = SaveTakeover(self._app.book, shift, kept.answers, kept.sent, giver)
        self._save(of, dialog)

    def _ask_file(self, shift: Shift, document: Document) -> None:
        self._app.push_screen(AskFile(shift, document), self._written)

    def _save(self, key: str, dialog: SaveDialog) -> None:
        """Open a dialog over one of the screens; what it was left with is kept under the key."""
        self._app.push_screen(dialog, partial(self._saved, key))

    def _saved(self, key: str, outcome: Outcome | None) -> None:
        """Say on the screen below what became of it, and have everything read again."""
        assert outcome is not None
        app, below = self._app, self._app.screen
        self.keep_left(key, outcome)
        if outcome.receipt is not None:
            words = self.saved_words(outcome)
        else:
            words = f"NOT SAVED: {key}; it is kept here." if outcome.sent else "Nothing logged."
        if isinstance(below, AlertsScreen | HandoverScreen):
            below.tell(words)
            if outcome.receipt is not None:
                below.done()
        app.front.read_log()

    def _written(self, path: Path | None) -> None:
        below = self._app.screen
        if isinstance(below, HandoverScreen):
            words = "Nothing was written." if path is None else f"WRITTEN: {clean(str(path), 400)}"
            below.tell(words)

    def _back(self, _: None) -> None:
        """Show the units chosen meanwhile."""
        self._app.front.show_header()
        self._app.front.show_answer()
        self._app.front.show_log()
