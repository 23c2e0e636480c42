"""``shiftlog list`` and ``history``: entries, newest last, with what became of them."""

from __future__ import annotations

import argparse
import json
import sys
from collections import deque
from collections.abc import Iterable
from typing import TYPE_CHECKING

from tankcalc.cli.common import system_from
from tankcalc.cli.shiftlog.book import ID_HELP, TIME_HELP, opened, say, uid_of
from tankcalc.errors import InputError
from tankcalc.shiftlog import Corrections, as_object, as_text, parse_time, zone_named
from tankcalc.shiftlog.kinds import KINDS
from tankcalc.shiftlog.shifts import shift_named
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Row, Store

MOST_ROWS = 1_000_000_000
HEAD_DIGITS = 16
"""Digits of the head's hash on a report: enough to recognise it, short enough to copy by hand."""


def declare(actions: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare both actions."""
    parser = actions.add_parser(
        "list",
        help="print entries, newest last",
        description="Prints the entries in the order they were made, newest last; all of them "
        "unless told otherwise. What was amended or withdrawn is printed as well, and marked. At "
        "the end stand the number and the hash of the log's head: note them, and verify --head "
        "will show later whether anything up to there was changed.",
    )
    parser.set_defaults(act=_list)
    parser.add_argument("--tank", metavar="T", help="only this tank's")
    parser.add_argument("--kind", choices=KINDS, help="only this kind", metavar="KIND")
    parser.add_argument("--shift", metavar="SHIFT", help='only this shift\'s: "2026-12-01 Day"')
    parser.add_argument("--since", metavar="TIME", help=f"only those read since: {TIME_HELP}")
    parser.add_argument("--last", metavar="N", type=_count, help="only the last N of them")
    _add_json(parser)
    parser = actions.add_parser(
        "history",
        help="print an entry with everything that refers to it",
        description="Prints the original of an entry, and every amendment, withdrawal and "
        "acknowledgement of it, in the order of the log.",
    )
    parser.set_defaults(act=_history)
    parser.add_argument("id", metavar="ID", help=ID_HELP)
    _add_json(parser)


def head_line(head: tuple[int, bytes], digits: int | None = HEAD_DIGITS) -> str:
    """Return the line that says where the log ends: number and hash, as verify takes them."""
    return f"head    {head[0]}:{head[1].hex()[:digits]}"


def _add_json(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--json", action="store_true", help="print a JSON array, SI units")


def _list(args: argparse.Namespace) -> int:
    with opened(args) as (site, store):
        if args.tank is not None:
            _check_tank(args.tank, site, store)
        corrections = Corrections.in_log(store, args.tank)
        _print(args, site, store, _chosen(args, site, store), corrections)
        _print_head(args, store)
    return 0


def _history(args: argparse.Namespace) -> int:
    with opened(args) as (site, store):
        rows = store.history(uid_of(args.id, store))
        if not rows:
            raise InputError(f"the log holds no entry {clean(args.id)}.")
        _print(args, site, store, rows, Corrections(rows))
        _print_head(args, store)
    return 0


def _print(
    args: argparse.Namespace,
    site: Site,
    store: Store,
    rows: Iterable[Row],
    corrections: Corrections,
) -> None:
    """Print an entry at a time: a log need not fit into memory."""
    if not args.json:
        system = system_from(args, site)
        for row in rows:
            original = store.history(row.entry.ref)[:1] if row.entry.ref else []
            about = original[0].seq if original else None
            print(as_text(row, system, corrections.mark(row), about))
        return
    text = ""
    for row in rows:
        print(f"{text}," if text else "[")
        text = json.dumps(as_object(row, corrections.mark(row)), indent=2, allow_nan=False)
    print(f"{text}\n]" if text else "[]")


def _print_head(args: argparse.Namespace, store: Store) -> None:
    head = store.head()
    if head[0] == 0:
        say(f"nothing is logged yet in {store.where}")
    else:
        print(head_line(head), file=sys.stderr if args.json else sys.stdout)


def _check_tank(tank: str, site: Site, store: Store) -> None:
    """Refuse a tank that neither the site nor the log knows."""
    if tank not in site.tank_names() and not store.tail(1, tank=tank):
        names = ", ".join(site.tank_names())
        raise InputError(
            f'neither the site nor the log knows a tank "{clean(tank)}". The site has: {names}.'
        )


def _chosen(args: argparse.Namespace, site: Site, store: Store) -> Iterable[Row]:
    zone = zone_named(site.time_zone)
    since_us = None if args.since is None else parse_time(args.since, zone)
    only = {"tank": args.tank, "kind": args.kind}
    if args.shift is not None:
        shift = shift_named(args.shift, zone, site.shifts)
        rows = store.tail(MOST_ROWS, shift=(shift.date, shift.name), **only)
        kept = [row for row in rows if since_us is None or row.entry.t_us >= since_us]
        return kept if args.last is None else kept[-args.last :]
    if since_us is None and args.last is not None:
        return store.tail(args.last, **only)
    found = store.between(since_us, None, **only)
    return found if args.last is None else deque(found, maxlen=args.last)


def _count(text: str) -> int:
    number = int(text)
    if not 1 <= number <= MOST_ROWS:
        raise argparse.ArgumentTypeError(f"a number from 1 to {MOST_ROWS} is wanted")
    return number
