"""``conjcheck unite``: one record from several, for people, and for git."""

from __future__ import annotations

from functools import reduce
from pathlib import Path

import click

from conjcheck.cli.common import FAILED, Stop
from conjcheck.errors import RecordError

__all__ = ["command"]

_FILE = click.Path(exists=True, dir_okay=False, path_type=Path)


@click.command("unite", short_help="Add up two records of one conjecture.")
@click.argument("records", nargs=-1, required=True, type=_FILE, metavar="OURS THEIRS...")
@click.option(
    "-o",
    "--output",
    type=click.Path(dir_okay=False, path_type=Path),
    metavar="OUT",
    help="Write the record there instead of printing it; OUT may be one of the records, and else must not exist.",
)
@click.pass_context
def command(context: click.Context, records: tuple[Path, ...], output: Path | None) -> None:
    """Unite records of one conjecture, so that surveys made by several people add up.

    Of each space the entry that went further is kept, samples with different seeds stand side by side, no counterexample is lost. Records
    of different versions of the rule, and records that contradict each other, are not united: the message names the entry. Certificates
    stay where they are: copy those that are missing.

    \b
    Examples:
      conjcheck unite mine/rule.json yours/rule.json -o rule.json
      conjcheck unite rule.json yours/rule.json -o rule.json

    \b
    To let git do it, once in each clone:
      git config merge.conjcheck-record.driver \\
          "conjcheck unite %A %B -o %A"
    and in the file .gitattributes of the repository:
      conjectures/records/*.json              merge=conjcheck-record
      conjectures/records/*.certificate.json  merge
    What is contradictory is left to you as a conflict.

    Exit status: 0; 1 the records contradict each other; 2 wrong usage, or a file that is no record.
    """  # noqa: D301  # click knows the character, not the two letters
    from conjcheck.evidence.record import merge, read_record_file, record_text, write_record_file

    if len(records) < 2:
        raise click.UsageError(f"expected two records or more, got {len(records)}")
    if output is not None and output.exists() and not any(output.samefile(path) for path in records):
        raise Stop(f"expected a new file or one of the records as OUT, got {output}, which exists; name it among the records")
    try:
        found = [read_record_file(path) for path in records]
    except RecordError as error:
        raise Stop(str(error)) from error
    try:
        united = reduce(merge, found)
    except RecordError as error:
        click.echo(f"Error: {error}", err=True)
        context.exit(FAILED)
    if output is None:
        click.echo(record_text(united), nl=False)
        return
    try:
        write_record_file(output, united)
    except (RecordError, OSError) as error:
        raise Stop(str(error)) from error
