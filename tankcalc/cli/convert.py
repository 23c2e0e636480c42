"""``tankcalc convert``: readings of one tank to level, volume and mass."""

from __future__ import annotations

import argparse
import sys
from typing import TYPE_CHECKING

from tankcalc.cli.common import (
    add_reading_options,
    answer,
    site_from,
    system_from,
    typed_from,
)

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.result import Result


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command."""
    parser = subparsers.add_parser(
        "convert",
        help="readings of one tank to level, volume and mass",
        description="What a tank holds, from any reading that fixes the surface; further "
        "readings are compared with the answer.",
    )
    parser.add_argument("tank", metavar="TANK", help="the tank's file in tanks/, without .toml")
    parser.add_argument("--fluid", metavar="NAME", help="a profile in fluids/ (default: contents)")
    parser.add_argument("--json", action="store_true", help="print one JSON object, SI units")
    add_reading_options(parser)


def run(args: argparse.Namespace) -> int:
    """Print the answer; exit code 3 when there is no honest one."""
    site = site_from(args)
    tank = site.tank(args.tank)
    result = answer(tank, site.fluid_for(tank, args.fluid), typed_from(args))
    if args.json:
        _print_json(result)
    else:
        from tankcalc.report import text_report

        print(text_report(result, system_from(args, site)))
    return 3 if result.status == "refused" else 0


def _print_json(result: Result) -> None:
    import json

    from tankcalc.result import as_json

    print(json.dumps(as_json(result), indent=2, allow_nan=False))
    for notice in result.refusals:
        print(f"tankcalc: {notice.message}", file=sys.stderr)
