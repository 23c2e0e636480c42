"""Identifiers an entry carries from the moment it is made, before any store has seen it."""

from __future__ import annotations

import os


def new_uid(now_us: int) -> bytes:
    """Return 16 bytes in the UUID version 7 layout (RFC 9562, section 5.7).

    The first 48 bits are milliseconds of UTC, so new identifiers land at the end of an index;
    the other bits are random, so consoles need not agree with each other.

    Examples
    --------
    >>> show_uid(new_uid(1_793_000_000_000_000))[:15]
    '01a17720-ca00-7'
    """
    random = int.from_bytes(os.urandom(10), "big")
    number = (now_us // 1000 & (1 << 48) - 1) << 80 | random
    number = number & ~(0xF << 76) | 7 << 76
    number = number & ~(0x3 << 62) | 2 << 62
    return number.to_bytes(16, "big")


def show_uid(uid: bytes) -> str:
    """Return the identifier as people see it, 8-4-4-4-12 hexadecimal digits."""
    digits = uid.hex()
    return "-".join((digits[:8], digits[8:12], digits[12:16], digits[16:20], digits[20:]))
