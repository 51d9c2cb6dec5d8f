"""The command ``conjcheck``: what is not a test run. Light to import: each command is imported when it is called."""

import os
import traceback
from difflib import get_close_matches
from importlib import import_module
from typing import Any

import click

from conjcheck import __version__
from conjcheck.errors import ConjcheckError

__all__ = ["COMMANDS", "main"]

COMMANDS = ("audit", "board", "cite", "page", "recheck", "sift", "start", "survey", "table", "unite")
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

    def resolve_command(self, ctx: click.Context, args: list[str]) -> tuple[str | None, click.Command | None, list[str]]:
        """A command that there is not is answered by the one that was meant, if one is close."""
        word = args[0]
        if word not in COMMANDS and not word.startswith("-") and not ctx.resilient_parsing:
            close = get_close_matches(word.lower(), COMMANDS, n=1)
            ctx.fail(f"expected one of {', '.join(COMMANDS)}, got {word!r}" + (f"; did you mean {close[0]}?" if close else ""))
        return super().resolve_command(ctx, args)

    def invoke(self, ctx: click.Context) -> Any:
        """In every command Ctrl-C is status 130, and an error that nobody foresaw 2: 1 is kept for what was found out."""
        try:
            return super().invoke(ctx)
        except KeyboardInterrupt:
            click.echo("interrupted", err=True)
            raise click.exceptions.Exit(130) from None
        except (click.ClickException, click.exceptions.Exit, click.Abort, BrokenPipeError):
            raise
        except ConjcheckError as error:
            click.echo(f"Error: {error}", err=True)
        except Exception:  # shown as it is; Python's own status for it would be 1
            traceback.print_exc()
        raise click.exceptions.Exit(2)


@click.group(cls=_Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="conjcheck")
@click.pass_context
def main(context: click.Context) -> None:
    """Tools around the oracle for quantum Schubert calculus.

    Conjectures are examined by pytest (pytest conjectures/my_rule.py); this command holds what is not a test run.

    \b
    Examples:
      conjcheck start my_rule --on Grassmannians
      conjcheck survey --help

    \b
    Exit status:
      0    all is as hoped: it agrees, it is written, something survives
      1    everything ran, and something is not: refuted, different, rejected
      2    nothing was found out: wrong usage, a file that cannot be used,
           a space out of reach, a survey that could not be finished
      130  interrupted

    \b
    With --json, where a command has it, standard output is one JSON document.
    Colours and progress bars are for terminals; NO_COLOR=1 turns colours off.
    Completion of commands, spaces and plug-in files, in bash:
      eval "$(_CONJCHECK_COMPLETE=bash_source conjcheck)"
    and with zsh_source or fish_source in these shells.
    """  # noqa: D301  # click knows the character, not the two letters
    if os.environ.get("NO_COLOR"):
        context.color = False
