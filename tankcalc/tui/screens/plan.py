"""The planner: what fits, when to call stop, and what a receipt or a warm day does."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, ClassVar

from textual.binding import Binding, BindingType

from tankcalc import units
from tankcalc.errors import TankcalcError
from tankcalc.text import clean
from tankcalc.tui.aside import aside
from tankcalc.tui.plan_present import COLUMNS, LABELS, lines_of
from tankcalc.tui.plan_subject import at_fault, in_labels, planned
from tankcalc.tui.present import CAUTION, units_word, wrapped
from tankcalc.tui.screens.form import FormScreen
from tankcalc.tui.widgets.word_form import WordsDone, WordsTyped
from tankcalc.tui.work import begin

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from tankcalc.profiles import Site
    from tankcalc.tui.desk import Desk
    from tankcalc.tui.plan_subject import Subject

Find = Callable[[], "Subject"]
"""Looks for what to plan from; it may be slow."""

Flow = Callable[[], "tuple[float, float | None] | None"]
"""Returns the flow that the log shows, m3/s into the tank, with its standard uncertainty."""


class PlanScreen(FormScreen):
    """Questions to one reading, answered as they are typed."""

    COLUMNS = COLUMNS
    KEYS_TEXT = "Esc back  Enter next field  PgUp PgDn  F3 units  F5 rate of the log  F8 clear"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("f5", "rate", show=False),
        Binding("f8", "clear", show=False),
    ]

    def __init__(
        self,
        desk: Desk,
        site: Site,
        zone: ZoneInfo,
        find: Find,
        flow: Flow,
        held: dict[str, str],
        note: Callable[[Exception], str],
    ) -> None:
        """``held`` is what was typed the last time; it is kept up to date."""
        super().__init__(dict(held))
        self.TITLE_TEXT = f"PLAN FOR {clean(desk.tank_name, 30)}"
        self._desk, self._site, self._zone = desk, site, zone
        self._find, self._flow, self._held, self._note = find, flow, held, note
        self._subject: Subject | None = None
        self._cleared: dict[str, str] = {}

    def on_mount(self) -> None:
        """Look for the reading, and answer what was asked the last time."""
        self.heading(f"{CAUTION}  {units_word(self._desk.units)}")
        self.pane.read(lambda width: wrapped("working ...", "", width))
        self.form.go("to")
        begin(self, self._look)

    def on_words_typed(self, _message: WordsTyped) -> None:
        """Answer as it is typed."""
        self._held.clear()
        self._held.update(self.form.texts)
        self._answer()

    def on_words_done(self, _message: WordsDone) -> None:
        """Go on to the next field."""
        self.focus_next()

    def action_units(self) -> None:
        """Show the next system of units."""
        self._desk.next_units()
        self.heading(f"{CAUTION}  {units_word(self._desk.units)}")
        self._answer()

    def action_rate(self) -> None:
        """Take the rate of the last two readings in the log."""
        flow = self._flow()
        if flow is None:
            return self.tell("The log shows no rate: the tank is static, or was read only once.")
        rate, uncertainty = (None if q is None else units.show(q, "volume_flow") for q in flow)
        shown = {"rate": rate or "", "rate-uncertainty": uncertainty or ""}
        self.form.fill({**self.form.texts, **shown})
        self.tell("That is the rate between the last two readings in the log.")
        return None

    def action_clear(self) -> None:
        """Empty the fields; once more brings back what was typed."""
        held = self.form.texts
        self.form.fill(self._cleared)
        self._cleared = held

    async def _look(self) -> None:
        try:
            self._subject = await aside(self._find, "plan")
        except TankcalcError as error:
            words = str(error)
        except Exception as error:  # noqa: BLE001 - a defect is told, and the console goes on
            words = f"This program failed; there is no plan. {self._note(error)}"
        else:
            return self._answer()
        return self.pane.read(lambda width: wrapped(words, "check", width))

    def _answer(self) -> None:
        """Show what the fields ask for; nothing older stays."""
        if self._subject is None:
            return
        try:
            self._show(self._subject)
        except TankcalcError as error:
            name, words = at_fault(str(error)), in_labels(str(error), LABELS)
            self._refuse(words, name)
        except Exception as error:  # noqa: BLE001 - a defect must not leave an old plan in sight
            self._refuse(f"This program failed; there is no plan. {self._note(error)}", "")

    def _show(self, subject: Subject) -> None:
        from tankcalc.shiftlog import now_us

        plan = planned(subject, self._site, self.form.texts)
        now, system, zone = now_us(), self._desk.units, self._zone
        self.form.mark(())
        self.pane.read(lambda width: lines_of(plan, subject, now, system, zone, width), again=True)

    def _refuse(self, words: str, name: str) -> None:
        self.form.mark((name,) if name else ())
        self.pane.read(lambda width: wrapped(f"X No plan: {words}", "refused", width))
