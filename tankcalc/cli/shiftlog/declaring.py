"""``shiftlog move``, ``sign``, ``acknowledge`` and ``fault``: what people declare."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from tankcalc.cli.shiftlog.book import (
    ID_HELP,
    TIME_HELP,
    add_who,
    instant,
    opened,
    save,
    say_if_more_than_held,
    uid_of,
)
from tankcalc.errors import InputError
from tankcalc.limits.kinds import ORDER
from tankcalc.shiftlog import (
    acknowledgement_entry,
    fault_entry,
    movement_entry,
    now_us,
    parse_time,
    sign_entry,
    zone_named,
)
from tankcalc.shiftlog.carried import open_faults
from tankcalc.shiftlog.shifts import shift_named
from tankcalc.shiftlog.times import show_local
from tankcalc.shiftlog.uid import show_uid
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Store
    from tankcalc.tank import Tank

OTHER_INSTRUMENTS = ("level gauge", "thermometer", "barometer", "other")
"""What can be at fault beside the transmitters that are fitted."""


def declare(actions: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the four actions."""
    _declare_move(actions)
    _declare_sign(actions)
    _declare_acknowledge(actions)
    _declare_fault(actions)


def _declare_move(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "move",
        help="log a metered movement into or out of a tank",
        description="Logs what a meter, a bill or a ship says was moved, as a volume or a mass. "
        "With --other one entry stands for both tanks. Prints the entry's id.",
    )
    parser.set_defaults(act=_move)
    parser.add_argument("tank", metavar="TANK", help="the tank's file in tanks/, without .toml")
    way = parser.add_mutually_exclusive_group(required=True)
    way.add_argument("--received", metavar="Q", default="", help='into the tank, e.g. "500 m3"')
    way.add_argument("--delivered", metavar="Q", default="", help='out of the tank, e.g. "420 t"')
    way.add_argument("--drawn", metavar="Q", default="", help='free water drawn off, e.g. "2 m3"')
    parser.add_argument("--other", metavar="TANK", help="the tank at the other end")
    parser.add_argument("--at", metavar="TIME", help=f"when it ended: {TIME_HELP}")
    parser.add_argument("--note", metavar="TEXT", default="", help="words to keep with it")
    add_who(parser)


def _declare_sign(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser("sign", help="log that somebody takes over the shift, or leaves it")
    parser.set_defaults(act=_sign)
    way = parser.add_mutually_exclusive_group(required=True)
    way.add_argument("--on", action="store_true", help="takes over")
    way.add_argument("--off", action="store_true", help="leaves")
    parser.add_argument("--note", metavar="TEXT", default="", help="words to keep with it")
    add_who(parser, required=True)


def _declare_acknowledge(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "acknowledge",
        help="log that a handover, an alert or an entry was taken note of",
        description="Logs who has taken note of a handover, an alert or an entry. An alert can be "
        "set aside until a time, for a reason.",
        epilog=f"The codes of alerts are: {', '.join(ORDER)}.",
    )
    parser.set_defaults(act=_acknowledge)
    parser.add_argument("of", choices=("handover", "alert", "entry"))
    parser.add_argument(
        "what",
        metavar="WHAT",
        help=f'the shift handed over ("2026-12-01 Day"), the alert\'s code, or {ID_HELP}',
    )
    parser.add_argument("--tank", metavar="TANK", help="the tank that an alert is of")
    parser.add_argument("--until", metavar="TIME", help=f"set the alert aside until: {TIME_HELP}")
    parser.add_argument("--reason", metavar="TEXT", default="", help="why it is set aside")
    parser.add_argument("--note", metavar="TEXT", default="", help="words to keep with it")
    add_who(parser, required=True)


def _declare_fault(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "fault",
        help="log that an instrument is at fault, or no longer is",
        description="Logs a note that an instrument is at fault. It carries over from shift to "
        "shift until it is closed.",
    )
    parser.set_defaults(act=_fault)
    parser.add_argument("tank", metavar="TANK", help="the tank's file in tanks/, without .toml")
    parser.add_argument("instrument", metavar="INSTRUMENT", help="p1, p2, p3, dp, level gauge, ...")
    way = parser.add_mutually_exclusive_group(required=True)
    way.add_argument("--opened", action="store_true", help="it is at fault")
    way.add_argument("--closed", action="store_true", help="it is put right")
    parser.add_argument("--at", metavar="TIME", help=f"since when: {TIME_HELP}")
    parser.add_argument("--note", metavar="TEXT", required=True, help="what was seen or done")
    add_who(parser)


def _move(args: argparse.Namespace) -> int:
    with opened(args) as (site, store):
        now = now_us()
        tank = site.tank(args.tank)
        entry = movement_entry(
            site=site,
            tank=tank,
            received=args.received,
            delivered=args.delivered,
            drawn=args.drawn,
            other=None if args.other is None else site.tank(args.other),
            now_us=now,
            t_us=instant(args, site, now),
            note=args.note,
            who=args.who,
        )
        say_if_more_than_held(tank, entry)
        return save(site, store, entry)


def _sign(args: argparse.Namespace) -> int:
    with opened(args) as (site, store):
        entry = sign_entry(site=site, on=args.on, who=args.who, now_us=now_us(), note=args.note)
        return save(site, store, entry)


def _acknowledge(args: argparse.Namespace) -> int:
    with opened(args) as (site, store):
        now = now_us()
        what, ref = _taken_note_of(args, site, store, now)
        until = args.until and parse_time(args.until, zone_named(site.time_zone))
        entry = acknowledgement_entry(
            site=site,
            of=args.of,
            what=what,
            who=args.who,
            now_us=now,
            tank=None if args.tank is None else site.tank(args.tank),
            reason=args.reason,
            note=args.note,
            until_us=until,
            ref=ref,
        )
        return save(site, store, entry)


def _taken_note_of(
    args: argparse.Namespace, site: Site, store: Store, now: int
) -> tuple[str, bytes | None]:
    """Return what is acknowledged as the log calls it, and the entry's identifier if it is one.

    Raises
    ------
    InputError
        There is no such entry, alert or shift, or the shift has not begun.
    """
    if args.of == "entry":
        ref = uid_of(args.what, store)
        if not store.history(ref):
            raise InputError(f"the log holds no entry {clean(args.what)}.")
        return show_uid(ref), ref
    if args.of == "alert":
        code = args.what.strip()
        if code not in ORDER:
            raise InputError(f'there is no alert "{clean(code)}". Name one of: {", ".join(ORDER)}.')
        return code, None
    zone = zone_named(site.time_zone)
    shift = shift_named(args.what, zone, site.shifts)
    if shift.start_us > now:
        names = ", ".join(clean(name) for name in site.shifts)
        raise InputError(
            f"the shift {clean(shift.title)} has not begun: it begins"
            f" {show_local(shift.start_us, zone)}. Name a date and one of: {names}."
        )
    return shift.title, None


def _fault(args: argparse.Namespace) -> int:
    with opened(args) as (site, store):
        now = now_us()
        tank = site.tank(args.tank)
        instrument = _instrument(args.instrument, tank)
        rows = store.between(None, None, tank=tank.file, kind="note")
        known = open_faults(rows).get((tank.file, instrument))
        if args.closed and known is None:
            raise InputError(f"no fault of {instrument} is open on {tank.file}.")
        if args.opened and known is not None:
            raise InputError(
                f"a fault of {instrument} on {tank.file} is open since entry {known.seq}."
                " Close it, or log a note."
            )
        at = instant(args, site, now)
        if known is not None and (now if at is None else at) < known.entry.t_us:
            since = show_local(known.entry.t_us, zone_named(site.time_zone))
            raise InputError(
                f"the fault of {instrument} on {tank.file} was opened {since} (entry"
                f" {known.seq}): it cannot be closed before that. Give a later --at."
            )
        entry = fault_entry(
            site=site,
            tank=tank,
            instrument=instrument,
            opened=args.opened,
            note=args.note,
            now_us=now,
            t_us=at,
            who=args.who,
            ref=None if known is None else known.entry.uid,
        )
        return save(site, store, entry)


def _instrument(text: str, tank: Tank) -> str:
    """Return the instrument as it is called; an InputError where the tank has none such."""
    fitted = [*sorted(tank.transmitters), *(["dp"] if tank.dp else []), *OTHER_INSTRUMENTS]
    name = " ".join(text.replace("_", " ").replace("-", " ").lower().split())
    if name not in fitted:
        raise InputError(f'{tank.file} has no "{clean(text)}". Name one of: {", ".join(fitted)}.')
    return name
