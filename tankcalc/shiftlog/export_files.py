"""A table written to a file, CSV or Excel: whole and on disk, or not there at all."""

from __future__ import annotations

import csv
import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

from tankcalc.errors import InputError
from tankcalc.shiftlog.export_text import guarded
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.shiftlog.export import Cell, Table

MOST_EXCEL_ROWS = 1_048_576
_LONGEST_CELL = 32_767  # characters, the limit of the format
_OPTIONS = {
    "strings_to_formulas": False,
    "strings_to_urls": False,
    "strings_to_numbers": False,
    # A row at a time: a log need not fit into memory.
    "constant_memory": True,
}


def write_table(table: Table, path: Path, *, raw: bool = False) -> int:
    """Write a table to a ``.csv`` or ``.xlsx`` file; return the number of its rows.

    ``raw`` leaves out the apostrophe before what looks like a formula, in CSV.

    Raises
    ------
    InputError
        The file is neither, cannot be written, or cannot hold that many rows.
    """
    if not path.name:
        raise InputError(
            f'"{clean(str(path))}" names no file. Give a name ending in .csv or .xlsx.'
        )
    kind = path.suffix.lower()
    if kind not in (".csv", ".xlsx"):
        raise InputError(f'"{clean(path.name)}" ends neither in .csv nor in .xlsx.')
    with _in_place_of(path) as part:
        if kind == ".csv":
            return _write_csv(table, part, raw=raw)
        # xlsxwriter has an error of its own for a file it cannot make.
        part.touch()
        return _write_excel(table, part)


def _write_csv(table: Table, path: Path, *, raw: bool) -> int:
    count = 0
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(table.heading)
        for count, row in enumerate(table.rows, 1):  # noqa: B007 - the count is what is returned
            writer.writerow([_csv_cell(cell, raw=raw) for cell in row])
    return count


def _csv_cell(cell: Cell, *, raw: bool) -> str:
    if cell is None:
        return ""
    if isinstance(cell, str):
        return cell if raw else guarded(cell)
    return repr(cell)


def _write_excel(table: Table, path: Path) -> int:
    xlsxwriter = _xlsxwriter()
    count = 0
    with xlsxwriter.Workbook(str(path), _OPTIONS) as book:
        sheet = book.add_worksheet("log")
        sheet.freeze_panes(1, 0)
        bold = book.add_format({"bold": True})
        for place, text in enumerate(table.heading):
            sheet.write_string(0, place, text, bold)
        for count, row in enumerate(table.rows, 1):
            if count == MOST_EXCEL_ROWS:
                raise InputError("the log has more entries than an Excel sheet has rows. Use .csv.")
            for place, cell in enumerate(row):
                if isinstance(cell, str):
                    sheet.write_string(count, place, _excel_text(cell))
                elif cell is not None:
                    sheet.write_number(count, place, cell)
    return count


def _excel_text(text: str) -> str:
    if len(text) > _LONGEST_CELL:
        text = text[: _LONGEST_CELL - 1] + "…"
    # xlsxwriter would take this for markup of its own and write it as it is.
    return f" {text}"[:_LONGEST_CELL] if text.startswith("<r>") else text


def _xlsxwriter() -> Any:
    try:
        import xlsxwriter
    except ImportError as error:
        raise InputError(
            'an Excel file needs XlsxWriter, which is not installed: pip install "tankcalc[xlsx]".'
            " Or use .csv."
        ) from error
    return xlsxwriter


@contextmanager
def _in_place_of(path: Path) -> Iterator[Path]:
    """Give a file beside ``path`` to write to, which takes its place once it is whole."""
    part = path.with_name(f".{path.name}.{os.getpid()}.part")
    try:
        try:
            yield part
            with part.open("rb+") as whole:
                os.fsync(whole.fileno())
            part.replace(path)
        finally:
            part.unlink(missing_ok=True)
    except OSError as error:
        why = error.strerror or "it failed"
        raise InputError(f"{clean(str(path))} cannot be written: {why}.") from error
