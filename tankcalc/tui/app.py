"""The console as a program: what is connected with what, and nothing else."""

from __future__ import annotations

import asyncio
import gc
import signal
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, ClassVar

from rich.text import Text
from textual import events
from textual.app import App
from textual.binding import Binding, BindingType
from textual.filter import LineFilter
from textual.screen import Screen

from tankcalc.errors import TankcalcError
from tankcalc.tui import engine, messages
from tankcalc.tui.defects import note_defect
from tankcalc.tui.desk import Desk
from tankcalc.tui.drafts import Drafts
from tankcalc.tui.front import Front, now_us
from tankcalc.tui.keys import Arrived, KeyLine
from tankcalc.tui.screens.main import MainScreen
from tankcalc.tui.theme import THEME, AsciiOnly
from tankcalc.tui.watching import Watching

if TYPE_CHECKING:
    from tankcalc.tui.logbook import LogBook
    from tankcalc.units import System

ENGINE_DELAY_S = 0.15
"""The rest begins after the first paint and the first key; it would delay them by as much."""


@dataclass(frozen=True, slots=True)
class Options:
    """What the console is started with."""

    folder: Path
    state: Path
    is_demo: bool = False
    log: str | None = None
    units: System | None = None
    ascii: bool = False

    @property
    def place(self) -> str:
        """The site, and the log where another than the site's is chosen: drafts belong to both."""
        return str(self.folder) if self.log is None else f"{self.folder} with {self.log}"


class ConsoleApp(App[None]):
    """Wires the desk, the drafts, the log and the screens together."""

    TITLE = "tankcalc"
    CSS_PATH = Path(__file__).with_name("console.tcss")
    ENABLE_COMMAND_PALETTE = False
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("ctrl+q,ctrl+c", "ask_quit", show=False, priority=True),
    ]

    def __init__(self, options: Options) -> None:
        # ANSI colours from the first moment: NO_COLOR then means none, not greys.
        super().__init__(ansi_color=True)
        self.options = options
        self.desk = Desk(engine.tank_names(options.folder), options.units)
        self.drafts = Drafts(options.state, options.place)
        self.book: LogBook | None = None
        self.main = MainScreen(self.desk)
        self.front = Front(self)
        self.watching = Watching(self)
        self.watching.after(self.front.show_alerts)
        self._keys = KeyLine(super().on_event, lambda: self.focused or self.screen)
        self.register_theme(THEME)
        self.theme = THEME.name
        self.set_class(options.ascii, "-ascii")

    def get_default_screen(self) -> Screen[None]:
        """Return the screen people work on."""
        return self.main

    def get_line_filters(self) -> Sequence[LineFilter]:
        """Let nothing but ASCII out where the terminal knows no more."""
        filters = super().get_line_filters()
        return [*filters, AsciiOnly()] if self.options.ascii else filters

    @property
    def quiet_s(self) -> float:
        """For how long no key has come."""
        return self._keys.quiet_s

    async def on_event(self, event: events.Event) -> None:
        """Take keys and pastes one at a time."""
        if isinstance(event, events.Key | events.Paste) and not event.is_forwarded:
            self._keys.put(event)
        else:
            await super().on_event(event)

    def on_arrived(self, message: Arrived) -> None:
        """Let the next key go."""
        message.event.set()

    def on_mount(self) -> None:
        """Take over the signals of a lost link."""
        loop = asyncio.get_running_loop()
        self.run_worker(self._keys.run(), group="keys")
        for number in (signal.SIGHUP, signal.SIGTERM):
            loop.add_signal_handler(number, self._lost, number)

    def on_ready(self) -> None:
        """Look for what a dead console left; the screen is up."""
        gc.freeze()
        gc.enable()
        self.drafts.open()
        if self.desk.unfinished:
            self.keep_draft()
        if self.drafts.left:
            # What lies under a dialog must have been drawn once.
            self.main.call_after_refresh(self._offer_drafts)
        self.front.show_header()
        self.set_timer(ENGINE_DELAY_S, self._load)

    async def _load(self) -> None:
        """Make the other fields, and load the calculation and the site."""
        options = self.options
        await self.main.form.complete(self.desk.entry.fields)
        engine.start(options.folder, options.is_demo, options.state, self.post_message)

    def on_unmount(self) -> None:
        """Let go of what is held on disk."""
        if self.book is not None:
            self.book.close()
        self.drafts.close()

    def on_engine_ready(self, message: messages.EngineReady) -> None:
        """Answer what was typed meanwhile, and show the log."""
        from tankcalc.tui.logbook import LogBook

        self.desk.open(message.site)
        try:
            self.book = LogBook.of(message.site, self.options.log)
            self.front.open_log(self.book)
        except TankcalcError as error:
            self.front.log_trouble = f"No log: {error}"
        self.front.tick()
        self.front.show_tank()

    def on_engine_failed(self, message: messages.EngineFailed) -> None:
        """Say what is wrong with the site; there is nothing else to show."""
        self.desk.trouble = f'{message.why} "tankcalc vet" says more.'
        self.front.show_answer()

    def on_tanks_read(self, message: messages.TanksRead) -> None:
        """Mark the tanks whose files cannot be read."""
        self.desk.know(message.sound, message.broken)
        self.main.list_tanks()

    def on_tank_chosen(self, message: messages.TankChosen) -> None:
        """Bring another tank to the front."""
        self.desk.tank_name = message.name
        self.front.bring_tank()

    def on_entry_changed(self, message: messages.EntryChanged) -> None:
        """Answer as it is typed."""
        self.desk.entry.type(message.name, message.text)
        self.keep_draft()
        self.front.show_answer()

    def on_entry_left(self, _message: messages.EntryLeft) -> None:
        """Have what was typed survive a power cut too."""
        if self.book is not None:
            self.book.settle(self.drafts.settle)

    def on_command_given(self, message: messages.CommandGiven) -> None:
        """Do what the command says."""
        from tankcalc.tui.actions import Actions

        try:
            getattr(Actions(self), message.id)()
        except Exception as error:  # noqa: BLE001 - one command that fails must not end the shift
            self.main.say(f"This program failed. {note_defect(self.options.state, error)}")

    def action_ask_quit(self) -> None:
        """Ask before leaving, once."""
        if self.screen is self.main:
            self.on_command_given(messages.CommandGiven("quit"))

    def leave(self, yes: bool | None) -> None:
        """Leave when that was the answer."""
        if yes:
            self.exit()

    def keep_draft(self) -> None:
        """Keep on disk what is typed for the tank in front, and mark it in the list."""
        self.drafts.keep(self.desk, self.desk.tank_name, now_us())
        self.main.list_tanks()

    def _offer_drafts(self) -> None:
        from tankcalc.tui.drafts import draft_lines
        from tankcalc.tui.screens.ask import AskDraft

        lines = draft_lines(self.drafts.left, now_us(), self.size.width - 2)
        self.push_screen(AskDraft(lines), self._draft_decided)

    def _draft_decided(self, keep: bool | None) -> None:
        """Keep, discard or leave what a dead console left."""
        if keep:
            self.drafts.adopt(self.desk)
            self.front.bring_tank()
        elif keep is None:
            self.drafts.later()
        else:
            self.drafts.discard()

    def _fatal_error(self) -> None:
        """Leave with words instead of the library's traceback; what was typed is on disk."""
        error = self._exception or RuntimeError("unknown")
        words = (
            f"tankcalc: stopped. {note_defect(self.options.state, error)} What was typed is kept."
        )
        self._exit_renderables.append(Text(words))
        self._close_messages_no_wait()

    def _lost(self, number: int) -> None:
        """Leave when the link is lost; what was typed is on disk already."""
        self.drafts.settle()
        self.exit(return_code=128 + number)
