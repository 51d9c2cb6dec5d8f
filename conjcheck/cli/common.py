"""What the commands share: exit statuses, spaces and conjectures named on the command line, a bar, JSON."""

from __future__ import annotations

import json
import sys
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click
from click.shell_completion import CompletionItem

from conjcheck.errors import ConjcheckError, DeclarationError, NotationError, OutOfReach

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator

    from conjcheck.conjecture.declare import Conjecture
    from conjcheck.geometry.flag_variety import FlagVariety

__all__ = [
    "FAILED",
    "USAGE",
    "Stop",
    "complete_conjecture",
    "complete_file",
    "complete_space",
    "conjecture_named",
    "echo_json",
    "progress",
    "space_named",
    "spaces_named",
]

FAILED = 1
"""Exit status: everything ran, and something is not as hoped: refuted, a difference, a certificate that is rejected."""

USAGE = 2
"""Exit status: wrong usage, a file that cannot be used, a space out of reach: nothing was found out."""


class Stop(click.ClickException):
    """Ends a command with status 2 and a message that says what was expected, what came, and what to do."""

    exit_code = USAGE


def space_named(name: str) -> FlagVariety:
    """The flag variety of a name on the command line."""
    from conjcheck.geometry.flag_variety import FlagVariety

    try:
        return FlagVariety(name)
    except NotationError as error:
        raise click.UsageError(str(error)) from error
    except OutOfReach as error:
        raise Stop(str(error)) from error


def spaces_named(names: Iterable[str]) -> list[FlagVariety]:
    """The flag varieties of several names, each once, in the order given."""
    return list(dict.fromkeys(space_named(name) for name in names))


def conjecture_named(target: str) -> Conjecture:
    """The conjecture at ``FILE``, or ``FILE::NAME`` where a file holds several."""
    from conjcheck.conjecture.discover import conjectures_in_file

    file, _, name = target.partition("::")
    try:
        found = conjectures_in_file(Path(file))
    except (DeclarationError, ConjcheckError) as error:
        raise Stop(str(error)) from error
    if name:
        named = [conjecture for conjecture in found if conjecture.name == name]
        if not named:
            raise Stop(f"expected one of {', '.join(c.name for c in found)} in {file}, got {name!r}")
        return named[0]
    if len(found) != 1:
        raise Stop(
            f"expected one conjecture in {file}, got {len(found)}: {', '.join(c.name for c in found)}; "
            f"choose one: {file}::{found[0].name}"
        )
    return found[0]


@contextmanager
def progress(label: str) -> Iterator[Callable[[float, str], None] | None]:
    """A bar on a terminal, on standard error, to be told the share done and where it is; elsewhere ``None``."""
    if not sys.stderr.isatty():
        yield None
        return
    with click.progressbar(length=1000, label=label, file=sys.stderr, item_show_func=lambda item: item) as bar:

        def show(share: float, words: str) -> None:
            bar.update(max(int(1000 * share) - bar.pos, 0), words)

        yield show
        bar.update(1000 - bar.pos, "")


def echo_json(document: Any) -> None:
    """One JSON document on standard output."""
    click.echo(json.dumps(document, indent=2, ensure_ascii=False))


_MOST_COMPLETED = 6


def complete_space(_context: click.Context, _parameter: click.Parameter, incomplete: str) -> list[str]:
    """Names of spaces that begin like this, for the completion of a shell: A4/P2 needs no quotes, Gr(2,5) does in some shells."""
    from conjcheck.geometry.families import HomogeneousSpaces

    spaces = list(HomogeneousSpaces(most_classes=1_000).up_to(_MOST_COMPLETED))
    plain = [f"{X.kind}/{'B' if len(X.marked) == X.rank else 'P' + ','.join(map(str, X.marked))}" for X in spaces]
    return [name for name in dict.fromkeys([*plain, *(X.name for X in spaces)]) if name.startswith(incomplete)]


def complete_conjecture(_context: click.Context, _parameter: click.Parameter, incomplete: str) -> list[str]:
    """Plug-in files, and folders on the way to them, for the completion of a shell; after ``FILE::`` the names in the file."""
    file, colons, name = incomplete.partition("::")
    if colons:
        from conjcheck.conjecture.discover import conjectures_in_file

        try:
            return [f"{file}::{c.name}" for c in conjectures_in_file(Path(file)) if c.name.startswith(name)]
        except ConjcheckError:
            return []
    folder = Path(file) if file.endswith("/") else Path(file).parent
    head = file[: file.rfind("/") + 1]
    found = [
        path
        for path in sorted(folder.glob("*"))
        if not path.name.startswith((".", "_")) and (path.is_dir() or path.suffix == ".py")
    ]
    names = [f"{head}{path.name}{'/' if path.is_dir() else ''}" for path in found]
    return [name for name in names if name.startswith(file)]


def complete_file(_context: click.Context, _parameter: click.Parameter, incomplete: str) -> list[CompletionItem]:
    """Any file, for the completion of a shell: the shell looks itself."""
    return [CompletionItem(incomplete, type="file")]
