"""``tankcalc shiftlog``: add to the log, list it, verify it."""

from __future__ import annotations

import argparse
import json
import re
import sys
from collections import deque
from collections.abc import Iterable
from contextlib import closing
from typing import TYPE_CHECKING

from tankcalc.cli.common import (
    add_reading_options,
    answer,
    site_from,
    system_from,
    typed_from,
)
from tankcalc.errors import InputError, LogBrokenError, StoreError
from tankcalc.shiftlog import (
    as_object,
    as_text,
    held_against_log,
    log_address,
    named_log,
    note_entry,
    now_us,
    open_store,
    parse_time,
    reading_entry,
    zone_named,
)
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Entry, Row, Store

RECENT = 8
"""Earlier entries of the tank that a reading is held against."""

MOST_ROWS = 1_000_000_000
_HEAD = re.compile(r"(\d{1,18})[: ]([0-9a-fA-F]{8,64})", re.ASCII)
_TIME_HELP = "ISO 8601 with an offset or Z, or local time of the site"


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command and its actions."""
    parser = subparsers.add_parser(
        "shiftlog",
        help="add to, list and verify the log",
        description="The log of the shift: entries are added and never changed or removed. It is "
        "kept in --log, else $TANKCALC_LOG, else what site.toml says, else a file named after "
        "the site in the user's data folder.",
    )
    actions = parser.add_subparsers(dest="action", metavar="ACTION", required=True, title="actions")
    _declare_add(actions)
    _declare_list(actions)
    _declare_verify(actions)


def run(args: argparse.Namespace) -> int:
    """Carry out the action that was named."""
    return {"add": _add, "list": _list, "verify": _verify}[args.action](args)


def _declare_add(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "add",
        help="log a reading, a note, or both; prints the entry's id",
        description="Logs what was read and what it comes to, and prints the entry's id once it "
        "is on disk. A reading that contradicts the tank is evidence: it is logged as refused, "
        "its id is printed, and the exit code is 3. One that cannot be read (a wrong unit) is "
        "not logged.",
    )
    parser.add_argument("tank", metavar="TANK", help="the tank's file in tanks/, without .toml")
    parser.add_argument("--fluid", metavar="NAME", help="a profile in fluids/ (default: contents)")
    parser.add_argument("--note", metavar="TEXT", default="", help="words to keep with it")
    parser.add_argument(
        "--who", metavar="NAME", default="", help="name or initials; the login name is kept as well"
    )
    parser.add_argument(
        "--moving",
        choices=("static", "receiving", "delivering"),
        default="",
        help="what the tank is doing; held against the reading before",
    )
    parser.add_argument("--at", metavar="TIME", help=f"when it was read: {_TIME_HELP}")
    add_reading_options(parser)


def _declare_list(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "list",
        help="print entries, newest last",
        description="Prints the entries in the order they were made, newest last; all of them "
        "unless told otherwise.",
    )
    parser.add_argument("--tank", metavar="T", help="only this tank's")
    parser.add_argument("--since", metavar="TIME", help=f"only those read since: {_TIME_HELP}")
    parser.add_argument("--last", metavar="N", type=_count, help="only the last N of them")
    parser.add_argument("--json", action="store_true", help="print a JSON array, SI units")


def _declare_verify(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "verify",
        help="check that nothing in the log was changed, removed or moved",
        description="Walks the whole log. Exit code 0: whole, with the number and hash of its "
        "head; 4: not whole, with the first bad entry and why. Only a head noted earlier can "
        "show that the newest entries were cut off or all were rewritten.",
    )
    parser.add_argument(
        "--head",
        metavar="NUMBER:HASH",
        type=_head,
        help="a head noted earlier; at least 8 digits of the hash",
    )


def _add(args: argparse.Namespace) -> int:
    site = site_from(args)
    with closing(open_store(log_address(args.log, site))) as store:
        try:
            entry = _entry_from(args, site, store)
            texts = {version: site.text(version) for version in entry.versions.values()}
            store.append(entry, texts)
        except StoreError as error:
            raise type(error)(f"not saved: {error}") from error
    print(entry.id, flush=True)
    refused = entry.status == "refused"
    if refused:
        print("tankcalc: logged as refused: these readings have no honest answer.", file=sys.stderr)
    for warning in (entry.result or {}).get("warnings", ()):
        print(f"tankcalc: {clean(warning['message'], 1000)}", file=sys.stderr)
    return 3 if refused else 0


def _entry_from(args: argparse.Namespace, site: Site, store: Store) -> Entry:
    """Return the entry that the arguments ask for."""
    now = now_us()
    at = None if args.at is None else parse_time(args.at, zone_named(site.time_zone), now)
    tank = site.tank(args.tank)
    typed = typed_from(args)
    blank = [f"--{name.replace('_', '-')}" for name, text in typed.items() if not text.strip()]
    if blank:
        raise InputError(f"{', '.join(blank)} is blank. Give a quantity, or leave it out.")
    if not typed:
        if not args.note.strip() or args.fluid is not None:
            raise InputError(
                'nothing was read. Give a reading, such as --p1 "98.2 kPa", or a note.'
            )
        return note_entry(site=site, note=args.note, now_us=now, t_us=at, tank=tank, who=args.who)
    fluid = site.fluid_for(tank, args.fluid)
    found = answer(tank, fluid, typed)
    rows = store.tail(RECENT, tank=tank.file)
    taken = now if at is None else at
    return reading_entry(
        site=site,
        tank=tank,
        fluid=fluid,
        typed=typed,
        result=held_against_log(found, rows, tank, fluid, typed, taken, args.moving),
        movement=args.moving,
        now_us=now,
        t_us=at,
        note=args.note,
        who=args.who,
    )


def _list(args: argparse.Namespace) -> int:
    site = site_from(args)
    zone = zone_named(site.time_zone)
    since_us = None if args.since is None else parse_time(args.since, zone)
    with closing(open_store(log_address(args.log, site))) as store:
        rows = _chosen(store, args.tank, since_us, args.last)
        if args.json:
            _print_json(rows)
        else:
            for row in rows:
                print(as_text(row, system_from(args, site)))
        if store.head()[0] == 0:
            print(f"tankcalc: nothing is logged yet in {store.where}", file=sys.stderr)
    return 0


def _chosen(
    store: Store, tank: str | None, since_us: int | None, last: int | None
) -> Iterable[Row]:
    if since_us is None and last is not None:
        return store.tail(last, tank=tank)
    rows = store.between(since_us, None, tank=tank)
    return rows if last is None else deque(rows, maxlen=last)


def _print_json(rows: Iterable[Row]) -> None:
    """Print an array, an entry at a time: a log need not fit into memory."""
    text = ""
    for row in rows:
        print(f"{text}," if text else "[")
        text = json.dumps(as_object(row), indent=2, allow_nan=False)
    print(f"{text}\n]" if text else "[]")


def _verify(args: argparse.Namespace) -> int:
    address = named_log(args.log) or log_address(None, site_from(args))
    with closing(open_store(address)) as store:
        result = store.verify(args.head)
        where = store.where
    number, digest = result.head
    print(f"entries {result.entries}")
    print(f"head    {number}:{digest.hex()}")
    if result.flaw is not None:
        print(f"flaw    {clean(str(result.flaw), 1000)}", flush=True)
        raise LogBrokenError(f"the log {where} does not verify: {result.flaw}.")
    return 0


def _count(text: str) -> int:
    number = int(text)
    if not 1 <= number <= MOST_ROWS:
        raise argparse.ArgumentTypeError(f"a number from 1 to {MOST_ROWS} is wanted")
    return number


def _head(text: str) -> tuple[int, str]:
    found = _HEAD.fullmatch(text.strip())
    if found is None:
        raise argparse.ArgumentTypeError("a head is typed as verify prints it, 12:3f2a9c01")
    return int(found[1]), found[2].lower()
