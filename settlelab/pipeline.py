"""Runs a study: stages in order, recordings in parallel, picked up where an earlier run stopped.

In: a study file. Out: the files that the design promises under Results, in one folder.
"""

from __future__ import annotations

import hashlib
import json
import os
import platform
from collections.abc import Callable, Iterator, Mapping, Sequence
from concurrent.futures import Future, ProcessPoolExecutor, as_completed
from dataclasses import dataclass
from importlib.metadata import version
from multiprocessing import get_context
from pathlib import Path

import cv2
import pandas as pd

import settlelab.video
from settlelab.calibrate import Calibration, Origin, calibrate_drops, write_card
from settlelab.errors import FitError, RecordingError, SettlelabError
from settlelab.measure import Drop, Measured, TrackPoint, measure_study, track_table
from settlelab.report import LabRow, lab_table, write_csv, write_report
from settlelab.report.verdict import Finding, findings
from settlelab.study import read_study
from settlelab.study.model import Recording, Study
from settlelab.video import TrackedRecording, follow_falls, load_tracked, save_tracked

__all__ = ["StudyResult", "run_study", "track_recordings"]

LIBRARIES = ("settlelab", "numpy", "scipy", "pandas", "lmfit", "opencv-python-headless", "matplotlib")
Progress = Callable[[int, int], None]  # recordings done, of how many


@dataclass(frozen=True, slots=True, kw_only=True)
class StudyResult:
    """What a run found and where it was written."""

    study: Study
    tracked: tuple[TrackedRecording, ...]  # in the order of the study's recordings
    measured: Measured
    calibration: Calibration | None
    findings: tuple[Finding, ...]  # what a reader should know first
    notes: tuple[str, ...]  # doubts, one sentence each
    written: tuple[Path, ...]


def run_study(
    path: Path, *, out: Path | None = None, workers: int = 1, progress: Progress | None = None
) -> StudyResult:
    """Do the main job on a study: track, measure, rank, calibrate, report.

    Parameters
    ----------
    path : Path
        `study.toml` or the folder that holds one.
    out : Path, optional
        Folder for the results; `results` beside the study file where left out.
    workers : int
        Recordings tracked at the same time. The results do not depend on it.
    progress : callable, optional
        Told after each recording how many are done, of how many.

    Raises
    ------
    InputFaults
        The study or a bench table cannot be used; every fault is named.
    RecordingError
        A recording cannot be used. The others are tracked and kept for the next run.
    """
    study = read_study(path)
    out = out or study.file.parent / "results"
    tracked = tuple(track_recordings(study, out / "tracked", workers=workers, progress=progress))
    measured = measure_study(study, tracked)
    calibration, notes = _calibrate(study, measured)
    return StudyResult(
        study=study,
        tracked=tracked,
        measured=measured,
        calibration=calibration,
        findings=findings(measured, calibration),
        notes=(*measured.doubts, *notes),
        written=(*_write(out, study, tracked, measured, calibration), out / "figures", out / "overlays"),
    )


def track_recordings(
    study: Study, archive: Path, *, workers: int = 1, progress: Progress | None = None
) -> list[TrackedRecording]:
    """Track every recording of a study that `archive` does not hold yet, and return all of them in order.

    What the archive holds of other pictures, settings or trackers is removed once all is well.

    Raises
    ------
    RecordingError
        The sentences of all recordings that cannot be used; the others are in the archive by then.
    """
    paths = [archive / f"{_fingerprint(recording)}.npz" for recording in study.recordings]
    waiting = {path: recording for path, recording in zip(paths, study.recordings, strict=True) if not path.exists()}
    failures: dict[Path, SettlelabError] = {}
    for done, (path, failure) in enumerate(_track_each(waiting, workers), start=1):
        if failure is not None:
            failures[path] = failure
        if progress is not None:
            progress(done, len(waiting))
    if failures:  # in the order of the study, whichever process finished first
        raise RecordingError("\n".join(str(failures[path]) for path in waiting if path in failures))
    for outdated in set(archive.glob("*.npz")) - set(paths):
        outdated.unlink()
    return [load_tracked(path) for path in paths]


def _track_each(waiting: Mapping[Path, Recording], workers: int) -> Iterator[tuple[Path, SettlelabError | None]]:
    if workers <= 1 or len(waiting) <= 1:
        for path, recording in waiting.items():
            yield path, _track_one(recording, path)
        return
    # spawned, not forked: OpenCV's threads do not survive a fork; one thread each, the processes share the cores
    pool = ProcessPoolExecutor(
        max_workers=min(workers, len(waiting)),
        mp_context=get_context("spawn"),
        initializer=cv2.setNumThreads,
        initargs=(1,),
    )
    with pool:
        futures: dict[Future[SettlelabError | None], Path] = {
            pool.submit(_track_one, recording, path): path for path, recording in waiting.items()
        }
        for future in as_completed(futures):
            yield futures[future], future.result()


def _track_one(recording: Recording, path: Path) -> SettlelabError | None:
    """Track one recording into its archive; what is wrong with it is returned, so that the others go on."""
    try:
        save_tracked(follow_falls(recording.video, camera=recording.camera, column=recording.column), path)
    except SettlelabError as error:
        return error
    return None


def _fingerprint(recording: Recording) -> str:
    """A name that changes whenever tracking could give another result: the pictures, the settings or the tracker."""
    digest = hashlib.sha256()
    for source in sorted(Path(settlelab.video.__path__[0]).glob("*.py")):
        digest.update(source.read_bytes())
    for file in _pictures(recording):
        digest.update(f"{file.name} {_sha256(file)}\n".encode())
    digest.update(repr((recording.camera, recording.column)).encode())
    return f"{recording.video.stem}-{digest.hexdigest()[:16]}"


def _pictures(recording: Recording) -> list[Path]:
    """The files that a recording is made of: a video or the pictures of a folder, and the checkerboard."""
    video, board = recording.video, recording.camera.checkerboard
    files = sorted(file for file in video.iterdir() if file.is_file()) if video.is_dir() else [video]
    return files if board is None else [*files, board]


def _calibrate(study: Study, measured: Measured) -> tuple[Calibration | None, tuple[str, ...]]:
    """The calibration, or the reason why these drops carry none: the drop table is worth having all the same."""
    origin = Origin(title=study.name, date=study.date, by=", ".join(filter(None, [study.operator, study.lab])))
    try:
        calibration = calibrate_drops(measured.drops, study.calibration, origin=origin)
    except FitError as error:
        return None, (f"no calibration: {error}",)
    return calibration, calibration.notes[1:]  # the first one is the verdict, told among the findings


def _write(
    out: Path,
    study: Study,
    tracked: Sequence[TrackedRecording],
    measured: Measured,
    calibration: Calibration | None,
) -> Iterator[Path]:
    """Write the files of the design's Results, the lab report table first."""
    yield write_csv(lab_table(measured, calibration), LabRow, out / "lab_table.csv")
    yield write_csv(measured.drops, Drop, out / "drops.csv")
    yield write_csv(_tracks(study, tracked), TrackPoint, out / "tracks.csv", digits=9)
    yield write_csv(measured.budget, None, out / "budget.csv")
    if calibration is not None:
        yield write_csv(calibration.ranking, None, out / "ranking.csv")
        yield write_csv(calibration.ranking_by_group, None, out / "ranking_by_group.csv")
        yield write_card(calibration.card, out / "calibration.json")
    provenance = _provenance(study)
    yield _write_json(provenance, out / "provenance.json")
    yield write_report(
        out, study=study, measured=measured, calibration=calibration, tracked=tracked, provenance=provenance
    )


def _tracks(study: Study, tracked: Sequence[TrackedRecording]) -> pd.DataFrame:
    """The points of all falls, the recording in front, drops counted through the study as in the drop table."""
    parts, first_drop = [], 1
    for recording, seen in zip(study.recordings, tracked, strict=True):
        part = track_table(seen, first_drop=first_drop)
        part.insert(0, "recording", recording.name)
        parts.append(part)
        first_drop += len(seen.falls)
    return pd.concat(parts, ignore_index=True)


def _provenance(study: Study) -> dict[str, dict[str, object]]:
    """What the results were made from and with; no date, so that the same input gives the same bytes."""
    base = study.file.parent
    files = [*study.inputs, *(file for recording in study.recordings for file in _pictures(recording))]
    return {
        "input files (SHA-256)": {_relative(file, base): _sha256(file) for file in dict.fromkeys(files)},
        "software": {"python": platform.python_version(), **{name: version(name) for name in LIBRARIES}},
        "settings": {
            recording.name: f"gravity {recording.camera.gravity}, fluid {recording.fluid.name}"
            for recording in study.recordings
        },
    }


def _relative(file: Path, base: Path) -> str:
    """A path as seen from the study file: no folder of this machine ends up in a report."""
    return Path(os.path.relpath(file.resolve(), base.resolve())).as_posix()


def _write_json(content: object, path: Path) -> Path:
    path.write_text(json.dumps(content, indent=2, ensure_ascii=False) + "\n", encoding="utf-8", newline="\n")
    return path


def _sha256(file: Path) -> str:
    with file.open("rb") as content:
        return hashlib.file_digest(content, "sha256").hexdigest()
