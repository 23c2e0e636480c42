"""A copy of a log in a file, made by the database's own method while others write."""

from __future__ import annotations

import os
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path

from tankcalc.errors import InputError, LogBrokenError, StoreFullError
from tankcalc.shiftlog.chain import VerifyResult
from tankcalc.shiftlog.faults import from_os
from tankcalc.shiftlog.files import settle
from tankcalc.shiftlog.sqlite import LogFile
from tankcalc.shiftlog.sqlite_store import SqliteStore
from tankcalc.text import clean


def back_up(log: Path, out: Path, *, wait_s: float = 10.0) -> VerifyResult:
    """Copy a log to a new file and return what a check of the copy found.

    Raises
    ------
    InputError
        There is such a file already, or no such folder.
    LogBrokenError
        The copy does not verify, and neither then does the log: no file is left.
    StoreError
        The log cannot be read, or the copy not written.
    """
    with part_of(out) as part, closing(LogFile(log, wait_s)) as source:
        try:
            source.copy_to(part)
        except StoreFullError as error:
            raise StoreFullError(f"no space left for {clean(str(out))}.") from error
        part.chmod(0o600)
        found = checked(part, log)
        publish(part, out)
    return found


def checked(copy: Path, log: Path) -> VerifyResult:
    """Return what a check of a copy of a log found: that it is whole.

    Raises
    ------
    LogBrokenError
        It is not.
    """
    with closing(SqliteStore(copy)) as store:
        result = store.verify()
    if result.flaw is not None:
        # The copy's name means nothing to anybody, and is gone soon.
        flaw = str(result.flaw).replace(clean(str(copy)), clean(str(log))).rstrip(".")
        raise LogBrokenError(f"the log {clean(str(log))} does not verify: {flaw}.")
    return result


@contextmanager
def part_of(out: Path) -> Iterator[Path]:
    """Give a file beside ``out`` to write to; what is left of it is removed.

    Raises
    ------
    InputError
        ``out`` names no file, is there already, or its folder is not.
    """
    if not out.name:
        raise InputError(f'"{clean(str(out))}" names no file. Give the name of a new one.')
    part = out.with_name(f".{out.name}.{os.getpid()}.part")
    if not out.parent.is_dir():
        raise InputError(f"there is no folder {clean(str(out.parent))}.")
    if out.exists():
        raise InputError(f"there is a file {clean(str(out))} already. Give another name.")
    try:
        yield part
    finally:
        part.unlink(missing_ok=True)


def publish(part: Path, out: Path) -> None:
    """Let a whole file appear as ``out``, and see that on disk; nothing is written over."""
    try:
        try:
            # A link, unlike a renaming, fails where somebody made the file meanwhile.
            os.link(part, out)
        except FileExistsError as error:
            raise InputError(f"there is a file {clean(str(out))} already.") from error
        except OSError:
            # Some file systems have no links.
            part.rename(out)
        settle(out.parent)
    except OSError as error:
        raise from_os(error, clean(str(out))) from error
