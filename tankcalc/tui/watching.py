"""What goes on in the tanks, looked at beside the screen; and what its forms held last."""

from __future__ import annotations

import asyncio
import time
from collections.abc import Callable
from contextlib import closing
from functools import partial
from typing import TYPE_CHECKING

from tankcalc.errors import TankcalcError
from tankcalc.tui.aside import aside
from tankcalc.tui.defects import note_defect
from tankcalc.tui.work import begin

if TYPE_CHECKING:
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Store
    from tankcalc.tui.app import ConsoleApp
    from tankcalc.watch import Kept, Watched

QUIET_S = 1.0
"""A look begins when no key has come for so long."""

PATIENCE_S = 20.0
"""Longest wait for that: alerts are looked for also while somebody types on and on."""

SLOW_US = 90_000_000
"""A look that takes longer is told: what was found before may be true no longer."""


class Watching:
    """The alerts as they were found last, and when.

    Attributes
    ----------
    found : Watched or None
        None: not looked at yet, or it failed; ``trouble`` says why.
    trouble : str
        Why it is not known.
    began_us : int
        When the last look began, µs of UTC.
    plans : dict
        What was typed for a plan, by tank: a rate must not slip to another tank.
    balance : dict
        What was typed for a balance.
    """

    def __init__(self, app: ConsoleApp) -> None:
        self._app = app
        self.found: Watched | None = None
        self.trouble = ""
        self.plans: dict[str, dict[str, str]] = {}
        self.balance: dict[str, str] = {}
        self.began_us = 0
        self._kept: Kept | None = None
        self._told: list[Callable[[], None]] = []
        self._looking = self._again = False

    def store(self) -> Store:
        """Return the log, opened once more: a store belongs to one thread."""
        from tankcalc.shiftlog import log_address, open_store

        assert self._app.desk.site is not None
        return open_store(log_address(self._app.options.log, self._app.desk.site))

    def look(self) -> None:
        """Look at the log again; while that is under way, once more when it is done."""
        site = self._app.desk.site
        if site is None:
            return
        if self._looking:
            self._again = True
            if now_us() - self.began_us > SLOW_US:
                self.found, self.trouble = None, "the log is still being read; it takes long."
                self._tell()
        else:
            self._looking = True
            begin(self._app, partial(self._look, site), "watch")

    def after(self, told: Callable[[], None]) -> Callable[[], None]:
        """Have something called after every look; return how to stop that."""
        self._told.append(told)
        return partial(self._told.remove, told)

    def forget(self) -> None:
        """Read the profiles again: a file was written."""
        self._kept = None

    async def _look(self, site: Site) -> None:
        """Look until there is nothing new to look at."""
        try:
            self._again = True
            while self._again:
                self._again = False
                await self._quiet()
                self.began_us = now_us()
                await self._look_once(site)
                self._tell()
        finally:
            self._looking = False

    async def _quiet(self) -> None:
        """Wait for a pause in the keys: a busy thread makes what is being typed stutter."""
        end = time.monotonic() + PATIENCE_S
        while (wait := QUIET_S - self._app.quiet_s) > 0.0 and time.monotonic() < end:
            await asyncio.sleep(wait)

    async def _look_once(self, site: Site) -> None:
        try:
            self.found = await aside(partial(self._watched, site), "watch")
            self.trouble = ""
        except TankcalcError as error:
            self.found, self.trouble = None, str(error)
        except Exception as error:  # noqa: BLE001 - a defect is told, and the console goes on
            where = note_defect(self._app.options.state, error)
            self.found, self.trouble = None, f"this program failed. {where}"

    def _watched(self, site: Site) -> Watched:
        """Return how the tanks stand; runs in the other thread, one at a time."""
        from tankcalc.watch import Kept, watch

        kept = self._kept = self._kept or Kept()
        with closing(self.store()) as store:
            return watch(store, site, now_us(), kept=kept)

    def _tell(self) -> None:
        for told in list(self._told):
            told()


def now_us() -> int:
    """Return the present instant, µs of UTC."""
    return time.time_ns() // 1000
