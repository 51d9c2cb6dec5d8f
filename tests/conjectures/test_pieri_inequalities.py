"""The inequalities of quantum Pieri: the first choices are the theorem, and each of the others is another statement."""

import pieri_inequalities
from definitions import check_grassmannian_row

from conjcheck import Case, Gr, Grassmannians
from conjcheck.geometry.case import outcomes

RULE = pieri_inequalities.pieri_inequalities


def value(text, **choice):
    """The value of a variant at a case."""
    case = Case.parse(text)
    return RULE.variant(**choice)(case.X, case.u, case.v, case.w, case.d)


def test_gr24():
    """The products of Gr(2,4) by one box and by two (Bertram, Adv. Math. 128 (1997), from memory)."""
    for text, expected in (
        ("(1) * (1) -> (2)", 1),
        ("(1) * (2,1) -> (2,2)", 1),
        ("(1) * (2,1) -> (), q^(1)", 1),
        ("(1) * (2,2) -> (1), q^(1)", 1),
        ("(2) * (1,1) -> (), q^(1)", 1),
        ("(2) * (1,1) -> (2,2)", 0),
        ("(2) * (2) -> (2,2)", 1),
        ("(2) * (2) -> (), q^(1)", 0),
        ("(2) * (2,2) -> (1,1), q^(1)", 1),
        ("(2) * (2,2) -> (2), q^(1)", 0),
    ):
        assert value(f"Gr(2,4): {text}") == expected


def test_every_row_agrees_with_roots_of_unity():
    """Every row in the premise up to n = 6 agrees with the formula of Bertram, Vafa and Intriligator."""
    for X in Grassmannians().up_to(6):
        for u in X.classes:
            for v in X.classes:
                if RULE.premise(X, u, v):
                    possible = outcomes(X, u.length + v.length)
                    check_grassmannian_row(X, u, v, {(w, d): n for w, d in possible if (n := RULE(X, u, v, w, d))})


def test_what_each_choice_does():
    """At one case for each choice the other values say something else."""
    assert [value("Gr(1,3): (2) * () -> (2)", along=along) for along in ("rows", "columns")] == [1, 0]
    assert [value("Gr(2,3): (1) * () -> (1)", apart=apart) for apart in (0, 1)] == [1, 0]
    assert [value("Gr(2,4): (2) * (2) -> (), q^(1)", taken=taken) for taken in (1, 0, 2)] == [0, 1, 0]
    assert [value("Gr(2,4): (1) * (2,1) -> (), q^(1)", taken=taken) for taken in (1, 0, 2)] == [1, 1, 0]
    assert [value("Gr(2,5): (1) * (2,2) -> (), q^(1)", spared=spared) for spared in (1, 0, 2)] == [0, 0, 1]
    assert [value("Gr(2,3): (1) * (1,1) -> (), q^(1)", spared=spared) for spared in (1, 0, 2)] == [1, 0, 1]
    assert [value("Gr(1,2): (1) * (1) -> (), q^(1)", highest=highest) for highest in (1, 0)] == [1, 0]


def test_conjugate_turns_a_shape():
    """Twice is nothing, and the number of boxes stays."""
    for u in Gr(3, 7).classes:
        assert pieri_inequalities.conjugate(pieri_inequalities.conjugate(u.partition)) == u.partition
        assert sum(pieri_inequalities.conjugate(u.partition)) == u.length
