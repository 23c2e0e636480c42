"""Rows of a table made ready to be entries; everything that is wrong with any of them is found."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from functools import cache
from typing import TYPE_CHECKING, Any
from zoneinfo import ZoneInfo

from tankcalc.errors import InputError
from tankcalc.shiftlog import kinds
from tankcalc.shiftlog.make import LONGEST_NAME, LONGEST_NOTE, note_entry, reading_entry
from tankcalc.shiftlog.make_corrections import amended_movement, amended_reading, withdrawal_entry
from tankcalc.shiftlog.make_words import movement_entry
from tankcalc.shiftlog.spreadsheet_columns import FACTS, Columns
from tankcalc.shiftlog.times import parse_time, zone_named
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.profiles import Site
    from tankcalc.result import Result
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.spreadsheet import Cells
    from tankcalc.tank import Tank

TAKEN = (kinds.READING, kinds.NOTE, kinds.MOVEMENT, *kinds.CORRECTIONS)
"""Kinds that are imported. The others record what people did at the console, at that time."""

Make = Callable[["Entry | None"], "Entry"]
"""Makes a row's entry, given the entry that it corrects."""

_MOVING = ("", "static", "receiving", "delivering")
_LONGEST = {"note": LONGEST_NOTE, "reason": LONGEST_NOTE, "who": LONGEST_NAME}


@dataclass(frozen=True, slots=True)
class Planned:
    """A row that can be an entry: its number, its time, what it is called and corrects, if any."""

    row: int
    t_us: int
    id: str
    about: str
    make: Make


class Planner:
    """Turns rows into entries to be; collects what is wrong, so that all of it can be said."""

    def __init__(self, site: Site, columns: Columns, now_us: int) -> None:
        self.problems: list[str] = list(columns.problems)
        self.left_out: dict[str, int] = {}
        self._site = site
        # A file has many rows of few tanks.
        self._tank_named: Callable[[str], Tank] = cache(site.tank)
        self._columns = columns
        self._now_us = now_us
        self._zone: ZoneInfo = zone_named(site.time_zone)
        self._kinds: dict[str, str] = {}

    def plan(self, rows: Iterable[tuple[int, Cells]]) -> list[Planned]:
        """Return the rows that can be entries; what is wrong with the others is in ``problems``."""
        planned = []
        for number, cells in rows:
            facts = {name: self._columns.fact(cells, name) for name in FACTS}
            typed, wrong = self._columns.typed(cells)
            kind = facts["kind"] or _kind_of(typed, facts)
            if kind in kinds.KINDS and kind not in TAKEN:
                self.left_out[kind] = self.left_out.get(kind, 0) + 1
                continue
            try:
                if wrong:
                    raise InputError("\n".join(wrong))
                planned.append(self._one(number, kind, facts, typed))
            except InputError as error:
                self.problems += [f"row {number}: {line}" for line in str(error).splitlines()]
        return planned

    def _one(self, row: int, kind: str, facts: dict[str, str], typed: dict[str, str]) -> Planned:
        self._check(facts)
        t_us = parse_time(facts["time"], self._zone, self._now_us)
        about = facts["amends"]
        if kind in kinds.CORRECTIONS:
            if about not in self._kinds:
                raise InputError("it corrects an entry that no row above it holds.")
            if not facts["reason"]:
                raise InputError("an earlier entry is corrected for a reason.")
        work = {
            kinds.READING: self._reading,
            kinds.NOTE: self._note,
            kinds.MOVEMENT: self._movement,
            kinds.AMENDMENT: self._amendment,
            kinds.WITHDRAWAL: self._withdrawal,
        }.get(kind)
        if work is None:
            why = f'"{clean(kind)}" is no kind of entry.' if kind else "there is nothing in it."
            raise InputError(why)
        make = work(facts, typed, t_us)
        if facts["id"] in self._kinds:
            raise InputError("its id stands in a row above it already.")
        if facts["id"]:
            self._kinds[facts["id"]] = self._kinds[about] if kind == kinds.AMENDMENT else kind
        return Planned(row, t_us, facts["id"], about if about in self._kinds else "", make)

    def _check(self, facts: dict[str, str]) -> None:
        if not facts["time"]:
            raise InputError("it has no time.")
        if facts["site"] not in ("", self._site.name):
            there, here = clean(facts["site"]), clean(self._site.name)
            raise InputError(f'it is of the site "{there}", and this is "{here}".')
        if facts["moving"] not in _MOVING:
            raise InputError(
                f'moving: "{clean(facts["moving"])}" is none of static, receiving, delivering.'
            )
        for name, most in _LONGEST.items():
            if len(facts[name]) > most:
                raise InputError(f"{name} has {len(facts[name])} characters; {most} is the most.")

    def _reading(self, facts: dict[str, str], typed: dict[str, str], t_us: int) -> Make:
        tank, fluid = self._liquid(facts)
        _check_readings(tank, typed)
        common = self._common(facts) | {
            "movement": facts["moving"],
            "witness": facts["witness"],
            "reason": facts["reason"],
            "rejected": facts["judgement"] == "rejected" and bool(facts["reason"]),
        }

        def make(original: Entry | None) -> Entry:
            found: dict[str, Any] = {
                "tank": tank,
                "fluid": fluid,
                "typed": typed,
                "result": _answer(tank, fluid, typed),
                "t_us": t_us,
            }
            if original is None:
                return reading_entry(**common, **found)
            return amended_reading(original=original, **common, **found)

        return make

    def _note(self, facts: dict[str, str], typed: dict[str, str], t_us: int) -> Make:
        tank = self._tank_named(facts["tank"]) if facts["tank"] else None
        if typed:
            raise InputError("a note holds no reading.")
        entry = note_entry(**self._common(facts), tank=tank, t_us=t_us)
        declared = {name: facts[name] for name in ("fault", "instrument") if facts[name]}
        if declared and (len(declared) < 2 or facts["fault"] not in ("opened", "closed")):
            raise InputError('a fault is "opened" or "closed", of an instrument.')
        # A note may be about an earlier one: that a fault is closed.
        return lambda about: replace(entry, typed=declared, ref=about.uid if about else None)

    def _movement(self, facts: dict[str, str], typed: dict[str, str], t_us: int) -> Make:
        if typed:
            raise InputError("a movement holds no reading.")
        entry = movement_entry(
            **self._common(facts),
            received=facts["received"],
            delivered=facts["delivered"],
            drawn=facts["drawn"],
            tank=self._tank(facts),
            other=self._tank_named(facts["other"]) if facts["other"] else None,
            t_us=t_us,
        )
        return lambda _: entry

    def _amendment(self, facts: dict[str, str], typed: dict[str, str], t_us: int) -> Make:
        if self._kinds[facts["amends"]] == kinds.READING:
            return self._reading(facts, typed, t_us)
        if self._kinds[facts["amends"]] != kinds.MOVEMENT:
            raise InputError("only a reading or a movement can be amended.")
        moved = self._movement(facts, typed, t_us)(None)

        def make(original: Entry | None) -> Entry:
            assert original is not None
            return amended_movement(
                **self._common(facts),
                original=original,
                tank=self._tank(facts),
                other=self._tank_named(facts["other"]) if facts["other"] else None,
                received=facts["received"],
                delivered=facts["delivered"],
                drawn=facts["drawn"],
                reason=facts["reason"],
                t_us=moved.t_us,
            )

        return make

    def _withdrawal(self, facts: dict[str, str], typed: dict[str, str], t_us: int) -> Make:
        if self._kinds[facts["amends"]] not in kinds.WITHDRAWABLE:
            raise InputError("only a reading, a movement or a note can be withdrawn.")

        def make(original: Entry | None) -> Entry:
            assert original is not None
            return withdrawal_entry(
                site=self._site,
                original=original,
                reason=facts["reason"],
                now_us=self._now_us,
                who=facts["who"],
            )

        return make

    def _common(self, facts: dict[str, str]) -> dict[str, Any]:
        """Return what every entry is made with."""
        return {
            "site": self._site,
            "now_us": self._now_us,
            "note": facts["note"],
            "who": facts["who"],
        }

    def _tank(self, facts: dict[str, str]) -> Tank:
        if not facts["tank"]:
            raise InputError("it names no tank.")
        return self._tank_named(facts["tank"])

    def _liquid(self, facts: dict[str, str]) -> tuple[Tank, Fluid]:
        tank = self._tank(facts)
        return tank, self._site.fluid_for(tank, facts["fluid"] or None)


def _kind_of(typed: dict[str, str], facts: dict[str, str]) -> str:
    """Return the kind that a row without one has."""
    if typed:
        return kinds.READING
    if any(facts[way] for way in kinds.WAYS):
        return kinds.MOVEMENT
    return kinds.NOTE if facts["note"] else ""


def _check_readings(tank: Tank, typed: dict[str, str]) -> None:
    from tankcalc.typed import readings_from_text

    if not typed:
        raise InputError("it has no reading.")
    _, problems = readings_from_text(tank, typed)
    if problems:
        raise InputError("\n".join(f"{name} {why}" for name, why in problems.items()))


def _answer(tank: Tank, fluid: Fluid, typed: dict[str, str]) -> Result:
    from tankcalc.typed import readings_from_text
    from tankcalc.uncertainty import answered

    readings, _ = readings_from_text(tank, typed)
    return answered(tank, fluid, readings)
