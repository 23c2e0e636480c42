"""Results and messages as lines of words: no terminal library here, and nothing computed.

A line is a list of (text, style name). Every string that came from outside passes `clean`.
"""

from __future__ import annotations

from collections.abc import Sequence
from textwrap import wrap
from typing import TYPE_CHECKING

from tankcalc.text import clean
from tankcalc.tui.ascii import columns
from tankcalc.tui.commands import footer, pane_footer
from tankcalc.tui.fields import NOTE, label_of

if TYPE_CHECKING:
    from tankcalc.report import Row
    from tankcalc.result import Status
    from tankcalc.tui.desk import Answer

Span = tuple[str, str]
Line = list[Span]

CAUTION = "calculates only; not a safety function"

NOT_LOOKED = "? ALERTS: not looked at yet"
"""Said until the first look is done: nothing found yet is not the same as no alerts."""

STATUS_WORDS: dict[Status, str] = {
    "good": "* GOOD",
    "check": "! CHECK: see below",
    "refused": "X REFUSED: no honest answer",
}
"""Each status by a symbol and a word, so that colour is never needed."""

DISAGREE = "!! READINGS DISAGREE: F9, 4"
"""Said instead of a plain check where readings contradict each other."""

FIRST = (
    "level_m",
    "ullage_m",
    "volume_m3",
    "mass_kg",
    "density_kg_m3",
    "room_m3",
    "product_volume_m3",
    "water_level_m",
)
"""Figures shown first where there is not room for all."""

LABEL_COLUMNS = 17


def header(site: str, is_demo: bool, right: Sequence[str], width: int) -> Line:
    """Return the top row: the site, whether it is the demo, then units, shift and clock."""
    left = clean(site, 60) + ("  DEMO SITE" if is_demo else "")
    end = "  ".join(clean(part, 40) for part in right if part)
    return [(spread(f" {left}", f"{end} ", width), "bar")]


def units_word(system: str) -> str:
    """Return what the header calls a system of units."""
    return "US" if system == "us" else system


def result_title(answer: Answer) -> Line:
    """Return the status in words, with its symbol."""
    if answer.result is None:
        return [("RESULT ", "title"), ("- none", "")]
    status = answer.result.status
    apart = any(n.code == "disagreement" for n in answer.result.warnings)
    words = DISAGREE if apart and status == "check" else STATUS_WORDS[status]
    return [("RESULT ", "title"), (words, status)]


def result_block(rows: Sequence[Row], height: int, width: int) -> list[Line]:
    """Return the figures that matter most, as many as there is room for, in units."""
    rank = {key: n for n, key in enumerate(FIRST)}
    chosen = sorted(rows, key=lambda row: rank.get(row.key, len(FIRST)))[:height]
    return [figure(row.label, row.value, width, row.give) for row in chosen]


def figure(label: str, value: str, width: int, give: str = "") -> Line:
    """Return one figure with its label and, where there is room, what it is worth.

    Where label and value do not fit, the label gives way.
    """
    room = min(max(width - columns(value), 0), LABEL_COLUMNS)
    line = [(clip(clean(label), room - 1).ljust(room), ""), (clean(value), "figure")]
    for worth in (give, _without_unit(give, value)):
        # The unit is that of the value, so it may be left out before the figure is.
        if worth and room + columns(value) + 1 + columns(worth) <= width:
            return [*line, (f" {clean(worth)}", "")]
    return line


def _without_unit(give: str, value: str) -> str:
    """Return "+/- 0.031 m" as "+/- 0.031" beside a value in the same unit, else nothing."""
    sign, number, unit = (*give.split(" ", 2), "", "", "")[:3]
    return f"{sign} {number}" if unit and value.endswith(f" {unit}") else ""


def messages(answer: Answer, said: str, hint: str, width: int, height: int) -> list[Line]:
    """Return what there is to say in words: the last event, problems, warnings, the basis.

    What finds no room is counted, never dropped in silence; the hint alone gives way.
    """
    lines = [*wrapped(said, "key", width)] if said else []
    for mark, words, style in _notices(answer):
        lines.extend(wrapped(f"{mark} {words}", style, width))
    if answer.result is not None and answer.result.basis:
        lines.extend(wrapped(f"Basis: {answer.result.basis}.", "", width))
    if hint and len(lines) < height:
        lines.extend(wrapped(f"? {hint}", "", width)[: height - len(lines)])
    if len(lines) > height:
        more = f"(+{len(lines) - height + 1} more lines: F9)"
        text = clip(lines[height - 1][0][0], width - len(more) - 1)
        lines = [*lines[: height - 1], [(spread(text, more, width), lines[height - 1][0][1])]]
    return lines


def all_messages(answer: Answer, width: int) -> list[Line]:
    """Return every message in full."""
    return messages(answer, "", "", width, height=10_000)


def _notices(answer: Answer) -> list[tuple[str, str, str]]:
    """Return (mark, words, style) of everything wrong or worth a look, the worst first."""
    if answer.result is None:
        problems = [
            ("X", f"{label_of(name)}: {words}", "refused")
            for name, words in answer.problems.items()
        ]
        return problems or ([("-", answer.why, "")] if answer.why else [])
    ordered = sorted(answer.result.warnings, key=lambda notice: not notice.refuses)
    return [
        ("X", n.message, "refused") if n.refuses else ("!", n.message, "check") for n in ordered
    ]


def wrapped(text: str, style: str, width: int) -> list[Line]:
    """Return the words, made safe, over as many rows as they need."""
    words = clean(text, 2000)
    return [[(row, style)] for row in wrap(words, max(width, 10), subsequent_indent="  ")]


def table(text: str) -> list[Line]:
    """Return a table of our own as it stands, a line a row."""
    return [[(row, "")] for row in text.split("\n")]


def not_allowed(field: str) -> str:
    """Return why something typed or pasted was not taken."""
    if field == NOTE:
        return "The note is full."
    return f"{label_of(field)}: that is too long, or no part of a number with its unit."


def foot(width: int, letters: bool) -> Line:
    """Return the row of keys."""
    return _key_row(footer(width, letters))


def pane_foot() -> Line:
    """Return the row of keys while they go to the log pane."""
    return _key_row(pane_footer(), gap="  ")


def _key_row(pairs: Sequence[tuple[str, str]], gap: str = " ") -> Line:
    line: Line = []
    for key, label in pairs:
        line.extend([(key, "key"), (f" {label}{gap}", "bar"), ("", "")])
    return line


def too_small(width: int, height: int, rows: Sequence[Row], answer: Answer) -> list[Line]:
    """Return what a terminal below 80 x 24 shows: what it needs, and the result as text."""
    lines: list[Line] = [[(f"need 80x24, have {width}x{height}", "key")]]
    lines.extend([(f"{label_of(name)}: {clean(text)}", "")] for name, text in answer.typed.items())
    lines.append(result_title(answer))
    lines.extend(figure(row.label, row.value, width) for row in rows)
    return lines[:height]


def spread(left: str, right: str, width: int) -> str:
    """Return two texts at the two ends of a row; the left one gives way."""
    left = clip(left, max(width - columns(right) - 1, 0))
    return left + " " * max(width - columns(left) - columns(right), 0) + right


def clip(text: str, width: int, more: str = "~") -> str:
    """Return the text cut to a width; a mark at its end shows that it goes on.

    Examples
    --------
    >>> clip("Skerry Point", 8)
    'Skerry ~'
    """
    if columns(text) <= width:
        return text
    kept = text
    while kept and columns(kept) > width - len(more):
        kept = kept[:-1]
    return (kept + more)[: max(width, 0)]


def tank_line(
    name: str, mark: str, chosen: bool, focused: bool, width: int, alert: tuple[str, str] = ("", "")
) -> Line:
    """Return one row of the list of tanks; ">" is where the keys go, "*" the tank in front.

    ``alert`` is a symbol and a word; the word gives way to the name.
    """
    symbol, word = alert
    lead = (">" if focused else "*" if chosen else " ") + (symbol or " ")
    room = max(width - 4, 1)
    shown = clip(clean(name), room)
    free = room - columns(shown)
    if word and free >= len(word):
        text = f"{lead}{shown}{mark}{word:>{free}} "
    else:
        text = f"{lead}{shown}{' ' * free}{mark} "
    return [(text, "focus" if focused else "key" if chosen else "")]


def field_label(label: str, focused: bool, wrong: bool) -> Line:
    """Return what stands before a field: where the keys go, its name, whether it is wrong."""
    lead = ">" if focused else " "
    return [
        (f"{lead}{label:<12}", "key" if focused else ""),
        ("X " if wrong else "  ", "refused" if wrong else ""),
    ]


def log_subject(
    answer: Answer, rows: Sequence[Row], tank: str, time: str, width: int
) -> list[Line]:
    """Return what will be logged: tank, fluid, time, readings as typed, result and warnings."""
    fluid = "" if answer.fluid is None else answer.fluid.name
    lines: list[Line] = wrapped(f"{tank}, {fluid}, read {time}", "key", width)
    typed = "; ".join(f"{label_of(name)} {text}" for name, text in answer.typed.items())
    lines += wrapped(f"Typed: {typed}", "", width)
    lines.append(result_title(answer))
    main = [f"{row.label} {row.value}" for row in rows if row.key in FIRST[:4]]
    figures = "; ".join(main) or "The readings are kept as evidence, with no figures."
    lines += wrapped(figures, "figure", width)
    for mark, words, style in _notices(answer):
        lines += wrapped(f"{mark} {words}", style, width)
    return lines
