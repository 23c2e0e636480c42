"""A metered movement: into a tank, or out of it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any, ClassVar

from tankcalc.errors import InputError
from tankcalc.text import clean
from tankcalc.tui.asks import (
    ASK_NOTE,
    ASK_REASON,
    ASK_WHO,
    AT,
    NOTE,
    REASON,
    TIME_HELP,
    Answers,
    Ask,
    MissingError,
    named,
    typed_time,
)
from tankcalc.tui.present import Line, wrapped
from tankcalc.tui.screens.save import SaveDialog

if TYPE_CHECKING:
    from tankcalc.shiftlog import Entry
    from tankcalc.tank import Tank
    from tankcalc.tui.logbook import LogBook, Unsaved

WAY, QUANTITY, OTHER = "way", "quantity", "other"
RECEIVED, DELIVERED, DRAWN = "received", "delivered", "drawn"
WAYS = (RECEIVED, DELIVERED, DRAWN)
"""What is drawn off (water, a sample, slops) is kept as delivered, and its note says so."""

ASKS = (
    Ask(WAY, "movement", WAYS),
    Ask(QUANTITY, "quantity", longest=80),
    Ask(OTHER, "other tank", longest=80),
    Ask(AT, "ended at", longest=40),
    ASK_NOTE,
    ASK_WHO,
)
HELP = (
    'Quantity: a volume or a mass as metered, "500 m3", "420 t". Other tank: the one of this site '
    "at the other end, if any; one entry then stands for both. Ended at: {}."
)


class SaveMovement(SaveDialog):
    """Takes what was moved and saves it."""

    TITLE_TEXT = "LOG A MOVEMENT"
    START = QUANTITY
    TIME_TEXT = TIME_HELP
    ASKS: ClassVar[Sequence[Ask]] = ASKS
    LIVE = frozenset({QUANTITY, OTHER})

    def __init__(
        self, book: LogBook, tank: Tank, answers: Mapping[str, str], sent: Unsaved | None = None
    ) -> None:
        super().__init__(book, answers, sent)
        self._tank = tank

    def make(self, answers: Answers) -> Unsaved:
        """Return the entry of the movement."""
        from tankcalc.shiftlog import movement_entry, now_us

        return self._book.with_texts(movement_entry(**self._facts(answers, now_us())))

    def subject(self, answers: Answers) -> list[Line]:
        """Return in a sentence what is being said, and what the fields take."""
        way, text = answers.get(WAY, RECEIVED), clean(answers.get(QUANTITY, "")) or "..."
        end = clean(answers.get(OTHER, ""))
        other = f" {'from' if way == RECEIVED else 'to'} {end}" if end else ""
        name = clean(self._tank.file or self._tank.name)
        width = self.size.width - 2
        return [
            *wrapped(f"{name}: {way} {text}{other}", "key", width),
            *wrapped(HELP.format(self.TIME_TEXT), "", width),
        ]

    def _facts(self, answers: Answers, now_us: int) -> dict[str, Any]:
        """Return what the makers of the entry take."""
        who, site = named(answers), self._book.site
        way, text = answers.get(WAY, RECEIVED), answers.get(QUANTITY, "").strip()
        if not text:
            raise MissingError(
                QUANTITY, 'How much was it? Type a quantity, such as "500 m3" or "420 t".'
            )
        other, note = answers.get(OTHER, "").strip(), answers.get(NOTE, "").strip()
        return {
            "site": site,
            "tank": self._tank,
            "received": text if way == RECEIVED else "",
            "delivered": text if way == DELIVERED else "",
            "drawn": text if way == DRAWN else "",
            "other": site.tank(self._spelt(other)) if other else None,
            "now_us": now_us,
            "t_us": typed_time(answers.get(AT, ""), self._book.zone, now_us),
            "note": note,
            "who": who,
        }

    def _spelt(self, other: str) -> str:
        """Return a tank's name as its file has it, however it was typed."""
        names = self._book.site.tank_names()
        alike = [name for name in names if name.casefold() == other.casefold()]
        if not alike:
            listed = ", ".join(clean(name, 20) for name in names[:8])
            more = ", ..." * (len(names) > 8)
            raise InputError(f'this site has no tank "{clean(other, 40)}". Tanks: {listed}{more}.')
        return alike[0]


class AmendMovement(SaveMovement):
    """Takes what a movement should have been, and why."""

    TITLE_TEXT = "LOG WHAT THE MOVEMENT SHOULD HAVE BEEN"
    TIME_TEXT = "empty: as it was"
    START = REASON
    ASKS: ClassVar[Sequence[Ask]] = (*ASKS[:4], ASK_REASON, *ASKS[4:])

    def __init__(
        self,
        book: LogBook,
        tank: Tank,
        original: Entry,
        answers: Mapping[str, str],
        sent: Unsaved | None = None,
    ) -> None:
        super().__init__(book, tank, answers, sent)
        self._original = original

    async def prepare(self) -> None:
        """See that it was not withdrawn meanwhile."""
        from tankcalc.shiftlog.kinds import AMENDMENT

        await self._book.to_correct(self._original.uid, AMENDMENT)

    def make(self, answers: Answers) -> Unsaved:
        """Return the entry that stands for the movement from now on."""
        from tankcalc.shiftlog import amended_movement, now_us

        reason = answers.get(REASON, "").strip()
        if not reason:
            raise MissingError(REASON, "Why is it amended? Type a reason, then Enter.")
        facts = self._facts(answers, now_us())
        made = amended_movement(original=self._original, reason=reason, **facts)
        return self._book.with_texts(made)


def answers_of(entry: Entry) -> dict[str, str]:
    """Return what a movement says, as it would be typed."""
    way = RECEIVED if RECEIVED in entry.typed else DELIVERED
    drawn = way == DELIVERED and entry.note.startswith("drawn off")
    return {
        WAY: DRAWN if drawn else way,
        QUANTITY: clean(entry.typed.get(way, "")),
        OTHER: clean(entry.typed.get(OTHER, "")),
        NOTE: clean(entry.note),
    }
