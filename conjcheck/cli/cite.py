"""``conjcheck cite``: words for a paper, from a record."""

from __future__ import annotations

from pathlib import Path

import click

from conjcheck.cli.common import Stop
from conjcheck.errors import RecordError

__all__ = ["command"]


@click.command("cite", short_help="A record in sentences for a paper.")
@click.argument("record", required=False, type=click.Path(exists=True, dir_okay=False, path_type=Path), metavar="[RECORD]")
@click.option("--text", "form", flag_value="text", default="text", help="Sentences in plain text (the default).")
@click.option("--latex", "form", flag_value="latex", help="The same sentences in LaTeX; they need amsmath.")
@click.option("--bibtex", "form", flag_value="bibtex", help="The software as a BibTeX entry; needs no RECORD.")
def command(record: Path | None, form: str) -> None:
    """Say what a RECORD holds in sentences that can stand in a paper.

    They name exactly what was compared: whole families only where every member is covered, else each space; how many products, cases and
    nonzero constants; what rows drawn at random allow to say, with their seed; the counterexample, if there is one; the version that
    computed it, and the beginning of the hash of the rule. Records are written by pytest --conjcheck-record and lie in the folder records
    beside the conjectures.

    \b
    Examples:
      conjcheck cite conjectures/records/lantern_rule.json
      conjcheck cite conjectures/records/lantern_rule.json --latex
      conjcheck cite --bibtex

    Exit status: 0; 2 wrong usage, or a file that is no record.
    """  # noqa: D301  # click knows the character, not the two letters
    from conjcheck.evidence.record import read_record_file
    from conjcheck.report.cite import LATEX, PLAIN, bibtex, citation

    if form == "bibtex":
        click.echo(bibtex(), nl=False)
        return
    if record is None:
        raise click.UsageError(
            "expected a RECORD such as conjectures/records/lantern_rule.json, got none; only --bibtex needs none"
        )
    try:
        found = read_record_file(record)
    except RecordError as error:
        raise Stop(str(error)) from error
    click.echo(citation(found, LATEX if form == "latex" else PLAIN))
