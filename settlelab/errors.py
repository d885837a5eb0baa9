"""What can go wrong, told so that the person at the bench can act on it.

Every error that settlelab raises on purpose derives from `SettlelabError`; the command line turns it into
its sentence and exit code 1. Faults of an input are collected and raised together as `InputFaults`.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path


class SettlelabError(Exception):
    """The work could not be done; the message is one sentence for the user."""


class RecordingError(SettlelabError):
    """A recording cannot be opened, decoded or measured."""


class FitError(SettlelabError):
    """A fit has too little data or no acceptable solution."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """One thing wrong with an input: where it stands, what was found, what would be accepted.

    Reads `particles.csv, row 7, column "mass [mg]": "12,5.3" is not a number such as 12.5 or 12,5`.
    """

    file: Path
    found: str | None  # as it stands in the file; None where something is missing
    accepted: str
    row: int | None = None  # as a spreadsheet counts: the heading is row 1; of a TOML file the line
    column: str | None = None
    key: str | None = None  # section and key of a TOML file

    def __str__(self) -> str:
        place = [self.file.name]
        if self.key:
            place.append(self.key)
        if self.row is not None:
            place.append(f"{'line' if self.file.suffix == '.toml' else 'row'} {self.row}")
        if self.column is not None:
            place.append(f'column "{self.column}"')
        what = "missing, expected" if self.found is None else f'"{self.found}" is not'
        return f"{', '.join(place)}: {what} {self.accepted}"


class InputFaults(SettlelabError):
    """All the faults of an input, found in one go."""

    def __init__(self, faults: Sequence[Fault]) -> None:
        self.faults = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


def did_you_mean(word: str, known: Iterable[str], *, cutoff: float = 0.6) -> str:
    """A hint ` (did you mean "..."?)` with the nearest known name of at least `cutoff` likeness, or nothing."""
    near = difflib.get_close_matches(word, list(known), n=1, cutoff=cutoff)
    return f' (did you mean "{near[0]}"?)' if near else ""
