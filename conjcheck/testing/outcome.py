"""The outcome of one part of an examination: a frozen value, the same for terminal, JSON and summary."""

import sys
from dataclasses import dataclass
from importlib.metadata import PackageNotFoundError, version
from platform import python_version
from textwrap import shorten
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.geometry.case import Case
from conjcheck.testing.answer import shown_value
from conjcheck.testing.explain import Explanation
from conjcheck.testing.finding import Finding
from conjcheck.testing.minimise import Layer, Minimum

__all__ = ["Outcome", "environment", "no_verdict", "plain_value", "smaller_agree"]


@dataclass(frozen=True, slots=True)
class Outcome:
    """What one part (``recorded``, ``laws``, ``survey``, ``probe[n=5]``, ``case``) found about one conjecture.

    Attributes:
        conjecture: the conjecture.
        part: which part.
        status: one of ``STATUSES``.
        scope: what was compared, in words that can be quoted; never empty.
        where: the spaces only, for a table.
        rows, cases, nonzero: rows and cases compared that agree, and those of the cases with a nonzero constant.
        finding: what is wrong, ``None`` if the status is ``agrees``.
        broken_law: the law that led to the finding, if one did.
        minimum, layer, explanation, confirmed_by: around a finding, as far as they were worked out.
        seconds: how long the part took.
        seed: the seed of the random part, if there was one.
        note: one more sentence, e.g. that the record expects a refutation.
    """

    conjecture: Conjecture
    part: str
    status: str
    scope: str
    where: str = ""
    rows: int = 0
    cases: int = 0
    nonzero: int = 0
    finding: Finding | None = None
    broken_law: str = ""
    minimum: Minimum | None = None
    layer: Layer | None = None
    explanation: Explanation | None = None
    confirmed_by: str = ""
    seconds: float = 0.0
    seed: str = ""
    note: str = ""

    @property
    def verdict(self) -> str:
        """The verdict in one line; it begins with the status and the name."""
        head = f"{self.status}: {self.conjecture.name}"
        if self.finding is None and self.status != "agrees":
            return f"{head}: {self.scope}"
        if self.finding is None:
            return f"{head} as far as checked: {self.scope}"
        if self.status != "refuted":
            return f"{head} at {self.finding.where}: {shorten(self.finding.detail, 300, placeholder=' ...')}"
        if self.finding.rule is None:
            values = "the claim is false" + (f", the constant is {self.finding.oracle}" if self.finding.oracle is not None else "")
        else:
            values = f"rule {shown_value(self.finding.rule)}, oracle {self.finding.oracle}"
        return f"{head} at {self.finding.where}: {values} ({self.minimality})"

    @property
    def minimality(self) -> str:
        """How far it is certain that nothing smaller fails."""
        if self.minimum is None:
            return "smaller cases not looked at"
        if self.minimum.certified:
            return f"minimal: {smaller_agree(self.minimum.below, 'agree')}"
        return f"not known to be minimal: {self.minimum.reach}"

    def as_json(self) -> dict[str, Any]:
        """The outcome in JSON types: for junit properties, other processes and programs."""
        found: dict[str, Any] = {
            "conjecture": self.conjecture.name,
            "file": self.conjecture.file,
            "part": self.part,
            "status": self.status,
            "verdict": self.verdict,
            "scope": self.scope,
            "where": str(self.finding.where) if self.finding else self.where,
            "rows": self.rows,
            "cases": self.cases,
            "nonzero": self.nonzero,
            "seconds": round(self.seconds, 3),
        }
        found["minimal"] = bool(self.minimum and self.minimum.certified)
        if self.seed:
            found["seed"] = self.seed
        if self.note:
            found["note"] = self.note
        if self.finding:
            found["rule"], found["oracle"] = plain_value(self.finding.rule), plain_value(self.finding.oracle)
            found["kinds"] = list(self.explanation.kinds) if self.explanation else []
            found["confirmed_by"] = self.confirmed_by
        if self.layer:
            found["layer"] = {
                "pairs": self.layer.pairs,
                "cases": sum(isinstance(f.where, Case) for f in self.layer.findings),
                "orbits": self.layer.orbits,
                "complete": self.layer.complete,
            }
        return found


def no_verdict(conjecture: Conjecture, part: str, why: str) -> dict[str, Any]:
    """The JSON form for a part that ended without a verdict, through an error that is not the rule's."""
    line = Outcome(conjecture, part, "no verdict", why, why).as_json()
    return line | {"status": "no verdict", "verdict": f"no verdict: {conjecture.name}: {why}"}


def plain_value(value: object) -> int | str | None:
    """A value for JSON: small integers as they are, others and polynomials as text."""
    return value if value is None or (isinstance(value, int) and value.bit_length() < 64) else shown_value(value)


def smaller_agree(count: int, what: str) -> str:
    """``all 63 smaller cases agree``, also for none and one."""
    if count == 0:
        return "there is no smaller case"
    if count == 1:
        return f"the one smaller case {what.replace('were', 'was').replace('agree', 'agrees')}"
    return f"all {count:,} smaller cases {what}"


def environment() -> str:
    """The versions that a referee needs."""
    names = ["conjcheck", "hypothesis", "numpy", "pytest"]
    versions = []
    for name in names:
        try:
            versions.append(f"{name} {version(name)}")
        except PackageNotFoundError:
            versions.append(f"{name} (not installed)")
    return f"{', '.join(versions)}, Python {python_version()} on {sys.platform}"
