"""Strings from outside, made safe to show."""

from __future__ import annotations

import time
import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tankcalc.text import clean

CLEANED = [
    ("T-101", "T-101"),
    ("", ""),
    ("  T-101 \r\n gas\toil ", "T-101 gas oil"),
    ("T-101\x1b[31m", "T-101[31m"),
    ("\x1b]0;owned\x07T-101", "]0;ownedT-101"),
    ("\x9b31mT-101", "31mT-101"),
    ("a\x00b\x7fc\x08d", "abcd"),
    ("\u202eT-101\u202c", "T-101"),
    ("T\u200b-\u200d1\ufeff01\u2060", "T-101"),
    ("\u2066T-101\u2069", "T-101"),
    ("T\ud800-101", "T-101"),
    ("T\ue000-101", "T-101"),
    ("T\ufdd0-101", "T-101"),
    ("T\u00ad-101", "T-101"),
    ("T\u2028101\u2029x\u0085y\u00a0z", "T 101 x y z"),
    ("cafe\u0301", "caf\u00e9"),
    ("Größe 5 m³, 18 °C", "Größe 5 m³, 18 °C"),
    ("\u6cb9\u69fd 7", "\u6cb9\u69fd 7"),
    ("[bold]T-101[/bold]", "[bold]T-101[/bold]"),
]


@pytest.mark.parametrize(("text", "shown"), CLEANED, ids=[ascii(text) for text, _ in CLEANED])
def test_text_is_made_safe(text: str, shown: str) -> None:
    assert clean(text) == shown


def test_text_that_is_too_long_ends_in_three_points() -> None:
    assert clean("a" * 200) == "a" * 200
    assert clean("a" * 201) == "a" * 197 + "..."
    assert clean("abcdefgh", limit=6) == "abc..."
    assert clean("abcdef", limit=6) == "abcdef"


def test_very_long_text_is_cut_at_once() -> None:
    began = time.perf_counter()
    assert len(clean("\u0301" * 1_000_000)) <= 200
    assert time.perf_counter() - began < 1.0


@given(st.text())
def test_nothing_is_left_that_a_terminal_acts_on(text: str) -> None:
    shown = clean(text)
    assert shown.isprintable()
    assert shown.isascii() or all(unicodedata.category(ch)[0] not in "C" for ch in shown)
    assert len(shown) <= 200
    assert shown == " ".join(shown.split())


@given(st.text())
def test_cleaning_twice_changes_nothing_more(text: str) -> None:
    assert clean(clean(text)) == clean(text)


@given(st.text(alphabet=st.characters(min_codepoint=0x21, max_codepoint=0x7E), max_size=200))
def test_plain_words_are_left_as_they_are(text: str) -> None:
    assert clean(text) == text


@given(st.text(max_size=50), st.integers(4, 40))
def test_limit_is_kept(text: str, limit: int) -> None:
    assert len(clean(text, limit)) <= limit
