"""Minimal coset representatives W^P as an orbit of weights: lengths, words, images of weights, in one fixed order.

``W^P`` is the orbit of ``lambda_P``, the sum of the marked fundamental weights: the representative ``u`` is found as the
weight ``u lambda_P`` (integer coordinates in the fundamental weights). Left multiplication by ``s_i`` reflects the weight.
Everything is exact: 64-bit integers that stay far below their bound, because the entries of an orbit are bounded by
``<lambda_P, highest coroot>``.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from conjcheck.geometry.cartan import CartanType, cartan_matrix, opposition, positive_roots

__all__ = [
    "Ints",
    "Orbit",
    "dual_indices",
    "number_of_cosets",
    "one_lines",
    "orbit",
    "reflected_by_word",
    "roots",
    "signed_lines",
    "weight_drops",
    "weight_images",
]

Ints = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Orbit:
    """The orbit of ``lambda_P`` under the Weyl group; row k of each array belongs to the class with index k (0-based).

    Attributes:
        weights: ``(N, rank)``, the weight ``u lambda_P``.
        lengths: ``(N,)``, the length of ``u``.
        letters: ``(N,)``, the smallest left descent of ``u`` (1-based node; 0 for the identity).
        parents: ``(N,)``, the index of ``s_letter u`` (0 for the identity).
        lookup: what ``locate`` needs: multipliers, sorted hashes, and the sorting order.
    """

    weights: Ints
    lengths: Ints
    letters: Ints
    parents: Ints
    lookup: tuple[Ints, Ints, Ints]

    def locate(self, weights: Ints) -> Ints:
        """Indices of many weights of the orbit at once, ``(M, rank) -> (M,)``; -1 for a weight that is not in it."""
        mixer, hashes, sorter = self.lookup
        spots = np.minimum(np.searchsorted(hashes, weights @ mixer), len(sorter) - 1)
        indices: Ints = sorter[spots]
        wrong = (self.weights[indices] != weights).any(axis=1)
        indices[wrong] = -1
        return indices

    def word(self, index: int) -> tuple[int, ...]:
        """The lexicographically first reduced word of a representative, 1-based nodes, applied from the right."""
        letters = []
        while self.letters[index]:
            letters.append(int(self.letters[index]))
            index = int(self.parents[index])
        return tuple(letters)


@lru_cache
def number_of_cosets(kind: CartanType, marked: tuple[int, ...]) -> int:
    """The number ``|W^P|`` of Schubert classes, from heights of roots alone (no enumeration).

    >>> number_of_cosets(CartanType("E", 8), (8,))
    240

    Source: Macdonald, The Poincare series of a Coxeter group, Math. Ann. 199 (1972), at q = 1.
    """
    above, below = 1, 1
    for root, _ in positive_roots(kind):
        if any(root[i - 1] for i in marked):
            height = sum(root)
            above *= height + 1
            below *= height
    return above // below


def _lookup(weights: Ints) -> tuple[Ints, Ints, Ints]:
    """A linear hash without collisions on the given rows: multipliers, sorted hashes, and the sorting order."""
    for seed in range(100):
        mixer: Ints = np.random.default_rng(seed).integers(-(2**62), 2**62, size=(weights.shape[1],), dtype=np.int64)
        keys: Ints = weights @ mixer  # wraps around modulo 2^64, on purpose
        sorter = np.argsort(keys, kind="stable").astype(np.int64)
        hashes: Ints = keys[sorter]
        if (hashes[1:] != hashes[:-1]).all():
            return mixer, hashes, sorter
    raise AssertionError("no injective linear hash among 100: the rows are not distinct")


def _distinct(rows: Ints) -> Ints:
    """The distinct rows, in the order of a linear hash that is checked to separate them."""
    for seed in range(100):
        mixer = np.random.default_rng(seed).integers(-(2**62), 2**62, size=rows.shape[1], dtype=np.int64)
        keys = rows @ mixer
        _, first, inverse = np.unique(keys, return_index=True, return_inverse=True)
        if (rows[first][inverse] == rows).all():
            return rows[first]
    raise AssertionError("no separating linear hash among 100")


@lru_cache
def orbit(kind: CartanType, marked: tuple[int, ...]) -> Orbit:
    """Enumerate ``W^P``, by length, then lexicographically in the notation of the type.

    Type A: one-line notation of the minimal representative. B, C, D: signed permutation. Others: lexicographically first reduced word.
    Cost: ``O(N rank log N)`` in numpy; the 40,320 classes of ``Fl(8)`` take about 0.2 s.
    """
    matrix = np.array(cartan_matrix(kind), dtype=np.int64)
    start = np.array([[int(i + 1 in marked) for i in range(kind.rank)]], dtype=np.int64)
    levels = [start]
    while True:
        rising: list[Ints] = [
            level - level[:, i : i + 1] * matrix[i] for i in range(kind.rank) for level in [levels[-1][levels[-1][:, i] > 0]]
        ]
        up = np.concatenate(rising)
        if not len(up):
            break
        levels.append(_distinct(up))
    lengths = np.repeat(np.arange(len(levels), dtype=np.int64), [len(level) for level in levels])
    weights = np.concatenate(levels)
    if kind.letter in "ABCD":
        keys = one_lines(weights) if kind.letter == "A" else signed_lines(kind, weights)
        weights = weights[np.lexsort((*keys.T[::-1], lengths))]
        return _finish(matrix, weights, lengths)
    rough = _finish(matrix, weights, lengths)
    words = [rough.word(k) for k in range(len(weights))]
    ranking = sorted(range(len(weights)), key=lambda k: (len(words[k]), words[k]))
    return _finish(matrix, weights[ranking], lengths)


def _finish(matrix: Ints, weights: Ints, lengths: Ints) -> Orbit:
    """Add descents, parents and the look-up to the sorted weights."""
    falling = weights < 0
    letters = np.where(falling.any(axis=1), falling.argmax(axis=1) + 1, 0).astype(np.int64)
    plain = Orbit(weights, lengths, letters, letters, _lookup(weights))
    chosen = np.maximum(letters - 1, 0)
    heights: Ints = np.where(letters > 0, weights[np.arange(len(weights)), chosen], 0)
    lowered: Ints = weights - heights[:, None] * matrix[chosen]
    parents = plain.locate(lowered)
    return Orbit(weights, lengths, letters, parents, plain.lookup)


def one_lines(weights: Ints) -> Ints:
    """Type A: one-line notations ``(N, n)`` of the minimal representatives with the given weights.

    In epsilon coordinates ``u lambda_P`` has the value ``#{k in marked: k >= j}`` at place ``u(j)``: a stable sort of the
    places by falling value is the one-line notation.
    """
    tails = np.cumsum(weights[:, ::-1], axis=1)[:, ::-1]
    epsilon = np.concatenate([tails, np.zeros((len(weights), 1), dtype=np.int64)], axis=1)
    result: Ints = np.argsort(-epsilon, axis=1, kind="stable").astype(np.int64) + 1
    return result


def signed_lines(kind: CartanType, weights: Ints) -> Ints:
    """Types B, C, D: signed permutations ``(N, n)`` of the minimal representatives with the given weights.

    With ``lambda_P = sum c_j e_j``, the weight ``u lambda_P`` has the value ``+-c_j`` at place ``|u(j)|``. Among the places of one absolute
    value the minimal representative takes first the positive ones, rising, then the negative ones, falling: the order in which
    every simple root of the Levi stays positive. In type D the last entry takes the sign that makes the number of signs even; this
    is the right one also where ``c_n`` is 0 or negative. Coordinates are doubled to stay in integers.
    """
    n = kind.rank
    doubled = 2 * weights
    match kind.letter:
        case "B":
            doubled[:, -1] = weights[:, -1]
        case "D":
            doubled[:, -2] = weights[:, -2] + weights[:, -1]
            doubled[:, -1] = 0
    epsilon: Ints = np.cumsum(doubled[:, ::-1], axis=1)[:, ::-1]
    if kind.letter == "D":
        epsilon[:, -1] = weights[:, -1] - weights[:, -2]
    places = np.arange(1, n + 1, dtype=np.int64)
    order = np.argsort(np.where(epsilon < 0, 2 * n + 1 - places, places) - (2 * n + 1) * np.abs(epsilon), axis=1)
    result: Ints = np.take_along_axis(np.where(epsilon < 0, -places, places), order, axis=1)
    if kind.letter == "D":
        result[(result < 0).sum(axis=1) % 2 == 1, -1] *= -1
    return result


@lru_cache
def roots(kind: CartanType) -> tuple[Ints, Ints]:
    """Positive roots in simple roots and their coroots in simple coroots, two arrays ``(R, rank)``."""
    pairs = positive_roots(kind)
    return np.array([a for a, _ in pairs], dtype=np.int64), np.array([c for _, c in pairs], dtype=np.int64)


@lru_cache(maxsize=16)
def weight_images(kind: CartanType, marked: tuple[int, ...]) -> Ints:
    """The images ``u omega_k`` of the fundamental weights, ``(N, rank, rank)``: entry ``[u, k - 1]`` is one weight."""
    matrix = np.array(cartan_matrix(kind), dtype=np.int64)
    whole = orbit(kind, marked)
    images = np.empty((len(whole.lengths), kind.rank, kind.rank), dtype=np.int64)
    images[0] = np.eye(kind.rank, dtype=np.int64)
    for mine, parents, i in _steps(whole):
        before = images[parents]
        images[mine] = before - before[:, :, i, None] * matrix[i]
    return images


@lru_cache(maxsize=16)
def weight_drops(kind: CartanType, marked: tuple[int, ...]) -> Ints:
    """``omega_k - u omega_k`` in simple roots, ``(N, rank, rank)``: entry ``[u, k - 1, i - 1]`` is the coefficient of ``alpha_i``."""
    whole, images = orbit(kind, marked), weight_images(kind, marked)
    drops = np.zeros_like(images)
    for mine, parents, i in _steps(whole):
        drops[mine] = drops[parents]
        drops[mine, :, i] += images[parents][:, :, i]
    return drops


def _steps(whole: Orbit) -> Iterator[tuple[Ints, Ints, int]]:
    """Walk the orbit upwards: ``(indices, their parents, i)`` with ``u = s_{i+1} parent``, every parent before its children."""
    for length in range(1, int(whole.lengths[-1]) + 1):
        level = np.flatnonzero(whole.lengths == length)
        for i in range(whole.weights.shape[1]):
            mine = level[whole.letters[level] == i + 1]
            if len(mine):
                yield mine, whole.parents[mine], i


def reflected_by_word(kind: CartanType, weights: Ints, word: Sequence[int]) -> Ints:
    """Apply ``s_i1 ... s_il`` to weights ``(M, rank)``: the last letter first."""
    matrix = np.array(cartan_matrix(kind), dtype=np.int64)
    for i in reversed(word):
        weights = weights - weights[:, i - 1, None] * matrix[i - 1]
    return weights


@lru_cache
def dual_indices(kind: CartanType, marked: tuple[int, ...]) -> Ints:
    """For each class the index of its Poincare dual, the minimal representative of ``w0 u W_P``."""
    whole = orbit(kind, marked)
    star = np.array(opposition(kind)) - 1
    return whole.locate(-whole.weights[:, star])
