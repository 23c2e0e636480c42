"""Trying a liquid: its model and figures are typed, its density is drawn, and it can be saved."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal, Vertical
from textual.screen import ModalScreen

from tankcalc.errors import TankcalcError
from tankcalc.profiles.fluid_file import DEMO, refuse_name, save_fluid
from tankcalc.profiles.fluid_users import Users, users_of
from tankcalc.text import clean
from tankcalc.tui import liquid_present
from tankcalc.tui.liquid_curves import Shown, shown_of
from tankcalc.tui.liquid_draft import FILE, TEMPERATURE, LiquidDraft, opened
from tankcalc.tui.present import Line
from tankcalc.tui.screens.liquid_asks import AskLoss, AskSave, PickOrigin
from tankcalc.tui.widgets.lines import Lines
from tankcalc.tui.widgets.liquid_form import FigureTyped, LiquidForm, ModelChoice, ModelTurned
from tankcalc.tui.widgets.profile_chart import ProfileChart

if TYPE_CHECKING:
    from tankcalc.profiles import Site
    from tankcalc.tank import Tank
    from tankcalc.tui.desk import Desk


Note = Callable[[Exception], str]
"""Writes a defect down and returns what to tell the operator."""


@dataclass(frozen=True, slots=True)
class Kept:
    """A fluid that is on disk now: its name, and what to tell of it."""

    stem: str
    words: str


class LiquidScreen(ModalScreen[Kept | None]):
    """The form at the left, the curves at the right; None: nothing was saved."""

    DEFAULT_CSS = """
    LiquidScreen { background: ansi_default; overflow: hidden; }
    LiquidScreen #liquid-head, LiquidScreen #liquid-keys, LiquidScreen #model { height: 1; }
    LiquidScreen #liquid-middle { height: 1fr; }
    LiquidScreen #liquid-left { width: 43; margin: 0 1 0 0; }
    LiquidScreen #liquid-form {
        height: auto; max-height: 11; scrollbar-size: 0 0; layout: horizontal;
    }
    LiquidScreen #liquid-labels { width: 17; }
    LiquidScreen #liquid-fields { width: 1fr; height: auto; }
    LiquidScreen #liquid-figures { height: 1fr; margin: 1 0 0 0; }
    LiquidScreen #liquid-right { width: 1fr; }
    LiquidScreen ProfileChart { height: 1fr; }
    LiquidScreen #liquid-said { height: 3; }
    LiquidScreen.-tall #liquid-form { max-height: 20; }
    LiquidScreen.-tall #liquid-said { height: 5; }
    LiquidScreen.-wide #liquid-left { width: 58; }
    """
    AUTO_FOCUS = "#model"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "app.focus_previous", show=False),
        Binding("down", "app.focus_next", show=False),
        Binding("enter", "app.focus_next", show=False),
        Binding("f3,u", "units", show=False),
        Binding("f4,f", "origin", show=False),
        Binding("f5,s", "save", show=False),
        Binding("f8,c", "clear", show=False),
        Binding("pageup", "turn(-1)", show=False),
        Binding("pagedown", "turn(1)", show=False),
        Binding("escape", "leave", show=False),
    ]

    def __init__(
        self, desk: Desk, site: Site, tank: Tank, draft: LiquidDraft, note: Note, said: str
    ) -> None:
        super().__init__(classes="-narrow -short")
        self.HORIZONTAL_BREAKPOINTS = [(0, "-narrow"), (100, "-wide")]
        self.VERTICAL_BREAKPOINTS = [(0, "-short"), (30, "-tall")]
        self._desk, self._site, self._tank = desk, site, tank
        self._draft = draft
        self._other = LiquidDraft()
        self._shown = Shown()
        self._note, self._opening = note, said
        self._said: tuple[str, str] = ("", "")

    def compose(self) -> ComposeResult:
        """Lay out the parts."""
        yield Lines(self._head, id="liquid-head")
        with Horizontal(id="liquid-middle"):
            with Vertical(id="liquid-left"):
                yield ModelChoice(self._draft.model, id="model")
                yield LiquidForm(id="liquid-form")
                yield Lines(self._figures, id="liquid-figures")
            with Vertical(id="liquid-right"):
                yield ProfileChart("DENSITY BY TEMPERATURE", id="over-temperature")
                yield ProfileChart("DENSITY BY ELEVATION", id="over-elevation")
        yield Lines(self._messages, id="liquid-said")
        yield Lines(self._keys, id="liquid-keys")

    @property
    def form(self) -> LiquidForm:
        """The figures."""
        return self.query_one(LiquidForm)

    async def on_mount(self) -> None:
        """Show the draft."""
        await self._show_draft((self._opening, "check"))

    def on_descendant_focus(self, _event: events.DescendantFocus) -> None:
        """Say what the field takes, and which keys act now."""
        self._rebuild("#liquid-said", "#liquid-keys")

    def on_figure_typed(self, _message: FigureTyped) -> None:
        """Draw what the figures say now."""
        self._take_typed()

    async def on_model_turned(self, message: ModelTurned) -> None:
        """Take another model."""
        await self.action_turn(message.by)

    async def action_turn(self, by: int) -> None:
        """Take the next model, or the one before."""
        self._take_typed()
        self._draft.turn(by)
        await self._show_draft()
        self.query_one(ModelChoice).focus()

    def action_units(self) -> None:
        """Show the next system of units."""
        self._desk.next_units()
        self._rebuild("#liquid-head")
        self._try()

    def action_origin(self) -> None:
        """Begin from another fluid file; what was typed is kept for `action_clear`."""
        self._take_typed()
        if self._draft.changed and self._other.changed:
            words = "F8 shows another liquid that is in no file; beginning anew loses it."
            self.app.push_screen(AskLoss("LOSE THE OTHER LIQUID?", words), self._pick_origin)
        else:
            self._pick_origin(True)

    async def action_clear(self) -> None:
        """Begin with nothing; once more brings back what there was."""
        self._take_typed()
        self._draft, self._other = self._other, self._draft
        await self._show_draft(("F8 brings back what was there.", "key"))

    def action_save(self) -> None:
        """Show what will be written, and write it on Enter."""
        self._take_typed()
        trial = self._shown.trial
        wrong = trial.problems.keys() - {TEMPERATURE}
        if trial.model is None or wrong - {FILE}:
            return self._say("Nothing to save yet: a figure is wrong or missing.", "check")
        if wrong:
            self.form.go(FILE)
            return self._say("Not saved: this name cannot be used.", "check")
        if not self._draft.stem.strip():
            self.form.go(FILE)
            return self._say("Type the name of the file, then F5 again.", "check")
        if self._site.is_demo:
            return self._say(DEMO, "refused")
        users = users_of(self._site, self._draft.stem.strip()) if self._draft.in_place else Users()
        self.app.push_screen(AskSave(self._draft, users), self._save)
        return None

    def action_leave(self) -> None:
        """Leave the field, or go back; ask first where something typed would be lost."""
        self._take_typed()
        if self.form.current:
            self.query_one(ModelChoice).focus()
            return
        if self._draft.changed or self._other.changed:
            words = "The liquid as it was typed is in no file; leaving loses it."
            self.app.push_screen(AskLoss("LEAVE WITHOUT SAVING?", words), self._leave)
        else:
            self.dismiss(None)

    def _pick_origin(self, yes: bool | None) -> None:
        if yes:
            names = self._site.fluid_names()
            self.app.push_screen(PickOrigin(names, self._draft.stem), self._begin_from)

    async def _begin_from(self, stem: str | None) -> None:
        if stem is None:
            return
        try:
            draft = opened(self._site, stem)
        except TankcalcError as error:
            self._say(str(error), "refused")
            return
        draft.temperature = self._draft.temperature
        if self._draft.changed:
            self._other = self._draft
        self._draft = draft
        await self._show_draft()

    def _save(self, yes: bool | None) -> None:
        if not yes:
            return self._say("Not saved; everything typed is still here.", "key")
        draft = self._draft
        stem = draft.stem.strip()
        try:
            saved = save_fluid(self._site, stem, draft.shown_name, draft.stated(), draft.origin)
        except TankcalcError as error:
            return self._say(f"NOT SAVED: {error}", "refused")
        old = "" if saved.kept is None else f"; the old file is {clean(saved.kept.name)}"
        self.dismiss(Kept(stem, f"SAVED, on disk: fluids/{clean(saved.path.name)}{old}."))
        return None

    def _leave(self, yes: bool | None) -> None:
        if yes:
            self.dismiss(None)

    def _take_typed(self) -> None:
        """Hold what the fields hold, and show what it comes to.

        A key may be ahead of the message of what was typed last, so every key that acts asks.
        """
        texts = self.form.texts
        if any(self._draft.text(id) != text for id, text in texts.items()):
            for id, text in texts.items():
                self._draft.type(id, text)
            self._try()

    async def _show_draft(self, said: tuple[str, str] = ("", "")) -> None:
        """Show another draft, or the same one with another model."""
        fields = self._draft.fields()
        self.query_one(ModelChoice).update(self._draft.model)
        await self.form.show(fields, {one.id: self._draft.text(one.id) for one in fields})
        self._rebuild("#liquid-head")
        self._try()
        self._say(*said)

    def _try(self) -> None:
        """Work out what the draft says, and show it; nothing older stays."""
        self._said = ("", "")
        try:
            self._shown = shown_of(self._draft, self._tank, self._desk.units)
        except Exception as error:  # noqa: BLE001 - a defect must not leave an old curve in sight
            self._shown = Shown()
            self._said = f"This program failed; nothing is shown. {self._note(error)}", "refused"
        self._check_name()
        self.form.mark(self._shown.trial.problems)
        self.query_one("#over-temperature", ProfileChart).draw(self._shown.over_temperature)
        self.query_one("#over-elevation", ProfileChart).draw(self._shown.over_elevation)
        self._rebuild("#liquid-figures", "#liquid-said")

    def _check_name(self) -> None:
        """Tell of a name that cannot be, or is another fluid's, while it is typed."""
        stem = self._draft.stem.strip()
        try:
            if stem:
                refuse_name(self._site, stem, self._draft.origin)
        except TankcalcError as error:
            self._shown.trial.problems[FILE] = str(error)

    def _say(self, words: str, style: str) -> None:
        self._said = words, style
        self._rebuild("#liquid-said")

    def _head(self, width: int, _height: int) -> list[Line]:
        return [liquid_present.head(self._draft, self._tank.name, self._desk.units, width)]

    def _figures(self, width: int, height: int) -> list[Line]:
        return liquid_present.figure_lines(self._shown, width, height)

    def _messages(self, width: int, height: int) -> list[Line]:
        at, trial = self.form.current, self._shown.trial
        return liquid_present.message_lines(self._draft, trial, self._said, at, width - 1, height)

    def _keys(self, width: int, _height: int) -> list[Line]:
        return [liquid_present.key_line(bool(self.form.current), width)]

    def _rebuild(self, *parts: str) -> None:
        for part in parts:
            self.query_one(part, Lines).rebuild()
