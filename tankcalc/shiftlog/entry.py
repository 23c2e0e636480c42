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

FORM = 2
"""Number of the newest canonical form. The number stands in every entry, and an entry is written
in the lowest form that can hold it: its bytes, and so its hash, are the same in every version."""

LATER_FACTS = ("judgement", "seen", "signals", "source", "witness")
"""Facts that form 1 does not have."""

JUDGEMENTS = ("", "accepted", "accepted with reason", "rejected")
"""What the operator made of a result; empty: nobody has judged it."""

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
        One of ``kinds.KINDS``.
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
        What was typed. Of a reading or its amendment: every reading with its unit, by its name.
        Of a movement: "received", "delivered" or "drawn", and "other", the tank at the other end
        or "". Of an acknowledgement: "of" ("handover", "alert" or "entry"), "what", and "until", an
        instant in ISO 8601, where an alert is set aside. Of a note on a fault: "fault" ("opened"
        or "closed") and "instrument"; of a note on an archive: "archive", its file, and "head", the
        number and hash of its last entry. Of a clock step: "was" and "is".
    result : mapping or None
        What was computed. Of a reading: the keys of ``convert --json``. Of a movement:
        "volume_m3" and "mass_kg", positive into the tank, None where it is not known. An
        amendment has that of what it amends. None for every other kind.
    versions : mapping of str to str
        SHA-256 (hex) of the texts of "site", "tank" and "fluid" that the result rests on.
    program : str
        Version of this program.
    ref : bytes or None
        ``uid`` of an earlier entry that this one is about: of an amendment or a withdrawal always
        the original, however often that was amended before.
    reason : str
        Why: it was amended or withdrawn, accepted though in doubt, rejected, or set aside.
    movement : str
        What was declared of the tank: "static", "receiving", "delivering"; empty: nothing.
    judgement : str
        One of ``JUDGEMENTS``.
    signals : mapping of str to str
        By transmitter: what its signal was worth ("saturated", "uncertain", "failed"), where
        there was anything against it.
    source : str
        Where the readings came from, when nobody typed them; empty: typed.
    witness : str
        A second person who saw it, as typed; may be empty.
    seen : int
        Number of the newest entry that its maker knew, when a reading is held against earlier
        ones; 0: not kept.
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
    judgement: str = ""
    signals: Mapping[str, str] = field(default_factory=lambda: _NOTHING)
    source: str = ""
    witness: str = ""
    seen: int = 0

    def __post_init__(self) -> None:
        if len(self.uid) != 16 or (self.ref is not None and len(self.ref) != 16):
            raise ValueError("an entry's identifier has 16 bytes")
        if not (0 <= self.t_us <= LAST_US and 0 <= self.entered_us <= LAST_US):
            raise ValueError("an entry's times lie in the years 1970 to 9998")
        if self.judgement not in JUDGEMENTS:
            raise ValueError("an entry's judgement is none of those there are")

    @property
    def id(self) -> str:
        """The identifier as people see it."""
        return show_uid(self.uid)

    @property
    def status(self) -> str:
        """Status of the result: "good", "check" or "refused"; empty for a note."""
        return "" if self.result is None else str(self.result.get("status", ""))


LATE_US = 15 * 60 * 1_000_000
"""An entry made longer than this after its reading is late."""


def late(entry: Entry) -> bool:
    """Return whether the entry was made more than a quarter of an hour after its reading.

    Examples
    --------
    >>> facts = dict.fromkeys(
    ...     ("shift", "shift_date", "time_zone", "site", "user", "console", "program"), ""
    ... )
    >>> late(Entry(bytes(16), "reading", t_us=0, entered_us=900_000_001, **facts))
    True
    """
    return entry.entered_us - entry.t_us > LATE_US


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
    part of it. ``canonical(decoded(body)) == body`` for every body that was made here.

    Raises
    ------
    ValueError
        A float is not finite, or a mapping uses the reserved key "float".
    TypeError
        A value is not plain data.
    """
    form = FORM if any(getattr(entry, name) for name in LATER_FACTS) else 1
    data: dict[str, Any] = {"form": form}
    for item in fields(entry):
        if form > 1 or item.name not in LATER_FACTS:
            value = getattr(entry, item.name)
            data[item.name] = value.hex() if isinstance(value, bytes) else _plain(value)
    return json.dumps(data, sort_keys=True, separators=(",", ":"), allow_nan=False).encode("ascii")


def shift_text(shift: tuple[str, str]) -> str:
    """Return what stands in the canonical bytes of every entry of a shift, and of no other.

    Inside a text of an entry a quotation mark is escaped, so nothing typed can look like this.

    Examples
    --------
    >>> shift_text(("2026-12-01", "Day"))
    '"shift":"Day","shift_date":"2026-12-01",'
    """
    date, name = (json.dumps(text) for text in shift)
    return f'"shift":{name},"shift_date":{date},'


def decoded(body: bytes) -> Entry:
    """Return the entry that canonical bytes stand for.

    Raises
    ------
    ValueError
        The bytes are no entry, or one of a form this version does not know.
    """
    try:
        data = _DECODER.decode(body.decode("ascii"))
        if data.pop("form") not in (1, FORM):
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
    for name, kind in _KIND_OF.items():
        if not isinstance(getattr(entry, name), kind):
            return False
    mappings: tuple[Mapping[str, object], ...] = (entry.typed, entry.versions, entry.signals)
    for mapping in mappings:
        for text in mapping.values():
            if not isinstance(text, str):
                return False
    return True


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


_DECODER = json.JSONDecoder(object_hook=_floats)
