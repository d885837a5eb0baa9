"""Tracked recordings kept on disk, so that a study picks up where it stopped.

Plain arrays and JSON in an `.npz` file: nothing executable, so an archive from elsewhere is safe to open.
"""

from __future__ import annotations

import dataclasses
import json
from pathlib import Path
from typing import Any

import numpy as np

from settlelab.units import Quantity
from settlelab.video.model import Clock, Track, TrackedRecording

Arrays = dict[str, Any]  # numpy arrays by name


def save_tracked(tracked: TrackedRecording, path: Path) -> None:
    """Write a tracked recording to an `.npz` file; the same recording gives the same bytes.

    The file appears under its name only when it is whole, so a run that was stopped leaves no half archive.
    """
    arrays: Arrays = {"background": tracked.background}
    facts = {
        "video": str(tracked.video),
        "frame_count": tracked.frame_count,
        "size": tracked.size,
        "clock": dataclasses.asdict(tracked.clock),
        "scale": dataclasses.asdict(tracked.scale),
        "falls": _pack("falls", tracked.falls, arrays),
        "refused": _pack("refused", tracked.refused, arrays),
        "walls": tracked.walls,
        "notes": tracked.notes,
    }
    arrays["facts"] = np.array(json.dumps(facts))
    path.parent.mkdir(parents=True, exist_ok=True)
    unfinished = path.with_name(path.name + ".part")
    with unfinished.open("wb") as file:
        np.savez_compressed(file, **arrays)
    unfinished.replace(path)


def load_tracked(path: Path) -> TrackedRecording:
    """Read back what `save_tracked` wrote."""
    with np.load(path, allow_pickle=False) as archive:
        arrays: Arrays = {name: archive[name] for name in archive.files}
    facts = json.loads(str(arrays.pop("facts")))
    walls = facts["walls"]
    return TrackedRecording(
        video=Path(facts["video"]),
        frame_count=facts["frame_count"],
        size=tuple(facts["size"]),
        clock=Clock(**facts["clock"]),
        scale=Quantity(**facts["scale"]),
        falls=_unpack("falls", facts["falls"], arrays),
        refused=_unpack("refused", facts["refused"], arrays),
        background=arrays["background"],
        walls=None if walls is None else (walls[0], walls[1]),
        notes=tuple(facts["notes"]),
    )


def _pack(kind: str, tracks: tuple[Track, ...], arrays: Arrays) -> list[dict[str, Any]]:
    """Put the series of each track among the arrays and return the rest of it as plain facts."""
    facts = []
    for number, track in enumerate(tracks):
        plain = {}
        for field in dataclasses.fields(track):
            value = getattr(track, field.name)
            if isinstance(value, np.ndarray):
                arrays[f"{kind}.{number}.{field.name}"] = value
            else:
                plain[field.name] = value
        facts.append(plain)
    return facts


def _unpack(kind: str, facts: list[dict[str, Any]], arrays: Arrays) -> tuple[Track, ...]:
    tracks = []
    for number, plain in enumerate(facts):
        prefix = f"{kind}.{number}."
        fields: dict[str, Any] = {
            name.removeprefix(prefix): array for name, array in arrays.items() if name.startswith(prefix)
        }
        fields.update({name: tuple(value) if isinstance(value, list) else value for name, value in plain.items()})
        tracks.append(Track(**fields))
    return tuple(tracks)
