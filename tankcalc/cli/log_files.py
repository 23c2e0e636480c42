"""``tankcalc shiftlog export``, ``import``, ``archive`` and ``backup``: the log and files."""

from __future__ import annotations

import argparse
import re
import sys
from contextlib import closing
from datetime import date, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

from tankcalc.cli.common import site_from
from tankcalc.errors import InputError
from tankcalc.shiftlog import log_address, named_log, now_us, open_store, zone_named
from tankcalc.shiftlog.address import log_file
from tankcalc.shiftlog.times import end_of_gap, instants_of
from tankcalc.text import clean

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.cli.parser import CommandParser
    from tankcalc.shiftlog.chain import VerifyResult
    from tankcalc.shiftlog.spreadsheet_import import Imported

_YEAR = re.compile(r"[0-9]{4}", re.ASCII)


def declare(actions: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the four actions."""
    _declare_export(actions)
    _declare_import(actions)
    _declare_archive(actions)
    _declare_backup(actions)


def _declare_export(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "export",
        help="write every entry to a CSV or Excel file",
        description="Writes a row for every entry, of every kind, to FILE.csv or FILE.xlsx. A "
        "CSV text that begins like a formula gets an apostrophe before it.",
    )
    parser.set_defaults(act=_export)
    parser.add_argument("file", metavar="FILE", help="a file ending in .csv or .xlsx")
    parser.add_argument(
        "--raw", action="store_true", help="no apostrophe: for programs, not for a spreadsheet"
    )


def _declare_import(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "import",
        help="log the rows of a CSV or Excel file",
        description="Reads what export writes, or a table with the columns time, tank and "
        'readings with their unit in brackets, "p1 [kPa]", "temperature [degC]". Every row is '
        "checked first: with anything wrong in one of them none is logged. What the log holds "
        "already, by an earlier import or because it was exported from it, is left as it is.",
    )
    parser.set_defaults(act=_import)
    parser.add_argument("file", metavar="FILE", help="a file ending in .csv or .xlsx")


def _declare_archive(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "archive",
        help="roll the oldest entries into a read-only file",
        description="Moves the entries read before a date into OUT, a log that can be listed and "
        "verified as any; the log goes on from its last hash. For a log in a file.",
    )
    parser.set_defaults(act=_archive)
    parser.add_argument(
        "--before",
        metavar="YEAR",
        type=_first_day,
        required=True,
        help="a year, 2026, or a local date, 2026-07-01",
    )
    parser.add_argument("--who", metavar="NAME", default="", help="name or initials")
    parser.add_argument("out", metavar="OUT", help="the archive: a new file")


def _declare_backup(actions: argparse._SubParsersAction[CommandParser]) -> None:
    parser = actions.add_parser(
        "backup",
        help="copy the log to a file while it is in use",
        description="Copies the log as it is at one moment, and checks the copy. Of a log in "
        "PostgreSQL it names the command that does it.",
    )
    parser.set_defaults(act=_backup)
    parser.add_argument("file", metavar="FILE", help="the copy: a new file")


def _export(args: argparse.Namespace) -> int:
    from tankcalc.shiftlog.export import as_table
    from tankcalc.shiftlog.export_files import write_table

    address = named_log(args.log) or log_address(None, site_from(args))
    with closing(open_store(address)) as store:
        count = write_table(as_table(store), Path(args.file), raw=args.raw)
    _say(f"{_counted(count)} in {clean(args.file)}")
    return 0


def _import(args: argparse.Namespace) -> int:
    from tankcalc.shiftlog.spreadsheet_import import import_file

    site = site_from(args)
    with closing(open_store(log_address(args.log, site))) as store:
        found = import_file(Path(args.file), site, store, now_us())
    print(f"entries {found.entries}", flush=True)
    for line in _left(found):
        _say(line)
    return 0


def _left(found: Imported) -> list[str]:
    lines = []
    if found.known:
        lines.append(f"{found.known} rows are in the log already; they were left as they are.")
    if found.refused:
        lines.append(f"{found.refused} readings have no honest answer; they are logged as refused.")
    for kind, count in found.left_out.items():
        lines.append(f'{count} rows of kind "{kind}" were left out: they are of another log.')
    return lines


def _archive(args: argparse.Namespace) -> int:
    from tankcalc.shiftlog.archive import archive

    site = site_from(args)
    address = log_address(args.log, site)
    now, before_us = now_us(), _midnight(args.before, zone_named(site.time_zone))
    if before_us > now:
        raise InputError(f"{args.before} is not past: only what is past is archived.")
    log = log_file(address)
    if log is None:
        raise InputError(
            "a log in PostgreSQL is not archived into a file: there, old entries stay in the"
            f" database, and backups are made with {_dump(address)}"
        )
    out = Path(args.out)
    found = archive(log, out, site=site, before_us=before_us, now_us=now, who=args.who)
    print(f"entries {found.entries}")
    print(f"head    {found.head[0]}:{found.head[1].hex()}", flush=True)
    if found.kept:
        _say(
            f"{_counted(found.kept)} from before {args.before} stay in the log: entered late, or"
            " corrected since."
        )
    return 0


def _backup(args: argparse.Namespace) -> int:
    from tankcalc.shiftlog.backup import back_up

    address = named_log(args.log) or log_address(None, site_from(args))
    log = log_file(address)
    if log is None:
        raise InputError(f"a log in PostgreSQL is backed up by its own tool: {_dump(address)}")
    _print_head(back_up(log, Path(args.file)))
    return 0


def _dump(address: str) -> str:
    from tankcalc.shiftlog.postgres_store import PostgresStore

    return PostgresStore(address).dump_command


def _print_head(found: VerifyResult) -> None:
    print(f"entries {found.entries}")
    print(f"head    {found.head[0]}:{found.head[1].hex()}", flush=True)


def _first_day(text: str) -> date:
    try:
        return date(int(text), 1, 1) if _YEAR.fullmatch(text) else date.fromisoformat(text)
    except ValueError:
        raise argparse.ArgumentTypeError("a year or a date is wanted, 2026 or 2026-07-01") from None


def _midnight(day: date, zone: ZoneInfo) -> int:
    """Return the instant at which a local date begins; where clocks skip midnight, after that."""
    wall = datetime(day.year, day.month, day.day)
    if not 1970 < day.year < 9998:
        raise InputError(f"{day} lies outside the years a log can hold.")
    instants = instants_of(wall, zone)
    return instants[0] if instants else end_of_gap(wall, zone)


def _counted(count: int) -> str:
    return "1 entry" if count == 1 else f"{count} entries"


def _say(text: Any) -> None:
    print(f"tankcalc: {text}", file=sys.stderr)
