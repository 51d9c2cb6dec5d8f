"""The command ``conjcheck``: what is not a test run. Light to import: each command is imported when it is called."""

import os
from importlib import import_module

import click

from conjcheck import __version__

__all__ = ["COMMANDS", "main"]

COMMANDS = ("audit",)
"""The commands; each is the function ``command`` of the room of its name."""


class _Commands(click.Group):
    """A group whose commands live in rooms of their own."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in COMMANDS:
            return None
        found = import_module(f"conjcheck.cli.{cmd_name}").command
        assert isinstance(found, click.Command), "every room offers one command"
        return found


@click.group(cls=_Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="conjcheck")
@click.pass_context
def main(context: click.Context) -> None:
    """Tools around the oracle for quantum Schubert calculus.

    Conjectures are examined by pytest (pytest conjectures/my_rule.py); this command holds what is not a test run.
    """
    if os.environ.get("NO_COLOR"):
        context.color = False
