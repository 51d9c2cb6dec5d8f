"""``conjcheck board``: all conjectures of a repository in one table, as a page and in Markdown."""

from __future__ import annotations

import os
from pathlib import Path

import click

from conjcheck.cli.common import FAILED, Stop, echo_json

__all__ = ["command"]

_COLUMNS = ("name", "file", "status", "scope", "counterexample", "date", "stale", "source", "note")


@click.command("board", short_help="One table of all conjectures in a folder.")
@click.argument("folder", type=click.Path(exists=True, file_okay=False, path_type=Path), metavar="FOLDER")
@click.option(
    "-o", "--output", type=click.Path(dir_okay=False, path_type=Path), metavar="FILE", help="The page.  [default: board.html]"
)
@click.option(
    "--markdown",
    type=click.Path(dir_okay=False, allow_dash=True, path_type=Path),
    metavar="FILE",
    help="A table in Markdown; - prints it. No page is written then, unless -o asks for one.",
)
@click.option(
    "--json", "as_json", is_flag=True, help="Print the rows as one JSON document. No page is written then, unless -o asks for one."
)
@click.pass_context
def command(context: click.Context, folder: Path, output: Path | None, markdown: Path | None, *, as_json: bool) -> None:
    """Put all conjectures in FOLDER, with what is on record about them, on one page that can be sorted and searched.

    \b
    For each: status, what was compared, counterexample, date, and whether
    what is on record was computed for another version of the rule (stale).
    Plug-ins and records that cannot be used have a row that says why.

    What counts is the newest evidence about the rule as it stands, from its record or from the page of its last run (the row says which);
    what is refuted on record stays refuted. Pages (pytest --conjcheck-report DIR, conjcheck page -o DIR) are looked for in the folder of
    the page given with -o, else in the folder pages, and names link to them. The plug-ins are imported; no rule is called.

    \b
    Examples:
      pytest conjectures --conjcheck-report pages
      conjcheck board conjectures -o pages/board.html
      conjcheck board conjectures --markdown -
      conjcheck board conjectures --json

    Exit status: 0 all conjectures are on the board; 1 they are, but a plug-in or a record cannot be used; 2 wrong usage.
    """  # noqa: D301  # click knows the character, not the two letters
    from conjcheck.report.board import board_of_folder, board_page, board_table

    printed = as_json or str(markdown) == "-"
    if as_json and str(markdown) == "-":
        raise click.UsageError("expected --json or --markdown -, got both: one of them can be printed")
    page = output or (None if markdown or as_json else Path("board.html"))
    beside = output.parent if output else Path("pages")
    rows = board_of_folder(folder, beside=beside)
    if page:
        _write(page, board_page(rows, folder.resolve().name, base=_way(beside, page.parent)))
        click.echo(str(page), err=printed)
    if markdown:
        dash = str(markdown) == "-"
        text = board_table(rows, base=_way(beside, Path() if dash else markdown.parent))
        if dash:
            click.echo(text, nl=False)
        else:
            _write(markdown, text)
            click.echo(str(markdown), err=printed)
    if as_json:
        echo_json([{key: row[key] for key in _COLUMNS} for row in rows])
    context.exit(FAILED if any(row["status"] in ("broken", "unreadable") for row in rows) else 0)


def _way(to: Path, start: Path) -> str:
    """The way from one folder to another, in a link."""
    way = os.path.relpath(to, start)
    return "" if way == "." else f"{Path(way).as_posix()}/"


def _write(path: Path, text: str) -> None:
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8", newline="\n")
    except OSError as error:
        raise Stop(f"expected a file that can be written, got {path}: {error}") from error
