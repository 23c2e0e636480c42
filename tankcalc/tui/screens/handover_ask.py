"""Taking a shift over by name, and the file a handover is written to."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal
from textual.widgets import Input

from tankcalc.errors import TankcalcError
from tankcalc.text import clean
from tankcalc.tui.aside import aside
from tankcalc.tui.asks import ASK_NOTE, ASK_WHO, Answers, Ask, named
from tankcalc.tui.present import Line, field_label, wrapped
from tankcalc.tui.screens.dialog import Dialog
from tankcalc.tui.screens.save import SaveDialog
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.word_field import WordField

if TYPE_CHECKING:
    from tankcalc.handover.document import Document
    from tankcalc.shiftlog import Shift
    from tankcalc.tui.logbook import LogBook, Unsaved

LONGEST_PATH = 1000


class SaveTakeover(SaveDialog):
    """Asks who takes over, and saves it."""

    TITLE_TEXT = "TAKE OVER?"
    ASKS: ClassVar[Sequence[Ask]] = (ASK_WHO, ASK_NOTE)

    def __init__(
        self,
        book: LogBook,
        shift: Shift,
        answers: Mapping[str, str],
        sent: Unsaved | None = None,
        giver: str = "",
    ) -> None:
        super().__init__(book, answers, sent)
        self._shift = shift
        self._giver = giver

    def make(self, answers: Answers) -> Unsaved:
        """Return the entry of it."""
        from tankcalc.shiftlog import acknowledgement_entry, now_us

        entry = acknowledgement_entry(
            site=self._book.site,
            of="handover",
            what=self._shift.title,
            who=named(answers),
            now_us=now_us(),
            note=answers.get("note", "").strip(),
        )
        return self._book.with_texts(entry)

    def doubt(self, answers: Answers) -> tuple[str, str]:
        """Ask once more where the one who worked here until now is named again."""
        who = named(answers)
        if who.casefold() != self._giver.strip().casefold():
            return "", ""
        words = f"{clean(who, 80)} takes over from {clean(who, 80)}? Enter again saves it."
        return "who", words

    def subject(self, _answers: Answers) -> list[Line]:
        """Return what is taken over."""
        words = (
            f"The handover of {clean(self._shift.title, 80)} was read and understood. Who takes "
            "over gives the name; a note says what was asked or is doubted."
        )
        width = self.size.width - 2
        return [*self._early(width), *wrapped(words, "", width)]

    def _early(self, width: int) -> list[Line]:
        """Say that the shift still runs, where it does."""
        from tankcalc.shiftlog import now_us
        from tankcalc.tui.log_lines import clock

        if now_us() >= self._shift.end_us:
            return []
        end = clock(self._shift.end_us, self._book.zone)
        return wrapped(f"! This shift is not over: it ends {end}.", "check", width)


class AskFile(Dialog[Path | None]):
    """Asks for a file and writes the handover to it; None: nothing was written."""

    DEFAULT_CSS = """
    AskFile #asked { height: 1; }
    AskFile #labels { width: 15; height: 1; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [Binding("escape", "leave", show=False)]
    TITLE_TEXT = "WRITE THE HANDOVER TO A FILE"
    KEYS_TEXT = "Enter writes it   Esc goes back: nothing is written"

    def __init__(self, shift: Shift, document: Document) -> None:
        super().__init__()
        self._proposed = file_name(shift)
        self._document = document
        self._told: list[Line] = []
        self._asked_over = ""
        self._writing = False

    def fields(self) -> ComposeResult:
        """Ask for the file."""
        with Horizontal(id="asked"):
            yield Lines(id="labels")
            yield WordField("file", self._proposed, LONGEST_PATH)

    def on_mount(self) -> None:
        """Go to the name."""
        super().on_mount()
        self.query_one("#labels", Lines).show([field_label("file", True, False)])
        self.query_one(WordField).focus()

    def text(self) -> list[Line]:
        """Return what became of it, and what can be written."""
        width = self.size.width - 2
        forms = "The ending says what: .html a page to print, with trends; .md Markdown; .csv rows."
        where = f"Without a folder it goes to {_here()}"
        return [*self._told, *wrapped(forms, "", width), *wrapped(where, "", width)]

    async def on_input_submitted(self, event: Input.Submitted) -> None:
        """Write it; a file of that name is replaced only when Enter is pressed again."""
        event.stop()
        typed = event.value.strip()
        if self._writing or not typed:
            return
        self._writing = True
        try:
            await self._write(typed)
        except OSError as error:
            self._tell(f"NOT WRITTEN: {error.strerror or error}. Name another file.", "refused")
        except (TankcalcError, ValueError) as error:
            self._tell(f"NOT WRITTEN: {error}", "refused")
        finally:
            self._writing = False

    def action_leave(self) -> None:
        """Go back; not while the file is being written."""
        if not self._writing:
            self.dismiss(None)

    async def _write(self, typed: str) -> None:
        path = _path(typed)
        if path.is_file() and self._asked_over != typed:
            self._asked_over = typed
            return self._tell(f"{clean(typed)} exists. Enter again replaces it.", "check")
        await aside(partial(_write, self._document, path), "handover-file")
        self.dismiss(path.resolve())
        return None

    def _tell(self, words: str, style: str) -> None:
        self._told = wrapped(words, style, self.size.width - 2)
        self.say(self.text())


def file_name(shift: Shift) -> str:
    """Return a name for the file of a shift's handover, of plain characters only."""
    plain = re.sub(r"[^0-9A-Za-z]+", "-", shift.title).strip("-")
    return f"handover-{plain}.html"


def _here() -> str:
    """Return where this program runs, made safe to show."""
    try:
        return clean(str(Path.cwd()), 400)
    except OSError:
        return "nowhere: the folder this program was started in is gone"


def _path(typed: str) -> Path:
    try:
        return Path(typed).expanduser()
    except RuntimeError:
        return Path(typed)


def _write(document: Document, path: Path) -> None:
    from tankcalc.handover.files import form_of, write

    write(form_of(path)(document), path)
