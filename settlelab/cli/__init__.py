"""The command line: parse, convert, call one library function, print. Nothing is computed here."""

from __future__ import annotations

from importlib import import_module

import click

from settlelab.errors import SettlelabError

# command -> module of settlelab.cli that holds a click command named `command`
COMMANDS = {
    "new": "new",
    "check": "check",
    "plan": "plan",
    "track": "track",
    "run": "run",
    "calibrate": "calibrate",
    "predict": "predict",
    "methods": "methods",
    "simulate": "simulate",
}


class LazyGroup(click.Group):
    """Imports a command's module when the command is used, and turns our errors into one message and exit code 1."""

    def list_commands(self, ctx: click.Context) -> list[str]:  # noqa: ARG002 (signature of click)
        """Command names in the order of the work."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:  # noqa: ARG002
        """The command of that name, imported now."""
        if cmd_name not in COMMANDS:
            return None
        command = import_module(f"settlelab.cli.{COMMANDS[cmd_name]}").command
        assert isinstance(command, click.Command)
        return command

    def invoke(self, ctx: click.Context) -> object:
        """Run the command; a SettlelabError ends it with its sentence and exit code 1."""
        try:
            return super().invoke(ctx)
        except SettlelabError as error:
            raise click.ClickException(str(error)) from error


@click.group(cls=LazyGroup, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(package_name="settlelab")
def main() -> None:
    """Settling tests from recording to signed report."""
