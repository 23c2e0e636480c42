"""The answer in full, a page each: figures, uncertainty, corrections, agreement."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import ClassVar

from textual.binding import Binding, BindingType

from tankcalc.tui.present import Line
from tankcalc.tui.screens.read import ReadScreen
from tankcalc.tui.widgets.lines import Lines

Page = tuple[str, Callable[[int], Sequence[Line]]]
"""What a page is called, and its text for a width."""


class DetailScreen(ReadScreen):
    """Pages to turn with their number, or with left and right."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("right,tab", "turn(1)", show=False),
        Binding("left,shift+tab", "turn(-1)", show=False),
        Binding("f3,u", "units", show=False),
        *(Binding(str(n), f"page_number({n})", show=False) for n in range(1, 10)),
    ]

    ACTS = "Left Right or its number turns   F3 units   Esc goes back"

    def __init__(self, title: str, pages: Sequence[Page], units: Callable[[], None]) -> None:
        super().__init__(title, lambda width: self._page(width))
        self._units = units
        self._pages = pages
        self._at = 0
        self._held: dict[tuple[int, int], Sequence[Line]] = {}

    def _page(self, width: int) -> Sequence[Line]:
        """Return the page in front; it is worked out once for a width."""
        place = self._at, width
        if place not in self._held:
            self._held[place] = list(self._pages[self._at][1](width))
        return self._held[place]

    def say(self, lines: Sequence[Line]) -> None:
        """Show the page, with the names of all of them above it."""
        names = "   ".join(
            f"[{n} {name}]" if n == self._at + 1 else f" {n} {name} "
            for n, (name, _) in enumerate(self._pages, start=1)
        )
        self.query_one("#head", Lines).show([[(f" {self.TITLE_TEXT}", "bar")]])
        super().say([[(names, "title")], [], *lines])

    def action_turn(self, by: int) -> None:
        """Show the next page, or the one before."""
        self._open((self._at + by) % len(self._pages))

    def action_page_number(self, number: int) -> None:
        """Show the page of that number."""
        if number <= len(self._pages):
            self._open(number - 1)

    def action_units(self) -> None:
        """Show the next system of units, here and behind."""
        self._units()
        self._held.clear()
        self.say(self.text())

    def _open(self, page: int) -> None:
        self._at, self._first = page, 0
        self.say(self.text())
