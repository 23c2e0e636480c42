"""Tables of a profile file: their keys, strictly checked, and what is built from them.

The flat keys of a table are checked by pydantic's engine (pydantic-core) with every setting
strict. Its model classes are not used: making them takes 0.15 s on a small machine, more than
everything else that a conversion does besides loading NumPy.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import cached_property
from typing import Any, NamedTuple, Protocol, cast

from pydantic_core import CoreConfig, CoreSchema, SchemaValidator, ValidationError, core_schema

from tankcalc.errors import QuantityError
from tankcalc.profiles.findings import MOST, At, Findings, did_you_mean, nearest, show
from tankcalc.profiles.leaves import UnfitError

STRICT = CoreConfig(strict=True, extra_fields_behavior="forbid", allow_inf_nan=False)

Values = dict[str, Any]
"""What the keys of one table hold, read; keys that were left out hold their default."""

Build = Callable[[Values, At, Findings], Any]
"""Makes an object of a table's values; None, with a finding, where they make none."""


class Part(Protocol):
    """What a key holds when it is more than one plain value."""

    def read(self, value: object, at: At, findings: Findings) -> Any:
        """Return what the value means, or None after noting what is wrong with it."""


class Key(NamedTuple):
    """One key of a table: what it holds, whether it must be there, its value when it is not."""

    holds: CoreSchema | Part
    needed: bool = True
    default: Any = None


def need(holds: CoreSchema | Part) -> Key:
    """Return a key that must be there."""
    return Key(holds)


def may(holds: CoreSchema | Part, default: Any = None) -> Key:
    """Return a key that may be left out."""
    return Key(holds, needed=False, default=default)


class Table:
    """The keys of a table, and what is built from them."""

    def __init__(self, keys: Mapping[str, Key], build: Build | None = None) -> None:
        self.keys = keys
        self._build = build
        self._parts: dict[str, Part] = {}
        self._leaves: dict[str, CoreSchema] = {}
        for name, key in keys.items():
            if hasattr(key.holds, "read"):
                self._parts[name] = cast("Part", key.holds)
            else:
                self._leaves[name] = key.holds

    @cached_property
    def _validator(self) -> SchemaValidator:
        fields = {
            name: core_schema.typed_dict_field(leaf, required=self.keys[name].needed)
            for name, leaf in self._leaves.items()
        }
        return SchemaValidator(core_schema.typed_dict_schema(fields, config=STRICT))

    def read(self, value: object, at: At, findings: Findings) -> Any:
        """Return the table's values, or what is built from them; None if anything is wrong."""
        before = len(findings)
        values = self.values(value, at, findings)
        if len(findings) > before:
            return None
        return values if self._build is None else self._build(values, at, findings)

    def values(self, value: object, at: At, findings: Findings) -> Values:
        """Return what can be read of the table, noting everything wrong in it.

        Flat keys are all there or none of them.
        """
        found = {name: key.default for name, key in self.keys.items()}
        if not isinstance(value, dict):
            findings.add(at, f"a table is wanted, found {show(value)}.")
            return found
        flat = {name: held for name, held in value.items() if name not in self._parts}
        meant: set[str] = set()
        try:
            found |= self._validator.validate_python(flat)
        except ValidationError as error:
            meant = self._note(error, at, findings)
        for name, part in self._parts.items():
            if name in value:
                found[name] = part.read(value[name], (*at, name), findings)
            elif self.keys[name].needed and name not in meant:
                findings.add((*at, name), "missing.")
        return found

    def _note(self, error: ValidationError, at: At, findings: Findings) -> set[str]:
        """Note what the engine found; return the keys that misspelt ones are meant to be."""
        meant: set[str] = set()
        missing = []
        for line in error.errors(include_url=False):
            if line["type"] == "extra_forbidden":
                meant |= self._note_unknown(str(line["loc"][0]), at, findings)
            elif line["type"] == "missing" and len(line["loc"]) == 1:
                missing.append(str(line["loc"][0]))
            else:
                findings.add((*at, *line["loc"]), *said(line))
        for name in missing:
            # A misspelt key is one mistake: it is not told as missing too.
            if name not in meant:
                findings.add((*at, name), "missing.")
        return meant

    def _note_unknown(self, word: str, at: At, findings: Findings) -> set[str]:
        if len(findings) >= MOST:
            findings.add((*at, word), "unknown key.")
            return set()
        findings.add((*at, word), "unknown key.", did_you_mean(word, self.keys))
        near = nearest(word, self.keys)
        return set() if near is None else {near}


class ListOf:
    """A list of tables, or of other parts."""

    def __init__(self, part: Part, least: int = 1) -> None:
        self.part = part
        self.least = least

    def read(self, value: object, at: At, findings: Findings) -> list[Any] | None:
        """Return what each entry means, or None if any is wrong."""
        if not isinstance(value, list):
            brackets = f"Write [[{at[-1]}]], in double brackets." if isinstance(value, dict) else ""
            findings.add(at, f"a list is wanted, found {show(value)}.", brackets)
            return None
        if len(value) < self.least:
            findings.add(at, "the list is empty.")
            return None
        before = len(findings)
        read = [self.part.read(item, (*at, n), findings) for n, item in enumerate(value)]
        return read if len(findings) == before else None


class Named:
    """A table whose keys are names of the user's choice."""

    def __init__(self, part: Part) -> None:
        self.part = part

    def read(self, value: object, at: At, findings: Findings) -> dict[str, Any] | None:
        """Return what each name holds, or None if any is wrong."""
        if not isinstance(value, dict):
            findings.add(at, f"a table is wanted, found {show(value)}.")
            return None
        before = len(findings)
        read = {name: self.part.read(held, (*at, name), findings) for name, held in value.items()}
        return read if len(findings) == before else None


class Loose:
    """A table whose sound entries count although others are wrong."""

    def __init__(self, table: Table) -> None:
        self.table = table

    def read(self, value: object, at: At, findings: Findings) -> Values:
        """Return what each key holds; None where it is left out or wrong."""
        return self.table.values(value, at, findings)


class ByKind:
    """A table whose key (``kind``, ``model``) says which keys the others may be."""

    def __init__(self, key: str, tables: Mapping[str, Part]) -> None:
        self.key = key
        self.tables = tables

    def read(self, value: object, at: At, findings: Findings) -> Any:
        """Return what the table of that kind means, or None after noting what is wrong."""
        if not isinstance(value, dict):
            findings.add(at, f"a table is wanted, found {show(value)}.")
            return None
        kind = value.get(self.key)
        if isinstance(kind, str) and kind in self.tables:
            rest = {name: held for name, held in value.items() if name != self.key}
            return self.tables[kind].read(rest, at, findings)
        known = f"Choose from {', '.join(self.tables)}."
        if kind is None:
            near = nearest(self.key, value)
            meant = f"Is {show(near)} meant to be it? " if near else ""
            findings.add((*at, self.key), "missing.", meant + known)
        else:
            meant = did_you_mean(kind, self.tables) if isinstance(kind, str) else known
            findings.add((*at, self.key), f"{show(kind)} is no {self.key} known here.", meant)
        return None


def said(line: Any) -> tuple[str, str]:
    """Return what was found and what to do, of one error of the engine."""
    held = show(line["input"])
    match line["type"]:
        case "value_error":
            error = line["ctx"]["error"]
            if isinstance(error, UnfitError):
                return error.what, error.advice
            if isinstance(error, QuantityError):
                return f'"{error.text}": {error.why}', error.advice
            return str(error), ""
        case "missing":
            return "missing.", ""
        case "bool_type":
            return f"true or false is wanted, without quotes, found {held}.", ""
        case "float_type" | "finite_number":
            return f"a plain number is wanted, found {held}.", ""
        case "int_type" | "int_from_float":
            return f"a whole number is wanted, found {held}.", ""
        case "list_type" | "tuple_type":
            return f"a list is wanted, found {held}.", ""
        case "too_short" | "too_long":
            bound = line["ctx"].get("min_length", line["ctx"].get("max_length"))
            word = "at least" if line["type"] == "too_short" else "at most"
            return f"{word} {bound} entries are wanted, found {line['ctx']['actual_length']}.", ""
        case "greater_than_equal":
            return f"{held} is below {line['ctx']['ge']:g}.", ""
        case "less_than_equal":
            return f"{held} is above {line['ctx']['le']:g}.", ""
    return str(line["msg"]), ""
