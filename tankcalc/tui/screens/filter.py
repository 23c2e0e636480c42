"""Choosing which entries the log pane shows."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal, Vertical
from textual.widgets import Input

from tankcalc.errors import InputError
from tankcalc.shiftlog.kinds import KINDS
from tankcalc.tui.log_filter import ALL, THIS, LogFilter
from tankcalc.tui.present import Line, field_label, wrapped
from tankcalc.tui.screens.dialog import Dialog
from tankcalc.tui.widgets.choice_field import ChoiceField
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.word_field import WordField

LABELS = ("tank", "kind", "shift")
ANY_TANK, ANY_KIND = "all tanks", "all kinds"


class ChooseEntries(Dialog[LogFilter | None]):
    """Asks for tank, kind and shift; None: stay with what is shown."""

    DEFAULT_CSS = """
    ChooseEntries #asked { height: 3; }
    ChooseEntries #labels { width: 15; height: 3; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("enter", "take", show=False),
        Binding("escape", "dismiss(None)", show=False),
        Binding("up", "app.focus_previous", show=False),
        Binding("down", "app.focus_next", show=False),
        Binding("f8", "clear", show=False),
    ]
    TITLE_TEXT = "SHOW WHICH ENTRIES OF THE LOG?"
    KEYS_TEXT = "Enter shows them   F8 back to all of this shift   Esc stays as it is"

    def __init__(
        self,
        tanks: Sequence[str],
        chosen: LogFilter,
        example: str,
        check: Callable[[LogFilter], object],
    ) -> None:
        super().__init__()
        self._tanks, self._chosen, self._example = tanks, chosen, example
        self._check = check
        self._told = ""

    def fields(self) -> ComposeResult:
        """Ask for tank, kind and shift."""
        with Horizontal(id="asked"):
            yield Lines(id="labels")
            with Vertical():
                yield ChoiceField("tank", (ANY_TANK, *self._tanks), self._chosen.tank)
                yield ChoiceField("kind", (ANY_KIND, *KINDS), self._chosen.kind)
                yield WordField("shift", self._chosen.shift, 60)

    def on_mount(self) -> None:
        """Go to the tanks."""
        super().on_mount()
        self.query_one("#tank").focus()

    def on_descendant_focus(self) -> None:
        """Mark where the keys go."""
        at = self.focused.id if self.focused is not None else ""
        labels = [field_label(name, name == at, False) for name in LABELS]
        self.query_one("#labels", Lines).show(labels)

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Take it from the field too."""
        event.stop()
        self.action_take()

    def text(self) -> list[Line]:
        """Return what the fields take."""
        words = (
            f'Letters go to a name. Shift: "{THIS}" for the one that is on, "{ALL}" for every one, '
            f'or a date and a name, such as "{self._example}".'
        )
        width = self.size.width - 2
        return [*wrapped(self._told, "check", width), *wrapped(words, "", width)]

    def tell(self, words: str) -> None:
        """Say what cannot be shown."""
        self._told = words
        self.say(self.text())

    def action_take(self) -> None:
        """Take what is chosen."""
        tank = self.query_one("#tank", ChoiceField).value
        kind = self.query_one("#kind", ChoiceField).value
        shift = self.query_one("#shift", WordField).value.strip() or THIS
        chosen = LogFilter(
            "" if tank == ANY_TANK else tank, "" if kind == ANY_KIND else kind, shift
        )
        try:
            self._check(chosen)
        except InputError as error:
            self.query_one("#shift").focus()
            self.tell(str(error))
        else:
            self.dismiss(chosen)

    def action_clear(self) -> None:
        """Go back to all of this shift."""
        self.dismiss(LogFilter())
