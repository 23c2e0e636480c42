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
    def letter_key(self) -> str:
        """The letter, as the terminal library names it."""
        return NAMES.get(self.letter, self.letter)

    @property
    def shown_key(self) -> str:
        """The key as it is printed on the keyboard."""
        return self.key.title()

    @property
    def is_chord(self) -> bool:
        """Whether it is held down with Ctrl: a field being typed in must not take it."""
        return self.key.startswith("ctrl+")


@dataclass(frozen=True, slots=True)
class PaneCommand:
    """One action on the entry that is marked in the log pane.

    Attributes
    ----------
    id : str
        Name of the action.
    key, shown_key : str
        What to press, as the terminal library names it and as it is printed.
    label, help : str
        One word for the footer, one sentence for the help.
    """

    id: str
    key: str
    shown_key: str
    label: str
    help: str


NAMES = {"?": "question_mark"}
"""Characters the terminal library knows by a name."""

WATCH_COMMANDS = (
    Command("alerts", "ctrl+g", "a", "alerts", "Alerts of all tanks, and the limits of this.", 5),
    Command("plan", "ctrl+p", "p", "plan", "Plan a movement: how much, when to call stop.", 8),
    Command("handover", "ctrl+o", "h", "handover", "The report from shift to shift.", 8),
    Command("balance", "ctrl+y", "b", "balance", "Movements against what the tank holds.", 9),
)
"""What looks at the shift as a whole; `WatchActions` in `actions_watch.py` does it."""

COMMANDS = (
    Command("help", "f1", "?", "help", "What every key does, and what this field takes."),
    Command("tanks", "f2", "t", "tanks", "Go to the list of tanks; up and down choose.", 1),
    Command("units", "f3", "u", "units", "Show figures in metric, US or imperial units.", 2),
    Command("fluid", "f4", "f", "fluid", "Choose another density profile for this tank.", 1),
    Command("log", "f5", "l", "LOG", "Log this reading; it is shown first, then Enter saves it."),
    Command("note", "f6", "n", "note", "Log a note on this tank, with no reading.", 1),
    Command("shift", "f7", "s", "shift", "Go to the log; there, Enter opens an entry.", 4),
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
    Command(
        "movement",
        "ctrl+t",
        "m",
        "move",
        "Log what was received into this tank, delivered or drawn from it, as metered.",
        6,
    ),
    Command("sign", "ctrl+x", "o", "sign", "Sign on when you take over the shift, or off.", 7),
    *WATCH_COMMANDS,
    Command("quit", "f10", "q", "quit", "Leave; asks first, and keeps an unfinished entry."),
)
"""Every action; `Actions` in `actions.py` has a method of the same name for each."""

PANE_COMMANDS = (
    PaneCommand("entry", "enter", "Enter", "open", "Open the marked entry, with its history."),
    PaneCommand("amend", "a", "a", "amend", "Log what the marked entry should have been, and why."),
    PaneCommand("withdraw", "w", "w", "withdraw", "Take the marked entry back, and say why."),
    PaneCommand("filter", "slash", "/", "filter", "Choose which entries the log pane shows."),
    PaneCommand("fault", "x", "x", "fault", "Log that an instrument is at fault, or put right."),
)
"""What the letters mean while the keys go to the log pane."""

MOVES = (
    ("Tab, Enter, Down", "next field; Shift+Tab or Up goes back"),
    ("Esc", "leave the field, nothing is lost; letters are then commands"),
    ("a digit", "starts the first field from anywhere"),
    ("PgUp PgDn", "move in the log from anywhere; in it also Home and End"),
    ("Ctrl+U", "empty the field left of the cursor"),
    ("Ctrl+Q, Ctrl+C", "ask to quit, as F10 does"),
)
"""Keys that are no commands: (keys, what they do), for the help."""


MORE = "help: all"
"""What the help is called where the footer has no room for every key."""


def pane_footer() -> list[tuple[str, str]]:
    """Return (key, label) of what acts while the keys go to the log pane."""
    return [*((c.shown_key, c.label) for c in PANE_COMMANDS), ("Esc", "back"), ("F1", "help")]


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
