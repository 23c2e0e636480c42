"""Entries of what people declare: movements, faults, who is on, what was acknowledged."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

from tankcalc.errors import InputError
from tankcalc.shiftlog.entry import Entry
from tankcalc.shiftlog.kinds import (
    ACKNOWLEDGEMENT,
    CLOCK_STEP,
    MOVEMENT,
    NOTE,
    SIGN_OFF,
    SIGN_ON,
    WAYS,
)
from tankcalc.shiftlog.make import EntrySite, entry_of, versions_of, wanted
from tankcalc.shiftlog.times import iso_utc
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.tank import Tank

Of = Literal["handover", "alert", "entry"]

_NAME = "a name or initials are needed"


def movement_entry(
    *,
    site: EntrySite,
    tank: Tank,
    received: str = "",
    delivered: str = "",
    drawn: str = "",
    other: Tank | None = None,
    now_us: int,
    t_us: int | None = None,
    note: str = "",
    who: str = "",
) -> Entry:
    """Return the entry of a metered movement: a volume or a mass, into the tank or out of it.

    ``other`` is the tank at the other end, where that is one of the site's: the one entry then
    stands for both. ``drawn`` is free water drawn off. ``t_us`` is when the movement ended.

    Raises
    ------
    InputError
        Not one of the three quantities, one that is no volume or mass or not above zero, or the
        same tank at both ends, or water drawn off into another tank.
    """
    from tankcalc.units import parse_any

    texts = zip(WAYS, (received, delivered, drawn), strict=True)
    given = [(way, text) for way, text in texts if text.strip()]
    if len(given) != 1:
        raise InputError(
            "a movement is one quantity, received, delivered or drawn. Give one of them."
        )
    way, text = given[0]
    quantity = parse_any(text, ("volume", "mass"))
    if not quantity.si > 0.0:
        raise InputError(f"{way} {clean(text)}: a quantity moved is above zero.")
    name = tank.file or tank.name
    far = "" if other is None else other.file or other.name
    if far == name:
        raise InputError(f"{clean(name)} is at both ends of the movement. Name another tank.")
    if far and way == "drawn":
        raise InputError("water is drawn off to no other tank. Log a delivery to it.")
    signed = quantity.si if way == "received" else -quantity.si
    return entry_of(
        site,
        now_us,
        t_us,
        kind=MOVEMENT,
        tank=name,
        typed={way: text, "other": far},
        result={
            "volume_m3": signed if quantity.dimension == "volume" else None,
            "mass_kg": signed if quantity.dimension == "mass" else None,
        },
        note=note,
        who=who,
        versions=versions_of(site=site.version, tank=tank.version),
    )


def fault_entry(
    *,
    site: EntrySite,
    tank: Tank,
    instrument: str,
    opened: bool,
    note: str,
    now_us: int,
    t_us: int | None = None,
    who: str = "",
    ref: bytes | None = None,
) -> Entry:
    """Return the note that an instrument is at fault, or no longer; ``ref`` the one it closes.

    A fault carries over from shift to shift until it is closed.
    """
    wanted(instrument, "a fault is of an instrument")
    wanted(note, "a fault is opened or closed with a note")
    return entry_of(
        site,
        now_us,
        t_us,
        kind=NOTE,
        tank=tank.file or tank.name,
        typed={"fault": "opened" if opened else "closed", "instrument": instrument},
        note=note,
        who=who,
        ref=ref,
        versions=versions_of(site=site.version, tank=tank.version),
    )


def sign_entry(*, site: EntrySite, on: bool, who: str, now_us: int, note: str = "") -> Entry:
    """Return the entry of somebody taking over, or leaving."""
    wanted(who, _NAME)
    return entry_of(
        site,
        now_us,
        None,
        kind=SIGN_ON if on else SIGN_OFF,
        who=who,
        note=note,
        versions=versions_of(site=site.version),
    )


def acknowledgement_entry(
    *,
    site: EntrySite,
    of: Of,
    what: str,
    who: str,
    now_us: int,
    tank: Tank | None = None,
    reason: str = "",
    note: str = "",
    until_us: int | None = None,
    ref: bytes | None = None,
) -> Entry:
    """Return the entry of a handover, an alert or an entry that somebody has taken note of.

    With ``until_us`` an alert is set aside until then, for a reason.
    """
    wanted(who, _NAME)
    wanted(what, "an acknowledgement is of something")
    typed = {"of": str(of), "what": what}
    if until_us is not None:
        if of != "alert":
            raise InputError("only an alert can be set aside until a time.")
        wanted(reason, "an alert is set aside for a reason")
        if until_us <= now_us:
            raise InputError(f"{iso_utc(until_us)} is past: an alert is set aside until later.")
        typed["until"] = iso_utc(until_us)
    return entry_of(
        site,
        now_us,
        None,
        kind=ACKNOWLEDGEMENT,
        tank=None if tank is None else tank.file or tank.name,
        typed=typed,
        reason=reason,
        note=note,
        who=who,
        ref=ref,
        versions=versions_of(site=site.version, tank="" if tank is None else tank.version),
    )


def clock_entry(*, site: EntrySite, was_us: int, is_us: int) -> Entry:
    """Return the entry of a step of this machine's clock."""
    return entry_of(
        site,
        is_us,
        None,
        kind=CLOCK_STEP,
        typed={"was": iso_utc(was_us), "is": iso_utc(is_us)},
        versions=versions_of(site=site.version),
    )
