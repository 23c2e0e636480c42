"""Work of the console that goes on beside the keys."""

from __future__ import annotations

from collections.abc import Awaitable, Callable
from typing import cast

from textual.dom import DOMNode
from textual.worker import Worker, WorkType

Work = Callable[[], Awaitable[None]]
"""Something to do. It is made when its turn comes: where the console closes before, there is
nothing left behind that was never waited for."""


def begin(
    node: DOMNode, work: Work, group: str = "default", *, exclusive: bool = False
) -> Worker[None]:
    """Have some work done for as long as a screen or the app lives.

    ``exclusive``: what the group was doing is dropped for it.
    """
    return node.run_worker(cast("WorkType[None]", work), group=group, exclusive=exclusive)
