"""`settlelab methods` through the command line."""

from __future__ import annotations

from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from settlelab.cli import main
from settlelab.physics.drag import DRAG
from settlelab.physics.liquids import LIQUIDS
from settlelab.physics.walls import WALLS


def run(*arguments: str) -> Result:
    return CliRunner().invoke(main, ["methods", *arguments])


def test_lists_every_method_with_its_range() -> None:
    result = run()
    assert result.exit_code == 0
    lines = result.output.splitlines()
    for name in (*DRAG, *WALLS, *LIQUIDS):
        assert sum(line.split()[:1] == [name] for line in lines) == 1
    ganser = next(line for line in lines if line.split()[:1] == ["ganser-1993"])
    assert "grains" in ganser
    assert "sphericity" in ganser
    assert "up to 2.5e4" in ganser
    assert ganser.endswith("Ganser (1993)")
    assert all(line == line.rstrip() for line in lines)
    assert max(map(len, lines)) <= 120


@pytest.mark.parametrize("name", [*DRAG, *WALLS, *LIQUIDS])
def test_shows_one_in_full(name: str) -> None:
    result = run(name)
    assert result.exit_code == 0
    told = " ".join(result.output.split())
    entry = {**DRAG, **WALLS, **LIQUIDS}[name]
    for text in (entry.name, entry.purpose, entry.source, entry.where, entry.note):
        assert " ".join(text.split()) in told
    assert max(map(len, result.output.splitlines())) <= 110


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
    assert "stokes-1851" in usable
    assert left_out.splitlines()[-1].split("  ")[1:] != []
    assert "bagheri-bonadonna-2016  needs density ratio  density ratio; or density" in left_out
    assert "ganser-1993" not in left_out


def test_usable_for_a_bare_table(tmp_path: Path) -> None:
    table = tmp_path / "drops.csv"
    table.write_text("particle,sphericity\nA-1,\n")  # a column without values gives nothing
    result = run("--for", str(table))
    assert "descriptors known: none" in result.output
    assert "ganser-1993             needs sphericity" in result.output
    assert "sphericity; or long axis, intermediate axis, short axis" in result.output


def test_missing_table_and_too_much(tmp_path: Path) -> None:
    assert run("--for", str(tmp_path / "none.csv")).exit_code == 2
    table = tmp_path / "particles.csv"
    table.write_text("particle,mass [mg]\nA-1,12\n")
    result = run("ganser-1993", "--for", str(table))
    assert result.exit_code == 2
    assert "give either a method or --for" in result.output
