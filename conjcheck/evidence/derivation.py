"""Why the oracle says so: a chain of products with divisors that a person can check by hand, in the notation of the space.

One factor is reached from the unit by steps ``sigma_x = L * sigma_z - (known terms)``, and each step is multiplied by the other
factor, by associativity; every product with a divisor is one use of the quantum Chevalley formula. The chain runs on G/P or, where that
is shorter or the divisors of G/P do not suffice, on G/B, with the lift of Peterson and Woodward.
"""

from collections.abc import Hashable, Iterable
from dataclasses import dataclass
from typing import Any

from conjcheck.errors import EnginesDisagree, OutOfReach
from conjcheck.evidence.expression import Step, divides, expression, lifted
from conjcheck.geometry.case import Case
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass
from conjcheck.oracle import constant
from conjcheck.oracle.chevalley import chevalley
from conjcheck.oracle.engine import Product
from conjcheck.recheck import RANKS, WeylGroup

__all__ = ["Derivation", "Edge", "Node", "derivation"]

Node = tuple[int, Degree]
"""A class of ``Derivation.space``, by its 0-based index, and a power of q."""

Edge = tuple[Node, Node]
"""A Chevalley term: from ``q^d sigma_x`` to a term of its product with a divisor."""

_MOST_CLASSES = 6_000
_MOST_PRODUCTS = 8_000
_MOST_STEPS = 60
_MOST_TERMS = 12


@dataclass(frozen=True, slots=True)
class Derivation:
    """A chain that leads to one constant.

    Attributes:
        lines: the chain, one sentence each.
        edges: the Chevalley terms that contribute to the constant; none where it is 0 because nothing does.
        complete: whether ``lines`` hold the whole chain.
        space: where the chain runs: the space of the case, or its complete flag variety.
    """

    lines: tuple[str, ...]
    edges: tuple[Edge, ...]
    complete: bool
    space: FlagVariety


def derivation(case: Case, *, most_lines: int = 20) -> Derivation:
    """A short chain that gives the oracle's value at a case.

    Args:
        case: where; the constant is the one of the quantum ring, not of an equivariant one.
        most_lines: longer chains are cut in the middle, and say so.

    Cost: under a second.

    Raises:
        OutOfReach: no chain within a few dozen steps was found, or G/B is too large; the message says which.
        EnginesDisagree: the chain gives another value than the oracle.
    """
    if not case.obeys_degree_axiom:
        weight = sum(a * b for a, b in zip(case.d, case.X.q_degrees, strict=True))
        line = f"N = 0 by degrees: l(u) + l(v) = {case.u.length + case.v.length}, l(w) + deg q^d = {case.w.length + weight}"
        return Derivation((line,), (), True, case.X)
    chain = _shortest(case)
    truth = constant(case.u, case.v, case.w, case.d)
    if chain.value != truth:
        raise EnginesDisagree(
            f"expected {truth} at {case}, as the oracle says, got {chain.value} from the Chevalley formula step by step; please report this"
        )
    lines = list(chain.lines())
    if left := max(len(lines) - max(most_lines, 3), 0):
        lines[-2 - left : -1] = [f"... {left + 1} more steps are left out"]
    return Derivation(tuple(lines), tuple(sorted(chain.edges)), not left, chain.X)


def _shortest(case: Case) -> "_Chain":
    """The shorter one of the chains on G/P and on G/B, where the lift counts as a step and the divisors of G/P need not reach a factor."""
    X = case.X
    whole = FlagVariety(f"{X.kind}/B")
    found = []
    if X.number_of_classes <= _MOST_CLASSES:
        found.append(_chain(case, X, case.w, case.d))
    if whole is not X and whole.number_of_classes <= _MOST_CLASSES and X.rank <= RANKS[X.kind.letter][1]:
        group = WeylGroup(X.kind.letter, X.rank)
        top, target = lifted(group, case)
        found.append(_chain(case, whole, whole.schubert(word=group.word(target)), top))
    chains = [chain for chain in found if chain]
    if not chains:
        why = (
            f"{whole} is too large for one"
            if whole.number_of_classes > _MOST_CLASSES
            else f"none within {_MOST_STEPS} steps was found"
        )
        raise OutOfReach(f"expected a short chain of Chevalley products for {case}, got none: {why}")
    return min(chains, key=lambda chain: len(chain.steps) + (chain.X is not X))


def _chain(case: Case, X: FlagVariety, w: SchubertClass, top: Degree) -> "_Chain | None":
    """A chain on X for the coefficient of ``q^top sigma_w``; v is expanded if both factors take the same number of steps."""
    u, v = (X.schubert(word=x.word) for x in (case.u, case.v))
    terms: Any = chevalley(X).terms
    length: Any = lambda index: X.classes[index].length  # noqa: E731
    best: _Chain | None = None
    for long, other in sorted(((v, u), (u, v)), key=lambda pair: pair[0].length):
        if long.length > (len(best.steps) - 1 if best else _MOST_STEPS):
            break  # a class of length l takes l steps at least
        steps = expression(terms, 0, long.index, top, length, complete=X.is_complete, most=_MOST_PRODUCTS)
        if steps is not None and len(steps) <= _MOST_STEPS and (best is None or len(steps) < len(best.steps)):
            best = _Chain(case, X, long, other, w, top, steps)
    return best


class _Chain:
    """All products of a chain, and what of them enters the constant."""

    def __init__(
        self,
        case: Case,
        X: FlagVariety,
        long: SchubertClass,
        other: SchubertClass,
        w: SchubertClass,
        top: Degree,
        steps: list[Step],
    ) -> None:
        self.case, self.X, self.long, self.other, self.w, self.top, self.steps = case, X, long, other, w, top, steps
        self.terms = chevalley(X).terms
        self.products: dict[Hashable, dict[Node, int]] = {0: {(other.index, (0,) * len(top)): 1}}
        for step in steps:
            self.products[step.x] = self._multiplied(step)
        self.value = self.products[long.index].get((w.index, top), 0)
        self.entering: dict[Hashable, set[Node]] = {x: set() for x in self.products}
        self.edges: set[Edge] = set()
        self._trace()

    def _multiplied(self, step: Step) -> dict[Node, int]:
        """``sigma_x * sigma_other``, from the products before."""
        total: dict[Node, int] = {}
        for L, z in step.parts:
            for node, count in self.products[z].items():
                for other, size in self._moves(L, node):
                    total[other] = total.get(other, 0) + size * count
        for term in step.minus:
            for (y, e), count in self.products[term.z].items():
                if divides(d := _sum(e, term.d), self.top):
                    total[y, d] = total.get((y, d), 0) - term.count * count
        return {node: count // step.times for node, count in total.items() if count}

    def _moves(self, L: tuple[int, ...], node: Node) -> Iterable[tuple[Node, int]]:
        """The terms of ``L * q^e sigma_y``."""
        y, e = node
        for target, d, coroot in self.terms(y):
            size = sum(a * b for a, b in zip(L, coroot, strict=True))
            if size and divides(power := _sum(e, d), self.top):
                yield (target, power), size

    def _trace(self) -> None:
        """From the constant backwards: which terms of which products enter it, along which edges."""
        if self.value:
            self.entering[self.long.index].add((self.w.index, self.top))
        for step in reversed(self.steps):
            wanted = self.entering[step.x]
            for L, z in step.parts:
                for node in self.products[z]:
                    for other, _ in self._moves(L, node):
                        if other in wanted:
                            self.entering[z].add(node)
                            self.edges.add((node, other))
            for term in step.minus:
                self.entering[term.z] |= {(y, e) for y, e in self.products[term.z] if (y, _sum(e, term.d)) in wanted}

    def lines(self) -> Iterable[str]:
        """The chain in words."""
        X, top, zero = self.X, self.top, (0,) * len(self.top)
        goal = f"{_power(top)}{self.w!r}"
        u, v = (X.schubert(word=x.word) for x in (self.case.u, self.case.v))
        if X is not self.case.X:
            yield f"lifted to {X} (Peterson, Woodward): N is the coefficient of {goal} in {u!r} * {v!r}"
        used = sorted({i for step in self.steps for L, _ in step.parts for i, a in zip(X.marked, L, strict=True) if a})
        if used:
            named = ", ".join(f"D{i} = {X.schubert(word=(i,))!r}" for i in used)
            left_out = (
                f"; powers of q that do not divide q^({','.join(map(str, top))}) are left out" if top != zero else "; modulo q"
            )
            yield f"divisors: {named}{left_out}"
        for step in self.steps:
            expressed = self._expressed(step, lambda z: "" if z == 0 else f" * {self._class(z)}", self._class)
            yield f"{expressed}, so {self._class(step.x)} * {self.other!r} = {self._shown(step.x)}"
        if not self.steps:
            yield f"{X.identity!r} is the unit, so the product is {self.other!r}"
        yield f"so N = {self.value}, the coefficient of {goal}" if self.value else f"so N = 0: {goal} does not occur"

    def _class(self, index: Any) -> str:
        return "1" if index == 0 else repr(self.X.classes[index])

    def _expressed(self, step: Step, factor: Any, name: Any) -> str:
        """``2 sigma_x = D1 * sigma_z - q^(1,0) sigma_y``."""
        text = f"{_size(step.times)}{name(step.x)} = " + " + ".join(f"{self._divisor(L)}{factor(z)}" for L, z in step.parts)
        for term in step.minus:
            text += f" {'-' if term.count > 0 else '+'} {_size(abs(term.count))}{_power(term.d)}{name(term.z)}"
        return text

    def _divisor(self, L: tuple[int, ...]) -> str:
        """``D2``, or ``(D2 - D1)``."""
        parts = [(a, f"{_size(abs(a))}D{i}") for i, a in zip(self.X.marked, L, strict=True) if a]
        parts.sort(key=lambda part: part[0] < 0)
        text = "".join(f" {'-' if a < 0 else '+'} {name}" for a, name in parts)
        text = text.removeprefix(" + ") if parts[0][0] > 0 else "-" + text.removeprefix(" - ")
        return text if len(parts) == 1 and parts[0][0] > 0 else f"({text})"

    def _shown(self, x: Hashable) -> str:
        """A product; where it is long only what enters the constant."""
        product, kept = self.products[x], self.products[x]
        if len(product) > _MOST_TERMS:
            kept = {node: count for node, count in product.items() if node in self.entering[x]}
        text = str(Product.of({(self.X.classes[y], d): count for (y, d), count in kept.items()}))
        if left := len(product) - len(kept):
            rest = f"{left} {'term' if left == 1 else 'terms'} that {'does' if left == 1 else 'do'} not enter"
            return f"{text} + {rest}" if kept else rest
        return text


def _sum(a: Degree, b: Degree) -> Degree:
    return tuple(x + y for x, y in zip(a, b, strict=True))


def _size(count: int) -> str:
    return "" if count == 1 else f"{count} "


def _power(d: Degree) -> str:
    return f"q^({','.join(map(str, d))}) " if any(d) else ""
