"""The trying of a liquid as lines of words; no terminal library here, and nothing computed."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from tankcalc.text import clean
from tankcalc.tui.liquid_draft import MODEL, NAME, LiquidDraft, fields_of, models
from tankcalc.tui.present import Line, clip, spread, units_word, wrapped

if TYPE_CHECKING:
    from tankcalc.profiles.fluid_users import Users
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
    leave = "Esc leaves field" if typing else "Esc back"
    return [(clip(f" {move}  {acts}  {leave}", width).ljust(width), "bar")]


def to_save(draft: LiquidDraft, users: Users, width: int) -> list[Line]:
    """Return what will be written, where, what it was before, and who uses it."""
    where = f"fluids/{draft.stem.strip()}.toml"
    if not draft.in_place:
        lines = wrapped(f'{where} is a new file, shown as "{draft.shown_name}".', "key", width)
        lines += wrapped("; ".join((f"model {draft.model}", *_typed(draft))), "", width)
        return lines + (wrapped(_VAPOUR, "", width) if draft.has_vapour else [])
    what = f"{where} is changed: its comments stay, and the old file is kept beside it."
    lines = wrapped(what, "key", width)
    if draft.model != draft.began.model:
        words = f"! ANOTHER MODEL: {draft.began.model} -> {draft.model}"
        lines += wrapped(words, "check", width)
    for change in _changes(draft):
        lines += wrapped(change, "", width)
    for words in _used_by(users):
        lines += wrapped(words, "", width)
    return lines


_VAPOUR = "The [vapour] of the file it began from goes along."


def _changes(draft: LiquidDraft) -> list[str]:
    """Return each figure that is not what it was, old and new."""
    old = {id: text.strip() for id, text in draft.began.texts.items()}
    labels = {
        one.id: one.label for model in (draft.began.model, draft.model) for one in fields_of(model)
    }
    new = {id: draft.text(id).strip() for id in labels if draft.text(id).strip()}
    old[NAME], new[NAME] = draft.began.name.strip(), draft.shown_name
    labels[NAME] = "shown name"
    changed = [id for id in labels if old.get(id, "") != new.get(id, "")]
    lines = [f"{labels[id]}: {old.get(id) or 'none'} -> {new.get(id) or 'none'}" for id in changed]
    return lines or [f"Nothing is changed: {'; '.join(_typed(draft))}"]


def _used_by(users: Users) -> list[str]:
    """Return whose figures change with the file."""
    if not any(users):
        return ["No tank holds it as its usual contents."]
    tanks, fluids = (bounded(names) for names in users)
    words = [f"Calculated with it from then on: {tanks}."] if tanks else []
    return words + ([f"A layer of: {fluids}."] if fluids else [])


def bounded(names: Sequence[str], most: int = 4) -> str:
    """Return names joined, those that find no room counted.

    Examples
    --------
    >>> bounded(["T-101", "T-102", "T-103"], 2), bounded(["T-101"])
    ('T-101 and 2 more', 'T-101')
    """
    shown = names if len(names) <= most else names[: most - 1]
    left = len(names) - len(shown)
    words = ", ".join(clean(name, 40) for name in shown)
    return f"{words} and {left} more" if left else words


def _typed(draft: LiquidDraft) -> Sequence[str]:
    return [
        f"{one.label} {draft.text(one.id).strip()}"
        for one in draft.fields()
        if one.id.startswith("key-") and draft.text(one.id).strip()
    ]
