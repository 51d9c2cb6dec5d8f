"""``conjcheck survey``: one conjecture compared with the oracle on whole spaces, in many processes, for as long as it takes."""

from __future__ import annotations

import os
from contextlib import ExitStack, contextmanager
from pathlib import Path
from time import monotonic
from typing import TYPE_CHECKING, Any

import click

from conjcheck.cli.common import (
    FAILED,
    USAGE,
    Stop,
    complete_conjecture,
    complete_space,
    conjecture_named,
    echo_json,
    progress,
    spaces_named,
)
from conjcheck.errors import ConjcheckError, RecordError
from conjcheck.wording import aligned

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from concurrent.futures import Executor

    from conjcheck.conjecture.declare import Conjecture
    from conjcheck.geometry.flag_variety import FlagVariety
    from conjcheck.testing.campaign import Campaign, Progress
    from conjcheck.testing.outcome import Outcome

__all__ = ["command"]


@click.command("survey", short_help="Compare on whole spaces, for as long as it takes.")
@click.argument("target", metavar="FILE[::NAME]", shell_complete=complete_conjecture)
@click.argument("spaces", nargs=-1, metavar="[SPACE]...", shell_complete=complete_space)
@click.option(
    "--up-to", type=click.IntRange(2), metavar="N", help="Also the spaces of its family of rank below N: in type A, inside C^N."
)
@click.option(
    "--most-classes", type=click.IntRange(2), metavar="M", help="With --up-to: only spaces with at most M Schubert classes."
)
@click.option("--jobs", type=click.IntRange(1), metavar="J", help="Processes on this machine.  [default: its processors]")
@click.option(
    "--cluster", metavar="ADDRESS", help="Work on the cluster of a scheduler of the library distributed, tcp://host:port."
)
@click.option("--keep-going", is_flag=True, help="Collect all failures instead of stopping at the smallest.")
@click.option("--sample", type=click.IntRange(1), metavar="K", help="Compare K rows drawn at random in each space instead of all.")
@click.option("--seed", type=click.IntRange(0), default=0, show_default=True, metavar="S", help="Seed of the sample.")
@click.option(
    "--ledger",
    type=click.Path(dir_okay=False, path_type=Path),
    help="Where finished work is kept.  [default: .ledger.sqlite beside FILE]",
)
@click.option("--no-ledger", is_flag=True, help="Keep nothing, resume nothing.")
@click.option("--no-record", is_flag=True, help="Leave the record beside FILE alone.")
@click.option(
    "--call-limit",
    type=click.FloatRange(0, min_open=True),
    default=10.0,
    show_default=True,
    metavar="SEC",
    help="Seconds one call of the rule may take.",
)
@click.option(
    "--memory",
    type=click.FloatRange(0.1),
    default=2.0,
    show_default=True,
    metavar="GIB",
    help="Memory a process may take beyond its start.",
)
@click.option("--cross-check", is_flag=True, help="Compute every product of the oracle in two ways.")
@click.option("--report", type=click.Path(file_okay=False, path_type=Path), metavar="DIR", help="Also write a page to DIR.")
@click.option("--json", "as_json", is_flag=True, help="Print one JSON document instead of the report.")
@click.pass_context
def command(
    context: click.Context,
    target: str,
    spaces: tuple[str, ...],
    up_to: int | None,
    most_classes: int | None,
    jobs: int | None,
    cluster: str | None,
    keep_going: bool,
    sample: int | None,
    seed: int,
    ledger: Path | None,
    no_ledger: bool,
    no_record: bool,
    call_limit: float,
    memory: float,
    cross_check: bool,
    report: Path | None,
    as_json: bool,
) -> None:
    """Compare a conjecture with the oracle on every row of the spaces named, zeros included, smallest first.

    \b
    The work is cut into chunks. Each finished chunk is kept in a ledger:
    after a crash, Ctrl-C or kill, the same command goes on where it was.
    Chunks of another version of the rule, or of conjcheck, never count.
    The rule runs in processes of its own: one that hangs, exits or eats
    memory is reported with its case, like any other failure.

    It stops at the smallest failure; --keep-going collects all of them. What was compared goes into records/NAME.json beside the file, a
    text made to be committed and cited. Beyond what can be compared completely, --sample K compares K rows of each space drawn uniformly,
    and states the share of failing rows that is excluded at 95 %.

    \b
    Examples:
      conjcheck survey conjectures/rim_hooks.py "Gr(2,4)" "Gr(2,5)"
      conjcheck survey conjectures/rim_hooks.py --up-to 5 --jobs 2
      conjcheck survey conjectures/rim_hooks.py "Gr(4,8)" --sample 200

    Exit status: 0 agrees; 1 refuted, crashed, too slow ...; 2 wrong usage, not finished, or agrees and could not be recorded;
    130 interrupted.
    """  # noqa: D301  # click knows the character, not the two letters
    conjecture = conjecture_named(target)
    chosen = _spaces(conjecture, spaces, up_to, most_classes)
    from conjcheck.report.text import text_report
    from conjcheck.testing import campaign as room
    from conjcheck.testing.verdict import campaign_outcome, write_campaign

    terms = room.Terms(keep_going, sample, seed, call_limit, int(memory * 2**30), cross_check)
    kept = None if no_ledger else ledger or Path(conjecture.file).parent / ".ledger.sqlite"
    try:
        with ExitStack() as stack:
            executor = stack.enter_context(_cluster(cluster)) if cluster else None
            show = stack.enter_context(progress("survey"))
            done = room.run_campaign(
                conjecture,
                chosen,
                terms=terms,
                jobs=jobs or (4 * _threads(executor) if executor else os.cpu_count() or 1),
                executor=executor,
                ledger=kept,
                watching=_rate(show) if show else lambda _: None,
            )
        outcome = campaign_outcome(done)
        record, problem = None, ""
        if not no_record:
            try:
                record, note = write_campaign(done, outcome)
                outcome = outcome.noted(note)
            except RecordError as error:  # the verdict is not lost for that
                problem = str(error)
    except KeyboardInterrupt:
        click.echo("interrupted" + (f"; finished chunks are in {kept}, the same command goes on" if kept else ""), err=True)
        context.exit(130)
    except ConjcheckError as error:
        raise Stop(str(error)) from error
    if report:
        from conjcheck.report.pages import documents_of, write_pages

        write_pages(report, documents_of([outcome.as_json()]))
    if as_json:
        echo_json(_document(done, outcome, record))
    else:
        click.echo(text_report(outcome))
        for line in _table(done):
            click.echo(line)
        if record:
            click.echo(f"recorded in {record}")
    if problem:
        click.echo(f"Error: {problem}", err=True)
    status = (USAGE if problem else 0) if outcome.status == "agrees" else USAGE if outcome.finding is None else FAILED
    context.exit(status)


def _spaces(conjecture: Conjecture, names: tuple[str, ...], up_to: int | None, most_classes: int | None) -> list[FlagVariety]:
    """The spaces asked for."""
    if not names and up_to is None:
        raise click.UsageError("expected spaces such as 'Gr(2,5)', or --up-to N, got neither; see conjcheck survey --help")
    if most_classes is not None and up_to is None:
        raise click.UsageError("expected --up-to N together with --most-classes, got --most-classes alone")
    chosen = spaces_named(names)
    if up_to is not None:
        chosen += [X for X in conjecture.on.up_to(up_to) if most_classes is None or X.number_of_classes <= most_classes]
    return chosen


@contextmanager
def _cluster(address: str) -> Iterator[Executor]:
    """The executor of a cluster."""
    try:
        from distributed import Client
    except ImportError:
        raise Stop(
            "expected the library distributed for --cluster, got none; install it: pip install 'conjcheck[cluster]'"
        ) from None
    try:
        client = Client(address, timeout="10s", set_as_default=False)  # type: ignore[no-untyped-call]
    except (OSError, TimeoutError, ValueError) as error:
        raise Stop(f"expected a scheduler at {address}, got {type(error).__name__}: {error}; start one, or use --jobs") from None
    with client:
        yield client.get_executor(pure=False, retries=3)  # type: ignore[no-untyped-call]


def _threads(executor: Any) -> int:
    """How many chunks a cluster works on at a time."""
    return max(int(sum(executor._client.nthreads().values())), 1)  # noqa: SLF001


def _rate(show: Callable[[float, str], None]) -> Callable[[Progress], None]:
    """What a survey tells, for the bar: the space, and rows in a second."""
    started = monotonic()

    def watching(done: Progress) -> None:
        new = done.done - done.resumed
        rate = f"{new / max(monotonic() - started, 1e-3):,.0f} rows/s" if new else "resuming"
        show(done.done / done.of, f"{done.space}, {rate}")

    return watching


def _table(done: Campaign) -> Iterator[str]:
    """One line per space."""
    seen = "rows" if done.terms.draws is None else "drawn"
    lines: list[tuple[str, ...]] = [("space", seen, "of", "inside", "cases", "nonzero", "failing", "seconds", "engine")]
    for space in done.spaces:
        r = space.result
        numbers = [r.seen, space.X.number_of_classes**2, r.rows, r.cases, r.nonzero, r.failing]
        lines.append((str(space.X), *(f"{number:,}" for number in numbers), f"{r.seconds:.1f}", space.engine))
    yield ""
    yield from ("  ".join(cells) for cells in aligned(lines, right=range(1, 8)))
    if done.resumed:
        yield f"{done.resumed:,} of the rows were taken from the ledger"


def _document(done: Campaign, outcome: Outcome, record: Path | None) -> dict[str, Any]:
    """The same as one JSON document."""
    return {
        **outcome.as_json(),
        "rule_hash": done.rule,
        "surveyed": [{"space": str(s.X), "of": s.of, "engine": s.engine, **s.result.as_json()} for s in done.spaces],
        "resumed": done.resumed,
        "stale": list(done.stale),
        "record": str(record) if record else None,
    }
