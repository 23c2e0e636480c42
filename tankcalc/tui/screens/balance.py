"""The balance: opening, movements, closing, and what is gained or lost."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import TYPE_CHECKING, ClassVar

from textual.binding import Binding, BindingType

from tankcalc.errors import TankcalcError
from tankcalc.tui.aside import aside
from tankcalc.tui.balance_ask import Ask, Balanced, ask_of, balanced
from tankcalc.tui.balance_present import COLUMNS, LABELS, headline, lines_of
from tankcalc.tui.plan_subject import at_fault, in_labels
from tankcalc.tui.present import units_word, wrapped
from tankcalc.tui.screens.form import FormScreen
from tankcalc.tui.widgets.word_form import WordsDone, WordsTyped
from tankcalc.tui.work import begin

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.profiles import Site
    from tankcalc.shiftlog import Store
    from tankcalc.tui.desk import Desk

WORKING = "working ... (Esc leaves; nothing is changed)"
BEGIN = "Enter draws the balance of what is typed above."


class BalanceScreen(FormScreen):
    """A span and a tank; Enter draws the balance, in a thread of its own."""

    TITLE_TEXT = "BALANCE"
    COLUMNS = COLUMNS
    KEYS_TEXT = "Enter draws it  Esc back  Tab next field  PgUp PgDn balance  F3 units"
    BINDINGS: ClassVar[list[BindingType]] = [Binding("f5", "draw", show=False)]

    def __init__(
        self,
        desk: Desk,
        site: Site,
        zone: ZoneInfo,
        store: Callable[[], Store],
        held: dict[str, str],
        note: Callable[[Exception], str],
    ) -> None:
        """``store`` opens the log once more, for the thread; ``held`` is kept up to date."""
        super().__init__(dict(held))
        self._desk, self._site, self._zone = desk, site, zone
        self._store, self._held, self._note = store, held, note
        self._shown: Balanced | None = None

    def on_mount(self) -> None:
        """Wait for what is asked."""
        self.heading(units_word(self._desk.units))
        self.pane.read(lambda width: wrapped(BEGIN, "", width))
        self.form.go("since")

    def on_words_typed(self, _message: WordsTyped) -> None:
        """Keep what is typed; the balance shown says what it is of."""
        self._held.clear()
        self._held.update(self.form.texts)
        if self._shown is not None:
            self.tell("Enter draws it anew; what is shown is of what was typed before.")

    def on_words_done(self, _message: WordsDone) -> None:
        """Draw the balance."""
        self.action_draw()

    def action_draw(self) -> None:
        """Draw the balance; one that is still being drawn is dropped."""
        from tankcalc.shiftlog import now_us

        self._shown = None
        self.form.mark(())
        self.tell("")
        try:
            ask = ask_of(self.form.texts, self._site.tank_names(), self._zone, now_us())
        except TankcalcError as error:
            name = at_fault(str(error))
            self.form.mark((name,) if name else ())
            return self._say(f"X No balance: {in_labels(str(error), LABELS)}", "refused")
        self._say(WORKING, "key")
        begin(self, partial(self._draw, ask), "balance", exclusive=True)
        return None

    def action_units(self) -> None:
        """Show the next system of units."""
        self._desk.next_units()
        self.heading(units_word(self._desk.units))
        if self._shown is not None:
            self._show(self._shown)

    async def _draw(self, ask: Ask) -> None:
        site, store = self._site, self._store
        try:
            self._show(await aside(lambda: balanced(store(), site, ask), "balance"))
        except TankcalcError as error:
            self._say(f"X No balance: {error}", "refused")
        except Exception as error:  # noqa: BLE001 - a defect is told, and the console goes on
            self._say(f"This program failed; there is no balance. {self._note(error)}", "refused")

    def _show(self, drawn: Balanced) -> None:
        from tankcalc.shiftlog import show_local

        system, zone = self._desk.units, self._zone
        lines = lines_of(drawn, system, lambda t_us: show_local(t_us, zone))
        self._shown = drawn
        self.pane.read(lambda _width: lines)
        self.tell(headline(drawn.found))

    def _say(self, words: str, style: str) -> None:
        self.pane.read(lambda width: wrapped(words, style, width))
