"""A plan as text for a terminal or a printer."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.limits.levels import limit_words
from tankcalc.limits.times import Arrival, duration
from tankcalc.report import CAUTION, wrapped

if TYPE_CHECKING:
    from tankcalc.limits.mixing import After
    from tankcalc.limits.plans import Plan
    from tankcalc.result import Result
    from tankcalc.units import System

NO_SAFETY = (
    "This plan stops nothing and watches nothing: overfill protection is a system of its own, and "
    "the absence of a warning is no sign of safety."
)

_LONG_S = 10 * 86400.0 - 60.0


def plan_lines(plan: Plan, result: Result, system: System) -> list[str]:
    """Return a plan as lines, the caution last."""
    show = _Shown(plan, system)
    lines = [
        f"{result.tank}, {result.fluid}: plan from {show.length(plan.contents.level_m)}",
        *show.now(),
        *show.limits(),
        *show.receivable(),
        *show.stop(),
        *show.after(),
        *show.design(),
        "",
    ]
    for notice in (*result.warnings, *plan.notices):
        lines += wrapped(f"Check: {notice.message}")
    return [*lines, *wrapped(NO_SAFETY), *wrapped(CAUTION)]


class _Shown:
    """The parts of one plan in one system of units."""

    def __init__(self, plan: Plan, system: System) -> None:
        self.plan = plan
        self.system = system
        name, target = plan.question.limit, plan.question.target_m
        self.target = f"{limit_words(name)}, {self.length(target)}" if name else self.length(target)

    def length(self, metres: float) -> str:
        return units.show(metres, "length", self.system)

    def volume(self, m3: float) -> str:
        return units.show(m3, "volume", self.system)

    def mass(self, kg: float) -> str:
        return units.show(kg, "mass", self.system)

    def temperature(self, kelvin: float) -> str:
        return units.show(kelvin, "temperature", self.system)

    def now(self) -> Iterator[str]:
        held = self.plan.contents
        yield _row("volume", self.volume(held.below_m3 + held.product_m3))
        yield _row("mass", self.mass(held.below_kg + held.product_kg))
        empty = held.volume_at(held.vessel.z_max) - held.volume_at(held.level_m)
        yield _row("ullage volume", self.volume(empty))

    def limits(self) -> Iterator[str]:
        """Yield room and times at every limit."""
        plan = self.plan
        if not plan.distances:
            return
        yield ""
        head = f"{'limit':<16}{'level':>11}{'room':>17}"
        flow = plan.question.flow_m3_s
        if flow is None:
            yield head
            for one in plan.distances:
                yield self._limit(one.limit, one.level_m, one.room_m3)
            return
        shown = units.show(flow, "volume_flow", self.system)
        yield f"At {shown}{'' if flow < 0.0 else ', in'}, from now:"
        yield f"{head}  {'not before':<16}at the latest"
        for one, arrival in zip(plan.distances, plan.arrivals, strict=True):
            row = self._limit(one.limit, one.level_m, one.room_m3)
            yield f"{row}  {_times(arrival)}".rstrip()
        if any(one.extrapolates for one in plan.arrivals):
            yield "* beyond the next planned reading: only if the rate stays what it is"

    def _limit(self, name: str, level_m: float, room_m3: float) -> str:
        # Feet as decimals: three of them are finer than sixteenths, and narrower.
        level = units.show(level_m, "length", self.system, digits=3)
        return f"{limit_words(name):<16}{level:>11}{self.volume(room_m3):>17}"

    def receivable(self) -> Iterator[str]:
        fits = self.plan.receivable
        yield ""
        if fits.room_m3 <= 0.0:
            yield f"To {self.target}: nothing can be received."
            yield _row("above it", self.volume(-fits.room_m3))
            return
        arriving = self.plan.question.arriving_k
        at = "" if arriving is None else f", arriving at {self.temperature(arriving)}"
        yield f"Can be received up to {self.target}{at}:"
        yield _row("volume", self.volume(fits.volume_m3))
        base = self.plan.contents.base_k
        if fits.standard_m3 is not None and base is not None:
            yield _row(f"at {self.temperature(base)}", self.volume(fits.standard_m3))
        yield _row("mass", self.mass(fits.mass_kg))

    def stop(self) -> Iterator[str]:
        stop = self.plan.stop
        if stop is None:
            return
        yield ""
        yield f"To come to rest at {self.target}:"
        yield _row("still to flow", self.volume(stop.margin_m3))
        if stop.call_m is None or stop.arrival is None:
            yield _row("call stop", "before the start: the tank has no such level")
        elif stop.arrival.passed:
            yield _row("call stop", f"now; its level, {self.length(stop.call_m)}, is passed")
        else:
            yield _row("call stop at", self.length(stop.call_m))
            for line in wrapped(f"  {stop.arrival.words().removeprefix('level: ')}"):
                yield f"  {line}" if not line.startswith("  ") else line

    def after(self) -> Iterator[str]:
        added = self.plan.question.added_kg
        if self.plan.after is None or added is None:
            return
        word = "adding" if added >= 0.0 else "taking out"
        arriving = self.plan.question.arriving_k
        at = "" if arriving is None or added < 0.0 else f" at {self.temperature(arriving)}"
        yield ""
        yield f"After {word} {self.mass(abs(added))}{at}:"
        yield from self._state(self.plan.after)

    def design(self) -> Iterator[str]:
        grown, kelvin = self.plan.grown, self.plan.question.design_k
        if grown is None or kelvin is None:
            return
        with_it = "" if self.plan.after is None else ", with what is added or taken out"
        yield ""
        yield f"At {self.temperature(kelvin)}{with_it}:"
        yield from self._state(grown)
        if self.plan.highest_m is not None:
            yield from wrapped(f"Not to pass {self.target} at that temperature, the level now is")
            yield _row("at most", self.length(self.plan.highest_m))

    def _state(self, state: After) -> Iterator[str]:
        if state.level_m is None:
            yield _row("level", f"does not fit, by {self.volume(state.over_m3)}")
        else:
            yield _row("level", self.length(state.level_m))
        yield _row("volume", self.volume(state.volume_m3))
        yield _row("mass", self.mass(state.mass_kg))
        if state.temperature_k is not None:
            yield _row("temperature", self.temperature(state.temperature_k))


def _row(label: str, value: str) -> str:
    return f"  {label:<17}{value:>18}" if len(value) <= 18 else f"  {label:<17}{value}"


def _times(arrival: Arrival) -> str:
    if arrival.passed:
        return "reached already"
    if arrival.earliest_s is None:
        return "not on the way"
    late = "not known" if arrival.latest_s is None else _short(arrival.latest_s, up=True)
    return f"{_short(arrival.earliest_s):<15} {late}{' *' if arrival.extrapolates else ''}"


def _short(seconds: float, *, up: bool = False) -> str:
    """Return a time in no more than 15 characters: from ten days on, in whole hours."""
    if seconds < _LONG_S:
        return duration(seconds, up=up)
    hours = math.ceil(seconds / 3600.0 - 1e-9) if up else math.floor(seconds / 3600.0 + 1e-9)
    return duration(3600.0 * hours).removesuffix(" 0 min")
