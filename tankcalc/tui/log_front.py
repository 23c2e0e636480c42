"""The log as it stands on the main screen: what is shown of it, and reading on as one moves."""

from __future__ import annotations

import asyncio
from collections.abc import Callable
from functools import partial
from typing import TYPE_CHECKING

from tankcalc.errors import TankcalcError
from tankcalc.tui.log_filter import LogFilter
from tankcalc.tui.log_lines import log_rows, log_title
from tankcalc.tui.log_pages import News, Seen, Sought
from tankcalc.tui.log_window import LogWindow
from tankcalc.tui.present import Line, wrapped
from tankcalc.tui.work import Work, begin

if TYPE_CHECKING:
    from tankcalc.tui.app import ConsoleApp
    from tankcalc.tui.logbook import LogBook


class LogFront:
    """A window over the log of any length; reads in the log's thread, one thing at a time."""

    def __init__(self, app: ConsoleApp, book: LogBook) -> None:
        self._app, self._book = app, book
        self._window = LogWindow()
        self._chosen, self._sought = LogFilter(), Sought()
        self._head = 0
        self._opened = False
        self._is_on = True
        self._turn = asyncio.Lock()
        self._growing = False
        self._jumping = 0
        self.trouble = ""

    @property
    def chosen(self) -> LogFilter:
        """What is shown of the log."""
        return self._chosen

    @property
    def marked(self) -> Seen | None:
        """The entry that is marked."""
        return self._window.marked

    def choose(self, chosen: LogFilter, now_us: int) -> None:
        """Show other entries, from the newest; an InputError where the filter is none."""
        chosen.sought(self._book.site, self._book.zone, now_us)
        self._chosen = chosen
        self._jump(partial(self._open_last, now_us))

    def move(self, by: int) -> None:
        """Mark the entry that many rows below."""
        self._in_turn(partial(self._window.move, by))

    def page(self, by: int) -> None:
        """Move by whole panes."""
        self._in_turn(partial(self._window.page, by))

    def end(self, now_us: int) -> None:
        """Go to the newest entry, however far it is."""
        if self._window.below or not self._is_on:
            self._jump(partial(self._open_last, now_us))
        else:
            self.move(len(self._window.seen))
            self._start(partial(self._read, now_us))

    def home(self) -> None:
        """Go to the oldest entry, however far it is."""
        if self._window.above:
            self._jump(self._open_first)
        else:
            self.move(-len(self._window.seen))

    async def read(self, now_us: int) -> None:
        """Take in what other consoles have logged; what is being read stays where it is."""
        async with self._turn:
            await self._heard(partial(self._read, now_us))
        self.show()

    def show(self) -> None:
        """Show the entries that are held."""
        self._app.main.log_pane.rebuild()

    def lines(self, width: int, height: int, *, focused: bool) -> list[Line]:
        """Return the title's words and the rows in sight, for a pane of this size."""
        if self.trouble:
            return [[("LOG", "title")], *wrapped(self.trouble, "refused", width)]
        self._window.fit(height - 1)
        title = log_title(self._chosen, self._sought, self._window, self._head, is_on=self._is_on)
        rows = log_rows(
            self._window.in_sight,
            self._book.zone,
            self._app.desk.units,
            width,
            self._window.marked if focused else None,
            dated=self._sought.shift is None,
        )
        return [[(title, "title")], *rows]

    def _jump(self, work: Work) -> None:
        """Go far; keys that come before it is done act after it."""

        async def jump() -> None:
            try:
                await work()
            finally:
                self._jumping -= 1

        self._jumping += 1
        self._start(jump)

    def _in_turn(self, move: Callable[[], None]) -> None:
        async def later() -> None:
            move()
            self._moved()

        if self._jumping:
            self._start(later)
        else:
            move()
            self._moved()

    def _moved(self) -> None:
        self.show()
        if self._window.wants() and not self._growing:
            self._growing = True
            self._start(self._grow)

    def _start(self, work: Work) -> None:
        async def run() -> None:
            async with self._turn:
                await self._heard(work)
            self.show()

        begin(self._app, run, "log")

    async def _heard(self, work: Work) -> None:
        """Do some reading, and tell in the pane when the log cannot be read."""
        try:
            await work()
            self.trouble = ""
        except TankcalcError as error:
            self.trouble = f"The log cannot be read: {error}"

    async def _open_last(self, now_us: int) -> None:
        self._sought = self._chosen.sought(self._book.site, self._book.zone, now_us)
        self._is_on = True
        page = await self._book.last(self._sought)
        self._window.open(page, at_end=True)
        self._head, self._opened = page.head, True

    async def _open_first(self) -> None:
        page = await self._book.first(self._sought)
        self._window.open(page, at_end=False)
        self._head, self._opened = page.head, True

    async def _grow(self) -> None:
        """Read on at the end that is coming into sight."""
        try:
            way = self._window.wants()
            seen = self._window.seen
            if way == "above":
                self._window.grow(await self._book.before(self._sought, seen[0].row.seq), way)
            elif way == "below":
                self._window.grow(await self._book.after(self._sought, seen[-1].row.seq), way)
        finally:
            self._growing = False

    async def _read(self, now_us: int) -> None:
        sought = self._chosen.sought(self._book.site, self._book.zone, now_us)
        # Another shift may be on; whoever is reading the last one is left where they are.
        self._is_on = sought == self._sought
        if not self._opened or self.trouble or (not self._is_on and self._window.at_end):
            await self._open_last(now_us)
            return
        found = await self._book.news(self._head)
        if found.complete:
            await self._add(found)
        elif self._window.at_end:
            await self._open_last(now_us)
        else:
            self._window.below = True
            self._window.replace(await self._book.renewed(one.row for one in self._window.seen))
            self._head = found.head

    async def _add(self, found: News) -> None:
        """Put what is new below, and mark anew what it corrects."""
        touched = {row.entry.ref for row in found.rows if row.entry.ref is not None}
        old = [
            one.row for one in self._window.seen if {one.row.entry.uid, one.row.entry.ref} & touched
        ]
        wanted = [row for row in found.rows if self._sought.takes(row)]
        renewed = await self._book.renewed([*old, *wanted])
        self._window.replace(renewed[: len(old)])
        self._window.add(renewed[len(old) :])
        self._head = found.head
