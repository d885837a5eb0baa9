"""`settlelab run`: the main job."""

from __future__ import annotations

import os
from pathlib import Path

import click

from settlelab.cli import console


@click.command("run")
@click.argument("study", type=click.Path(path_type=Path))
@click.option(
    "--out", type=click.Path(path_type=Path), help="Folder for the results [default: results beside the study]."
)
@click.option(
    "--workers",
    type=click.IntRange(min=1),
    default=lambda: os.cpu_count() or 1,
    show_default="one per processor",
    help="Recordings tracked at the same time; the results do not depend on it.",
)
def command(study: Path, out: Path | None, workers: int) -> None:
    """Do the main job on a study. Tracks its recordings, measures, ranks, calibrates, and writes the report.

    STUDY is a study.toml or the folder that holds one. A run that was stopped picks up where it was.
    """
    from settlelab.pipeline import run_study

    with console.progress("tracking") as progress:
        result = run_study(study, out=out, workers=workers, progress=progress)
    console.written(result.written)
    for finding in result.findings:
        click.echo(f"{finding.topic}: {finding.text}")
    console.doubts(result.notes)
