"""Saving an entry: what will be logged is shown first, and saved means on disk."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal, Vertical
from textual.widgets import Input

from tankcalc.errors import InputError, StoreError
from tankcalc.tui.logbook import Unsaved
from tankcalc.tui.present import Line, field_label, wrapped
from tankcalc.tui.screens.dialog import Dialog
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.word_field import WordField

if TYPE_CHECKING:
    from tankcalc.shiftlog import Receipt
    from tankcalc.tui.logbook import LogBook


@dataclass(frozen=True, slots=True)
class Outcome:
    """What came of it: the entry that was sent, if any, and the receipt when it is on disk."""

    who: str
    note: str
    sent: Unsaved | None = None
    receipt: Receipt | None = None


class SaveDialog(Dialog[Outcome]):
    """Asks who and what note, saves on Enter, and says so when it is not saved."""

    DEFAULT_CSS = """
    SaveDialog #asked { height: 2; }
    SaveDialog #labels { width: 15; height: 2; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("enter", "save", show=False),
        Binding("escape", "leave", show=False),
        Binding("up", "app.focus_previous", show=False),
        Binding("down", "app.focus_next", show=False),
    ]
    KEYS_TEXT = "Enter saves it   Esc goes back: nothing is logged, nothing is lost"

    def __init__(self, book: LogBook, who: str, note: str, sent: Unsaved | None = None) -> None:
        super().__init__()
        self._book = book
        self._who, self._note = who, note
        self._sent = sent
        self._saving = False
        self._told: list[Line] = []

    @abstractmethod
    def make(self, who: str, note: str) -> Unsaved:
        """Return the entry to be saved; an InputError where there is none to be made."""

    @abstractmethod
    def subject(self) -> list[Line]:
        """Return what will be logged, in words."""

    def fields(self) -> ComposeResult:
        """Ask for who and for the note."""
        with Horizontal(id="asked"):
            yield Lines(id="labels")
            with Vertical():
                yield WordField("who", self._who, 80)
                yield WordField("note", self._note, 200)

    def on_mount(self) -> None:
        """Go where something is missing."""
        super().on_mount()
        self._field("note" if self._who else "who").focus()
        if self._sent is not None:
            self._freeze()
            self._tell("NOT SAVED before; Enter sends the same entry again.", "refused")

    def on_descendant_focus(self) -> None:
        """Mark where the keys go."""
        at = self.focused.id if self.focused is not None else ""
        labels = [field_label(name, name == at, False) for name in ("who", "note")]
        self.query_one("#labels", Lines).show(labels)

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Save from either field."""
        event.stop()
        self.action_save()

    def text(self) -> list[Line]:
        """Return what became of it, and what will be logged."""
        return [*self._told, *self.subject()]

    def action_save(self) -> None:
        """Send the entry; once it was sent, the very same one is sent again."""
        if not self._saving and self._prepared():
            self._saving = True
            self._freeze()
            self._tell("Saving ...", "")
            self.run_worker(self._save())

    def action_leave(self) -> None:
        """Go back; not while the disk is being written to."""
        if not self._saving:
            self.dismiss(Outcome(self._field("who").value, self._field("note").value, self._sent))

    def _prepared(self) -> bool:
        """Return whether there is an entry to send; otherwise say what is missing."""
        who, note = self._field("who").value.strip(), self._field("note").value.strip()
        if self._sent is not None:
            return True
        if not who:
            self._field("who").focus()
            self._tell("Who is it? Type your name or initials, then Enter.", "check")
            return False
        try:
            self._sent = self.make(who, note)
        except InputError as error:
            self._field("note").focus()
            self._tell(str(error), "check")
        return self._sent is not None

    async def _save(self) -> None:
        assert self._sent is not None
        try:
            receipt = await self._book.append(self._sent)
        except StoreError as error:
            self._tell(f"NOT SAVED: {error}", "refused")
            self.keys("Enter tries again   Esc goes back and keeps what was typed")
        else:
            entry = self._sent.entry
            self.dismiss(Outcome(entry.who, entry.note, self._sent, receipt))
        finally:
            self._saving = False

    def _freeze(self) -> None:
        """Let nothing be changed in an entry that was sent."""
        for field in self.query(WordField):
            field.disabled = True

    def _tell(self, words: str, style: str) -> None:
        self._told = wrapped(words, style, self.size.width - 2)
        self.say(self.text())

    def _field(self, name: str) -> WordField:
        return self.query_one(f"#{name}", WordField)


class SaveReading(SaveDialog):
    """Shows a reading and what it came to, and saves it.

    The entry is made when this opens, so that no number of Enters can log it twice.
    """

    TITLE_TEXT = "LOG THIS READING?"

    def __init__(
        self, book: LogBook, unsaved: Unsaved, who: str, subject: Sequence[Line], *, again: bool
    ) -> None:
        super().__init__(book, who, unsaved.entry.note, unsaved if again else None)
        self._unsaved = unsaved
        self._subject = list(subject)

    def make(self, who: str, note: str) -> Unsaved:
        """Return the entry with who and note, under the identifier it was opened with."""
        entry = replace(self._unsaved.entry, who=who, note=note)
        return Unsaved(entry, self._unsaved.texts)

    def subject(self) -> list[Line]:
        """Return tank, readings as typed, and the result."""
        return self._subject
