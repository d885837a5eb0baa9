"""How commands speak: what was written and where, doubts, tables."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

import click


def written(paths: Iterable[Path]) -> None:
    """Tell which files a command wrote."""
    for path in paths:
        click.echo(f"wrote {path}")


def doubts(notes: Iterable[str]) -> None:
    """Tell what a reader of the result should know, on standard error."""
    for note in notes:
        click.echo(f"note: {note}", err=True)
