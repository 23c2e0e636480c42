"""``tankcalc strap``: a capacity table."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from tankcalc.cli.common import site_from, system_from
from tankcalc.errors import InputError

if TYPE_CHECKING:
    from collections.abc import Iterator

    import numpy as np
    import numpy.typing as npt

    from tankcalc.cli.parser import CommandParser
    from tankcalc.geometry import Vessel
    from tankcalc.units import System

MOST_ROWS = 200_000


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command."""
    parser = subparsers.add_parser(
        "strap",
        help="print a capacity table",
        description="Level, volume and horizontal area of a tank at every step, as CSV.",
    )
    parser.add_argument("tank", metavar="TANK", help="the tank's file in tanks/, without .toml")
    parser.add_argument(
        "--step", metavar="Q", default="1 cm", help='distance between rows (default "1 cm")'
    )


def run(args: argparse.Namespace) -> int:
    """Print the table."""
    from tankcalc import units

    step = units.si(args.step, "length")
    site = site_from(args)
    tank = site.tank(args.tank)
    for line in _lines(tank.vessel, levels(tank.vessel, step), system_from(args, site)):
        print(line)
    return 0


def levels(vessel: Vessel, step_m: float) -> npt.NDArray[np.float64]:
    """Return the bottom, every multiple of the step above the datum, and the top, m.

    Raises
    ------
    InputError
        A step that is not above zero, or so small that the table has no end.
    """
    import numpy as np

    if not step_m > 0.0:
        raise InputError("the step must be above zero.")
    count = (vessel.z_max - vessel.z_min) / step_m
    if count > MOST_ROWS:
        raise InputError(f"this step makes more than {MOST_ROWS} rows.")
    first, last = int(np.ceil(vessel.z_min / step_m)), int(np.floor(vessel.z_max / step_m))
    inner = step_m * np.arange(first, last + 1)
    inside = inner[(inner > vessel.z_min + 1e-9) & (inner < vessel.z_max - 1e-9)]
    return np.concatenate(([vessel.z_min], inside, [vessel.z_max]))


def _lines(vessel: Vessel, levels_m: npt.NDArray[np.float64], system: System) -> Iterator[str]:
    """Yield the table as lines of CSV, in the units of a system."""
    from tankcalc import units

    columns = (
        ("level", "length", levels_m, 4),
        ("volume", "volume", vessel.volume(levels_m), 6),
        ("area", "area", vessel.area(levels_m), 6),
    )
    names = [units.UNIT_FOR[system][dimension] for _, dimension, _, _ in columns]
    titles = (f"{column[0]} [{unit}]" for column, unit in zip(columns, names, strict=True))
    yield ",".join(titles)
    factors = [units.to_unit(1.0, unit) for unit in names]
    for row in zip(*(column[2] for column in columns), strict=True):
        yield ",".join(
            f"{value * factor:.{column[3]}f}"
            for value, factor, column in zip(row, factors, columns, strict=True)
        )
