"""The plain script to beat: all structure constants of QH*(Fl(n)) with scipy.sparse and nothing of conjcheck.

For every permutation w it holds one sparse matrix ``M[w]``: row v is the quantum product ``sigma_w * sigma_v``, and column
``w' + n! * code(d)`` belongs to ``q^d sigma_w'``. The matrices come one length after the other from the quantum form of the
transition of Lascoux and Schutzenberger: with r the last descent of w, s the largest position with ``w(s) < w(r)`` and
``v = w t_rs``, quantum Monk (Fomin, Gelfand, Postnikov, J. AMS 10 (1997), Theorem 1.3) writes ``x_r * sigma_v`` as ``sigma_w`` plus
terms that are known already.

    python plain_scipy.py 6

Conventions: permutations are tuples of values 0..n-1, positions 0-based; degrees have n - 1 entries, ``d[i]`` the exponent
of ``q_{i+1}``.
"""

import sys
import time
from itertools import combinations, permutations

import numpy as np
from scipy import sparse

__all__ = ["PlainTable", "fill"]


class PlainTable:
    """The whole table of one ``Fl(n)``: ``matrices[w]`` is ``(n!, n! * number of degrees)``, in the order of ``perms``.

    The order is by length, then falling lexicographically: the terms of a transition come before the permutation itself.
    """

    def __init__(self, n: int) -> None:
        self.n = n
        self.perms = sorted(permutations(range(n)), key=lambda w: (length(w), [-x for x in w]))
        self.index = {w: k for k, w in enumerate(self.perms)}
        # Exponents stay below these; dropping higher ones is a quotient of rings, so what is kept is exact in any case.
        self.radices = [min(i, n - i) + 2 for i in range(1, n)]
        self.strides = np.cumprod([len(self.perms), *self.radices[:-1]]).tolist()
        self.columns = len(self.perms) * int(np.prod(self.radices))
        self.matrices: list[sparse.csr_array] = []

    def degrees(self, columns):
        """Columns to degrees, ``(M,) -> (M, n - 1)``."""
        code = np.asarray(columns) // len(self.perms)
        return np.stack(np.unravel_index(code, self.radices, order="F"), axis=1)

    def constants(self):
        """Every nonzero constant as ``((u, v), {(w, d): N})``, permutations with values from 1, degrees as tuples."""
        names = [tuple(x + 1 for x in w) for w in self.perms]
        for u, matrix in zip(names, self.matrices, strict=True):
            for v, start, stop in zip(names, matrix.indptr[:-1], matrix.indptr[1:], strict=True):
                columns = matrix.indices[start:stop]
                degrees = map(tuple, self.degrees(columns).tolist())
                ends = (names[k] for k in (columns % len(names)).tolist())
                yield (u, v), dict(zip(zip(ends, degrees, strict=True), matrix.data[start:stop].tolist(), strict=True))


def length(w):
    """The number of inversions."""
    return sum(a > b for a, b in combinations(w, 2))


def swap(w, a, b):
    """``w t_ab``: positions a and b exchanged."""
    w = list(w)
    w[a], w[b] = w[b], w[a]
    return tuple(w)


def transposition_terms(table, v, r):
    """The terms of ``x_{r+1} * sigma_v``: ``(sign, w', degree)``, quantum Monk for s_{r+1} minus quantum Monk for s_r."""
    here = length(v)
    for other in range(table.n):
        if other != r:
            a, b = sorted((r, other))
            w = swap(v, a, b)
            sign = 1 if a == r else -1
            if length(w) == here + 1:
                yield sign, w, (0,) * (table.n - 1)
            elif length(w) == here - 2 * (b - a) + 1:
                yield sign, w, tuple(int(a <= i < b) for i in range(table.n - 1))


def operators(table):
    """The matrices of ``x_1 *, ..., x_n *`` on all columns ``q^d sigma_w`` at once."""
    count, n = len(table.perms), table.n
    degrees = table.degrees(np.arange(0, table.columns, count))
    for r in range(n):
        start, stop, signs = [], [], []
        for v in table.perms:
            for sign, w, shift in transposition_terms(table, v, r):
                inside = np.flatnonzero((degrees + shift < table.radices).all(axis=1)) * count
                start.append(inside + table.index[v])
                stop.append(inside + table.index[w] + int(np.dot(shift, table.strides)))
                signs.append(np.full(len(inside), sign))
        entries = np.concatenate(signs), (np.concatenate(start), np.concatenate(stop))
        yield sparse.csr_array(entries, shape=(table.columns, table.columns))


def shifted(table, matrix, degree):
    """The matrix times ``q^degree``."""
    if not any(degree):
        return matrix
    degrees = table.degrees(matrix.indices)
    keep = (degrees + degree < table.radices).all(axis=1)
    if keep.all():
        return sparse.csr_array((matrix.data, matrix.indices + int(np.dot(degree, table.strides)), matrix.indptr), matrix.shape)
    rows = np.repeat(np.arange(matrix.shape[0]), np.diff(matrix.indptr))
    entries = matrix.data[keep], (rows[keep], matrix.indices[keep] + int(np.dot(degree, table.strides)))
    return sparse.csr_array(entries, shape=matrix.shape)


def fill(n):
    """The table of ``Fl(n)``; n = 6 takes seconds, n = 7 about an hour and tens of gigabytes."""
    table = PlainTable(n)
    x = list(operators(table))
    count = len(table.perms)
    table.matrices.append(sparse.eye_array(count, table.columns, dtype=np.int64, format="csr"))
    for w in table.perms[1:]:
        r = max(i for i in range(n - 1) if w[i] > w[i + 1])
        s = max(i for i in range(r, n) if w[i] < w[r])
        v = swap(w, r, s)
        total = table.matrices[table.index[v]] @ x[r]
        for sign, other, degree in transposition_terms(table, v, r):
            if other != w:
                total = total - sign * shifted(table, table.matrices[table.index[other]], degree)
        total.eliminate_zeros()
        table.matrices.append(total)
    return table


if __name__ == "__main__":
    size = int(sys.argv[1]) if len(sys.argv) > 1 else 5
    began = time.perf_counter()
    done = fill(size)
    seconds = time.perf_counter() - began
    print(f"Fl({size}): {sum(m.nnz for m in done.matrices):,} nonzero constants in {seconds:.2f} s")
