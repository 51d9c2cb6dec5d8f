"""What kind of failure it is, in the words of the trade, and the full product on both sides."""

from dataclasses import dataclass

from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.polynomial import RootPolynomial
from conjcheck.oracle.engine import Product
from conjcheck.oracle.equivariant import equivariant_constant, number_of_monomials
from conjcheck.testing.calls import Key, Values
from conjcheck.testing.compare import Comparer
from conjcheck.testing.finding import Finding

__all__ = ["Explanation", "explain"]

_MOST_OUTCOMES = 4_000
_MOST_POLYNOMIALS = 12
_MOST_MONOMIALS = 40


@dataclass(frozen=True, slots=True)
class Explanation:
    """Around a refuted case.

    Attributes:
        kinds: the kinds of failure, e.g. ``("undercount", "support")``.
        by_rule: the rule's product of the row, ``None`` for a claim; ``partial`` if it was asked only where the oracle is nonzero.
        by_oracle: the true product; ``None`` if its polynomials are too many or too long to be written out.
    """

    kinds: tuple[str, ...]
    by_rule: Product | None
    by_oracle: Product | None
    partial: bool


def explain(comparer: Comparer, finding: Finding) -> Explanation:
    """Explain a refuted case or row.

    Kinds: ``undercount`` / ``overcount`` (the sign of the error); ``support`` (zero on one side only); ``degree axiom`` (the rule
    has a value where lengths and degrees do not add up, here or elsewhere in its product); ``q-degree`` (the class is right, the power
    of q is not: summed over d the two sides agree); ``not symmetric`` (the rule gives another value for v, u).
    """
    row = finding.row
    if comparer.conjecture.is_equivariant:
        return _explain_polynomials(comparer, finding)
    truth = comparer.truth(row)
    by_oracle = Product.of(truth)
    if comparer.conjecture.role == "claim":
        return Explanation(("false claim",), None, by_oracle, False)
    every = list(comparer.outcomes(row))
    partial = len(every) > _MOST_OUTCOMES and not comparer.conjecture.by_rows
    keys = [*truth] if partial else every
    with comparer.limit:
        values = _values(comparer, row, keys)
        kinds = []
        case, rule, true = finding.where, finding.rule, finding.oracle
        if isinstance(case, Case) and isinstance(rule, int) and isinstance(true, int):
            values.update({(case.w, case.d): rule} if rule else {})
            kinds.append("undercount" if rule < true else "overcount")
            if not rule or not true:
                kinds.append("support")
            if not all(Case(row.X, row.u, row.v, *key).obeys_degree_axiom for key, count in values.items() if count):
                kinds.append("degree axiom")
            if not partial and _sum(values, case) == _sum(truth, case):
                kinds.append("q-degree")
            mirrored = Case(case.X, case.v, case.u, case.w, case.d)
            if case.u is not case.v and comparer.inside(mirrored.row):
                other = _values(comparer, mirrored.row, [(case.w, case.d)])
                if other.get((case.w, case.d), 0) != rule:
                    kinds.append("not symmetric")
    return Explanation(tuple(kinds), Product.of(values), by_oracle, partial)


def _explain_polynomials(comparer: Comparer, finding: Finding) -> Explanation:
    """The same in an equivariant ring. Kinds: ``support``, ``degree axiom``, ``negative coefficient``, ``other polynomial``."""
    row, case, rule = finding.row, finding.where, finding.rule
    truth = comparer.truth(row)
    with comparer.limit:
        values = _values(comparer, row, list(comparer.outcomes(row)))
    kinds = []
    if isinstance(case, Case) and rule is not None:
        polynomial = rule if isinstance(rule, RootPolynomial) else RootPolynomial.of(row.X.rank, {(0,) * row.X.rank: rule})
        weight = sum(a * b for a, b in zip(case.d, row.X.q_degrees, strict=True))
        degree = row.u.length + row.v.length - case.w.length - weight
        if not polynomial or (case.w, case.d) not in truth:
            kinds.append("support")
        elif not polynomial.is_homogeneous or polynomial.degree != degree:
            kinds.append("degree axiom")
        if not polynomial.is_positive:
            kinds.append("negative coefficient")
    places = {key: Case(row.X, row.u, row.v, *key) for key in truth}
    by_oracle = None
    if len(places) <= _MOST_POLYNOMIALS and all(number_of_monomials(place) <= _MOST_MONOMIALS for place in places.values()):
        by_oracle = Product.of({key: equivariant_constant(place) for key, place in places.items()})
    return Explanation(tuple(kinds or ["other polynomial"]), Product.of(values), by_oracle, False)


def _values(comparer: Comparer, row: Row, keys: list[Key]) -> Values:
    """The rule's values, none where it has none."""
    try:
        return comparer.values(row, keys)
    except KeyboardInterrupt:
        raise
    except BaseException:
        return {}


def _sum(terms: dict, case: Case) -> int:  # type: ignore[type-arg]  # a product or a dictionary of its terms
    return sum(count for (w, _), count in terms.items() if w is case.w)
