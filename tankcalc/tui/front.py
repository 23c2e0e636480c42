"""What stands on the main screen: the answer, the header and the log, shown when they change."""

from __future__ import annotations

import time
from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from tankcalc.errors import StoreError
from tankcalc.tui.defects import note_defect
from tankcalc.tui.desk import Answer
from tankcalc.tui.present import CAUTION, units_word, wrapped

if TYPE_CHECKING:
    from textual.timer import Timer

    from tankcalc.report import Row
    from tankcalc.shiftlog import Row as LogRow
    from tankcalc.tui.app import ConsoleApp


WEIGH_AFTER_S = 0.15
"""How long the keys must rest before the uncertainty is worked out: the figures come first."""


class Front:
    """The answer in front of the operator, and the log of the shift that is on."""

    def __init__(self, app: ConsoleApp) -> None:
        self._app = app
        self.answer = Answer()
        self.rows: Sequence[Row] = ()
        self.log_trouble = ""
        self._said = ""
        self._weighing: Timer | None = None
        self._entries: Sequence[LogRow] = ()
        self._recent: Sequence[LogRow] = ()

    def show_answer(self, said: str = "") -> None:
        """Work out what the readings say, and show it; nothing older stays."""
        try:
            self.answer = self._app.desk.answer()
            self.rows = self._figures()
        except Exception as error:  # noqa: BLE001 - a defect must not leave an old figure in sight
            where = note_defect(self._app.options.state, error)
            self.answer = Answer(why=f"This program failed; no figure is shown. {where}")
            self.rows = ()
        self._said = said or self._app.drafts.trouble
        self._app.main.answer(self.answer, self.rows, self._said)
        if self._weighing is not None:
            self._weighing.stop()
        if self.rows:
            self._weighing = self._app.set_timer(WEIGH_AFTER_S, self.weigh)

    def weigh(self) -> None:
        """Add what the figures are worth to what is shown."""
        self.answer = self.answer.weighed()
        self.rows = self._figures()
        self._app.main.answer(self.answer, self.rows, self._said)

    def checked(self, at_us: int) -> Answer:
        """Return the answer with its uncertainty, held against the earlier readings in the log."""
        answer = self.answer.weighed()
        if answer.result is None or answer.tank is None or answer.fluid is None:
            return answer
        from tankcalc.shiftlog import held_against_log

        result = held_against_log(
            answer.result, self._recent, answer.tank, answer.fluid, answer.typed, at_us
        )
        return replace(answer, result=result)

    def bring_tank(self) -> None:
        """Show another tank, with what was typed for it."""
        self._app.main.form.fill(self._app.desk.entry.fields)
        self.show_tank()

    def show_tank(self) -> None:
        """Show the tank in front as far as it is read by now; the fields hold what they hold."""
        app = self._app
        self.show_answer()
        if self.answer.tank is not None:
            app.main.form.fit(self.answer.fitted | app.desk.entry.fields.keys())
        app.main.list_tanks()
        app.main.call_after_refresh(app.main.show_below)

    def show_header(self) -> None:
        """Show site, units, shift and clock."""
        app = self._app
        if app.book is None:
            name = "tankcalc" if app.desk.site is None else app.desk.site.name
            return app.main.header(name, app.options.is_demo, [units_word(app.desk.units)])
        from tankcalc.tui.log_lines import clock

        now = now_us()
        right = [units_word(app.desk.units), app.book.shift(now).name, clock(now, app.book.zone)]
        return app.main.header(app.book.site.name, app.options.is_demo, right)

    def show_log(self) -> None:
        """Show the entries of this shift as they were read last."""
        app = self._app
        if app.book is None or self.log_trouble:
            trouble = self.log_trouble
            return app.main.log_pane.update(
                lambda width: wrapped(trouble, "refused", width), 0, "LOG", CAUTION
            )
        from tankcalc.tui.log_lines import log_rows, log_title

        entries, zone, units = self._entries, app.book.zone, app.desk.units
        title = log_title(app.book.shift(now_us()), zone, len(entries))
        return app.main.log_pane.update(
            lambda width: log_rows(entries, zone, units, width), len(entries), title, CAUTION
        )

    def read_log(self) -> None:
        """Read this shift's entries again; other consoles write to the log as well."""
        self._app.run_worker(self._read_log(), exclusive=True, group="log")

    def tick(self) -> None:
        """Show the minute that has begun; nothing is sent in between."""
        self.show_header()
        self.read_log()
        self._app.set_timer(60.02 - time.time() % 60.0, self.tick)

    async def _read_log(self) -> None:
        if self._app.book is not None:
            try:
                self._entries = await self._app.book.entries(self._app.book.shift(now_us()))
                self._recent = await self._app.book.recent()
                self.log_trouble = ""
            except StoreError as error:
                self.log_trouble = f"The log cannot be read: {error}"
        self.show_log()

    def _figures(self) -> Sequence[Row]:
        if self.answer.result is None or self.answer.result.status == "refused":
            return ()
        from tankcalc.report import rows

        return rows(self.answer.result, self._app.desk.units)


def now_us() -> int:
    """Return the present instant, µs of UTC."""
    return time.time_ns() // 1000
