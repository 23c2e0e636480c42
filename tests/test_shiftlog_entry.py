"""Entries: canonical bytes, and the facts both front ends put in."""

from __future__ import annotations

import math
import os
import pwd
from dataclasses import dataclass, field
from hashlib import sha256
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from shiftlog_samples import NOON_US, VERSIONS, sample

from tankcalc import __version__
from tankcalc.errors import InputError
from tankcalc.fluids.fluid import Fluid
from tankcalc.result import Notice, Result, as_json
from tankcalc.shiftlog import login_name, note_entry, reading_entry
from tankcalc.shiftlog.chain import GENESIS, link
from tankcalc.shiftlog.entry import canonical, decoded
from tankcalc.shiftlog.uid import new_uid, show_uid

HOUR_US = 3_600_000_000

plain = st.recursive(
    st.none()
    | st.booleans()
    | st.integers()
    | st.floats(allow_nan=False, allow_infinity=False)
    | st.text(),
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(st.text().filter(lambda key: key != "float"), inner, max_size=3)
    ),
    max_leaves=12,
)


@given(
    note=st.text(),
    typed=st.dictionaries(st.text().filter(lambda key: key != "float"), st.text(), max_size=4),
    result=st.none() | st.dictionaries(st.sampled_from("abcdef"), plain, max_size=6),
    t_us=st.integers(0, 253_370_764_799_999_999),
)
def test_canonical_bytes_give_the_entry_back(
    note: str, typed: dict[str, str], result: dict[str, Any] | None, t_us: int
) -> None:
    entry = sample(note=note, typed=typed, result=result, t_us=t_us)
    body = canonical(entry)
    assert body.isascii()
    assert decoded(body) == entry
    assert canonical(decoded(body)) == body


def test_the_canonical_form_stays_what_it_is() -> None:
    """A regression test: every log ever written hangs on these bytes."""
    entry = sample(uid=bytes(range(16)), note="é\x1b", result={"level_m": 0.1, "ok": True})
    text = (
        '{"console":"host:1","entered_us":1796126400000000,"fluid":"gas-oil","form":1,'
        '"kind":"reading","movement":"","note":"\\u00e9\\u001b","program":"0.1.0","reason":"","ref":null,'
        '"result":{"level_m":{"float":"0x1.999999999999ap-4"},"ok":true},"shift":"Day",'
        '"shift_date":"2026-12-01","site":"Skerry Point Terminal","t_us":1796126400000000,'
        '"tank":"T-101","time_zone":"Europe/Lisbon",'
        '"typed":{"p1":"85.3 kPa","temperature":"18 degC"},'
        '"uid":"000102030405060708090a0b0c0d0e0f","user":"operator","versions":'
        f'{{"fluid":"{VERSIONS["fluid"]}","site":"{VERSIONS["site"]}",'
        f'"tank":"{VERSIONS["tank"]}"}},"who":"A. Rook"}}'
    )
    assert canonical(entry) == text.encode()
    assert link(GENESIS, canonical(entry)) == sha256(bytes(32) + text.encode()).digest()


def test_a_float_and_a_text_that_looks_like_one_differ() -> None:
    assert canonical(sample(result={"a": 1.5})) != canonical(sample(result={"a": (1.5).hex()}))
    with pytest.raises(ValueError, match="no key to keep"):
        canonical(sample(result={"a": {"float": "0x1.8p+0"}}))


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_what_is_no_figure_is_never_kept(value: float) -> None:
    with pytest.raises(ValueError, match="no figure"):
        canonical(sample(result={"level_m": value}))


def test_only_plain_data_is_kept() -> None:
    with pytest.raises(TypeError, match="no plain data"):
        canonical(sample(result={"level_m": object()}))


@pytest.mark.parametrize(
    "body",
    [
        b"",
        b"null",
        b"[]",
        b"{}",
        b"\xff",
        b'{"form":1}',
        b'{"form":2}',
        b'{"form":1,"uid":7,"ref":null}',
        b"[" * 100_000,
        canonical(sample()).replace(b'"t_us":1796126400000000', b'"t_us":-1'),
        canonical(sample()).replace(b'"who"', b'"whom"'),
        canonical(sample()).replace(b'"who":"A. Rook"', b'"who":7'),
        canonical(sample()).replace(b'"85.3 kPa"', b"85.3"),
        canonical(sample()).replace(b'p+3"', b'p+9999"'),
        canonical(sample(result={"a": 1.5})).replace(b'"0x1.8000000000000p+0"', b'"inf"'),
        canonical(sample(typed={})).replace(b'"typed":{}', b'"typed":[]'),
        canonical(sample(result={})).replace(b'"result":{}', b'"result":[]'),
    ],
    ids=lambda body: body[:20].decode("latin-1"),
)
def test_bytes_that_are_no_entry_are_refused(body: bytes) -> None:
    with pytest.raises(ValueError):  # noqa: PT011  (the message is the JSON reader's or ours)
        decoded(body)


@pytest.mark.parametrize("change", [{"uid": b"short"}, {"ref": b"short"}, {"t_us": -1}])
def test_an_impossible_entry_is_not_made(change: dict[str, Any]) -> None:
    with pytest.raises(ValueError, match="an entry's"):
        sample(**change)


@given(st.integers(0, 2**48 * 1000 - 1))
def test_identifiers_have_the_layout_of_rfc_9562(now_us: int) -> None:
    """RFC 9562 section 5.7: 48 bits of milliseconds, version 7, variant binary 10."""
    uid = new_uid(now_us)
    assert int.from_bytes(uid[:6], "big") == now_us // 1000
    assert uid[6] >> 4 == 7
    assert uid[8] >> 6 == 0b10
    assert show_uid(uid).replace("-", "") == uid.hex()
    assert new_uid(now_us) != uid


@dataclass(frozen=True)
class Site:
    name: str = "Skerry Point Terminal"
    time_zone: str = "Europe/Lisbon"
    shifts: dict[str, str] = field(default_factory=lambda: {"Day": "06:00", "Night": "18:00"})
    version: str = VERSIONS["site"]


@dataclass(frozen=True)
class TankFile:
    name: str = "Tank 101"
    file: str = "T-101"
    version: str = VERSIONS["tank"]
    transmitters: dict[str, Any] = field(default_factory=dict)
    dp: None = None


FLUID = Fluid("Gas oil", (), file="gas-oil", version=VERSIONS["fluid"])
RESULT = Result(
    "Tank 101", "Gas oil", "p1", "refused", (Notice("above", "Too high.", "p1", refuses=True),)
)


def a_reading(**changes: Any) -> Any:
    facts: dict[str, Any] = {
        "site": Site(),
        "tank": TankFile(),
        "fluid": FLUID,
        "typed": {"p1": "85.3 kPa"},
        "result": RESULT,
        "now_us": NOON_US,
    }
    return reading_entry(**facts | changes)


def test_a_reading_holds_what_is_needed_to_repeat_it() -> None:
    entry = a_reading(note="steady", who="A. Rook")
    assert (entry.kind, entry.tank, entry.fluid) == ("reading", "T-101", "gas-oil")
    assert entry.typed == {"p1": "85.3 kPa"}
    assert entry.result == as_json(RESULT)
    assert entry.status == "refused"
    assert entry.versions == VERSIONS
    assert entry.program == __version__
    assert (entry.t_us, entry.entered_us) == (NOON_US, NOON_US)
    assert (entry.shift, entry.shift_date) == ("Day", "2026-12-01")
    assert (entry.note, entry.who, entry.site) == ("steady", "A. Rook", Site().name)
    assert entry.console.endswith(f":{os.getpid()}")


def test_the_shift_is_that_of_the_reading_not_of_the_entry() -> None:
    entry = a_reading(t_us=NOON_US - 7 * HOUR_US)
    assert (entry.shift, entry.shift_date) == ("Night", "2026-11-30")
    assert entry.entered_us == NOON_US


def test_the_login_name_does_not_come_from_the_environment(monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("USER", "LOGNAME", "USERNAME", "LNAME"):
        monkeypatch.setenv(name, "somebody else")
    assert a_reading().user == pwd.getpwuid(os.getuid()).pw_name


def test_a_login_without_a_name_is_its_number(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(os, "getuid", lambda: 3_999_999_999)
    assert login_name() == "uid 3999999999"


def test_a_note_needs_no_tank_but_words() -> None:
    entry = note_entry(site=Site(), note="Pump 3 noisy", now_us=NOON_US)
    assert (entry.kind, entry.tank, entry.result) == ("note", None, None)
    assert entry.versions == {"site": VERSIONS["site"]}
    assert entry.status == ""
    with pytest.raises(InputError, match="without words"):
        note_entry(site=Site(), note=" \n", now_us=NOON_US)


def test_a_note_too_long_is_refused_not_cut() -> None:
    with pytest.raises(InputError, match="4001 characters"):
        a_reading(note="x" * 4001)
    with pytest.raises(InputError, match="81 characters"):
        a_reading(who="x" * 81)
    assert len(a_reading(note="x" * 4000).note) == 4000
