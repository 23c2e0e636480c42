"""The one registry of actions: bindings, footer and help are all made from it."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Command:
    """One action of the console.

    Attributes
    ----------
    id : str
        Name of the action.
    key : str
        Function key, as the terminal library names it ("f5"); there are ten that every
        terminal passes on, and Ctrl with a letter after that.
    letter : str
        What to press instead where no field is being typed in.
    label : str
        One word for the footer.
    help : str
        One sentence for the help.
    rank : int
        The footer leaves out the highest ranks first where it is too narrow.
    """

    id: str
    key: str
    letter: str
    label: str
    help: str
    rank: int = 0

    @property
    def keys(self) -> str:
        """Both ways to press it, as the terminal library names them."""
        return f"{self.key},{NAMES.get(self.letter, self.letter)}"

    @property
    def shown_key(self) -> str:
        """The key as it is printed on the keyboard."""
        return self.key.title()


NAMES = {"?": "question_mark"}
"""Characters the terminal library knows by a name."""

COMMANDS = (
    Command("help", "f1", "?", "help", "What every key does, and what this field takes."),
    Command("tanks", "f2", "t", "tanks", "Go to the list of tanks; up and down choose.", 1),
    Command("units", "f3", "u", "units", "Show figures in metric, US or imperial units.", 2),
    Command("fluid", "f4", "f", "fluid", "Choose another density profile for this tank.", 1),
    Command("log", "f5", "l", "LOG", "Log this reading; it is shown first, then Enter saves it."),
    Command("note", "f6", "n", "note", "Log a note on this tank, with no reading.", 1),
    Command("shift", "f7", "s", "shift", "Go to the log of this shift; up and down move in it.", 4),
    Command("clear", "f8", "c", "clear", "Clear the readings; once more brings them back.", 3),
    Command("details", "f9", "d", "all", "Every figure and every warning in full.", 2),
    Command(
        "liquid",
        "ctrl+r",
        "r",
        "try",
        "Try the density profile of a liquid: model, figures, curves; and save it as a fluid.",
        5,
    ),
    Command("quit", "f10", "q", "quit", "Leave; asks first, and keeps an unfinished entry."),
)

MOVES = (
    ("Tab, Enter, Down", "next field; Shift+Tab or Up goes back"),
    ("Esc", "leave the field, nothing is lost; letters are then commands"),
    ("a digit", "starts the first field from anywhere"),
    ("PgUp PgDn", "move in the log of this shift"),
    ("Ctrl+U", "empty the field left of the cursor"),
    ("Ctrl+Q, Ctrl+C", "ask to quit, as F10 does"),
)
"""Keys that are no commands: (keys, what they do), for the help."""


MORE = "help: all"
"""What the help is called where the footer has no room for every key."""


def footer(width: int, letters: bool = False) -> list[tuple[str, str]]:
    """Return (key, label) of the commands a footer of this width has room for, in order.

    ``letters``: no field is being typed in, so the letters act and are shown.
    """
    kept = list(COMMANDS)
    while len(kept) > 1 and _footer_width(kept, letters) > width:
        kept.remove(max(kept, key=lambda command: command.rank))
    return [(_key(command, letters), _label(command, len(kept))) for command in kept]


def _label(command: Command, shown: int) -> str:
    """Return what the footer says of a key; where keys have no room, that the help has more."""
    return MORE if command.id == "help" and shown < len(COMMANDS) else command.label


def _key(command: Command, letters: bool) -> str:
    """Return what the footer prints for the key."""
    return f"{command.shown_key}/{command.letter}" if letters else command.shown_key


def _footer_width(commands: list[Command], letters: bool) -> int:
    """Return the columns a footer of these commands takes."""
    labels = [_label(command, len(commands)) for command in commands]
    keys = [_key(command, letters) for command in commands]
    return sum(len(key) + len(label) + 2 for key, label in zip(keys, labels, strict=True)) - 1
