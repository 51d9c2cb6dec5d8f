"""Names of flag varieties outside type A: one is printed, several are read, and every refusal says what is possible."""

import pickle
import re
from itertools import combinations

import pytest

from conjcheck.errors import NotationError
from conjcheck.geometry.cartan import CartanType
from conjcheck.geometry.flag_variety import IG, LG, OG, FlagVariety
from conjcheck.geometry.names import name_of, parse_name

KINDS = [CartanType(letter, rank) for letter, low in (("A", 1), ("B", 2), ("C", 2), ("D", 4)) for rank in range(low, 7)]
KINDS += [CartanType("E", 6), CartanType("F", 4), CartanType("G", 2), CartanType("D", 12), CartanType("B", 10)]


def subsets(kind, most=3):
    """Sets of marked nodes: small ones, all but one, and all."""
    nodes = range(1, kind.rank + 1)
    sizes = {*range(1, min(most, kind.rank) + 1), kind.rank - 1, kind.rank} - {0}
    return [marked for size in sizes for marked in combinations(nodes, size)]


@pytest.mark.parametrize("kind", KINDS, ids=str)
def test_names_are_read_back(kind):
    """The printed name, and the one with type and nodes, denote the variety; no two varieties share a name."""
    printed = {}
    for marked in subsets(kind):
        name = name_of(kind, marked)
        assert parse_name(name) == parse_name(f"{kind}/P{','.join(map(str, marked))}") == (kind, marked)
        assert printed.setdefault(name, marked) == marked


@pytest.mark.parametrize(
    ("name", "others", "kind", "marked"),
    [
        ("LG(2,4)", ("C2/P2", "IG(2,4)"), "C2", (2,)),
        ("LG(5,10)", ("C5/P5", "IG(5, 10)", "LG(5, 10)"), "C5", (5,)),
        ("IG(1,4)", ("C2/P1",), "C2", (1,)),
        ("IG(3,8)", ("C4/P3",), "C4", (3,)),
        ("Q^3", ("B2/P1", "OG(1,5)"), "B2", (1,)),
        ("OG(2,5)", ("B2/P2",), "B2", (2,)),
        ("Q^5", ("B3/P1", "OG(1,7)"), "B3", (1,)),
        ("OG(2,7)", ("B3/P2",), "B3", (2,)),
        ("OG(3,7)", ("B3/P3", "OG(3, 7)"), "B3", (3,)),
        ("Q^6", ("D4/P1", "OG(1,8)"), "D4", (1,)),
        ("OG(2,8)", ("D4/P2",), "D4", (2,)),
        ("D4/P3", ("D4/P 3",), "D4", (3,)),
        ("OG(4,8)", ("D4/P4",), "D4", (4,)),
        ("D4/P3,4", ("OG(3,8)",), "D4", (3, 4)),
        ("OG(10,20)", ("D10/P10",), "D10", (10,)),
        ("Q^18", ("D10/P1", "OG(1,20)"), "D10", (1,)),
        ("D5/P4,5", ("OG(4,10)",), "D5", (4, 5)),
        ("C3/P1,3", ("C3/P1, 3",), "C3", (1, 3)),
        ("B3/B", ("B3/P1,2,3",), "B3", (1, 2, 3)),
        ("G2/B", ("G2/P1,2",), "G2", (1, 2)),
        ("G2/P1", ("G2 / P1",), "G2", (1,)),
        ("F4/P4", ("F4/P4",), "F4", (4,)),
        ("E6/P1", ("E6/P1",), "E6", (1,)),
    ],
)
def test_one_name_is_printed_and_the_others_are_read(name, others, kind, marked):
    """Every name gives the same object, whose name is the first; so does ``pickle``."""
    X = FlagVariety(name)
    assert (str(X.kind), X.marked, X.name) == (kind, marked, name)
    assert all(FlagVariety(other) is X for other in others)
    assert FlagVariety(X.name) is pickle.loads(pickle.dumps(X)) is X
    assert eval(repr(X)) is X


def test_calls_are_the_names():
    """``LG(n, 2n)``, ``IG(k, 2n)`` and ``OG(k, N)`` are the varieties of that name."""
    for n in range(2, 7):
        assert LG(n, 2 * n) is IG(n, 2 * n) is FlagVariety(f"LG({n},{2 * n})") is FlagVariety(f"C{n}/P{n}")
        for k in range(1, n + 1):
            assert IG(k, 2 * n) is FlagVariety(f"IG({k},{2 * n})") is FlagVariety(f"C{n}/P{k}")
            assert OG(k, 2 * n + 1) is FlagVariety(f"OG({k},{2 * n + 1})") is FlagVariety(f"B{n}/P{k}")
            if n >= 4:
                nodes = f"{n - 1},{n}" if k == n - 1 else k
                assert OG(k, 2 * n) is FlagVariety(f"OG({k},{2 * n})") is FlagVariety(f"D{n}/P{nodes}")


def test_dimensions_of_isotropic_grassmannians():
    """``IG(k,2n)`` has dimension ``k(2n - k) - k(k - 1)/2``, ``OG(k,N)`` has ``k(N - k) - k(k + 1)/2``, ``Q^N`` has N (standard)."""
    for n in range(2, 7):
        for k in range(1, n + 1):
            assert IG(k, 2 * n).dim == k * (2 * n - k) - k * (k - 1) // 2
            assert OG(k, 2 * n + 1).dim == k * (2 * n + 1 - k) - k * (k + 1) // 2
            if n >= 4:
                assert OG(k, 2 * n).dim == k * (2 * n - k) - k * (k + 1) // 2
    for dim in (3, *range(5, 12)):
        assert FlagVariety(f"Q^{dim}").dim == dim


def test_the_maximal_isotropic_ones_say_so():
    """``is_maximal_isotropic`` holds for ``LG(n,2n)``, ``OG(n,2n+1)`` and ``OG(n,2n)`` and for nothing else; these have partitions."""
    found = {
        X.name for X in map(FlagVariety, (name_of(kind, m) for kind in KINDS for m in subsets(kind))) if X.is_maximal_isotropic
    }
    assert found == {
        *(f"LG({n},{2 * n})" for n in range(2, 7)),
        *(f"OG({n},{2 * n + 1})" for n in (*range(2, 7), 10)),
        *(f"OG({n},{2 * n})" for n in (4, 5, 6, 12)),
    }
    assert LG(3, 6).notations == OG(4, 8).notations == ("signed", "partition", "word")
    assert FlagVariety("D4/P3").notations == FlagVariety("C3/B").notations == ("signed", "word")


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: LG(3, 7), "expected LG(3,6), Lagrangian subspaces of C^6, got 7 in LG(3,7)"),
        (lambda: LG(1, 2), "expected n of 2 or more, got n=1 in LG(1,2); LG(1,2) is Gr(1,2)"),
        (lambda: IG(2, 5), "expected an even number of 4 or more as second entry, got 5 in IG(2,5)"),
        (lambda: IG(1, 2), "expected an even number of 4 or more as second entry, got 2 in IG(1,2)"),
        (lambda: IG(0, 6), "expected k between 1 and 3, got k=0 in IG(0,6)"),
        (lambda: FlagVariety("IG(4,6)"), "expected k between 1 and 3, got k=4 in IG(4,6)"),
        (lambda: OG(4, 7), "expected k between 1 and 3, got k=4 in OG(4,7)"),
        (lambda: OG(0, 8), "expected k between 1 and 4, got k=0 in OG(0,8)"),
        (lambda: OG(1, 3), "expected 5, 7, 8 or more as second entry, got 3 in OG(1,3); OG(1,3) is Gr(1,2)"),
        (lambda: OG(2, 4), "expected 5, 7, 8 or more as second entry, got 4 in OG(2,4); D_2 is A_1 x A_1, not simple"),
        (
            lambda: FlagVariety("OG(3,6)"),
            "expected 5, 7, 8 or more as second entry, got 6 in OG(3,6); "
            "D_3 is A_3: OG(1,6) is Gr(2,4), OG(2,6) is Fl(1,3;4), OG(3,6) is Gr(3,4)",
        ),
        (lambda: OG(1, 2), "expected 5, 7, 8 or more as second entry, got 2 in OG(1,2)"),
        (lambda: FlagVariety("Q^1"), "expected a quadric of dimension 3, 5, 6 or more, got Q^1; Q^1 is Gr(1,2)"),
        (lambda: FlagVariety("Q^2"), "expected a quadric of dimension 3, 5, 6 or more, got Q^2; Q^2 is Gr(1,2) x Gr(1,2)"),
        (lambda: FlagVariety("Q^4"), "expected a quadric of dimension 3, 5, 6 or more, got Q^4; Q^4 is Gr(2,4)"),
        (lambda: FlagVariety("Q^0"), "expected a quadric of dimension 3, 5, 6 or more, got Q^0"),
        (lambda: OG(2.0, 7), "expected integers in k, N, got entry 1 = 2.0 of k, N=(2.0, 7)"),
        (lambda: LG("3", 6), "expected integers in n, N, got entry 1 = '3' of n, N=('3', 6)"),
        (lambda: IG(2, None), "expected integers in k, N, got entry 2 = None of k, N=(2, None)"),
        (lambda: FlagVariety("D3/P1"), "expected a rank of 4 or more for type D, got rank=3"),
        (lambda: FlagVariety("C3/P4"), "expected rising nodes between 1 and 3, got node 4 in 'C3/P4'"),
        (lambda: FlagVariety("C3/P3,1"), "expected rising nodes between 1 and 3, got node 1 in 'C3/P3,1'"),
    ],
)
def test_refusals_name_the_offending_entry(call, message):
    """Each refusal says what was expected and what came instead, and what a small space is really called."""
    with pytest.raises(NotationError) as error:
        call()
    assert str(error.value) == message


@pytest.mark.parametrize(
    ("name", "meant"),
    [
        ("gr(2,4)", "Gr(2,4)"),
        ("FL(1,3;4)", "Fl(1,3;4)"),
        ("lg( 3, 6)", "LG(3,6)"),
        ("e6/p1", "E6/P1"),
        ("q^5", "Q^5"),
        ("Grr(2,4)", "Gr(2,4)"),
    ],
)
def test_a_name_that_is_nearly_right(name, meant):
    """A name in other letters is answered with the one that was meant, which can be read."""
    with pytest.raises(NotationError, match=re.escape(f"; did you mean {meant}?")):
        parse_name(name)
    assert parse_name(meant)


@pytest.mark.parametrize("name", ["", "projective plane", "Gr", "(2,4)", 5])
def test_a_name_that_is_far_away(name):
    """Where nothing is near, nothing is guessed."""
    with pytest.raises(NotationError) as caught:
        parse_name(name)
    assert "did you mean" not in str(caught.value)
