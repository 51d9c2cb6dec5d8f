"""The bank of all tests over the cases looked at, and the search for the best conditions among all pairs of them.

Tests are 0/1 vectors over the cases, and the counts of pairs are products of matrices.
"""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from conjcheck.testing.conditions import Found, Test, iter_tests
from conjcheck.testing.features import Feature, Values
from conjcheck.testing.traits import Bools

__all__ = ["TestBank"]

Places = NDArray[np.int64]

_MOST_IN_PAIRS = 400
_NEAR = 1


class TestBank:
    """All different tests over given cases, and the search for the best conditions.

    Of several tests that hold at the same cases the simplest is kept. Cost: some thousand tests of 60,000 cases take about a second.

    Conditions are ranked by description length: a condition that holds at every failure, but at a few agreements only, saves
    ``log2(agreements / agreements at which it holds)`` bits per independent failure, and costs ``Found.cost`` bits to be said. So with
    many failures the fewest agreements decide, and with few failures the simplest words. Agreements with a nonzero constant count for
    every failure, those with zeros only for failures where the constant is 0: there the rule had a chance to be wrong.

    Args:
        values: features with their values ``(K,)``.
        fails, informative: ``(K,)``.
        independent: how many failures, and how many of them where the constant is 0, count as independent of each other.
    """

    __test__ = False

    def __init__(
        self, values: Sequence[tuple[Feature, Values]], fails: Bools, informative: Bools, independent: tuple[int, int]
    ) -> None:
        self.failures = int(fails.sum())
        self.independent = independent
        groups = [np.flatnonzero(fails), np.flatnonzero(~fails & informative), np.flatnonzero(~fails & ~informative)]
        order = np.concatenate(groups)
        self._sizes = [len(group) for group in groups]
        kept: dict[bytes, tuple[list[Test], NDArray[np.uint8]]] = {}
        tests = [(test, column) for feature, column in values for test in iter_tests(feature, column)]
        for test, column in sorted(tests, key=lambda pair: pair[0].oddity):
            bits = np.packbits(test.holds(column)[order])
            kept.setdefault(bits.tobytes(), ([], bits))[0].append(test)
        self.tests = [tests[0] for tests, _ in kept.values()]
        self._others = {tests[0]: tests[1:] for tests, _ in kept.values()}
        self._places = {test: k for k, test in enumerate(self.tests)}
        self._oddity = np.array([test.oddity for test in self.tests], dtype=np.int64)
        packed = [bits for _, bits in kept.values()]
        self._bits = np.stack(packed) if packed else np.zeros((0, (len(order) + 7) // 8), dtype=np.uint8)
        counts = [self._part(np.arange(len(self.tests)), part).sum(axis=1, dtype=np.int64) for part in range(3)]
        self._failing, self._informative, self._zeros = counts

    def score(self, found: Found) -> float:
        """The bits that a condition saves, more being better."""
        return float(self._saved(np.array([found.informative]), np.array([found.zeros]))[0]) - found.cost

    def others(self, found: Found, *, most: int = 2) -> tuple[str, ...]:
        """Other single tests, in words, that hold at the same cases as a condition of one test, simple ones only."""
        if len(found.tests) > 1:
            return ()
        near = [test for test in self._others[found.tests[0]] if test.feature is not found.tests[0].feature]
        return tuple(test.words for test in near if test.oddity <= found.tests[0].oddity + _NEAR)[:most]

    def same(self, one: Found, other: Found) -> bool:
        """Whether two conditions of this bank hold at the same cases."""
        return bool((self._vector(one) == self._vector(other)).all())

    def _vector(self, found: Found) -> NDArray[np.uint8]:
        parts = [self._bits[self._places[test]] for test in found.tests]
        vector: NDArray[np.uint8] = (np.bitwise_and if found.join == "and" else np.bitwise_or).reduce(parts)
        return vector

    def covering(self, *, most: int = 200) -> list[Found]:
        """Conditions that hold at every failure and not at every agreement, best first."""
        total = self._sizes[1] + self._sizes[2]
        whole = np.flatnonzero((self._failing == self.failures) & (self._informative + self._zeros < total))
        worth = self._saved(self._informative[whole], self._zeros[whole]) - self._oddity[whole]
        best = np.sort(whole[np.argsort(-worth, kind="stable")[:_MOST_IN_PAIRS]])
        found = [*(self._single(int(k)) for k in whole), *self._pairs(best, most), *self._unions(most)]
        return sorted(found, key=lambda one: -self.score(one))

    def partial(self, *, most: int = 5) -> list[Found]:
        """Single tests that hold at some failures only: those first that hold much more often at failures than at agreements."""
        some = np.flatnonzero((self._failing > 0) & (self._failing < self.failures))
        excess = self._failing[some] / self.failures - self._informative[some] / max(self._sizes[1], 1)
        return [self._single(int(k)) for k in some[np.lexsort([self._oddity[some], -excess])][:most]]

    def _part(self, which: Places, part: int) -> NDArray[np.uint8]:
        """The 0/1 vectors of some tests on the failures (0), the informative agreements (1) or the zeros (2)."""
        start = sum(self._sizes[:part])
        stop = start + self._sizes[part]
        low = start // 8
        bits = np.unpackbits(self._bits[which, low : (stop + 7) // 8], axis=1)
        return bits[:, start - 8 * low : stop - 8 * low]

    def _saved(self, informative: Places, zeros: Places) -> NDArray[np.float64]:
        every, at_zeros = self.independent
        saved: NDArray[np.float64] = every * np.log2((self._sizes[1] + 1) / (informative + 1))
        saved += at_zeros * np.log2((self._sizes[2] + 1) / (zeros + 1))
        return saved

    def _single(self, k: int) -> Found:
        return Found((self.tests[k],), "and", int(self._failing[k]), int(self._informative[k]), int(self._zeros[k]))

    def _pairs(self, which: Places, most: int) -> list[Found]:
        """The best pairs "one and the other", those only that hold at fewer agreements than each of the two."""
        if len(which) < 2:
            return []
        first, second = np.triu_indices(len(which), 1)
        informative, zeros = (_common(self._part(which, part))[first, second] for part in (1, 2))
        least, fewest = (np.minimum(count[which[first]], count[which[second]]) for count in (self._informative, self._zeros))
        chosen = np.flatnonzero((informative < least) | ((informative == least) & (zeros < fewest)))
        return self._best("and", which[first[chosen]], which[second[chosen]], informative[chosen], zeros[chosen], most)

    def _unions(self, most: int) -> list[Found]:
        """The best pairs "one or the other" that hold at every failure where neither of the two does."""
        some = np.flatnonzero((self._failing > 0) & (self._failing < self.failures))
        if len(some) < 2:
            return []
        cost = self._informative[some] / max(self._sizes[1], 1) - self._failing[some] / self.failures
        some = np.sort(some[np.argsort(cost, kind="stable")[:_MOST_IN_PAIRS]])
        covers = _common(1 - self._part(some, 0)) == 0
        first, second = np.nonzero(np.triu(covers, 1))
        if not len(first):
            return []
        both = [_common(self._part(some, part)) for part in (1, 2)]
        counts = (self._informative[some], self._zeros[some])
        informative, zeros = (c[first] + c[second] - b[first, second] for c, b in zip(counts, both, strict=True))
        chosen = np.flatnonzero(informative + zeros < self._sizes[1] + self._sizes[2])
        return self._best("or", some[first[chosen]], some[second[chosen]], informative[chosen], zeros[chosen], most)

    def _best(self, join: str, first: Places, second: Places, informative: Places, zeros: Places, most: int) -> list[Found]:
        """The best of some pairs."""
        worth = self._saved(informative, zeros) - self._oddity[first] - self._oddity[second]
        chosen = np.argsort(-worth, kind="stable")[:most]
        return [
            Found((self.tests[first[k]], self.tests[second[k]]), join, self.failures, int(informative[k]), int(zeros[k]))
            for k in chosen
        ]


def _common(vectors: NDArray[np.uint8]) -> Places:
    """For each two of some 0/1 vectors the number of common ones; exact, since the sums stay below 2^24."""
    assert vectors.shape[1] < 2**24
    as_floats = vectors.astype(np.float32)
    counts: Places = np.rint(as_floats @ as_floats.T).astype(np.int64)
    return counts
