"""``tankcalc convert``: readings of one tank to level, volume and mass."""

from __future__ import annotations

import argparse
import sys
from typing import TYPE_CHECKING

from tankcalc.cli.common import (
    add_reading_options,
    answer,
    readings_from,
    site_from,
    system_from,
    typed_from,
)

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.consistency import Disagreement
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.readings import Readings
    from tankcalc.result import Result
    from tankcalc.sums import Rounding, Sums
    from tankcalc.tank import Tank
    from tankcalc.units import System


ROUNDINGS: dict[str, Rounding] = {"printed": "as printed", "none": "unrounded"}

DOUBTS = ("disagreement", "density_differs")
"""Notices after which it is asked which single fault would explain them."""


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
    parser.add_argument(
        "--budget", action="store_true", help="what each input adds to the uncertainty"
    )
    parser.add_argument(
        "--terms", action="store_true", help="what each correction is worth in level and mass"
    )
    parser.add_argument(
        "--sums",
        action="store_true",
        help="the working from observed volume to net standard volume, mass and weight",
    )
    parser.add_argument(
        "--rounding",
        choices=("printed", "none"),
        default="printed",
        help="of the working: as the standards print their figures (default), or none",
    )
    parser.add_argument("--json", action="store_true", help="print one JSON object, SI units")
    add_reading_options(parser)


def run(args: argparse.Namespace) -> int:
    """Print the answer; exit code 3 when there is no honest one."""
    site = site_from(args)
    tank = site.tank(args.tank)
    fluid = site.fluid_for(tank, args.fluid)
    typed = typed_from(args)
    result = answer(tank, fluid, typed)
    readings, system = readings_from(tank, typed), system_from(args, site)
    doubted = result.status == "refused" or any(n.code in DOUBTS for n in result.warnings)
    found = explain(tank, fluid, readings, typed) if doubted else None
    if args.json:
        working = _sums(args, tank, fluid, readings, system)
        _print_json(result, found, working)
    else:
        _print_text(result, found, system)
    if result.status == "refused":
        return 3
    _print_working(args, tank, fluid, readings, system)
    return 0


def explain(
    tank: Tank, fluid: Fluid, readings: Readings, typed: dict[str, str]
) -> Disagreement | None:
    """Return which single faults would reconcile the readings, None where nothing can be said."""
    from tankcalc.consistency import explain as explained
    from tankcalc.typed import typed_units

    found = explained(tank, fluid, readings, typed_units=typed_units(typed))
    return found if found.explanations else None


def _print_text(result: Result, found: Disagreement | None, system: System) -> None:
    from tankcalc.report import text_report, wrapped

    print(text_report(result, system))
    if found is not None:
        from tankcalc.consistency import words

        print()
        for line in words(found, system):
            print("\n".join(wrapped(line)))


def _print_working(
    args: argparse.Namespace, tank: Tank, fluid: Fluid, readings: Readings, system: System
) -> None:
    """Print budget and terms where asked for; beside JSON they are talk, not data."""
    stream = sys.stderr if args.json else sys.stdout
    if args.budget:
        from tankcalc.report import budget_table
        from tankcalc.uncertainty import assess

        budget = assess(tank, fluid, readings)
        if budget is not None:
            print(f"\n{budget_table(budget, system)}", file=stream)
    if args.sums and not args.json:
        from tankcalc.report import sums_table

        working = _sums(args, tank, fluid, readings, system)
        if working is not None:
            print(f"\n{sums_table(working)}")
    if args.terms:
        from tankcalc.report import terms_table
        from tankcalc.terms import terms

        print(f"\n{terms_table(terms(tank, fluid, readings), system)}", file=stream)


def _sums(
    args: argparse.Namespace, tank: Tank, fluid: Fluid, readings: Readings, system: System
) -> Sums | None:
    """Return the working, None where it was not asked for."""
    if not args.sums:
        return None
    from tankcalc.sums import sums

    return sums(tank, fluid, readings, ROUNDINGS[args.rounding], system)


def _print_json(result: Result, found: Disagreement | None, working: Sums | None) -> None:
    import json

    from tankcalc.result import as_json

    data = as_json(result)
    if working is not None:
        lines = [
            {
                "symbol": line.symbol,
                "name": line.name,
                "value": line.value,
                "unit": line.unit,
                "working": line.working,
            }
            for line in working.lines
        ]
        data["sums"] = {"rounding": working.rounding, "lines": lines, "remark": working.remark}
    if found is not None:
        data["explanations"] = [
            {
                "code": one.code,
                "reading": one.reading,
                "words": one.words(),
                "size_si": one.size,
                "chi_square": one.chi_square,
                "freedom": one.freedom,
                "level_m": one.level_m,
                "volume_m3": one.volume_m3,
                "mass_kg": one.mass_kg,
            }
            for one in found.explanations
        ]
    print(json.dumps(data, indent=2, allow_nan=False))
    for notice in result.refusals:
        print(f"tankcalc: {notice.message}", file=sys.stderr)
