"""Short expressions: every step is an identity, every class is reached before it is used, and few steps are needed."""

import pytest

from conjcheck import Case, FlagVariety
from conjcheck.evidence.expression import Step, Term, by_relations, divides, element, expression, lifted
from conjcheck.oracle.chevalley import chevalley
from conjcheck.oracle.comparison import comparison
from conjcheck.oracle.relations import relation
from conjcheck.recheck import WeylGroup


def holds(X, steps, target, top):
    """Whether all steps are identities modulo the powers of q that do not divide ``q^top``, in order, and end in the target."""
    known, zero = {0}, (0,) * len(top)
    for step in steps:
        total = {}
        for L, z in step.parts:
            assert z in known
            for y, d, coroot in chevalley(X).terms(z):
                if divides(d, top):
                    total[y, d] = total.get((y, d), 0) + sum(a * b for a, b in zip(L, coroot, strict=True))
        for term in step.minus:
            assert term.z in known
            total[term.z, term.d] = total.get((term.z, term.d), 0) - term.count
        assert {key: count for key, count in total.items() if count} == {(step.x, zero): step.times}
        assert step.times > 0
        assert step.x not in known
        known.add(step.x)
    return target in known


def found(X, target, top, **options):
    """The expression of a class by its index."""
    return expression(chevalley(X).terms, 0, target, top, lambda z: X.classes[z].length, complete=X.is_complete, **options)


@pytest.mark.parametrize("name", ["Fl(4)", "B2/B", "B3/B", "C3/B", "G2/B", "D4/B"])
def test_on_complete_flags(name):
    """On G/B every class is reached, in at least as many steps as its length, with all powers of q and with none."""
    X = FlagVariety(name)
    for top in ((0,) * X.rank, (9,) * X.rank):
        for u in X.classes[:: max(len(X.classes) // 24, 1)]:
            steps = found(X, u.index, top)
            assert holds(X, steps, u.index, top)
            assert len(steps) >= u.length


@pytest.mark.parametrize(("name", "reached"), [("Gr(1,5)", 5), ("Q^5", 6), ("Gr(2,4)", 2), ("Fl(1,3;4)", 12), ("E6/P1", 4)])
def test_on_partial_flags(name, reached):
    """On G/P some classes may not be reached by single products with divisors; those that are reached are right."""
    X = FlagVariety(name)
    top = (2,) * len(X.marked)
    steps = {u: found(X, u.index, top) for u in X.classes}
    assert sum(how is not None for how in steps.values()) == reached
    assert all(holds(X, how, u.index, top) for u, how in steps.items() if how is not None)


def test_shorter_than_the_recursion():
    """The search needs fewer steps than the relations of the recursion, here by more than a third in all."""
    X, top = FlagVariety("Fl(5)"), (9,) * 4
    short = long = 0
    for u in X.classes[::5]:
        steps = by_relations(chevalley(X).terms, 0, u.index, top, lambda x: relation(X, x).parts)
        assert holds(X, steps, u.index, top)
        short, long = short + len(found(X, u.index, top)), long + len(steps)
    assert 3 * short < 2 * long


def test_the_search_is_bounded():
    """After the given number of products the search gives up."""
    X = FlagVariety("Fl(5)")
    assert found(X, X.point.index, (9,) * 4, most=20) is None


def test_a_step_has_a_positive_factor():
    """A step is turned round so that its class stands with a positive factor."""
    X = FlagVariety("Fl(3)")
    s1, s2, s12 = (X.schubert(word=word).index for word in ((1,), (2,), (1, 2)))
    step = Step.of(chevalley(X).terms, s12, [((-1, 0), s2)], (0, 0))
    s21 = X.schubert(word=(2, 1)).index
    assert step == Step(s12, 1, (((1, 0), s2),), (Term(1, (0, 0), s21),))
    assert {s1, s2, s12, s21} == {1, 2, 3, 4}


@pytest.mark.parametrize("name", ["Gr(2,5)", "Fl(1,3;4)", "LG(3,6)", "OG(3,7)", "G2/P1", "D4/P1,3"])
def test_the_lift(name):
    """A lifted case lies at the class that the oracle's comparison reads, for all classes and several degrees."""
    X = FlagVariety(name)
    group, ring = WeylGroup(X.kind.letter, X.rank), comparison(X).ring
    for size in (0, 1, 2):
        d = (size,) * len(X.marked)
        for w in X.classes:
            top, target = lifted(group, Case(X, X.identity, X.identity, w, d))
            index = ring.X.schubert(word=group.word(target)).index
            assert comparison(X).read({index + ring.pack(top): 1}) == {(w, d): 1}


def test_elements():
    """An element is the product of the letters of its word, in the order of composition."""
    group = WeylGroup("A", 2)
    assert element(group, (1, 2)) == group.times(element(group, (1,)), 1)
    assert element(group, (1, 2, 1)) == element(group, (2, 1, 2))
