"""Features of cases: each against an independent definition, published counts, or its own Python expression."""

from itertools import combinations, permutations
from math import comb, factorial

import numpy as np
import pytest

from conjcheck import LG, Fl, FlagVariety, Gr, product
from conjcheck.errors import NotIndependent
from conjcheck.testing.features import FEATURES, Cases, feature_values
from conjcheck.testing.limits import CallLimit
from conjcheck.testing.own_features import UnusableFeature, own_features
from conjcheck.testing.traits import TRAITS, bruhat, trait, trait_values

SPACES = (Gr(1, 3), Gr(2, 4), Gr(3, 5), Fl(3), Fl(4), Fl(1, 3, n=4), LG(3, 6), FlagVariety("OG(2,5)"), FlagVariety("G2/P1"))


def some_cases(X, *, most=400):
    """Some cases of X, every class among them, degrees 0 to 2, with the true constants of the rows."""
    chooser = np.random.default_rng(7)
    size, m = len(X.classes), len(X.marked)
    u, v, w = (chooser.integers(0, size, most) for _ in range(3))
    u[:size] = np.arange(min(size, most))
    d = chooser.integers(0, 3, (most, m))
    d[::3] = 0
    return Cases(X, u, v, w, d, chooser.integers(0, 4, most), chooser.integers(1, 4, most))


def count(name, X):
    """How many classes have a trait."""
    return int(trait_values(trait(name), X).sum())


@pytest.mark.parametrize("X", SPACES, ids=str)
def test_expressions_say_what_the_features_compute(X):
    """Every Python expression of a feature, evaluated case by case with public attributes, gives the values of the feature."""
    cases, seen = some_cases(X), 0
    for feature in FEATURES:
        values = feature.of(cases)
        if values is None or not feature.code:
            continue
        seen += 1
        code = compile(feature.code, feature.name, "eval")
        for k in range(0, len(cases), 5):
            u, v, w = (X.classes[int(index[k])] for index in (cases.u, cases.v, cases.w))
            names = {"X": X, "u": u, "v": v, "w": w, "d": tuple(cases.d[k].tolist()), "combinations": combinations}
            assert eval(code, names) == values[k], (feature.name, feature.code, k)
    assert seen > 60


def test_values_are_well_typed():
    """A feature has one value per case: truth values where it says yes and no, integers or words elsewhere; names are unique."""
    for X in SPACES:
        cases = some_cases(X)
        for feature in FEATURES:
            values = feature_values(feature, [cases, cases])
            if values is None:
                continue
            assert values.shape == (2 * len(cases),), feature.name
            assert (values.dtype == bool) == bool(feature.no), feature.name
            assert values.dtype.kind in "biU", feature.name
    assert len({feature.name for feature in FEATURES}) == len(FEATURES)
    assert len({one.name for one in TRAITS}) == len(TRAITS)
    assert feature_values(next(f for f in FEATURES if f.name == "u is a hook"), [some_cases(Fl(3))]) is None


def test_counts_of_pattern_classes():
    """Numbers of permutations by pattern, n = 2, 3, ...: published counts (OEIS A005802, A000108, A032351, A000079; from memory)."""
    catalan = [comb(2 * n, n) // (n + 1) for n in range(2, 7)]
    assert [count("vexillary", Fl(n)) for n in range(2, 7)] == [2, 6, 23, 103, 513]
    for name in ("dominant", "321", "213", "231", "312"):
        assert [count(name, Fl(n)) for n in range(2, 7)] == catalan
    assert [count("smooth", Fl(n)) for n in range(2, 7)] == [2, 6, 22, 88, 366]
    assert [count("1432", Fl(n)) for n in range(2, 6)] == [2, 6, 23, 103]
    assert [count("involution", Fl(n)) for n in range(2, 7)] == [2, 4, 10, 26, 76]
    for name in ("grassmannian", "inverse-grassmannian"):
        assert [count(name, Fl(n)) for n in range(2, 7)] == [2**n - n for n in range(2, 7)]
    assert [count("keeps-n", Fl(n)) for n in range(2, 6)] == [factorial(n - 1) for n in range(2, 6)]


def test_patterns_against_the_definition():
    """Vexillary, smooth and the like agree with containment by the definition, entry by entry."""

    def contains(w, pattern):
        return any(
            all((entries[i] < entries[j]) == (pattern[i] < pattern[j]) for i, j in combinations(range(len(pattern)), 2))
            for entries in combinations(w, len(pattern))
        )

    X = Fl(5)
    found = {name: trait_values(trait(name), X) for name in ("vexillary", "smooth", "1324", "3142")}
    for u in X.classes:
        w = u.permutation
        assert found["vexillary"][u.index] == (not contains(w, (2, 1, 4, 3)))
        assert found["smooth"][u.index] == (not contains(w, (3, 4, 1, 2)) and not contains(w, (4, 2, 3, 1)))
        assert found["1324"][u.index] == (not contains(w, (1, 3, 2, 4)))
        assert found["3142"][u.index] == (not contains(w, (3, 1, 4, 2)))


@pytest.mark.parametrize(("k", "n"), [(1, 4), (2, 5), (3, 6), (4, 7)])
def test_counts_of_shapes(k, n):
    """In a box of k rows and n - k columns there are k (n - k) hooks and as many rectangles, besides the empty shape."""
    X = Gr(k, n)
    assert count("hook", X) == count("rectangle", X) == 1 + k * (n - k)
    assert count("row", X) == 1 + n - k
    assert count("column", X) == 1 + k
    assert int((trait_values(trait("empty-rows"), X) == 0).sum()) == comb(n - 1, k)
    assert count("seidel", X) == n


def test_squares_in_shapes():
    """The diagonal of a shape is the side of the largest square in it."""
    X = Gr(3, 7)
    for u, side in zip(X.classes, trait_values(trait("diagonal"), X), strict=True):
        assert side == max(j for j in range(4) if len(u.partition) >= j and all(part >= j for part in u.partition[:j]))


def test_the_bruhat_order():
    """It is the rank criterion, or the subword property; S_n has 3, 19, 213, 3781 pairs (OEIS A007767, from memory)."""
    assert [int(bruhat(Fl(n)).sum()) for n in range(2, 6)] == [3, 19, 213, 3781]
    X = Fl(4)

    def ranks(w):
        return [sum(w[a] > j for a in range(i)) for i in range(1, 5) for j in range(1, 5)]

    for u in X.classes:
        for w in X.classes:
            assert bruhat(X)[w.index, u.index] == all(
                a <= b for a, b in zip(ranks(u.permutation), ranks(w.permutation), strict=True)
            )
    for Y in (LG(3, 6), FlagVariety("G2/B"), FlagVariety("D4/P2")):
        for w in Y.classes:
            below = {Y.identity}
            for letters in range(1, len(w.word) + 1):
                for word in set(combinations(w.word, letters)):
                    try:
                        below.add(Y.schubert(word=word))
                    except ValueError:
                        continue
            assert {Y.classes[k] for k in np.flatnonzero(bruhat(Y)[w.index])} == below
    assert bruhat(Fl(7)) is None


def named(name):
    return next(feature for feature in FEATURES if feature.name == name)


@pytest.mark.parametrize("X", [Gr(2, 5), Fl(4), LG(3, 6)], ids=str)
def test_features_of_rows_against_their_definitions(X):
    """A classical product is not 0 iff it is said so; descents overlap, are separated or equal by their definitions."""
    size, m = len(X.classes), len(X.marked)
    u, v = np.divmod(np.arange(size * size), size)
    cases = Cases(X, u, v, 0 * u, np.zeros((size * size, m), dtype=np.int64))
    survives = named("the classical product u * v is not 0").of(cases)
    overlap = named("a descent of u is one of v").of(cases)
    equal = named("u and v have the same descents").of(cases)
    separated = next(f for f in FEATURES if f.name.startswith("the descents of u and v are separated")).of(cases)
    for k in range(size * size):
        a, b = X.classes[int(u[k])], X.classes[int(v[k])]
        assert survives[k] == any(not any(d) for _, d in product(a, b))
        assert overlap[k] == bool(set(a.descents) & set(b.descents))
        assert equal[k] == (set(a.descents) == set(b.descents))
        places = range(X.rank + 2)
        sides = [(a.descents, b.descents), (b.descents, a.descents)]
        assert separated[k] == any(all(i <= p for i in x) and all(i >= p for i in y) for x, y in sides for p in places)


def test_degrees():
    """The q's that occur are counted, and stand side by side or not."""
    d = np.array(list(permutations((0, 0, 1, 2))))
    zero = np.zeros(len(d), dtype=np.int64)
    cases = Cases(Fl(5), zero, zero, zero, d)
    assert set(named("the number of q's that occur").of(cases).tolist()) == {2}
    assert set(named("|d|").of(cases).tolist()) == {3}
    assert not named("every q occurs").of(cases).any()
    side_by_side = named("the q's that occur stand side by side").of(cases)
    for entries, found in zip(d.tolist(), side_by_side.tolist(), strict=True):
        first, last = sorted(i for i, entry in enumerate(entries) if entry)
        assert found == (last == first + 1)


def test_features_of_the_user():
    """A user's feature gives its values; one that raises, mixes types or asks the oracle is unusable, with the reason."""
    cases = some_cases(Gr(2, 4))
    limit = CallLimit(5)

    def secretly(X, u, v, w, d):
        try:
            return len(product(u, v))
        except NotIndependent:
            return 0

    functions = {
        "l(u) is even": lambda X, u, v, w, d: u.length % 2 == 0,
        "how long": lambda X, u, v, w, d: u.length,
        "first step": lambda X, u, v, w, d: str(X.steps[0]),
        "broken": lambda X, u, v, w, d: 1 // 0,
        "mixed": lambda X, u, v, w, d: "a" if u.length else 0,
        "half": lambda X, u, v, w, d: 0.5,
        "asks": lambda X, u, v, w, d: len(product(u, v)),
        "asks secretly": secretly,
    }
    found = dict(zip(functions, own_features(functions, limit), strict=True))
    assert found["l(u) is even"].of(cases).tolist() == [X_u % 2 == 0 for X_u in trait_values(trait("length"), cases.X)[cases.u]]
    assert found["how long"].of(cases).dtype == np.int64
    assert found["first step"].of(cases).tolist() == ["2"] * len(cases)
    assert found["l(u) is even"].no == "not: l(u) is even"
    for name, reason in (
        ("broken", "ZeroDivisionError"),
        ("mixed", "the same everywhere"),
        ("half", "float"),
        ("asks", "oracle"),
        ("asks secretly", "oracle"),
    ):
        with pytest.raises(UnusableFeature, match=reason):
            found[name].of(cases)
