"""``tankcalc shiftlog``: add to the log, correct it, list it, verify it."""

from __future__ import annotations

import argparse
from collections.abc import Callable
from typing import TYPE_CHECKING

from tankcalc.cli import log_files
from tankcalc.cli.shiftlog import adding, correcting, declaring, listing, verifying

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser

_PARTS = (adding, correcting, declaring, listing, verifying, log_files)


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command and its actions."""
    parser = subparsers.add_parser(
        "shiftlog",
        help="add to, correct, list and verify the log",
        description="The log of the shift: entries are added and never changed or removed. It is "
        "kept in --log, else $TANKCALC_LOG, else what site.toml says, else a file named after "
        "the site in the user's data folder.",
    )
    actions = parser.add_subparsers(dest="action", metavar="ACTION", required=True, title="actions")
    for part in _PARTS:
        part.declare(actions)


def run(args: argparse.Namespace) -> int:
    """Carry out the action that was named."""
    act: Callable[[argparse.Namespace], int] = args.act
    return act(args)
