"""What a reading should have been: its readings to be typed over, and what they come to."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import ModalScreen

from tankcalc.text import clean
from tankcalc.tui import present
from tankcalc.tui.desk import Answer, answer_of
from tankcalc.tui.fields import NOTE, READINGS, takes
from tankcalc.tui.messages import EntryChanged, EntryLeft, FieldsMoved, NotAllowed
from tankcalc.tui.widgets.entry_form import EntryForm
from tankcalc.tui.widgets.lines import Lines

if TYPE_CHECKING:
    from tankcalc import units
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.report import Row
    from tankcalc.tank import Tank
    from tankcalc.tui.present import Line

Note = Callable[[Exception], str]
"""Writes a defect down and returns what to tell the operator."""


class AmendScreen(ModalScreen[Mapping[str, str] | None]):
    """The fields of the reading, filled as they were; F5 goes on to say why.

    Answers with what the fields hold when this is to be logged, and with None when it is not;
    ``typed`` holds it in either case.
    """

    DEFAULT_CSS = """
    AmendScreen { background: ansi_default; overflow: hidden; }
    AmendScreen #amend-head, AmendScreen #amend-keys { height: 1; }
    AmendScreen #amend-title { height: 2; }
    AmendScreen #entry { max-height: 9; }
    AmendScreen #amend-answer { height: 1fr; }
    """
    AUTO_FOCUS = ""
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("f5", "save", show=False),
        Binding("escape", "dismiss(None)", show=False),
    ]
    KEYS_TEXT = "F5 goes on to the reason   Esc goes back: nothing is logged   Down next field"

    def __init__(
        self,
        title: str,
        tank: Tank,
        fluid: Fluid,
        typed: Mapping[str, str],
        system: units.System,
        note: Note,
    ) -> None:
        super().__init__()
        self._title = title
        self._tank, self._fluid = tank, fluid
        self.typed = dict(typed)
        self._system, self._write_down = system, note
        self.answer = Answer(tank, fluid)
        self._rows: Sequence[Row] = ()
        self._said = ""

    def compose(self) -> ComposeResult:
        """Lay out the parts."""
        yield Lines(self._head, id="amend-head")
        yield Lines(self._heading, id="amend-title")
        yield EntryForm(id="entry", tell=self)
        yield Lines(self._answered, id="amend-answer")
        yield Lines(self._keys, id="amend-keys")

    @property
    def form(self) -> EntryForm:
        """The readings."""
        return self.query_one(EntryForm)

    async def on_mount(self) -> None:
        """Fill the fields, and answer what they hold."""
        await self.form.complete(self.typed)
        self.form.fit(self.answer.fitted | self.typed.keys())
        self.form.fill(self.typed)
        self.form.go()
        self._work_out()

    def on_entry_changed(self, message: EntryChanged) -> None:
        """Answer as it is typed."""
        message.stop()
        if message.text.strip():
            self.typed[message.name] = message.text
        else:
            self.typed.pop(message.name, None)
        self._said = ""
        self._work_out()

    def on_entry_left(self, message: EntryLeft) -> None:
        """Keep to oneself which field was left; nothing here is a draft of the desk."""
        message.stop()

    def on_fields_moved(self, _message: FieldsMoved) -> None:
        """Say how many fields are out of sight now."""
        self._rebuild("#amend-title")

    def on_not_allowed(self, message: NotAllowed) -> None:
        """Say why a key did nothing."""
        self.tell(present.not_allowed(message.name))

    def on_descendant_focus(self, _event: events.DescendantFocus) -> None:
        """Say what the field takes."""
        self._rebuild("#amend-answer")

    def tell(self, words: str) -> None:
        """Say something above the warnings."""
        self._said = words
        self._rebuild("#amend-answer")

    def action_save(self) -> None:
        """Go on, if there is something to log."""
        if self.answer.result is None:
            return self.tell(f"Nothing to log. {self.answer.why}")
        self.dismiss(dict(self.typed))
        return None

    def action_page_log(self, _by: int) -> None:
        """Stay: there is no log on this screen."""

    def _work_out(self) -> None:
        """Work out what the readings say now; nothing older stays."""
        readings = {name: text for name, text in self.typed.items() if name in READINGS}
        try:
            self.answer = answer_of(self._tank, self._fluid, readings).weighed()
            self._rows = self._figures()
        except Exception as error:  # noqa: BLE001 - a defect must not leave an old figure in sight
            why = f"This program failed; no figure is shown. {self._write_down(error)}"
            self.answer, self._rows = Answer(self._tank, self._fluid, why=why), ()
        self.form.mark(self.answer.problems)
        self._rebuild("#amend-answer", "#amend-title")

    def _figures(self) -> Sequence[Row]:
        if self.answer.result is None or self.answer.result.status == "refused":
            return ()
        from tankcalc.report import rows

        return rows(self.answer.result, self._system)

    def _head(self, width: int, _height: int) -> list[Line]:
        return [[(present.spread(f" {self._title}", "", width), "bar")]]

    def _heading(self, width: int, _height: int) -> list[Line]:
        name = clean(f"{self._tank.file or self._tank.name}, {self._fluid.name}")
        below = self.form.below
        more = f"  ({below} more below: Down)" if below else ""
        return [[(present.clip(name, width), "key")], [(f"READINGS{more}", "title")]]

    def _answered(self, width: int, height: int) -> list[Line]:
        at = self.form.current
        hint = "" if at is None or at.value else f"{at.field.label}: {takes(at.field.name)}"
        said = present.messages(self.answer, self._said, hint, width - 1, max(height - 5, 2))
        room = max(height - len(said) - 2, 1)
        figures = present.result_block(self._rows, room, width)
        return [[], present.result_title(self.answer), *figures, *said]

    def _keys(self, width: int, _height: int) -> list[Line]:
        return [[(present.spread(f" {self.KEYS_TEXT}", "", width), "bar")]]

    def _rebuild(self, *parts: str) -> None:
        for part in parts:
            self.query_one(part, Lines).rebuild()


def texts_of(typed: Mapping[str, str], note: str) -> dict[str, str]:
    """Return what an entry holds as it would be typed again: nothing in it acts on a terminal."""
    texts = {name: clean(text, 4000) for name, text in typed.items()}
    return texts | ({NOTE: clean(note, 4000)} if note else {})
