"""What kinds of entry there are, and which may refer to which."""

from __future__ import annotations

READING, NOTE = "reading", "note"
AMENDMENT, WITHDRAWAL = "amendment", "withdrawal"
MOVEMENT = "movement"
SIGN_ON, SIGN_OFF = "sign-on", "sign-off"
ACKNOWLEDGEMENT = "acknowledgement"
CLOCK_STEP = "clock-step"

FIRST_KINDS = (READING, NOTE)
"""Those of the first schema."""

LATER_KINDS = (
    AMENDMENT,
    WITHDRAWAL,
    MOVEMENT,
    SIGN_ON,
    SIGN_OFF,
    ACKNOWLEDGEMENT,
    CLOCK_STEP,
)
"""Those that the second step of the schema adds."""

KINDS = (*FIRST_KINDS, *LATER_KINDS)
"""Every kind of entry."""

CORRECTIONS = (AMENDMENT, WITHDRAWAL)
"""Kinds that say of an earlier entry that it no longer holds as it was made."""

AMENDABLE = (READING, MOVEMENT)
"""Kinds that hold figures."""

WITHDRAWABLE = (READING, MOVEMENT, NOTE)
"""Kinds that can be taken back."""

WAYS = ("received", "delivered", "drawn")
"""What a metered movement is: into the tank, out of it, or free water drawn off its bottom."""
