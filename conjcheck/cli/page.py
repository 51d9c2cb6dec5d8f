"""``conjcheck page``: a page to read and to pass on, from a record, from saved outcomes, or from a quick examination."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from conjcheck.cli.common import FAILED, Stop, complete_file, conjecture_named

if TYPE_CHECKING:
    from collections.abc import Iterator

__all__ = ["command"]

_EXPECTED = "expected a record such as conjectures/records/NAME.json, saved outcomes (JSON) or a plug-in (.py)"


@click.command("page", short_help="A page to read for a rule or a record.")
@click.argument("targets", nargs=-1, required=True, metavar="TARGET...", shell_complete=complete_file)
@click.option(
    "-o",
    "--output",
    "folder",
    type=click.Path(file_okay=False, path_type=Path),
    default=Path("pages"),
    show_default=True,
    metavar="DIR",
    help="Where the pages go.",
)
@click.option("--latex", is_flag=True, help="Print the counterexample in LaTeX (amsmath) instead of writing pages.")
@click.option(
    "--effort",
    type=click.Choice(["quick", "normal", "thorough"]),
    default="quick",
    show_default=True,
    help="How much work goes into a conjecture that is examined now.",
)
@click.option("--seed", type=click.IntRange(0), metavar="S", help="Makes the random parts of an examination reproducible.")
@click.pass_context
def command(context: click.Context, targets: tuple[str, ...], folder: Path, latex: bool, effort: str, seed: int | None) -> None:
    """Make a page for each TARGET: verdict, counterexample with both products, pictures, coverage; one HTML file that loads nothing.

    \b
    A TARGET is
      * a record: conjectures/records/my_rule.json;
      * outcomes saved as JSON: of conjcheck survey --json, or the property
        conjcheck of a junit file;
      * a plug-in, conjectures/my_rule.py or conjectures/my_rule.py::name:
        it is examined now.

    pytest --conjcheck-report DIR makes the same pages of a whole run.

    \b
    Examples:
      conjcheck page conjectures/records/lantern_rule.json -o pages
      conjcheck page conjectures/my_rule.py --effort normal
      conjcheck page conjectures/records/my_rule.json --latex > counterexample.tex

    Exit status: 0 all pages made; 1 made, but a file is no record and no outcome, and its page says so; 2 wrong usage, or a file that
    cannot be read.
    """  # noqa: D301  # click knows the character, not the two letters
    chosen = [target for target in targets if not target.endswith(".certificate.json")]
    if len(chosen) < len(targets):
        click.echo("certificates have no page of their own: left out", err=True)
    if not chosen:
        raise Stop(f"{_EXPECTED}, got certificates only; the record that names them has a page")
    documents = [document for target in chosen for document in _documents(target, effort, seed)]
    if latex:
        from conjcheck.report.latex import latex_snippet

        snippets = [latex_snippet(document) for document in documents]
        if not any(snippets):
            raise Stop("expected a counterexample to print, got none; leave out --latex to write pages")
        click.echo("\n".join(filter(None, snippets)), nl=False)
    else:
        from conjcheck.report.pages import write_pages

        try:
            for path in write_pages(folder, documents):
                click.echo(str(path))
        except OSError as error:
            raise Stop(f"expected a folder that can be written, got {folder}: {error}; choose another with -o") from error
    context.exit(FAILED if any(document["status"] == "unreadable" for document in documents) else 0)


def _documents(target: str, effort: str, seed: int | None) -> Iterator[dict[str, Any]]:
    """The documents of one target."""
    from conjcheck.report.document import is_outcome, unreadable
    from conjcheck.report.pages import document_of_record_file, documents_of, now

    if target.partition("::")[0].endswith(".py"):
        yield from documents_of(_examined(target, effort, seed), made=now())
        return
    path = Path(target)
    try:
        text = path.read_text(encoding="utf-8", errors="replace")
    except OSError as error:
        raise Stop(f"{_EXPECTED}, got {target}: {error}") from error
    try:
        data = json.loads(text)
    except (ValueError, RecursionError) as error:
        if path.suffix != ".json":
            raise Stop(f"{_EXPECTED}, got {target}, a file of another kind") from error
        yield unreadable(text, f"expected JSON, got {error}", file=target, made=now())
        return
    outcomes = data if isinstance(data, list) else [data]
    if outcomes and all(is_outcome(outcome) for outcome in outcomes):
        yield from documents_of(outcomes, made=now())
    else:
        yield document_of_record_file(data, file=target, made=now())


def _examined(target: str, effort: str, seed: int | None) -> list[dict[str, Any]]:
    """The outcomes of an examination in this process."""
    from conjcheck.errors import ConjcheckError
    from conjcheck.testing.examine import examine

    conjecture = conjecture_named(target)
    try:
        return [outcome.as_json() for outcome in examine(conjecture, effort=effort, seed=seed)]
    except ConjcheckError as error:
        raise Stop(str(error)) from error
