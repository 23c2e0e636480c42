"""Keys in the order they were pressed, each after the last one has had its effect.

Over a slow line several keys arrive at once. The library hands every key to what has the focus
at that moment, so that in "F2, Down, 9" the two after F2 would still go to the old field. Keys
that come one by one pass without delay.
"""

from __future__ import annotations

import asyncio
import math
import time
from collections.abc import Awaitable, Callable
from contextlib import suppress
from dataclasses import dataclass, field

from textual import events
from textual.message import Message
from textual.message_pump import MessagePump

BURST_S = 0.05
"""A key that follows another one within this time waits for that one's effect."""
PATIENCE_S = 0.5
"""Longest wait: what the key went to may be gone, and then nothing comes back from it."""


@dataclass
class Arrived(Message):
    """Sent after a key along the same way; when it comes up to the app, the key has too."""

    event: asyncio.Event = field(default_factory=asyncio.Event)


def apart(event: events.Event) -> list[events.Event]:
    """Return an Alt key as what it mostly is: Esc and the next key, close together.

    Examples
    --------
    >>> [key.key for key in apart(events.Key("alt+q", "q"))]
    ['escape', 'q']
    """
    if isinstance(event, events.Key) and event.key.startswith("alt+") and event.character:
        return [events.Key("escape", None), events.Key(event.character, event.character)]
    return [event]


class KeyLine:
    """Passes keys and pastes on, one after the other."""

    def __init__(
        self,
        forward: Callable[[events.Event], Awaitable[None]],
        target: Callable[[], MessagePump],
    ) -> None:
        self._forward = forward
        self._target = target
        self._waiting: asyncio.Queue[events.Event] = asyncio.Queue()
        self._came = -math.inf

    @property
    def quiet_s(self) -> float:
        """For how long no key has come."""
        return time.monotonic() - self._came

    def put(self, event: events.Event) -> None:
        """Take a key or a paste."""
        self._came = time.monotonic()
        for one in apart(event):
            self._waiting.put_nowait(one)

    async def run(self) -> None:
        """Pass on what comes, for as long as the app runs."""
        clock = asyncio.get_running_loop().time
        last, target = -BURST_S, self._target()
        while True:
            event = await self._waiting.get()
            if clock() - last < BURST_S:
                # A key bubbles up to the app, and what it causes comes down and up again.
                await self._arrive(target)
                await self._arrive(self._target())
            target = self._target()
            await self._forward(event)
            last = clock()

    async def _arrive(self, target: MessagePump) -> None:
        """Wait until what went to a target so far has come up to the app."""
        message = Arrived()
        target.post_message(message)
        with suppress(TimeoutError):
            await asyncio.wait_for(message.event.wait(), PATIENCE_S)
