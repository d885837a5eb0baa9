"""Opening and decoding: a video file or a folder of numbered pictures gives grey frames with their times."""

from __future__ import annotations

import itertools
import os
import re
from collections import deque
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, NamedTuple, Protocol, TypeVar

import cv2
import numpy as np
from numpy.typing import NDArray

from settlelab.errors import RecordingError

Item = TypeVar("Item")
Picture = NDArray[Any]  # (height, width), uint8 or float32 with the range of uint8

PICTURE_SUFFIXES = frozenset({".png", ".tif", ".tiff"})
LUMA_8_BIT = frozenset({"I420", "Y800"})  # undecoded luma of any other format is a wrong picture without a word
LIMITED_RANGE_BLACK = 16.0  # ITU-R BT.601 and BT.709: luma 16..235
SILENT = 0  # OpenCV's LOG_LEVEL_SILENT
AHEAD = 2  # frames decoded before they are needed
TRUNCATED_SHARE = 0.98  # of the frames that the header promises

# FFmpeg's own messages off; read once, when the first video is opened, so it is set before
os.environ.setdefault("OPENCV_FFMPEG_LOGLEVEL", "-8")


class Frame(NamedTuple):
    """One grey frame as decoded: not turned."""

    number: int  # in the recording, from 0; a missing picture of a folder leaves a hole
    time: float  # s, on the recording's own clock, from the first frame; nan where it has none
    picture: Picture


class Source(Protocol):
    """A recording that can be read from the start as often as wanted."""

    path: Path
    size: tuple[int, int]  # px, width and height as decoded
    rotation: int  # degrees clockwise that the container asks for before showing
    expected_frames: int  # a guess, for progress only
    black: float  # grey level of no light
    has_clock: bool
    notes: list[str]

    def frames(self) -> Iterator[Frame]:
        """All frames in order; notes what went wrong on the way."""
        ...


def open_recording(path: Path) -> Source:
    """Open a video file or a folder of numbered pictures.

    Raises
    ------
    RecordingError
        Missing, unreadable, without a single frame that can be decoded, or a folder without numbered pictures.
    """
    if not path.exists():
        raise RecordingError(f"{path}: there is no such recording")
    if path.is_dir():
        return _open_folder(path)
    return _open_file(path)


@dataclass(kw_only=True)
class VideoFile:
    """A video file, read with FFmpeg."""

    path: Path
    size: tuple[int, int]
    rotation: int
    expected_frames: int
    black: float
    undecoded_luma: bool
    has_clock: bool = True
    notes: list[str] = field(default_factory=list)

    def frames(self) -> Iterator[Frame]:
        """All frames in order."""
        with _capture(self.path, undecoded_luma=self.undecoded_luma) as capture:
            number, first = 0, 0.0
            while True:
                there, picture = capture.read()
                if not there:
                    break
                time = 1e-3 * capture.get(cv2.CAP_PROP_POS_MSEC)
                first = time if number == 0 else first
                yield Frame(number, time - first, _grey(picture))
                number += 1
        if number < TRUNCATED_SHARE * self.expected_frames:
            note = (
                f"{self.path.name}: breaks off after {number} of the {self.expected_frames} frames that its header"
                " promises; what was readable is analysed"
            )
            if note not in self.notes:
                self.notes.append(note)


@dataclass(kw_only=True)
class PictureFolder:
    """A folder of numbered pictures; it has no clock of its own."""

    path: Path
    size: tuple[int, int]
    pictures: tuple[tuple[int, Path], ...]  # number from 0, file
    expected_frames: int
    rotation: int = 0
    black: float = 0.0
    has_clock: bool = False
    notes: list[str] = field(default_factory=list)

    def frames(self) -> Iterator[Frame]:
        """All readable pictures in the order of their numbers."""
        for number, file in self.pictures:
            picture = _read_picture(file)
            if picture is None or picture.shape[::-1] != self.size:
                note = f"{self.path.name}: {file.name} is not a readable picture of the size of the first, left out"
                if note not in self.notes:
                    self.notes.append(note)
                continue
            yield Frame(number, float("nan"), picture)


def read_ahead(frames: Iterator[Item]) -> Iterator[Item]:
    """The same frames, decoded and prepared in another thread while those before are worked on."""
    with ThreadPoolExecutor(1) as decoder:
        waiting = deque(decoder.submit(next, frames, None) for _ in range(AHEAD))
        while (frame := waiting.popleft().result()) is not None:
            waiting.append(decoder.submit(next, frames, None))
            yield frame


def _open_file(path: Path) -> VideoFile:
    with _capture(path) as capture:
        if not capture.isOpened():
            raise RecordingError(
                f"{path}: cannot be read as a video; accepted are the usual files (MP4, MOV, AVI, MKV, WebM)"
                " and folders of numbered PNG or TIFF pictures"
            )
        codec = _four_letters(capture.get(cv2.CAP_PROP_FOURCC))
        there, shown = capture.read()
        if not there:
            raise RecordingError(
                f'{path}: opens, but not one frame can be decoded (codec "{codec}"); convert it to H.264 in an MP4 file'
            )
        luma = _four_letters(capture.get(cv2.CAP_PROP_CODEC_PIXEL_FORMAT)) in LUMA_8_BIT
        rotation = round(capture.get(cv2.CAP_PROP_ORIENTATION_META)) % 360
        expected = max(0, int(capture.get(cv2.CAP_PROP_FRAME_COUNT)))
    black = 0.0
    if luma:
        # opened anew: switched off in the middle, the conversion leaves other grey levels behind
        with _capture(path, undecoded_luma=True) as capture:
            there, plain = capture.read()
        luma = there and plain.shape[:2] == shown.shape[:2]
        black = _black_level(_grey(shown), _grey(plain)) if luma else 0.0
    notes = [f"{path.name}: turned by {rotation}° as its container asks"] if rotation else []
    return VideoFile(
        path=path,
        size=(shown.shape[1], shown.shape[0]),
        rotation=rotation,
        expected_frames=expected,
        black=black,
        undecoded_luma=luma,
        notes=notes,
    )


@contextmanager
def _capture(path: Path, *, undecoded_luma: bool = False) -> Iterator[cv2.VideoCapture]:
    """A capture that is closed afterwards, with the library's own messages off."""
    log: Any = getattr(cv2.utils, "logging", cv2)  # OpenCV 4 has the two functions one level up
    before = log.getLogLevel()
    log.setLogLevel(SILENT)
    capture = cv2.VideoCapture(str(path), cv2.CAP_FFMPEG)
    try:
        # set after opening: as open parameters they make opening fail
        capture.set(cv2.CAP_PROP_ORIENTATION_AUTO, 0)
        if undecoded_luma:
            capture.set(cv2.CAP_PROP_CONVERT_RGB, 0)
        yield capture
    finally:
        capture.release()
        log.setLogLevel(before)


@contextmanager
def single_threaded() -> Iterator[None]:
    """OpenCV's own operations on one thread: on small pictures its others only get in the way of the decoder."""
    before = cv2.getNumThreads()
    cv2.setNumThreads(1)
    try:
        yield
    finally:
        cv2.setNumThreads(before)


def _four_letters(code: float) -> str:
    number = int(code)
    return number.to_bytes(4, "little").decode("latin-1").strip("\0 ") if number > 0 else "unknown"


def _grey(picture: Picture) -> Picture:
    if picture.ndim == 2:
        return picture
    if picture.shape[2] == 1:
        return picture[:, :, 0]
    return cv2.cvtColor(picture, cv2.COLOR_BGR2GRAY if picture.shape[2] == 3 else cv2.COLOR_BGRA2GRAY)


def _black_level(shown: Picture, luma: Picture) -> float:
    """16 where the luma is of limited range, which shows as a steeper and lower picture after conversion."""
    step = max(1, int(np.sqrt(luma.size / 20_000)))
    plain = luma[::step, ::step].astype(np.float64).ravel()
    converted = shown[::step, ::step].astype(np.float64).ravel()
    limited = (plain - LIMITED_RANGE_BLACK) * 255 / 219
    is_limited = np.median(np.abs(np.clip(limited, 0, 255) - converted)) < np.median(np.abs(plain - converted))
    return LIMITED_RANGE_BLACK if is_limited else 0.0


def _open_folder(path: Path) -> PictureFolder:
    numbered = sorted(
        (int(numbers[-1]), file)
        for file in path.iterdir()
        if file.suffix.lower() in PICTURE_SUFFIXES and (numbers := re.findall(r"\d+", file.stem))
    )
    if not numbered:
        raise RecordingError(f"{path}: holds no numbered pictures; accepted are PNG and TIFF named such as 0001.png")
    _no_number_twice(path, numbered)
    first = _read_picture(numbered[0][1])
    if first is None:
        raise RecordingError(f"{numbered[0][1]}: cannot be read as a picture (PNG or TIFF)")
    start = numbered[0][0]
    return PictureFolder(
        path=path,
        size=(first.shape[1], first.shape[0]),
        pictures=tuple((number - start, file) for number, file in numbered),
        expected_frames=len(numbered),
    )


def _no_number_twice(path: Path, numbered: list[tuple[int, Path]]) -> None:
    for (number, file), (following, other) in itertools.pairwise(numbered):
        if number == following:
            raise RecordingError(
                f"{path}: {file.name} and {other.name} have the same number; the pictures of one recording are"
                " told apart by the last number in their names"
            )


def _read_picture(file: Path) -> Picture | None:
    """Grey picture with the range of 8 bits, at the depth that the file has; None where it cannot be read."""
    content = np.fromfile(file, dtype=np.uint8)
    if content.size == 0:
        return None
    picture = cv2.imdecode(content, cv2.IMREAD_GRAYSCALE | cv2.IMREAD_ANYDEPTH)
    if picture is None:
        return None
    if picture.dtype == np.uint16:
        return (picture / np.float32(257)).astype(np.float32)
    return picture if picture.dtype == np.uint8 else picture.astype(np.float32)
