"""What every form of the report is made of. Texts are plain: each form escapes them its own way."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Fact:
    """A named figure or word.

    Attributes
    ----------
    label, text : str
        What it is called, and what it is, in the units that are shown.
    give : str
        Its expanded uncertainty (k = 2); empty where it has none.
    number : float or None
        The same in SI, for the rows of a spreadsheet.
    unit : str
        Of the number.
    """

    label: str
    text: str
    give: str = ""
    number: float | None = None
    unit: str = ""


@dataclass(frozen=True, slots=True)
class Item:
    """One thing that happened or that stands.

    Attributes
    ----------
    text : str
        What, in words.
    kind : str
        What kind of thing, in a word or two.
    subject : str
        Tank, or nothing.
    when : str
        Local time; empty where it has none.
    at_us : int or None
        The same, µs of UTC.
    urgent : bool
        Whether it asks for somebody's eye; told by a sign and by weight, not by colour.
    """

    text: str
    kind: str = ""
    subject: str = ""
    when: str = ""
    at_us: int | None = None
    urgent: bool = False


@dataclass(frozen=True, slots=True)
class Table:
    """Rows of cells under headings; the first cell is the tank.

    ``numbers`` are the headings whose cells are aligned as numbers.
    """

    headings: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    numbers: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Section:
    """Things of one kind under a heading; ``nothing`` is said where there are none."""

    title: str
    nothing: str
    items: tuple[Item, ...] = ()
    table: Table | None = None

    @property
    def empty(self) -> bool:
        """Whether there is nothing in it."""
        return not self.items and (self.table is None or not self.table.rows)


@dataclass(frozen=True, slots=True)
class Trend:
    """A figure over time.

    Attributes
    ----------
    label, unit : str
        What is drawn, and the unit of its numbers.
    points : tuple of (int, float or None)
        Instant (µs of UTC) and value; None where a reading has no answer.
    lines : tuple of (str, float)
        Limits to be drawn, with their names.
    span_us : (int, int)
        What is drawn, µs of UTC.
    shift_us : int
        When the shift begins.
    ticks : tuple of (int, str)
        Instants to be marked, as local time.
    least_span : float
        What the axis spans at least, so that noise is not drawn as a movement.
    digits : int
        Decimals of the axis.
    """

    label: str
    unit: str
    points: tuple[tuple[int, float | None], ...]
    lines: tuple[tuple[str, float], ...]
    span_us: tuple[int, int]
    shift_us: int
    ticks: tuple[tuple[int, str], ...]
    least_span: float
    digits: int


@dataclass(frozen=True, slots=True)
class Card:
    """One tank.

    Attributes
    ----------
    name : str
        The tank, as the log calls it.
    title, subtitle : str
        The tank with its own name, and what is in it.
    state : str
        What the tank does, in a word or two.
    facts : tuple of Fact
        Its figures.
    trends : tuple of Trend
        Level and mass.
    items : tuple of Item
        What is to be said of it.
    """

    name: str
    title: str
    subtitle: str
    state: str
    facts: tuple[Fact, ...]
    trends: tuple[Trend, ...]
    items: tuple[Item, ...]


@dataclass(frozen=True, slots=True)
class Document:
    """A handover in words.

    Attributes
    ----------
    title : str
        Site and shift.
    banners : tuple of str
        What must be known before anything else is read.
    facts : tuple of Fact
        Of the shift.
    changed : Section
        What changed during the shift; it comes first.
    tanks : Section
        All tanks in a table.
    cards : tuple of Card
        Each tank of which there is anything to say.
    sections : tuple of Section
        What stands, after the tanks.
    acknowledged : Section
        Who has taken over; where nobody has, a form prints room to sign.
    cautions : tuple of str
        What must be said of every report.
    """

    title: str
    banners: tuple[str, ...]
    facts: tuple[Fact, ...]
    changed: Section
    tanks: Section
    cards: tuple[Card, ...]
    sections: tuple[Section, ...]
    acknowledged: Section
    cautions: tuple[str, ...]
