"""What kind of failure it is, in the words of the trade, and the full product on both sides."""

from dataclasses import dataclass

from conjcheck.geometry.case import Case, Row, outcomes
from conjcheck.oracle.engine import Product
from conjcheck.testing.compare import Comparer, Key
from conjcheck.testing.finding import Finding

__all__ = ["Explanation", "explain"]

_MOST_OUTCOMES = 4_000


@dataclass(frozen=True, slots=True)
class Explanation:
    """Around a refuted case.

    Attributes:
        kinds: the kinds of failure, e.g. ``("undercount", "support")``.
        by_rule: the rule's product of the row, ``None`` for a claim; ``partial`` if it was asked only where the oracle is nonzero.
        by_oracle: the true product.
    """

    kinds: tuple[str, ...]
    by_rule: Product | None
    by_oracle: Product
    partial: bool


def explain(comparer: Comparer, finding: Finding) -> Explanation:
    """Explain a refuted case or row.

    Kinds: ``undercount`` / ``overcount`` (the sign of the error); ``support`` (zero on one side only); ``degree axiom`` (a value where
    lengths and degrees do not add up); ``q-degree`` (the class is right, the power of q is not: summed over d the two sides agree);
    ``not symmetric`` (the rule gives another value for v, u).
    """
    row = finding.row
    truth = comparer.truth(row)
    by_oracle = Product.of(truth)
    if comparer.conjecture.role == "claim":
        return Explanation(("false claim",), None, by_oracle, False)
    every = list(outcomes(row.X, row.u.length + row.v.length, classical=comparer.conjecture.is_classical))
    partial = len(every) > _MOST_OUTCOMES and not comparer.conjecture.by_rows
    keys = [*truth] if partial else every
    with comparer.limit:
        values = _values(comparer, row, keys)
        kinds = []
        if isinstance(finding.where, Case) and finding.rule is not None and finding.oracle is not None:
            case, rule, true = finding.where, finding.rule, finding.oracle
            values.update({(case.w, case.d): rule} if rule else {})
            kinds.append("undercount" if rule < true else "overcount")
            if not rule or not true:
                kinds.append("support")
            if not case.obeys_degree_axiom:
                kinds.append("degree axiom")
            elif not partial and len(case.d) > 1 and _sum(values, case) == _sum(truth, case):
                kinds.append("q-degree")
            mirrored = Case(case.X, case.v, case.u, case.w, case.d)
            if case.u is not case.v and comparer.inside(mirrored.row):
                other = _values(comparer, mirrored.row, [(case.w, case.d)])
                if other.get((case.w, case.d), 0) != rule:
                    kinds.append("not symmetric")
    return Explanation(tuple(kinds), Product.of(values), by_oracle, partial)


def _values(comparer: Comparer, row: Row, keys: list[Key]) -> dict[Key, int]:
    """The rule's values, none where it has none."""
    try:
        return comparer.values(row, keys)
    except KeyboardInterrupt:
        raise
    except BaseException:
        return {}


def _sum(terms: dict, case: Case) -> int:  # type: ignore[type-arg]  # a product or a dictionary of its terms
    return sum(count for (w, _), count in terms.items() if w is case.w)
