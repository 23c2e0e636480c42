"""Alerts of all tanks, what people do about them, and the limits of one tank."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import ModalScreen

from tankcalc.shiftlog import now_us
from tankcalc.tui import alerts_present
from tankcalc.tui.alerts_present import Pair
from tankcalc.tui.present import Line, clip, spread, units_word, wrapped
from tankcalc.tui.widgets.lines import Lines

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.limits.latch import What
    from tankcalc.tui.desk import Desk
    from tankcalc.tui.watching import Watching

DETAIL_ROWS = 8

Act = Callable[["What", str, str], None]
"""Asks about an action on an alert: what, the tank's name, the alert's key."""

ALERTS_KEYS = "Enter acknowledge  s set aside  b bring back  Tab limits  u units  Esc back"
LIMITS_KEYS = "Up Down another tank  Tab alerts  u units  Esc back"


class AlertsScreen(ModalScreen[None]):
    """Two pages: the alerts, with the marked one in full; and the limits of a tank."""

    DEFAULT_CSS = """
    AlertsScreen { background: ansi_default; overflow: hidden; }
    AlertsScreen #alerts-head, AlertsScreen #alerts-caution { height: 1; }
    AlertsScreen #alerts-said, AlertsScreen #alerts-keys { height: 1; }
    AlertsScreen #alerts-page { height: 1fr; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move(-1)", show=False),
        Binding("down", "move(1)", show=False),
        Binding("pageup", "move(-8)", show=False),
        Binding("pagedown", "move(8)", show=False),
        Binding("home", "move(-9999)", show=False),
        Binding("end", "move(9999)", show=False),
        Binding("tab,shift+tab,left,right", "turn", show=False),
        Binding("enter,k", "act('acknowledge')", show=False),
        Binding("s", "act('set aside')", show=False),
        Binding("b", "act('bring back')", show=False),
        Binding("f3,u", "units", show=False),
        Binding("escape,a,ctrl+g", "dismiss(None)", show=False),
    ]

    def __init__(self, watching: Watching, desk: Desk, zone: ZoneInfo, act: Act) -> None:
        super().__init__()
        self._watching, self._desk, self._zone, self._act = watching, desk, zone, act
        self._tank = desk.tank_name
        self._marked: tuple[str, str] | None = None
        self._turned = False
        self._said = ""
        self._stop: Callable[[], None] = lambda: None

    def compose(self) -> ComposeResult:
        """Lay out the parts."""
        yield Lines(self._head, id="alerts-head")
        yield Lines(self._caution, id="alerts-caution")
        yield Lines(self._page, id="alerts-page")
        yield Lines(self._saying, id="alerts-said")
        yield Lines(self._keys, id="alerts-keys")

    def on_mount(self) -> None:
        """Begin with the alerts of the tank in front, or its limits where nothing is open."""
        pairs = self._pairs
        front = next((pair for pair in pairs if pair[0] == self._tank), None)
        if front is not None:
            self._marked = front[0], front[1].key
        self._stop = self._watching.after(self.rebuild)
        self._watching.look()
        self.rebuild()

    def on_unmount(self) -> None:
        """Hear no more of the alerts."""
        self._stop()

    def tell(self, words: str) -> None:
        """Say what became of something."""
        self._said = words
        self.rebuild()

    def done(self) -> None:
        """Keep the mark on the alert that was answered for."""
        self.rebuild()

    def rebuild(self) -> None:
        """Show what is known by now."""
        for part in self.query(Lines):
            part.rebuild()

    def action_move(self, by: int) -> None:
        """Mark another alert, or show the limits of another tank."""
        self._said = ""
        if self._limits:
            names = self._desk.tank_names
            at = names.index(self._tank) if self._tank in names else 0
            self._tank = names[min(max(at + by, 0), len(names) - 1)] if names else ""
        else:
            self._mark(self._at + by)
        self.rebuild()

    def action_turn(self) -> None:
        """Turn from the alerts to the limits of the marked alert's tank, and back."""
        pairs = self._pairs
        self._turned = not self._turned and bool(pairs)
        if self._turned:
            self._tank = pairs[self._at][0]
        self.rebuild()

    def action_act(self, what: What) -> None:
        """Ask about an action on the marked alert."""
        pairs = self._pairs
        if self._limits or not pairs:
            return self.tell("No alert is marked.")
        name, alert = pairs[self._at]
        if what == "acknowledge" and alert.state == "acknowledged":
            return self.tell(f"{alert.by} has acknowledged it already.")
        if what == "acknowledge" and alert.state == "set aside":
            return self.tell("It is set aside: b brings it back, then it can be acknowledged.")
        if what == "set aside" and alert.state in ("set aside", "returned"):
            return self.tell(f"It is {alert.state}; there is nothing to set aside.")
        if what == "bring back" and alert.state != "set aside":
            return self.tell("It is not set aside.")
        self._marked = name, alert.key
        self._act(what, name, alert.key)
        return None

    def action_units(self) -> None:
        """Show the next system of units."""
        self._desk.next_units()
        self.rebuild()

    @property
    def _pairs(self) -> tuple[Pair, ...]:
        return alerts_present.ordered(self._watching.found)

    @property
    def _limits(self) -> bool:
        """Whether the limits are shown: they are where no alert is."""
        return self._turned or (self._watching.found is not None and not self._pairs)

    @property
    def _at(self) -> int:
        """Where the marked alert stands now; the first where it is gone."""
        keys = [(name, alert.key) for name, alert in self._pairs]
        return keys.index(self._marked) if self._marked in keys else 0

    def _mark(self, at: int) -> None:
        pairs = self._pairs
        if pairs:
            name, alert = pairs[min(max(at, 0), len(pairs) - 1)]
            self._marked = name, alert.key

    def _head(self, width: int, _height: int) -> list[Line]:
        found = self._watching.found
        as_of = ""
        if found is not None:
            as_of = f"as of {alerts_present.day_time(found.now_us, now_us(), self._zone)}"
        counted = "" if found is None else f": {alerts_present.counted(self._pairs)}"
        left = f" LIMITS   (alerts{counted})" if self._limits else f" ALERTS{counted}"
        right = f"{as_of}  {units_word(self._desk.units)} "
        return [[(spread(left, right, width), "bar")]]

    def _caution(self, width: int, _height: int) -> list[Line]:
        return [alerts_present.caution_line(width)]

    def _page(self, width: int, height: int) -> list[Line]:
        watching = self._watching
        if watching.trouble:
            return wrapped(f"? NOT KNOWN: {watching.trouble}", "check", width)
        if watching.found is None:
            return wrapped("working ...", "", width)
        if self._limits:
            tank, now, zone = watching.found.tank(self._tank), now_us(), self._zone
            return alerts_present.limit_lines(
                tank, self._tank, now, zone, self._desk.units, width - 1
            )
        return self._alerts(width - 1, height)

    def _alerts(self, width: int, height: int) -> list[Line]:
        pairs = self._pairs
        rows = max(height - DETAIL_ROWS - 1, 3)
        lines = alerts_present.list_lines(pairs, self._at, now_us(), self._zone, rows, width)
        name, alert = pairs[self._at]
        more = len(pairs) - len(lines)
        below = f"({self._at + 1} of {len(pairs)})" if more else ""
        return [
            *lines,
            [(below, "key")],
            *alerts_present.detail_lines(name, alert, self._zone, width),
        ]

    def _saying(self, width: int, _height: int) -> list[Line]:
        return wrapped(self._said, "key", width - 1)[:1] if self._said else []

    def _keys(self, width: int, _height: int) -> list[Line]:
        keys = LIMITS_KEYS if self._limits else ALERTS_KEYS
        return [[(clip(f" {keys}", width), "bar")]]
