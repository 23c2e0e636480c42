"""``tankcalc span``: what each transmitter should read, and what a reading of one stands for."""

from __future__ import annotations

import argparse
import sys
import textwrap
from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING, Any

from tankcalc.cli.common import answer, readings_from, site_from, system_from, typed_from
from tankcalc.errors import InputError
from tankcalc.text import clean

if TYPE_CHECKING:
    from collections.abc import Sequence

    from tankcalc.cli.parser import CommandParser
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.readings import Readings
    from tankcalc.result import Notice, Result
    from tankcalc.span import Foretold, TankSpan, TransmitterSpan
    from tankcalc.tank import Tank
    from tankcalc.units import System

GIVEN = ("temperature", "leg_temperature", "barometer", "p3")
"""Readings that can be given beside the one that is asked about."""


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command."""
    from tankcalc.typed import NAMES, PRESSURES

    parser = subparsers.add_parser(
        "span",
        help="what each transmitter should read, empty to full",
        description="What each transmitter of a tank should read empty, at its tap, at each limit "
        "and full, and the range to set it to. With --means the way back: what one reading stands "
        "for. The pressure above the liquid is the outside air's unless --p3 is given.",
        epilog="Signals are taken as linear. A differential transmitter left on square-root output "
        "shows 70.7 % where 50 % is meant.",
    )
    parser.add_argument("tank", metavar="TANK", help="the tank's file in tanks/, without .toml")
    parser.add_argument(
        "--fluid",
        metavar="NAME",
        action="append",
        help="a profile in fluids/ (default: contents); give the lightest and the heaviest",
    )
    parser.add_argument(
        "--means", metavar="Q", help='a reading or signal: "37.2 %%", "12.0 mA", "59.5 kPa"'
    )
    parser.add_argument(
        "--tag", choices=PRESSURES, help="one transmitter (--means: p1, else dp or p2)"
    )
    for name in GIVEN:
        option, shown = "--" + name.replace("_", "-"), NAMES[name].help.replace("%", "%%")
        parser.add_argument(option, metavar="Q", help=shown)
    parser.add_argument("--json", action="store_true", help="print one JSON object, SI units")


def run(args: argparse.Namespace) -> int:
    """Print the readings from empty to full, or what one reading stands for."""
    site = site_from(args)
    tank = site.tank(args.tank)
    fluids = [site.fluid_for(tank, name) for name in _names(args.fluid)]
    system = system_from(args, site)
    if args.means is None:
        return _forward(args, tank, fluids, system)
    return _back(args, tank, fluids, system)


def _names(given: list[str] | None) -> list[str | None]:
    """Return the fluids named, each once; None for the usual contents."""
    # argparse makes an empty list of the value "--".
    if given is not None and not all(given):
        raise InputError("--fluid needs the name of a profile in fluids/.")
    return [*dict.fromkeys(given)] if given else [None]


def _forward(args: argparse.Namespace, tank: Tank, fluids: Sequence[Fluid], system: System) -> int:
    """Print what the transmitters read from empty to full."""
    from tankcalc import units
    from tankcalc.span import as_json, span_of

    readings = readings_from(tank, typed_from(args))
    if any(worth != "saturated" for _, worth in readings.signals):
        raise InputError(f'--p3 "{clean(args.p3)}": is not a sound signal. Give a pressure.')
    unit_pa = units.from_unit(1.0, units.UNIT_FOR[system]["pressure"])
    span = span_of(tank, fluids, readings, [args.tag] if args.tag else [], unit_pa)
    if args.json:
        _print_json(as_json(span))
    else:
        print("\n".join(_span_lines(span, readings, system)))
    return 0


def _span_lines(span: TankSpan, readings: Readings, system: System) -> list[str]:
    from tankcalc import units
    from tankcalc.report import CAUTION

    liquids = [f"{x.name} {units.show(x.density_kg_m3, 'density', system)}" for x in span.liquids]
    above = "outside air"
    if readings.p3_pa is not None:
        above = f"p3 = {units.show(float(readings.p3_pa), 'pressure', system)}, as given"
    lines = _wrapped(f"{span.tank}, filled with {', '.join(liquids)}; above the liquid: {above}.")
    for one in span.transmitters:
        lines += ["", *_transmitter_lines(one, system)]
    return [*lines, "", *_notes(span.warnings), *_wrapped(CAUTION)]


def _transmitter_lines(one: TransmitterSpan, system: System) -> list[str]:
    """Return one transmitter's readings as a table, and the range to set below it."""
    from tankcalc import units

    taps = " and ".join(units.show(z, "length", system) for z in one.taps_m)
    table: list[tuple[str, ...]] = [("at", "level", "reading", "signal", "of range", "with")]
    for point in one.points:
        # Feet as decimals: three of them are finer than sixteenths, and narrower.
        level = units.show(point.level_m, "length", system, digits=3)
        table += _rows(_words(point.at), level, point.readings, system)
    return [
        *_wrapped(f"{one.tag}, {one.reads}, tap{'s' if len(one.taps_m) > 1 else ''} at {taps}"),
        *_aligned(table),
        *_wrapped(f"  To set: {_to_set(one, system)}", "    "),
        *_wrapped(f"  Present range: {_present(one, system)}", "    "),
        *_notes(one.warnings, "  "),
    ]


def _rows(
    at: str, level: str, readings: Sequence[Foretold], system: System
) -> list[tuple[str, ...]]:
    """Return a level's rows, one a liquid; a single one where they all read the same."""
    named = [(_cells(one.reading_pa, one.share, system), one.fluid) for one in readings]
    if len({cells for cells, _ in named}) == 1:
        return [(at, level, *named[0][0], "any" if len(named) > 1 else "")]
    first, *others = [(*cells, fluid) for cells, fluid in named]
    return [(at, level, *first), *(("", "", *other) for other in others)]


def _cells(reading_pa: float, share: float | None, system: System) -> tuple[str, str, str]:
    """Return a reading, its current and its share of the range as text."""
    from tankcalc import units
    from tankcalc.signals import measured_current_a

    reading = units.show(reading_pa, "pressure", system)
    if share is None:
        return reading, "", ""
    current_a = measured_current_a(share)
    current = "< 3.8 mA" if share < 0.0 else "> 20.5 mA"
    if current_a is not None:
        current = units.show(current_a, "current", system)
    return reading, current, units.show(share, "fraction", system)


def _words(at: str) -> str:
    return at.replace("_", "-" if at in ("low_low", "high_high") else " ")


def _aligned(table: Sequence[tuple[str, ...]]) -> list[str]:
    """Return a table as lines: without its empty columns, what is too long for a line cut."""
    from tankcalc.report import WIDTH

    columns = []
    for title, *cells in zip(*table, strict=True):
        if any(cells):
            width = max(map(len, (title, *cells)))
            side = "<" if title in ("at", "with") else ">"
            columns.append([f"{cell:{side}{width}}" for cell in (title, *cells)])
    lines = [f"  {'  '.join(row).rstrip()}" for row in zip(*columns, strict=True)]
    return [line if len(line) < WIDTH else f"{line[: WIDTH - 4]}..." for line in lines]


def _to_set(one: TransmitterSpan, system: System) -> str:
    from tankcalc import units

    if one.to_set is None:
        return "the level says nothing of it."
    lrv, urv, step = (
        units.show(pa, "pressure", system)
        for pa in (one.to_set.lrv_pa, one.to_set.urv_pa, one.to_set.step_pa)
    )
    return (
        f"{lrv} (LRV, 4 mA) to {urv} (URV, 20 mA): {_extremes(one, system)}, rounded outward to "
        f"{step}."
    )


def _extremes(one: TransmitterSpan, system: System) -> str:
    from tankcalc import units

    low, high = (units.show(pa, "pressure", system) for pa in (one.lowest_pa, one.highest_pa))
    return f"{low} to {high}"


def _present(one: TransmitterSpan, system: System) -> str:
    from tankcalc import units

    if one.range_pa is None or one.used is None:
        return "none in the tank file."
    lrv, urv = (units.show(pa, "pressure", system) for pa in one.range_pa)
    if one.covered:
        used = units.show(one.used, "fraction", system, digits=1)
        return f"{lrv} to {urv} covers that, and {used} of it is used."
    return f"{lrv} to {urv} DOES NOT COVER {_extremes(one, system)}."


@dataclass(frozen=True, slots=True)
class Meant:
    """One reading that is asked about: whose it is, as typed, and what it says as a signal."""

    tank: str
    tag: str
    means: str
    signal: str
    reading_pa: float | None
    share: float | None
    current_a: float | None


def _back(args: argparse.Namespace, tank: Tank, fluids: Sequence[Fluid], system: System) -> int:
    """Print what one reading stands for; exit code 3 where one of the liquids allows no answer."""
    tag, beside = args.tag or _usual_tag(tank), typed_from(args)
    if tag in beside:
        raise InputError(f"--means is a reading of {tag}, and --{tag} is given too. Leave one out.")
    meant = _meant(tank, tag, args.means)
    results = [answer(tank, fluid, beside | {tag: args.means}) for fluid in fluids]
    if args.json:
        from tankcalc.result import as_json

        _print_json(asdict(meant) | {"answers": [as_json(result) for result in results]})
        for notice in dict.fromkeys(n for result in results for n in result.refusals):
            print(f"tankcalc: {notice.message}", file=sys.stderr)
    else:
        print("\n".join(_means_lines(meant, results, system)))
    return 3 if any(result.status == "refused" for result in results) else 0


def _usual_tag(tank: Tank) -> str:
    """Return the transmitter that is meant where none is named: p1, or else what gives a level."""
    fitted = [*tank.transmitters, *(["dp"] if tank.dp is not None else [])]
    return next((tag for tag in ("p1", "dp", "p2") if tag in fitted), "p1")


def _meant(tank: Tank, tag: str, text: str) -> Meant:
    """Return the reading asked about, alone."""
    from tankcalc.signals import measured_current_a, share_from_pressure_pa
    from tankcalc.typed import readings_from_text

    if not text.strip():
        raise InputError("--means is empty.")
    readings, problems = readings_from_text(tank, {tag: text})
    if problems:
        raise InputError(f"--means {problems[tag]}")
    signal = dict(readings.signals).get(tag, "good")
    fitted = tank.dp if tag == "dp" else tank.transmitters[tag]
    reading_pa, share, current_a = getattr(readings, f"{tag}_pa"), None, None
    if reading_pa is not None and fitted is not None and fitted.range_pa is not None:
        share = share_from_pressure_pa(reading_pa, fitted.range_pa)
        current_a = measured_current_a(share)
    return Meant(tank.name, tag, clean(text), signal, reading_pa, share, current_a)


def _means_lines(meant: Meant, results: Sequence[Result], system: System) -> list[str]:
    from tankcalc.report import CAUTION

    if meant.reading_pa is None:
        stands = "is the signal of a failed transmitter: no pressure"
    else:
        reading, current, of_range = _cells(meant.reading_pa, meant.share, system)
        stands = f"is {reading}" + (f", {current}, {of_range} of its range" if current else "")
    lines = _wrapped(f'{meant.tank}: "{meant.means}" of {meant.tag} {stands}.')
    for result in results:
        lines += _answer_lines(result, system)
    return [*lines, *_wrapped(CAUTION)]


def _answer_lines(result: Result, system: System) -> list[str]:
    """Return level, volume and mass of an answer, or why there is none."""
    from tankcalc import units

    lines = [f"With {result.fluid}:"]
    for key, dimension in (("level_m", "length"), ("volume_m3", "volume"), ("mass_kg", "mass")):
        value, half = getattr(result, key), result.expanded_uncertainty.get(key)
        if value is not None:
            line = f"  {key.rsplit('_', 1)[0]:<8}{units.show(float(value), dimension, system):>18}"
            more = "" if half is None else f"  +/- {units.show(half, dimension, system)}"
            lines.append(line + more)
    if result.status != "refused":
        lines += _wrapped(f"  Basis: {result.basis}.", "    ")
    return lines + _notes(result.warnings, "  ")


def _notes(notices: Sequence[Notice], indent: str = "") -> list[str]:
    lines = []
    for notice in notices:
        word = "REFUSED" if notice.refuses else "Note"
        lines += _wrapped(f"{indent}{word}: {notice.message}", f"{indent}  ")
    return lines


def _wrapped(text: str, indent: str = "  ") -> list[str]:
    from tankcalc.report import WIDTH

    return textwrap.wrap(text, WIDTH - 1, subsequent_indent=indent)


def _print_json(data: dict[str, Any]) -> None:
    import json

    print(json.dumps(data, indent=2, allow_nan=False))
