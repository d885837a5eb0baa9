"""The README's command table, written from the commands' own help.

`python -m tests.readme_table` brings it up to date.
"""

from __future__ import annotations

import re
from pathlib import Path

import click

from settlelab.cli import main

README = Path(__file__).parents[1] / "README.md"
BLOCK = re.compile(r"(?<=<!-- commands: see tests/readme_table.py -->\n).*?(?=<!-- end of commands -->)", re.DOTALL)


def command_table() -> str:
    """One row per command: how it is called and what it does."""
    context = click.Context(main, info_name="settlelab")
    rows = ["| command | does |", "|---|---|"]
    for name in main.list_commands(context):
        command = main.get_command(context, name)
        assert command is not None
        arguments = " ".join(_placeholder(each) for each in command.params if isinstance(each, click.Argument))
        rows.append(f"| `{name} {arguments}`".rstrip("` ") + f"` | {command.get_short_help_str(limit=200)} |")
    return "\n".join(rows) + "\n"


def _placeholder(argument: click.Argument) -> str:
    name = argument.metavar or str(argument.name).upper()
    return name if argument.required else f"[{name}]"


def with_table(readme: str) -> str:
    """The README with its command table as the commands stand now."""
    return BLOCK.sub(lambda _: command_table(), readme)


if __name__ == "__main__":
    README.write_text(with_table(README.read_text(encoding="utf-8")), encoding="utf-8")
