"""One entry of the log, and the fixed bytes that its hash is taken over."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from types import MappingProxyType
from typing import Any

from tankcalc.shiftlog.times import LAST_US
from tankcalc.shiftlog.uid import show_uid

FORM = 1
"""Number of the canonical form; it stands in every entry, so a later form can live beside it."""

_BYTES = frozenset({"uid", "ref"})
_FLOAT = "float"
_NOTHING: Mapping[str, Any] = MappingProxyType({})


@dataclass(frozen=True, slots=True)
class Entry:
    """What one person recorded at one instant; never changed once it is in a log.

    Attributes
    ----------
    uid : bytes
        16 bytes, made with the entry: sending it again after a lost answer is harmless.
    kind : str
        "reading" or "note".
    t_us, entered_us : int
        When it was true (read off the instrument) and when it was typed, µs of UTC.
    shift, shift_date : str
        The shift that ``t_us`` falls in, and the local date on which that shift began.
    time_zone, site : str
        The site's time zone and name.
    user, console : str
        Login name from the operating system; host and process that made the entry.
    who : str
        Name or initials as typed; may be empty.
    tank, fluid : str or None
        Tank and density profile, by the names of their files.
    note : str
        Free text, kept exactly.
    typed : mapping of str to str
        Every reading as typed with its unit, by the reading's name.
    result : mapping or None
        What was computed, with the keys of ``convert --json``; None for a note.
    versions : mapping of str to str
        SHA-256 (hex) of the texts of "site", "tank" and "fluid" that the result rests on.
    program : str
        Version of this program.
    ref : bytes or None
        ``uid`` of an earlier entry that this one is about.
    reason : str
        Why it is about that one.
    movement : str
        What was declared of the tank: "static", "receiving", "delivering"; empty: nothing.
    """

    uid: bytes
    kind: str
    t_us: int
    entered_us: int
    shift: str
    shift_date: str
    time_zone: str
    site: str
    user: str
    console: str
    program: str
    who: str = ""
    tank: str | None = None
    fluid: str | None = None
    note: str = ""
    typed: Mapping[str, str] = field(default_factory=lambda: _NOTHING)
    result: Mapping[str, Any] | None = None
    versions: Mapping[str, str] = field(default_factory=lambda: _NOTHING)
    ref: bytes | None = None
    reason: str = ""
    movement: str = ""

    def __post_init__(self) -> None:
        if len(self.uid) != 16 or (self.ref is not None and len(self.ref) != 16):
            raise ValueError("an entry's identifier has 16 bytes")
        if not (0 <= self.t_us <= LAST_US and 0 <= self.entered_us <= LAST_US):
            raise ValueError("an entry's times lie in the years 1970 to 9998")

    @property
    def id(self) -> str:
        """The identifier as people see it."""
        return show_uid(self.uid)

    @property
    def status(self) -> str:
        """Status of the result: "good", "check" or "refused"; empty for a note."""
        return "" if self.result is None else str(self.result.get("status", ""))


_KINDS = {
    "str": str,
    "int": int,
    "bytes": bytes,
    "str | None": str | None,
    "bytes | None": bytes | None,
    "Mapping[str, str]": Mapping,
    "Mapping[str, Any] | None": Mapping | None,
}
_KIND_OF = {item.name: _KINDS[str(item.type)] for item in fields(Entry)}


def canonical(entry: Entry) -> bytes:
    """Return the bytes that stand for the entry in every store and on every machine.

    JSON in ASCII with sorted keys and no blanks. A float is ``{"float": float.hex()}``: exact,
    and no text that somebody typed can be mistaken for one. The entry's place in the log is not
    part of it.

    Raises
    ------
    ValueError
        A float is not finite, or a mapping uses the reserved key "float".
    TypeError
        A value is not plain data.
    """
    data: dict[str, Any] = {"form": FORM}
    for item in fields(entry):
        value = getattr(entry, item.name)
        data[item.name] = value.hex() if isinstance(value, bytes) else _plain(value)
    return json.dumps(data, sort_keys=True, separators=(",", ":"), allow_nan=False).encode("ascii")


def decoded(body: bytes) -> Entry:
    """Return the entry that canonical bytes stand for.

    Raises
    ------
    ValueError
        The bytes are no entry, or one of a form this version does not know.
    """
    try:
        data = json.loads(body.decode("ascii"), object_hook=_floats)
        if data.pop("form") != FORM:
            raise ValueError("written in a form that this version does not know")
        for key in _BYTES:
            data[key] = None if data[key] is None else bytes.fromhex(data[key])
        entry = Entry(**data)
    except (KeyError, TypeError, AttributeError, OverflowError, RecursionError) as error:
        raise ValueError("not an entry") from error
    if not _is_sound(entry):
        raise ValueError("not an entry")
    return entry


def _is_sound(entry: Entry) -> bool:
    """Return whether every fact is of the kind it should be: bytes may come from anybody."""
    if not all(isinstance(getattr(entry, name), kind) for name, kind in _KIND_OF.items()):
        return False
    return all(isinstance(text, str) for text in (*entry.typed.values(), *entry.versions.values()))


def _plain(value: Any) -> Any:
    if value is None or isinstance(value, bool | int | str):
        return value
    if isinstance(value, float):
        if not math.isfinite(value):
            raise ValueError(f"{value} is no figure to keep")
        return {_FLOAT: value.hex()}
    if isinstance(value, Mapping):
        if _FLOAT in value:
            raise ValueError(f'"{_FLOAT}" is no key to keep')
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(item) for item in value]
    raise TypeError(f"{type(value).__name__} is no plain data")


def _floats(data: dict[str, Any]) -> Any:
    if data.keys() != {_FLOAT}:
        return data
    value = float.fromhex(data[_FLOAT])
    if not math.isfinite(value):
        raise ValueError("a figure is not finite")
    return value
