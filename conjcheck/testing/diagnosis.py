"""What a diagnosis says: frozen values without any computing, for all outputs."""

from dataclasses import dataclass
from typing import Any

from conjcheck.geometry.case import Case, Row
from conjcheck.wording import counted

__all__ = ["Condition", "Diagnosis", "Suggestion"]


@dataclass(frozen=True, slots=True)
class Condition:
    """A short condition on cases, and at how many of those looked at it holds.

    Attributes:
        words: the condition.
        expression: it as a Python expression in X, u, v, w, d; empty if there is no short one.
        failing: the failing cases at which it holds.
        agreeing: the agreeing cases at which it holds.
        informative: those of them at which the rule or the constant is not 0.
        others: other conditions, in words, that hold at the same cases.
    """

    words: str
    expression: str
    failing: int
    agreeing: int
    informative: int
    others: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Suggestion:
    """A premise under which the rule may be right. It was compared again on fresh rows; that is no proof.

    Attributes:
        words: the premise.
        expression: it as a Python expression in X, u, v (and w, d); empty if there is no short one.
        on_rows: whether it can be decided from X, u, v alone.
        cases: the cases inside it that were compared; all of them agree.
        informative: those of them at which the rule or the constant is not 0.
        fresh: the cases of them that had no part in the choice of the premise; 0 if no row was left.
        where: the spaces of these fresh cases.
        narrows: whether the conjecture has a premise already, to which this one is added.
        own: that premise as a Python expression, or in words where its source is not at hand.
        arguments: what a premise of this kind is a function of.
    """

    words: str
    expression: str
    on_rows: bool
    cases: int
    informative: int
    fresh: int
    where: str
    narrows: bool = False
    arguments: str = "X, u, v, w, d"
    own: str = "your own premise"

    @property
    def premise(self) -> str:
        """What to write into the declaration, in place of a premise there; empty if there is no short expression."""
        whole = f"({self.own}) and ({self.expression})" if self.narrows else self.expression
        return f"premise=lambda {self.arguments}: {whole}" if self.expression else ""


@dataclass(frozen=True, slots=True)
class Diagnosis:
    """What the failures of a refuted conjecture have in common, and where it is right, as far as looked at.

    Attributes:
        failing, agreeing: the cases looked at; in large rows all nonzero values and a fixed sample of the zeros.
        informative: the agreeing cases at which the rule or the constant is not 0.
        where: the spaces they lie in.
        signs: sentences about the errors as such.
        firsts: in each direction the smallest failure: words such as ``"smallest n: 5"``, and the case.
        conditions: the best conditions, best first; each of the first kind holds at every failure.
        suggestion: a premise that stood a fresh comparison, ``None`` if none did.
        refused: how many premises were tried on fresh rows and failed there.
        unusable: features of the user that could not be used, and why.
        by_rows: whether what is counted are rows, the conjecture being a claim about whole products.
    """

    failing: int
    agreeing: int
    informative: int
    where: str
    signs: tuple[str, ...] = ()
    firsts: tuple[tuple[str, Case | Row], ...] = ()
    conditions: tuple[Condition, ...] = ()
    suggestion: Suggestion | None = None
    refused: int = 0
    unusable: tuple[str, ...] = ()
    by_rows: bool = False

    @property
    def unit(self) -> str:
        """What is counted."""
        return "row" if self.by_rows else "case"

    @property
    def scope(self) -> str:
        """What was looked at, in words."""
        failures = counted(self.failing, f"failing {self.unit}")
        zeros = "" if self.by_rows else f", {self.informative:,} of these not 0,"
        return f"{failures} and {self.agreeing:,} agreeing ones{zeros} were looked at in {self.where}"

    @property
    def suggested(self) -> str:
        """The suggestion in words, or that there is none."""
        one = self.suggestion
        if one is None:
            tried = f"; {self.refused} that seemed possible failed there" if self.refused else ""
            return f"none: no short premise stood a comparison on rows that had no part in its choice{tried}"
        zeros = "" if self.by_rows else f", {one.informative:,} of them not 0"
        inside = f"it agrees at all {counted(one.cases, self.unit)} inside that were looked at{zeros}"
        fresh = (
            f"{one.fresh:,} of them, in {one.where}, had no part in its choice"
            if one.fresh
            else "all of them had a part in its choice"
        )
        narrows = ", inside its premise," if one.narrows else ""
        needs = "; the expression needs: from itertools import combinations" if "combinations(" in one.expression else ""
        textless = "" if one.premise else "; no short Python expression says it, so there is none for premise="
        return f"the rule may hold{narrows} when {one.words}; {inside}, {fresh}; this is no proof{needs}{textless}"

    def counts(self, condition: Condition) -> str:
        """At how many failures and agreements a condition holds, in words."""
        failures = f"all {self.failing:,}" if condition.failing == self.failing else f"{condition.failing:,} of {self.failing:,}"
        if condition.failing == self.failing == 1:
            failures = "the one"
        ending = "failure" if self.failing == 1 else "failures"
        everywhere = condition.failing == self.failing
        zeros = condition.agreeing - condition.informative
        if not condition.agreeing:
            exactly = ": among these it fails exactly then" if everywhere else ""
            return f"holds at {failures} {ending} and at none of {self.agreeing:,} agreements{exactly}"
        if not condition.informative:
            return f"holds at {failures} {ending}; of {self.agreeing:,} agreements only at {zeros:,} where both sides are 0"
        if self.by_rows:
            return f"holds at {failures} {ending}, and at {condition.agreeing:,} of {self.agreeing:,} agreements"
        return (
            f"holds at {failures} {ending}, and at {condition.informative:,} of {self.informative:,} agreements that are not 0 and "
            f"{zeros:,} of {self.agreeing - self.informative:,} that are"
        )

    def as_json(self) -> dict[str, Any]:
        """The diagnosis in JSON types."""
        found: dict[str, Any] = {
            "failing": self.failing,
            "agreeing": self.agreeing,
            "informative": self.informative,
            "where": self.where,
            "signs": list(self.signs),
            "firsts": {words: str(case) for words, case in self.firsts},
            "conditions": [
                {
                    "words": condition.words,
                    "expression": condition.expression,
                    "failing": condition.failing,
                    "agreeing": condition.agreeing,
                    "informative": condition.informative,
                    "others": list(condition.others),
                }
                for condition in self.conditions
            ],
            "refused": self.refused,
            "by_rows": self.by_rows,
        }
        if self.suggestion:
            found["suggestion"] = {
                "words": self.suggestion.words,
                "premise": self.suggestion.premise,
                "cases": self.suggestion.cases,
                "informative": self.suggestion.informative,
                "fresh": self.suggestion.fresh,
                "where": self.suggestion.where,
            }
        if self.unusable:
            found["unusable"] = list(self.unusable)
        return found
