"""Slow work beside the screen: in a thread that neither stops a key nor keeps the program open."""

from __future__ import annotations

import asyncio
from collections.abc import Callable
from contextlib import suppress
from threading import Thread
from typing import TypeVar

T = TypeVar("T")


def aside(work: Callable[[], T], name: str) -> asyncio.Future[T]:
    """Return what some work comes to, once it has.

    Nothing can end a thread: who leaves drops the answer, and the work runs out unheard.
    """
    loop = asyncio.get_running_loop()
    answer: asyncio.Future[T] = loop.create_future()

    def put(give: Callable[..., None], value: object) -> None:
        if not answer.done():
            give(value)

    def run() -> None:
        give: Callable[..., None] = answer.set_result
        value: object
        try:
            value = work()
        except Exception as error:  # noqa: BLE001 - it is raised where the answer is waited for
            give, value = answer.set_exception, error
        # A console that was left has no loop any more.
        with suppress(RuntimeError):
            loop.call_soon_threadsafe(put, give, value)

    Thread(target=run, name=f"tankcalc-{name}", daemon=True).start()
    return answer
