"""Rows of a CSV or Excel file, with the number each has in a spreadsheet."""

from __future__ import annotations

import csv
import io
import re
import zipfile
from collections.abc import Iterator, Sequence
from contextlib import closing
from datetime import date, datetime, timedelta
from pathlib import Path
from typing import Any

from tankcalc.errors import InputError
from tankcalc.shiftlog.export_text import unguarded
from tankcalc.text import clean

MOST_BYTES = 500_000_000
"""The largest file that is read; of an Excel file, when unpacked."""

Cells = dict[str, str]
"""The texts of one row by the heading of their column; blank cells are left out."""

_ESCAPED = re.compile(r"_x005F_(?=x[0-9A-Fa-f]{4}_)")
_SEPARATORS = ",;\t"


def read_rows(path: Path) -> tuple[tuple[str, ...], Iterator[tuple[int, Cells]]]:
    """Return the headings of a ``.csv`` or ``.xlsx`` file, and its rows with their numbers.

    A formula is never worked out: in CSV it is text like any other, in Excel what counts is the
    value that was stored with it.

    Raises
    ------
    InputError
        The file cannot be read, is neither, or has no headings, or one of them twice; while
        the rows are read: a row has more cells than there are headings.
    """
    lines = _lines(path)
    try:
        _, first = next(lines)
    except StopIteration:
        raise InputError(f"{clean(path.name)} is empty.") from None
    headings = [text.strip() for text in first]
    while headings and not headings[-1]:
        headings.pop()
    if not headings:
        raise InputError(f"{clean(path.name)} has no headings in its first row.")
    for text in headings:
        if not text or headings.count(text) > 1:
            why = f'the heading "{clean(text)}" twice' if text else "a column without a heading"
            raise InputError(f"{clean(path.name)} has {why}.")
    return tuple(headings), _by_heading(path, headings, lines)


def _by_heading(
    path: Path, headings: Sequence[str], lines: Iterator[tuple[int, list[str]]]
) -> Iterator[tuple[int, Cells]]:
    for number, texts in lines:
        if any(text.strip() for text in texts[len(headings) :]):
            raise InputError(
                f"{clean(path.name)}: row {number} has more cells than there are headings."
            )
        cells = {
            heading: text for heading, text in zip(headings, texts, strict=False) if text.strip()
        }
        if cells:
            yield number, cells


def _lines(path: Path) -> Iterator[tuple[int, list[str]]]:
    kind = path.suffix.lower()
    if kind == ".csv":
        return _csv_lines(path)
    if kind == ".xlsx":
        return _excel_lines(path)
    raise InputError(f'"{clean(path.name)}" ends neither in .csv nor in .xlsx.')


def _csv_lines(path: Path) -> Iterator[tuple[int, list[str]]]:
    text = _text_of(path)
    first = text.partition("\n")[0]
    separator = max(_SEPARATORS, key=first.count)
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=separator, strict=True)
    number = 0
    try:
        for number, cells in enumerate(reader, 1):
            yield number, [unguarded(text) for text in cells]
    except csv.Error as error:
        raise InputError(
            f"{clean(path.name)}: row {number + 1} cannot be read: {clean(str(error))}."
        ) from error


def _text_of(path: Path) -> str:
    try:
        if path.stat().st_size > MOST_BYTES:
            raise InputError(f"{clean(path.name)} is larger than {MOST_BYTES // 10**6} MB.")
        return path.read_bytes().decode("utf-8-sig")
    except OSError as error:
        raise _unreadable(path, error) from error
    except UnicodeDecodeError as error:
        raise InputError(
            f'{clean(path.name)} is no UTF-8 text. Save it as "CSV UTF-8", or as .xlsx.'
        ) from error


def _excel_lines(path: Path) -> Iterator[tuple[int, list[str]]]:
    openpyxl = _openpyxl()
    _check_size(path)
    # openpyxl raises whatever the damaged part of a file makes it raise.
    try:
        book = openpyxl.load_workbook(path, read_only=True, data_only=True, keep_links=False)
    except Exception as error:
        raise _damaged(path) from error
    with closing(book):
        if not book.worksheets:
            raise InputError(f"{clean(path.name)} has no sheet with cells.")
        rows = book.worksheets[0].iter_rows(values_only=True)
        number = 0
        while True:
            try:
                row = next(rows, None)
            except Exception as error:
                raise _damaged(path) from error
            if row is None:
                return
            number += 1
            yield number, [_excel_text(value) for value in row]


def _excel_text(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, datetime):
        # Excel keeps a time as a fraction of a day: what was typed is the nearest second.
        return (value + timedelta(seconds=0.5)).replace(microsecond=0).isoformat(sep=" ")
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, float) and value.is_integer() and abs(value) < 1e15:
        return str(int(value))
    if isinstance(value, float):
        return repr(value)
    # Text that looks like the format's own escapes is escaped, and openpyxl leaves it so.
    return _ESCAPED.sub("_", str(value))


def _check_size(path: Path) -> None:
    try:
        with zipfile.ZipFile(path) as parts:
            size = sum(part.file_size for part in parts.infolist())
    except OSError as error:
        raise _unreadable(path, error) from error
    except zipfile.BadZipFile as error:
        raise _damaged(path) from error
    if size > MOST_BYTES:
        raise InputError(f"{clean(path.name)} unpacks to more than {MOST_BYTES // 10**6} MB.")


def _unreadable(path: Path, error: OSError) -> InputError:
    return InputError(f"{clean(str(path))} cannot be read: {error.strerror or 'it failed'}.")


def _damaged(path: Path) -> InputError:
    return InputError(f"{clean(path.name)} is no Excel file, or a damaged one.")


def _openpyxl() -> Any:
    try:
        import openpyxl
    except ImportError as error:
        raise InputError(
            'an Excel file needs openpyxl, which is not installed: pip install "tankcalc[xlsx]".'
            " Or save it as CSV."
        ) from error
    return openpyxl
