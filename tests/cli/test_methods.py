"""`settlelab methods` through the command line."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from settlelab.cli import main
from settlelab.physics import catalogue
from settlelab.physics.catalogue import BOARDS
from settlelab.physics.drag import DRAG
from settlelab.physics.registry import Entry

EVERY: dict[str, Entry] = {name: entry for board in BOARDS.values() for name, entry in board.items()}


def run(*arguments: str) -> Result:
    return CliRunner().invoke(main, ["methods", *arguments])


def test_lists_every_method_with_its_range() -> None:
    result = run()
    assert result.exit_code == 0
    lines = result.output.splitlines()
    for name in EVERY:
        assert sum(line.split()[:1] == [name] for line in lines) == 1
    ganser = next(line for line in lines if line.split()[:1] == ["ganser-1993"])
    assert "sphericity" in ganser
    assert "up to 2.5e4" in ganser
    assert ganser.endswith("Ganser (1993)")
    assert all(line == line.rstrip() for line in lines)
    assert max(map(len, lines)) <= 130
    assert any(line.endswith("Tran-Cong et al. (2004)") for line in lines)


def test_every_law_is_on_one_board() -> None:
    assert len(EVERY) == sum(len(board) for board in BOARDS.values())
    assert set(DRAG) <= set(EVERY)


@pytest.mark.parametrize("name", EVERY)
def test_shows_one_in_full(name: str) -> None:
    result = run(name)
    assert result.exit_code == 0
    told = " ".join(result.output.split())
    entry = EVERY[name]
    for text in (entry.name, entry.purpose, entry.source, entry.where, entry.note, entry.code):
        assert " ".join(text.split()) in told
    told, _, code = result.output.partition("  evidence")
    assert ("unconfirmed" in code) != entry.confirmed
    assert max(map(len, told.splitlines())) <= 110
    assert '"""' not in code


def test_unknown_name_offers_the_nearest() -> None:
    result = run("ganzer-1993")
    assert result.exit_code == 1
    assert 'Error: "ganzer-1993" is not a published method on board (did you mean "ganser-1993"?)' in result.output


def test_usable_for_a_particle_table(tmp_path: Path) -> None:
    table = tmp_path / "particles.csv"
    table.write_text(
        "particle,mass [mg],long axis [mm],intermediate axis [mm],short axis [mm]\nA-1,12.4,6,4,3\nA-2,11.9,6,5,3\n"
    )
    result = run("--for", str(table))
    assert result.exit_code == 0
    usable, _, left_out = result.output.partition("left out")
    assert "particles.csv: 2 rows" in usable
    assert "ganser-1993" in usable
    grains, _, spheres = usable.partition("made for spheres")
    assert "stokes-1851" in spheres
    assert "ganser-1993" in grains
    assert left_out.splitlines()[-1].split("  ")[1:] != []
    bagheri = next(line for line in left_out.splitlines() if "bagheri" in line)
    assert bagheri.split("  ")[1:] != []
    assert "needs density ratio " in bagheri
    assert bagheri.endswith("density ratio; or density")
    tran_cong = next(line for line in left_out.splitlines() if "tran-cong" in line)
    assert tran_cong.endswith("  projected area, projected circularity")
    roundness = next(line for line in left_out.splitlines() if "dietrich" in line)
    assert roundness.endswith("  Powers roundness")
    assert "ganser-1993 " not in left_out


def test_usable_for_a_bare_table(tmp_path: Path) -> None:
    table = tmp_path / "drops.csv"
    table.write_text("particle,sphericity\nA-1,\n")  # a column without values gives nothing
    result = run("--for", str(table))
    assert "descriptors known: none" in result.output
    assert re.search("ganser-1993 +needs sphericity", result.output)
    assert "sphericity; or long axis, intermediate axis, short axis" in result.output


def test_missing_table_and_too_much(tmp_path: Path) -> None:
    assert run("--for", str(tmp_path / "none.csv")).exit_code == 2
    table = tmp_path / "particles.csv"
    table.write_text("particle,mass [mg]\nA-1,12\n")
    result = run("ganser-1993", "--for", str(table))
    assert result.exit_code == 2
    assert "give only one of a method, --for and --page" in result.output
    assert run("--plot", str(tmp_path / "law.png")).exit_code == 2


@pytest.mark.parametrize("name", ["tran-cong-2004", "jimenez-madsen-2003", "clift-grace-weber-1978"])
def test_picture_of_a_law(name: str, tmp_path: Path) -> None:
    path = tmp_path / "law.png"
    result = run(name, "--plot", str(path))
    assert result.exit_code == 0
    assert f"wrote {path}" in result.output
    assert path.read_bytes()[:4] == b"\x89PNG"


def test_picture_of_what_is_no_drag_law(tmp_path: Path) -> None:
    result = run("faxen-1922", "--plot", str(tmp_path / "wall.png"))
    assert result.exit_code == 1
    assert "only drag laws are drawn, and faxen-1922 is none" in result.output
    assert not (tmp_path / "wall.png").exists()


def test_reference_page_is_current(tmp_path: Path) -> None:
    """`settlelab methods --page settlelab/physics/METHODS.md` brings it up to date."""
    path = tmp_path / "page.md"
    assert run("--page", str(path)).exit_code == 0
    written = path.read_text(encoding="utf-8")
    assert Path(catalogue.__file__).with_name("METHODS.md").read_text(encoding="utf-8") == written
    assert all(f"### {name}\n" in written for name in EVERY)
