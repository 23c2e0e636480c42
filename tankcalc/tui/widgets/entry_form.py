"""The readings as they are typed: one row a field, its label and a mark before it."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping
from typing import ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import ScrollableContainer, Vertical
from textual.message_pump import MessagePump

from tankcalc.tui.fields import FIELDS, by_name, fields_of
from tankcalc.tui.messages import FieldsMoved
from tankcalc.tui.present import Line, field_label
from tankcalc.tui.widgets.entry_field import EntryField
from tankcalc.tui.widgets.lines import Lines

AT_FIRST = "p1"
"""Transmitter taken as fitted, and the only field there is, until the tank's file is read."""


class EntryForm(ScrollableContainer, can_focus=False):
    """All fields of a tank; those that do not fit are reached by moving down."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "step(-1)", show=False),
        Binding("down", "step(1)", show=False),
        # The container would take these for itself; here they belong to the log.
        Binding("pageup", "screen.page_log(-1)", show=False),
        Binding("pagedown", "screen.page_log(1)", show=False),
    ]

    def __init__(self, *, id: str, tell: MessagePump | None = None) -> None:
        super().__init__(id=id)
        self._tell = tell
        self._fields = [field for field in fields_of({AT_FIRST}) if not field.later]
        self._problems: Collection[str] = ()

    def compose(self) -> ComposeResult:
        """Make the first field; every other one costs start-up time, and follows."""
        yield Lines(self._labels, id="labels")
        with Vertical(id="fields"):
            yield EntryField(by_name(AT_FIRST), tell=self._tell)

    @property
    def below(self) -> int:
        """Fields that are out of sight, below."""
        return max(len(self._fields) - self.size.height - int(self.scroll_y), 0)

    def watch_scroll_y(self, old_value: float, new_value: float) -> None:
        """Tell that other fields are in sight now."""
        super().watch_scroll_y(old_value, new_value)
        self.post_message(FieldsMoved())

    @property
    def current(self) -> EntryField | None:
        """The field being typed in."""
        focused = self.screen.focused
        return focused if isinstance(focused, EntryField) else None

    async def complete(self, typed: Mapping[str, str]) -> None:
        """Make the other fields, holding these texts."""
        have = {widget.field.name for widget in self.query(EntryField)}
        missing = [field for field in FIELDS if field.name not in have]
        made = [EntryField(one, typed.get(one.name, ""), self._tell) for one in missing]
        self._show_only(made)
        # The first field is there already, and stands first.
        await self.query_one("#fields").mount_all(made)

    def fit(self, fitted: Collection[str]) -> None:
        """Show the fields of a tank with these transmitters."""
        self._fields = fields_of(fitted)
        # Where few are needed often, the row goes to the result.
        self.set_class(sum(not field.later for field in self._fields) < 6, "-few")
        self._show_only(self.query(EntryField))
        self._label()

    def fill(self, typed: Mapping[str, str]) -> None:
        """Put these texts into the fields, without telling anybody."""
        for widget in self.query(EntryField):
            with widget.prevent(EntryField.Changed):
                widget.value = typed.get(widget.field.name, "")
                widget.cursor_position = len(widget.value)

    def mark(self, problems: Collection[str]) -> None:
        """Mark the fields that cannot be used."""
        self._problems = problems
        self._label()

    def go(self, name: str = "") -> None:
        """Go to a field; to the first one where none is named."""
        self._field(name or self._fields[0].name).focus()

    def start(self, character: str) -> None:
        """Go to the first field and type a character there."""
        self.go()
        self._field(self._fields[0].name).insert_text_at_cursor(character)

    def action_step(self, by: int) -> None:
        """Go to the field that many rows below; the ends are ends."""
        names = [field.name for field in self._fields]
        if self.current is not None:
            at = names.index(self.current.field.name) + by
            self.go(names[min(max(at, 0), len(names) - 1)])

    def on_input_submitted(self, event: EntryField.Submitted) -> None:
        """Go on to the next field when one is accepted."""
        event.stop()
        self.action_step(1)

    def on_descendant_focus(self, _event: events.DescendantFocus) -> None:
        """Mark where the keys go."""
        self._label()

    def on_descendant_blur(self, _event: events.DescendantBlur) -> None:
        """Take the mark off."""
        self._label()

    def _show_only(self, widgets: Iterable[EntryField]) -> None:
        names = {field.name for field in self._fields}
        for widget in widgets:
            widget.display = widget.field.name in names

    def _label(self) -> None:
        labels = self.query_one("#labels", Lines)
        labels.styles.height = len(self._fields)
        labels.rebuild()

    def _labels(self, _width: int, _height: int) -> list[Line]:
        at = "" if self.current is None else self.current.field.name
        return [
            field_label(field.label, field.name == at, field.name in self._problems)
            for field in self._fields
        ]

    def _field(self, name: str) -> EntryField:
        return self.query_one(f"#{name}", EntryField)
