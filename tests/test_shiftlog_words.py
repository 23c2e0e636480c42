"""Entries of what people declare, and what of it carries over to the next shift."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import pytest
from shiftlog_samples import NOON_US, VERSIONS, sample

from tankcalc.errors import InputError
from tankcalc.shiftlog import (
    Entry,
    Row,
    acknowledgement_entry,
    amended_movement,
    fault_entry,
    movement_entry,
    sign_entry,
    withdrawal_entry,
)
from tankcalc.shiftlog.carried import open_faults, set_aside
from tankcalc.shiftlog.entry import canonical, decoded
from tankcalc.shiftlog.make import judgement

HOUR_US = 3_600_000_000
TONNE_KG = 1000.0


@dataclass(frozen=True)
class Site:
    name: str = "Skerry Point Terminal"
    time_zone: str = "Europe/Lisbon"
    shifts: dict[str, str] = field(default_factory=lambda: {"Day": "06:00", "Night": "18:00"})
    version: str = VERSIONS["site"]


@dataclass(frozen=True)
class TankFile:
    file: str = "T-101"
    name: str = "Tank"
    version: str = VERSIONS["tank"]


def moved(**changes: Any) -> Entry:
    facts: dict[str, Any] = {"site": Site(), "tank": TankFile(), "now_us": NOON_US}
    return movement_entry(**facts | changes)


@pytest.mark.parametrize(
    ("way", "text", "volume_m3", "mass_kg"),
    [
        ("received", "500 m3", 500.0, None),
        ("delivered", "500 m3", -500.0, None),
        ("received", "420 t", None, 420 * TONNE_KG),
        ("delivered", "1 L", -0.001, None),
    ],
)
def test_a_movement_is_positive_into_the_tank(
    way: str, text: str, volume_m3: float | None, mass_kg: float | None
) -> None:
    entry = moved(**{way: text}, other=TankFile("T-102"), note="by ship", t_us=NOON_US - HOUR_US)
    assert (entry.kind, entry.tank, entry.t_us) == ("movement", "T-101", NOON_US - HOUR_US)
    assert entry.typed == {way: text, "other": "T-102"}
    assert entry.result == {"volume_m3": volume_m3, "mass_kg": mass_kg}
    assert decoded(canonical(entry)) == entry


@pytest.mark.parametrize(
    ("changes", "says"),
    [
        ({}, "one quantity"),
        ({"received": "1 m3", "delivered": "1 m3"}, "one quantity"),
        ({"received": " "}, "one quantity"),
        ({"received": "0 m3"}, "above zero"),
        ({"delivered": "-3 t"}, "above zero"),
        ({"received": "3 m"}, "3 m"),
        ({"received": "500"}, "500"),
        ({"received": "1 m3", "other": TankFile()}, "both ends"),
    ],
)
def test_a_movement_that_is_none_is_refused(changes: dict[str, Any], says: str) -> None:
    with pytest.raises(InputError, match=says):
        moved(**changes)


def test_a_movement_is_amended_by_a_whole_one() -> None:
    original = moved(received="500 m3", t_us=NOON_US - HOUR_US)
    facts: dict[str, Any] = {
        "site": Site(),
        "original": original,
        "tank": TankFile(),
        "other": None,
        "delivered": "510 m3",
        "now_us": NOON_US,
    }
    entry = amended_movement(**facts, reason="read the other meter")
    assert (entry.kind, entry.ref, entry.reason) == (
        "amendment",
        original.uid,
        "read the other meter",
    )
    assert entry.result == {"volume_m3": -510.0, "mass_kg": None}
    assert entry.t_us == original.t_us
    with pytest.raises(InputError, match="for a reason"):
        amended_movement(**facts, reason=" ")


def test_a_withdrawal_says_why_and_of_what() -> None:
    original = sample()
    facts: dict[str, Any] = {"site": Site(), "now_us": NOON_US + HOUR_US}
    entry = withdrawal_entry(**facts, original=original, reason="wrong tank", who="B. Tern")
    assert (entry.kind, entry.ref, entry.tank) == ("withdrawal", original.uid, "T-101")
    assert (entry.t_us, entry.who, entry.result) == (NOON_US + HOUR_US, "B. Tern", None)
    with pytest.raises(InputError, match="for a reason"):
        withdrawal_entry(**facts, original=original, reason="")
    with pytest.raises(InputError, match="a sign-on cannot be withdrawn"):
        withdrawal_entry(**facts, original=sample(kind="sign-on"), reason="x")
    with pytest.raises(InputError, match="the reason has 4001 characters"):
        withdrawal_entry(**facts, original=original, reason="x" * 4001)


def test_who_comes_and_goes_says_a_name() -> None:
    for on, kind in ((True, "sign-on"), (False, "sign-off")):
        entry = sign_entry(site=Site(), on=on, who="B. Tern", now_us=NOON_US, note="quiet")
        assert (entry.kind, entry.who, entry.note) == (kind, "B. Tern", "quiet")
    with pytest.raises(InputError, match="name or initials"):
        sign_entry(site=Site(), on=True, who=" ", now_us=NOON_US)


def acknowledged(**changes: Any) -> Entry:
    facts: dict[str, Any] = {
        "site": Site(),
        "of": "alert",
        "what": "high_high",
        "who": "B. Tern",
        "now_us": NOON_US,
        "tank": TankFile(),
    }
    return acknowledgement_entry(**facts | changes)


def test_an_alert_is_set_aside_until_a_time_for_a_reason() -> None:
    entry = acknowledged(until_us=NOON_US + HOUR_US, reason="tank is being filled")
    assert entry.typed == {"of": "alert", "what": "high_high", "until": "2026-12-01T13:00:00Z"}
    for changes, says in (
        ({"until_us": NOON_US + HOUR_US}, "for a reason"),
        ({"until_us": NOON_US, "reason": "x"}, "is past"),
        ({"until_us": NOON_US + HOUR_US, "reason": "x", "of": "handover"}, "only an alert"),
        ({"who": ""}, "name or initials"),
        ({"what": " "}, "of something"),
    ):
        with pytest.raises(InputError, match=says):
            acknowledged(**changes)


def rows_of(*entries: Entry) -> list[Row]:
    return [Row(n, entry, bytes(32)) for n, entry in enumerate(entries, 1)]


def test_alerts_are_set_aside_until_they_come_back() -> None:
    hour = acknowledged(until_us=NOON_US + HOUR_US, reason="x")
    other = acknowledged(until_us=NOON_US + 9 * HOUR_US, reason="x", tank=None)
    seen = acknowledged()
    assert list(set_aside(rows_of(hour, other), NOON_US)) == [
        ("T-101", "high_high"),
        ("", "high_high"),
    ]
    assert list(set_aside(rows_of(hour, other), NOON_US + HOUR_US)) == [("", "high_high")]
    assert set_aside(rows_of(hour, seen), NOON_US) == {}
    broken = sample(kind="acknowledgement", typed={"of": "alert", "what": "a", "until": "soon"})
    assert set_aside(rows_of(broken), 0) == {}
    local = sample(
        kind="acknowledgement", typed={"of": "alert", "what": "a", "until": "2026-12-01T12:00"}
    )
    assert set_aside(rows_of(local), 0) == {}


def fault(instrument: str, *, opened: bool = True, **changes: Any) -> Entry:
    facts: dict[str, Any] = {"site": Site(), "tank": TankFile(), "note": "x", "now_us": NOON_US}
    return fault_entry(instrument=instrument, opened=opened, **facts | changes)


def test_a_fault_carries_over_until_it_is_closed() -> None:
    p1, p3 = fault("p3"), fault("p1")
    closed = fault("p3", opened=False, ref=p1.uid)
    assert (p1.kind, p1.typed) == ("note", {"fault": "opened", "instrument": "p3"})
    assert list(open_faults(rows_of(p1, p3, sample(kind="note")))) == [
        ("T-101", "p3"),
        ("T-101", "p1"),
    ]
    assert list(open_faults(rows_of(p1, p3, closed))) == [("T-101", "p1")]
    again = rows_of(p1, fault("p3"))
    assert open_faults(again) == {("T-101", "p3"): again[0]}
    taken_back = withdrawal_entry(site=Site(), original=p1, reason="x", now_us=NOON_US)
    assert open_faults(rows_of(p1, taken_back)) == {}
    with pytest.raises(InputError, match="with a note"):
        fault("p3", note=" ")


@pytest.mark.parametrize(
    ("status", "reason", "rejected", "stands"),
    [
        ("good", "", False, "accepted"),
        ("good", "x", False, "accepted"),
        ("check", "", False, ""),
        ("check", "dip agrees", False, "accepted with reason"),
        ("check", "dip differs", True, "rejected"),
        ("refused", "", False, "rejected"),
    ],
)
def test_how_a_result_was_judged(status: str, reason: str, rejected: bool, stands: str) -> None:
    assert judgement(status, reason, rejected=rejected) == stands


def test_the_later_facts_make_a_later_form_and_only_they() -> None:
    assert b'"form":1' in canonical(sample())
    for facts in ({"judgement": "accepted"}, {"signals": {"p1": "failed"}}, {"seen": 3},
                  {"source": "plc1"}, {"witness": "C. Gull"}):  # fmt: skip
        entry = sample(**facts)
        assert b'"form":2' in canonical(entry)
        assert decoded(canonical(entry)) == entry
        assert canonical(decoded(canonical(entry))) == canonical(entry)
    with pytest.raises(ValueError, match="judgement"):
        sample(judgement="perhaps")
    with pytest.raises(ValueError, match="not an entry"):
        decoded(canonical(sample(seen=3)).replace(b'"seen":3', b'"seen":"3"'))
