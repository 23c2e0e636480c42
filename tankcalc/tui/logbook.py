"""The shift's log as the console uses it: one thread, so that a slow disk never stops a key."""

from __future__ import annotations

import asyncio
from collections.abc import Callable, Mapping
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeVar

from tankcalc.errors import StoreError

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Entry, Receipt, Row, Shift, Store

T = TypeVar("T")


RECENT = 200
"""Entries that a reading is held against: the newest of all tanks."""


@dataclass(frozen=True, slots=True)
class Unsaved:
    """An entry that is not on disk yet, with the texts of the profiles it rests on."""

    entry: Entry
    texts: Mapping[str, bytes]


class LogBook:
    """A store with the shift that is on; every call to the store runs in one other thread."""

    def __init__(self, store: Store, site: Site, zone: ZoneInfo) -> None:
        self._store = store
        self.site = site
        self.zone = zone
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

    async def append(self, unsaved: Unsaved) -> Receipt:
        """Return the receipt of an entry once it is on disk; a StoreError where it is not."""
        try:
            return await self._apart(lambda: self._store.append(unsaved.entry, unsaved.texts))
        except StoreError:
            raise
        except Exception as error:
            # Whatever went wrong, the operator must hear that it is not saved.
            raise StoreError(f"this program failed ({type(error).__name__}: {error}).") from error

    async def entries(self, shift: Shift) -> list[Row]:
        """Return the entries of a shift, newest last."""
        return await self._apart(lambda: list(self._store.between(shift.start_us, shift.end_us)))

    async def recent(self) -> list[Row]:
        """Return the newest entries of any shift, newest last."""
        return await self._apart(lambda: self._store.tail(RECENT))

    def settle(self, call: Callable[[], None]) -> None:
        """Run something slow that belongs to the disk, in the order it came."""
        self._thread.submit(call)

    def close(self) -> None:
        """Wait for what is under way, and let go of the store."""
        self._thread.submit(self._store.close)
        self._thread.shutdown(wait=True)

    async def _apart(self, call: Callable[[], T]) -> T:
        return await asyncio.get_running_loop().run_in_executor(self._thread, call)
