"""The trying of a liquid as lines of words; no terminal library here, and nothing computed."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from tankcalc.text import clean
from tankcalc.tui.liquid_draft import MODEL, LiquidDraft, models
from tankcalc.tui.present import Line, clip, spread, units_word, wrapped

if TYPE_CHECKING:
    from tankcalc.tui.liquid_curves import Shown
    from tankcalc.tui.liquid_trial import Trial

KEYS = (("F5", "s", "save"), ("F4", "f", "begin from"), ("F8", "c", "clear"), ("F3", "u", "units"))
LABEL_COLUMNS = 20


def head(draft: LiquidDraft, tank: str, units: str, width: int) -> Line:
    """Return the top row: where the liquid began, which tank it is tried in, the units."""
    origin = draft.origin
    of = "a new one" if origin is None else f"from fluids/{clean(origin.stem, 40)}.toml"
    left = f" TRY A LIQUID: {of}, in {clean(tank, 20)}"
    return [(spread(left, f"{units_word(units)} ", width), "bar")]


def figure_lines(shown: Shown, width: int, height: int) -> list[Line]:
    """Return the figures, and whose equations they come from."""
    lines: list[Line] = [
        [
            (f" {clip(label, LABEL_COLUMNS - 2):<{LABEL_COLUMNS - 1}}", ""),
            (clip(value, width - LABEL_COLUMNS), "figure"),
        ]
        for label, value in shown.figures
    ]
    if shown.trial.model is not None:
        source = wrapped(f"Source: {shown.trial.model.source}.", "", width - 2)
        lines += [[(" ", ""), *row] for row in source]
    return lines[:height]


def message_lines(
    draft: LiquidDraft, trial: Trial, said: tuple[str, str], at: str, width: int, height: int
) -> list[Line]:
    """Return the last event, what is wrong, what is missing; then what the field takes.

    What finds no room is counted, never dropped in silence; the hint alone gives way.
    """
    words, style = said
    lines = wrapped(words, style, width) if words else []
    labels = {one.id: one.label for one in draft.fields()}
    for id, why in trial.problems.items():
        lines += wrapped(f"X {labels.get(id, MODEL)}: {why}", "refused", width)
    missing = draft.missing()
    if missing:
        lines += wrapped(f"- Still missing: {', '.join(missing)}.", "", width)
    if len(lines) > height:
        more = f"(+{len(lines) - height + 1} more lines)"
        last, style = lines[height - 1][0]
        return [*lines[: height - 1], [(spread(last, more, width), style)]]
    return [*lines, *wrapped(_hint(draft, at), "", width)][:height]


def _hint(draft: LiquidDraft, at: str) -> str:
    """Return what can be typed where the keys go."""
    for field in draft.fields():
        if field.id == at:
            return f"? {field.label}: {field.takes}"
    return f"? {MODEL}: {', '.join(models())}"


def key_line(typing: bool, width: int) -> Line:
    """Return the row of keys; the letters act where no field is being typed in."""
    acts = "  ".join(f"{key if typing else f'{key}/{letter}'} {word}" for key, letter, word in KEYS)
    move = "PgUp PgDn model" if typing else "Left Right model"
    return [(clip(f" {move}  {acts}  Esc back", width).ljust(width), "bar")]


def to_save(draft: LiquidDraft, width: int) -> list[Line]:
    """Return what will be written, and where."""
    where = f"fluids/{draft.stem.strip()}.toml"
    what = f"{where} is a new file."
    if draft.in_place:
        what = f"{where} is changed: its comments stay, and the old file is kept beside it."
    lines: list[Line] = wrapped(what, "key", width)
    lines += wrapped("; ".join((f"model {draft.model}", *_typed(draft))), "", width)
    if draft.in_place:
        words = "Every tank that holds it is calculated with it from then on."
        lines += wrapped(words, "", width)
    return lines


def _typed(draft: LiquidDraft) -> Sequence[str]:
    return [
        f"{one.label} {draft.text(one.id).strip()}"
        for one in draft.fields()
        if one.id.startswith("key-") and draft.text(one.id).strip()
    ]
