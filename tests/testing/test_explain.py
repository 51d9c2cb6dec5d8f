"""What kind of failure it is."""

import pytest
from planted import outcomes_of, truth

from conjcheck import Case, Fl, Gr, Row, Varieties, candidate, claim, product
from conjcheck.geometry.case import rows
from conjcheck.testing.compare import Comparer
from conjcheck.testing.explain import explain
from conjcheck.testing.finding import Finding

F = Fl(3)
ROW = Row.parse("Fl(3): [132] * [321]")
MIRROR = Row(F, ROW.v, ROW.u)
Q2 = (F.schubert(permutation=(3, 1, 2)), (0, 1))
UNIT = (F.identity, (1, 1))


def kinds_of(rows, row=ROW, space=F, **choices):
    """The kinds of the first failure of a rule by rows whose products at some rows are replaced."""
    table = truth(space) | {(r.u, r.v): terms for r, terms in rows.items()}

    @candidate(on=Varieties(space), **choices)
    def rule(X, u, v):
        return table[u, v]

    comparer = Comparer(rule)
    with comparer.limit:
        finding = comparer.row(row).finding
    explanation = explain(comparer, finding)
    assert explanation.by_rule == rows[row]
    assert explanation.by_oracle == truth(space)[row.u, row.v]
    return explanation.kinds


def both(terms):
    """The same product at a row and its mirror."""
    return {ROW: terms, MIRROR: terms}


def test_the_row_of_these_tests():
    """The product is q2 S312 + q1 q2 (Fomin, Gelfand, Postnikov, J. AMS 10 (1997); from memory)."""
    assert truth(F)[ROW.u, ROW.v] == {Q2: 1, UNIT: 1}


@pytest.mark.parametrize(
    ("terms", "kinds"),
    [
        ({UNIT: 1}, ("undercount", "support")),
        ({Q2: 2, UNIT: 1}, ("overcount",)),
        ({Q2: 1, UNIT: 1, (F.identity, (0, 2)): 1}, ("overcount", "support")),
        ({Q2: 1, (F.identity, (0, 2)): 1}, ("overcount", "support", "q-degree")),
        ({Q2: 1, UNIT: 1, (F.point, (0, 0)): 1}, ("overcount", "support", "degree axiom")),
        ({(Q2[0], (0, 2)): 1, UNIT: 1}, ("undercount", "support", "degree axiom", "q-degree")),
        ({(Q2[0], (0, 0)): 1, UNIT: 1}, ("overcount", "support", "degree axiom", "q-degree")),
    ],
    ids=["too few", "too many", "one side only", "wrong power of q", "lengths do not add up", "q^2 for q", "1 for q"],
)
def test_kinds(terms, kinds):
    """The sign of the error, a zero on one side only, a wrong power of q, a broken degree axiom each have their word."""
    assert kinds_of(both(terms)) == kinds
    assert kinds_of({ROW: terms}) == (*kinds, "not symmetric")


def test_undercount_without_support():
    """A coefficient 2 that is counted once is an undercount and nothing else: (2,1) squared on Gr(3,6)."""
    X = Gr(3, 6)
    u = X.schubert(partition=(2, 1))
    true = product(u, u)
    w = X.schubert(partition=(3, 2, 1))
    assert true[w, (0,)] == 2
    seen = dict(true) | {(w, (0,)): 1}

    @candidate(on=Varieties(X))
    def rule(X, u, v):
        return seen

    comparer = Comparer(rule)
    with comparer.limit:
        finding = comparer.row(Row(X, u, u)).finding
    assert explain(comparer, finding).kinds == ("undercount",)


def test_symmetry_is_asked_inside_the_premise_only():
    """Where the mirrored row is outside the premise nothing is said about symmetry."""
    premise = lambda X, u, v: u.length <= v.length  # noqa: E731
    assert kinds_of({ROW: {UNIT: 1}}, premise=premise) == ("undercount", "support")


def test_a_long_row_is_asked_in_part():
    """Case by case, a row of more than 4,000 outcomes is asked only where the oracle is not 0, and the account says so."""
    X = Fl(5)
    row = Row(X, X.point, X.point)
    assert len(outcomes_of(X, 20)) > 4_000
    true, calls = dict(product(X.point, X.point)), []
    zero = next(key for key in outcomes_of(X, 20) if key not in true)

    @candidate(on=Varieties(X))
    def rule(X, u, v, w, d):
        calls.append((w, d))
        return 3 if (w, d) == zero else true.get((w, d), 0)

    finding = Finding("refuted", Case(X, row.u, row.v, *zero), 3, 0)
    explanation = explain(Comparer(rule), finding)
    assert explanation.partial
    assert set(calls) == set(true)
    assert explanation.by_rule == true | {zero: 3}


def test_claims():
    """A claim has no product of its own: the true one is shown."""

    @claim(on=Varieties(F))
    def rule(X, u, v, N):
        return False

    explanation = explain(Comparer(rule), Finding("refuted", ROW))
    assert explanation.kinds == ("false claim",)
    assert explanation.by_rule is None
    assert list(explanation.by_oracle) == [Q2, UNIT]


def test_a_rule_that_fails_elsewhere():
    """A rule that crashes at other cases of the row, or in the mirrored one, is still explained."""

    @candidate(on=Varieties(F))
    def rule(X, u, v, w, d):
        if (w, d) == Q2 and u is ROW.u:
            return 5
        raise SystemExit

    explanation = explain(Comparer(rule), Finding("refuted", Case(F, ROW.u, ROW.v, *Q2), 5, 1))
    assert explanation.kinds[0] == "overcount"
    assert explanation.by_rule == {Q2: 5}


def test_a_wrong_power_on_a_grassmannian():
    """With one q, too, q^2 in place of q is a wrong power of q and breaks the degree axiom."""
    X = Gr(2, 4)
    right = truth(X)

    @candidate(on=Varieties(X))
    def doubled(X, u, v):
        return {(w, (2 * d[0],)): count for (w, d), count in right[u, v].items()}

    comparer = Comparer(doubled)
    with comparer.limit:
        finding = next(found for row in rows(X) if (found := comparer.row(row).finding))
    assert (finding.rule, finding.oracle) == (0, 1)
    assert explain(comparer, finding).kinds == ("undercount", "support", "degree axiom", "q-degree")
