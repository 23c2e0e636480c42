"""The log as the actions share it: opened, an entry saved, an entry found by what was typed."""

from __future__ import annotations

import argparse
import re
import sys
from collections.abc import Iterator
from contextlib import closing, contextmanager
from typing import TYPE_CHECKING

from tankcalc.cli.common import answer, site_from
from tankcalc.errors import InputError, StoreError
from tankcalc.shiftlog import (
    held_against_log,
    log_address,
    open_store,
    parse_time,
    recent_rows,
    zone_named,
)
from tankcalc.shiftlog.kinds import WAYS
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.profiles import Site
    from tankcalc.result import Result
    from tankcalc.shiftlog import Entry, Store
    from tankcalc.tank import Tank

TIME_HELP = "ISO 8601 with an offset or Z, or local time of the site"
ID_HELP = "the entry's id, or its number in the list"

_NUMBER = re.compile(r"\d{1,18}", re.ASCII)
_UID = re.compile(r"[0-9a-f]{8}-?(?:[0-9a-f]{4}-?){3}[0-9a-f]{12}", re.ASCII)


@contextmanager
def opened(args: argparse.Namespace) -> Iterator[tuple[Site, Store]]:
    """Give the site and its log, and let go of the log afterwards."""
    site = site_from(args)
    with closing(open_store(log_address(args.log, site))) as store:
        yield site, store


def add_who(parser: argparse.ArgumentParser, *, required: bool = False) -> None:
    """Declare who says it."""
    parser.add_argument(
        "--who",
        metavar="NAME",
        default="",
        required=required,
        help="name or initials; the login name is kept as well",
    )


def instant(args: argparse.Namespace, site: Site, now: int) -> int | None:
    """Return the instant that ``--at`` names, or None."""
    return None if args.at is None else parse_time(args.at, zone_named(site.time_zone), now)


def save(site: Site, store: Store, entry: Entry) -> int:
    """Put an entry into the log, print its id, and return the exit code that it deserves."""
    from tankcalc.shiftlog.clock import log

    versions = {site.version, *entry.versions.values()}
    texts = {version: site.text(version) for version in versions}
    try:
        is_new = store.head()[0] == 0
        _, step = log(store, entry, texts, site=site)
    except StoreError as error:
        raise type(error)(f"not saved: {error}") from error
    print(entry.id, flush=True)
    if is_new:
        say(f"this began a new log, {store.where}.")
    if step is not None:
        say(str(step))
    return _said_of_result(entry)


def say(text: str) -> None:
    """Print a line of talk."""
    print(f"tankcalc: {clean(text, 1000)}", file=sys.stderr)


def say_if_more_than_held(tank: Tank, entry: Entry) -> None:
    """Say so where a movement is more than its tank has room for: a slip, or several fillings.

    A mass is held against the tank full of water, since a movement names no liquid.
    """
    moved, room = entry.result or {}, tank.vessel.capacity
    way = next((way for way in WAYS if entry.typed.get(way)), "")
    if abs(moved.get("volume_m3") or 0.0) > room:
        say(f"{way} {entry.typed[way]} is more than the tank holds ({room:.6g} m3).")
    elif abs(moved.get("mass_kg") or 0.0) > room * 1000.0:
        say(f"{way} {entry.typed[way]} is more than the tank holds of water ({room:.6g} t).")


def uid_of(text: str, store: Store) -> bytes:
    """Return the identifier of an entry that is named by its id or by its number.

    Raises
    ------
    InputError
        The text is neither, or the log holds no entry of that number.
    """
    named = text.strip().lower()
    if _NUMBER.fullmatch(named):
        rows = store.tail(1, before=int(named) + 1)
        if not rows or rows[0].seq != int(named):
            raise InputError(f"the log holds no entry number {named}.")
        return rows[0].entry.uid
    if _UID.fullmatch(named):
        return bytes.fromhex(named.replace("-", ""))
    raise InputError(
        f'"{clean(text)}" names no entry. Give its id, as add prints it, or its number.'
    )


def result_of(
    store: Store,
    tank: Tank,
    fluid: Fluid,
    typed: dict[str, str],
    t_us: int,
    movement: str,
    instead_of: bytes | None = None,
) -> tuple[Result, int]:
    """Return what readings come to, held against the log, and the newest number in it by then."""
    blank = [f"--{name.replace('_', '-')}" for name, text in typed.items() if not text.strip()]
    if blank:
        raise InputError(f"{', '.join(blank)} is blank. Give a quantity, or leave it out.")
    found = answer(tank, fluid, typed)
    try:
        seen = store.head()[0]
        rows = recent_rows(store, tank, before=seen + 1)
    except StoreError as error:
        raise type(error)(f"not saved: {error}") from error
    return held_against_log(found, rows, tank, fluid, typed, t_us, movement, instead_of), seen


def _said_of_result(entry: Entry) -> int:
    refused = entry.status == "refused"
    if refused:
        say("logged as refused: these readings have no honest answer.")
    for warning in (entry.result or {}).get("warnings", ()):
        say(warning["message"])
    return 3 if refused else 0
