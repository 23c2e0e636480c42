"""Unfinished entries between the desk and the disk."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING

from tankcalc.text import clean
from tankcalc.tui.desk import Desk, Kept
from tankcalc.tui.draft import Draft, Journal, Orphan, orphans
from tankcalc.tui.fields import label_of
from tankcalc.tui.present import Line, wrapped

if TYPE_CHECKING:
    from tankcalc.tui.logbook import Unsaved


class Drafts:
    """Keeps what is typed, and what dead consoles left; says once when the disk takes nothing."""

    def __init__(self, folder: Path, site: str) -> None:
        self._folder, self._site = folder, site
        self._journal: Journal | None = None
        self._left: list[Orphan] = []
        self.trouble = ""

    def open(self) -> None:
        """Begin a journal, and look for those nobody holds."""
        try:
            self._journal = Journal(self._folder)
            self._left = list(orphans(self._folder, self._site))
        except OSError as error:
            self._fail(error)

    @property
    def left(self) -> list[Draft]:
        """What dead consoles left: the newest state of each tank, newest last."""
        newest: dict[tuple[str, str], Draft] = {}
        found = (draft for orphan in self._left for draft in orphan.drafts)
        for draft in sorted(found, key=lambda draft: draft.at_us):
            newest[draft.tank, draft.of] = draft
        return list(newest.values())

    def keep(self, desk: Desk, tank: str, now_us: int) -> None:
        """Write down what is typed for a tank."""
        entry = desk.entry_of(tank)
        self._write(Draft(self._site, tank, entry.fluid, dict(entry.fields), now_us), entry.unsaved)

    def keep_dialog(self, desk: Desk, key: str, now_us: int) -> None:
        """Write down what a dialog was left with; nothing where it was logged."""
        kept = desk.kept.get(key)
        typed = {} if kept is None else {n: t for n, t in kept.answers.items() if t}
        self._write(
            Draft(self._site, "", "", typed, now_us, key), None if kept is None else kept.sent
        )

    def _write(self, draft: Draft, sent: Unsaved | None) -> None:
        if sent is not None:
            draft = _with_sent(draft, sent)
        if self._journal is not None:
            try:
                self._journal.keep(draft)
            except OSError as error:
                self._fail(error)

    def settle(self) -> None:
        """Return once what was kept survives a power cut; called apart from the keys."""
        if self._journal is not None:
            try:
                self._journal.settle()
            except OSError as error:
                self._fail(error)

    def adopt(self, desk: Desk) -> None:
        """Put what dead consoles left on the desk, and their journals away."""
        for draft in self.left:
            if draft.of:
                desk.kept.setdefault(draft.of, Kept(draft.typed, _sent_of(draft)))
                self.keep_dialog(desk, draft.of, draft.at_us)
                continue
            entry = desk.entry_of(draft.tank)
            if not entry.fields and entry.fluid in ("", draft.fluid):
                entry.unsaved = _sent_of(draft)
            entry.fields = {**draft.typed, **entry.fields}
            entry.fluid = entry.fluid or draft.fluid
            self.keep(desk, draft.tank, draft.at_us)
            desk.tank_name = draft.tank
        self.settle()
        self.discard()

    def discard(self) -> None:
        """Throw away what dead consoles left."""
        for orphan in self._left:
            orphan.remove()
        self._left = []

    def later(self) -> None:
        """Leave it for the next start."""
        for orphan in self._left:
            orphan.release()
        self._left = []

    def close(self) -> None:
        """Let go of the journal."""
        if self._journal is not None:
            self._journal.close()
            self._journal = None

    def _fail(self, error: OSError) -> None:
        why = error.strerror or "it failed"
        self.trouble = f"What is typed is NOT KEPT if the link drops: {self._folder}: {why}."


def _with_sent(draft: Draft, sent: Unsaved) -> Draft:
    """Return a draft with the entry that was made of it, sent, and not saved."""
    from tankcalc.shiftlog.entry import canonical

    return replace(draft, sent=canonical(sent.entry).decode("ascii"), texts=dict(sent.texts))


def _sent_of(draft: Draft) -> Unsaved | None:
    """Return the very entry that was sent; None where there is none that can be read."""
    if not draft.sent:
        return None
    from tankcalc.shiftlog.entry import decoded
    from tankcalc.tui.logbook import Unsaved

    try:
        return Unsaved(decoded(draft.sent.encode("utf-8")), draft.texts)
    except ValueError:
        return None


def draft_lines(drafts: Sequence[Draft], now_us: int, width: int) -> list[Line]:
    """Return when each was typed and what it holds."""
    lines: list[Line] = []
    for draft in reversed(drafts):
        # The site's zone is not read yet; this machine's clock is shown with its offset.
        typed_at = datetime.fromtimestamp(draft.at_us / 1e6).astimezone().strftime("%H:%M %z")
        minutes = max((now_us - draft.at_us) // 60_000_000, 0)
        age = f"{minutes} min" if minutes < 120 else f"{minutes // 60} h"
        held = "; ".join(
            f"{_label(draft, name)} {clean(text)}" for name, text in draft.typed.items()
        )
        words = (
            f"Unfinished entry from {typed_at} ({age} ago), {clean(draft.of or draft.tank)}: {held}"
        )
        lines += wrapped(words, "", width)
    return lines


def _label(draft: Draft, name: str) -> str:
    """Return what a field is called; a dialog has names of its own."""
    return clean(name) if draft.of else label_of(name)
