"""The screens: the one people work on, and the short ones that ask or tell something."""

from __future__ import annotations
