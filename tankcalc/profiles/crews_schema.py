"""``[crews]`` of site.toml: a roster that anybody can read, one line a shift, one column a date."""

from __future__ import annotations

import datetime
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from tankcalc.profiles.findings import At, Findings, show
from tankcalc.profiles.leaves import UnfitError, leaf, listed, text
from tankcalc.profiles.tables import Table, Values, need


@dataclass(frozen=True, slots=True)
class Roster:
    """Which crew works each shift, over and over.

    Attributes
    ----------
    begins : date
        Date of the first entry of every line; a shift belongs to the date it starts on.
    crews : mapping of str to tuple of str
        By the shift's name: one crew a date, then again from the first.
    """

    begins: datetime.date
    crews: Mapping[str, tuple[str, ...]]


def _date(value: object) -> datetime.date:
    """Read a date, in quotes or not."""
    if isinstance(value, datetime.date) and not isinstance(value, datetime.datetime):
        return value
    try:
        return datetime.date.fromisoformat(value if isinstance(value, str) else "")
    except ValueError:
        raise UnfitError(
            f"{show(value)} is no date.", 'Write year, month, day: "2026-01-05".'
        ) from None


class Lines:
    """The lines of a roster: names of shifts, each with a list of crews."""

    def read(self, value: object, at: At, findings: Findings) -> dict[str, tuple[str, ...]] | None:
        """Return the crews by the shift's name, or None after noting what is wrong."""
        if not isinstance(value, dict):
            findings.add(at, f"a table is wanted, found {show(value)}.")
            return None
        before = len(findings)
        line = listed(text(30))
        # A table of the very names that are there takes its messages from the one place for them.
        found = Table({name: need(line) for name in value}).values(value, at, findings)
        if len(findings) > before:
            return None
        return {name: tuple(crews) for name, crews in found.items()}


def _roster(values: Values, at: At, findings: Findings) -> Roster | None:
    if not values["roster"]:
        findings.add((*at, "roster"), "no shift is named.", 'Write lines as Day = ["A", "B"].')
        return None
    return Roster(values["begins"], MappingProxyType(values["roster"]))


CREWS = Table({"begins": need(leaf(_date)), "roster": need(Lines())}, _roster)
