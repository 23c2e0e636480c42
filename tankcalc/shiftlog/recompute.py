"""Working every logged result out again, from what was typed and the profiles as they were."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from tankcalc import __version__
from tankcalc.errors import InputError, StoreError, TankcalcError
from tankcalc.result import as_json
from tankcalc.shiftlog.earlier import LOOK, held_against_log
from tankcalc.shiftlog.kinds import AMENDMENT, READING
from tankcalc.shiftlog.listing import holds_readings

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.result import Result
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Row, Store
    from tankcalc.tank import Tank

TOLERANCE = 1e-12
"""Relative: what another machine's arithmetic may differ by."""

PROFILES_AT_ONCE = 256
"""Tanks and fluids kept ready, of those that lie behind the entries."""

HISTORY_CODES = frozenset(
    {"stuck_value", "copied_value", "rate_too_high", "direction_contradicts", "moves_while_static"}
)
"""Warnings that come from earlier readings."""

_MISSING = object()


@dataclass(frozen=True, slots=True)
class Difference:
    """A figure that does not come out as it was stored."""

    key: str
    stored: Any
    now: Any

    def __str__(self) -> str:
        return f"{self.key} was {_said(self.stored)}, is {_said(self.now)}"


@dataclass(frozen=True, slots=True)
class Recomputed:
    """A result that was worked out again.

    Attributes
    ----------
    row : Row
        The entry.
    differences : tuple of Difference
        What differs; empty: it is reproduced.
    problem : str
        Why it could not be worked out at all; else empty.
    """

    row: Row
    differences: tuple[Difference, ...] = ()
    problem: str = ""

    @property
    def reproduced(self) -> bool:
        """Whether it came out as it was stored."""
        return not self.differences and not self.problem

    @property
    def program(self) -> str:
        """The version of the program that made the entry, where that is another; else empty."""
        made_by = self.row.entry.program
        return "" if made_by == __version__ else made_by


def recompute(store: Store) -> Iterator[Recomputed]:
    """Yield every reading and amendment of a log, worked out again; in the order of the log.

    Each is held against the earlier entries that its maker knew, as it was then. Where those lie
    in an archive that the log goes on from, what they gave rise to is left out on both sides.
    """
    profiles = _Profiles(store)
    first = None
    for row in store.between(None, None):
        first = row.seq if first is None else first
        if row.entry.kind in (READING, AMENDMENT) and holds_readings(row.entry):
            yield _again(store, profiles, row, cut=first > 1)


def differences(stored: Mapping[str, Any], now: Mapping[str, Any]) -> Iterator[Difference]:
    """Yield every figure and word in which two results differ, by its path of keys.

    Examples
    --------
    >>> list(differences({"a": [1.0, 2.0]}, {"a": [1.0, 2.0 + 1e-14]}))
    []
    >>> [str(d) for d in differences({"a": {"b": 1.0}, "c": None}, {"a": {"b": 1.5}, "c": None})]
    ['a.b was 1.0, is 1.5']
    """
    old, new = dict(_leaves(stored)), dict(_leaves(now))
    for key in (*old, *(key for key in new if key not in old)):
        before, after = old.get(key, _MISSING), new.get(key, _MISSING)
        if not _same(before, after):
            yield Difference(key, before, after)


class _Profiles:
    """The tanks and fluids that entries rest on, as they were."""

    def __init__(self, store: Store) -> None:
        self._store = store
        self.of = lru_cache(PROFILES_AT_ONCE)(self._of)

    def _of(self, site: str, tank: tuple[str, str], fluid: tuple[str, str]) -> tuple[Tank, Fluid]:
        from tankcalc.shiftlog.kept_files import tank_and_fluid

        try:
            text, tank_text, fluid_text = (
                self._store.get_config(version) for version in (site, tank[1], fluid[1])
            )
        except KeyError as error:
            raise InputError("a text it rests on is not in the log.") from error
        return tank_and_fluid(text, (tank[0], tank_text), (fluid[0], fluid_text))[1:]


def _again(store: Store, profiles: _Profiles, row: Row, *, cut: bool) -> Recomputed:
    """Return a row worked out again; ``cut`` says that the log goes on from an archive."""
    entry = row.entry
    try:
        versions = [entry.versions.get(name, "") for name in ("site", "tank", "fluid")]
        if entry.tank is None or entry.fluid is None or not all(versions):
            raise InputError("it does not say what it rests on.")
        site, tank_version, fluid_version = versions
        tank, fluid = profiles.of(site, (entry.tank, tank_version), (entry.fluid, fluid_version))
        newest = min(entry.seen or row.seq, row.seq - 1)
        rows = store.tail(LOOK, tank=entry.tank, before=newest + 1)
        now = as_json(_result(tank, fluid, entry, rows))
    except StoreError:
        raise
    except TankcalcError as error:
        return Recomputed(row, problem=str(error))
    stored = entry.result or {}
    if cut and len(rows) < LOOK:
        stored, now = _without_history(stored), _without_history(now)
    return Recomputed(row, tuple(differences(stored, now)))


def _without_history(result: Mapping[str, Any]) -> dict[str, Any]:
    """Return a result without what earlier readings say of it; its status then says nothing."""
    warnings = result.get("warnings", ())
    kept = [warning for warning in warnings if warning.get("code") not in HISTORY_CODES]
    return {**result, "warnings": kept, "status": "refused" * (result.get("status") == "refused")}


def _result(tank: Tank, fluid: Fluid, entry: Entry, rows: list[Row]) -> Result:
    from tankcalc.typed import readings_from_text
    from tankcalc.uncertainty import answered

    readings, problems = readings_from_text(tank, entry.typed)
    if problems:
        name, why = next(iter(problems.items()))
        raise InputError(f"{name} {why}")
    found = answered(tank, fluid, readings)
    return held_against_log(
        found, rows, tank, fluid, entry.typed, entry.t_us, entry.movement, entry.ref
    )


def _leaves(data: Any, path: str = "") -> Iterator[tuple[str, Any]]:
    if isinstance(data, Mapping):
        for key, value in data.items():
            yield from _leaves(value, f"{path}.{key}" if path else str(key))
    elif isinstance(data, list | tuple):
        for number, value in enumerate(data):
            yield from _leaves(value, f"{path}.{number}")
    else:
        yield path, data


def _same(before: Any, after: Any) -> bool:
    numbers = all(
        isinstance(value, int | float) and not isinstance(value, bool) for value in (before, after)
    )
    return math.isclose(before, after, rel_tol=TOLERANCE) if numbers else before == after


def _said(value: Any) -> str:
    if value is _MISSING:
        return "missing"
    return f'"{value}"' if isinstance(value, str) else str(value)
