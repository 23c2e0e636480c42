"""``tankcalc begin``: a commented starter site."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command."""
    parser = subparsers.add_parser(
        "begin",
        help="write a commented starter site",
        description="Writes a starter site with one tank and two fluids, every key explained. "
        "Nothing that exists is overwritten.",
    )
    parser.add_argument("folder", metavar="DIR", help="a new or an empty folder")


def run(args: argparse.Namespace) -> int:
    """Write the site; print the files it consists of."""
    from tankcalc.profiles import begin

    folder = Path(args.folder)
    for path in begin(folder):
        print(clean(str(path), 400))
    shown = clean(str(folder), 400)
    print(f'Check it with: tankcalc vet "{shown}"', file=sys.stderr)
    print(f'Use it with: tankcalc --profiles "{shown}"', file=sys.stderr)
    return 0
