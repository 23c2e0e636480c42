"""Strapped tanks: a capacity table in the tank file, or in a CSV file beside it."""

from __future__ import annotations

import itertools
from typing import TYPE_CHECKING, NamedTuple

from tankcalc.profiles.capacity_csv import table_from_csv
from tankcalc.profiles.documents import contents
from tankcalc.profiles.findings import At, Findings
from tankcalc.profiles.leaves import UnfitError, choice, listed, pair, quantity, text
from tankcalc.profiles.tables import Table, Values, may
from tankcalc.profiles.vessels import Shaped, shaped
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.geometry import Vessel


MOST_ROWS = 30_000
"""A row for every millimetre of the tallest tank; more is no capacity table."""


class Row(NamedTuple):
    """One entry of a capacity table: level (m), volume (m3), and where it stands."""

    level_m: float
    volume_m3: float
    line: int


def _rows(values: Values, at: At, findings: Findings) -> list[Row] | None:
    """Return the table as it is written, or None after noting what is wrong."""
    if (values["table"] is None) == (values["file"] is None):
        findings.add(at, "a strapped tank takes a table or a file.", "Give one of them.")
        return None
    if values["table"] is not None:
        return [Row(first, second, n) for n, (first, second) in enumerate(values["table"])]
    name = values["file"]
    if clean(name) != name or "/" in name or "\\" in name or name.startswith("."):
        findings.add((*at, "file"), "the file must lie beside the tank's.", "Give its name alone.")
        return None
    try:
        held = contents(findings.folder / name)
    except UnfitError as wrong:
        findings.add((*at, "file"), f'"{name}": {wrong.what}', wrong.advice)
        return None
    findings.beside[name] = held
    before = len(findings)
    rows = [Row(*row) for row in table_from_csv(held, name, values["reading"], findings)]
    return rows if len(findings) == before else None


def _levels(rows: list[Row], values: Values) -> list[Row]:
    """Return the rows from the bottom up, ullages turned into levels."""
    if values["reading"] == "ullage":
        top = values["reference_height"]
        rows = [Row(top - row.level_m, row.volume_m3, row.line) for row in rows]
    return rows[::-1] if len(rows) > 1 and rows[0].level_m > rows[-1].level_m else rows


def _is_sound(rows: list[Row], values: Values, at: At, findings: Findings) -> bool:
    """Return whether levels and volumes both rise, noting every row that does not."""
    before = len(findings)

    def note(row: Row, what: str, advice: str = "") -> None:
        if values["file"] is None:
            findings.add((*at, "table", row.line), what, advice)
        else:
            findings.add_beside(values["file"], row.line, what, advice)

    for n in range(1, len(rows)):
        low, high = rows[n - 1], rows[n]
        if high.level_m > low.level_m and high.volume_m3 > low.volume_m3:
            continue
        suspect = _suspect(rows, n)
        note(
            rows[suspect],
            f"{_told(high)} does not lie above {_told(low)}.",
            f"Check the typing: {_told(rows[suspect])} breaks the run{_expected(rows, suspect)}.",
        )
    return len(findings) == before


def _told(row: Row) -> str:
    return f"({row.level_m:g} m, {row.volume_m3:g} m3)"


def _expected(rows: list[Row], n: int) -> str:
    if not 0 < n < len(rows) - 1 or rows[n + 1].level_m <= rows[n - 1].level_m:
        return ""
    return f"; its neighbours suggest about {_between(rows, n):.6g} m3"


def _between(rows: list[Row], n: int) -> float:
    """Return the volume (m3) that the neighbours of a row suggest at its level."""
    low, high = rows[n - 1], rows[n + 1]
    share = (rows[n].level_m - low.level_m) / (high.level_m - low.level_m)
    return low.volume_m3 + share * (high.volume_m3 - low.volume_m3)


def _suspect(rows: list[Row], n: int) -> int:
    """Return which of rows n - 1 and n breaks the run: the one whose absence mends it."""

    def rises(low: int, high: int) -> bool:
        if low < 0 or high >= len(rows):
            return True
        return rows[high].level_m > rows[low].level_m and rows[high].volume_m3 > rows[low].volume_m3

    return n - 1 if rises(n - 2, n) and not rises(n - 1, n + 1) else n


def slips(levels_m: list[float], volumes_m3: list[float]) -> list[tuple[int, float]]:
    """Return the rows of a rising table that look mistyped, with the volume (m3) expected there.

    Notes
    -----
    One wrong digit makes the area (dV/dz) too large on one side of its row and too small on the
    other, while the areas beyond agree: second differences of one size and changing sign. A
    row is named where the two areas differ from those beyond by more than a tenth, to opposite
    sides, and those beyond differ from each other by less than a twentieth.

    Examples
    --------
    >>> slips([0.0, 1.0, 2.0, 3.0, 4.0, 5.0], [0.0, 10.0, 20.0, 33.0, 40.0, 50.0])
    [(3, 30.0)]
    >>> slips([0.0, 1.0, 2.0, 3.0, 4.0, 5.0], [0.0, 5.0, 15.0, 30.0, 50.0, 75.0])
    []
    """
    found = []
    rows = [Row(z, v, n) for n, (z, v) in enumerate(zip(levels_m, volumes_m3, strict=True))]
    areas = [
        (high.volume_m3 - low.volume_m3) / (high.level_m - low.level_m)
        for low, high in itertools.pairwise(rows)
    ]
    for n in range(2, len(rows) - 2):
        usual = 0.5 * (areas[n - 2] + areas[n + 1])
        below, above = areas[n - 1] - usual, areas[n] - usual
        agree = abs(areas[n - 2] - areas[n + 1]) < 0.05 * usual
        if agree and below * above < 0.0 and min(abs(below), abs(above)) > 0.1 * usual:
            found.append((n, _between(rows, n)))
    return found


def _ullages_are_clear(values: Values, at: At, findings: Findings) -> bool:
    before = len(findings)
    if values["reading"] == "ullage":
        if values["reference_height"] is None:
            findings.add((*at, "reference_height"), "missing.", "An ullage is measured from it.")
        if values["datum"] is not None:
            findings.add(
                (*at, "datum"),
                "a table of ullages has its datum in reference_height.",
                "Leave this key out.",
            )
    return len(findings) == before


def _strapped(values: Values, at: At, findings: Findings) -> Shaped | None:
    """Return the vessel of a capacity table."""
    if not _ullages_are_clear(values, at, findings):
        return None
    rows = _rows(values, at, findings)
    if rows is None:
        return None
    rows = _levels(rows, values)
    if not _is_sound(rows, values, at, findings):
        return None

    def make(_values: Values) -> Vessel:
        from tankcalc.geometry import strapped

        return strapped([row.level_m for row in rows], [row.volume_m3 for row in rows])

    return shaped(make, values, at, findings)


_LEVEL = quantity("length")
_VOLUME = quantity("volume", "not negative")

STRAPPED = Table(
    {
        "table": may(listed(pair(_LEVEL, _VOLUME), least=2, most=MOST_ROWS)),
        "file": may(text()),
        "reading": may(choice("innage", "ullage"), "innage"),
        "reference_height": may(quantity("length", "positive")),
        "datum": may(_LEVEL),
    },
    _strapped,
)
