"""The figures of a liquid as they are typed: the model, then a row for each key it takes."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from typing import ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import ScrollableContainer, Vertical
from textual.message import Message
from textual.widgets import Input

from tankcalc.text import clean
from tankcalc.tui.ascii import columns
from tankcalc.tui.liquid_draft import DraftField
from tankcalc.tui.present import Line, clip
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.word_field import WordField

MORE = "~"
"""Beside a field that holds more than is seen."""

LONGEST = 4000
"""A table of points is typed as one line."""


@dataclass
class FigureTyped(Message):
    """A field of the liquid holds another text."""


@dataclass
class ModelTurned(Message):
    """The operator wants the next model, or the one before."""

    by: int


class FigureField(WordField):
    """One figure, or a list of them."""

    def __init__(self, field: DraftField, text: str) -> None:
        super().__init__(field.id, text, LONGEST)

    def on_paste(self, event: events.Paste) -> None:
        """Take every line that holds something, as one list."""
        event.prevent_default()
        event.stop()
        lines = [clean(line, LONGEST).strip(",; ") for line in event.text.splitlines()]
        self.replace(", ".join(line for line in lines if line), *self.selection)


class ModelChoice(Lines, can_focus=True):
    """The density model; left and right choose another one."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("left", "turn(-1)", show=False),
        Binding("right,space", "turn(1)", show=False),
    ]

    def __init__(self, model: str, *, id: str) -> None:
        super().__init__(id=id)
        self._model = model

    def update(self, model: str) -> None:
        """Show a model."""
        self._model = model
        self.rebuild()

    def build(self, width: int, _height: int) -> Sequence[Line]:
        """Return the model between the marks of the keys that change it."""
        mark, style = (">", "focus") if self.has_focus else (" ", "figure")
        return [
            [(f"{mark}model          ", "key"), (f"< {clip(self._model, width - 20)} >", style)]
        ]

    def action_turn(self, by: int) -> None:
        """Ask for another model."""
        self.post_message(ModelTurned(by))


class LiquidForm(ScrollableContainer, can_focus=False):
    """The rows of one model; those that do not fit are reached by moving down."""

    BINDINGS: ClassVar[list[BindingType]] = [
        # The container would take these for itself.
        Binding("up", "app.focus_previous", show=False),
        Binding("down", "app.focus_next", show=False),
        Binding("pageup", "screen.turn(-1)", show=False),
        Binding("pagedown", "screen.turn(1)", show=False),
    ]

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self._fields: Sequence[DraftField] = ()
        self._wrong: Collection[str] = ()

    def compose(self) -> ComposeResult:
        """Lay out labels and fields."""
        yield Lines(self._labels, id="liquid-labels")
        yield Vertical(id="liquid-fields")

    @property
    def current(self) -> str:
        """The id of the field being typed in; empty for none."""
        focused = self.screen.focused
        return (focused.id or "") if isinstance(focused, FigureField) else ""

    async def show(self, fields: Sequence[DraftField], texts: Mapping[str, str]) -> None:
        """Make the fields of a model anew, holding these texts."""
        self._fields = fields
        box = self.query_one("#liquid-fields", Vertical)
        await box.remove_children()
        await box.mount_all(FigureField(field, texts.get(field.id, "")) for field in fields)
        self._label()

    @property
    def texts(self) -> dict[str, str]:
        """What the fields hold, by their ids."""
        return {widget.id or "": widget.value for widget in self.query(FigureField)}

    def mark(self, wrong: Collection[str]) -> None:
        """Mark the fields that cannot be used."""
        self._wrong = wrong
        self._label()

    def go(self, id: str) -> None:
        """Go to a field."""
        self.query_one(f"#{id}", FigureField).focus()

    def on_input_changed(self, event: Input.Changed) -> None:
        """Tell that a field holds another text."""
        event.stop()
        self._label()
        self.post_message(FigureTyped())

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Go on to the next field when one is accepted."""
        event.stop()
        self.screen.focus_next()

    def on_descendant_focus(self, _event: events.DescendantFocus) -> None:
        """Mark where the keys go."""
        self._label()

    def on_descendant_blur(self, _event: events.DescendantBlur) -> None:
        """Take the mark off."""
        self._label()

    def _label(self) -> None:
        labels = self.query_one("#liquid-labels", Lines)
        labels.styles.height = max(len(self._fields), 1)
        labels.rebuild()

    def _labels(self, _width: int, _height: int) -> list[Line]:
        lines: list[Line] = []
        for field in self._fields:
            at, wrong = field.id == self.current, field.id in self._wrong
            more = MORE if self._is_cut(field.id) else " "
            lead, style = (">", "key") if at else (" ", "")
            lines.append(
                [
                    (f"{lead}{clip(field.label, 14):<14}", style),
                    ("X" if wrong else " ", "refused" if wrong else ""),
                    (more, "key"),
                ]
            )
        return lines

    def _is_cut(self, id: str) -> bool:
        """Return whether a field holds more than it has room to show."""
        field = next((one for one in self.query(FigureField) if one.id == id), None)
        return field is not None and 0 < field.size.width < columns(field.value)
