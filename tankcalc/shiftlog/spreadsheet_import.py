"""A CSV or Excel file put into the log: all of its rows, or none."""

from __future__ import annotations

import re
import time
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from hashlib import sha256
from itertools import islice
from pathlib import Path
from typing import TYPE_CHECKING

from tankcalc.errors import InputError
from tankcalc.shiftlog.spreadsheet import read_rows
from tankcalc.shiftlog.spreadsheet_columns import columns_of
from tankcalc.shiftlog.spreadsheet_plan import Planned, Planner
from tankcalc.shiftlog.store import CHUNK
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.profiles import Site
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Store

PAUSE_S = 0.05
"""Seconds between two chunks, so that consoles get their turn: a file's lock has no queue."""

_MOST_SAID = 200
_DIGITS = re.compile(r"[0-9a-f]{32}", re.ASCII)


@dataclass(frozen=True, slots=True)
class Imported:
    """What came of an import.

    Attributes
    ----------
    entries : int
        Entries that are in the log now and were not before.
    known : int
        Rows that the log holds already: by an earlier import of the same file, or because they
        were exported from it.
    refused : int
        Readings among them without an honest answer, logged as such.
    left_out : dict of str to int
        How many rows of kinds that are not imported.
    """

    entries: int
    known: int
    refused: int
    left_out: dict[str, int]


def import_file(path: Path, site: Site, store: Store, now_us: int) -> Imported:
    """Put the rows of a file into the log, each marked with the file's name and its row.

    Every row is looked at before the first is logged. A row has the same identifier whenever
    the same file is imported: an import that was cut short is taken up where it ended, and one
    that is done twice adds nothing. Nor does what was exported from the same log.

    Raises
    ------
    InputError
        Anything wrong with the file: every problem, a line each.
    StoreError
        The log did not take a chunk; import the same file again.
    """
    planned, left_out = _planned(path, site, now_us)
    stamp = sha256(path.read_bytes()).digest()
    originals: dict[str, Entry] = {}
    wanted = {one.about for one in planned if one.about}
    added = known = refused = 0
    rows = iter(planned)
    while chunk := list(islice(rows, CHUNK)):
        fresh = []
        for one in chunk:
            uid = _uid(one, stamp)
            entry = _held(store, uid) or _held(store, _own_uid(one))
            if entry is not None:
                known += 1
            else:
                source = f"import {clean(path.name, 80)} row {one.row}"
                entry = replace(one.make(originals.get(one.about)), uid=uid, source=source)
                refused += entry.status == "refused"
                fresh.append(entry)
            if one.id in wanted:
                originals[one.id] = entry
        store.append_many(_with_texts(fresh, site))
        added += len(fresh)
        time.sleep(PAUSE_S if fresh else 0.0)
    return Imported(added, known, refused, left_out)


def _planned(path: Path, site: Site, now_us: int) -> tuple[list[Planned], dict[str, int]]:
    headings, rows = read_rows(path)
    planner = Planner(site, columns_of(headings), now_us)
    planned = planner.plan(rows if not planner.problems else ())
    if planner.problems:
        raise InputError(_told(path, planner.problems))
    if not planned:
        raise InputError(f"{clean(path.name)} holds no row that can be imported.")
    return planned, planner.left_out


def _told(path: Path, problems: Sequence[str]) -> str:
    said = [f"{clean(path.name)}: {problem}" for problem in problems[:_MOST_SAID]]
    more = len(problems) - len(said)
    return "\n".join([*said, *([f"and {more} more."] if more else []), "Nothing was imported."])


def _with_texts(entries: Sequence[Entry], site: Site) -> Iterator[tuple[Entry, dict[str, bytes]]]:
    for entry in entries:
        yield entry, {version: site.text(version) for version in entry.versions.values()}


def _held(store: Store, uid: bytes | None) -> Entry | None:
    rows = [] if uid is None else store.history(uid)
    return next((row.entry for row in rows if row.entry.uid == uid), None)


def _own_uid(one: Planned) -> bytes | None:
    """Return the identifier that a row of an export had in the log it was exported from."""
    digits = one.id.replace("-", "")
    return bytes.fromhex(digits) if _DIGITS.fullmatch(digits) else None


def _uid(one: Planned, stamp: bytes) -> bytes:
    """Return the identifier of a row, in the UUID version 8 layout (RFC 9562, 5.8).

    The first 48 bits are milliseconds of UTC, as in version 7; the rest is of the entry that was
    exported, or else of file and row.
    """
    of = _own_uid(one) or stamp + one.row.to_bytes(8, "big")
    tail = sha256(of).digest()[:10]
    number = (one.t_us // 1000 & (1 << 48) - 1) << 80 | int.from_bytes(tail, "big")
    number = number & ~(0xF << 76) | 8 << 76
    number = number & ~(0x3 << 62) | 2 << 62
    return number.to_bytes(16, "big")
