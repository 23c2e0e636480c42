"""``shiftlog add``: a reading, a note, or both."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from tankcalc.cli.common import add_reading_options, typed_from
from tankcalc.cli.shiftlog.book import TIME_HELP, add_who, instant, opened, result_of, save
from tankcalc.errors import InputError
from tankcalc.shiftlog import note_entry, now_us, reading_entry

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Entry, Store


def declare(actions: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the action."""
    parser = actions.add_parser(
        "add",
        help="log a reading, a note, or both; prints the entry's id",
        description="Logs what was read and what it comes to, and prints the entry's id once it "
        "is on disk. A reading that contradicts the tank is evidence: it is logged as refused, "
        "its id is printed, and the exit code is 3. One that cannot be read (a wrong unit) is "
        "not logged.",
    )
    parser.set_defaults(act=_add)
    parser.add_argument("tank", metavar="TANK", help="the tank's file in tanks/, without .toml")
    parser.add_argument("--fluid", metavar="NAME", help="a profile in fluids/ (default: contents)")
    parser.add_argument("--note", metavar="TEXT", default="", help="words to keep with it")
    add_who(parser)
    add_judgement(parser)
    parser.add_argument("--at", metavar="TIME", help=f"when it was read: {TIME_HELP}")
    add_reading_options(parser)


def add_judgement(parser: argparse.ArgumentParser, *, reason: bool = True) -> None:
    """Declare what the operator says of a reading beside its figures."""
    if reason:
        parser.add_argument(
            "--reason",
            metavar="TEXT",
            default="",
            help="why a result in doubt is accepted, or is rejected",
        )
    parser.add_argument(
        "--reject", action="store_true", help="keep the result, but as rejected by the operator"
    )
    parser.add_argument(
        "--witness", metavar="NAME", default="", help="a second person who saw the reading"
    )
    parser.add_argument(
        "--moving",
        choices=("static", "receiving", "delivering"),
        default="",
        help="what the tank is doing; held against the reading before",
    )


def _add(args: argparse.Namespace) -> int:
    with opened(args) as (site, store):
        return save(site, store, _entry_from(args, site, store))


def _entry_from(args: argparse.Namespace, site: Site, store: Store) -> Entry:
    """Return the entry that the arguments ask for."""
    now = now_us()
    at = instant(args, site, now)
    tank = site.tank(args.tank)
    typed = typed_from(args)
    if not typed:
        if not args.note.strip() or args.fluid is not None or args.reason or args.reject:
            raise InputError(
                'nothing was read. Give a reading, such as --p1 "98.2 kPa", or a note.'
            )
        return note_entry(site=site, note=args.note, now_us=now, t_us=at, tank=tank, who=args.who)
    fluid = site.fluid_for(tank, args.fluid)
    taken = now if at is None else at
    result, seen = result_of(store, tank, fluid, typed, taken, args.moving)
    return reading_entry(
        site=site,
        tank=tank,
        fluid=fluid,
        typed=typed,
        result=result,
        movement=args.moving,
        now_us=now,
        t_us=at,
        note=args.note,
        who=args.who,
        reason=args.reason,
        rejected=args.reject,
        witness=args.witness,
        seen=seen,
    )
