"""The shift's log as the console uses it: one thread, so that a slow disk never stops a key."""

from __future__ import annotations

import asyncio
from collections.abc import Callable, Iterable, Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeVar

from tankcalc.errors import StoreError, TankcalcError
from tankcalc.tui import log_pages
from tankcalc.tui.log_pages import News, Page, Seen, Sought

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Entry, Receipt, Row, Shift, Standing, Step, Store
    from tankcalc.tank import Tank

T = TypeVar("T")


@dataclass(frozen=True, slots=True)
class Unsaved:
    """An entry that is not on disk yet, with the texts of the profiles it rests on."""

    entry: Entry
    texts: Mapping[str, bytes]


@dataclass(frozen=True, slots=True)
class Earlier:
    """The entries that a reading of a tank is held against.

    ``seen`` is the number of the newest entry of the log by then; 0 where it was not read.
    """

    tank: str = ""
    seen: int = 0
    rows: Sequence[Row] = ()


class LogBook:
    """A store with the shift that is on; every call to the store runs in one other thread."""

    def __init__(self, store: Store, site: Site, zone: ZoneInfo) -> None:
        from tankcalc.shiftlog import ClockWatch

        self._store = store
        self.site = site
        self.zone = zone
        self._watch = ClockWatch()
        self._thread = ThreadPoolExecutor(1, "tankcalc-log")

    @classmethod
    def of(cls, site: Site, option: str | None) -> LogBook:
        """Return the log of a site, or the one that ``--log`` names; nothing is opened yet."""
        from tankcalc.shiftlog import log_address, open_store, zone_named

        return cls(open_store(log_address(option, site)), site, zone_named(site.time_zone))

    @property
    def where(self) -> str:
        """Where the log is kept."""
        return self._store.where

    def shift(self, at_us: int) -> Shift:
        """Return the shift of an instant."""
        from tankcalc.shiftlog import shift_at

        return shift_at(at_us, self.zone, self.site.shifts)

    def with_texts(self, entry: Entry) -> Unsaved:
        """Return an entry with the texts of the profiles it rests on.

        The site's is among them always: the entry of a clock step may have to go before it.
        """
        versions = {self.site.version, *entry.versions.values()}
        return Unsaved(entry, {version: self.site.text(version) for version in versions})

    async def append(self, unsaved: Unsaved) -> tuple[Receipt, Step | None]:
        """Return the receipt of an entry once it is on disk, and the step of the clock before it.

        A StoreError where it is not on disk.
        """
        from tankcalc.shiftlog.clock import log

        entry, texts = unsaved.entry, unsaved.texts
        return await self._apart(
            lambda: log(self._store, entry, texts, site=self.site, watch=self._watch)
        )

    async def last(self, sought: Sought) -> Page:
        """Return the newest entries of those that are wanted."""
        return await self._apart(lambda: log_pages.last_page(self._store, sought))

    async def first(self, sought: Sought) -> Page:
        """Return the oldest ones."""
        return await self._apart(lambda: log_pages.first_page(self._store, sought))

    async def before(self, sought: Sought, number: int) -> Page:
        """Return those just before a number."""
        return await self._apart(lambda: log_pages.page_before(self._store, sought, number))

    async def after(self, sought: Sought, number: int) -> Page:
        """Return those just after a number."""
        return await self._apart(lambda: log_pages.page_after(self._store, sought, number))

    async def news(self, number: int) -> News:
        """Return what came into the log after a number."""
        return await self._apart(lambda: log_pages.news(self._store, number))

    async def renewed(self, rows: Iterable[Row]) -> list[Seen]:
        """Return entries with what became of them by now."""
        listed = list(rows)
        return await self._apart(lambda: list(log_pages.seen_all(self._store, listed)))

    async def opened(self, row: Row) -> Seen:
        """Return an entry with its whole history by now."""
        return await self._apart(lambda: log_pages.opened(self._store, row))

    async def earlier(self, tank: Tank) -> Earlier:
        """Return the entries that a reading of a tank is held against."""
        from tankcalc.shiftlog import recent_rows

        def look() -> Earlier:
            seen = self._store.head()[0]
            return Earlier(tank.file, seen, recent_rows(self._store, tank, before=seen + 1))

        return await self._apart(look)

    async def to_correct(self, uid: bytes, kind: str) -> Standing:
        """Return an original and what became of it; an InputError where it cannot be corrected."""
        from tankcalc.shiftlog import to_correct

        return await self._apart(lambda: to_correct(self._store, uid, kind))

    async def open_faults(self, tank: str) -> dict[str, Row]:
        """Return the notes that opened a fault of a tank which is still open, by instrument."""
        from tankcalc.shiftlog.carried import open_faults
        from tankcalc.shiftlog.kinds import NOTE

        def look() -> dict[str, Row]:
            found = open_faults(self._store.between(None, None, tank=tank, kind=NOTE))
            return {instrument: row for (_, instrument), row in found.items()}

        return await self._apart(look)

    def settle(self, call: Callable[[], None]) -> None:
        """Run something slow that belongs to the disk, in the order it came."""
        self._thread.submit(call)

    def close(self) -> None:
        """Wait for what is under way, and let go of the store."""
        self._thread.submit(self._store.close)
        self._thread.shutdown(wait=True)

    async def _apart(self, call: Callable[[], T]) -> T:
        """Return what a call to the store gives; what goes wrong is told, never swallowed."""
        try:
            return await asyncio.get_running_loop().run_in_executor(self._thread, call)
        except TankcalcError:
            raise
        except Exception as error:
            # Whatever went wrong, the operator must hear that it is not saved, or not read.
            raise StoreError(f"this program failed ({type(error).__name__}: {error}).") from error
