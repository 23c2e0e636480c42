"""What two readings of the log share: told from the texts of the profiles they rest on.

A profile that was changed in something else, a limit or a name, has a new version but the same
transmitters and the same table. So the texts the log kept are compared part by part.
"""

from __future__ import annotations

import hashlib
import json
import tomllib
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any, Protocol

from tankcalc.balance.states import SITE

if TYPE_CHECKING:
    from tankcalc.shiftlog.entry import Entry

TAGS = ("p1", "p2", "p3", "dp")
_SHAPE = ("shape", "shell", "table", "deadwood", "floating_roof")
_AROUND = ("gravity", "air")


class Texts(Protocol):
    """What the origins need of a store."""

    def get_config(self, version: str) -> bytes:
        """Return the text with that SHA-256 (hex); KeyError where the log holds none."""


def origins_of(entry: Entry, texts: Texts) -> dict[str, str]:
    """Return the origins of a reading's errors, by the keys of `tankcalc.balance.states`."""
    tank = entry.tank or ""
    held = _parsed(texts, entry.versions.get("tank", ""))
    fitted = held.get("transmitters")
    fitted = fitted if isinstance(fitted, Mapping) else {}
    found = {tag: f"{tank}: {_digest(held, fitted.get(tag))}" for tag in TAGS}
    found["level"] = f"{tank}: {_digest(held, held.get('level_gauge'))}"
    found["geometry"] = f"{tank}: {_digest(held, [held.get(key) for key in _SHAPE])}"
    product = f"{entry.fluid or ''} {entry.versions.get('fluid', '')}"
    found["fluid"] = product
    found["vapour"] = f"{tank}: {product} {_digest(held, held.get('vapour'))}"
    around = _parsed(texts, entry.versions.get("site", ""))
    found[SITE] = f"site: {_digest(around, [around.get(key) for key in _AROUND])}"
    return found


def _parsed(texts: Texts, version: str) -> dict[str, Any]:
    """Return a kept text as data; where it cannot be read, its version stands for all of it."""
    try:
        return tomllib.loads(texts.get_config(version).decode("utf-8-sig"))
    except (KeyError, ValueError, RecursionError):
        return {"whole": version}


def _digest(held: Mapping[str, Any], part: object) -> str:
    """Return a short name for a part of a text, or for all of a text that could not be read."""
    data = json.dumps(held.get("whole", part), sort_keys=True, default=str)
    return hashlib.sha256(data.encode()).hexdigest()[:16]
