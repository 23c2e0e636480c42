"""The list of tanks."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from typing import ClassVar

from textual.binding import Binding, BindingType

from tankcalc.tui.messages import EntryWanted, TankChosen
from tankcalc.tui.present import Line, tank_line
from tankcalc.tui.widgets.lines import Lines


class TankList(Lines, can_focus=True):
    """The tanks of the site; moving in it chooses."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move(-1)", show=False),
        Binding("down", "move(1)", show=False),
        Binding("home", "move(-9999)", show=False),
        Binding("end", "move(9999)", show=False),
        Binding("enter", "enter", show=False),
    ]

    def __init__(self, names: Sequence[str], *, id: str) -> None:
        super().__init__(id=id)
        self._names = list(names)
        self._chosen = 0
        self._unfinished: Collection[str] = ()
        self._broken: Collection[str] = ()
        self._alerts: Mapping[str, tuple[str, str]] = {}

    def update(
        self,
        names: Sequence[str],
        chosen: str,
        unfinished: Collection[str] = (),
        broken: Collection[str] = (),
    ) -> None:
        """Show these tanks, and which have an unfinished entry or a file that cannot be read."""
        self._names = list(names)
        self._chosen = self._names.index(chosen) if chosen in self._names else 0
        self._unfinished, self._broken = unfinished, broken
        self.rebuild()

    def alert(self, alerts: Mapping[str, tuple[str, str]]) -> None:
        """Show what stands beside the tanks that have alerts: a symbol and a word."""
        self._alerts = alerts
        self.rebuild()

    def action_move(self, by: int) -> None:
        """Choose the tank that many rows below."""
        to = min(max(self._chosen + by, 0), len(self._names) - 1)
        if self._names and to != self._chosen:
            self._chosen = to
            self.rebuild()
            self.post_message(TankChosen(self._names[to]))

    def action_enter(self) -> None:
        """Go to the readings of the chosen tank."""
        self.post_message(EntryWanted())

    def build(self, width: int, height: int) -> list[Line]:
        """Return the tanks around the chosen one."""
        room = max(height - 1, 1)
        first = min(max(self._chosen - room // 2, 0), max(len(self._names) - room, 0))
        below = len(self._names) - first - room
        title = f"TANKS {first}^" if first else "TANKS"
        lines: list[Line] = [[(f"{title} {below}v" if below > 0 else title, "title")]]
        for index, name in enumerate(self._names[first : first + room], start=first):
            chosen = index == self._chosen
            mark = "+" if name in self._unfinished else "!" if name in self._broken else " "
            alert = self._alerts.get(name, ("", ""))
            lines.append(tank_line(name, mark, chosen, chosen and self.has_focus, width, alert))
        return lines
