"""The outcome of one part of an examination: a frozen value, the same for terminal, JSON and summary."""

import sys
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import dataclass, replace
from html import escape
from importlib.metadata import PackageNotFoundError, version
from itertools import islice
from platform import python_version
from textwrap import shorten
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.conjecture.discover import asked_while_imported
from conjcheck.errors import RecordError
from conjcheck.evidence.derivation import Derivation
from conjcheck.evidence.source import kept_version
from conjcheck.geometry.case import Case
from conjcheck.oracle.engine import Product
from conjcheck.testing.answer import plain_value, shown_value
from conjcheck.testing.diagnosis import Diagnosis
from conjcheck.testing.explain import Explanation
from conjcheck.testing.finding import Finding
from conjcheck.testing.minimise import Layer, Minimum

__all__ = ["Outcome", "environment", "no_verdict", "plain_product", "smaller_agree"]

_MOST_TERMS = 300
_MOST_IN_CELL = 600
_MOST_FAILURES = 200

_ASKED = "the file asked the oracle while it was imported: the verdict is no more independent than the use made of that"

_REMEDIES = {
    "crashed": "the rule raised; the end of the traceback is below",
    "unstable": "a rule must be a function of its arguments alone: look for randomness, mutable defaults, used-up iterators",
    "too-slow": "raise the limit with --conjcheck-call-limit, narrow the premise, or return the whole product from (X, u, v)",
    "not-a-count": "return an int of 0 or more, or an iterable of distinct hashable objects",
    "undefined": "state the domain as premise=, so that cases outside it are not compared",
    "not-independent": "a rule may not use conjcheck's product, constant or table: a verdict would say nothing",
}


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
        derivation: why the oracle's value is what it is; ``None`` where no short chain was found, or for a whole row.
        diagnosis: what all failures have in common, and where the rule may be right; ``None`` where that was not asked.
        seconds: how long the part took.
        seed: the seed of the random part, if there was one.
        note: one more sentence, e.g. that the record expects a refutation.
        spaces: what was compared where, in order, in JSON types: ``space``, and how far (see ``SpaceCoverage``), or ``drawn``.
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
    derivation: Derivation | None = None
    diagnosis: Diagnosis | None = None
    seconds: float = 0.0
    seed: str = ""
    note: str = ""
    spaces: tuple[Mapping[str, Any], ...] = ()

    def noted(self, words: str) -> "Outcome":
        """The same with one more note."""
        return replace(self, note="; ".join(filter(None, [self.note, words])))

    def doubted(self) -> "Outcome":
        """The same with a warning if the oracle had a hand in the rule: its file, or a helper of it, asked while it was imported."""
        doubtful = self.conjecture.role == "candidate" and asked_while_imported(self.conjecture)
        return self.noted(_ASKED) if doubtful else self

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

    @property
    def remedy(self) -> str:
        """What to do about a finding that is no refutation; empty if there is none."""
        finding = self.finding
        if finding is None or finding.status == "refuted":
            return ""
        if finding.status == "crashed" and not finding.trace:
            return "call the rule at this place in a process that may end, with python -X faulthandler"
        if finding.status == "not-a-count":
            if "keys" in finding.detail:
                classical = "key a whole product by w, a class of X"
                quantum = "key a whole product by (w, d), w a class of X and d a tuple; or by w alone, with ring='classical'"
                return classical if self.conjecture.is_classical else quantum
            if self.conjecture.role == "claim":
                return "return True or False on every path"
            value = "a polynomial built from simple_roots(X)" if self.conjecture.is_equivariant else ""
            if self.conjecture.by_rows:
                key = "w" if self.conjecture.is_classical else "(w, d)"
                value = value or "an int of 0 or more, or an iterable of distinct hashable objects"
                return f"return a mapping {{{key}: {'value' if self.conjecture.is_equivariant else 'count'}}}, each one {value}"
            if value:
                return f"return {value}"
        return _REMEDIES[finding.status]

    def _repr_html_(self) -> str:
        """A few lines for a notebook; the whole report is a page of its own."""
        rows = [("statement", self.conjecture.statement), ("compared", self.scope), ("note", self.note), ("remedy", self.remedy)]
        if self.explanation:
            sides = (("by the rule", self.explanation.by_rule), ("by the oracle", self.explanation.by_oracle))
            rows[1:1] = [(label, str(side)) for label, side in sides if side is not None]
        cells = "".join(
            f'<tr><th scope="row" style="text-align:left;vertical-align:top">{label}</th>'
            f'<td style="text-align:left">{escape(shorten(text, _MOST_IN_CELL, placeholder=" ..."))}</td></tr>'
            for label, text in rows
            if text
        )
        return f"<div><p><strong>{escape(self.verdict)}</strong></p><table>{cells}</table></div>"

    def as_json(self) -> dict[str, Any]:
        """The outcome in JSON types: for junit properties, other processes, programs and pages."""
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
            "about": self.conjecture.about(),
            "spaces": [dict(space) for space in self.spaces],
            "environment": environment(),
            "rule_hash": _version(self.conjecture),
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
            found["detail"], found["trace"], found["remedy"] = self.finding.detail, self.finding.trace, self.remedy
            found["minimality"] = self.minimality
            if self.finding.objects is not None:
                found["objects"] = list(self.finding.objects)
            if self.broken_law:
                found["broken_law"] = self.broken_law
        if self.explanation:
            found["products"] = {
                "rule": plain_product(self.explanation.by_rule),
                "oracle": plain_product(self.explanation.by_oracle),
                "partial": self.explanation.partial,
            }
        if self.layer:
            found["layer"] = {
                "pairs": self.layer.pairs,
                "cases": sum(isinstance(f.where, Case) for f in self.layer.findings),
                "orbits": self.layer.orbits,
                "complete": self.layer.complete,
                "rows": self.layer.rows,
                "size": self.layer.size,
                "all_orbits": self.layer.all_orbits,
                "failures": [
                    {"where": str(f.where), "rule": plain_value(f.rule), "oracle": plain_value(f.oracle)}
                    for f in self.layer.findings[:_MOST_FAILURES]
                ],
            }
        if self.diagnosis:
            found["diagnosis"] = self.diagnosis.as_json()
        return found


def plain_product(product: Product | None) -> dict[str, Any] | None:
    """A product in JSON types: its terms in order, the first few hundred of them, and how many there are more."""
    if product is None:
        return None
    terms = [{"w": str(w), "d": list(d), "n": plain_value(n)} for (w, d), n in islice(product.items(), _MOST_TERMS)]
    return {"terms": terms, "more": len(product) - len(terms)}


def no_verdict(conjecture: Conjecture, part: str, why: str) -> dict[str, Any]:
    """The JSON form for a part that ended without a verdict, through an error that is not the rule's."""
    line = Outcome(conjecture, part, "no verdict", why, why).as_json()
    return line | {"status": "no verdict", "verdict": f"no verdict: {conjecture.name}: {why}"}


def smaller_agree(count: int, what: str) -> str:
    """``all 63 smaller cases agree``, also for none and one."""
    if count == 0:
        return "there is no smaller case"
    if count == 1:
        return f"the one smaller case {what.replace('were', 'was').replace('agree', 'agrees')}"
    return f"all {count:,} smaller cases {what}"


def _version(conjecture: Conjecture) -> str:
    """The hash of the rule that was asked; empty if it is not certain which that was."""
    with suppress(RecordError):  # it was written in no file
        version = kept_version(conjecture.file)
        return "" if version.changed else version.rule
    return ""


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
