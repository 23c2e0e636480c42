"""What each command does, by its id in the registry."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from tankcalc.errors import TankcalcError
from tankcalc.tui.actions_details import DetailActions
from tankcalc.tui.actions_entry import EntryActions
from tankcalc.tui.actions_log import NOT_READY
from tankcalc.tui.actions_watch import WatchActions
from tankcalc.tui.defects import note_defect
from tankcalc.tui.help_text import help_lines
from tankcalc.tui.liquid_draft import LiquidDraft, opened
from tankcalc.tui.screens.ask import AskQuit
from tankcalc.tui.screens.liquid import Kept, LiquidScreen
from tankcalc.tui.screens.pick import PickFluid
from tankcalc.tui.screens.read import ReadScreen

if TYPE_CHECKING:
    from tankcalc.tui.app import ConsoleApp


class Actions(EntryActions, DetailActions, WatchActions):
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

    def clear(self) -> None:
        """Empty the readings, or bring them back."""
        entry = self._desk.entry
        entry.clear()
        self._app.main.form.fill(entry.fields)
        self._app.keep_draft()
        said = "Readings are back." if entry.fields else "Cleared; F8 brings the readings back."
        self._app.front.show_answer(said)

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
        self._app.push_screen(
            AskQuit([*sorted(self._desk.unfinished), *self._desk.left], self._desk.unsaved),
            self._app.leave,
        )

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
        self._app.watching.forget()
        self._app.front.show_answer(kept.words)
        fluid = self._app.front.answer.fluid
        if fluid is None or fluid.file != kept.stem:
            self._app.main.say(f"{kept.words} F4 chooses it for this tank.")
        return None
