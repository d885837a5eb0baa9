"""`settlelab new`: a study folder to fill in."""

from __future__ import annotations

from pathlib import Path

import click

from settlelab.cli import console


@click.command("new")
@click.argument("directory", metavar="DIR", type=click.Path(path_type=Path, file_okay=False))
def command(directory: Path) -> None:
    """Write a study folder to fill in. It holds a study file, bench tables and a README that explain each entry."""
    from settlelab.study import new_study

    console.written(new_study(directory))
    click.echo(f"fill them in; settlelab check {directory} tells what is still missing")
