"""Ask one rule at one case again, in a fresh process: ``python -m conjcheck.evidence.rerun FILE::NAME CASE``.

A process of its own, because a rule is somebody's code: it must not run where a certificate is judged. The last line of the output is
one JSON object: ``name``, ``hash`` of the rule's file, ``status``, and ``rule``, the value (``null`` for a claim).
"""

import json
import subprocess
import sys
from pathlib import Path
from typing import Any

from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.errors import ConjcheckError, NotationError
from conjcheck.evidence.source import rule_hash
from conjcheck.geometry.case import Case
from conjcheck.testing.compare import Comparer

__all__ = ["ask_afresh", "ask_again"]


def ask_again(target: str, text: str) -> dict[str, Any]:
    """What the rule at ``FILE::NAME`` says at a case now.

    Raises:
        NotationError: the file holds no such conjecture, or more than one if no name was given; or the case is outside its family
            or its premise.
        ConjcheckError: the file cannot be loaded, or the case does not parse.
    """
    file, _, name = target.partition("::")
    found = [c for c in conjectures_in_file(Path(file)) if name in ("", c.name)]
    if len(found) != 1:
        raise NotationError(f"expected one conjecture at {target!r}, got {len(found)}; write FILE::NAME")
    (conjecture,) = found
    case = Case.parse(text)
    comparer = Comparer(conjecture)
    with comparer.limit:
        if case.X not in conjecture.on or not comparer.inside(case.row) or not comparer.admits(case):
            raise NotationError(f"expected a case inside the family and the premise of {conjecture.name}, got {case}")
        finding = comparer.case(case)
        status = finding.status if finding else "agrees"
        value = finding.rule if finding else comparer.truth(case.row).get((case.w, case.d), 0)
    value = None if conjecture.role == "claim" else value
    return {
        "name": conjecture.name,
        "hash": rule_hash(conjecture.file),
        "status": status,
        "rule": value if value is None or isinstance(value, int) else str(value),
    }


def ask_afresh(target: str, case: Case, *, seconds: float = 60.0) -> dict[str, Any] | None:
    """What the rule at ``FILE::NAME`` says at a case when that is the first thing it is asked; ``None`` if it cannot be asked so."""
    command = [sys.executable, "-m", "conjcheck.evidence.rerun", target, str(case)]
    try:
        done = subprocess.run(command, capture_output=True, text=True, timeout=seconds, check=False)  # noqa: S603  # ourselves
        answer = json.loads(done.stdout.splitlines()[-1]) if not done.returncode else None
    except (OSError, ValueError, LookupError, subprocess.TimeoutExpired):
        return None
    return answer if isinstance(answer, dict) and {"status", "rule"} <= set(answer) else None


if __name__ == "__main__":
    try:
        print(json.dumps(ask_again(*sys.argv[1:3])))  # noqa: T201  # the answer
    except ConjcheckError as error:
        sys.exit(str(error))
