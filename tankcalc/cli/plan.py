"""``tankcalc plan``: room, time to a limit, when to call stop, what a receipt does."""

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
from tankcalc.errors import InputError, QuantityError
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser
    from tankcalc.limits.mixing import Contents
    from tankcalc.limits.plans import Question
    from tankcalc.profiles import Site
    from tankcalc.tank import Tank

OPTIONS = (
    ("rate", 'net flow, in is positive: "120 m3/h", "-80 t/h"'),
    ("rate-uncertainty", 'standard uncertainty of the rate, "2 m3/h"'),
    ("add", 'a receipt of the same product: "500 t", "600 m3"; negative: a delivery'),
    ("at-temperature", 'temperature of what arrives, "25 degC"'),
    ("to", 'a limit ("maximum working") or a level ("13.2 m")'),
    ("closing-time", 'from the call until the valve is shut, "90 s"'),
    ("drain-back", 'what drains from the line afterwards, "4 m3"'),
    ("next-reading", 'time to the next planned reading, "1 h"'),
    ("design-temperature", 'the warmest (or coldest) it may get, "45 degC"'),
)


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command."""
    parser = subparsers.add_parser(
        "plan",
        help="room, time to a limit, when to call stop, what a receipt does",
        description="From one set of readings: how much can be received, when each limit is "
        "reached at a rate, when to call stop, the level after a receipt, and what a change of "
        "temperature does.",
    )
    parser.add_argument("tank", metavar="TANK", help="the tank's file in tanks/, without .toml")
    parser.add_argument("--fluid", metavar="NAME", help="a profile in fluids/ (default: contents)")
    for name, what in OPTIONS:
        parser.add_argument(f"--{name}", metavar="Q", help=what)
    parser.add_argument(
        "--not-mixed", action="store_true", help="what arrives lies apart, at its own temperature"
    )
    parser.add_argument("--json", action="store_true", help="print one JSON object, SI units")
    add_reading_options(parser)


def run(args: argparse.Namespace) -> int:
    """Print the plan; exit code 3 when there is no honest answer to plan from."""
    from tankcalc.limits.mixing import contents_of
    from tankcalc.limits.plans import plan_of

    site = site_from(args)
    tank = site.tank(args.tank)
    fluid = site.fluid_for(tank, args.fluid)
    typed = typed_from(args)
    result = answer(tank, fluid, typed)
    if result.status == "refused":
        for notice in result.refusals:
            print(f"tankcalc: {notice.message}", file=sys.stderr)
        return 3
    contents = contents_of(tank, fluid, readings_from(tank, typed), result)
    half = result.expanded_uncertainty.get("level_m")
    question = question_from(args, tank, contents, site, 0.0 if half is None else half / 2.0)
    plan = plan_of(tank, contents, question)
    if args.json:
        import json

        from tankcalc.limits.plans import as_json

        print(json.dumps(as_json(plan, result.warnings), indent=2, allow_nan=False))
    else:
        from tankcalc.cli.plan_text import plan_lines

        print("\n".join(plan_lines(plan, result, system_from(args, site))))
    return 0


def question_from(
    args: argparse.Namespace, tank: Tank, contents: Contents, site: Site, level_u_m: float
) -> Question:
    """Return what is asked, in SI; an InputError names the option that cannot be read."""
    from tankcalc.limits.plans import Question

    rho = contents.density_kg_m3
    flow = _per_mass(args, "rate", ("volume_flow", "mass_flow"), rho)
    flow_u = _per_mass(args, "rate-uncertainty", ("volume_flow", "mass_flow"), rho)
    if flow is None and flow_u is not None:
        raise InputError("--rate-uncertainty needs a --rate.")
    if flow == 0.0:
        raise InputError("--rate: at no flow there is nothing to wait for. Leave it out.")
    arriving = _value(args, "at-temperature", "temperature")
    target = _target(args, tank, rising=flow is None or flow > 0.0)
    next_reading = _value(args, "next-reading", "time", positive=True)
    return Question(
        limit=target[0],
        target_m=target[1],
        level_uncertainty_m=level_u_m,
        flow_m3_s=flow,
        flow_uncertainty_m3_s=flow_u,
        closing_s=_value(args, "closing-time", "time") or 0.0,
        drain_back_m3=_value(args, "drain-back", "volume") or 0.0,
        next_reading_s=site.rates.read_every_s if next_reading is None else next_reading,
        added_kg=_added(args, contents, arriving),
        arriving_k=arriving,
        mixed=not args.not_mixed,
        design_k=_value(args, "design-temperature", "temperature"),
    )


def _text(args: argparse.Namespace, name: str) -> str | None:
    given: str | None = getattr(args, name.replace("-", "_"))
    if given is not None and not given.strip():
        raise InputError(f"--{name} is empty.")
    return given


def _value(
    args: argparse.Namespace, name: str, dimension: str, *, positive: bool = False
) -> float | None:
    """Return an option in SI, None where it was not given; nothing of these is below zero."""
    from tankcalc import units

    text = _text(args, name)
    if text is None:
        return None
    try:
        si = units.si(text, dimension)
    except QuantityError as error:
        raise InputError(f"--{name} {error}") from error
    if si < 0.0 or (positive and si == 0.0):
        raise InputError(f'--{name} "{clean(text, 40)}": must be above zero.')
    return si


def _per_mass(
    args: argparse.Namespace, name: str, dimensions: tuple[str, str], density_kg_m3: float
) -> float | None:
    """Return an option in m3 (or m3/s), one that was given as mass by the density."""
    from tankcalc import units

    text = _text(args, name)
    if text is None:
        return None
    try:
        quantity = units.parse_any(text, dimensions)
    except QuantityError as error:
        raise InputError(f"--{name} {error}") from error
    if name == "rate-uncertainty" and quantity.si < 0.0:
        raise InputError(f"--{name}: must not be below zero.")
    return quantity.si / (density_kg_m3 if quantity.dimension == dimensions[1] else 1.0)


def _added(args: argparse.Namespace, contents: Contents, arriving_k: float | None) -> float | None:
    """Return the mass of a receipt (kg); a volume counts at the temperature it arrives with."""
    given = _per_mass(args, "add", ("volume", "mass"), 1.0)
    if given is None:
        return None
    from tankcalc import units

    if units.parse_any(args.add, ("volume", "mass")).dimension == "mass":
        return given
    if arriving_k is None or given < 0.0:
        return given * contents.density_kg_m3
    return given * contents.density(arriving_k)


def _target(args: argparse.Namespace, tank: Tank, *, rising: bool) -> tuple[str, float]:
    """Return the limit or the level that is planned to, by name and in m."""
    from tankcalc import units
    from tankcalc.limits.levels import limit_named, limit_words

    text = _text(args, "to")
    usual = "maximum_working" if rising else "minimum_working"
    name = usual if text is None else limit_named(text)
    if name is not None:
        if name in tank.limits_m:
            return name, tank.limits_m[name]
        known = ", ".join(limit_words(limit) for limit in tank.limits_m) or "none"
        raise InputError(
            f"{tank.name} states no {limit_words(name)} level. Stated: {known}. "
            'Give a level, as in --to "13.2 m".'
        )
    try:
        level = units.si(text or "", "length")
    except QuantityError as error:
        raise InputError(f"--to {error} Or name a limit, as in --to high-high.") from error
    low, high = tank.vessel.z_min, tank.vessel.z_max
    if not low <= level <= high:
        raise InputError(f"--to: {tank.name} reaches from {low:.3f} m to {high:.3f} m.")
    return "", level
