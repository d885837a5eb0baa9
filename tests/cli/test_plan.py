"""`settlelab plan` through the command line, on a study that has no videos yet."""

from __future__ import annotations

from pathlib import Path

from click.testing import CliRunner

from settlelab.cli import main
from tests.study.folder import write_study


def run(*arguments: object) -> tuple[int, str]:
    result = CliRunner().invoke(main, [str(argument) for argument in arguments])
    assert result.exception is None or isinstance(result.exception, SystemExit)
    return result.exit_code, result.output


def study(folder: Path, *changes: tuple[str, str]) -> Path:
    write_study(folder, *changes)
    for video in folder.glob("*.mp4"):
        video.unlink()
    return folder


def test_a_page_on_screen(tmp_path: Path) -> None:
    code, output = run("plan", study(tmp_path))
    assert code == 0, output
    for words in ("V ± U, mm/s", "A-01", "walls", "run-up", "blur", "frames", "drops", "Wait", "Assumed", "Cautions"):
        assert words in output, words
    assert max(map(len, output.splitlines())) <= 110


def test_out_writes_markdown_and_html(tmp_path: Path) -> None:
    code, output = run("plan", study(tmp_path), "--out", tmp_path / "plan")
    assert code == 0
    markdown = (tmp_path / "plan" / "plan.md").read_text(encoding="utf-8")
    page = (tmp_path / "plan" / "plan.html").read_text(encoding="utf-8")
    for text in (markdown, page):
        assert "A-01" in text
        assert "not a design for hole cleaning" in text
    assert markdown.count("\n| A-01 |") >= 1
    assert f"wrote {tmp_path / 'plan' / 'plan.md'}" in output


def test_nothing_is_written_without_out(tmp_path: Path) -> None:
    folder = study(tmp_path)
    before = sorted(path.name for path in folder.iterdir())
    run("plan", folder)
    assert sorted(path.name for path in folder.iterdir()) == before


def test_faults_of_the_study_are_told_all_the_same(tmp_path: Path) -> None:
    code, output = run("plan", study(tmp_path, ("gravity =", "gravty =")))
    assert code == 1
    assert 'did you mean "gravity"?' in output


def test_check_still_asks_for_the_videos(tmp_path: Path) -> None:
    code, output = run("check", study(tmp_path))
    assert code == 1
    assert "a1.mp4" in output
