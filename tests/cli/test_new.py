"""`settlelab new` through the command line, and what `check` says about the fresh folder."""

from __future__ import annotations

from pathlib import Path

import pytest
from click.testing import CliRunner

from settlelab.cli import main
from settlelab.errors import InputFaults
from settlelab.study import read_study
from tests.study.folder import PARTICLES, VISCOMETER


def run(*arguments: str) -> tuple[int, str]:
    """Exit code and everything that was printed."""
    result = CliRunner().invoke(main, arguments)
    assert result.exception is None or isinstance(result.exception, SystemExit)
    return result.exit_code, result.output


def test_writes_what_it_says(tmp_path: Path) -> None:
    code, output = run("new", str(tmp_path / "lots" / "upper"))
    assert code == 0
    written = [Path(line.removeprefix("wrote ")) for line in output.splitlines() if line.startswith("wrote ")]
    assert [path.name for path in written] == ["study.toml", "particles.csv", "viscometer.csv", "README.md"]
    assert all(path.is_file() for path in written)


def test_check_says_precisely_what_is_still_to_be_filled_in(tmp_path: Path) -> None:
    run("new", str(tmp_path))
    code, output = run("check", str(tmp_path))
    assert code == 1
    assert output.removeprefix("Error: ").splitlines() == [
        'study.toml, fluid 1, liquid: missing, expected "water", "glycerol-water" or "measured"',
        'study.toml, fluid 1, temperature: missing, expected a temperature such as "21.4 ± 0.2 °C"',
        'study.toml, column, inner_diameter: missing, expected a length such as "12.4 ± 0.1 mm"',
        'study.toml, camera, frame_rate: missing, expected a frequency such as "120 Hz"',
        'study.toml, camera, mm_per_px: missing, expected a scale such as "0.2113 ± 0.0003 mm/px"',
        'study.toml, recording 1, video: missing, expected a recording such as "a1.mp4"',
        "study.toml, recording 1, particles: missing, expected the names of the particles in order of release, such as "
        '["A-01", "A-02"]',
        "particles.csv, row 2: missing, expected a row below the headings",
    ]


def test_nothing_is_overwritten(tmp_path: Path) -> None:
    (tmp_path / "particles.csv").write_text("mine", encoding="utf-8")
    code, output = run("new", str(tmp_path))
    assert code == 1
    assert output == f"Error: {tmp_path} holds particles.csv already; nothing is overwritten: name a new folder\n"
    assert [path.name for path in tmp_path.iterdir()] == ["particles.csv"]
    assert (tmp_path / "particles.csv").read_text(encoding="utf-8") == "mine"


def test_a_place_that_cannot_be_written_to(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    code, output = run("new", str(tmp_path / "file" / "study"))
    assert code == 1
    assert "cannot be written to" in output


def test_filled_in_and_with_every_commented_key_it_is_a_study(tmp_path: Path) -> None:
    """Each key that the template explains is a real one, with an example that is accepted."""
    run("new", str(tmp_path))
    (tmp_path / "particles.csv").write_text(PARTICLES, encoding="utf-8")
    (tmp_path / "viscometer.csv").write_text(VISCOMETER, encoding="utf-8")
    for name in ("a1.mp4", "board.png"):
        (tmp_path / name).write_bytes(b"")
    file = tmp_path / "study.toml"
    lines = file.read_text(encoding="utf-8").splitlines()
    filled = {
        "liquid": '"measured"',
        "temperature": '"21.4 ± 0.2 °C"',
        "inner_diameter": '"190.0 ± 0.5 mm"',
        "frame_rate": '"120 Hz"',
        "mm_per_px": '"0.2113 ± 0.0003 mm/px"',
        "height": '"1200 mm"',
        "video": '"a1.mp4"',
        "particles": '["A-01", "S-1"]',
    }
    # alternatives of what is given already
    others = (
        "mass_fraction",
        "viscosity",
        "width",
        "depth",
        "marks",
        "marks_apart",
        "graduation",
        "checkerboard",
        "square",
    )
    text = "\n".join(_filled(line, filled, others) for line in lines)
    file.write_text(text, encoding="utf-8")
    study = read_study(tmp_path)
    assert study.recordings[0].column.wall_index == pytest.approx(1.49)
    assert study.recordings[0].camera.metre_per_px is not None
    assert study.particle("S-1").control


def _filled(line: str, filled: dict[str, str], others: tuple[str, ...]) -> str:
    """A line of the template with its comment sign taken away and its value filled in."""
    bare = line.removeprefix("# ")
    key, equals, _ = bare.partition(" = ")
    is_key = bool(equals) and key.replace("_", "").replace(".", "").isalnum() and " " not in key
    if key in others or not (is_key or bare.startswith("[")):
        return line if line.startswith("#") else ""
    return f"{key} = {filled[key]}" if key in filled else bare


def test_the_template_names_no_key_that_does_not_exist(tmp_path: Path) -> None:
    run("new", str(tmp_path))
    with pytest.raises(InputFaults) as refused:
        read_study(tmp_path)
    assert "is not a key" not in str(refused.value)
