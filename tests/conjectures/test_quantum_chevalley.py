"""Quantum Chevalley on every G/P."""

from collections import Counter

import pytest
import quantum_chevalley
from definitions import monk
from root_definitions import chevalley, degree, top_weight

from conjcheck import LG, OG, Fl, FlagVariety, Gr, HomogeneousSpaces

RULE = quantum_chevalley.quantum_chevalley


def times(X, i, vector):
    """``sigma_{s_i}`` times a vector ``{(class, d): coefficient}``, by the rule."""
    result = Counter()
    for (u, d), coefficient in vector.items():
        for (w, step), factor in RULE(X, X.schubert(word=(i,)), u).items():
            result[w, tuple(map(sum, zip(d, step, strict=True)))] += coefficient * factor
    return result


def one(X):
    """The vector 1."""
    return Counter({(X.identity, (0,) * len(X.marked)): 1})


def by_words(name, i, word):
    """``sigma_{s_i} * sigma_word``, as ``{"word q-degrees": coefficient}``."""
    X = FlagVariety(name)
    found = RULE(X, X.schubert(word=(i,)), X.schubert(word=tuple(map(int, word))))
    return {" ".join(("".join(map(str, w.word)), *(f"q{j}^{e}" for j, e in zip(X.marked, d, strict=True) if e))): c
            for (w, d), c in found.items()}  # fmt: skip


def test_projective_line():
    """``pt * pt = q`` on the projective line."""
    assert by_words("Gr(1,2)", 1, "1") == {" q1^1": 1}


def test_symplectic_flags_of_rank_two():
    """Products of divisors on Sp4/B, alpha_1 short (computed)."""
    assert by_words("C2/B", 1, "1") == {"21": 1, " q1^1": 1}
    assert by_words("C2/B", 2, "2") == {"12": 2, " q2^1": 1}
    assert by_words("C2/B", 1, "121") == {"12 q1^1": 1, " q1^1 q2^1": 1}


def test_flags_of_g2():
    """Products of divisors on G2/B, alpha_1 short (computed)."""
    assert by_words("G2/B", 1, "1") == {"21": 1, " q1^1": 1}
    assert by_words("G2/B", 2, "2") == {"12": 3, " q2^1": 1}
    assert by_words("G2/B", 1, "121") == {"2121": 1, "12 q1^1": 1, " q1^1 q2^1": 1}
    assert by_words("G2/B", 2, "121") == {"1212": 1, "2121": 2, " q1^1 q2^1": 1}
    assert by_words("G2/B", 1, "21212") == {"121212": 1, " q1^1 q2^2": 1}
    assert by_words("G2/B", 2, "21212") == {"2121 q2^1": 1, " q1^1 q2^2": 2}


def test_three_dimensional_quadric():
    """``h h = 2 s2, h s2 = s21 + q, h s21 = q h`` on the quadric Q^3 = LG(2,4) (Kresch, Tamvakis 2003, from memory)."""
    X = LG(2, 4)
    h, s2, point = (X.schubert(partition=shape) for shape in ((1,), (2,), (2, 1)))
    assert RULE(X, h, h) == {(s2, (0,)): 2}
    assert RULE(X, h, s2) == {(point, (0,)): 1, (X.identity, (1,)): 1}
    assert RULE(X, h, point) == {(h, (1,)): 1}


def test_type_a_is_monk():
    """On Fl(n) the rule is quantum Monk: Fomin, Gelfand and Postnikov (1997)."""
    for X in (Fl(2), Fl(3), Fl(4)):
        for i in X.marked:
            for u in X.classes:
                found = RULE(X, X.schubert(word=(i,)), u)
                assert set(monk(u.permutation, i)) == {(w.permutation, d) for w, d in found}
                assert set(found.values()) == {1}


@pytest.mark.parametrize("rank", [1, 2, 3])
def test_every_row_is_the_formula_on_weights(rank):
    """Sets of roots and orbits of weights give the same products, on every G/P up to rank 3."""
    for X in HomogeneousSpaces().of_rank(rank):
        for i in X.marked:
            for u in X.classes:
                assert RULE(X, X.schubert(word=(i,)), u) == chevalley(X, i, u)


@pytest.mark.parametrize("name", ["D4/P2", "D4/P3,4", "F4/P1", "F4/P4", "E6/P1", "E6/P2"])
def test_larger_rows_are_the_formula_on_weights(name):
    """The same in types D, E and F."""
    X = FlagVariety(name)
    for i in X.marked:
        for u in X.classes:
            assert RULE(X, X.schubert(word=(i,)), u) == chevalley(X, i, u)


@pytest.mark.parametrize("name", ["G2/B", "B3/B", "C3/P1,3", "D4/P1,4", "Fl(1,3;4)", "F4/P1,4"])
def test_divisors_commute(name):
    """``sigma_{s_i} * (sigma_{s_j} * sigma_u)`` does not depend on the order of i and j."""
    X = FlagVariety(name)
    for u in X.classes:
        start = Counter({(u, (0,) * len(X.marked)): 1})
        for i in X.marked:
            for j in X.marked:
                assert times(X, i, times(X, j, start)) == times(X, j, times(X, i, start))


def classical_degree(X):
    """The coefficient of the point, without q, in the power of the sum of the divisors."""
    vector = one(X)
    for _ in range(X.dim):
        total = Counter()
        for i in X.marked:
            total.update({key: c for key, c in times(X, i, vector).items() if not any(key[1])})
        vector = total
    return vector[X.point, (0,) * len(X.marked)]


def test_degrees():
    """The degree of G/P: ``N! prod <lambda, alpha^vee> / <rho, alpha^vee>`` (Borel, Hirzebruch)."""
    for name in ("Gr(2,5)", "Fl(1,3;4)", "Q^5", "Q^6", "C3/P1,3", "G2/B", "B3/P2", "D4/P2", "F4/P1", "F4/P4", "E6/P2"):
        X = FlagVariety(name)
        assert classical_degree(X) == degree(X, top_weight(X))


def test_published_degrees():
    """Gr(3,6) 42; OG(n,2n+1) 1, 2, 12, 286 (OEIS A003121); E6/P1 78 and E7/P7 13110 (from memory)."""
    assert classical_degree(Gr(3, 6)) == 42
    assert [classical_degree(OG(n, 2 * n + 1)) for n in (2, 3, 4, 5)] == [1, 2, 12, 286]
    assert classical_degree(FlagVariety("E6/P1")) == 78
    assert classical_degree(FlagVariety("E7/P7")) == 13110


def test_cayley_plane():
    """``h^27 = 270 q h^15 + 27 q^2 h^3`` on E6/P1.

    That is what is left of the presentation ``3 h s^2 - 6 h^5 s + 2 h^9 = 0, s^3 - 12 h^8 s + 5 h^12 = q`` (Chaput, Manivel and Perrin,
    Transform. Groups 13 (2008), from memory) without s: h is 0, three times, or ``s = h^4 (1 + t)`` with ``t^2 = 1/3`` and
    ``q = -(5 + 26 t / 3) h^12``, and the product over both t is ``-(h^24 - 270 q h^12 - 27 q^2) / 27``.
    """
    X = FlagVariety("E6/P1")
    powers = [one(X)]
    for _ in range(27):
        powers.append(times(X, 1, powers[-1]))
    expected = Counter()
    for factor, e, k in ((270, 1, 15), (27, 2, 3)):
        expected.update({(w, (d + e,)): factor * c for (w, (d,)), c in powers[k].items()})
    assert powers[27] == expected


def test_premise():
    """The rule speaks of divisor classes in the first place, and of them only."""
    X = FlagVariety("G2/B")
    assert [u.word for u in X.classes if RULE.premise(X, u, X.point)] == [(1,), (2,)]
