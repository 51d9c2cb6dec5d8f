"""Localisation against the other engines, and against published values of spaces that they do not reach."""

import random
from collections import Counter

import numpy as np
import pytest

from conjcheck import Case, Fl, FlagVariety, Gr, product
from conjcheck.errors import OutOfReach
from conjcheck.geometry.case import outcomes, rows
from conjcheck.geometry.families import PartialFlags
from conjcheck.oracle import ENGINES, witnesses
from conjcheck.oracle.chevalley import chevalley
from conjcheck.oracle.coordinates import Numbers
from conjcheck.oracle.localisation import Localisation, localisation
from conjcheck.oracle.residues import inverses, primes, vandermonde


def word(X, *letters):
    return X.schubert(word=letters)


def products(X, pairs):
    """Products by localisation alone, as text."""
    return [str(product(word(X, *u), word(X, *v), engine="localisation")) for u, v in pairs]


@pytest.mark.parametrize("X", list(PartialFlags().up_to(4)), ids=str)
def test_agrees_with_the_recursion_up_to_n_4(X):
    """On every flag variety inside C^4 the two engines give the same products: all of them, on Fl(4) forty at random."""
    pairs = list(rows(X))
    for row in pairs if len(pairs) < 200 else random.Random(4).sample(pairs, 40):
        assert product(row.u, row.v, engine="localisation") == product(row.u, row.v, engine="recursion")


@pytest.mark.parametrize(("X", "count"), [(Gr(2, 6), 40), (Gr(3, 7), 20), (Fl(1, 4, n=5), 15), (Fl(2, 4, n=6), 2)], ids=str)
def test_agrees_with_the_recursion_further_out(X, count):
    """So they do on random products of larger spaces."""
    chooser = random.Random(str(X))
    for _ in range(count):
        u, v = chooser.choices(X.classes, k=2)
        assert product(u, v, engine="localisation") == product(u, v, engine="recursion")


def test_agrees_with_the_closed_formula():
    """On Gr(5,10), where there is no recursion, it agrees with the formula of Bertram, Vafa and Intriligator."""
    chooser = random.Random(10)
    for _ in range(3):
        u, v = chooser.choices(Gr(5, 10).classes, k=2)
        assert product(u, v, engine="localisation") == product(u, v, engine="vafa-intriligator")


def test_g2():
    """G2/B, alpha_1 short (computed by two independent programs, no published source)."""
    X = FlagVariety("G2/B")
    pairs = [((1,), (1,)), ((2,), (2,)), ((2,), (1, 2, 1)), ((1,), (2, 1, 2, 1, 2)), ((2,), (2, 1, 2, 1, 2))]
    assert products(X, pairs) == [
        "sigma<2.1> + q^(1,0) sigma<>",
        "3 sigma<1.2> + q^(0,1) sigma<>",
        "sigma<1.2.1.2> + 2 sigma<2.1.2.1> + q^(1,1) sigma<>",
        "sigma<1.2.1.2.1.2> + q^(1,2) sigma<>",
        "q^(0,1) sigma<2.1.2.1> + 2 q^(1,2) sigma<>",
    ]


def test_sp4():
    """Sp4/B, alpha_1 short (computed by two independent programs, no published source)."""
    X = FlagVariety("C2/B")
    point = X.point.word
    pairs = [((1,), (1,)), ((2,), (2,)), ((2, 1), (2, 1)), (point, point)]
    found = [product(word(X, *u), word(X, *v), engine="localisation") for u, v in pairs]
    assert [{(w.word, d): n for (w, d), n in terms.items()} for terms in found] == [
        {((2, 1), (0, 0)): 1, ((), (1, 0)): 1},
        {((1, 2), (0, 0)): 2, ((), (0, 1)): 1},
        {((1, 2), (1, 0)): 2, ((), (1, 1)): 1},
        {((2, 1), (1, 2)): 1, ((), (2, 2)): 1},
    ]


def test_e6():
    """The relations of E6/P1, 3 h s^2 - 6 h^5 s + 2 h^9 = 0 and s^3 - 12 h^8 s + 5 h^12 = q (from memory).

    Chaput, Manivel, Perrin, Quantum cohomology of minuscule homogeneous spaces, Transform. Groups 13 (2008); s = sigma_{2431}.
    """
    X = FlagVariety("E6/P1")
    h, s = X.classes[1], word(X, 2, 4, 3, 1)

    def times(terms, v):
        total = {}
        for (w, (d,)), n in terms.items():
            for (x, (e,)), m in product(w, v, engine="localisation").items():
                total[x, (d + e,)] = total.get((x, (d + e,)), 0) + n * m
        return total

    def power(h_power, s_power):
        terms = {(X.identity, (0,)): 1}
        for factor in [h] * h_power + [s] * s_power:
            terms = times(terms, factor)
        return terms

    def combination(*parts):
        total = {}
        for c, terms in parts:
            for key, n in terms.items():
                total[key] = total.get(key, 0) + c * n
        return {key: n for key, n in total.items() if n}

    assert combination((3, power(1, 2)), (-6, power(5, 1)), (2, power(9, 0))) == {}
    assert combination((1, power(0, 3)), (-12, power(8, 1)), (5, power(12, 0))) == {(X.identity, (1,)): 1}


@pytest.mark.parametrize(
    ("name", "degree"), [("E6/P1", 78), ("E7/P7", 13110), ("D5/P5", 12), ("B3/P3", 2), ("C3/P3", 16), ("D4/P1", 2)]
)
def test_degrees_of_minuscule_embeddings(name, degree):
    """Multiplying by the divisor up to the top gives the degree (standard values, from memory)."""
    X = FlagVariety(name)
    engine, h = localisation(X), X.classes[1]
    total = {X.identity: 1}
    for _ in range(X.dim):
        after = {}
        for w, n in total.items():
            for (x, d), m in engine.row(h, w).items():
                if not any(d):
                    after[x] = after.get(x, 0) + n * m
        total = after
    assert total == {X.point: degree}


def test_laws_on_e8():
    """On E8/P8 products commute, are S3-symmetric, and the unit is the unit."""
    X = FlagVariety("E8/P8")
    u, v = X.classes[60], X.classes[77]
    terms = product(u, v)
    assert product(v, u) == terms
    assert product(X.identity, u) == {(u, (0,)): 1}
    for (w, d), n in list(terms.items())[:3]:
        assert product(u, w.dual)[v.dual, d] == n


def test_it_is_a_witness():
    """The value of a counterexample is confirmed by localisation, which has nothing in common with the recursion."""
    found = dict(witnesses(Case.parse("Fl(5): [21543] * [21543] -> [51234], q^(0,0,1,1)")))
    assert found["engine localisation"] == 2
    assert set(found.values()) == {2}


def test_bounds_hold_and_are_not_idle():
    """Every constant of Gr(3,6) is at most the bound that its residue is held against."""
    X = Gr(3, 6)
    engine = localisation(X)
    for row in rows(X):
        assert max(product(row.u, row.v).values()) <= engine.bound(row.u.index, row.v.index)


def test_several_primes_when_the_bound_asks_for_them(monkeypatch):
    """With a bound beyond one prime the residues modulo several primes are put together, to the same constants."""
    X = Gr(2, 4)
    engine = localisation(X)
    monkeypatch.setattr(engine, "bound", lambda u, v: 2**70)
    for row in rows(X):
        assert engine.row(row.u, row.v) == product(row.u, row.v)


def test_where_it_is_alone_and_symmetry_says_nothing():
    """For u = v = w^vee the symmetry asks the same question; a witness is found all the same, with other numbers."""
    X = FlagVariety("E7/P7")
    u = X.schubert(word=(2, 5, 4, 3, 1, 7, 6, 5, 4, 2, 3, 4, 5, 6, 7))
    case = next(Case(X, u, u, w, d) for w, d in product(u, u) if w.dual is u)
    assert witnesses(case) == [("localisation at other numbers", 6)]
    other = next(Case(X, u, v, w, d) for v in X.classes[20:] for w, d in product(u, v) if w.dual is v is not u)
    assert witnesses(other) == [("S3-symmetry", product(other.u, other.v)[other.w, other.d])]


def test_out_of_reach():
    """Too many classes, or too many powers of too many q's, are refused with the reason."""
    assert ENGINES["localisation"].refuses(FlagVariety("F4/B")) == "F4/B has 1,152 classes, localisation stops at 1,000"
    X = Fl(6)
    with pytest.raises(OutOfReach, match="modular multiplications"):
        product(X.point, X.point, engine="localisation")


def test_arithmetic_modulo_a_prime():
    """Inverses and the Vandermonde system are those of the field."""
    (p, q) = primes(2)
    assert (p, q) == (2**31 - 1, 2147483629)
    values = np.array([1, 2, 12345, p - 1], dtype=np.int64)
    assert (values * inverses(values, p) % p == 1).all()
    nodes, solution = [3, 5, 11], [7, 0, p - 2]
    sums = np.array(
        [[sum(x * pow(node, k, p) for node, x in zip(nodes, solution, strict=True)) % p] for k in range(3)], dtype=np.int64
    )
    assert vandermonde(nodes, sums, p)[:, 0].tolist() == solution


@pytest.mark.parametrize("name", ["Fl(4)", "B4/P2,3", "D6/P3", "E8/P8"])
def test_bounds_are_those_of_unlimited_integers(name):
    """``D^l(u) * sigma_v`` at q = 1 in Python integers, by the Chevalley terms of the recursion; on E8/P8 it outgrows 62 bits."""
    X = FlagVariety(name)
    for u, v in ((X.point, X.point), (X.classes[len(X.classes) // 2], X.point), (X.classes[3], X.classes[7])):
        exact = {v.index: 1}
        for _ in range(u.length):
            following = Counter()
            for z, count in exact.items():
                for w, _, coefficients in chevalley(X).terms(z):
                    following[w] += count * sum(coefficients)
            exact = following
        most = max(exact.values())
        assert most <= localisation(X).bound(u.index, v.index) <= most + most // 1000


def test_residues_are_put_together_beyond_one_prime(monkeypatch):
    """A constant of 100 bits, handed in as its residues, comes out whole: as many primes are used as the bound asks for."""
    X = Gr(2, 4)
    engine, huge = localisation(X), 3**64 + 5
    asked = set()

    def residues(p, *rest, **choices):
        asked.add(p)
        return {(X.point, (0,)): huge % p}

    monkeypatch.setattr(engine, "bound", lambda u, v: huge)
    monkeypatch.setattr(engine, "_residues", residues)
    assert engine.row(X.identity, X.point) == {(X.point, (0,)): huge}
    assert len(asked) == 4


def test_eigenvalues_are_kept_apart():
    """In a small field numbers often coincide; those that are chosen never let two eigenvalues do so."""
    for seed in range(60):
        values = Numbers(Gr(2, 4), 97, seed).values
        assert len(set(values.tolist())) == 6
    with pytest.raises(AssertionError, match="no numbers that separate"):
        Numbers(Gr(2, 4), 5, 0)


def test_work_is_what_the_loops_do():
    """Points times pairs of powers of z times the square table of classes: on ``Gr(2,4)`` up to ``q^2`` once 3 * 4 * 6 * 6."""
    assert localisation(Gr(2, 4)).work(8) == 3 * 4 * 6 * 6
    assert localisation(Fl(3)).work(4) == 3 * (3 * 4 * 6 * 6)


@pytest.mark.parametrize("name", ["E7/P7", "Gr(3,7)", "F4/P1", "Fl(1,3;5)", "C3/P1,2", "G2/B", "Fl(4)"])
def test_a_constant_alone_is_that_of_its_product(name):
    """Every constant of random products, zeros and all powers of q included, asked for alone in any order, is that of the row."""
    X, chooser = FlagVariety(name), random.Random(name)
    engine, asked = Localisation(X), []
    for _ in range(8):
        u, v = chooser.choices(X.classes, k=2)
        row = product(u, v)
        possible = outcomes(X, u.length + v.length)
        asked += [(u, v, w, d, row.get((w, d), 0)) for w, d in chooser.sample(possible, min(12, len(possible)))]
        asked += [(u, v, w, d, n) for (w, d), n in chooser.sample(list(row.items()), min(8, len(row)))]
    chooser.shuffle(asked)
    assert len({d for *_, d, n in asked if n}) > 1
    for u, v, w, d, n in asked:
        assert engine.constant(u, v, w, d) == n


def test_a_constant_off_the_degree_axiom_is_zero():
    """What the degree axiom forbids, or a negative power of q, is 0 without any work."""
    X = Fl(3)
    engine = Localisation(X)
    u, v = X.classes[1], X.classes[2]
    assert engine.constant(u, v, X.point, (0, 0)) == 0
    assert engine.constant(u, v, X.classes[3], (1, -1)) == 0
    assert not engine._points


def test_a_constant_from_several_primes(monkeypatch):
    """With a bound beyond one prime a constant alone is put together from its residues, too; one beyond its bound is noticed."""
    X = Gr(3, 6)
    engine, u = Localisation(X), X.schubert(partition=(2, 1))
    monkeypatch.setattr(engine, "bound", lambda u, v: 2**70)
    assert engine.constant(u, u, X.schubert(partition=(3, 2, 1)), (0,)) == 2
    assert len({p for p, *_ in engine._points}) == 3
    monkeypatch.setattr(engine, "bound", lambda u, v: 1)
    with pytest.raises(AssertionError, match="exceeds the bound"):
        engine.constant(u, u, X.schubert(partition=(3, 2, 1)), (0,))


def test_points_are_shared_and_deepened():
    """A lower power of q is read off a point that is there; a higher one replaces it by a deeper point."""
    X = Gr(2, 5)
    engine, top = Localisation(X), X.point
    engine.constant(X.identity, X.identity, X.identity, (0,))
    (first,) = engine._points.values()
    assert first.depth == 0
    expected = product(top, top)
    assert engine.row(top, top) == expected
    (second,) = engine._points.values()
    assert second.depth == 2 * top.length // X.n
    for (w, d), n in expected.items():
        assert engine.constant(top, top, w, d) == n
    assert list(engine._points.values()) == [second]
