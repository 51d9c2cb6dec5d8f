"""A short expression of a Schubert class: steps from the unit to the class, each by one product with a divisor and known classes.

A step says ``times * sigma_x = sum of L * sigma_z - (minus)``, L combinations of divisors, all z and all classes in ``minus`` reached
before. Everything is meant modulo the powers of q that do not divide a given ``q^top``, which span an ideal of the quantum ring.

How a short one is found: a class costs the number of classes that its steps reach, and the cheapest class is settled first, as in
Dijkstra's algorithm, here on a directed hypergraph (Knuth, A generalization of Dijkstra's algorithm, Inform. Process. Lett. 6 (1977)).
Shared classes count once; so the result is short but not always the shortest.
"""

from collections.abc import Callable, Hashable, Iterable
from dataclasses import dataclass
from functools import reduce
from heapq import heappop, heappush
from operator import add, or_

from conjcheck.geometry.case import Case
from conjcheck.oracle.comparison import lift, longest_word
from conjcheck.oracle.relations import annihilator, eliminated
from conjcheck.recheck import WeylGroup

__all__ = ["Step", "Term", "Terms", "by_relations", "divides", "element", "expression", "lifted"]

Vector = tuple[int, ...]
Parts = tuple[tuple[Vector, Hashable], ...]
Terms = Callable[[Hashable], Iterable[tuple[Hashable, Vector, Vector]]]
"""The quantum Chevalley terms ``(target, d, c)`` of a class: ``sigma_{s_i} * sigma_z`` contains ``c[i] q^d sigma_target``."""

_MOST_PRODUCTS = 20_000


@dataclass(frozen=True, slots=True)
class Term:
    """``count * q^d * sigma_z``."""

    count: int
    d: Vector
    z: Hashable


@dataclass(frozen=True, slots=True)
class Step:
    """``times * sigma_x = sum of L * sigma_z - (minus)``: ``parts`` are pairs (L, z), L with one entry per marked node."""

    x: Hashable
    times: int
    parts: tuple[tuple[Vector, Hashable], ...]
    minus: tuple[Term, ...]

    @classmethod
    def of(cls, terms: Terms, x: Hashable, parts: Iterable[tuple[Vector, Hashable]], top: Vector) -> "Step":
        """The step that isolates ``sigma_x`` from products with divisors; the rest is worked out."""
        parts = tuple(parts)
        total: dict[tuple[Hashable, Vector], int] = {}
        for L, z in parts:
            for key, count in _products(terms, L, z, top).items():
                total[key] = total.get(key, 0) + count
        times = total.pop((x, (0,) * len(top)))
        minus = tuple(Term(count, d, z) for (z, d), count in total.items() if count)
        if times < 0:
            times, minus = -times, tuple(Term(-term.count, term.d, term.z) for term in minus)
            parts = tuple((tuple(-a for a in L), z) for L, z in parts)
        return cls(x, times, parts, minus)


def divides(d: Vector, top: Vector) -> bool:
    """Whether ``q^d`` divides ``q^top``."""
    return all(a <= b for a, b in zip(d, top, strict=True))


def _products(terms: Terms, L: Vector, z: Hashable, top: Vector) -> dict[tuple[Hashable, Vector], int]:
    """``L * sigma_z`` as ``{(class, d): count}``, zeros dropped."""
    total: dict[tuple[Hashable, Vector], int] = {}
    for target, d, coroot in terms(z):
        if divides(d, top):
            total[target, d] = total.get((target, d), 0) + sum(a * b for a, b in zip(L, coroot, strict=True))
    return {key: count for key, count in total.items() if count}


def _divisors(rank: int) -> list[Vector]:
    """The divisors tried first: one, or the difference of two."""
    units = [tuple(int(i == j) for j in range(rank)) for i in range(rank)]
    pairs = [(a, b) for k, a in enumerate(units) for b in units[:k]]
    return units + [tuple(x - y for x, y in zip(a, b, strict=True)) for a, b in pairs]


@dataclass(slots=True)
class _Product:
    """``L * sigma_z``: its terms, and how many classes among them are missing."""

    L: Vector
    z: Hashable
    keys: tuple[tuple[Hashable, Vector], ...]
    missing: int


class _Search:
    """The state of one search: classes settled in order, with their steps; products that wait for classes."""

    def __init__(self, terms: Terms, one: Hashable, top: Vector) -> None:
        self.terms, self.top, self.zero = terms, top, (0,) * len(top)
        self.number: dict[Hashable, int] = {}
        self.closure: dict[Hashable, int] = {}
        self.how: dict[Hashable, Parts] = {}
        self.waiting: dict[Hashable, list[_Product]] = {}
        self.heap: list[tuple[int, int, Hashable, int, Parts]] = []
        self.pushed = self.products = 0
        self.settle(one, 0)

    def settle(self, x: Hashable, closure: int) -> None:
        """Reach x; what waited for it goes on when only one class is missing."""
        self.number[x] = len(self.number)
        self.closure[x] = closure | 1 << self.number[x]
        for product in self.waiting.pop(x, ()):
            product.missing -= 1
            if product.missing == 1:
                self.offer(product)

    def offer(self, product: "_Product") -> None:
        """One class is missing in a product: if it stands there without q, the product reaches it."""
        left = [(x, d) for x, d in product.keys if x not in self.closure]
        if len(left) == 1 and left[0][1] == self.zero:
            self.push(left[0][0], ((product.L, product.z),), [product.z, *(x for x, _ in product.keys if x in self.closure)])

    def push(self, x: Hashable, parts: "Parts", used: Iterable[Hashable]) -> None:
        """A way to reach x, with its cost."""
        closure = reduce(or_, (self.closure[z] for z in used))
        self.pushed += 1
        heappush(self.heap, (closure.bit_count(), self.pushed, x, closure, parts))

    def open(self, z: Hashable, divisors: Iterable[Vector]) -> None:
        """All products of a settled class with some divisors."""
        above: dict[tuple[Hashable, Vector], Vector] = {}
        for target, d, coroot in self.terms(z):
            if divides(d, self.top):
                old = above.get((target, d))
                above[target, d] = tuple(map(add, old, coroot)) if old else coroot
        for L in divisors:
            self.products += 1
            sparse = [(i, a) for i, a in enumerate(L) if a]
            keys = tuple(key for key, coroot in above.items() if sum(a * coroot[i] for i, a in sparse))
            left = {x for x, _ in keys if x not in self.closure}
            product = _Product(L, z, keys, len(left))
            if len(left) == 1:
                self.offer(product)
            elif left:
                for x in left:
                    self.waiting.setdefault(x, []).append(product)

    def unstick(self, z: Hashable) -> None:
        """Divisors made to measure: such that of the classes above z that are missing only one is left."""
        covers = [(x, coroot) for x, d, coroot in self.terms(z) if not any(d) and x not in self.closure]
        found = (annihilator([c for y, c in covers if y != x], coroot) for x, coroot in covers)
        self.open(z, [L for L in found if L is not None])

    def add_up(self, length: Callable[[Hashable], int]) -> None:
        """On G/B, when nothing else helps: the missing classes of the lowest level, from sums of products with all classes below."""
        covers = {z: [(x, c) for x, d, c in self.terms(z) if not any(d) and x not in self.closure] for z in self.closure}
        lowest = min((length(z) for z, above in covers.items() if above), default=None)
        names = list(dict.fromkeys(x for z, above in covers.items() if length(z) == lowest for x, _ in above))
        below = [z for z, above in covers.items() if above and length(z) == lowest]
        place = {x: k for k, x in enumerate(names)}
        rows = {k: [(place[x], c) for x, c in covers[z]] for k, z in enumerate(below)}
        for k, found in eliminated(rows, set(place.values()), len(self.top)).items() if below else ():
            parts = tuple((L, below[z]) for L, z in found.parts)
            step = Step.of(self.terms, names[k], parts, self.top)
            used = [*(z for _, z in parts), *(term.z for term in step.minus)]
            if all(z in self.closure for z in used):
                self.push(names[k], parts, used)


def expression(
    terms: Terms,
    one: Hashable,
    target: Hashable,
    top: Vector,
    length: Callable[[Hashable], int],
    *,
    complete: bool,
    most: int = _MOST_PRODUCTS,
) -> list[Step] | None:
    """A short list of steps from ``one``, the unit, to ``target``; ``None`` if none is found.

    Args:
        terms: the quantum Chevalley formula.
        top: powers of q that do not divide ``q^top`` are left out; one entry per marked node.
        length: the length of a class; only products with classes shorter than the target are tried.
        complete: on G/B, where the divisors generate the ring, sums of products are tried when single ones do not suffice.
    most: after so many products with divisors the search gives up; the default takes about a second.
    """
    search, divisors, high = _Search(terms, one, top), _divisors(len(top)), length(target)
    todo = [one]
    while target not in search.closure and search.products < most:
        for z in todo:
            if length(z) < high:
                search.open(z, divisors)
        todo = []
        if not search.heap:
            for z in list(search.closure):
                if length(z) < high:
                    search.unstick(z)
            if not search.heap and complete:
                search.add_up(length)
            if not search.heap:
                return None
        _, _, x, closure, parts = heappop(search.heap)
        if x not in search.closure:
            search.how[x] = parts
            search.settle(x, closure)
            todo = [x]
    if target not in search.closure:
        return None
    needed = [x for x, k in search.number.items() if search.closure[target] >> k & 1 and x != one]
    return [Step.of(terms, x, search.how[x], top) for x in needed]


def by_relations(
    terms: Terms, one: Hashable, target: Hashable, top: Vector, parts_of: Callable[[Hashable], Iterable[tuple[Vector, Hashable]]]
) -> list[Step]:
    """Steps to a class when it is known for each class how it is reached from shorter ones: always there, seldom short."""
    steps: dict[Hashable, Step] = {}
    stack = [target]
    while stack:
        x = stack[-1]
        if x == one or x in steps:
            stack.pop()
            continue
        step = Step.of(terms, x, parts_of(x), top)
        missing = [z for z in (*(z for _, z in step.parts), *(term.z for term in step.minus)) if z != one and z not in steps]
        if missing:
            stack.extend(missing)
        else:
            stack.pop()
            steps[x] = step
    return list(steps.values())


def element(group: WeylGroup, word: Vector) -> Vector:
    """The element of a word."""
    return group.times(group.identity, *(i - 1 for i in word))


def lifted(group: WeylGroup, case: Case) -> tuple[Vector, Vector]:
    """The degree and the class w on G/B at which the constant of a case on G/P is found; u and v stay what they are.

    Source: Peterson and Woodward, see ``oracle.comparison``.
    """
    X = case.X
    top = lift(X.kind, X.marked, case.d)
    levi = tuple(i for i in range(1, X.rank + 1) if i not in X.marked)
    flat = tuple(i for i in levi if not sum(c * group.pairings[j][i - 1] for j, c in enumerate(top)))
    both = (*case.w.word, *longest_word(X.kind, levi), *longest_word(X.kind, flat))
    return top, element(group, both)
