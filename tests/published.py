"""Published values as data: rows of ``tests/reference/*.csv``."""

from __future__ import annotations

import csv
import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

FOLDER = Path(__file__).parent / "reference"


@dataclass(frozen=True)
class Published:
    """One published value with its source and tolerance."""

    id: str
    inputs: dict[str, Any]
    quantity: str
    value: str
    unit: str
    tolerance: float
    source: str
    confidence: str

    def __str__(self) -> str:
        return self.id

    def agrees(self, found: float) -> None:
        """Assert that a figure agrees with the published one within its tolerance."""
        wanted = float(self.value)
        assert abs(found - wanted) <= self.tolerance, (
            f"{self.id}: found {found!r}, published {wanted!r} ± {self.tolerance!r} "
            f"{self.unit} ({self.source})"
        )


def published(name: str) -> list[Published]:
    """Every row of one file of published values."""
    with (FOLDER / name).open(newline="", encoding="utf-8") as file:
        return [
            Published(
                row["id"],
                json.loads(row["inputs"]),
                row["quantity"],
                row["value"],
                row["unit"],
                float(row["tolerance"] or 0.0),
                row["source"],
                row["confidence"],
            )
            for row in csv.DictReader(file)
        ]
