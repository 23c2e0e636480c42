"""What a handover holds, as data."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from tankcalc.balance.site import TankBalance
    from tankcalc.limits.alerts import Alert
    from tankcalc.shiftlog.shifts import Shift
    from tankcalc.shiftlog.standing import Standing
    from tankcalc.shiftlog.store import Row
    from tankcalc.units import System
    from tankcalc.watch.state import TankWatch


@dataclass(frozen=True, slots=True)
class Place:
    """Whose handover it is: the site, its time zone and units, and whether it is the demo."""

    site: str
    place: str
    is_demo: bool
    time_zone: str
    system: System


@dataclass(frozen=True, slots=True)
class TankRun:
    """What the readings of one tank came to over the shift.

    Attributes
    ----------
    tank : str
        Name of its file.
    count : int
        Readings taken in the shift that stand.
    refused : int
        Of these, those without an answer.
    first, last : Row or None
        The first and the last of them that have an answer.
    """

    tank: str
    count: int
    refused: int
    first: Row | None
    last: Row | None


@dataclass(frozen=True, slots=True)
class AlertChange:
    """An alert that was raised or has returned during the shift."""

    tank: str
    what: str
    at_us: int
    text: str


@dataclass(frozen=True, slots=True)
class ProfileChange:
    """A site, tank or fluid file that the log uses in another version from this entry on."""

    row: Row
    what: str
    was: str
    now: str


@dataclass(frozen=True, slots=True)
class Correction:
    """An amendment or a withdrawal, with the number of the entry that it corrects."""

    row: Row
    about: int | None


@dataclass(frozen=True, slots=True)
class Changes:
    """What changed during the shift.

    Attributes
    ----------
    runs : tuple of TankRun
        Readings, by tank.
    movements : tuple of Standing
        Metered in the shift, as they stand now.
    corrections : tuple of Correction
        Amendments and withdrawals made in the shift, of whatever time.
    alerts : tuple of AlertChange
        In the order of their times.
    answers : tuple of Row
        Alerts acknowledged or set aside.
    faults : tuple of Row
        Faults opened and closed.
    profiles : tuple of ProfileChange
        Profiles in another version.
    steps : tuple of Row
        Steps of the clock.
    late : tuple of Standing
        Entered in the shift about the time before it, as they stand now.
    """

    runs: tuple[TankRun, ...] = ()
    movements: tuple[Standing, ...] = ()
    corrections: tuple[Correction, ...] = ()
    alerts: tuple[AlertChange, ...] = ()
    answers: tuple[Row, ...] = ()
    faults: tuple[Row, ...] = ()
    profiles: tuple[ProfileChange, ...] = ()
    steps: tuple[Row, ...] = ()
    late: tuple[Standing, ...] = ()


@dataclass(frozen=True, slots=True)
class TankPart:
    """One tank of the report.

    Attributes
    ----------
    watch : TankWatch
        As it stands at the end.
    trend : tuple of (int, float or None, float or None)
        Instant (µs of UTC), level (m) and mass (kg) of every reading of the shift and the day
        before; None where a reading has no answer.
    balance : TankBalance or None
        Over the shift; None where the tank was not read.
    moving : tuple of Row
        The latest readings with which one and the same movement was declared; none at rest.
    """

    watch: TankWatch
    trend: tuple[tuple[int, float | None, float | None], ...] = ()
    balance: TankBalance | None = None
    moving: tuple[Row, ...] = ()


@dataclass(frozen=True, slots=True)
class Handover:
    """The report of one shift.

    Attributes
    ----------
    place : Place
        Whose.
    shift : Shift
        Which.
    crew : str or None
        Who works it by the roster, where the site has one.
    at_us : int
        The instant that it describes: the end of the shift, or now while it runs.
    made_us : int
        When it was made, µs of UTC.
    changes : Changes
        What changed during the shift.
    tanks : tuple of TankPart
        In the order of their names.
    unbalanced : str
        Why there is no balance; empty: there is one.
    remarkable : tuple of Standing
        Late, amended and withdrawn entries of the shift.
    notes, people : tuple of Row
        Notes of the shift; who signed on and off.
    acknowledgements : tuple of Row
        Of this handover, by incoming people.
    head : (int, str)
        Number and hash of the log's last entry.
    program : str
        Version of the program.
    read_every_s : float or None
        Planned time between readings, s; None: not stated.
    begins : int or None
        Number of the log's first entry where the shift begins before it, and the log was archived.
    """

    place: Place
    shift: Shift
    crew: str | None
    at_us: int
    made_us: int
    changes: Changes
    tanks: tuple[TankPart, ...]
    unbalanced: str
    remarkable: tuple[Standing, ...]
    notes: tuple[Row, ...]
    people: tuple[Row, ...]
    acknowledgements: tuple[Row, ...]
    head: tuple[int, str]
    program: str
    read_every_s: float | None = None
    begins: int | None = None

    @property
    def running(self) -> bool:
        """Whether the shift is not over."""
        return self.at_us < self.shift.end_us

    @property
    def alerts(self) -> tuple[tuple[str, Alert], ...]:
        """Every alert that stands, with its tank; raised ones first."""
        found = [(part.watch.name, alert) for part in self.tanks for alert in part.watch.alerts]
        states = ("raised", "returned", "acknowledged", "set aside")
        return tuple(sorted(found, key=lambda pair: states.index(pair[1].state)))
