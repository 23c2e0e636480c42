"""What a key of a fluid file holds, as one line of text, and back: led by the file's own schema.

A list is written as "1 m: 860 kg/m3, 5 m: 855 kg/m3", rows of lists as "1 kg/m3, 2 kg/m3; 3 kg/m3,
4 kg/m3", names with fractions as "methane: 0.92, ethane: 0.08"; anything may be written as it
would stand in the file, in brackets. No model is named here, so a new one needs nothing of this.
"""

from __future__ import annotations

import re
import tomllib
from contextlib import suppress
from pathlib import Path
from typing import Any

from tankcalc.profiles.findings import Finding, Findings
from tankcalc.profiles.tables import Key, Table

_NUMBER = re.compile(r"[+-]?\d+(\.\d+)?([eE][+-]?\d+)?")
_WANTED = re.compile(r"^(.*?) (?:is|are) wanted(.*), found None\.$")
_TABLE = re.compile(r"\{ *(.*?) *\}")

Holds = Any
"""What a `Key` holds: a schema of the validation engine, or a part of a table."""


def problems_with(holds: Holds, value: object) -> list[Finding]:
    """Return what the schema finds wrong with a value."""
    findings = Findings(Path())
    Table({"it": Key(holds)}).read({"it": value}, (), findings)
    return findings.listed()


def takes(holds: Holds) -> str:
    """Return what a key takes, in the schema's own words.

    Examples
    --------
    >>> from tankcalc.profiles.leaves import listed, pair, quantity
    >>> takes(quantity("density"))
    'a number with a unit, such as "845 kg/m3"'
    >>> takes(listed(pair(quantity("length"), quantity("density"))))
    '12.5 m: 845 kg/m3, and so on, a comma between'
    """
    item = _item_of(holds)
    if item is not None:
        inner = _item_of(item)
        if inner is not None:
            return f"{_example(inner)}, ...; a comma between figures, a semicolon between rows"
        return f"{_example(item)}, and so on, a comma between"
    found = problems_with(holds, None)
    if not found:
        return ""
    wanted = _WANTED.match(found[0].what)
    if wanted is None:
        return found[0].advice.rstrip(".")
    words = (wanted[1] + wanted[2]).replace(", in quotes", "").replace(" in quotes", "")
    return as_typed(words)


def as_typed(words: str) -> str:
    """Return words about a file with the tables in them as they are typed here.

    Examples
    --------
    >>> as_typed("such as { methane = 0.92, ethane = 0.08 }.")
    'such as methane: 0.92, ethane: 0.08.'
    """
    words = words.replace("a table of names and fractions", "names with fractions")
    return _TABLE.sub(lambda table: table[1].replace(" = ", ": "), words)


def _example(item: Holds) -> str:
    """Return one entry of a list as it may be typed."""
    parts = item.get("items_schema") if isinstance(item, dict) else None
    if not isinstance(parts, list):
        return _sample(item)
    return ": ".join(_sample(part) for part in parts)


def _sample(holds: Holds) -> str:
    quoted = re.search(r'such as (?:[\d.]+ or )?"([^"]*)"', takes(holds))
    return quoted[1] if quoted else takes(holds)


def meant(holds: Holds, text: str) -> Any:
    """Return what was typed as a file would state it; what it cannot be is left as text.

    Examples
    --------
    >>> from tankcalc.profiles.leaves import listed, pair, quantity
    >>> meant(listed(pair(quantity("length"), quantity("density"))), "1 m: 860 kg/m3; 2 m: 9")
    [['1 m', '860 kg/m3'], ['2 m', '9']]
    """
    text = text.strip()
    if text[:1] in ("[", "{", '"'):
        with suppress(tomllib.TOMLDecodeError, RecursionError, ValueError):
            return tomllib.loads(f"it = {text}")["it"]
    item = _item_of(holds)
    if item is not None:
        by_semicolon = _item_of(item) is not None
        return [meant(item, row) for row in (_lines(text) if by_semicolon else _rows(text))]
    kind = holds.get("type") if isinstance(holds, dict) else None
    if kind == "tuple":
        return _cells(holds["items_schema"], text)
    return _plain(kind, holds, text)


def _plain(kind: object, holds: Holds, text: str) -> Any:
    """Return one value: text, unless the schema takes a number, a yes or a list and no text."""
    if kind == "bool":
        return {"true": True, "yes": True, "false": False, "no": False}.get(text.lower(), text)
    if kind in ("float", "int"):
        return _number(text)
    choices = [_number(text), text, _named(text), _rows(text), _pairs(text)]
    found = [(choice, problems_with(holds, choice)) for choice in choices]
    fitting = [choice for choice, problems in found if not problems]
    # Of what does not fit, that comes nearest which is of the kind that is wanted.
    near = [
        choice for choice, problems in found[1:] if problems and "wanted" not in problems[0].what
    ]
    return [*fitting, *near, text][0]


def _number(text: str) -> Any:
    """Return a plain number, or the text where it is none."""
    if not _NUMBER.fullmatch(text):
        return text
    return float(text) if any(mark in text for mark in ".eE") else int(text)


def _rows(text: str) -> list[str]:
    return [row.strip() for row in text.replace(";", ",").split(",") if row.strip()]


def _lines(text: str) -> list[str]:
    return [line.strip() for line in text.split(";") if line.strip()]


def _pairs(text: str) -> list[list[Any]]:
    return [[_number(cell.strip()) for cell in row.split(":")] for row in _rows(text)]


def _named(text: str) -> Any:
    """Return names with what belongs to each; the text itself where an entry has no name."""
    pairs = [row.partition(":") for row in _rows(text)]
    if not all(colon for _, colon, _ in pairs):
        return text
    return {name.strip(): _number(cell.strip()) for name, _, cell in pairs}


def _cells(schemas: list[Holds], text: str) -> list[Any]:
    cells = [cell.strip() for cell in text.split(":")]
    known = [meant(schema, cell) for schema, cell in zip(schemas, cells, strict=False)]
    return [*known, *cells[len(known) :]]


def _item_of(holds: Holds) -> Holds | None:
    """Return what the entries of a list hold; None where this is no list."""
    if isinstance(holds, dict):
        return holds.get("items_schema") if holds.get("type") == "list" else None
    return holds.part if hasattr(holds, "least") else None


def shown(holds: Holds, value: Any) -> str:
    """Return a value of a file as one line that is read back as the same.

    Examples
    --------
    >>> from tankcalc.profiles.leaves import listed, pair, quantity
    >>> shown(listed(pair(quantity("length"), quantity("density"))), [["1 m", "860 kg/m3"]])
    '1 m: 860 kg/m3'
    """
    for text in _ways(value):
        if meant(holds, text) == value:
            return text
    return _toml(value)


def _ways(value: Any) -> list[str]:
    """Return the plain ways to write a value."""
    match value:
        case bool():
            return ["true" if value else "false"]
        case dict():
            return [", ".join(f"{key}: {_cell(held)}" for key, held in value.items())]
        case list():
            rows = "; ".join(_line(entry) for entry in value)
            return [", ".join(_row(entry) for entry in value), rows]
    return [_cell(value)]


def _row(entry: Any) -> str:
    return ": ".join(map(_cell, entry)) if isinstance(entry, list) else _cell(entry)


def _line(entry: Any) -> str:
    return ", ".join(map(_cell, entry)) if isinstance(entry, list) else _cell(entry)


def _cell(value: Any) -> str:
    return value if isinstance(value, str) else _toml(value)


def _toml(value: Any) -> str:
    """Return a value as it would stand in a file, on one line."""
    import json

    match value:
        case bool():
            return "true" if value else "false"
        case str():
            return json.dumps(value, ensure_ascii=False)
        case list():
            return f"[{', '.join(map(_toml, value))}]"
        case dict():
            inner = ", ".join(f"{_bare(key)} = {_toml(held)}" for key, held in value.items())
            return f"{{ {inner} }}"
    return str(value)


def _bare(key: str) -> str:
    return key if re.fullmatch(r"[\w-]+", key, re.ASCII) else _toml(key)
