"""Saving an entry: what will be logged is shown first, and saved means on disk."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal, Vertical
from textual.widgets import Input

from tankcalc.errors import InputError, StoreError
from tankcalc.tui.asks import Answers, Ask, MissingError
from tankcalc.tui.logbook import Unsaved
from tankcalc.tui.present import Line, field_label, wrapped
from tankcalc.tui.screens.dialog import Dialog
from tankcalc.tui.widgets.choice_field import ChoiceField, Turned
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.word_field import WordField
from tankcalc.tui.work import begin

if TYPE_CHECKING:
    from tankcalc.shiftlog import Receipt, Step
    from tankcalc.tui.logbook import LogBook


@dataclass(frozen=True, slots=True)
class Outcome:
    """What came of it.

    Attributes
    ----------
    answers : mapping of str to str
        What was answered, by name.
    sent : Unsaved or None
        The entry that was sent, if any.
    receipt : Receipt or None
        There when the entry is on disk.
    step : Step or None
        The step of the clock that was logged before it.
    touched : bool
        Whether anything was typed or chosen before the dialog was left.
    """

    answers: Answers = field(default_factory=dict)
    sent: Unsaved | None = None
    receipt: Receipt | None = None
    step: Step | None = None
    touched: bool = False


class SaveDialog(Dialog[Outcome]):
    """Asks what is to be asked, saves on Enter, and says so when it is not saved."""

    DEFAULT_CSS = """
    SaveDialog #asked { height: auto; }
    SaveDialog #labels { width: 15; }
    SaveDialog #answers { width: 1fr; height: auto; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("enter", "save", show=False),
        Binding("escape", "leave", show=False),
        Binding("up", "app.focus_previous", show=False),
        Binding("down", "app.focus_next", show=False),
    ]
    KEYS_TEXT = "Enter saves it   Esc goes back: nothing is logged, nothing is lost"
    ASKS: ClassVar[Sequence[Ask]] = ()
    START = "note"
    """Where the keys go first, once it is known who it is."""
    LIVE: ClassVar[frozenset[str]] = frozenset()
    """Names of the words that change what is shown."""

    def __init__(
        self, book: LogBook, answers: Mapping[str, str], sent: Unsaved | None = None
    ) -> None:
        super().__init__()
        self._book = book
        self._given = dict(answers)
        self._sent = sent
        self.on_send: Callable[[Outcome], None] = lambda _outcome: None
        """Called before an entry goes out: it can be kept where a crash does not reach it."""
        self._saving = self._asked_why = False
        self._refusal = ""
        self._told: list[Line] = []
        self._at_first: dict[str, str] = {}

    @abstractmethod
    def make(self, answers: Answers) -> Unsaved:
        """Return the entry to be saved; an InputError where there is none to be made."""

    @abstractmethod
    def subject(self, answers: Answers) -> Sequence[Line]:
        """Return what will be logged, in words."""

    async def prepare(self) -> None:
        """Read from the log what the entry needs; an InputError where there can be none."""

    def doubt(self, answers: Answers) -> tuple[str, str]:
        """Return what to say once before it is saved, and where the keys go then."""
        del answers
        return "", ""

    @property
    def asks(self) -> Sequence[Ask]:
        """What is asked."""
        return self.ASKS

    @property
    def other_rows(self) -> int:
        """Rows that are no text: title, keys and what is asked."""
        return 2 + len(self.asks)

    @property
    def answers(self) -> dict[str, str]:
        """What is answered by now."""
        held = {widget.id or "": widget.value for widget in self.query(WordField)}
        held |= {widget.id or "": widget.value for widget in self.query(ChoiceField)}
        return {**self._given, **held}

    def fields(self) -> ComposeResult:
        """Lay out what is asked."""
        with Horizontal(id="asked"):
            labels = Lines(id="labels")
            labels.styles.height = len(self.asks)
            yield labels
            with Vertical(id="answers"):
                for ask in self.asks:
                    given = self._given.get(ask.name, "")
                    if ask.options:
                        yield ChoiceField(ask.name, ask.options, given)
                    else:
                        yield WordField(ask.name, given, ask.longest)

    def on_mount(self) -> None:
        """Go where something is missing, and read what is needed."""
        super().on_mount()
        self._at_first = self.answers
        names = [ask.name for ask in self.asks]
        nobody = names[0] == "who" and not self._given.get("who")
        self.go("who" if nobody else self.START)
        if self._sent is not None:
            self._freeze()
            self.tell("NOT SAVED before; Enter sends the same entry again.", "refused")
        self._prepared = begin(self, self._prepare)

    def on_descendant_focus(self) -> None:
        """Mark where the keys go."""
        at = self.focused.id if self.focused is not None else ""
        labels = [field_label(ask.label, ask.name == at, False) for ask in self.asks]
        self.query_one("#labels", Lines).show(labels)

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Save from any field."""
        event.stop()
        self.action_save()

    def on_input_changed(self, event: Input.Changed) -> None:
        """Show what becomes of it."""
        event.stop()
        if event.input.id in self.LIVE:
            self.say(self.text())

    def on_turned(self, _message: Turned) -> None:
        """Show what becomes of it."""
        self.say(self.text())

    def text(self) -> list[Line]:
        """Return what became of it, and what will be logged."""
        return [*self._told, *self.subject(self.answers)]

    def action_save(self) -> None:
        """Send the entry; once it was sent, the very same one is sent again."""
        if not self._saving:
            self._saving = True
            begin(self, self._save)

    def action_leave(self) -> None:
        """Go back; not while the disk is being written to."""
        if not self._saving:
            touched = self.answers != self._at_first
            self.dismiss(Outcome(self.answers, self._sent, touched=touched))

    def go(self, name: str) -> None:
        """Go to what is asked under that name."""
        self.query_one(f"#{name}").focus()

    def tell(self, words: str, style: str) -> None:
        """Say something above what will be logged."""
        self._told = wrapped(words, style, self.size.width - 2)
        self.say(self.text())

    async def _prepare(self) -> None:
        try:
            await self.prepare()
        except InputError as error:
            self._refusal = str(error)
            self.tell(self._refusal, "refused")
        except StoreError as error:
            self.tell(f"The log cannot be read: {error}", "refused")
        else:
            self.say(self.text())

    async def _save(self) -> None:
        try:
            if self._sent is None:
                await self._prepared.wait()
                self._sent = self._made()
            if self._sent is not None:
                await self._send(self._sent)
        finally:
            self._saving = False

    def _made(self) -> Unsaved | None:
        """Return the entry to send; None where something is to be said first."""
        answers = self.answers
        try:
            made = self.make(answers)
        except InputError as error:
            if isinstance(error, MissingError):
                self.go(error.name)
            self.tell(self._refusal or str(error), "check")
            return None
        name, words = self.doubt(answers)
        if self._refusal or (words and not self._asked_why):
            self._asked_why = True
            if name:
                self.go(name)
            self.tell(self._refusal or words, "check")
            return None
        return made

    async def _send(self, sent: Unsaved) -> None:
        self._freeze()
        self.tell("Saving ...", "")
        self.on_send(Outcome(self.answers, sent))
        try:
            receipt, step = await self._book.append(sent)
        except StoreError as error:
            self.tell(f"NOT SAVED: {error}", "refused")
            self.keys("Enter tries again   Esc goes back and keeps what was typed")
        else:
            self.dismiss(Outcome(self.answers, sent, receipt, step))

    def _freeze(self) -> None:
        """Let nothing be changed in an entry that was sent; Enter and Esc stay."""
        for words in self.query(WordField):
            words.disabled = True
        for choice in self.query(ChoiceField):
            choice.freeze()
        self.on_descendant_focus()
