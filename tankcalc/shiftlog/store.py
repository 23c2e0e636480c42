"""What every store of the log can do, whatever it is made of."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Protocol

if TYPE_CHECKING:
    from tankcalc.shiftlog.chain import VerifyResult
    from tankcalc.shiftlog.entry import Entry

CHUNK = 500
"""Entries that a long import gives to one ``append_many``, pausing in between: whoever writes
holds the log, and the lock of a file has no queue."""

ShiftKey = tuple[str, str]
"""A shift as entries carry it: the local date of its start, and its name."""


@dataclass(frozen=True, slots=True)
class Receipt:
    """Proof that an entry is on disk: its identifier, its number and its hash in the chain."""

    uid: bytes
    seq: int
    hash: bytes


@dataclass(frozen=True, slots=True)
class Row:
    """An entry with its place in the log. Numbers order the log; wall clocks do not."""

    seq: int
    entry: Entry
    hash: bytes


class Store(Protocol):
    """A log that takes entries and never gives one up.

    Every method may raise a StoreError; after one from ``append`` the entry is either not in
    the log, or sending the same entry again returns its receipt. A log that does not exist
    yet reads as empty, and only ``append`` makes it. Methods may be called from any thread.
    """

    @property
    def where(self) -> str:
        """The store's address, for messages."""

    def append(self, entry: Entry, configs: Mapping[str, bytes]) -> Receipt:
        """Put an entry at the end, with the texts its versions name; return once it is on disk.

        ``configs`` gives for each version (SHA-256, hex) of the entry the bytes it stands for;
        those that the log already holds may be left out. The same entry again returns the
        same receipt.
        """

    def append_many(self, entries: Iterable[tuple[Entry, Mapping[str, bytes]]]) -> list[Receipt]:
        """Put entries at the end in their order, each with its texts, in one transaction.

        All of them are on disk when it returns, or none is. An entry that is in the log already
        keeps its place and returns its receipt. Give a long import in chunks of ``CHUNK``.
        """

    def tail(
        self,
        n: int = 500,
        *,
        tank: str | None = None,
        kind: str | None = None,
        shift: ShiftKey | None = None,
        before: int | None = None,
    ) -> list[Row]:
        """Return the last entries, newest last; ``before`` a number: those before it (paging)."""

    def between(
        self,
        start_us: int | None,
        end_us: int | None,
        *,
        tank: str | None = None,
        kind: str | None = None,
    ) -> Iterator[Row]:
        """Yield the entries whose reading lies in [start, end), in the order of the log."""

    def latest(self) -> dict[str, Row]:
        """Return for each tank the reading with the latest time, as it stands now.

        A reading that was amended counts as its last amendment, whose row is returned; one that
        was withdrawn does not count. Of two at one instant the later one in the log is meant.
        Readings that were refused or rejected count: look at their status and judgement.
        """

    def history(self, uid: bytes) -> list[Row]:
        """Return an entry's original and everything that refers to it, in the order of the log.

        ``uid`` may be that of the original or of any entry that refers to it; nothing is
        returned where the log holds no such entry.
        """

    def count(self, *, tank: str | None = None, kind: str | None = None) -> int:
        """Return how many entries there are."""

    def get_config(self, version: str) -> bytes:
        """Return the text with that SHA-256 (hex); KeyError where the log holds none."""

    def head(self) -> tuple[int, bytes]:
        """Return the number and hash of the last entry; (0, 32 zero bytes) when there is none."""

    def verify(self, known_head: tuple[int, str] | None = None) -> VerifyResult:
        """Check the whole log; against a head seen earlier as well, when one is given.

        Raises StoreUnavailableError where there is no log at all.
        """

    def close(self) -> None:
        """Let go of the store; closing twice is harmless."""
