"""What goes wrong at the bench is told in one sentence: where, what was found, what would be accepted."""

from __future__ import annotations

import re
import shutil
from collections.abc import Callable
from pathlib import Path

import cv2
import numpy as np
import pytest

from settlelab.simulate import random_study
from tests.end_to_end.truth import drop_table, settlelab

Edit = Callable[[Path], None]


@pytest.fixture(scope="module")
def sound(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A study without faults: two recordings of two drops."""
    folder = tmp_path_factory.mktemp("sound")
    random_study(folder, 21, recordings=2, drops=2)
    return folder


@pytest.fixture
def study(sound: Path, tmp_path: Path) -> Path:
    """A copy to spoil."""
    return shutil.copytree(sound, tmp_path / "study")


def replaced(name: str, old: str, new: str) -> Edit:
    def edit(folder: Path) -> None:
        text = (folder / name).read_text(encoding="utf-8")
        assert old in text
        (folder / name).write_text(text.replace(old, new, 1), encoding="utf-8")

    return edit


def first_video(folder: Path) -> Path:
    return sorted(folder.glob("take_1.*"))[0]


def first_mass_negative(folder: Path) -> None:
    table = folder / "particles.csv"
    heading, first, *rest = table.read_text(encoding="utf-8").splitlines()
    at = heading.split(",").index("mass [mg]")
    cells = first.split(",")
    cells[at] = "-" + cells[at]
    table.write_text("\n".join([heading, ",".join(cells), *rest]) + "\n", encoding="utf-8")


@pytest.mark.parametrize(
    ("edit", "sentence"),
    [
        (lambda folder: first_video(folder).unlink(), "take_1"),
        (replaced("particles.csv", "mass [mg]", "mas [mg]"), 'did you mean "mass'),
        (first_mass_negative, 'particles.csv, row 2, column "mass [mg]"'),
        (replaced("particles.csv", "mass [mg]", "mass [stone]"), "stone"),
        (replaced("study.toml", 'particles = ["', 'particles = ["Nobody", "'), "Nobody"),
    ],
    ids=["missing video", "wrong heading", "negative mass", "unknown unit", "unknown particle"],
)
def test_a_fault_of_the_study_is_one_sentence_and_exit_1(study: Path, edit: Edit, sentence: str) -> None:
    edit(study)
    for command in (["check", study], ["run", study]):
        result = settlelab(*command)
        assert result.exit_code == 1, result.output
        assert sentence in result.output
        assert "Traceback" not in result.output
    assert not (study / "results" / "drops.csv").exists()


def test_all_faults_are_told_in_one_go(study: Path) -> None:
    first_video(study).unlink()
    first_mass_negative(study)
    replaced("study.toml", 'particles = ["', 'particles = ["Nobody", "')(study)
    result = settlelab("run", study)
    assert result.exit_code == 1
    for sentence in ("take_1", 'column "mass [mg]"', "Nobody"):
        assert sentence in result.output


def test_an_unreadable_video_is_named_and_the_others_are_kept(study: Path) -> None:
    first_video(study).write_bytes(b"this is a shopping list, not a video\n" * 50)
    result = settlelab("run", study, "--workers", 1)
    assert result.exit_code == 1
    assert "take_1" in result.output
    assert "Traceback" not in result.output
    assert len(list((study / "results" / "tracked").glob("take_2*.npz"))) == 1


def test_a_video_that_yields_no_frame_is_named_with_what_to_do(tmp_path: Path) -> None:
    video = tmp_path / "phone.mp4"
    writer = cv2.VideoWriter(str(video), cv2.VideoWriter_fourcc(*"mp4v"), 30.0, (96, 128))
    for _ in range(10):
        writer.write(np.full((128, 96, 3), 180, np.uint8))
    writer.release()
    header, pictures, index = video.read_bytes().replace(b"moov", b"\0moov", 1).partition(b"\0moov")
    start = header.index(b"mdat") + 4
    video.write_bytes(header[:start] + bytes(len(header) - start) + pictures[1:] + index)
    result = settlelab("track", video, "--mm-per-px", "0.2", "--out", tmp_path / "results")
    assert result.exit_code == 1, result.output
    assert video.name in result.output
    assert "H.264" in result.output
    assert "Traceback" not in result.output


def test_a_study_that_was_corrected_is_tracked_anew_and_leaves_nothing_behind(study: Path) -> None:
    assert settlelab("run", study, "--workers", 1).exit_code == 0
    before = set((study / "results" / "tracked").iterdir())
    text = (study / "study.toml").read_text(encoding="utf-8")
    doubled = re.sub(r'frame_rate = "([0-9.]+)', lambda found: f'frame_rate = "{2 * float(found.group(1)):g}', text)
    (study / "study.toml").write_text(doubled, encoding="utf-8")
    slow = drop_table(study / "results")["velocity"]
    assert settlelab("run", study, "--workers", 1).exit_code == 0
    after = set((study / "results" / "tracked").iterdir())
    assert len(after) == len(before) == 2
    assert not after & before
    assert drop_table(study / "results")["velocity"].to_numpy() == pytest.approx(2 * slow.to_numpy(), rel=0.02)


@pytest.mark.parametrize(
    ("edit", "counts"),
    [
        (lambda names: names[:1], ("2", "1")),
        (lambda names: [*names, names[0]], ("2", "3")),
    ],
    ids=["more falls than names", "fewer falls than names"],
)
def test_falls_that_do_not_match_the_names_are_a_doubt_and_no_particle_is_guessed(
    study: Path, edit: Callable[[list[str]], list[str]], counts: tuple[str, str]
) -> None:
    file = study / "study.toml"
    lines = file.read_text(encoding="utf-8").splitlines()
    at = next(number for number, line in enumerate(lines) if line.startswith("particles = ["))
    names = [name.strip(' "') for name in lines[at].split("[")[1].rstrip("]").split(",")]
    lines[at] = f"particles = [{', '.join(f'{name!r}' for name in edit(names))}]"
    file.write_text("\n".join(lines) + "\n", encoding="utf-8")
    result = settlelab("run", study, "--workers", 1)
    assert result.exit_code == 0, result.output
    told = next(line for line in result.output.splitlines() if line.startswith("note:") and "take_1" in line)
    assert all(count in told for count in counts), told
    drops = drop_table(study / "results")
    doubtful = drops[drops["recording"].str.startswith("take_1")]
    assert len(doubtful) == 2
    assert (doubtful["particle"] == "").all()
    assert not doubtful["accepted"].any()
    assert doubtful["velocity"].notna().all()
    assert (drops.loc[~drops["recording"].str.startswith("take_1"), "particle"] != "").all()


def test_an_empty_recording_says_that_nothing_fell(tmp_path: Path) -> None:
    rng = np.random.default_rng(5)
    for number in range(12):
        picture = rng.normal(180, 1, (120, 90)).astype(np.uint8)
        cv2.imencode(".png", picture)[1].tofile(tmp_path / f"frame_{number:03}.png")
    result = settlelab("track", tmp_path, "--mm-per-px", "0.2", "--frame-rate", "50", "--out", tmp_path / "results")
    assert result.exit_code == 0, result.output
    assert "nothing fell" in result.output.lower()
