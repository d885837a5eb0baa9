"""`settlelab check`: everything is read, nothing is run."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING

import click

from settlelab.cli import console
from settlelab.errors import RecordingError, SettlelabError

if TYPE_CHECKING:
    from settlelab.study import Study

_WIDTH = 100
_INDENT = 12


@click.command("check")
@click.argument("study", type=click.Path(path_type=Path))
@click.option(
    "--stills",
    type=click.Path(path_type=Path, file_okay=False),
    metavar="DIR",
    help="Write a still of each recording with a grid of pixels to DIR, to read marks from.",
)
def command(study: Path, stills: Path | None) -> None:
    """Tell what is wrong with a study or assumed. Reads it and its tables, opens its recordings; nothing is run."""
    from settlelab.study import read_study, study_summary

    checked = read_study(study)
    for title, lines in study_summary(checked).items():
        _part(title, lines)
    opened, unreadable = _open(checked, stills)
    _part("Videos", opened)
    _part("Assumed", checked.assumed or ["nothing"])
    if unreadable:
        raise SettlelabError("\n".join(unreadable))
    drops = sum(len(recording.particles) for recording in checked.recordings)
    click.echo(f"\nready: settlelab run {study} (recordings: {len(checked.recordings)}, drops: {drops})")


def _open(study: Study, stills: Path | None) -> tuple[list[str], list[str]]:
    """A line for each recording that opens, an error for each that does not; a still of each where wanted."""
    from settlelab.video.source import open_recording
    from settlelab.video.stills import first_picture, write_still

    opened, unreadable = [], []
    for number, recording in enumerate(study.recordings, start=1):
        try:
            source = open_recording(recording.video)
            first_picture(source)
        except RecordingError as error:
            unreadable.append(str(error))
            continue
        width, height = source.size
        opened.append(f"{recording.name}: opens, {width} x {height} px, about {source.expected_frames} frames")
        if stills is not None:
            console.written([write_still(source, stills / f"{number:02d}_{recording.video.stem}.png")])
    return opened, unreadable


def _part(title: str, lines: Iterable[str]) -> None:
    """A part of the summary, its title in the margin."""
    for number, line in enumerate(lines):
        depth = len(line) - len(line.lstrip())
        margin = title if number == 0 else ""
        hanging = " " * (_INDENT + depth + 2)
        first = f"{margin:{_INDENT}}{' ' * depth}"
        click.echo(textwrap.fill(line.strip(), _WIDTH, initial_indent=first, subsequent_indent=hanging))
