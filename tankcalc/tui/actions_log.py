"""The commands that log something: a reading, a note, a movement, who is on."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from tankcalc.text import clean
from tankcalc.tui.asks import (
    ACCEPT,
    AT,
    JUDGED,
    MOVING,
    NOT_SAID,
    NOTE,
    REASON,
    WHO,
    WITNESS,
)
from tankcalc.tui.desk import Kept
from tankcalc.tui.front import now_us as present_us
from tankcalc.tui.reading_maker import ReadingMaker
from tankcalc.tui.screens.movement import SaveMovement
from tankcalc.tui.screens.note import SaveNote
from tankcalc.tui.screens.reading import SaveReading
from tankcalc.tui.screens.save import Outcome, SaveDialog
from tankcalc.tui.screens.sign import SaveSign

if TYPE_CHECKING:
    from tankcalc.tui.app import ConsoleApp
    from tankcalc.tui.desk import Desk

NOT_READY = "Loading; this works in a moment."
ASKED_OF_READINGS = (NOTE, MOVING, JUDGED, REASON, WITNESS, AT)
"""Answers that are kept with the readings of a tank until those are logged."""


class LogActions:
    """Opens the dialogs that log something, and takes what came of them."""

    _app: ConsoleApp
    _desk: Desk

    def log(self) -> None:
        """Show what will be logged, and save it on Enter."""
        from tankcalc.shiftlog import now_us

        app, held = self._app, self._desk.entry
        if app.book is None:
            return app.main.say(self._not_ready)
        if app.front.answer.result is None:
            return app.main.say(f"Nothing to log. {app.front.answer.why}")
        answers = {name: text for name, text in held.fields.items() if name in ASKED_OF_READINGS}
        answers[WHO] = self._desk.who
        if held.unsaved is not None:
            answers[WHO] = held.unsaved.entry.who
        maker = ReadingMaker(app.book, app.front.answer.weighed(), now_us())
        screen = SaveReading(app.book, maker, self._desk.units, answers, held.unsaved)
        screen.on_send = self._hold
        app.push_screen(screen, self._logged)
        return None

    def note(self) -> None:
        """Take a note on the tank in front, and save it on Enter."""
        app, tank = self._app, self._app.front.answer.tank
        if app.book is None:
            return app.main.say(self._not_ready)
        key = f"note on {clean(self._desk.tank_name, 40)}"
        kept = self.kept(key)
        self.ask(key, SaveNote(app.book, tank, kept.answers, kept.sent))
        return None

    def movement(self) -> None:
        """Take a metered movement of the tank in front, and save it on Enter."""
        app, tank = self._app, self._app.front.answer.tank
        if app.book is None or tank is None:
            return app.main.say(self._not_ready)
        key = f"movement of {clean(self._desk.tank_name, 40)}"
        kept = self.kept(key)
        self.ask(key, SaveMovement(app.book, tank, kept.answers, kept.sent))
        return None

    def sign(self) -> None:
        """Take who takes over the shift, or leaves it, and save it on Enter."""
        app = self._app
        if app.book is None:
            return app.main.say(self._not_ready)
        kept = self.kept("signing on or off")
        self.ask("signing on or off", SaveSign(app.book, kept.answers, kept.sent))
        return None

    def shift(self) -> None:
        """Go to the log."""
        self._app.main.log_pane.focus()

    def kept(self, key: str, at_first: Mapping[str, str] | None = None) -> Kept:
        """Return what a dialog is to begin with: what was asked before, or this."""
        kept = self._desk.kept.get(key)
        if kept is not None:
            return kept
        return Kept({WHO: self._desk.who, **(at_first or {})})

    def ask(self, key: str, dialog: SaveDialog, touched: bool = False) -> None:
        """Open a dialog that logs something; what it was left with is kept under the key."""

        def taken(outcome: Outcome | None) -> None:
            self._taken(key, outcome, touched)

        dialog.on_send = lambda outcome: self.keep_left(key, outcome, touched)
        self._app.push_screen(dialog, taken)

    def saved_words(self, outcome: Outcome) -> str:
        """Return what to say of an entry that is on disk."""
        assert outcome.receipt is not None
        self._desk.who = outcome.answers.get(WHO, "").strip() or self._desk.who
        stepped = "" if outcome.step is None else f" CLOCK STEP: {outcome.step}"
        return f"SAVED, on disk: entry {outcome.receipt.seq} of the log.{stepped}"

    @property
    def _not_ready(self) -> str:
        front = self._app.front
        return front.log_trouble or self._desk.trouble or front.answer.why or NOT_READY

    def keep_left(self, key: str, outcome: Outcome, touched: bool = False) -> None:
        """Keep what a dialog was left with, on disk too; nothing of one only looked at."""
        if outcome.receipt is not None:
            self._desk.kept.pop(key, None)
        elif outcome.sent or outcome.touched or touched or key in self._desk.kept:
            self._desk.kept[key] = Kept(outcome.answers, outcome.sent)
        else:
            return
        self._app.drafts.keep_dialog(self._desk, key, present_us())
        if self._app.book is not None:
            self._app.book.settle(self._app.drafts.settle)

    def _taken(self, key: str, outcome: Outcome | None, touched: bool = False) -> None:
        """Say what became of an entry; keep what was typed where it is not on disk."""
        assert outcome is not None
        self.keep_left(key, outcome, touched)
        if outcome.receipt is not None:
            self._app.main.say(self.saved_words(outcome))
        else:
            words = f"NOT SAVED: {key}; it is kept here." if outcome.sent else "Nothing logged."
            self._app.main.say(words)
        self._app.front.read_log()

    def _logged(self, outcome: Outcome | None) -> None:
        """Empty the readings when they are on disk; keep them, and what was asked, when not."""
        assert outcome is not None
        held = self._desk.entry
        if outcome.receipt is not None:
            said = self.saved_words(outcome)
            held.done()
            self._app.main.form.go()
        else:
            self._hold(outcome)
            said = "NOT SAVED; the entry is kept here." if outcome.sent else "Not logged."
        self._app.main.form.fill(held.fields)
        self._app.keep_draft()
        self._app.front.read_log()
        self._app.front.show_answer(said)

    def _hold(self, outcome: Outcome) -> None:
        """Keep what was asked, and the entry that was sent, with the readings; on disk too."""
        held = self._desk.entry
        for name in ASKED_OF_READINGS:
            text = outcome.answers.get(name, "")
            held.type(name, "" if text in (ACCEPT, NOT_SAID) else text)
        held.unsaved = outcome.sent
        self._app.drafts.keep(self._desk, self._desk.tank_name, present_us())
