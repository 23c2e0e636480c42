"""What each command does, by its id in the registry."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from tankcalc.errors import TankcalcError
from tankcalc.text import clean
from tankcalc.tui.defects import note_defect
from tankcalc.tui.fields import label_of
from tankcalc.tui.help_text import help_lines
from tankcalc.tui.liquid_draft import LiquidDraft, opened
from tankcalc.tui.log_lines import clock
from tankcalc.tui.logbook import Unsaved
from tankcalc.tui.present import (
    all_messages,
    figure,
    log_subject,
    result_title,
    table,
    wrapped,
)
from tankcalc.tui.screens.ask import AskQuit
from tankcalc.tui.screens.detail import DetailScreen, Page
from tankcalc.tui.screens.liquid import Kept, LiquidScreen
from tankcalc.tui.screens.note import SaveNote
from tankcalc.tui.screens.pick import PickFluid
from tankcalc.tui.screens.read import ReadScreen
from tankcalc.tui.screens.save import Outcome, SaveReading

if TYPE_CHECKING:
    from tankcalc.shiftlog import Entry
    from tankcalc.tui.app import ConsoleApp
    from tankcalc.tui.desk import Answer
    from tankcalc.tui.present import Line

NOT_READY = "Loading; this works in a moment."


class Actions:
    """The commands of the console; a test holds them against the registry."""

    def __init__(self, app: ConsoleApp) -> None:
        self._app = app
        self._desk = app.desk

    def help(self) -> None:
        """Show the help, beginning with the field that was being typed in."""
        current = self._app.main.form.current
        field = "" if current is None else current.field.name
        self._app.push_screen(ReadScreen("HELP", lambda width: help_lines(width, field)))

    def tanks(self) -> None:
        """Go to the list of tanks."""
        self._app.main.query_one("#tanks").focus()

    def units(self) -> None:
        """Show the next system of units."""
        self._desk.next_units()
        self._app.front.show_header()
        self._app.front.show_answer()
        self._app.front.show_log()

    def fluid(self) -> None:
        """Choose another density profile."""
        answer = self._app.front.answer
        if self._desk.site is None or answer.tank is None:
            return self._app.main.say(answer.why or NOT_READY)
        names = self._desk.site.fluid_names()
        chosen = self._desk.entry.fluid or answer.tank.contents
        picker = PickFluid(self._desk.tank_name, names, chosen, answer.tank.contents)
        self._app.push_screen(picker, self._take_fluid)
        return None

    def log(self) -> None:
        """Show what will be logged, and save it on Enter."""
        app, answer = self._app, self._app.front.answer
        if app.book is None:
            return app.main.say(app.front.log_trouble or NOT_READY)
        if answer.result is None:
            return app.main.say(f"Nothing to log. {answer.why}")
        unsaved, answer, again = self._entry()
        time = clock(unsaved.entry.t_us, app.book.zone)
        width = app.size.width - 2
        subject = log_subject(answer, app.front.rows, self._desk.tank_name, time, width)
        screen = SaveReading(app.book, unsaved, self._desk.who, subject, again=again)
        app.push_screen(screen, self._logged)
        return None

    def note(self) -> None:
        """Take a note on the tank in front, and save it on Enter."""
        app = self._app
        if app.book is None:
            return app.main.say(app.front.log_trouble or NOT_READY)
        screen = SaveNote(app.book, self._desk.tank_name, self._desk.who, self._note_entry)
        app.push_screen(screen, self._noted)
        return None

    def shift(self) -> None:
        """Go to the log of this shift."""
        self._app.main.log_pane.focus()

    def clear(self) -> None:
        """Empty the readings, or bring them back."""
        entry = self._desk.entry
        entry.clear()
        self._app.main.form.fill(entry.fields)
        self._app.keep_draft()
        said = "Readings are back." if entry.fields else "Cleared; F8 brings the readings back."
        self._app.front.show_answer(said)

    def details(self) -> None:
        """Show every figure and every warning in full."""
        fluid = self._app.front.answer.fluid
        of = "" if fluid is None else f": {clean(fluid.name)}"
        title = f"{clean(self._desk.tank_name)} IN FULL{of}"
        pages: list[Page] = [("figures", self._in_full)]
        if self._app.front.answer.readings is not None:
            pages.append(("uncertainty", self._uncertainty))
            pages.append(("corrections", self._corrections))
            pages.append(("agreement", self._agreement))
            pages.append(("sums", self._sums))
        self._app.push_screen(DetailScreen(title, pages, self.units))

    def liquid(self) -> None:
        """Try a liquid, beginning from the one in the tank."""
        site, answer = self._desk.site, self._app.front.answer
        if site is None or answer.tank is None:
            return self._app.main.say(answer.why or NOT_READY)
        chosen = self._desk.entry.fluid or answer.tank.contents
        said = ""
        try:
            draft = opened(site, chosen) if chosen in site.fluid_names() else LiquidDraft()
        except TankcalcError as error:
            draft, said = LiquidDraft(), str(error)
        draft.temperature = self._desk.entry.fields.get("temperature", "")
        note = partial(note_defect, self._app.options.state)
        screen = LiquidScreen(self._desk, site, answer.tank, draft, note, said)
        self._app.push_screen(screen, self._tried)
        return None

    def quit(self) -> None:
        """Ask, and leave."""
        self._app.push_screen(AskQuit(sorted(self._desk.unfinished)), self._app.leave)

    def _take_fluid(self, name: str | None) -> None:
        if name is not None:
            tank = self._app.front.answer.tank
            usual = tank is not None and name == tank.contents
            self._desk.entry.fluid = "" if usual else name
            self._desk.entry.unsaved = None
            self._app.keep_draft()
            self._app.front.show_answer()

    def _tried(self, kept: Kept | None) -> None:
        """Calculate with what was saved, and show the units chosen meanwhile."""
        self._app.front.show_header()
        self._app.front.show_log()
        if kept is None:
            return self._app.front.show_answer()
        self._desk.forget_fluids()
        self._app.front.show_answer(kept.words)
        fluid = self._app.front.answer.fluid
        if fluid is None or fluid.file != kept.stem:
            self._app.main.say(f"{kept.words} F4 chooses it for this tank.")
        return None

    def _entry(self) -> tuple[Unsaved, Answer, bool]:
        """Return the entry, the answer in it, and whether it was sent before and not saved."""
        from tankcalc.shiftlog import now_us, reading_entry

        held, now = self._desk.entry, now_us()
        if held.unsaved is not None:
            return held.unsaved, self._app.front.answer, True
        answer = self._app.front.checked(now)
        assert self._desk.site is not None
        assert answer.tank is not None
        assert answer.fluid is not None
        assert answer.result is not None
        entry = reading_entry(
            site=self._desk.site,
            tank=answer.tank,
            fluid=answer.fluid,
            typed=answer.typed,
            result=answer.result,
            now_us=now,
            note=held.fields.get("note", ""),
        )
        return self._with_texts(entry), answer, False

    def _note_entry(self, who: str, note: str) -> Unsaved:
        from tankcalc.shiftlog import note_entry, now_us

        assert self._desk.site is not None
        site, tank = self._desk.site, self._app.front.answer.tank
        return self._with_texts(
            note_entry(site=site, note=note, now_us=now_us(), tank=tank, who=who)
        )

    def _with_texts(self, entry: Entry) -> Unsaved:
        """Return an entry with the texts of the profiles it rests on."""
        assert self._desk.site is not None
        site = self._desk.site
        return Unsaved(entry, {version: site.text(version) for version in entry.versions.values()})

    def _logged(self, outcome: Outcome | None) -> None:
        """Empty the readings when they are on disk; keep them, and the note, when not."""
        assert outcome is not None
        held = self._desk.entry
        if outcome.receipt is not None:
            self._desk.who = outcome.who
            held.done()
            self._app.main.form.go()
            said = f"SAVED, on disk: entry {outcome.receipt.seq} of the log."
        else:
            held.type("note", outcome.note)
            held.unsaved = outcome.sent
            said = "NOT SAVED; the entry is kept here." if outcome.sent else "Not logged."
        self._app.main.form.fill(held.fields)
        self._app.keep_draft()
        self._app.front.read_log()
        self._app.front.show_answer(said)

    def _noted(self, outcome: Outcome | None) -> None:
        assert outcome is not None
        if outcome.receipt is not None:
            self._desk.who = outcome.who
            self._app.main.say(f"SAVED, on disk: entry {outcome.receipt.seq} of the log.")
        else:
            self._app.main.say("The note was NOT SAVED." if outcome.sent else "No note logged.")
        self._app.front.read_log()

    def _uncertainty(self, width: int) -> list[Line]:
        """Return what each input adds to the uncertainty."""
        from tankcalc.report import budget_table
        from tankcalc.uncertainty import assess

        answer = self._app.front.answer
        if answer.tank is None or answer.fluid is None or answer.readings is None:
            return []
        budget = assess(answer.tank, answer.fluid, answer.readings)
        if budget is None:
            return wrapped("There is no answer, so there is no uncertainty of one.", "", width)
        return table(budget_table(budget, self._desk.units))

    def _corrections(self, width: int) -> list[Line]:
        """Return what each correction is worth."""
        from tankcalc.report import terms_table
        from tankcalc.terms import terms

        answer = self._app.front.answer
        if answer.tank is None or answer.fluid is None or answer.readings is None:
            return []
        found = terms(answer.tank, answer.fluid, answer.readings)
        if not found:
            return wrapped("There is no correction that would change the answer.", "", width)
        return table(terms_table(found, self._desk.units))

    def _agreement(self, width: int) -> list[Line]:
        """Return whether the readings agree, and which single faults would make them."""
        from tankcalc.consistency import explain, words
        from tankcalc.typed import typed_units

        answer = self._app.front.answer
        if answer.tank is None or answer.fluid is None or answer.readings is None:
            return []
        meant = typed_units(answer.typed)
        found = explain(answer.tank, answer.fluid, answer.readings, typed_units=meant)
        lines: list[Line] = []
        for line in words(found, self._desk.units):
            lines += wrapped(line, "", width)
        return lines

    def _sums(self, width: int) -> list[Line]:
        """Return the working from observed volume to weight, in both ways of rounding."""
        from tankcalc.report import sums_table
        from tankcalc.sums import ROUNDINGS, sums

        answer, shown = self._app.front.answer, self._desk.units
        if answer.tank is None or answer.fluid is None or answer.readings is None:
            return []
        lines: list[Line] = []
        for rounding in ROUNDINGS:
            found = sums(answer.tank, answer.fluid, answer.readings, rounding, shown)
            lines += [*table(sums_table(found)), []]
        return lines

    def _in_full(self, width: int) -> list[Line]:
        answer = self._app.front.answer
        lines = [result_title(answer)]
        lines += [[(f"{label_of(name)}: {text}", "")] for name, text in answer.typed.items()]
        rows = self._app.front.rows
        lines += [figure(row.label, row.value, width, row.give) for row in rows]
        return [*lines, [], *all_messages(answer, width)]
