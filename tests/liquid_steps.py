"""Steps of the console's liquid screen that several tests take."""

from __future__ import annotations

from test_tui import Console

NEW = "TRY A LIQUID: a new one"


async def open_it(console: Console) -> None:
    await console.press("ctrl+r")
    await console.wait("TRY A LIQUID: from fluids/oil.toml, in V-1")


async def empty(console: Console) -> None:
    """A new liquid, with the model "expansion" and the keys on its first figure."""
    await open_it(console)
    await console.press("f8")
    await console.wait(NEW)
    await console.press("right")
    await console.wait("< expansion >")
    await console.press("down")
    await console.wait(">reference")


async def type_expansion(console: Console) -> None:
    await empty(console)
    await console.type("845 kg/m3")
    await console.press("enter")
    await console.type("15 degC")
    await console.press("down")
    await console.type("8.3e-4 / K")
    await console.wait("845.00 kg/m3")


async def go(console: Console, label: str) -> None:
    """Move down to a field."""
    for _ in range(20):
        if f">{label}" in console.text:
            return
        await console.press("down")
    raise AssertionError(f"no field {label}\n{console.text}")
