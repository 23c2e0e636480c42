"""``shiftlog verify``: whether the log is whole, and whether its results come out again."""

from __future__ import annotations

import argparse
import re
from contextlib import closing
from typing import TYPE_CHECKING

from tankcalc.cli.common import site_from
from tankcalc.cli.shiftlog.book import say
from tankcalc.cli.shiftlog.listing import head_line
from tankcalc.errors import LogBrokenError, TankcalcError
from tankcalc.shiftlog import log_address, named_log, open_store
from tankcalc.shiftlog.archive import check_beginning
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.shiftlog import Store
    from tankcalc.shiftlog.recompute import Recomputed

_HEAD = re.compile(r"(\d{1,18})[: ]([0-9a-fA-F]{8,64})", re.ASCII)


def declare(actions: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the action."""
    parser = actions.add_parser(
        "verify",
        help="check that nothing in the log was changed, removed or moved",
        description="Walks the whole log. Exit code 0: whole, with the number and hash of its "
        "head; 4: not whole, with the first bad entry and why. Only a head noted earlier can "
        "show that the newest entries were cut off or all were rewritten.",
    )
    parser.set_defaults(act=_verify)
    parser.add_argument(
        "--head",
        metavar="NUMBER:HASH",
        type=_head,
        help="a head noted earlier; at least 8 digits of the hash",
    )
    parser.add_argument(
        "--recompute",
        action="store_true",
        help="work every result out again from what was typed and the profiles kept with it, and "
        "list what comes out otherwise; exit code 1 where anything does",
    )


def _verify(args: argparse.Namespace) -> int:
    address = named_log(args.log) or log_address(None, site_from(args))
    with closing(open_store(address)) as store:
        result = store.verify(args.head)
        print(f"entries {result.entries}")
        print(head_line(result.head, None))
        if result.flaw is not None:
            print(f"flaw    {clean(str(result.flaw), 1000)}", flush=True)
            raise LogBrokenError(f"the log {store.where} does not verify: {result.flaw}.")
        came_before, flaw = check_beginning(store)
        if came_before:
            print(f"begins  {came_before}", flush=True)
        if flaw is not None:
            raise LogBrokenError(f"what {store.where} goes on from does not verify: {flaw}.")
        begins = result.head[0] - result.entries
        if args.head is not None and args.head[0] < begins:
            say(f"entry {args.head[0]} is in an archive: the log goes on from entry {begins}.")
        if args.recompute:
            _recompute(store)
    return 0


def _recompute(store: Store) -> None:
    from tankcalc.shiftlog.recompute import recompute

    results = others = 0
    for found in recompute(store):
        results += 1
        if not found.reproduced:
            others += 1
            _print_difference(found)
    print(f"results {results}, of which {others} come out otherwise")
    if others:
        raise TankcalcError(
            f"{others} of {results} results in the log {store.where} do not come out as they"
            " were stored."
        )


def _print_difference(found: Recomputed) -> None:
    entry = f"entry {found.row.seq}"
    if found.program:
        entry += f" (by version {clean(found.program, 40)})"
    if found.problem:
        print(f"{entry}: cannot be worked out: {clean(found.problem, 400)}")
    for difference in found.differences:
        print(f"{entry}: {clean(str(difference), 1000)}")


def _head(text: str) -> tuple[int, str]:
    found = _HEAD.fullmatch(text.strip())
    if found is None:
        raise argparse.ArgumentTypeError("a head is typed as verify prints it, 12:3f2a9c01")
    return int(found[1]), found[2].lower()
