"""One field: a line of text that takes only what a quantity can be made of."""

from __future__ import annotations

from textual import events
from textual.geometry import Size
from textual.message_pump import MessagePump
from textual.reactive import Reactive
from textual.widgets import Input

from tankcalc.text import clean
from tankcalc.tui.fields import NOTE, QUANTITY, Field
from tankcalc.tui.messages import EntryChanged, EntryLeft, NotAllowed

LONGEST_NOTE = 200
LONGEST_QUANTITY = 80
EMPTY = "." * 40
"""What an empty field shows: where it is and that it is empty, but nothing like a figure."""


class EntryField(Input):
    """A field of the entry; its id is the reading's name."""

    # The library lays the whole screen out anew for every change of this; one row never needs it.
    virtual_size = Reactive(Size(0, 0), layout=False)

    def __init__(self, field: Field, value: str = "", tell: MessagePump | None = None) -> None:
        note = field.name == NOTE
        super().__init__(
            value,
            id=field.name,
            placeholder=EMPTY,
            restrict=None if note else QUANTITY,
            max_length=LONGEST_NOTE if note else LONGEST_QUANTITY,
            select_on_focus=False,
            # What is wrong is told by the calculation; the library need not check as well.
            validate_on=(),
        )
        self.field = field
        self._tell = tell
        # A blinking cursor would send bytes for ever.
        self.cursor_blink = False

    def on_input_changed(self, event: Input.Changed) -> None:
        """Tell what the field holds."""
        event.stop()
        # Straight to whoever answers: at every widget on the way up the answer would wait its turn.
        (self._tell or self.app).post_message(EntryChanged(self.field.name, event.value))

    def on_input_blurred(self, event: Input.Blurred) -> None:
        """Tell the screen that the field was left."""
        event.stop()
        self.post_message(EntryLeft(self.field.name))

    def on_paste(self, event: events.Paste) -> None:
        """Take the first line that holds something, with blanks and marks made plain."""
        event.prevent_default()
        event.stop()
        text = next((line for line in event.text.splitlines() if line.strip()), "")
        self.replace(clean(text), *self.selection)

    def restricted(self) -> None:
        """Say why nothing was typed, instead of ringing a bell."""
        self.post_message(NotAllowed(self.field.name))
