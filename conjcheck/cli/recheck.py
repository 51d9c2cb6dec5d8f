"""``conjcheck recheck``: certificates judged by the stand-alone checker."""

from __future__ import annotations

import click

from conjcheck.cli.common import USAGE, complete_conjecture, complete_file, echo_json

__all__ = ["command"]


@click.command("recheck", short_help="Check certificates.")
@click.argument("certificates", nargs=-1, required=True, metavar="CERTIFICATE...", shell_complete=complete_file)
@click.option(
    "--rule",
    metavar="FILE::NAME",
    shell_complete=complete_conjecture,
    help="Also ask this rule again at the case, in a process of its own.",
)
@click.option("--json", "as_json", is_flag=True, help="Print one JSON document instead of lines.")
@click.pass_context
def command(context: click.Context, certificates: tuple[str, ...], rule: str | None, *, as_json: bool) -> None:
    """Check certificates of structure constants.

    A CERTIFICATE is a JSON file that proves one value of the oracle, step by step, from the quantum Chevalley formula. The checker is
    one file that needs nothing but Python: a referee may copy conjcheck/recheck.py and run "python3 recheck.py CERTIFICATE".

    With --rule the rule is asked again at the case of each certificate: does it still give the value that is noted there?

    \b
    Examples:
      conjcheck recheck conjectures/records/*.certificate.json
      conjcheck recheck proof.json --rule conjectures/my_rule.py::my_rule

    Exit status: 0 all accepted; 1 one is rejected, or the rule gives another value; 2 wrong usage, no such file, no such rule.
    """  # noqa: D301  # click knows the character, not the two letters
    from conjcheck import recheck

    worst, found = 0, []
    for certificate in certificates:
        lines = []
        for status, line in recheck.judge([certificate], rule):
            lines.append(line.split(": ", 1))
            worst = max(worst, status)
            if not as_json:
                click.echo(line, err=status == USAGE)
        (verdict, words), *asked = lines
        found.append(
            {
                "certificate": certificate,
                "verdict": verdict,
                "words": words,
                "rule": asked[0][1] if asked else None,
                "status": status,
            }
        )
    if as_json:
        echo_json(found)
    context.exit(worst)
