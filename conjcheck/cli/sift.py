"""``conjcheck sift``: all variants of one rule compared together, until only the true ones are left."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from conjcheck.cli.common import (
    FAILED,
    Stop,
    complete_conjecture,
    complete_space,
    conjecture_named,
    echo_json,
    progress,
    spaces_named,
)
from conjcheck.errors import ConjcheckError
from conjcheck.wording import aligned

if TYPE_CHECKING:
    from collections.abc import Iterator

    from conjcheck.testing.sift import DeadVariant, Sifted

__all__ = ["command"]


@click.command("sift", short_help="Eliminate the variants of a rule.")
@click.argument("target", metavar="FILE[::NAME]", shell_complete=complete_conjecture)
@click.argument("spaces", nargs=-1, metavar="[SPACE]...", shell_complete=complete_space)
@click.option(
    "--up-to", type=click.IntRange(2), metavar="N", help="Also the spaces of its family of rank below N: in type A, inside C^N."
)
@click.option(
    "--seconds",
    type=click.FloatRange(min=0, min_open=True),
    default=30.0,
    show_default=True,
    metavar="S",
    help="Budget, for all variants together.",
)
@click.option(
    "--call-limit",
    type=click.FloatRange(min=0, min_open=True),
    default=5.0,
    show_default=True,
    metavar="SEC",
    help="Seconds one call of a variant may take.",
)
@click.option(
    "--seed", type=click.IntRange(min=0), default=0, show_default=True, metavar="K", help="Chooses the rows beyond the walk."
)
@click.option("--json", "as_json", is_flag=True, help="Print one JSON document instead of the table.")
@click.pass_context
def command(
    context: click.Context,
    target: str,
    spaces: tuple[str, ...],
    up_to: int | None,
    seconds: float,
    call_limit: float,
    seed: int,
    as_json: bool,
) -> None:
    """Compare all variants of a rule with the oracle, and tell which of them are still alive.

    A rule leaves choices open with variants={"argument": (values, ...)}: weak or strict, rows or columns, one more or one less. Every
    combination is compared, row by row, smallest first; where one fails it is dead, and that case is its smallest counterexample. Without
    SPACE and --up-to the walk goes through the family of the rule until three quarters of the budget are spent.

    Survivors agree with the oracle on the scope named, so they agree with each other there. The rest of the budget looks beyond, on rows
    drawn at random from the next spaces, for a row where they differ. Survivors that never differ may be one and the same function.

    \b
    Examples:
      conjcheck sift conjectures/pieri_inequalities.py --up-to 5
      conjcheck sift conjectures/pieri_inequalities.py "Gr(2,4)" --json

    Exit status: 0 at least one variant survives; 1 none does; 2 wrong usage, or nothing was compared; 130 interrupted.
    """  # noqa: D301  # click knows the character, not the two letters
    conjecture = conjecture_named(target)
    chosen = spaces_named(spaces)
    from conjcheck.testing import sift as room

    try:
        if up_to is not None:
            chosen += conjecture.on.up_to(up_to)
        with progress("sift") as show:
            found = room.sift(
                conjecture,
                spaces=chosen if spaces or up_to is not None else None,
                budget=seconds,
                call_limit=call_limit,
                seed=seed,
                watching=show and (lambda place, share: show(share, place)),
            )
    except KeyboardInterrupt:
        click.echo("interrupted", err=True)
        context.exit(130)
    except ConjcheckError as error:
        raise Stop(str(error)) from error
    if found.survivors and not found.coverage.cases:
        raise Stop(
            f"expected rows inside the premise, got none in {seconds:g} s: no variant was compared; raise --seconds or name spaces"
        )
    if as_json:
        echo_json(found.as_json())
    else:
        for line in _report(found):
            click.echo(line, color=context.color)
    context.exit(0 if found.survivors else FAILED)


def _report(found: Sifted) -> Iterator[str]:
    """The table of the dead, then the survivors with what they were compared on."""
    if found.dead:
        lines: list[tuple[str, ...]] = [("variant", "status", "smaller cases", "fails at", "rule", "oracle")]
        lines += [_line(one) for one in found.dead]
        yield from ("  ".join(cells).rstrip() for cells in aligned(lines, right={2}))
        yield ""
        alike = len(found.alike)
        yield f"dead         {len(found.dead):,} of {found.conjecture.number_of_variants:,} variants, in {alike:,} {_s('way', alike)}"
    for k, group in enumerate(found.survivors):
        for number, one in enumerate(group):
            label = click.style("alive", fg="green", bold=True) if not number else "     "
            yield f"{label}        {one.choice_in_words or one.name}"
        if k + 1 < len(found.survivors):
            yield ""
    if not found.survivors:
        yield click.style("alive", fg="red", bold=True) + "        none"
    yield f"compared     {found.scope}"
    survivors = sum(map(len, found.survivors))
    if survivors > 1 or found.beyond.rows:
        yield f"beyond       {found.beyond.in_words()}"
    if len(found.survivors) > 1:
        yield f"survivors    fall into {len(found.survivors)} classes: they differ first, of the rows drawn, at {found.beyond.splits[0]}"
    elif survivors > 1:
        yield f"survivors    the {survivors:,} never differ on what was looked at: they may be one function"
    yield f"seconds      {found.seconds:.1f}"


def _line(one: DeadVariant) -> tuple[str, ...]:
    """One dead variant in cells."""
    finding = one.finding
    values = (str(finding.rule), str(finding.oracle)) if finding.status == "refuted" else ("", "")
    where = str(finding.where) + ("" if one.minimal else " (not known to be minimal)")
    return (one.conjecture.choice_in_words or one.conjecture.name, finding.status, f"{one.below:,}", where, *values)


def _s(word: str, count: int) -> str:
    return word if count == 1 else f"{word}s"
