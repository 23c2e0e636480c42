"""The text of a fluid file: a new one, or one that is changed and keeps its comments."""

from __future__ import annotations

import datetime
from collections.abc import Mapping
from typing import Any

from tankcalc.errors import InputError

KIND = "model"
"""The key whose comment is about the old model, and goes with it."""


def fluid_text(name: str, density: Mapping[str, Any], base: bytes | None = None) -> str:
    r"""Return the text of a fluid file; of one that is changed, with what else it held.

    Raises
    ------
    InputError
        The file it began from describes layers or is no TOML.

    Examples
    --------
    >>> old = b'[density]\nmodel = "constant"\nvalue = "850 kg/m3"  # mud balance\n'
    >>> print(fluid_text("Slurry", {"model": "constant", "value": "900 kg/m3"}, old), end="")
    name = "Slurry"
    <BLANKLINE>
    [density]
    model = "constant"
    value = "900 kg/m3"  # mud balance
    """
    import tomlkit
    from tomlkit.exceptions import TOMLKitError

    try:
        document = tomlkit.parse("" if base is None else base.decode("utf-8-sig"))
        if name and "name" not in document:
            # A key can only stand before the first table.
            rest = document.as_string()
            document = tomlkit.parse(tomlkit.dumps({"name": name}) + ("\n" + rest if rest else ""))
    except (TOMLKitError, UnicodeDecodeError, RecursionError) as error:
        raise InputError("The file it began from is no TOML. Begin a new one.") from error
    if "layer" in document:
        raise InputError("The file it began from describes layers. Begin a new one.")
    if not name:
        document.pop("name", None)
    elif document["name"] != name:
        document["name"] = name
    if not isinstance(document.get("density"), dict):
        document["density"] = tomlkit.table()
    _update(document["density"], density)
    return tomlkit.dumps(document)


def new_text(name: str, density: Mapping[str, Any], base: bytes | None = None) -> str:
    """Return the text of a new fluid; of the file it began from, only the vapour goes along.

    Comments of that file are about another liquid.

    Raises
    ------
    InputError
        The file it began from is no TOML.
    """
    import tomllib

    import tomlkit

    text = fluid_text(name, density)
    try:
        held = tomllib.loads("" if base is None else base.decode("utf-8-sig"))
    except (tomllib.TOMLDecodeError, UnicodeDecodeError, RecursionError) as error:
        raise InputError("The file it began from is no TOML. Begin a new one.") from error
    vapour = held.get("vapour")
    return text if vapour is None else f"{text}\n{tomlkit.dumps({'vapour': vapour})}"


def _update(table: Any, wanted: Mapping[str, Any]) -> None:
    """Make a table hold what is wanted, touching nothing that is right already."""
    for key in [key for key in table if key not in wanted]:
        del table[key]
    for key, value in wanted.items():
        held = table.get(key)
        if _same(_plain(held), value):
            continue
        if isinstance(held, list) and isinstance(value, list) and held and value:
            _update_list(held, value)
        elif isinstance(held, dict) and isinstance(value, dict):
            _update(held, value)
        else:
            table[key] = _item(value)
            if key == KIND:
                _without_comment(table[key])


def _same(held: Any, value: Any) -> bool:
    """Return whether a file says this already; a date may stand there without quotes."""
    if isinstance(held, datetime.date):
        return bool(str(held) == value)
    return type(held) is type(value) and bool(held == value)


def _without_comment(item: Any) -> None:
    """Drop the comment that follows a value."""
    if hasattr(item, "trivia"):
        item.trivia.comment_ws = item.trivia.comment = ""


def _update_list(held: Any, wanted: list[Any]) -> None:
    """Change the entries that differ, so that comments between the others stay."""
    for n, (old, new) in enumerate(zip(list(held), wanted, strict=False)):
        if _plain(old) != new:
            held[n] = _item(new, nested=True)
    for new in wanted[len(held) :]:
        held.append(_item(new, nested=True))
    while len(held) > len(wanted):
        del held[-1]


def _plain(value: Any) -> Any:
    return value.unwrap() if hasattr(value, "unwrap") else value


def _item(value: Any, *, nested: bool = False) -> Any:
    """Return a value as TOML; a list of lists a line each."""
    import tomlkit

    if isinstance(value, dict):
        table = tomlkit.inline_table()
        table.update({key: _item(held, nested=True) for key, held in value.items()})
        return table
    if not isinstance(value, list):
        return tomlkit.item(value)
    array = tomlkit.array()
    array.extend(_item(entry, nested=True) for entry in value)
    rows = any(isinstance(entry, (list, dict)) for entry in value)
    return array.multiline(rows and not nested)
