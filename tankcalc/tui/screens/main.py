"""The screen people work on: tanks, drawing, readings, result, warnings, log, keys."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal, Vertical
from textual.screen import Screen

from tankcalc.tui import present
from tankcalc.tui.commands import COMMANDS
from tankcalc.tui.desk import Answer, Desk
from tankcalc.tui.fields import takes
from tankcalc.tui.messages import CommandGiven, EntryWanted, FieldsMoved, NotAllowed
from tankcalc.tui.widgets.drawing import Drawing
from tankcalc.tui.widgets.entry_field import EntryField
from tankcalc.tui.widgets.entry_form import EntryForm
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.log_pane import LogPane
from tankcalc.tui.widgets.tank_list import TankList

if TYPE_CHECKING:
    from tankcalc.report import Row
    from tankcalc.tui.present import Line

LEAST_WIDTH, LEAST_HEIGHT = 80, 24

AlertLine = Callable[[str, int], "list[Line]"]
"""Makes the row about alerts, none or one, from the key that opens them and a width."""


class MainScreen(Screen[None]):
    """Lays out the parts, shows answers in them, and passes the operator's wishes on."""

    AUTO_FOCUS = "#p1"
    BINDINGS: ClassVar[list[BindingType]] = [
        *(
            # A field takes some keys held with Ctrl for itself.
            Binding(c.key, f"give('{c.id}')", c.label, show=False, id=c.id, priority=c.is_chord)
            for c in COMMANDS
        ),
        *(Binding(c.letter_key, f"give('{c.id}')", c.label, show=False) for c in COMMANDS),
        Binding("escape", "leave_field", show=False),
        Binding("pageup", "page_log(-1)", show=False),
        Binding("pagedown", "page_log(1)", show=False),
    ]

    def __init__(self, desk: Desk) -> None:
        # The classes of the smallest screen, so that it need not be styled twice at start.
        super().__init__(classes="-narrow -short -alerts")
        self.HORIZONTAL_BREAKPOINTS = [(0, "-narrow"), (100, "-wide")]
        self.VERTICAL_BREAKPOINTS = [(0, "-short"), (30, "-tall")]
        self._desk = desk
        self._answer = desk.answer()
        self._rows: Sequence[Row] = ()
        self._said = ""
        self._top: tuple[str, bool, Sequence[str]] = ("tankcalc", False, ())
        self._alert_line: AlertLine = lambda _key, _width: [[(present.NOT_LOOKED, "check")]]
        self._overlay: Lines | None = None

    def compose(self) -> ComposeResult:
        """Lay out the parts."""
        yield Lines(self._header, id="header")
        with Horizontal(id="middle"):
            yield TankList(self._desk.tank_names, id="tanks")
            yield Drawing(self._desk, id="drawing")
            with Vertical(id="right"):
                yield Lines(self._readings_title, id="readings-title")
                yield EntryForm(id="entry")
                yield Lines(self._result, id="result")
        yield Lines(self._alerts, id="alerts")
        yield Lines(self._messages, id="messages")
        yield LogPane(id="log")
        yield Lines(self._foot, id="foot")

    @property
    def form(self) -> EntryForm:
        """The readings."""
        return self.query_one(EntryForm)

    @property
    def log_pane(self) -> LogPane:
        """The log of this shift."""
        return self.query_one(LogPane)

    def header(self, site: str, is_demo: bool, right: Sequence[str]) -> None:
        """Show the top row."""
        self._top = site, is_demo, right
        self._rebuild("#header")

    def list_tanks(self) -> None:
        """Show the tanks, which is in front, and which have something to tell."""
        desk = self._desk
        tanks = self.query_one(TankList)
        tanks.update(desk.tank_names, desk.tank_name, desk.unfinished, desk.broken)
        self._rebuild("#alerts")

    def answer(self, answer: Answer, rows: Sequence[Row], said: str = "") -> None:
        """Show an answer everywhere; what the last one showed is gone."""
        self._answer, self._rows, self._said = answer, rows, said
        self.query_one(Drawing).draw(answer)
        self.form.mark(answer.problems)
        self._rebuild("#result", "#messages")
        self._cover_if_small()

    def alert(self, marks: Mapping[str, tuple[str, str]], line: AlertLine) -> None:
        """Mark the tanks that have alerts; the row about them is there while there are any."""
        self.query_one(TankList).alert(marks)
        self._alert_line = line
        self.set_class(bool(line("", self.size.width)), "-alerts")
        self._rebuild("#alerts")

    def say(self, words: str) -> None:
        """Say something above the warnings."""
        self._said = words
        self._rebuild("#messages")

    def show_below(self) -> None:
        """Say how many fields are out of sight."""
        self._rebuild("#readings-title")

    def on_resize(self) -> None:
        """Cover the screen where there is too little room for it."""
        self._cover_if_small()
        self.call_after_refresh(self.show_below)

    def action_give(self, command: str) -> None:
        """Pass a command on."""
        self.post_message(CommandGiven(command))

    def action_leave_field(self) -> None:
        """Leave the field; what was typed stays."""
        self.query_one(TankList).focus()

    def action_page_log(self, by: int) -> None:
        """Move in the log from wherever the keys go."""
        self.log_pane.page(by)

    def on_fields_moved(self, _message: FieldsMoved) -> None:
        """Say how many fields are out of sight now."""
        self.show_below()

    def on_entry_wanted(self, _message: EntryWanted) -> None:
        """Go to the first field."""
        self.form.go()

    def on_not_allowed(self, message: NotAllowed) -> None:
        """Say why a key did nothing."""
        self.say(present.not_allowed(message.name))

    def on_descendant_focus(self, _event: events.DescendantFocus) -> None:
        """Show which keys act now, and what the field takes; whoever reads the log needs room."""
        self.set_class(self.focused is self.log_pane, "-reading")
        self._rebuild("#foot", "#messages")

    def on_key(self, event: events.Key) -> None:
        """Begin a reading with a digit, from anywhere."""
        if event.character is not None and event.character.isdigit() and not self._typing:
            event.stop()
            self.form.start(event.character)

    @property
    def _hint(self) -> str:
        """What the field takes that the keys go to, while there is nothing in it."""
        field = self.form.current
        if field is None or field.value or self._desk.site is None:
            return ""
        return f"{field.field.label}: {takes(field.field.name)}"

    @property
    def _typing(self) -> bool:
        return isinstance(self.focused, EntryField)

    def _header(self, width: int, _height: int) -> list[Line]:
        return [present.header(*self._top, width)]

    def _readings_title(self, _width: int, _height: int) -> list[Line]:
        below = self.form.below
        return [[("READINGS" + (f"  ({below} more below: Down)" if below else ""), "title")]]

    def _result(self, width: int, height: int) -> list[Line]:
        figures = present.result_block(self._rows, height - 1, width)
        return [present.result_title(self._answer), *figures]

    def _messages(self, width: int, height: int) -> list[Line]:
        return present.messages(self._answer, self._said, self._hint, width - 1, height)

    def _alerts(self, width: int, _height: int) -> list[Line]:
        return self._alert_line("Ctrl+G", width)

    def _foot(self, width: int, _height: int) -> list[Line]:
        if self.focused is self.log_pane:
            return [present.pane_foot()]
        return [present.foot(width, not self._typing)]

    def _too_small(self, width: int, height: int) -> list[Line]:
        return present.too_small(width, height, self._rows, self._answer)

    def _cover_if_small(self) -> None:
        """Cover the screen with the result as text while it is too small for anything else."""
        small = self.size.width < LEAST_WIDTH or self.size.height < LEAST_HEIGHT
        if small and self._overlay is None:
            self._overlay = Lines(self._too_small, id="small")
            self.mount(self._overlay)
        if self._overlay is not None:
            self._overlay.display = small
            self._overlay.rebuild()

    def _rebuild(self, *parts: str) -> None:
        for part in parts:
            self.query_one(part, Lines).rebuild()
