"""How commands speak: what was written and where, doubts, progress."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
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


@contextmanager
def progress(doing: str) -> Iterator[Callable[[int, int], None]]:
    """A line `doing 3 of 9` that counts up; silent where the output is not a terminal."""
    shown = sys.stderr.isatty()

    def show(done: int, of: int) -> None:
        if shown:
            click.echo(f"\r{doing} {done} of {of}", err=True, nl=False)

    try:
        yield show
    finally:
        if shown:
            click.echo("\r" + " " * (len(doing) + 20) + "\r", err=True, nl=False)
