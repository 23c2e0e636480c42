"""``tankcalc handover``: the report from one shift to the next, and taking it over."""

from __future__ import annotations

import argparse
import sys
from contextlib import closing
from pathlib import Path
from typing import TYPE_CHECKING

from tankcalc.cli.common import Once, site_from, system_from
from tankcalc.errors import InputError
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Shift, Store

STDOUT = "-"


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command."""
    parser = subparsers.add_parser(
        "handover",
        help="the report from one shift to the next",
        description="Writes what the next shift must know: what changed this shift, then every "
        "tank with its trend, movements, faults, alerts, ages, gains and losses, corrections and "
        "notes. The page is one file that needs nothing else and prints well.",
    )
    parser.add_argument(
        "--shift",
        metavar="SHIFT",
        action=Once,
        help='a date and a shift, "2026-12-01 Day" (default: the shift that runs now)',
    )
    parser.add_argument(
        "--out",
        metavar="FILE",
        action=Once,
        help="a file ending in .html, .md or .csv; - prints Markdown",
    )
    parser.add_argument(
        "--acknowledge",
        action="store_true",
        help="log that the incoming person has taken this shift over; needs --who",
    )
    parser.add_argument(
        "--who", metavar="NAME", action=Once, help="name or initials of the incoming person"
    )
    parser.add_argument("--note", metavar="TEXT", action=Once, help="words to keep with it")


def run(args: argparse.Namespace) -> int:
    """Write the report where one is asked for, and only then log that it was taken over.

    The page is then written once more: it names who has taken over.
    """
    from tankcalc.shiftlog import log_address, now_us, open_store

    _check(args)
    site = site_from(args)
    now = now_us()
    shift = _shift(args, site, now)
    with closing(open_store(log_address(args.log, site))) as store:
        if args.out is not None:
            _report(args, site, store, shift)
        if args.acknowledge:
            _acknowledge(args, site, store, shift, now)
        if args.acknowledge and args.out is not None:
            _report(args, site, store, shift)
        if args.out not in (None, STDOUT):
            said = f"handover of {clean(shift.title)} in {clean(args.out)}"
            print(f"tankcalc: {said}", file=sys.stderr)
    return 0


def _check(args: argparse.Namespace) -> None:
    """Raise where the words do not go together, before anything is logged."""
    from tankcalc.handover.files import form_of

    if not args.acknowledge and args.out is None:
        raise InputError("nothing is asked for. Give --out FILE.html, or --acknowledge --who NAME.")
    if not args.acknowledge and (args.who is not None or args.note is not None):
        raise InputError("--who and --note belong to --acknowledge. Give it too.")
    if args.acknowledge and not (args.who or "").strip():
        raise InputError("a handover is acknowledged by name. Give --who NAME.")
    if args.acknowledge and args.out == STDOUT:
        raise InputError("--out - prints the report and nothing else. Acknowledge by itself.")
    if args.out not in (None, STDOUT):
        form_of(Path(args.out))


def _shift(args: argparse.Namespace, site: Site, now: int) -> Shift:
    from tankcalc.shiftlog import shift_at, show_local, zone_named
    from tankcalc.shiftlog.shifts import shift_named

    zone = zone_named(site.time_zone)
    if args.shift is None:
        return shift_at(now, zone, site.shifts)
    shift = shift_named(args.shift, zone, site.shifts)
    if shift.start_us > now:
        begins = show_local(shift.start_us, zone)
        raise InputError(f'"{clean(shift.title)}" has not begun: it begins at {begins}.')
    return shift


def _acknowledge(
    args: argparse.Namespace, site: Site, store: Store, shift: Shift, now: int
) -> None:
    from tankcalc.cli.shiftlog.book import save
    from tankcalc.shiftlog import acknowledgement_entry

    entry = acknowledgement_entry(
        site=site,
        of="handover",
        what=shift.title,
        who=args.who,
        note=args.note or "",
        now_us=now,
    )
    save(site, store, entry)
    print(f"tankcalc: taken over: {clean(shift.title)}", file=sys.stderr)


def _report(args: argparse.Namespace, site: Site, store: Store, shift: Shift) -> None:
    from tankcalc.handover.build import build
    from tankcalc.handover.files import FORMS, form_of, write
    from tankcalc.handover.words import document_of
    from tankcalc.shiftlog import now_us

    system = system_from(args, site)
    document = document_of(build(store, site, shift, now_us(), system=system))
    if args.out == STDOUT:
        sys.stdout.write(FORMS[".md"](document))
        return
    path = Path(args.out)
    write(form_of(path)(document), path)
