"""What can be found wrong with a rule: one frozen value, and one exception class per status to carry it.

Each class is raised from a line of its own, because Hypothesis tells failures apart by type and line.
"""

from dataclasses import dataclass
from typing import NoReturn

from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.polynomial import RootPolynomial
from conjcheck.oracle.equivariant import Sampled

__all__ = ["STATUSES", "Finding", "Found", "raise_finding"]

STATUSES = ("agrees", "refuted", "crashed", "unstable", "too-slow", "not-a-count", "undefined", "not-independent")
"""Every status a conjecture can have, the one word used in all outputs."""


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing found wrong.

    Attributes:
        status: one of ``STATUSES``, never ``"agrees"``.
        where: the case, or the row if the rule failed on the whole product.
        rule: the rule's value there, ``None`` if it gave none (or the conjecture is a claim).
        oracle: the true constant, ``None`` where it plays no part.
        detail: one sentence: what was expected, what came.
        objects: the rule's objects as text, if it gave objects.
        trace: the end of the traceback from the plug-in file on, for a crash.
    """

    status: str
    where: Case | Row
    rule: int | RootPolynomial | None = None
    oracle: int | RootPolynomial | Sampled | None = None
    detail: str = ""
    objects: tuple[str, ...] | None = None
    trace: str = ""

    @property
    def row(self) -> Row:
        """The row it lies in."""
        return self.where.row if isinstance(self.where, Case) else self.where


class Found(Exception):
    """A finding on its way up; ``.finding`` holds it."""

    def __init__(self, finding: Finding) -> None:
        super().__init__(f"{finding.status}: {finding.where} {finding.detail}")
        self.finding = finding


class Refuted(Found):
    """The rule and the oracle differ."""


class Crashed(Found):
    """The rule raised."""


class Unstable(Found):
    """The rule gave two answers for one case."""


class TooSlow(Found):
    """A call took longer than the limit."""


class NotACount(Found):
    """The answer is no count."""


class Undefined(Found):
    """The rule said that the case is outside its domain."""


class AskedOracle(Found):
    """The rule asked the oracle."""


def raise_finding(finding: Finding) -> NoReturn:
    """Raise the class of the finding's status, each from its own line."""
    match finding.status:
        case "refuted":
            raise Refuted(finding)
        case "crashed":
            raise Crashed(finding)
        case "unstable":
            raise Unstable(finding)
        case "too-slow":
            raise TooSlow(finding)
        case "not-a-count":
            raise NotACount(finding)
        case "undefined":
            raise Undefined(finding)
    raise AskedOracle(finding)
