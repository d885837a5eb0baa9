"""A study folder to fill in."""

from __future__ import annotations

from importlib.resources import files
from pathlib import Path

from settlelab.errors import SettlelabError

__all__ = ["new_study"]

TEMPLATES = ("study.toml", "particles.csv", "viscometer.csv", "README.md")


def new_study(directory: Path) -> list[Path]:
    """Write a commented `study.toml`, the bench tables and a README; returns what was written.

    Parameters
    ----------
    directory : Path
        Folder of the study; made where missing. Nothing in it is overwritten.

    Raises
    ------
    SettlelabError
        One of the files is there already, or the folder cannot be written to.
    """
    targets = [directory / name for name in TEMPLATES]
    taken = [target.name for target in targets if target.exists()]
    if taken:
        raise SettlelabError(f"{directory} holds {', '.join(taken)} already; nothing is overwritten: name a new folder")
    try:
        directory.mkdir(parents=True, exist_ok=True)
        for target in targets:
            target.write_bytes(files("settlelab.study").joinpath("template", target.name).read_bytes())
    except OSError as error:
        raise SettlelabError(f"{directory} cannot be written to ({error.strerror})") from error
    return targets
