"""The hash chain: each entry carries the hash of the one before it.

It shows that an entry was changed, removed, added or moved. It cannot show that somebody
rewrote everything from one entry on, or cut off the newest ones: for that, compare the head's
number and hash with what an earlier report printed.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from hashlib import sha256
from typing import NamedTuple

from tankcalc.errors import StoreCorruptError
from tankcalc.shiftlog.entry import Entry, decoded

GENESIS = bytes(32)
"""What the first entry carries as the hash before it."""


class RawRow(NamedTuple):
    """An entry's columns as the store gives them, nothing yet believed."""

    seq: int
    uid: object
    kind: object
    ref: object
    tank: object
    t_us: object
    body: object
    prev: object
    hash: object


@dataclass(frozen=True, slots=True)
class Flaw:
    """The first thing wrong in a log: number of the entry (None: the log as a whole), and why."""

    seq: int | None
    why: str

    def __str__(self) -> str:
        return self.why if self.seq is None else f"entry {self.seq}: {self.why}"


@dataclass(frozen=True, slots=True)
class VerifyResult:
    """What ``verify`` found.

    Attributes
    ----------
    entries : int
        Entries found whole, from the first one on.
    head : (int, bytes)
        Number and hash of the last of them.
    flaw : Flaw or None
        The first thing wrong; None: the log is whole.
    """

    entries: int
    head: tuple[int, bytes]
    flaw: Flaw | None = None

    @property
    def whole(self) -> bool:
        """Whether nothing is wrong."""
        return self.flaw is None


def link(prev: bytes, body: bytes) -> bytes:
    """Return the hash of an entry from the hash before it and its canonical bytes."""
    return sha256(prev + body).digest()


def tank_column(tank: str | None) -> str | None:
    """Return the tank's name as stores index it: a name that is no UTF-8 is spelt out."""
    return None if tank is None else tank.encode("utf-8", "backslashreplace").decode("utf-8")


def columns(entry: Entry) -> tuple[bytes, str, bytes | None, str | None, int]:
    """Return what stores keep beside the body, for searching: uid, kind, ref, tank, time."""
    return entry.uid, entry.kind, entry.ref, tank_column(entry.tank), entry.t_us


def follow(
    rows: Iterable[RawRow],
    has_config: Callable[[str], bool],
    known_head: tuple[int, str] | None = None,
    start: tuple[int, bytes] = (0, GENESIS),
) -> VerifyResult:
    """Walk the chain from its first entry and return what was found.

    Parameters
    ----------
    rows : iterable of RawRow
        All entries in the order of their numbers.
    has_config : callable
        Whether the store holds the text with that SHA-256 (hex).
    known_head : (int, str) or None
        Number and leading hex digits of the hash of a head seen earlier, as a report printed it.
    start : (int, bytes)
        Number and hash that the first entry follows: the head of the archive that the log goes
        on from.
    """
    head, entries = start, 0
    if known_head is not None and known_head[0] == start[0] and start[0]:
        why = _why_other(start, known_head)
        if why:
            return VerifyResult(0, start, Flaw(None, f"entry {start[0]} is in the archive; {why}"))
    for row in rows:
        why = _why_broken(row, head, has_config)
        if not why:
            assert isinstance(row.hash, bytes)
            why = _why_other((row.seq, row.hash), known_head)
        if why:
            return VerifyResult(entries, head, Flaw(row.seq, why))
        assert isinstance(row.hash, bytes)
        head = (row.seq, row.hash)
        entries += 1
    if known_head is not None and known_head[0] > head[0]:
        why = f"entries after {head[0]} are missing: the head was once entry {known_head[0]}"
        return VerifyResult(entries, head, Flaw(None, why))
    return VerifyResult(entries, head)


def _why_broken(
    row: RawRow, head: tuple[int, bytes], has_config: Callable[[str], bool]
) -> str | None:
    if row.seq != head[0] + 1:
        return f"it should be number {head[0] + 1}: an entry is missing before it, or was moved"
    if row.prev != head[1]:
        return "it does not follow the entry before it"
    if not isinstance(row.body, bytes) or link(head[1], row.body) != row.hash:
        return "its content or its hash was changed"
    try:
        entry = decoded(row.body)
    except ValueError as error:
        return f"it cannot be read: {error}"
    if columns(entry) != (row.uid, row.kind, row.ref, row.tank, row.t_us):
        return "the columns it is found by differ from its content"
    for name, version in entry.versions.items():
        if not has_config(version):
            return f"the text of its {name} (version {version[:16]}) is missing or was changed"
    return None


def _why_other(head: tuple[int, bytes], known_head: tuple[int, str] | None) -> str | None:
    if known_head is None or head[0] != known_head[0]:
        return None
    if head[1].hex().startswith(known_head[1]):
        return None
    return f"its hash was once {known_head[1]}, now it is {head[1].hex()[:16]}"


def check_texts(configs: Mapping[str, bytes]) -> None:
    """Raise ValueError where a text is not that of the version it is given for."""
    for version, text in configs.items():
        if sha256(text).hexdigest() != version:
            raise ValueError(f"the text is not that of version {version[:16]}")


def digest_of(value: object) -> bytes:
    """Return a hash as the file gives it; a damaged file may give anything."""
    if isinstance(value, bytes) and len(value) == len(GENESIS):
        return value
    raise StoreCorruptError("the hash of an entry is damaged. Verify the log.")
