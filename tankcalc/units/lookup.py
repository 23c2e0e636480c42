"""From the word after the number to a unit, or to a message that says what to type instead."""

from __future__ import annotations

import re
from functools import cache
from typing import TYPE_CHECKING, Final, Literal, NamedTuple

from tankcalc.errors import QuantityError
from tankcalc.units.ambiguous import AMBIGUOUS
from tankcalc.units.dimensions import DIMENSIONS
from tankcalc.units.table import NAMES, WORDS, Unit

if TYPE_CHECKING:
    from collections.abc import Sequence

Reference = Literal["gauge", "absolute"]


class Found(NamedTuple):
    """A unit and the pressure reference written with it."""

    unit: Unit
    reference: Reference | None = None


class _Asked(NamedTuple):
    """A word to be found: as typed, in plain spelling, what it may be, and the whole text."""

    word: str
    plain: str
    dimensions: Sequence[str]
    text: str


_SIGNS: Final = str.maketrans({"°": "deg", "µ": "u", "μ": "u", "²": "2", "³": "3"})
_TIGHT: Final = re.compile(r" ?([/()@]) ?")
_POINT: Final = re.compile(r"\.(?![0-9])")
_COLUMN: Final = re.compile(r"@|h2o|hg", re.IGNORECASE)
_POWER: Final = re.compile(r"\^(?=-?[1-3])")

_REFERENCE: Final = re.compile(
    r"(?P<base>.+?)(?: ?\((?P<bracket>g|a|gauge|abs|absolute)\)"
    r"| (?P<apart>g|a|gauge|abs|absolute)"
    r"|(?P<joined>[ga]))",
    re.IGNORECASE,
)
_TAKES_JOINED_LETTER: Final = frozenset(
    {"Pa", "hPa", "kPa", "MPa", "bar", "mbar", "psi", "kgf/cm2"}
)

# At the start of these words a capital is another unit: milli and mega, tonne and tesla (or a ton).
_CASE_MATTERS: Final = frozenset("mMtT")


@cache
def _folded(dimension: str) -> dict[str, tuple[str, ...]]:
    """Return the spellings of a dimension by their small letters."""
    folded: dict[str, tuple[str, ...]] = {}
    for word in WORDS[dimension]:
        folded[word.lower()] = (*folded.get(word.lower(), ()), word)
    return folded


def find(word: str, dimensions: Sequence[str], text: str) -> Found:
    """Return the unit a word names in the first of the dimensions that has it.

    Capitals are forgiven ("KPA", "Psi", "Tonnes") only where no other unit is spelled so: never
    in a word of one letter, nor in a symbol that begins with an m or a t ("mPa", "MPa").

    Raises
    ------
    QuantityError
        With ``text`` as what was typed, why it cannot be used and what to type instead.
    """
    for dimension in dimensions:
        unit = WORDS[dimension].get(word)
        if unit is not None:
            return Found(unit)
    asked = _Asked(word, _plain(word), dimensions, text)
    found = _in_table(asked.plain, dimensions)
    if found is not None:
        return found
    _refuse_ambiguous(asked)
    _refuse_case(asked)
    _refuse_dimension(asked)
    # Only now: its patterns take a millisecond to compile, and nearly every word is in the table.
    from tankcalc.units.beyond import beyond_table

    unit = beyond_table(asked.plain, dimensions)
    if unit is not None:
        return Found(unit)
    raise _unknown(asked)


def wanted(dimensions: Sequence[str]) -> str:
    """Say what is wanted, with an example: 'a pressure is wanted, such as "98.2 kPa"'."""
    nouns = [DIMENSIONS[dimension].noun for dimension in dimensions]
    named = nouns[0] if len(nouns) == 1 else f"{', '.join(nouns[:-1])} or {nouns[-1]}"
    return f'{named} is wanted, such as "{DIMENSIONS[dimensions[0]].example}"'


def _plain(word: str) -> str:
    """One spelling for signs, powers and blanks: "kg / m^3" is "kg/m3", "in. H2O" is "inH2O"."""
    plain = _POWER.sub("", _TIGHT.sub(r"\1", _POINT.sub("", word.translate(_SIGNS))))
    return plain.replace(" ", "") if _COLUMN.search(plain) else plain


def _in_table(plain: str, dimensions: Sequence[str]) -> Found | None:
    for dimension in dimensions:
        unit = _unit(plain, dimension)
        if unit is not None:
            return Found(unit)
    return _with_reference(plain) if "pressure" in dimensions else None


def _unit(plain: str, dimension: str) -> Unit | None:
    """Find a word in one dimension, forgiving a slip of capitals where it is harmless."""
    words = WORDS[dimension]
    if plain in words:
        return words[plain]
    spelled = _folded(dimension).get(plain.lower(), ())
    forgiven = [word for word in spelled if _harmless(plain, word)]
    return words[forgiven[0]] if forgiven else None


def _harmless(plain: str, word: str) -> bool:
    full_name = len(word) > 4 and word.replace(" ", "").isalpha()
    same_start = plain[0] == word[0] or not {plain[0], word[0]} & _CASE_MATTERS
    return full_name or (same_start and len(word) > 1)


def _with_reference(plain: str) -> Found | None:
    """Read a pressure unit with its reference: kPa(g), bar abs, psig."""
    match = _REFERENCE.fullmatch(plain)
    if match is None:
        return None
    unit = _unit(match["base"], "pressure")
    if unit is None or (match["joined"] and unit.name not in _TAKES_JOINED_LETTER):
        return None
    letter = (match["bracket"] or match["apart"] or match["joined"])[0]
    return Found(unit, "gauge" if letter in "gG" else "absolute")


def _refuse_ambiguous(asked: _Asked) -> None:
    bare = asked.plain.lower().replace(" ", "").replace(".", "")
    if bare in AMBIGUOUS:
        why, advice = AMBIGUOUS[bare]
        raise QuantityError(asked.text, f'"{asked.word}" is not clear. {why}', advice)


def _refuse_case(asked: _Asked) -> None:
    for dimension in asked.dimensions:
        for spelled in _folded(dimension).get(asked.plain.lower(), ()):
            raise QuantityError(
                asked.text,
                f'"{asked.word}" is not read as "{spelled}": '
                "a capital can make another unit of a letter.",
                f'Type "{spelled}" if that is meant.',
            )


def _refuse_dimension(asked: _Asked) -> None:
    for name, dimension in DIMENSIONS.items():
        if _in_table(asked.plain, (name,)) is not None:
            raise QuantityError(
                asked.text, f'"{asked.word}" is {dimension.noun}; {wanted(asked.dimensions)}.'
            )


def _unknown(asked: _Asked) -> QuantityError:
    import difflib

    typed = asked.plain.lower()
    spelled = [word for dimension in asked.dimensions for word in WORDS[dimension]]
    by_fold = {word.lower(): word for word in reversed(spelled)}
    near = difflib.get_close_matches(typed, by_fold, n=8, cutoff=0.6)
    # Of words nearly alike, first those that begin alike.
    near.sort(key=lambda word: [a != b for a, b in zip(word, typed, strict=False)])
    if near:
        quoted = [f'"{by_fold[word]}"' for word in near[:2]]
        advice = f"Did you mean {' or '.join(quoted)}?"
    else:
        usual = [name for dimension in asked.dimensions for name in NAMES[dimension][:6]]
        advice = f"Units it can have: {', '.join(name for name in usual if name != '1')}."
    return QuantityError(asked.text, f'Unknown unit "{asked.word}".', advice)
