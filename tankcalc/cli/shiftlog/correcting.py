"""``shiftlog amend`` and ``withdraw``: a new entry about an old one, which stays."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from tankcalc.cli.common import add_reading_options, typed_from
from tankcalc.cli.shiftlog.adding import add_judgement
from tankcalc.cli.shiftlog.book import (
    ID_HELP,
    TIME_HELP,
    add_who,
    instant,
    opened,
    result_of,
    save,
    say_if_more_than_held,
    uid_of,
)
from tankcalc.errors import InputError
from tankcalc.shiftlog import (
    amended_movement,
    amended_reading,
    now_us,
    to_correct,
    withdrawal_entry,
)
from tankcalc.shiftlog.kinds import AMENDMENT, MOVEMENT, WAYS, WITHDRAWAL

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Entry, Store

_MOVED = (*WAYS, "other")


def declare(actions: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare both actions."""
    amend = actions.add_parser(
        "amend",
        help="log what a reading or a movement should have been, and why",
        description="Logs a new entry that stands for an earlier one from now on; the earlier one "
        "stays in the log, marked. Readings that are given replace those of the same name, the "
        "others stay as they were typed; all of it is worked out again with the profiles as they "
        "are now. Prints the id of the new entry.",
    )
    amend.set_defaults(act=_amend)
    _declare_what(amend)
    amend.add_argument("--fluid", metavar="NAME", help="a profile in fluids/ (default: as before)")
    amend.add_argument("--at", metavar="TIME", help=f"when it was read: {TIME_HELP}")
    amend.add_argument("--note", metavar="TEXT", help="words to keep with it (default: as before)")
    amend.add_argument(
        "--without",
        metavar="NAME",
        action="append",
        help="a reading, such as p3, to leave out; may be given several times",
    )
    add_judgement(amend, reason=False)
    for way in WAYS:
        amend.add_argument(f"--{way}", metavar="Q", help=f"of a movement: what was {way}")
    amend.add_argument("--other", metavar="TANK", help="of a movement: the tank at the other end")
    add_reading_options(amend)
    withdraw = actions.add_parser(
        "withdraw",
        help="log that a reading, a movement or a note is taken back, and why",
        description="Logs that an earlier entry is taken back, for good; that entry stays in the "
        "log, marked. Prints the id of the new entry.",
    )
    withdraw.set_defaults(act=_withdraw)
    _declare_what(withdraw)


def _declare_what(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("id", metavar="ID", help=ID_HELP)
    parser.add_argument("--reason", metavar="TEXT", required=True, help="why")
    add_who(parser)


def _withdraw(args: argparse.Namespace) -> int:
    with opened(args) as (site, store):
        found = to_correct(store, uid_of(args.id, store), WITHDRAWAL)
        entry = withdrawal_entry(
            site=site, original=found.row.entry, reason=args.reason, now_us=now_us(), who=args.who
        )
        return save(site, store, entry)


def _amend(args: argparse.Namespace) -> int:
    with opened(args) as (site, store):
        found = to_correct(store, uid_of(args.id, store), AMENDMENT)
        original, held = found.row.entry, found.entry
        assert held is not None
        made = _movement if original.kind == MOVEMENT else _reading
        return save(site, store, made(args, site, store, original, held))


def _reading(
    args: argparse.Namespace, site: Site, store: Store, original: Entry, held: Entry
) -> Entry:
    """Return the amendment of a reading; ``held`` is what stood for it until now."""
    if any(getattr(args, name) is not None for name in _MOVED):
        raise InputError(
            "this entry is a reading: it takes no --received, --delivered, --drawn, --other."
        )
    now = now_us()
    at = instant(args, site, now)
    tank = site.tank(held.tank or "")
    fluid = site.fluid_for(tank, args.fluid or held.fluid)
    typed = _merged(held, typed_from(args), args.without or [])
    taken = held.t_us if at is None else at
    movement = args.moving or held.movement
    result, seen = result_of(store, tank, fluid, typed, taken, movement, original.uid)
    return amended_reading(
        site=site,
        original=original,
        tank=tank,
        fluid=fluid,
        typed=typed,
        result=result,
        reason=args.reason,
        now_us=now,
        t_us=taken,
        note=held.note if args.note is None else args.note,
        who=args.who,
        movement=movement,
        rejected=args.reject,
        witness=args.witness or held.witness,
        seen=seen,
    )


def _merged(held: Entry, given: dict[str, str], without: list[str]) -> dict[str, str]:
    """Return the readings as they stood, with those given in their place and some left out."""
    gone = {name.strip().lstrip("-").replace("-", "_") for name in without}
    unknown = gone - held.typed.keys()
    if unknown:
        names = ", ".join(sorted(held.typed))
        raise InputError(f"--without {', '.join(sorted(unknown))}: the entry holds {names}.")
    typed = {name: text for name, text in held.typed.items() if name not in gone}
    return typed | given


def _movement(
    args: argparse.Namespace, site: Site, store: Store, original: Entry, held: Entry
) -> Entry:
    """Return the amendment of a movement."""
    if typed_from(args) or args.without or args.fluid or args.moving or args.reject:
        raise InputError(
            "this entry is a movement: it takes --received, --delivered, --drawn, --other."
        )
    now = now_us()
    at = instant(args, site, now)
    given = any(text is not None for text in (args.received, args.delivered, args.drawn))
    amounts = {way: (getattr(args, way) if given else held.typed.get(way)) or "" for way in WAYS}
    other = held.typed.get("other") if args.other is None else args.other
    tank = site.tank(held.tank or "")
    entry = amended_movement(
        site=site,
        original=original,
        tank=tank,
        other=site.tank(other) if other else None,
        **amounts,
        reason=args.reason,
        now_us=now,
        t_us=held.t_us if at is None else at,
        note=held.note if args.note is None else args.note,
        who=args.who,
    )
    say_if_more_than_held(tank, entry)
    return entry
