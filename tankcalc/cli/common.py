"""What several commands do alike: the site, the readings, the answer."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from tankcalc.errors import InputError
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.profiles import Site
    from tankcalc.readings import Readings
    from tankcalc.result import Result
    from tankcalc.tank import Tank
    from tankcalc.units import System


class Once(argparse.Action):
    """Takes an option that may be given once: the second of two readings is no correction."""

    def __call__(
        self,
        parser: argparse.ArgumentParser,
        namespace: argparse.Namespace,
        values: str | Sequence[Any] | None,
        option_string: str | None = None,
    ) -> None:
        """Keep the value, or refuse the second."""
        if getattr(namespace, self.dest, None) is not None:
            parser.error(f"argument {option_string}: given twice")
        setattr(namespace, self.dest, values)


def add_reading_options(parser: argparse.ArgumentParser) -> None:
    """Add an option for every reading that can be typed."""
    from tankcalc.typed import FIELDS

    group = parser.add_argument_group("readings", "each a number with its unit, in quotes")
    for field in FIELDS:
        option = "--" + field.name.replace("_", "-")
        group.add_argument(
            option,
            dest=field.name,
            metavar="Q",
            action=Once,
            help=field.help.replace("%", "%%"),
        )


def typed_from(args: argparse.Namespace) -> dict[str, str]:
    """Return what was typed, by the name of the reading."""
    from tankcalc.typed import FIELDS

    given = {field.name: getattr(args, field.name, None) for field in FIELDS}
    return {name: text for name, text in given.items() if text is not None}


def site_from(args: argparse.Namespace) -> Site:
    """Return the site; say so on standard error when it is the demo."""
    from tankcalc.profiles import find_site, load_site

    folder, is_demo = find_site(args.profiles)
    site = load_site(folder, is_demo=is_demo)
    if site.is_demo:
        print(f"Demo site: {clean(site.name)} (not a real plant)", file=sys.stderr)
    return site


def system_from(args: argparse.Namespace, site: Site) -> System:
    """Return the system of units to show."""
    chosen: System = args.units or site.units
    return chosen


def readings_from(tank: Tank, typed: dict[str, str]) -> Readings:
    """Return the readings behind what was typed.

    Raises
    ------
    InputError
        Anything that cannot be read; every problem, a line each.
    """
    from tankcalc.typed import readings_from_text

    readings, problems = readings_from_text(tank, typed)
    problems |= {name: "is empty." for name, text in typed.items() if not text.strip()}
    if problems:
        lines = (f"--{name.replace('_', '-')} {why}" for name, why in problems.items())
        raise InputError("\n".join(lines))
    return readings


def answer(tank: Tank, fluid: Fluid, typed: dict[str, str]) -> Result:
    """Return the result for what was typed.

    Raises
    ------
    InputError
        Nothing was typed, or something cannot be read.
    """
    from tankcalc.uncertainty import answered

    if not typed:
        raise InputError('no reading was given. Give one, such as --p1 "98.2 kPa".')
    return answered(tank, fluid, readings_from(tank, typed))
