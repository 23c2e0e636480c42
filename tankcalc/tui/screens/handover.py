"""The handover of a shift: read it, write it to a file, take it over by name."""

from __future__ import annotations

from collections.abc import Callable
from contextlib import closing
from functools import partial
from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import ModalScreen

from tankcalc.errors import TankcalcError
from tankcalc.text import clean
from tankcalc.tui.ascii import columns
from tankcalc.tui.aside import aside
from tankcalc.tui.handover_present import lines_of
from tankcalc.tui.present import CAUTION, Line, clip, spread, units_word, wrapped
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.log_pane import SHORT_CAUTION
from tankcalc.tui.widgets.text_pane import TextPane
from tankcalc.tui.work import begin

if TYPE_CHECKING:
    from tankcalc.handover.document import Document
    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Shift, Store
    from tankcalc.tui.desk import Desk
    from tankcalc.tui.logbook import LogBook

SETTLED_US = 2 * 3_600_000_000
"""While a shift is younger, the one before it is what is handed over."""

Write = Callable[["Shift", "Document"], None]
Take = Callable[["Shift"], None]


class HandoverScreen(ModalScreen[None]):
    """One shift's handover, made anew from the log each time it is shown."""

    DEFAULT_CSS = """
    HandoverScreen { background: ansi_default; overflow: hidden; }
    HandoverScreen #handover-head, HandoverScreen #handover-keys { height: 1; }
    HandoverScreen #handover-said { height: 1; }
    HandoverScreen #handover-text { height: 1fr; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move(-1)", show=False),
        Binding("down", "move(1)", show=False),
        Binding("pageup", "page(-1)", show=False),
        Binding("pagedown,space", "page(1)", show=False),
        Binding("home", "move(-99999)", show=False),
        Binding("end", "move(99999)", show=False),
        Binding("tab", "seek(1)", show=False),
        Binding("shift+tab", "seek(-1)", show=False),
        Binding("left", "shift(-1)", show=False),
        Binding("right", "shift(1)", show=False),
        Binding("k,f5", "take", show=False),
        Binding("w,f6", "write", show=False),
        Binding("u,f3", "units", show=False),
        Binding("escape,h,ctrl+o", "dismiss(None)", show=False),
    ]
    KEYS_TEXT = "k take over  w write a file  Tab next heading  Left Right other shift  Esc back"

    def __init__(
        self,
        desk: Desk,
        book: LogBook,
        store: Callable[[], Store],
        asks: tuple[Take, Write],
        note: Callable[[Exception], str],
    ) -> None:
        """``store`` opens the log once more, for the thread."""
        from tankcalc.shiftlog import now_us

        super().__init__()
        assert desk.site is not None
        self._desk, self._site, self._book, self._store = desk, desk.site, book, store
        self._take, self._write = asks
        self._note = note
        self._now = book.shift(now_us())
        young = now_us() - self._now.start_us < SETTLED_US
        self._shift = self._before(self._now) if young else self._now
        self._made: Document | None = None
        self._said = ""

    def compose(self) -> ComposeResult:
        """Lay out the parts."""
        yield Lines(self._head, id="handover-head")
        yield TextPane(id="handover-text")
        yield Lines(self._saying, id="handover-said")
        yield Lines(self._keys, id="handover-keys")

    @property
    def pane(self) -> TextPane:
        """The text."""
        return self.query_one(TextPane)

    def on_mount(self) -> None:
        """Make the handover."""
        self.make()

    def tell(self, words: str) -> None:
        """Say what became of something."""
        self._said = words
        self.query_one("#handover-said", Lines).rebuild()

    def done(self) -> None:
        """Show what was saved: the handover says who took over."""
        self.make()

    def make(self) -> None:
        """Make the handover of the chosen shift; one still being made is dropped."""
        self._made = None
        self.query_one("#handover-head", Lines).rebuild()
        self.pane.read(lambda width: wrapped("working ... (Esc leaves)", "key", width))
        begin(self, partial(self._make, self._shift), "handover", exclusive=True)

    def action_move(self, by: int) -> None:
        """Move by rows."""
        self.pane.move(by)

    def action_page(self, by: int) -> None:
        """Move by whole screens."""
        self.pane.page(by)

    def action_seek(self, by: int) -> None:
        """Go to the next heading, or to the one before."""
        self.pane.seek(by)

    def action_shift(self, by: int) -> None:
        """Show the shift before, or the one after."""
        if by > 0 and self._shift.start_us >= self._now.start_us:
            return self.tell("This is the shift that is on; there is no later one.")
        self._shift = self._before(self._shift) if by < 0 else self._book.shift(self._shift.end_us)
        self.tell("")
        self.make()
        return None

    def action_take(self) -> None:
        """Ask who takes over."""
        if self._made is None:
            return self.tell("There is no handover to take over yet.")
        self._take(self._shift)
        return None

    def action_write(self) -> None:
        """Ask for the file."""
        if self._made is None:
            return self.tell("There is no handover to write yet.")
        self._write(self._shift, self._made)
        return None

    def action_units(self) -> None:
        """Show the next system of units."""
        self._desk.next_units()
        self.make()

    def _before(self, shift: Shift) -> Shift:
        return self._book.shift(shift.start_us - 1)

    async def _make(self, shift: Shift) -> None:
        try:
            document = await aside(lambda: self._built(shift), "handover")
        except TankcalcError as error:
            return self._refuse(f"No handover: {error}")
        except Exception as error:  # noqa: BLE001 - a defect is told, and the console goes on
            words = f"This program failed; there is no handover. {self._note(error)}"
            return self._refuse(words)
        self._made = document
        return self.pane.read(lambda width: lines_of(document, width))

    def _built(self, shift: Shift) -> Document:
        """Return the handover; runs in another thread."""
        from tankcalc.handover.build import build
        from tankcalc.handover.words import document_of
        from tankcalc.shiftlog import now_us

        site: Site = self._site
        with closing(self._store()) as store:
            made = build(store, site, shift, now_us(), system=self._desk.units)
        return document_of(made)

    def _refuse(self, words: str) -> None:
        self.pane.read(lambda width: wrapped(words, "refused", width))

    def _head(self, width: int, _height: int) -> list[Line]:
        on = " (the shift that is on)" if self._shift == self._now else ""
        left = f" HANDOVER {clean(self._shift.title, 40)}{on}"
        unit = units_word(self._desk.units)
        right = f"{CAUTION}  {unit} "
        if columns(left) + 1 + columns(right) > width:
            right = f"{SHORT_CAUTION}  {unit} "
        return [[(spread(left, right, width), "bar")]]

    def _saying(self, width: int, _height: int) -> list[Line]:
        return wrapped(self._said, "key", width - 1)[:1] if self._said else []

    def _keys(self, width: int, _height: int) -> list[Line]:
        return [[(clip(f" {self.KEYS_TEXT}", width), "bar")]]
