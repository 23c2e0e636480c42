"""Text that nobody should be able to type: a quantity or a message, nothing else, and at once."""

from __future__ import annotations

import math
import time

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tankcalc import units
from tankcalc.errors import QuantityError

HOSTILE = [
    "9**9**9**9",
    "9**9**9 m",
    "9^9^9^9",
    "m**9**9**9",
    "10**10**8 Pa",
    "1" * 100_000,
    "a" * 100_000,
    "5 " + "a" * 100_000,
    " " * 100_000 + "5 m",
    "\x00" * 1_000 + "5 m",
    "(" * 5_000,
    "1+" * 5_000,
    "5 " + "m/" * 19,
    "__import__('os').system('id')",
    "().__class__",
    "5 [bold red]m[/]",
    "5 <script>m",
    "5 m; rm -rf /",
    "5 m\x1b]0;owned\x07",
    "5 m\r\nPONG",
    "\u202e5 m",
    "\u200f5 m",
    "5\u0301 m",
    "５ m",
    "5 m\ud800",
    "\U0001f4a3 m",
    "%s %n %x",
    "{0.__class__} m",
    "-" * 40,
    "5 '''''''''''''''''''''''''''''''''''''",
    "1/" * 20,
    "0x10 m",
    "1_000 m",
    "0b1 m",
    "1j m",
    "True m",
    "infinity m",
    "-nan m",
    "1e999 m",
    "1e-999 m",
]

DIMENSIONS = tuple(units.DIMENSIONS)


def read_or_refuse(text: str, dimension: str) -> None:
    """Hold what comes back, a quantity or a message, against what both promise."""
    answer: units.Quantity | QuantityError
    try:
        answer = units.parse(text, dimension)
    except QuantityError as refused:
        answer = refused
    if isinstance(answer, QuantityError):
        assert str(answer).isprintable()
        assert len(str(answer)) < 400
        assert answer.why.endswith(".")
    else:
        assert math.isfinite(answer.si)
        assert answer.text.isprintable()
        assert len(answer.text) <= 40


@pytest.mark.parametrize("text", HOSTILE, ids=lambda text: ascii(text[:20]))
def test_hostile_text_is_refused_at_once(text: str) -> None:
    for dimension in DIMENSIONS:
        began = time.perf_counter()
        with pytest.raises(QuantityError):
            units.parse(text, dimension)
        assert time.perf_counter() - began < 2.0
        read_or_refuse(text, dimension)


@given(st.text(max_size=60), st.sampled_from(DIMENSIONS))
def test_any_text_is_a_quantity_or_a_message(text: str, dimension: str) -> None:
    read_or_refuse(text, dimension)


@given(
    st.text(alphabet="0123456789.,eE+-*/^ ()'\"ftinmkPabrgHOCF°²³µ%@", max_size=30),
    st.sampled_from(DIMENSIONS),
)
def test_any_text_of_the_right_letters_is_a_quantity_or_a_message(
    text: str, dimension: str
) -> None:
    read_or_refuse(text, dimension)


@given(
    st.floats(allow_nan=True, allow_infinity=True),
    st.sampled_from([(d, n) for d in DIMENSIONS for n in units.NAMES[d]]),
)
def test_any_number_with_a_unit_is_a_quantity_or_a_message(
    number: float, unit: tuple[str, str]
) -> None:
    dimension, name = unit
    read_or_refuse(f"{number!r} {name}", dimension)
