"""What stands on the main screen: the answer, the header and the log, shown when they change."""

from __future__ import annotations

import os
import time
from collections.abc import Sequence
from typing import TYPE_CHECKING

from tankcalc.tui.defects import note_defect
from tankcalc.tui.desk import Answer
from tankcalc.tui.present import units_word
from tankcalc.tui.work import begin

if TYPE_CHECKING:
    from textual.timer import Timer

    from tankcalc.profiles import Site
    from tankcalc.report import Row
    from tankcalc.tui.app import ConsoleApp
    from tankcalc.tui.log_front import LogFront
    from tankcalc.tui.logbook import LogBook


READ_ONLY = "LOG IS READ-ONLY: nothing can be saved"

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
        self._read_only = False
        self._weighing: Timer | None = None
        self.log: LogFront | None = None

    def show_answer(self, said: str = "") -> None:
        """Work out what the readings say, and show it; nothing older stays."""
        try:
            self.answer = self._app.desk.answer()
            self.rows = self._figures()
        except Exception as error:  # noqa: BLE001 - a defect must not leave an old figure in sight
            where = note_defect(self._app.options.state, error)
            self.answer = Answer(why=f"This program failed; no figure is shown. {where}")
            self.rows = ()
        troubles = [READ_ONLY if self._read_only else "", self._app.drafts.trouble]
        self._said = said or ". ".join(filter(None, troubles))
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

    def open_log(self, book: LogBook) -> None:
        """Show a log from now on; what it holds is read when it is next looked at."""
        from tankcalc.tui.log_front import LogFront

        self.log = LogFront(self._app, book)
        self._read_only = is_read_only(self._app.options.log, book.site)
        self._app.main.log_pane.open(self.log)

    def show_log(self) -> None:
        """Show the log as it was read last, or why there is none."""
        if self.log is None:
            self._app.main.log_pane.fail(self.log_trouble)
        else:
            self.log.show()

    def show_alerts(self) -> None:
        """Show which tanks have alerts, as they were found last."""
        from tankcalc.tui.alerts_present import main_line, marks_of

        app, watching = self._app, self._app.watching
        app.main.alert(
            marks_of(watching.found),
            lambda key, width: main_line(
                watching.found, watching.trouble, app.desk.tank_name, key, width
            ),
        )

    def read_log(self) -> None:
        """Read what is new in the log; other consoles write to it as well."""
        begin(self._app, self._read_log, "log")

    def tick(self) -> None:
        """Show the minute that has begun; nothing is sent in between."""
        self.show_header()
        self.read_log()
        self._app.set_timer(60.02 - time.time() % 60.0, self.tick)

    async def _read_log(self) -> None:
        if self.log is not None:
            await self.log.read(now_us())
        else:
            self.show_log()
        self._app.watching.look()

    def _figures(self) -> Sequence[Row]:
        if self.answer.result is None or self.answer.result.status == "refused":
            return ()
        from tankcalc.report import rows

        return rows(self.answer.result, self._app.desk.units)


def is_read_only(option: str | None, site: Site) -> bool:
    """Return whether the log is a file that exists and that cannot be written here.

    A file whose folder cannot be written counts: SQLite keeps its journal beside the file.
    """
    from tankcalc.shiftlog.address import log_address, log_file

    path = log_file(log_address(option, site))
    if path is None or not os.access(path, os.F_OK):
        return False
    return not (os.access(path, os.W_OK) and os.access(path.parent, os.W_OK))


def now_us() -> int:
    """Return the present instant, µs of UTC."""
    return time.time_ns() // 1000
