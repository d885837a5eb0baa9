"""The README says what the program does today."""

from __future__ import annotations

import re

from tests.readme_table import BLOCK, README, command_table


def test_command_table_is_up_to_date() -> None:
    found = BLOCK.search(README.read_text(encoding="utf-8"))
    assert found is not None, "the README has lost the markers of its command table"
    assert found.group() == command_table(), "run: python -m tests.readme_table"


def test_exactly_two_commands_to_paste() -> None:
    """One sets up and does the main job, one sets up and passes the tests; `.ci/run` runs them word for word."""
    blocks = re.findall(r"^```sh\n(.*?)^```$", README.read_text(encoding="utf-8"), re.DOTALL | re.MULTILINE)
    assert len(blocks) == 2
    assert "settlelab run sample_tables/study.toml" in blocks[0]
    assert "pytest" in blocks[1]


def test_pictures_of_the_readme_exist() -> None:
    text = README.read_text(encoding="utf-8")
    pictures = re.findall(r"!\[[^\]]*\]\(([^)]+)\)", text)
    assert len(pictures) >= 2
    for picture in pictures:
        assert (README.parent / picture).is_file(), picture
