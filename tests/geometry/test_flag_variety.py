"""Flag varieties and Schubert classes: dimensions, degrees, names, order, the four notations, identity and immutability."""

import copy
import pickle
from itertools import combinations, pairwise
from math import comb, factorial, prod

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from conjcheck.errors import NotationError, OutOfReach
from conjcheck.geometry.flag_variety import LG, MOST_CLASSES, OG, Fl, FlagVariety, Gr

A_NAME = (
    "expected a flag variety such as 'Fl(1,3;4)', 'Gr(2,4)', 'Fl(4)', 'P^3', 'LG(3,6)', 'IG(2,6)', 'OG(3,7)', 'Q^5' or 'A3/P1,3'"
)


@st.composite
def varieties(draw, most=6):
    """Flag varieties of type A, n first."""
    n = draw(st.integers(2, most))
    return Fl(*sorted(draw(st.sets(st.integers(1, n - 1), min_size=1))), n=n)


@st.composite
def classes(draw, most=6):
    """Schubert classes of type A."""
    return draw(st.sampled_from(draw(varieties(most)).classes))


# Number of classes and index c_1 = deg q ("standard" unless said otherwise); E8/P8 and the others as in the literature on G/P.
MAXIMAL_PARABOLICS = [
    ("E6/P1", 27, 12, 16),
    ("E7/P7", 56, 18, 27),
    ("E6/P2", 72, 11, 21),
    ("E7/P1", 126, 17, 33),
    ("E8/P8", 240, 29, 57),
    ("F4/P1", 24, 8, 15),
    ("F4/P4", 24, 11, 15),
    ("G2/P1", 6, 5, 5),
    ("G2/P2", 6, 3, 5),
]


@pytest.mark.parametrize(("name", "count", "index", "dim"), MAXIMAL_PARABOLICS)
def test_exceptional_maximal_parabolics(name, count, index, dim):
    """Numbers of classes, indices and dimensions of exceptional G/P with Picard number 1 (standard)."""
    X = FlagVariety(name)
    assert (len(X.classes), X.q_degrees, X.dim) == (count, (index,), dim)


@pytest.mark.parametrize("n", [2, 3, 4, 5])
def test_classical_families(n):
    """``LG(n,2n)``: index n+1; ``OG(n,2n+1)``: 2n; quadrics ``Q^m``: m; ``IG(2,2n)``: 2n-1 (standard)."""
    assert (FlagVariety(f"C{n}/P{n}").q_degrees, len(FlagVariety(f"C{n}/P{n}").classes)) == ((n + 1,), 2**n)
    assert (FlagVariety(f"B{n}/P{n}").q_degrees, len(FlagVariety(f"B{n}/P{n}").classes)) == ((2 * n,), 2**n)
    odd = FlagVariety(f"B{n}/P1")
    assert (odd.q_degrees, odd.dim, len(odd.classes)) == ((2 * n - 1,), 2 * n - 1, 2 * n)
    if n >= 4:
        even, spinor = FlagVariety(f"D{n}/P1"), FlagVariety(f"D{n}/P{n}")
        assert (even.q_degrees, even.dim, len(even.classes)) == ((2 * n - 2,), 2 * n - 2, 2 * n)
        assert (spinor.q_degrees, len(spinor.classes)) == ((2 * n - 2,), 2 ** (n - 1))
    if n >= 3:
        assert FlagVariety(f"C{n}/P2").q_degrees == (2 * n - 1,)


@settings(deadline=None)
@given(varieties(8))
def test_type_a_dimensions_degrees_and_counts(X):
    """``dim = sum of products of block sizes``, ``deg q_i = k_{i+1} - k_{i-1}``, multinomially many classes."""
    cuts = (0, *X.steps, X.n)
    blocks = [b - a for a, b in pairwise(cuts)]
    assert X.dim == sum(a * b for a, b in combinations(blocks, 2))
    assert X.q_degrees == tuple(cuts[i + 2] - cuts[i] for i in range(len(X.steps)))
    assert (X.marked, X.rank) == (X.steps, X.n - 1)
    if X.n <= 6:
        assert len(X.classes) == factorial(X.n) // prod(map(factorial, blocks))


def test_grassmannians_and_complete_flags():
    """``deg q = n`` on ``Gr(k, n)`` and 2 for every q of ``Fl(n)``; the two views of being so."""
    for n in range(2, 7):
        assert Fl(n).q_degrees == (2,) * (n - 1)
        assert Fl(n).is_complete
        assert Fl(n).dim == n * (n - 1) // 2
        for k in range(1, n):
            X = Gr(k, n)
            assert (X.q_degrees, X.dim, len(X.classes)) == ((n,), k * (n - k), comb(n, k))
            assert X.is_grassmannian
            assert X.is_complete == (n == 2)
    assert not Fl(1, 3, n=4).is_complete
    assert not Fl(1, 3, n=4).is_grassmannian
    assert not FlagVariety("C3/P1").is_grassmannian


@pytest.mark.parametrize(
    ("names", "steps", "n"),
    [
        (("Gr(2,4)", "Gr(2, 4)", "A3/P2", "Fl(2;4)"), (2,), 4),
        (("Fl(4)", "A3/B", "A3/P1,2,3", "Fl(1,2,3;4)"), (1, 2, 3), 4),
        (("Gr(1,4)", "P^3", "A3/P1"), (1,), 4),
        (("Fl(1,3;4)", "Fl(1, 3; 4)", "A3/P1,3"), (1, 3), 4),
        (("Gr(1,2)", "Fl(2)", "P^1", "A1/B", "A1/P1"), (1,), 2),
    ],
)
def test_all_names_of_one_variety_are_one_object(names, steps, n):
    """Each name gives the same object, its own name first, and so does the call with steps."""
    X = Fl(*steps, n=n)
    assert X.name == str(X) == names[0]
    assert all(FlagVariety(name) is X for name in names)
    assert repr(X) == f"FlagVariety({names[0]!r})"
    assert eval(repr(X)) is X


def test_other_types_have_names_too():
    """``B2/B`` and ``E6/P1,6`` name themselves; all nodes marked is a Borel subgroup."""
    assert FlagVariety("B2/P1,2") is FlagVariety("B2/B")
    assert FlagVariety("E6/P1,6").name == "E6/P1,6"
    assert FlagVariety("B2/B").is_complete


@settings(deadline=None)
@given(varieties(5))
def test_classes_are_in_the_one_order(X):
    """By length, then lexicographically in one-line notation; ``index`` is the place, ``of_length`` the slices."""
    keys = [(sum(a > b for a, b in combinations(u.permutation, 2)), u.permutation) for u in X.classes]
    assert keys == sorted(keys)
    assert [u.length for u in X.classes] == [length for length, _ in keys]
    assert [u.index for u in X.classes] == list(range(len(X.classes)))
    assert sum((X.of_length(length) for length in range(X.dim + 1)), ()) == X.classes
    assert X.of_length(-1) == X.of_length(X.dim + 1) == ()
    assert sorted(X.classes) == list(X.classes)
    assert (X.identity.length, X.point.length) == (0, X.dim)


@settings(deadline=None)
@given(classes())
def test_every_view_leads_back_to_the_class(u):
    """Permutation, string, word and partition give back the very same object."""
    X = u.variety
    assert X.schubert(permutation=u.permutation) is u
    assert X.schubert(string=u.string) is u
    assert X.schubert(word=u.word) is u
    assert len(u.word) == u.length
    assert u.descents == tuple(i for i in range(1, X.n) if u.permutation[i - 1] > u.permutation[i])
    if X.is_grassmannian:
        assert X.schubert(partition=u.partition) is u
        assert sum(u.partition) == u.length
        assert u in X.of_length(sum(u.partition))


@settings(deadline=None)
@given(classes())
def test_dual_classes(u):
    """The dual is an involution, has the complementary length, and is the minimal representative of ``w0 u W_P``."""
    X, dual = u.variety, u.dual
    assert dual.dual is u
    assert u.length + dual.length == X.dim
    assert dual.string == u.string[::-1]
    if X.is_grassmannian:
        k, wide = X.steps[0], X.n - X.steps[0]
        padded = (*u.partition, *[0] * k)[:k]
        assert dual.partition == tuple(wide - part for part in reversed(padded) if part < wide)


@pytest.mark.parametrize("name", ["G2/B", "G2/P1", "F4/P4", "E6/P1", "E6/P1,6"])
def test_words_are_the_notation_of_the_exceptional_types(name):
    """In types E, F, G a class is its reduced word: the text, and the order of the classes."""
    X = FlagVariety(name)
    assert X.notations == ("word",)
    for u in X.classes:
        assert str(u) == f"<{'.'.join(map(str, u.word))}>"
    assert sorted((u.length, u.word) for u in X.classes) == [(u.length, u.word) for u in X.classes]


@pytest.mark.parametrize("name", ["B2/B", "C3/P2", "D4/P1,3", "G2/B", "F4/P4", "E6/P1"])
def test_words_denote_classes_in_every_type(name):
    """Both ways, unique, as long as the class, with the last letter among the descents."""
    X = FlagVariety(name)
    for u in X.classes:
        assert X.schubert(word=u.word) is u
        assert len(u.word) == u.length
        assert not u.word or u.word[-1] in u.descents
        assert set(u.descents) <= set(X.marked)
    assert len({u.word for u in X.classes}) == len(X.classes)


@pytest.mark.parametrize(
    ("name", "word", "same"),
    [
        ("B2/B", (1, 2, 1, 2), (2, 1, 2, 1)),
        ("G2/B", (1, 2) * 3, (2, 1) * 3),
        ("C3/B", (1, 3), (3, 1)),
        ("D4/B", (1, 3, 4), (4, 3, 1)),
    ],
)
def test_any_reduced_word_will_do(name, word, same):
    """Two reduced words of one element give one class: braid relations hold."""
    assert FlagVariety(name).schubert(word=word) is FlagVariety(name).schubert(word=same)


def test_descents_in_b2():
    """In ``B2/B`` the class ``s1 s2`` has the right descent 2, ``s2 s1`` has 1, the point both."""
    X = FlagVariety("B2/B")
    descents = {u.word: u.descents for u in X.classes}
    assert descents == {
        (): (),
        (1,): (1,),
        (2,): (2,),
        (1, 2): (2,),
        (2, 1): (1,),
        (1, 2, 1): (1,),
        (2, 1, 2): (2,),
        (1, 2, 1, 2): (1, 2),
    }


def test_texts():
    """``(2,1)`` on a Grassmannian, ``[2143]`` in type A, dots from n = 10, else ``[1.-3.2]`` or a word, always behind ``sigma``."""
    assert str(Gr(2, 4).schubert(partition=(2, 1))) == "(2,1)"
    assert str(Gr(2, 4).identity) == "()"
    assert repr(Fl(1, 3, n=4).schubert(permutation=(2, 1, 4, 3))) == "sigma[2143]"
    assert str(Fl(1, 9, n=10).identity) == "[1.2.3.4.5.6.7.8.9.10]"
    assert str(FlagVariety("B2/B").schubert(word=(1, 2, 1))) == "[-1.2]"
    assert str(FlagVariety("C2/P1").identity) == "[1.2]"
    assert str(LG(3, 6).schubert(word=(2, 3))) == str(OG(3, 7).schubert(word=(2, 3))) == "(2)"
    assert str(OG(4, 8).point) == "(3,2,1)"
    assert str(FlagVariety("D4/P3").point) == "[4.-3.-2.1]"
    assert str(FlagVariety("G2/B").schubert(word=(1, 2, 1))) == "<1.2.1>"
    assert repr(FlagVariety("G2/B").identity) == "sigma<>"


@settings(deadline=None)
@given(classes())
def test_pickles_and_copies_are_the_same_object(u):
    """A class and its variety exist once, across pickle and copy."""
    for thing in (u, u.variety):
        assert pickle.loads(pickle.dumps(thing)) is thing
        assert copy.copy(thing) is thing
        assert copy.deepcopy(thing) is thing
    assert {u: 1}[u.variety.classes[u.index]] == 1


def test_nothing_can_be_changed():
    """Setting an old or a new attribute of a variety or a class is refused by name."""
    X = Gr(2, 4)
    for thing, word in ((X, "flag variety"), (X.point, "Schubert class")):
        for name in ("dim", "length", "colour"):
            with pytest.raises(AttributeError, match=f"a {word} is immutable; cannot set '{name}'"):
                setattr(thing, name, 1)


def test_varieties_are_ordered_as_the_cases_are():
    """Rank, number of marked nodes, dimension, type, marked nodes."""
    names = [
        "Gr(1,2)",
        "Gr(1,3)",
        "Gr(2,3)",
        "B2/P1",
        "B2/P2",
        "Fl(3)",
        "B2/B",
        "Gr(1,4)",
        "Gr(3,4)",
        "Gr(2,4)",
        "Fl(1,2;4)",
        "Fl(1,3;4)",
    ]
    ranked = sorted(map(FlagVariety, names))
    assert [X.sort_key[:3] for X in ranked] == sorted((X.rank, len(X.marked), X.dim) for X in ranked)
    assert [X.name for X in ranked if X.rank == 1] == ["Gr(1,2)"]
    assert [X.name for X in ranked if X.sort_key[:3] == (2, 1, 2)] == ["Gr(1,3)", "Gr(2,3)"]
    assert [X.name for X in ranked if X.rank == 3] == ["Gr(1,4)", "Gr(3,4)", "Gr(2,4)", "Fl(1,2;4)", "Fl(1,3;4)"]


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: Gr(2, 4).schubert(), "expected one of permutation=, partition=, string=, word=, got none"),
        (
            lambda: Gr(2, 4).schubert(partition=(1,), word=(2,)),
            "expected one of permutation=, partition=, string=, word=, got ['partition', 'word']",
        ),
        (
            lambda: Fl(3).schubert(partition=(1,)),
            "expected permutation=, string= or word= on Fl(3): only a Grassmannian has partition=",
        ),
        (
            lambda: FlagVariety("B2/B").schubert(permutation=(1, 2)),
            "expected signed= or word= on B2/B: only type A has permutation=",
        ),
        (
            lambda: FlagVariety("LG(2,4)").schubert(string="0011"),
            "expected signed=, partition= or word= on LG(2,4): only type A has string=",
        ),
        (
            lambda: FlagVariety("B2/B").schubert(partition=(1,)),
            "expected signed= or word= on B2/B: outside type A only LG(n,2n), OG(n,2n+1) and OG(n,2n) have partition=",
        ),
        (
            lambda: Fl(3).schubert(signed=(1, 2, 3)),
            "expected permutation=, string= or word= on Fl(3): only types B, C and D have signed=",
        ),
        (lambda: FlagVariety("G2/B").schubert(signed=(1, 2)), "expected word= on G2/B: only types B, C and D have signed="),
        (lambda: FlagVariety("G2/B").schubert(), "expected word=, got none"),
        (lambda: FlagVariety("Q^3").schubert(), "expected one of signed=, word=, got none"),
        (
            lambda: LG(2, 4).schubert(signed=(1, 2), word=()),
            "expected one of signed=, partition=, word=, got ['signed', 'word']",
        ),
        (lambda: FlagVariety("B2/B").schubert(word=(1, 3)), "expected letters from 1 to 2, got letter 2 = 3 in word=(1, 3)"),
        (
            lambda: FlagVariety("B2/B").schubert(word=(1, 1)),
            "expected a reduced word of a class of B2/B, got letter 1 = 1 in word=(1, 1)",
        ),
        (
            lambda: FlagVariety("C3/P2").schubert(word=(2, 1)),
            "expected a reduced word of a class of IG(2,6), got letter 2 = 1 in word=(2, 1)",
        ),
        (lambda: Fl(1, 3), "expected n=, as in Fl(1, 3, n=4), got Fl(1, 3); Fl(4) alone means complete flags"),
        (lambda: Fl(1), "expected n of 2 or more, got n=1"),
        (lambda: Fl("3"), "expected integers in n, got entry 1 = '3' of n=('3',)"),
        (lambda: Gr(1.0, 3), "expected integers in steps, got entry 1 = 1.0 of steps=(1.0,)"),
        (lambda: Fl(n=3), "expected at least one step between 1 and 2, got none"),
        (lambda: Gr(0, 4), "expected rising steps between 1 and 3, got step 0 in Fl(0;4)"),
        (lambda: Gr(4, 4), "expected rising steps between 1 and 3, got step 4 in Fl(4;4)"),
        (lambda: Fl(1, 3, 2, n=5), "expected rising steps between 1 and 4, got step 2 in Fl(1,3,2;5)"),
        (
            lambda: FlagVariety("Gr(2;4)"),
            f"{A_NAME}, got 'Gr(2;4)'",
        ),
        (
            lambda: FlagVariety(4),
            f"{A_NAME}, got 4",
        ),
        (lambda: FlagVariety("E6/P1,7"), "expected rising nodes between 1 and 6, got node 7 in 'E6/P1,7'"),
        (lambda: FlagVariety("E6/P2,1"), "expected rising nodes between 1 and 6, got node 1 in 'E6/P2,1'"),
        (lambda: FlagVariety("E5/P1"), "expected a rank from 6 to 8 for type E, got rank=5"),
        (lambda: FlagVariety("P^0"), "expected n of 2 or more, got n=1"),
        (
            lambda: FlagVariety("B2/B").point.permutation,
            "expected a variety of type A, got B2/B: its classes have no permutation; use .signed",
        ),
        (
            lambda: FlagVariety("G2/B").point.permutation,
            "expected a variety of type A, got G2/B: its classes have no permutation; use .word",
        ),
        (
            lambda: FlagVariety("B2/B").point.partition,
            "expected a Grassmannian, got B2/B: its classes have no partition; use .signed",
        ),
        (
            lambda: FlagVariety("E6/P1").point.signed,
            "expected a variety of type B, C or D, got E6/P1: its classes have no signed permutation; use .word",
        ),
        (
            lambda: Gr(2, 4).point.signed,
            "expected a variety of type B, C or D, got Gr(2,4): its classes have no signed permutation; use .permutation",
        ),
        (
            lambda: Fl(3).point.partition,
            "expected a Grassmannian, got Fl(3): its classes have no partition; use .permutation",
        ),
    ],
)
def test_refusals_name_the_offending_entry(call, message):
    """Each refusal is a ``NotationError`` that says what was expected and what came instead."""
    with pytest.raises(NotationError) as error:
        call()
    assert str(error.value) == message


def test_too_many_classes_are_refused_before_they_are_made():
    """``E8/B`` can be named and measured, but its 696,729,600 classes are out of reach; ``Fl(8)`` is within it."""
    X = FlagVariety("E8/B")
    assert X.dim == 120
    with pytest.raises(OutOfReach, match=f"at most {MOST_CLASSES:,} Schubert classes, got E8/B with 696,729,600"):
        X.classes  # noqa: B018 - the look is what fails
    assert factorial(8) < MOST_CLASSES
