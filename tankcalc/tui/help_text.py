"""The help: made from the registry of commands and from what the calculation says it takes."""

from __future__ import annotations

from tankcalc.tui.commands import COMMANDS, MOVES, PANE_COMMANDS
from tankcalc.tui.fields import FIELDS, NOTE, by_name, takes
from tankcalc.tui.present import Line, wrapped

CAUTIONS = (
    "This program calculates; it watches nothing and trips nothing. It is no safety function and "
    "no protection layer, and no substitute for an independent level alarm.",
    "A figure is as good as what was typed: the same transmitter that is wrong gives a result "
    "that is wrong. Compare with a dip.",
    "No warning does not mean safe. The drawing is a guide; the figures count.",
)

MARKS = (
    ("AMENDED by 12", "entry 12 stands for it now; WITHDRAWN by 12: entry 12 took it back"),
    ("amends 5", "it stands for entry 5"),
    ("LATE", "entered more than a quarter of an hour after it was read"),
    ("REFUSED, REJECTED", "no honest answer; not believed by whoever logged it"),
    ("CLOCK STEP", "this machine's clock was set; times across it do not compare"),
)
"""Words that stand before an entry of the log, and what they mean."""


def help_lines(width: int, field: str = "") -> list[Line]:
    """Return the help, beginning with the field that was being typed in."""
    lines: list[Line] = []
    if field:
        lines += [*_heading(f"THIS FIELD: {by_name(field).label}"), *_takes(field, width), []]
    lines += _heading("KEYS (the letter acts when no field is being typed in)")
    for command in COMMANDS:
        key = f"{command.shown_key:<4} {command.letter}"
        lines += _pair(key, f"{command.label}: {command.help}", 18, width)
    for keys, words in MOVES:
        lines += _pair(keys, words, 18, width)
    lines += [[], *_heading("IN THE LOG (F7 goes there)")]
    for act in PANE_COMMANDS:
        lines += _pair(act.shown_key, f"{act.label}: {act.help}", 18, width)
    for keys, words in MARKS:
        lines += _pair(keys, words, 18, width)
    lines += [[], *_heading("FIELDS: a number with its unit, always")]
    for one in FIELDS:
        lines += _pair(one.label, takes(one.name), 14, width)
    lines += [[], *_heading("MARKS")]
    lines += _pair(
        "> * + !", "where the keys go; tank in front; unfinished entry; bad file", 14, width
    )
    words = "before a tank: alerts: ! raised, = acknowledged, ~ set aside, - ended; Ctrl+G lists"
    lines += _pair("! = ~ -", words, 14, width)
    lines += _pair("X", "this cannot be used; the words below say why", 14, width)
    lines += [[], *_heading("CAUTION")]
    for caution in CAUTIONS:
        lines += wrapped(caution, "", width)
    return lines


def _heading(words: str) -> list[Line]:
    return [[(words, "title")]]


def _takes(field: str, width: int) -> list[Line]:
    unit = "" if field == NOTE else " Always with its unit."
    return wrapped(f"{takes(field)}.{unit}", "", width)


def _pair(key: str, words: str, column: int, width: int) -> list[Line]:
    """Return a key and its words, the words in a column of their own."""
    rows = wrapped(words, "", width - column)
    first: Line = [(key.ljust(column), "key"), *rows[0]]
    return [first, *([(" " * column, ""), *row] for row in rows[1:])]
