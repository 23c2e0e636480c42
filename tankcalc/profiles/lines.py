"""The line of a key in a TOML file: neither reader of TOML says where a value stands."""

from __future__ import annotations

import tomllib
from collections.abc import Sequence
from typing import Any

from tankcalc.profiles.findings import At

LARGEST_CHARACTERS = 200_000
"""Beyond this the style-preserving reader takes seconds; problems are then shown without lines."""

_MARK = "@@7f3a{}@@"


def lines_of(text: str, places: Sequence[At]) -> list[int | None]:
    """Return the one-based line of each place; None where it cannot be told.

    A mark is put at each value, the document is written out again (byte for byte as it was,
    apart from the marks), and the marks are looked for. A table is found by its header or else
    by its first entry; a missing key by the table it is missing from.
    """
    if len(text) > LARGEST_CHARACTERS:
        return [None] * len(places)
    import tomlkit
    from tomlkit.exceptions import TOMLKitError

    try:
        document = tomlkit.parse(text)
        headers = _headers(text)
        found = [_stand_in(document, headers, place) for place in places]
        leaves = dict.fromkeys(leaf for leaf in found if isinstance(leaf, tuple) and leaf)
        marks = {leaf: _MARK.format(n) for n, leaf in enumerate(leaves)}
        for leaf, mark in marks.items():
            _put(document, leaf, mark)
        marked = tomlkit.dumps(document)
    except (TOMLKitError, ValueError, RecursionError):
        # The line is a help on top of the problem itself, which is shown without it.
        return [None] * len(places)
    by_leaf = {leaf: _line(marked, mark) for leaf, mark in marks.items()}
    return [by_leaf.get(leaf) if isinstance(leaf, tuple) else leaf for leaf in found]


def _stand_in(document: Any, headers: dict[At, int], place: At) -> At | int:
    """Return the line of a table's header, or the path of the plain value that stands for a place.

    () where the file holds nothing to point at.
    """
    path: At = ()
    node = document
    for key in place:
        try:
            node = node[key]
        except (KeyError, IndexError, TypeError):
            break
        path = (*path, key)
    while isinstance(node, (dict, list)) and path:
        if path in headers:
            return headers[path]
        if not node:
            return path
        key = next(iter(node)) if isinstance(node, dict) else 0
        path, node = (*path, key), node[key]
    return path


def _headers(text: str) -> dict[At, int]:
    """Return the line of each table header, the entries of arrays of tables counted."""
    lines: dict[At, int] = {}
    counts: dict[At, int] = {}
    for number, line in enumerate(text.splitlines(), start=1):
        if not line.lstrip().startswith("["):
            continue
        try:
            node: Any = tomllib.loads(line)
        except tomllib.TOMLDecodeError:
            continue  # A line of an array or of a long text, not a header.
        path: At = ()
        while node:
            key = next(iter(node))
            path, node = (*path, key), node[key]
            if isinstance(node, list):
                counts[path] = counts.get(path, -1) + 1
                node = node[0]
            if path in counts:
                path = (*path, counts[path])
        lines.setdefault(path, number)
    return lines


def _put(document: Any, path: At, mark: str) -> None:
    node = document
    for key in path[:-1]:
        node = node[key]
    node[path[-1]] = mark


def _line(marked: str, mark: str) -> int | None:
    found = marked.find(mark)
    return marked.count("\n", 0, found) + 1 if found >= 0 else None
