"""``tankcalc balance``: movements against physical change over a span of the log."""

from __future__ import annotations

import argparse
from collections.abc import Iterator
from contextlib import closing
from typing import TYPE_CHECKING, Any

from tankcalc.cli.common import Once, site_from, system_from
from tankcalc.errors import InputError, NoAnswerError
from tankcalc.text import clean

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.balance.site import SiteBalance, TankBalance
    from tankcalc.cli.parser import CommandParser
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Store
    from tankcalc.units import System

_TIME_HELP = "ISO 8601 with an offset or Z, or local time of the site"


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command."""
    parser = subparsers.add_parser(
        "balance",
        help="opening, movements, closing, gain or loss",
        description="What is in the tanks against what should be: the opening, all movements "
        "that were logged, the closing, and what is gained or lost, in mass and in standard "
        "volume, with its uncertainty. A span opens and closes with the readings at or before "
        "its ends. What opening and closing have in common cancels. A significance beyond 1 "
        "either way is more than the uncertainty (k = 2) explains.",
    )
    parser.add_argument("--since", metavar="TIME", required=True, action=Once, help=_TIME_HELP)
    parser.add_argument("--until", metavar="TIME", action=Once, help="its end (default: now)")
    parser.add_argument("--tank", metavar="T", action=Once, help="only this tank")
    parser.add_argument(
        "--every",
        metavar="Q",
        action=Once,
        help='cut the span into periods, such as "1 d" or "8 h": each gets its balance, and their '
        "cumulative sums show small losses that go on",
    )
    parser.add_argument(
        "--causes",
        action="store_true",
        help="with --every: how the differences go with time, throughput and the table's shape",
    )
    parser.add_argument(
        "--drift",
        action="store_true",
        help="the drift of each tank over its longest time at rest",
    )
    parser.add_argument(
        "--meter",
        metavar="Q",
        action=Once,
        help='standard uncertainty of what was metered (default "0.1 %%")',
    )
    parser.add_argument("--json", action="store_true", help="print one JSON object, SI units")


def run(args: argparse.Namespace) -> int:
    """Print the balance; exit code 3 where no tank has one."""
    from tankcalc.balance.site import balance
    from tankcalc.shiftlog import log_address, open_store, zone_named

    site = site_from(args)
    zone = zone_named(site.time_zone)
    cuts, meter = _cuts(args, zone), _meter(args.meter)
    with closing(open_store(log_address(args.log, site))) as store:
        history, evaluated = _log(store, site)
        if args.tank is not None and args.tank not in history.tanks(0):
            site.tank(args.tank)  # a name that neither the site nor the log knows is refused
        number, digest = store.head()
        found = balance(
            history, evaluated, cuts, tank=args.tank, meter_share=meter, with_rest=args.drift
        )
    head = f"{number}:{digest.hex()}"
    if args.json:
        _print_json(args, site, found, (number, digest.hex()))
    else:
        print("\n".join(_lines(args, site, found, head)))
    _refuse_nothing(found)
    return 0


def _log(store: Store, site: Site) -> tuple[Any, Any]:
    from tankcalc.balance.contents import Evaluated
    from tankcalc.balance.history import History

    return History(store), Evaluated(site, store)


def _cuts(args: argparse.Namespace, zone: ZoneInfo) -> list[int]:
    from tankcalc import units
    from tankcalc.balance.periods import boundaries
    from tankcalc.shiftlog import now_us, parse_time

    since = parse_time(args.since, zone)
    until = now_us() if args.until is None else parse_time(args.until, zone)
    if args.causes and args.every is None:
        raise InputError('--causes compares periods: give --every, such as "1 d".')
    every = None if args.every is None else units.si(args.every, "time")
    return boundaries(since, until, every, zone)


def _meter(text: str | None) -> float:
    from tankcalc import units
    from tankcalc.balance.moves import METER_SHARE

    if text is None:
        return METER_SHARE
    share = units.si(text, "fraction")
    if not 0.0 <= share <= 0.5:
        raise InputError(f'--meter "{clean(text)}" is no uncertainty. Type one such as "0.1 %".')
    return share


def _refuse_nothing(found: SiteBalance) -> None:
    """Raise where no tank has a balance, with the reason of each."""
    if any(one.whole is not None and one.whole.accounts() for one in found.tanks):
        return
    reasons = [f"{one.tank}: {' '.join(one.notes)}" for one in found.tanks]
    raise NoAnswerError(
        "\n".join(reasons) or "no reading is logged in that span: there is nothing to balance."
    )


def _lines(args: argparse.Namespace, site: Site, found: SiteBalance, head: str) -> Iterator[str]:
    from tankcalc.balance.lines import account_lines, folded, transfer_lines
    from tankcalc.report import CAUTION

    system = system_from(args, site)
    time = _time_of(site)
    yield from folded(
        f"Balance of {clean(site.name)}, {time(found.cuts[0])} to {time(found.cuts[-1])}"
    )
    yield from ["Head of the log:", f"  {head}"]
    for one in found.tanks:
        yield from ["", *_tank_lines(args, one, system, time)]
    if found.transfers:
        yield from ["", "Transfers", *transfer_lines(found.transfers, found.repeated, system)]
    if len(found.tanks) > 1 and found.total:
        count = sum(bool(one.periods) for one in found.tanks)
        yield from ["", f"All {count} tanks", *account_lines(found.total, system)]
    yield from ["", *folded(CAUTION)]


def _tank_lines(
    args: argparse.Namespace, one: TankBalance, system: System, time: Any
) -> Iterator[str]:
    from tankcalc.balance.effects import MASS
    from tankcalc.balance.lines import (
        account_lines,
        causes_lines,
        cusum_lines,
        folded,
        period_lines,
        rest_lines,
    )
    from tankcalc.balance.periods import causes_over, sums_over

    whole = one.whole
    if whole is None:
        yield from folded(f"{clean(one.tank)}: {' '.join(one.notes)}")
        return
    count = len(whole.movements)
    start, end = whole.opening.state.at_us, whole.closing.state.at_us
    yield from folded(
        f"{clean(one.tank)}, {time(start)} to {time(end)}: {whole.hours:.1f} h, "
        f"{count} movement{'' if count == 1 else 's'}"
    )
    if accounts := whole.accounts():
        yield from account_lines(accounts, system)
    if args.every is not None:
        yield from period_lines(one.periods, MASS, system, time)
        if len(one.periods) > 1:
            yield from cusum_lines(sums_over(one.periods, MASS))
    if args.causes:
        yield from causes_lines(causes_over(one.periods, MASS), MASS, system)
    if args.drift:
        yield from rest_lines(one.rest, system, time)
    for note in one.notes:
        yield from folded(f"  Note: {note}")


def _time_of(site: Site) -> Any:
    from tankcalc.shiftlog import show_local, zone_named

    zone = zone_named(site.time_zone)
    return lambda t_us: show_local(t_us, zone)


def _print_json(
    args: argparse.Namespace, site: Site, found: SiteBalance, head: tuple[int, str]
) -> None:
    import json

    from tankcalc.balance.shown import accounts_data, repeated_data, transfer_data
    from tankcalc.report import CAUTION
    from tankcalc.shiftlog import iso_utc

    data = {
        "site": site.name,
        "since": iso_utc(found.cuts[0]),
        "until": iso_utc(found.cuts[-1]),
        "head": {"number": head[0], "hash": head[1]},
        "tanks": [_tank_data(args, one, found.cuts) for one in found.tanks],
        "total": accounts_data(found.total),
        "transfers_kg": [transfer_data(one) for one in found.transfers],
        "repeated_transfers": [repeated_data(*one) for one in found.repeated],
        "caution": CAUTION,
    }
    print(json.dumps(data, indent=2, allow_nan=False))


def _tank_data(args: argparse.Namespace, one: TankBalance, cuts: tuple[int, ...]) -> dict[str, Any]:
    from tankcalc.balance.effects import BASES
    from tankcalc.balance.periods import causes_over, sums_over
    from tankcalc.balance.shown import (
        accounts_data,
        causes_data,
        cusum_data,
        period_data,
        reading_data,
        rest_data,
    )

    whole, periods = one.whole, one.periods
    several = args.every is not None and len(periods) > 1
    return {
        "tank": one.tank,
        "opening": None if whole is None else reading_data(whole.opening, cuts[0]),
        "closing": None if whole is None else reading_data(whole.closing, cuts[-1]),
        "hours": None if whole is None else whole.hours,
        "movements": 0 if whole is None else len(whole.movements),
        **accounts_data({} if whole is None else whole.accounts()),
        "periods": [period_data(p) for p in periods] if args.every is not None else None,
        "cusum": {b: cusum_data(sums_over(periods, b)) for b in BASES} if several else None,
        "causes": {b: causes_data(causes_over(periods, b)) for b in BASES} if args.causes else None,
        "rest": rest_data(one.rest) if args.drift else None,
        "notes": list(one.notes),
    }
