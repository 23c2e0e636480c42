"""A form above a text that answers it: what the planner and the balance are made of."""

from __future__ import annotations

from collections.abc import Sequence
from typing import ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import ModalScreen

from tankcalc.tui.present import Line, clip, spread, wrapped
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.text_pane import TextPane
from tankcalc.tui.widgets.word_form import Asked, WordForm


class FormScreen(ModalScreen[None]):
    """Title, form, answer, one row of what there is to say, keys."""

    DEFAULT_CSS = """
    FormScreen { background: ansi_default; overflow: hidden; }
    FormScreen #form-head, FormScreen #form-said, FormScreen #form-keys { height: 1; }
    FormScreen #form-said { height: 2; }
    FormScreen #form-answer { height: 1fr; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "app.focus_previous", show=False),
        Binding("down", "app.focus_next", show=False),
        Binding("pageup", "page(-1)", show=False),
        Binding("pagedown", "page(1)", show=False),
        Binding("f3", "units", show=False),
        Binding("escape", "dismiss(None)", show=False),
    ]
    TITLE_TEXT = ""
    KEYS_TEXT = ""
    COLUMNS: ClassVar[Sequence[Sequence[Asked]]] = ()

    def __init__(self, texts: dict[str, str]) -> None:
        super().__init__()
        self._texts = texts
        self._right = ""
        self._said: tuple[str, str] = ("", "")

    def compose(self) -> ComposeResult:
        """Lay out the parts."""
        yield Lines(self._head, id="form-head")
        yield WordForm(self.COLUMNS, self._texts)
        yield TextPane(id="form-answer")
        yield Lines(self._saying, id="form-said")
        yield Lines(self._keys, id="form-keys")

    @property
    def form(self) -> WordForm:
        """What can be typed in."""
        return self.query_one(WordForm)

    @property
    def pane(self) -> TextPane:
        """The answer."""
        return self.query_one(TextPane)

    def tell(self, words: str, style: str = "key") -> None:
        """Say something below the answer; empty: what the field takes."""
        self._said = words, style
        self.query_one("#form-said", Lines).rebuild()

    def heading(self, right: str) -> None:
        """Show something at the right end of the title."""
        self._right = right
        self.query_one("#form-head", Lines).rebuild()

    def on_descendant_focus(self, _event: events.DescendantFocus) -> None:
        """Say what the field takes."""
        self.query_one("#form-said", Lines).rebuild()

    def action_page(self, by: int) -> None:
        """Move in the answer."""
        self.pane.page(by)

    def _head(self, width: int, _height: int) -> list[Line]:
        return [[(spread(f" {self.TITLE_TEXT}", f"{self._right} ", width), "bar")]]

    def _saying(self, width: int, height: int) -> list[Line]:
        words, style = self._said
        lines = wrapped(words, style, width - 1)[:height] if words else []
        at = self.form.current
        if at is not None and len(lines) < height:
            lines += wrapped(f"? {at.label}: {at.hint}", "", width - 1)[: height - len(lines)]
        return lines

    def _keys(self, width: int, _height: int) -> list[Line]:
        return [[(clip(f" {self.KEYS_TEXT}", width), "bar")]]
