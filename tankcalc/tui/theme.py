"""The console's colours: the eight a terminal has always had, on its own background.

Nothing is told by colour alone. Every class also has a word, a character or reverse video, so
that the screen reads the same with NO_COLOR and on a monochrome terminal.
"""

from __future__ import annotations

from rich.segment import Segment
from rich.style import Style
from textual.color import Color
from textual.filter import LineFilter
from textual.theme import Theme

from tankcalc.tui.ascii import to_ascii

THEME = Theme(
    name="tankcalc",
    ansi=True,
    primary="ansi_cyan",
    secondary="ansi_blue",
    warning="ansi_yellow",
    error="ansi_red",
    success="ansi_green",
    accent="ansi_magenta",
    foreground="ansi_default",
    background="ansi_default",
    surface="ansi_default",
    panel="ansi_default",
    boost="ansi_default",
    # The library's own style sheets ask for these two of every ANSI theme.
    variables={"ansi-background": "ansi_black", "ansi-foreground": "ansi_white"},
)

STYLES: dict[str, Style] = {
    "": Style(),
    "title": Style(bold=True, color="cyan"),
    "bar": Style(reverse=True),
    "key": Style(bold=True),
    "figure": Style(bold=True),
    "focus": Style(reverse=True, bold=True),
    "good": Style(bold=True, color="green"),
    "check": Style(bold=True, color="yellow"),
    "refused": Style(bold=True, color="red", reverse=True),
    "wall": Style(),
    "limit": Style(color="yellow"),
    "layer0": Style(color="blue"),
    "layer1": Style(color="cyan"),
    "layer2": Style(color="magenta"),
    "layer3": Style(color="green"),
}
"""Rich styles by the names the strings of `present` carry."""


class AsciiOnly(LineFilter):
    """Maps every character to ASCII, column for column, whatever a widget draws."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:
        """Return the segments in ASCII."""
        return [Segment(to_ascii(text), style, control) for text, style, control in segments]
