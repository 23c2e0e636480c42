"""A small form in columns: what is asked, and a field of words for each."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass
from functools import partial

from textual import events
from textual.app import ComposeResult
from textual.containers import Horizontal, Vertical
from textual.message import Message
from textual.widgets import Input

from tankcalc.tui.present import Line, clip
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.word_field import WordField

LABEL_COLUMNS = 18
LONGEST = 80


@dataclass(frozen=True, slots=True)
class Asked:
    """One thing that is asked.

    Attributes
    ----------
    name : str
        Id of its field.
    label : str
        What stands before it, up to 15 characters.
    hint : str
        What it takes, with an example.
    """

    name: str
    label: str
    hint: str


@dataclass
class WordsTyped(Message):
    """A field holds another text."""


@dataclass
class WordsDone(Message):
    """Enter was pressed in a field."""


class WordForm(Horizontal):
    """Labels and fields, one column beside the other."""

    DEFAULT_CSS = """
    WordForm { height: auto; padding: 0 0 1 0; background: ansi_default; }
    WordForm .labels { width: 18; height: 1; }
    WordForm .fields { width: 1fr; height: auto; padding: 0 1 0 0; }
    """

    def __init__(self, columns: Sequence[Sequence[Asked]], texts: dict[str, str]) -> None:
        super().__init__()
        self._columns = columns
        self._texts_at_first = texts
        self._wrong: Collection[str] = ()

    def compose(self) -> ComposeResult:
        """Lay out labels and fields."""
        for n, column in enumerate(self._columns):
            labels = Lines(partial(self._labels, n), id=f"labels-{n}")
            labels.add_class("labels")
            labels.styles.height = len(column)
            yield labels
            with Vertical(classes="fields"):
                for one in column:
                    yield WordField(one.name, self._texts_at_first.get(one.name, ""), LONGEST)

    @property
    def current(self) -> Asked | None:
        """What is being typed in, if anything."""
        focused = self.screen.focused
        name = focused.id if isinstance(focused, WordField) else None
        return next((one for column in self._columns for one in column if one.name == name), None)

    @property
    def texts(self) -> dict[str, str]:
        """What the fields hold, by their names, without the empty ones."""
        held = {widget.id or "": widget.value.strip() for widget in self.query(WordField)}
        return {name: text for name, text in held.items() if text}

    def fill(self, texts: dict[str, str]) -> None:
        """Put texts in the fields; a field without one becomes empty."""
        for widget in self.query(WordField):
            widget.value = texts.get(widget.id or "", "")

    def go(self, name: str) -> None:
        """Go to a field."""
        self.query_one(f"#{name}", WordField).focus()

    def mark(self, wrong: Collection[str]) -> None:
        """Mark the fields that cannot be used."""
        self._wrong = wrong
        self._label()

    def on_input_changed(self, event: Input.Changed) -> None:
        """Tell that a field holds another text."""
        event.stop()
        self.post_message(WordsTyped())

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Tell that Enter was pressed."""
        event.stop()
        self.post_message(WordsDone())

    def on_descendant_focus(self, _event: events.DescendantFocus) -> None:
        """Mark where the keys go."""
        self._label()

    def on_descendant_blur(self, _event: events.DescendantBlur) -> None:
        """Take the mark off."""
        self._label()

    def _label(self) -> None:
        for labels in self.query(Lines):
            labels.rebuild()

    def _labels(self, column: int, _width: int, _height: int) -> list[Line]:
        at = self.current
        lines: list[Line] = []
        for one in self._columns[column]:
            lead, style = (">", "key") if one is at else (" ", "")
            wrong = one.name in self._wrong
            label = clip(one.label, LABEL_COLUMNS - 3).ljust(LABEL_COLUMNS - 3)
            mark = ("X ", "refused") if wrong else ("  ", "")
            lines.append([(f"{lead}{label}", style), mark])
        return lines
