"""Certificates: a small JSON file that proves one constant by the quantum Chevalley formula, for the checker ``conjcheck.recheck``.

The maker shares the root systems of the checker, not its verdict: the value that is certified comes from the oracle, and every
certificate has been accepted by the checker before it is handed out.
"""

import json
from functools import partial
from importlib.metadata import PackageNotFoundError
from importlib.metadata import version as installed_version
from pathlib import Path
from typing import Any

from conjcheck import recheck
from conjcheck.errors import OutOfReach
from conjcheck.evidence.expression import by_relations, element, expression, lifted
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.oracle import constant
from conjcheck.oracle.comparison import MOST_CLASSES
from conjcheck.oracle.guard import note_question
from conjcheck.oracle.relations import relation

__all__ = ["certificate_of", "write_certificate"]

Vector = tuple[int, ...]

_FEW_CLASSES = 400
"""On G/B with so few classes the relations of the recursion cost nothing; on D4 they are sometimes shorter."""


def certificate_of(
    case: Case | Row, *, rule_value: object, conjecture_name: str, rule_hash: str, ring: str = "quantum", version: str = ""
) -> dict[str, Any]:
    """The certificate of the oracle's value at a case, ready for JSON.

    Args:
        case: the case; a row has no certificate.
        rule_value: what the rule gave there; ``None`` for a claim. It is bound by the digest, not proven.
        conjecture_name, rule_hash: which rule; bound, not proven.
        ring: the ring of the conjecture; an equivariant one has no certificates.
        version: of conjcheck; the one installed if left out.

    Cost: the search for a short derivation, up to a few seconds, and the check, up to a few seconds.

    Raises:
        OutOfReach: there is no certificate; the message says why.
    """
    note_question()
    if isinstance(case, Row):
        raise OutOfReach(
            f"expected a single constant to certify, got the whole row {case}: a claim about products has no certificate"
        )
    if ring.startswith("equivariant") or not (rule_value is None or isinstance(rule_value, int)):
        raise OutOfReach(f"expected a constant that is a number, got an equivariant one at {case}: certificates hold numbers only")
    kind, X = case.X.kind, case.X
    low, high = recheck.RANKS[kind.letter]
    if not low <= kind.rank <= high:
        raise OutOfReach(f"expected a rank of at most {high} for a certificate in type {kind.letter}, got {X}")
    group = recheck.WeylGroup(kind.letter, kind.rank)
    group.work = -(10**12)  # the search has a bound of its own
    top, target = lifted(group, case)
    if min(top) < 0:
        raise OutOfReach(f"expected a degree that lifts to one of 0 or more on {kind}/B, got {top} from d={case.d} on {X}")
    u, v = element(group, case.u.word), element(group, case.v.word)
    certificate = {
        "format": recheck.FORMAT,
        "version": recheck.VERSION,
        "conjcheck": version or _installed(),
        "rule": {"name": conjecture_name, "hash": rule_hash, "value": rule_value},
        "claim": {
            "text": str(case),
            "type": kind.letter,
            "rank": kind.rank,
            "marked": list(X.marked),
            **{name: list(getattr(case, name).word) for name in "uvw"},
            "d": list(case.d),
            "value": constant(case.u, case.v, case.w, case.d),
        },
        "lift": {"d": list(top), "w": list(group.word(target))},
    }
    ways: list[tuple[str, list[dict[str, Any]]]] = []
    reasons: list[str] = []
    for name, x in sorted([("u", u), ("v", v)][: 1 if u == v else 2], key=lambda way: group.length(way[1])):
        if ways and len(ways[0][1]) <= group.length(x):
            break  # a class of length l takes l steps at least
        try:
            ways.append((name, _steps(group, x, top)))
        except (recheck.Rejected, OutOfReach) as reason:
            reasons.append(f"expanding {name}: {reason}")
    for name, steps in sorted(ways, key=lambda way: len(way[1])):
        try:
            return _checked(certificate | {"expand": name, "steps": steps})
        except recheck.Rejected as reason:
            reasons.append(f"expanding {name} in {len(steps)} steps: {reason}")
    raise OutOfReach(f"expected a derivation short enough to be checked at {case}, got none; {'; '.join(reasons)}")


def write_certificate(
    path: str | Path, case: Case | Row, *, rule_value: object, conjecture_name: str, rule_hash: str, ring: str = "quantum"
) -> Path:
    """Write ``certificate_of(...)`` to a file and return where; nothing is written if there is none."""
    found = certificate_of(case, rule_value=rule_value, conjecture_name=conjecture_name, rule_hash=rule_hash, ring=ring)
    Path(path).write_text(_laid_out(found), encoding="utf-8")
    return Path(path)


def _checked(certificate: dict[str, Any]) -> dict[str, Any]:
    """The certificate with its digest, after the checker has accepted it as it will be read from a file."""
    whole = certificate | {"digest": recheck.digest(certificate)}
    text = _laid_out(whole)
    if len(text.encode()) > recheck.MOST_BYTES:
        raise recheck.Rejected(f"expected at most {recheck.MOST_BYTES:,} bytes, got {len(text):,}")
    recheck.check(json.loads(text))
    return whole


def _laid_out(certificate: dict[str, Any]) -> str:
    """The text of the file: one line for each entry, and for each step."""
    lines = []
    for key, value in certificate.items():
        if key == "steps" and value:
            inner = ",\n".join(f"    {json.dumps(step)}" for step in value)
            lines.append(f'  "steps": [\n{inner}\n  ]')
        else:
            lines.append(f"  {json.dumps(key)}: {json.dumps(value)}")
    return "{\n" + ",\n".join(lines) + "\n}\n"


def _steps(group: recheck.WeylGroup, x: Vector, top: Vector) -> list[dict[str, Any]]:
    """Steps to an element, in JSON types: a short list if the search finds one, else the recursion's; on small G/B the shorter one."""
    terms: Any = group.terms
    word: Any = group.word
    length: Any = group.length
    steps = expression(terms, group.identity, x, top, length, complete=True)
    if steps is None or (group.letter != "A" and FlagVariety(f"{group.letter}{group.rank}/B").number_of_classes <= _FEW_CLASSES):
        other = by_relations(terms, group.identity, x, top, partial(_parts, group))
        steps = min(filter(None, (steps, other)), key=len, default=[])
    if len(steps) > recheck.MOST_STEPS:
        raise OutOfReach(f"expected at most {recheck.MOST_STEPS} steps, got {len(steps):,}")
    return [
        {
            "class": list(word(step.x)),
            "times": step.times,
            "from": [{"divisor": list(L), "class": list(word(z))} for L, z in step.parts],
            "minus": [{"count": t.count, "d": list(t.d), "class": list(word(t.z))} for t in step.minus],
        }
        for step in steps
    ]


def _parts(group: recheck.WeylGroup, x: Any) -> list[tuple[Vector, Vector]]:
    """How the recursion reaches an element: ``sigma_x`` is isolated in a sum of products L * sigma_z; pairs (L, z)."""
    if group.letter != "A":
        whole = FlagVariety(f"{group.letter}{group.rank}/B")
        if whole.number_of_classes > MOST_CLASSES:
            raise OutOfReach(f"no short expression was found, and {whole} has {whole.number_of_classes:,} classes")
        found = relation(whole, whole.schubert(word=group.word(x)).index)
        return [(L, element(group, whole.classes[z].word)) for L, z in found.parts]
    # The transition of ``oracle.relations``, for any n: r the last descent, s the largest position with x(s) < x(r).
    r = max(i for i in range(group.rank) if x[i] >= group.R)
    rows = [tuple(int(r <= i < s) for i in range(group.rank)) for s in range(r + 1, group.rank + 1)]
    a = max((group.roots.index(row) for row in rows if x[group.roots.index(row)] >= group.R), key=lambda a: sum(group.roots[a]))
    return [(tuple((i == r) - (i == r - 1) for i in range(group.rank)), group.times(x, a))]


def _installed() -> str:
    """The version of conjcheck, for the file."""
    try:
        return installed_version("conjcheck")
    except PackageNotFoundError:
        return "0.0.0+unknown"
