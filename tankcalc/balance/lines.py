"""Balances as lines of text for a terminal of 80 columns. Computes nothing."""

from __future__ import annotations

import textwrap
from collections.abc import Callable, Iterator, Sequence
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.balance.account import COVERAGE, Account, verdict
from tankcalc.balance.cusum import ENOUGH, Cusum
from tankcalc.balance.effects import MASS, STANDARD
from tankcalc.report import WIDTH
from tankcalc.text import clean

if TYPE_CHECKING:
    from collections.abc import Mapping

    from tankcalc.balance.causes import Causes, Slope
    from tankcalc.balance.periods import Period
    from tankcalc.balance.rest import Rest
    from tankcalc.balance.transfers import Repeated, Transfer

DIMENSIONS = {MASS: "mass", STANDARD: "volume"}
WORDS = {MASS: "mass", STANDARD: "standard volume"}
SHOWN_CAUSES = 3
"""Causes of uncertainty that are named, the largest first."""

MOST_PERIODS = 40
"""Periods that are listed one by one; JSON has them all."""

Time = Callable[[int], str]
"""An instant, µs of UTC, as local text."""


def folded(text: str) -> list[str]:
    """Return a text as lines that fit the terminal, the later ones two columns further in."""
    indent = " " * (len(text) - len(text.lstrip()) + 2)
    return textwrap.wrap(text, WIDTH - 1, subsequent_indent=indent)


def account_lines(accounts: Mapping[str, Account], system: units.System) -> Iterator[str]:
    """Yield the balances side by side: opening, movements, book, closing, what is over."""
    bases = [basis for basis in (MASS, STANDARD) if basis in accounts]
    yield _row("", [WORDS[basis] for basis in bases])
    kinds = dict.fromkeys(kind for basis in bases for kind in accounts[basis].moved)
    yield _row("opening", [_show(accounts[b].opening, b, system) for b in bases])
    for kind in kinds:
        yield _row(kind, [_show(accounts[b].moved.get(kind), b, system) for b in bases])
    yield _row("book closing", [_show(accounts[b].book, b, system) for b in bases])
    yield _row("closing", [_show(accounts[b].closing, b, system) for b in bases])
    yield _row("gain or loss", [_show(accounts[b].difference, b, system) for b in bases])
    halves = [COVERAGE * accounts[b].standard_uncertainty for b in bases]
    cells = [_show(u, b, system) for u, b in zip(halves, bases, strict=True)]
    yield _row("+/- (k = 2)", cells)
    if any(accounts[b].throughput > 0.0 for b in bases):
        yield _row("of throughput", [_share(accounts[b].of_throughput) for b in bases])
    for basis in bases:
        yield from folded(f"  By {WORDS[basis]}: {verdict(accounts[basis].significance)}.")
        yield from _rests_on(accounts[basis], system)


def _rests_on(one: Account, system: units.System) -> list[str]:
    largest = [(name, u) for name, u in one.uncertainties.items() if u > 0.0][:SHOWN_CAUSES]
    if not largest:
        return []
    named = ", ".join(f"{name} {_show(u, one.basis, system)}" for name, u in largest)
    return folded(f"    largest uncertainties (k = 1): {named}")


def _row(label: str, cells: Sequence[str]) -> str:
    return (f"  {label:<16}" + "".join(f"{cell:>22}" for cell in cells)).rstrip()


def _show(value: float | None, basis: str, system: units.System) -> str:
    return "" if value is None else units.show(value, DIMENSIONS[basis], system)


def _share(value: float | None) -> str:
    return "" if value is None else units.show(value, "fraction")


def period_lines(
    periods: Sequence[Period], basis: str, system: units.System, time: Time
) -> Iterator[str]:
    """Yield a line a period: its closing, throughput, difference, significance."""
    shown = periods[-MOST_PERIODS:]
    if len(shown) < len(periods):
        yield f"  The last {len(shown)} of {len(periods)} periods:"
    yield (
        f"  {'period to':<22}{'throughput':>14}{'gain or loss':>15}{'+/-':>13}{'significance':>13}"
    )
    for period in shown:
        one = period.account(basis)
        to = time(period.closing.state.at_us)
        if one is None:
            yield f"  {to:<22}{'no balance':>14}"
            continue
        worth = "" if one.significance is None else f"{one.significance:.2f}"
        cells = (one.throughput, one.difference, COVERAGE * one.standard_uncertainty)
        moved, over, half = (_show(value, basis, system) for value in cells)
        yield f"  {to:<22}{moved:>14}{over:>15}{half:>13}{worth:>13}"


def cusum_lines(found: Cusum | None) -> list[str]:
    """Return what the cumulative sums say."""
    if found is None:
        return folded("  Cumulative sums: a period has no balance or no uncertainty.")
    up, down, h = found.gain[-1], found.loss[-1], found.threshold
    said = f"gain {up:.1f}, loss {down:.1f}, alert beyond {h:.0f}"
    what = f"an unexplained {found.alert} goes on" if found.alert else "no alert"
    lines = folded(f"  Cumulative sums after {len(found.gain)} periods: {said}: {what}.")
    if not found.enough:
        few = f"{len(found.gain)} periods are few: {ENOUGH} are needed to know the uncertainty"
        return lines + folded(f"    {few} by its scatter.")
    return lines + folded(
        f"    Periods: mean {found.mean:.2f}, scatter about it {found.scatter:.2f} of the stated "
        "uncertainty (a scatter of 1 is right)."
    )


def causes_lines(found: Causes | None, basis: str, system: units.System) -> list[str]:
    """Return the slopes of a regression, one a line, and what cannot be told."""
    if found is None:
        return folded("  Causes: too few periods to tell any.")
    lines = [f"  Causes, by {WORDS[basis]}:"]
    for slope in found.slopes:
        value, error, per = _slope(slope, basis, system)
        t = "exact" if abs(slope.t) == float("inf") else f"t {slope.t:.2f}"
        lines += folded(f"    {slope.name:<14}{value} +/- {error} {per} (k = 1), {t}")
    if found.unvaried:
        lines += folded(f"    nothing to see of: {', '.join(found.unvaried)} (none in the span)")
    if found.together:
        lines += folded(f"    cannot be told apart: {', '.join(found.together)}")
    if found.hardly:
        lines += folded("    the causes nearly vary together: the slopes are poorly known")
    return lines


def _slope(slope: Slope, basis: str, system: units.System) -> tuple[str, str, str]:
    if slope.name == "throughput":
        value, error = (units.show(v, "fraction", digits=3) for v in _both(slope))
        return value, error, "of throughput"
    value, error = (_show(v, basis, system) for v in _both(slope))
    return value, error, "when half full" if slope.name == "table shape" else "an hour"


def _both(slope: Slope) -> tuple[float, float]:
    return slope.value, slope.standard_error


def rest_lines(found: Rest | None, system: units.System, time: Time) -> list[str]:
    """Return the drift of a tank at rest."""
    if found is None:
        return folded("  At rest: no stretch without movements that holds enough readings.")
    mass = found.mass
    rate, error = (units.show(v, "mass", system) for v in (mass.per_hour, mass.standard_error))
    how = f"{mass.cycles} daily means" if mass.whole_days else f"{mass.readings} readings"
    lines = folded(
        f"  At rest {time(found.from_us)} to {time(found.to_us)}: {rate} an hour +/- {error} "
        f"(k = 1), {verdict(mass.significance)}; {how}, worth {mass.effective:.0f} independent."
    )
    for name, one in found.pressures.items():
        lines += folded(
            f"    {name} drifts {one.per_hour:.3f} Pa an hour +/- {one.standard_error:.3f} (k = 1)"
        )
    return lines + [line for hint in found.hints for line in folded(f"    {hint}")]


def transfer_lines(
    transfers: Sequence[Transfer],
    repeated: Sequence[tuple[str, str, Repeated]],
    system: units.System,
) -> Iterator[str]:
    """Yield the transfers as both tanks saw them, and what many have in common."""
    for one in transfers:
        out, into, over = (
            units.show(v, "mass", system) for v in (one.out, one.into, one.difference)
        )
        yield from folded(
            f"  {clean(one.source)} to {clean(one.target)}: out {out}, in {into}, difference {over}"
            f" ({_share(one.of_moved)}), {verdict(one.significance)}"
        )
    for source, target, many in repeated:
        yield from folded(
            f"  {many.transfers} transfers {clean(source)} to {clean(target)} together: "
            f"{units.show(many.share, 'fraction', digits=3)} +/- "
            f"{units.show(many.standard_uncertainty, 'fraction', digits=3)} (k = 1), "
            f"{verdict(many.significance)}"
        )
