"""The answer in full, a page each: figures, uncertainty, corrections, agreement, sums."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tankcalc.text import clean
from tankcalc.tui.fields import label_of
from tankcalc.tui.present import all_messages, figure, result_title, table, wrapped
from tankcalc.tui.screens.detail import DetailScreen, Page

if TYPE_CHECKING:
    from tankcalc.tui.app import ConsoleApp
    from tankcalc.tui.desk import Desk
    from tankcalc.tui.present import Line


class DetailActions:
    """Shows every figure and every warning, and where they come from."""

    _app: ConsoleApp
    _desk: Desk

    def details(self) -> None:
        """Show every figure and every warning in full."""
        fluid = self._app.front.answer.fluid
        of = "" if fluid is None else f": {clean(fluid.name)}"
        title = f"{clean(self._desk.tank_name)} IN FULL{of}"
        pages: list[Page] = [("figures", self._in_full)]
        if self._app.front.answer.readings is not None:
            pages.append(("uncertainty", self._uncertainty))
            pages.append(("corrections", self._corrections))
            pages.append(("agreement", self._agreement))
            pages.append(("sums", self._sums))
        self._app.push_screen(DetailScreen(title, pages, self.units))

    def units(self) -> None:
        """Show the next system of units."""
        self._desk.next_units()
        self._app.front.show_header()
        self._app.front.show_answer()
        self._app.front.show_log()

    def _uncertainty(self, width: int) -> list[Line]:
        """Return what each input adds to the uncertainty."""
        from tankcalc.report import budget_table
        from tankcalc.uncertainty import assess

        answer = self._app.front.answer
        if answer.tank is None or answer.fluid is None or answer.readings is None:
            return []
        budget = assess(answer.tank, answer.fluid, answer.readings)
        if budget is None:
            return wrapped("There is no answer, so there is no uncertainty of one.", "", width)
        return table(budget_table(budget, self._desk.units))

    def _corrections(self, width: int) -> list[Line]:
        """Return what each correction is worth."""
        from tankcalc.report import terms_table
        from tankcalc.terms import terms

        answer = self._app.front.answer
        if answer.tank is None or answer.fluid is None or answer.readings is None:
            return []
        found = terms(answer.tank, answer.fluid, answer.readings)
        if not found:
            return wrapped("There is no correction that would change the answer.", "", width)
        return table(terms_table(found, self._desk.units))

    def _agreement(self, width: int) -> list[Line]:
        """Return whether the readings agree, and which single faults would make them."""
        from tankcalc.consistency import explain, words
        from tankcalc.typed import typed_units

        answer = self._app.front.answer
        if answer.tank is None or answer.fluid is None or answer.readings is None:
            return []
        meant = typed_units(answer.typed)
        found = explain(answer.tank, answer.fluid, answer.readings, typed_units=meant)
        lines: list[Line] = []
        for line in words(found, self._desk.units):
            lines += wrapped(line, "", width)
        return lines

    def _sums(self, width: int) -> list[Line]:
        """Return the working from observed volume to weight, in both ways of rounding."""
        from tankcalc.report import sums_table
        from tankcalc.sums import ROUNDINGS, sums

        answer, shown = self._app.front.answer, self._desk.units
        if answer.tank is None or answer.fluid is None or answer.readings is None:
            return []
        lines: list[Line] = []
        for rounding in ROUNDINGS:
            found = sums(answer.tank, answer.fluid, answer.readings, rounding, shown)
            lines += [*table(sums_table(found)), []]
        return lines

    def _in_full(self, width: int) -> list[Line]:
        answer = self._app.front.answer
        lines = [result_title(answer)]
        lines += [[(f"{label_of(name)}: {text}", "")] for name, text in answer.typed.items()]
        rows = self._app.front.rows
        lines += [figure(row.label, row.value, width, row.give) for row in rows]
        return [*lines, [], *all_messages(answer, width)]
