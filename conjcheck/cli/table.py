"""``conjcheck table``: all structure constants of one space as an ancillary file."""

from __future__ import annotations

import os
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import click

from conjcheck.cli.common import Stop, complete_space, space_named
from conjcheck.errors import NotationError, OutOfReach

if TYPE_CHECKING:
    from collections.abc import Iterator

__all__ = ["command"]


@click.command("table", short_help="All structure constants of a space.")
@click.argument("space", shell_complete=complete_space)
@click.option(
    "--format",
    "form",
    type=click.Choice(["csv", "json", "latex"]),
    default="csv",
    show_default=True,
    help="json: one document per line. latex: one product per row, for small spaces; needs amsmath and longtable.",
)
@click.option(
    "--notation", default="", metavar="NAME", help="permutation, partition, string, signed, word or index, where the space has it."
)
@click.option(
    "--order",
    type=click.Choice(["cases", "blocks"]),
    default="cases",
    show_default=True,
    help="cases: smallest first, as everywhere in conjcheck. blocks: u as the engine has it, which is much quicker.",
)
@click.option("--half", is_flag=True, help="Only u <= v in the order of classes; the rest follows from commutativity.")
@click.option(
    "-o", "--output", type=click.Path(dir_okay=False, path_type=Path), metavar="FILE", help="Write there instead of printing."
)
def command(space: str, form: str, notation: str, order: str, output: Path | None, *, half: bool) -> None:
    """Write all nonzero structure constants of one SPACE, with a head that states every convention.

    The constants are those of quantum cohomology; all that are not in the file are 0. They are written as they are computed: a large table
    needs little memory. The last line says how many there are: a file without it is not complete. With --output the file appears only
    when it is.

    \b
    Examples:
      conjcheck table "Gr(2,4)"
      conjcheck table "Fl(5)" --order blocks --output fl5.csv
      conjcheck table "Fl(1,3;4)" --format json --notation string
      conjcheck table "LG(3,6)" --format latex --half

    Exit status: 0; 2 wrong usage, or a space out of reach.
    """  # noqa: D301  # click knows the character, not the two letters
    X = space_named(space)
    from conjcheck.report.table import TableOptions, table_lines

    try:
        lines = table_lines(X, TableOptions(form, notation, order, half))
        _write(lines, output)
    except NotationError as error:
        raise click.UsageError(str(error)) from error
    except OutOfReach as error:
        raise Stop(str(error)) from error


def _write(lines: Iterator[str], output: Path | None) -> None:
    """Print the lines, or put them into a file that appears when it is complete."""
    if output is None:
        sys.stdout.writelines(lines)
        return
    draft = output.with_name(f".{output.name}.{os.getpid()}")
    try:
        with draft.open("w", encoding="utf-8", newline="\n") as file:
            file.writelines(lines)
        draft.replace(output)
    except OSError as error:
        raise Stop(f"expected a file that can be written, got {error}") from error
    finally:
        draft.unlink(missing_ok=True)
