"""The recursion on complete flags: packing, the two routes, forgetting, and the streamed table."""

import random

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from conjcheck import Fl, table
from conjcheck.oracle import recursion
from conjcheck.oracle.recursion import CompleteFlagRing, complete_flag_ring

RINGS = {n: complete_flag_ring(Fl(n)) for n in (2, 3, 4, 5, 6)}


@settings(deadline=None)
@given(st.sampled_from(sorted(RINGS)), st.data())
def test_packing_is_one_to_one(n, data):
    """Every class and every degree up to ``dim X`` in each entry, more than a product can hold, unpacks as it was packed."""
    ring = RINGS[n]
    X = ring.X
    d = tuple(data.draw(st.integers(0, X.dim)) for _ in X.marked)
    u = data.draw(st.sampled_from(X.classes))
    assert ring.unpack(u.index + ring.pack(d)) == (u.index, d)


def test_packing_leaves_room_for_the_largest_product():
    """``sum d_i <= dim X`` for every term, because every ``deg q_i`` is 2 and ``l(u) + l(v) <= 2 dim X``: the fields hold that."""
    for n in range(2, 9):
        X = Fl(n)
        ring = CompleteFlagRing(X)
        assert 1 << ring.bits > X.dim
        assert 1 << ring.shift > len(X.classes) - 1
        assert ring.shift + ring.bits * len(X.marked) < 63


@settings(deadline=None)
@given(st.sampled_from(sorted(RINGS)), st.data())
def test_the_two_routes_agree(n, data):
    """With Seidel symmetry and memory, and without either."""
    ring = RINGS[n]
    u, v = (data.draw(st.sampled_from(ring.X.classes)).index for _ in range(2))
    assert ring.packed_row(u, v) == ring.direct_row(u, v)


def test_the_representatives_fix_n():
    """Each class is a Seidel image of exactly one class that fixes n."""
    for n, ring in RINGS.items():
        X = ring.X
        assert [X.classes[i].permutation[-1] for i in ring.representatives] == [n] * len(ring.representatives)
        assert len(ring.representatives) * n == len(X.classes)
        for u in X.classes:
            home, g = ring.home[u.index], ring.element[u.index]
            assert ring.group.images[g, home] == u.index


def test_forgetting_changes_nothing(monkeypatch):
    """With room for four sweeps only the answers are the same as with plenty, and no more than four are kept."""
    rng = random.Random(11)
    pairs = [(rng.randrange(120), rng.randrange(120)) for _ in range(300)]
    expected = [RINGS[5].packed_row(u, v) for u, v in pairs]
    monkeypatch.setattr(recursion, "_MOST_PRODUCTS", 1)
    small = CompleteFlagRing(Fl(5))
    for (u, v), row in zip(pairs, expected, strict=True):
        assert small.packed_row(u, v) == row
        assert len(small._sweeps) <= 4


def test_what_is_not_kept_takes_no_room():
    """The direct route remembers no products, and the streamed table no more sweeps than are kept anyhow."""
    ring = CompleteFlagRing(Fl(4))
    ring.direct_row(5, 7)
    assert not ring._sweeps
    ring._most_sweeps = 3
    assert sum(len(block) for block in ring.blocks()) == 1168
    assert len(ring._sweeps) <= 3


def test_the_direct_route_does_not_lean_on_the_symmetries():
    """Its products stay right when everything that the Seidel elements contribute is spoilt: the two routes share no symmetry."""
    expected = {(u, v): RINGS[4].direct_row(u, v) for u in range(24) for v in range(24)}
    ring = CompleteFlagRing(Fl(4))
    ring.home[:], ring.element[:], ring.packed_shifts[:] = 0, 1, 77
    assert {pair: ring.direct_row(*pair) for pair in expected} == expected
    assert ring.packed_row(3, 5) != expected[3, 5]


@pytest.mark.parametrize("n", [2, 3, 4, 5])
def test_blocks_hold_the_rows(n):
    """The streamed table has one block per class, and each block the rows of its class, zeros left out, nothing twice."""
    ring = RINGS[n]
    X = ring.X
    blocks = list(table(X))
    assert sorted(block.u.index for block in blocks) == list(range(len(X.classes)))
    for block in blocks:
        assert len(block) == len(block.v) == len(block.w) == len(block.d) == len(block.N)
        assert block.d.shape[1] == len(X.marked)
        found = {}
        for v, w, d, count in zip(block.v.tolist(), block.w.tolist(), map(tuple, block.d.tolist()), block.N.tolist(), strict=True):
            found.setdefault(v, {})[w + ring.pack(d)] = count
        assert {v: ring.packed_row(block.u.index, v) for v in found} == found
        assert len(found) == len(X.classes)
        assert sum(map(len, found.values())) == len(block)


def test_blocks_of_fl_6_hold_the_direct_rows():
    """On ``Fl(6)``, where degrees reach 4 and constants 3: some rows of every block against the route without symmetries."""
    ring = RINGS[6]
    X = ring.X
    rng = random.Random(13)
    weights = np.array([1 << (ring.bits * k) for k in range(len(X.marked))]) << ring.shift
    for block in table(X):
        for _ in range(2):
            v = rng.randrange(720)
            here = block.v == v
            keys = block.w[here] + block.d[here] @ weights
            row = ring.direct_row(block.u.index, v) if block.u.length < X.classes[v].length else ring.direct_row(v, block.u.index)
            assert dict(zip(keys.tolist(), block.N[here].tolist(), strict=True)) == row


@pytest.mark.parametrize("n", [6, 7])
def test_the_two_routes_agree_further_out(n):
    """On ``Fl(6)`` and ``Fl(7)``: each representative once as a factor, the other one at random."""
    ring = complete_flag_ring(Fl(n))
    X = ring.X
    rng = random.Random(n)
    longest = 0
    for a in ring.representatives.tolist():
        v = rng.choice(X.of_length(rng.randrange(1, 6))).index
        u = int(ring.group.images[rng.randrange(n), a])
        row = ring.direct_row(v, u)
        assert ring.packed_row(u, v) == row
        longest = max(longest, len(row))
    assert longest > 5


@pytest.mark.parametrize(
    ("n", "u", "v", "largest"),
    [
        (3, (3, 2, 1), (3, 2, 1), (1, 1)),
        (4, (4, 3, 2, 1), (4, 3, 2, 1), (2, 2, 2)),
        (5, (5, 4, 3, 2, 1), (5, 4, 3, 2, 1), (2, 3, 3, 2)),
        (6, (6, 4, 5, 2, 3, 1), (6, 5, 4, 3, 2, 1), (2, 3, 4, 3, 2)),
        (6, (6, 5, 4, 3, 2, 1), (6, 5, 4, 3, 2, 1), (2, 3, 4, 3, 2)),
    ],
)
def test_no_degree_is_cut_off_on_the_direct_route(n, u, v, largest):
    """Without symmetries the route passes through the largest degrees there are; a guessed box of degrees would lose terms here."""
    ring = RINGS[n]
    u, v = (ring.X.schubert(permutation=w).index for w in (u, v))
    row = ring.direct_row(u, v)
    assert row == ring.packed_row(u, v)
    assert tuple(map(max, zip(*(ring.unpack(key)[1] for key in row), strict=True))) == largest
