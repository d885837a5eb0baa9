"""Values from outside: the tables in tests/published and the reference data beside the repository."""

from __future__ import annotations

import csv
from pathlib import Path

import pytest

PUBLISHED = Path(__file__).parents[1] / "published"
WORDS = ("method", "law", "quantity", "kind", "confirmed", "source")


def published(name: str) -> list[dict[str, str]]:
    """Rows of a table of published values."""
    with (PUBLISHED / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def inputs(row: dict[str, str], *results: str) -> dict[str, float]:
    """The inputs of a row: its numeric columns but for the result and its tolerance."""
    left_out = {*WORDS, *results, "half_digit", "allowance"}
    return {name: float(text) for name, text in row.items() if name not in left_out and text}


def reference(path: str) -> Path:
    """A file of the reference beside the repository; the test is skipped where there is none."""
    found = PUBLISHED.parents[2] / "shared" / "reference" / path
    if not found.exists():
        pytest.skip(f"no reference data beside the repository ({path})")
    return found
