"""The stretch of the log that is held in memory, and the part of it in sight.

It grows by pages at both ends as one moves, and lets go of the far end: a log of any length
takes the same memory. What comes in never moves what is being read.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Literal

from tankcalc.tui.log_pages import Page, Seen

KEPT = 500
"""Entries held at most."""

Way = Literal["above", "below"]


class LogWindow:
    """Entries, the first of them in sight, and the one that is marked."""

    def __init__(self) -> None:
        self.seen: Sequence[Seen] = ()
        self.above = self.below = False
        self.top = 0
        self.cursor = 0
        self.room = 1

    @property
    def at_end(self) -> bool:
        """Whether the newest entry is the marked one, so that newer ones are followed."""
        return not self.below and self.cursor >= len(self.seen) - 1

    @property
    def marked(self) -> Seen | None:
        """The marked entry."""
        return self.seen[self.cursor] if self.cursor < len(self.seen) else None

    @property
    def in_sight(self) -> Sequence[Seen]:
        """The entries that there is room for."""
        return self.seen[self.top : self.top + self.room]

    @property
    def hidden(self) -> tuple[int, int]:
        """How many of the entries held lie above and below those in sight."""
        return self.top, max(len(self.seen) - self.top - self.room, 0)

    def wants(self) -> Way | None:
        """Return at which end entries are missing that moving on by a screen would show."""
        above, below = self.hidden
        if self.above and above < self.room:
            return "above"
        return "below" if self.below and below < self.room else None

    def fit(self, room: int) -> None:
        """Take another number of rows."""
        self.room = max(room, 1)
        if self.at_end:
            self.top = len(self.seen)
        self._settle()

    def open(self, page: Page, *, at_end: bool) -> None:
        """Show a page in the place of everything, from its end or from its beginning."""
        self.seen, self.above, self.below = page.seen, page.above, page.below
        self.cursor = len(self.seen) - 1 if at_end else 0
        self.top = len(self.seen) if at_end else 0
        self._settle()

    def grow(self, page: Page, way: Way) -> None:
        """Add a page at one end, and let go of what lies far beyond the other."""
        if way == "above":
            self.seen = [*page.seen, *self.seen]
            self.above = page.above
            self.top, self.cursor = self.top + len(page.seen), self.cursor + len(page.seen)
            self.below = self.below or len(self.seen) > KEPT
            self.seen = self.seen[:KEPT]
        else:
            self.seen = [*self.seen, *page.seen]
            self.below = page.below
            gone = max(len(self.seen) - KEPT, 0)
            self.above = self.above or gone > 0
            self.seen = self.seen[gone:]
            self.top, self.cursor = self.top - gone, self.cursor - gone
        self._settle()

    def add(self, new: Iterable[Seen]) -> None:
        """Put newer entries below; they are followed where the newest one was marked."""
        following = self.at_end
        if not self.below:
            self.seen = [*self.seen, *new]
        if following:
            self.cursor = len(self.seen) - 1
            self.top = len(self.seen)
            gone = max(len(self.seen) - KEPT, 0)
            self.above = self.above or gone > 0
            self.seen = self.seen[gone:]
            self.cursor, self.top = self.cursor - gone, self.top - gone
        self._settle()

    def replace(self, renewed: Iterable[Seen]) -> None:
        """Show entries anew whose marks have changed."""
        by_number = {one.row.seq: one for one in renewed}
        self.seen = [by_number.get(one.row.seq, one) for one in self.seen]

    def move(self, by: int) -> None:
        """Mark the entry that many rows below; the part in sight follows."""
        self.cursor += by
        self._clamp()
        self.top = min(max(self.top, self.cursor - self.room + 1), self.cursor)

    def page(self, by: int) -> None:
        """Move by whole panes."""
        self.top += by * self.room
        self.cursor += by * self.room
        self._settle()

    def _settle(self) -> None:
        """Keep what is in sight within the entries, and the mark within what is in sight."""
        self._clamp()
        self.top = min(max(self.top, 0), max(len(self.seen) - self.room, 0))
        self.cursor = min(max(self.cursor, self.top), max(self.top + self.room - 1, 0))
        self._clamp()

    def _clamp(self) -> None:
        self.cursor = min(max(self.cursor, 0), max(len(self.seen) - 1, 0))
