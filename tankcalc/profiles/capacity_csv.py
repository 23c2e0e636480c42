"""Capacity tables as CSV: two columns, a level (or ullage) and the volume up to it.

The first line names the columns with their units, ``level [mm], volume [m3]``, and plain numbers
follow; or there is no such line and every cell is a quantity. Cells are parted by commas,
semicolons or tabs; lines that are empty or begin with ``#`` are passed over.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator

from tankcalc import units
from tankcalc.errors import QuantityError
from tankcalc.profiles.findings import Findings, show
from tankcalc.profiles.leaves import UnfitError

_HEADER = re.compile(r"\s*([A-Za-z][\w ]*?)\s*\[\s*([^\]]+?)\s*\]\s*")
_NUMBER = re.compile(r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?")
_UNNAMED, _NAMES = "the columns have no units.", 'Begin with "level [m], volume [m3]".'
_WORDS = {"innage": ("level", "innage", "dip"), "ullage": ("ullage", "outage")}

Cell = Callable[[str], float]


def table_from_csv(
    held: bytes, name: str, reading: str, findings: Findings
) -> list[tuple[float, float, int]]:
    """Return (level or ullage in m, volume in m3, line) of each row; what is wrong is noted."""
    try:
        lines = _lines(held.decode("utf-8-sig"))
        first = next(lines, None)
        if first is None:
            raise UnfitError("the file holds no rows.")
        if not any(ch.isdigit() or ch == "[" for cell in first[1] for ch in cell):
            raise UnfitError(_UNNAMED, _NAMES)
        rows: list[tuple[float, float, int]] = []
        if any(_HEADER.fullmatch(cell) for cell in first[1]):
            level, volume = _columns(first[1], reading)
        else:
            level, volume = _quantity("length"), _quantity("volume")
            if not _take(rows, first, level, volume, name, findings):
                return []
    except UnicodeDecodeError:
        findings.add_beside(name, None, "this is not UTF-8 text.", "Save it as UTF-8.")
        return []
    except (UnfitError, QuantityError) as error:
        findings.add_beside(name, 1, *_said(error))
        return []
    for row in lines:
        _take(rows, row, level, volume, name, findings)
    return rows


def _lines(text: str) -> Iterator[tuple[int, list[str]]]:
    """Yield the line number and cells of every row that holds anything."""
    lines = text.split("\n")
    written = (line for line in lines if line.strip() and not line.lstrip().startswith("#"))
    first = next(written, "")
    parted = next((mark for mark in (";", "\t") if mark in first), ",")
    for number, line in enumerate(lines, start=1):
        if line.strip() and not line.lstrip().startswith("#"):
            yield number, [_unquoted(cell.strip()) for cell in line.split(parted)]


def _unquoted(cell: str) -> str:
    return cell[1:-1].strip() if len(cell) > 1 and cell[0] == cell[-1] == '"' else cell


def _columns(cells: list[str], reading: str) -> tuple[Cell, Cell]:
    """Return the readers of the two columns that a header names."""
    names = [_HEADER.fullmatch(cell) for cell in cells]
    if len(names) != 2 or names[0] is None or names[1] is None:
        raise UnfitError(_UNNAMED, _NAMES)
    word = names[0][1].lower()
    if word not in _WORDS[reading]:
        other = next((kind for kind, words in _WORDS.items() if word in words), None)
        advice = f'Call it "{_WORDS[reading][0]}"'
        advice += f', or write reading = "{other}" in the tank file.' if other else "."
        raise UnfitError(f'the first column is "{word}", the tank file reads {reading}.', advice)
    if names[1][1].lower() != "volume":
        raise UnfitError(f'the second column is "{names[1][1]}".', 'Call it "volume".')
    return _scaled("length", names[0][2]), _scaled("volume", names[1][2])


def _scaled(dimension: str, unit: str) -> Cell:
    """Return the reader of plain numbers in one unit; lengths and volumes have no offset."""
    factor = units.si(f"1 {unit}", dimension)

    def read(cell: str) -> float:
        if not _NUMBER.fullmatch(cell):
            raise UnfitError(
                f"{show(cell)} is no plain number.", "Type digits with a decimal point."
            )
        return float(cell) * factor

    return read


def _quantity(dimension: str) -> Cell:
    return lambda cell: units.si(cell, dimension)


def _take(
    rows: list[tuple[float, float, int]],
    row: tuple[int, list[str]],
    level: Cell,
    volume: Cell,
    name: str,
    findings: Findings,
) -> bool:
    """Add one row to the others; return False, with a finding, where it cannot be read."""
    number, cells = row
    try:
        if len(cells) != 2:
            raise UnfitError(
                f"two columns are wanted, found {len(cells)}.",
                "Use a decimal point, and part the columns by commas or semicolons.",
            )
        rows.append((level(cells[0]), volume(cells[1]), number))
    except (UnfitError, QuantityError) as error:
        findings.add_beside(name, number, *_said(error))
        return False
    return True


def _said(error: UnfitError | QuantityError) -> tuple[str, str]:
    if isinstance(error, QuantityError):
        return f'"{error.text}": {error.why}', error.advice
    return error.what, error.advice
