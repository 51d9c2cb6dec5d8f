"""``conjcheck audit``: the oracle held against itself on spaces that the user names."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

from conjcheck import __version__
from conjcheck.cli.common import Stop, complete_space, echo_json, progress, spaces_named
from conjcheck.wording import aligned

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from conjcheck.geometry.flag_variety import FlagVariety
    from conjcheck.oracle.audit import Result
    from conjcheck.oracle.check import Difference

__all__ = ["command"]

_MOST_CLASSES = 100
_COLOURS = {"agree": "green", "differ": "red", "not run": "yellow"}
_REMEDY = (
    "One of the two is wrong: trust no verdict of this version on this space until it is understood, and please report this "
    "output. To look closer: conjcheck.product(u, v, engine=...), for each engine."
)


@click.command("audit", short_help="Hold the oracle against itself.")
@click.argument("spaces", nargs=-1, metavar="[SPACE]...", shell_complete=complete_space)
@click.option("--rank", type=click.IntRange(1, 8), metavar="N", help="Also all G/P of types A to G of rank at most N (1 to 8).")
@click.option(
    "--most-classes",
    type=click.IntRange(min=2),
    metavar="M",
    help=f"With --rank: only spaces with at most M Schubert classes.  [default: {_MOST_CLASSES}]",
)
@click.option(
    "--seconds",
    type=click.FloatRange(min=0, min_open=True),
    default=10.0,
    show_default=True,
    metavar="S",
    help="Budget for each space.",
)
@click.option(
    "--seed", type=click.IntRange(min=0), default=0, show_default=True, metavar="K", help="Chooses what is compared at random."
)
@click.option("--json", "as_json", is_flag=True, help="Print one JSON document instead of the table.")
@click.pass_context
def command(
    context: click.Context,
    spaces: tuple[str, ...],
    rank: int | None,
    most_classes: int | None,
    seconds: float,
    seed: int,
    as_json: bool,
) -> None:
    """Hold the oracle against itself on spaces you name.

    A verdict on a conjecture is worth as much as the oracle behind it. On each SPACE, written "Gr(2,5)", "Fl(4)", "Fl(1,3;4)", "LG(3,6)",
    "G2/B" or "E6/P1", this compares

    \b
      * the engines that cover it with each other, or where there is
        only one, with the same engine on another route;
      * products with the laws: unit, commutativity, associativity,
        degree axiom, S3, Poincare, diagram and Seidel symmetry,
        classical limit, powers of q;
      * products with closed formulas and with published values;
      * on some spaces, the spectrum of c_1 with the critical values
        of the mirror potential (needs sympy).

    Rows (u, v) are compared in order, smallest first; what the budget does not reach is drawn at random. The table says how many of
    how many, and how many from the smallest on without a gap. Every check goes on after a difference; the smallest case is named with
    both values. The budget may be overrun a little: the set-up of an engine and a product that has begun are finished.

    \b
    Examples:
      conjcheck audit "Gr(2,5)" "Fl(4)" "E6/P1"
      conjcheck audit --rank 2
      conjcheck audit --rank 4 --most-classes 30 --seconds 5
      conjcheck audit "Fl(6)" --seconds 120 --seed 7 --json

    Exit status: 0 nothing differs; 1 a difference; 2 wrong usage, or a space out of reach; 130 interrupted.
    """  # noqa: D301  # click knows the character, not the two letters
    chosen = _spaces(spaces, rank, most_classes)
    from conjcheck.oracle import audit as room

    results: list[Result] = []
    interrupted = False
    try:
        with progress("audit") as show:
            for k, X in enumerate(chosen):
                watching = show and _watching(show, X, k, len(chosen))
                results += room.audit(X, seconds=seconds, seed=seed, watching=watching)
    except KeyboardInterrupt:
        interrupted = True
    differ = any(result.smallest for result in results)
    if as_json:
        echo_json(_document(results, seconds, seed, interrupted=interrupted))
    else:
        for line in _report(results, seconds, seed, interrupted=interrupted):
            click.echo(line, color=context.color)
    context.exit(1 if differ else 130 if interrupted else 0)


def _spaces(names: tuple[str, ...], rank: int | None, most_classes: int | None) -> list[FlagVariety]:
    """The spaces asked for, each once, all of them in reach."""
    if not names and rank is None:
        raise click.UsageError("expected a space such as 'Gr(2,5)', or --rank N, got neither; see conjcheck audit --help")
    if most_classes is not None and rank is None:
        raise click.UsageError(
            f"expected --rank together with --most-classes, got --most-classes {most_classes} alone; add --rank N"
        )
    from conjcheck.geometry.families import HomogeneousSpaces
    from conjcheck.geometry.flag_variety import MOST_CLASSES
    from conjcheck.oracle import ENGINES, engines_for

    chosen = dict.fromkeys(spaces_named(names))
    named = set(chosen)
    if rank is not None:
        most = min(most_classes or _MOST_CLASSES, MOST_CLASSES)
        chosen |= dict.fromkeys(HomogeneousSpaces(most_classes=most).up_to(rank + 1))
    for X in chosen:
        if not engines_for(X):
            reasons = "; ".join(f"{engine.name}: {engine.refuses(X)}" for engine in ENGINES.values())
            remedy = "leave it out" if X in named else "lower --most-classes"
            raise Stop(f"expected spaces in reach of some engine, got {X} ({reasons}); {remedy}")
    return list(chosen)


def _watching(show: Callable[[float, str], None], X: FlagVariety, k: int, of: int) -> Callable[[str, float], None]:
    """What the audit of space k tells, for the bar of all."""
    return lambda name, share: show((k + share) / of, f"{X}: {name}")


def _counted(result: Result) -> str:
    """How much was compared: ``347 of 2,304 rows (first 342)``."""
    text = f"{result.compared:,} of {result.of:,} {result.unit if result.of != 1 else result.unit.removesuffix('s')}"
    return text if result.compared == result.of else f"{text} (first {result.in_order:,})"


def _verdict(result: Result) -> str:
    """The result in one cell."""
    if result.smallest:
        return f"differ: {result.differing:,}"
    return result.verdict if result.compared else f"not run: {result.why}"


def _report(results: list[Result], seconds: float, seed: int, *, interrupted: bool) -> Iterator[str]:
    """The table, what was left out, the differences, and one line at the end."""
    table = [("space", "check", "compared", "result", "seconds")]
    table += [(str(r.X), r.name, _counted(r), _verdict(r), f"{r.seconds:.1f}") for r in results]
    for cells, result in zip(aligned(table, right={4}), [None, *results], strict=True):
        if result:
            cells[3] = click.style(cells[3], fg=_COLOURS[result.verdict], bold=result.verdict == "differ")
        yield "  ".join(cells)
    yield ""
    for result in results:
        if result.compared and result.why:
            yield f"{result.X}, {result.name}: {result.why}"
    differing = [result for result in results if result.smallest]
    for result in differing:
        yield f"{result.X}, {result.name}: {result.differing:,} of {result.compared:,} {result.unit} differ"
        yield from _shown(result)
    counts = {verdict: sum(result.verdict == verdict for result in results) for verdict in _COLOURS}
    ending = f"seed {seed}, {seconds:g} s for each space"
    if smallest := min((r for r in differing if r.smallest), key=_smallness, default=None):
        yield click.style(f"smallest difference: {smallest.name}", fg="red", bold=True)
        yield from _shown(smallest)
        yield f"  {_REMEDY}"
    spaces = len({result.X for result in results})
    words = [f"{counts['agree']:,} agree", *(f"{counts[v]:,} {v}" for v in ("differ", "not run") if counts[v])]
    yield f"{len(results):,} checks on {spaces:,} {'space' if spaces == 1 else 'spaces'}: {', '.join(words)}; {ending}"
    if interrupted:
        yield "interrupted: the spaces that are missing above were not compared"


def _smallness(result: Result) -> tuple[Any, ...]:
    assert result.smallest
    return result.smallest.sort_key


def _shown(result: Result) -> Iterator[str]:
    """A difference: where, and both values."""
    assert result.smallest
    yield f"  at {result.smallest.where}"
    for how, value in (result.smallest.one, result.smallest.other):
        yield f"    {value}  by {how}"


def _document(results: list[Result], seconds: float, seed: int, *, interrupted: bool) -> dict[str, Any]:
    """The same as one JSON document."""
    spaces: dict[str, list[dict[str, Any]]] = {}
    for result in results:
        spaces.setdefault(str(result.X), []).append(
            {
                "check": result.name,
                "unit": result.unit,
                "of": result.of,
                "compared": result.compared,
                "first": result.in_order,
                "differing": result.differing,
                "result": result.verdict,
                "why": result.why,
                "seconds": round(result.seconds, 3),
                "difference": _as_json(result.smallest) if result.smallest else None,
            }
        )
    smallest = min((r for r in results if r.smallest), key=_smallness, default=None)
    return {
        "conjcheck": __version__,
        "seed": seed,
        "seconds": seconds,
        "result": "differ" if smallest else "interrupted" if interrupted else "agree",
        "spaces": [{"space": name, "checks": checks} for name, checks in spaces.items()],
        "smallest": {"space": str(smallest.X), "check": smallest.name, **_as_json(smallest.smallest)} if smallest else None,
    }


def _as_json(difference: Difference | None) -> dict[str, Any]:
    assert difference
    case = str(difference.where) if not isinstance(difference.where, str) else None
    return {
        "case": case,
        "where": str(difference.where),
        "values": [{"how": how, "value": value} for how, value in (difference.one, difference.other)],
    }
