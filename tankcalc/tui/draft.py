"""What was typed and not yet logged, kept on disk so that a dropped link loses nothing.

Each console appends to a journal of its own and holds a lock on it as long as it lives. A
journal nobody holds belongs to a console that died: the next one offers what it left. So two
consoles of one person never touch each other's entry.
"""

from __future__ import annotations

import fcntl
import json
import os
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

_FLAGS = os.O_RDWR | os.O_APPEND | os.O_CLOEXEC


@dataclass(frozen=True, slots=True)
class Draft:
    """An unfinished entry of one tank.

    Attributes
    ----------
    site : str
        Folder of the site the tank belongs to.
    tank : str
        Name of the tank's file.
    fluid : str
        Density profile chosen for it; empty: the tank's usual contents.
    typed : mapping of str to str
        Fields as typed; empty when the entry was logged or cleared.
    at_us : int
        When it was last touched, µs of UTC.
    of : str
        The dialog it was typed into, such as "note on T-101"; empty: the form of readings.
    sent : str
        Canonical bytes of the entry that was sent and not saved; empty: none was sent.
    texts : mapping of str to bytes
        Texts of the profiles that entry rests on, by version.
    """

    site: str
    tank: str
    fluid: str = ""
    typed: Mapping[str, str] = field(default_factory=dict)
    at_us: int = 0
    of: str = ""
    sent: str = ""
    texts: Mapping[str, bytes] = field(default_factory=dict)


def state_folder(environ: Mapping[str, str]) -> Path:
    """Return the folder of this user for what outlives a session (XDG base directories)."""
    base = environ.get("XDG_STATE_HOME", "")
    # The specification tells programs to ignore a relative path.
    root = Path(base) if base.startswith("/") else Path("~/.local/state").expanduser()
    return root / "tankcalc"


class Journal:
    """The journal of one console. Methods raise OSError where the disk does not take it."""

    def __init__(self, folder: Path) -> None:
        folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        folder.chmod(0o700)
        name = f"draft-{os.getpid()}-{os.urandom(4).hex()}"
        # Locked before it has the name that others look for.
        new = folder / f"{name}.new"
        self._fd = os.open(new, _FLAGS | os.O_CREAT | os.O_EXCL, 0o600)
        fcntl.flock(self._fd, fcntl.LOCK_EX | fcntl.LOCK_NB)
        self.path = folder / f"{name}.jsonl"
        new.rename(self.path)
        self._open: dict[tuple[str, str, str], Draft] = {}

    def keep(self, draft: Draft) -> None:
        """Write a draft; it survives the end of this process from here on."""
        line = json.dumps(_as_data(draft), separators=(",", ":")) + "\n"
        os.write(self._fd, line.encode("ascii"))
        self._open[draft.site, draft.tank, draft.of] = draft
        if not any(kept.typed for kept in self._open.values()):
            os.ftruncate(self._fd, 0)

    def settle(self) -> None:
        """Return once what was kept survives a power cut as well."""
        os.fsync(self._fd)

    def close(self) -> None:
        """Let go of the journal; it stays, for the next console, where it holds something."""
        if not any(kept.typed for kept in self._open.values()):
            self.path.unlink(missing_ok=True)
        os.close(self._fd)


class Orphan:
    """A journal whose console is gone, held until it is decided what becomes of it."""

    def __init__(self, path: Path, fd: int, drafts: list[Draft]) -> None:
        self.path = path
        self.drafts = drafts
        self._fd = fd

    def remove(self) -> None:
        """Delete it: its drafts were taken over, or thrown away."""
        self.path.unlink(missing_ok=True)
        self.release()

    def release(self) -> None:
        """Leave it for another time."""
        os.close(self._fd)


def orphans(folder: Path, site: str) -> Iterator[Orphan]:
    """Yield the journals of consoles that died with an unfinished entry at this site."""
    for path in sorted(folder.glob("draft-*.jsonl")):
        fd = os.open(path, _FLAGS)
        if not _lock(fd):
            os.close(fd)
            continue
        drafts = list(_last_of_each(fd))
        if not drafts:
            path.unlink(missing_ok=True)
        here = [draft for draft in drafts if draft.site == site]
        if here and len(here) == len(drafts):
            yield Orphan(path, fd, here)
        else:
            os.close(fd)


def _lock(fd: int) -> bool:
    """Return whether the journal is ours now: nobody held it, and it was not deleted."""
    try:
        fcntl.flock(fd, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except BlockingIOError:
        return False
    return os.fstat(fd).st_nlink > 0


def _last_of_each(fd: int) -> Iterator[Draft]:
    """Yield the last state of each tank that still holds something."""
    last: dict[tuple[str, str, str], Draft] = {}
    data = os.pread(fd, os.fstat(fd).st_size, 0)
    for line in data.decode("utf-8", "replace").splitlines():
        draft = _as_draft(line)
        if draft is not None:
            last[draft.site, draft.tank, draft.of] = draft
    yield from (draft for draft in last.values() if draft.typed)


def _as_data(draft: Draft) -> dict[str, Any]:
    return {
        "site": draft.site,
        "tank": draft.tank,
        "fluid": draft.fluid,
        "typed": dict(draft.typed),
        "at_us": draft.at_us,
        "of": draft.of,
        "sent": draft.sent,
        # Latin-1 takes every byte there and back.
        "texts": {version: text.decode("latin-1") for version, text in draft.texts.items()},
    }


def _as_draft(line: str) -> Draft | None:
    """Return the draft a line holds; None for a line that was cut short."""
    try:
        data = json.loads(line)
        texts = {str(v): str(text).encode("latin-1") for v, text in data.get("texts", {}).items()}
        typed = {str(name): str(text) for name, text in data["typed"].items()}
        return Draft(
            str(data["site"]),
            str(data["tank"]),
            str(data["fluid"]),
            typed,
            int(data["at_us"]),
            str(data.get("of", "")),
            str(data.get("sent", "")),
            texts,
        )
    except (ValueError, KeyError, TypeError, AttributeError):
        return None
