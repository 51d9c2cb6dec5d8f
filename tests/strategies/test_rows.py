"""``rows``: valid, small in the end, and where the large constants are."""

import pytest
from hypothesis.errors import InvalidArgument, Unsatisfiable

from conjcheck import product
from conjcheck.geometry.case import Row
from conjcheck.geometry.case import rows as all_rows
from conjcheck.geometry.families import CompleteFlags, Grassmannians, PartialFlags, StepFlags, Varieties
from conjcheck.geometry.flag_variety import Fl, Gr
from conjcheck.strategies import rows


@pytest.mark.parametrize("family", [Grassmannians(), CompleteFlags(), StepFlags(2), Varieties("E6/P1", "G2/B")], ids=str)
def test_rows_lie_in_the_family_and_shrink_to_its_first(family, drawn, smallest):
    """Every row is of a member; the smallest is 1 * 1 on the smallest member."""
    assert all(isinstance(row, Row) and row.X in family for row in drawn(rows(family)))
    X = next(iter(family))
    assert smallest(rows(family)) == Row(X, X.identity, X.identity)


@pytest.mark.parametrize("X", [Gr(2, 4), Fl(3), Fl(1, 3, n=4)], ids=str)
def test_every_row_can_be_drawn(X, drawn):
    """Bias leaves nothing out: on small varieties nearly all rows are soon seen."""
    every = set(all_rows(X))
    seen = set(drawn(rows(Varieties(X)), min(6 * len(every), 1200)))
    assert seen <= every
    assert len(seen) > 0.7 * len(every)


@pytest.mark.parametrize(("a", "b"), [(0, 1), (2, 0), (3, 4), (5, 5), (6, 6)])
def test_rows_shrink_to_the_first_class_of_each_length(smallest, a, b):
    """With bounds on both lengths, to the first class of exactly these lengths."""
    X = Fl(4)
    expected = Row(X, X.of_length(a)[0], X.of_length(b)[0])
    assert smallest(rows(Varieties(X)), lambda row: row.u.length >= a and row.v.length >= b) == expected


def test_a_wrong_rule_shrinks_to_a_small_variety(smallest):
    """The rule that products have one term fails first on ``Gr(2,4)``: (1) * (1) has two."""
    found = smallest(rows(Grassmannians(), max_n=6), lambda row: len(product(row.u, row.v)) > 1)
    assert found == Row.parse("Gr(2,4): (1) * (1)")


def test_a_premise_holds_for_every_row_however_thin(drawn):
    """One-sided, two-sided, joint; hardly anything is rejected, and all that is allowed is seen."""
    family = Varieties("Fl(4)")
    X = Fl(4)
    for premise in (
        lambda X, u, v: v.length == 1,
        lambda X, u, v: u.length == v.length == 1,
        lambda X, u, v: u.length + v.length == X.dim and v is not u.dual,
        lambda X, u, v: len({*u.descents, *v.descents}) <= 1,
    ):
        allowed = {row for row in all_rows(X) if premise(X, row.u, row.v)}
        examples = drawn(rows(family, premise=premise), 200)
        assert len(examples) >= min(180, len(allowed))
        assert set(examples) <= allowed
        assert len(set(examples)) > 0.6 * min(len(allowed), 120)


def test_a_premise_on_the_variety_leaves_the_others(drawn, smallest):
    """A premise that looks at X alone rejects whole varieties."""
    strategy = rows(PartialFlags(), max_n=4, premise=lambda X, u, v: X.n == 4)
    assert {row.X.n for row in drawn(strategy)} == {4}
    assert smallest(strategy) == Row(Gr(1, 4), Gr(1, 4).identity, Gr(1, 4).identity)


def test_a_premise_that_never_holds_is_unsatisfiable(drawn):
    """Hypothesis says so; nothing hangs."""
    with pytest.raises(Unsatisfiable):
        drawn(rows(Varieties("Fl(4)"), premise=lambda X, u, v: False))


def test_classical_rows_have_room_for_classical_terms(drawn, smallest):
    """``l(u) + l(v) <= dim X``, up to equality, also together with a premise."""
    X = Fl(5)
    examples = drawn(rows(Varieties(X), classical=True), 200)
    assert max(row.u.length + row.v.length for row in examples) == X.dim
    assert len({row.u.length for row in examples}) > 7
    both = drawn(rows(Varieties(X), classical=True, premise=lambda X, u, v: u.length >= 7))
    assert all(row.u.length >= 7 and row.u.length + row.v.length <= X.dim for row in both)
    assert smallest(rows(Varieties(X), classical=True), lambda row: row.v.length >= 7) == Row(X, X.identity, X.of_length(7)[0])


@pytest.mark.parametrize(
    ("name", "positive_degree", "large", "terms"),
    [
        ("Fl(4)", 0.70, 0.0, 2.2),  # 75 %, 0 and 2.0 with all rows alike
        ("Fl(5)", 0.85, 0.02, 6.0),  # 89 %, 0.17 % and 4.4
        ("Fl(6)", 0.82, 0.20, 18),  # 96 %, 7.5 % and 13
        ("Gr(3,6)", 0.65, 0.08, 2.0),  # 70 %, 1.0 % and 1.6
    ],
)
def test_bias(drawn, name, positive_degree, large, terms):
    """Rows with a term of positive degree, rows with a coefficient of 2 or more, terms in a row: at least these (computed)."""
    products = [product(row.u, row.v) for row in drawn(rows(Varieties(name)), 300)]
    count = len(products)
    assert sum(any(any(d) for _, d in terms) for terms in products) >= positive_degree * count
    assert sum(max(terms.values()) >= 2 for terms in products) >= large * count
    assert sum(map(len, products)) >= terms * count


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ({"on": "Grassmannians"}, "expected a family for on, got on='Grassmannians'"),
        ({"premise": True}, r"expected a function of \(X, u, v\) for premise, got premise=True"),
        ({"classical": None}, "expected True or False for classical, got classical=None"),
        ({"max_n": 1}, "expected an integer of 2 or more for max_n, got max_n=1"),
    ],
)
def test_wrong_arguments_are_refused_at_once(arguments, message):
    """The error names the argument."""
    with pytest.raises(InvalidArgument, match=message):
        rows(**{"on": Grassmannians(), **arguments})
