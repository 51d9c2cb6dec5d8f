"""The plain way to one product on Fl(n): the recursion of ``plain_scipy`` for a single row, with dictionaries. Nothing of
conjcheck.

python plain_rows.py 6
"""

import sys
import time
from collections import defaultdict
from itertools import permutations

from plain_scipy import length, swap

__all__ = ["one_row", "prepare"]


class PlainRing:
    """``moves[r, w]``: the terms ``(sign, w', degree)`` of ``x_{r+1} * sigma_w``; ``lasts[w]``: the pair (r, v) of the
    transition.
    """

    def __init__(self, n):
        self.n = n
        self.perms = list(permutations(range(n)))
        lengths = {w: length(w) for w in self.perms}
        self.moves, self.lasts = {}, {}
        for w in self.perms:
            for r in range(n):
                terms = self.moves[r, w] = []
                for other in range(n):
                    if other != r:
                        a, b = sorted((r, other))
                        end = swap(w, a, b)
                        rise = lengths[end] - lengths[w]
                        if rise in (1, 1 - 2 * (b - a)):
                            degree = tuple(int(rise < 1 and a <= i < b) for i in range(n - 1))
                            terms.append((1 if a == r else -1, end, degree))
            if lengths[w]:
                r = max(i for i in range(n - 1) if w[i] > w[i + 1])
                self.lasts[w] = r, swap(w, r, max(i for i in range(r, n) if w[i] < w[r]))


def prepare(n):
    """The set-up, once per n."""
    return PlainRing(n)


def one_row(ring, u, v):
    """``sigma_u * sigma_v`` as ``{(w, d): N}``; remembers the products with ``sigma_v`` on the way, within this call."""
    identity, zero = tuple(range(ring.n)), (0,) * (ring.n - 1)
    known = {identity: {(v, zero): 1}}

    def times(w):
        if w not in known:
            r, z = ring.lasts[w]
            total = defaultdict(int)
            for (end, d), count in times(z).items():
                for sign, further, step in ring.moves[r, end]:
                    total[further, tuple(map(int.__add__, d, step))] += sign * count
            for sign, other, step in ring.moves[r, z]:
                if other != w:
                    for (end, d), count in times(other).items():
                        total[end, tuple(map(int.__add__, d, step))] -= sign * count
            known[w] = {term: count for term, count in total.items() if count}
        return known[w]

    return times(u)


if __name__ == "__main__":
    size = int(sys.argv[1])
    made = prepare(size)
    top = made.perms[-1]
    began = time.perf_counter()
    row = one_row(made, top, top)
    print(f"the point squared on Fl({size}): {len(row)} terms in {1000 * (time.perf_counter() - began):.1f} ms")
