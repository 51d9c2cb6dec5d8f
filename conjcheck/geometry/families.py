"""Families: the ordered, usually infinite, sets of flag varieties that a conjecture speaks about."""

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace
from itertools import combinations, count

from conjcheck.errors import DeclarationError, NotationError
from conjcheck.geometry.cartan import CartanType, cartan_matrix, cominuscule_nodes, positive_roots
from conjcheck.geometry.flag_variety import MOST_CLASSES, Fl, FlagVariety, Gr
from conjcheck.geometry.weyl import number_of_cosets

__all__ = [
    "Adjoint",
    "Cominuscule",
    "CompleteFlags",
    "Family",
    "Grassmannians",
    "HomogeneousSpaces",
    "IsotropicGrassmannians",
    "LagrangianGrassmannians",
    "Minuscule",
    "OrthogonalGrassmannians",
    "PartialFlags",
    "ProjectiveSpaces",
    "StepFlags",
    "Varieties",
]

_TYPES = "ABCDEFG"


@dataclass(frozen=True, slots=True)
class Family:
    """A set of flag varieties that enumerates itself in the one order of ``FlagVariety.sort_key``, smallest first.

    Iterating never ends for an infinite family; ``up_to(n)`` and ``of_rank(r)`` do.

    Attributes:
        name: how reports call it.
        of_rank_unsorted: from a rank (n - 1 in type A) to the varieties of that rank.
        last_rank: the largest rank that occurs, ``None`` for an infinite family.
    """

    name: str
    of_rank_unsorted: Callable[[int], Iterable[FlagVariety]]
    last_rank: int | None = None

    def of_rank(self, rank: int) -> list[FlagVariety]:
        """The varieties of one rank, in order."""
        return sorted(set(self.of_rank_unsorted(rank))) if self.last_rank is None or rank <= self.last_rank else []

    def __iter__(self) -> Iterator[FlagVariety]:
        for rank in count(1) if self.last_rank is None else range(1, self.last_rank + 1):
            yield from self.of_rank(rank)

    def __contains__(self, X: object) -> bool:
        return isinstance(X, FlagVariety) and X in self.of_rank(X.rank)

    def __str__(self) -> str:
        return self.name

    def up_to(self, n: int) -> Iterator[FlagVariety]:
        """The varieties of rank n - 1 or less, in order: in type A, those inside C^n.

        >>> [X.name for X in Grassmannians().up_to(3)]
        ['Gr(1,2)', 'Gr(1,3)', 'Gr(2,3)']
        """
        for rank in range(1, n):
            yield from self.of_rank(rank)

    def where(self, predicate: Callable[[FlagVariety], bool], *, words: str | None = None) -> "Family":
        """The varieties of this family that satisfy a predicate; ``words`` is what reports say of it.

        >>> [X.name for X in Grassmannians().where(lambda X: X.n == 2 * X.steps[0], words="k = n/2").up_to(4)]
        ['Gr(1,2)', 'Gr(2,4)']
        """
        if not callable(predicate):
            raise DeclarationError(f"expected a function of one flag variety, got predicate={predicate!r}")
        inner = self.of_rank_unsorted
        label = words or getattr(predicate, "__name__", "predicate").replace("<lambda>", "a predicate")
        return replace(
            self, name=f"{self.name} where {label}", of_rank_unsorted=lambda rank: [X for X in inner(rank) if predicate(X)]
        )


def Grassmannians() -> Family:
    """All ``Gr(k, n)``, n >= 2."""
    return replace(StepFlags(1), name="Grassmannians")


def ProjectiveSpaces() -> Family:
    """All ``P^(n-1) = Gr(1, n)``."""
    return Family("projective spaces", lambda rank: [Gr(1, rank + 1)])


def CompleteFlags(types: str = "A") -> Family:
    """All ``Fl(n)``, n >= 2; with ``types`` all G/B of these Cartan types, by rank.

    >>> [X.name for X in CompleteFlags("ABCG").up_to(3)]
    ['Gr(1,2)', 'Fl(3)', 'B2/B', 'C2/B', 'G2/B']
    """
    letters = _read_types(types)
    if letters == "A":
        return Family("complete flag varieties", lambda rank: [Fl(rank + 1)])
    return Family(
        f"complete flag varieties {_of_types(letters)}", _quotients(letters, lambda kind: [_all(kind)]), _last_rank(letters)
    )


def StepFlags(m: int) -> Family:
    """All ``Fl(k1, ..., km; n)`` with exactly m steps.

    >>> [X.name for X in StepFlags(2).up_to(4)]
    ['Fl(3)', 'Fl(1,2;4)', 'Fl(1,3;4)', 'Fl(2,3;4)']
    """
    if not isinstance(m, int) or m < 1:
        raise DeclarationError(f"expected a number of steps of 1 or more, got m={m!r}")
    name = f"{m}-step flag varieties"
    return Family(name, lambda rank: [Fl(*steps, n=rank + 1) for steps in combinations(range(1, rank + 1), m)])


def PartialFlags() -> Family:
    """All ``Fl(k1, ..., km; n)``, any steps."""
    return Family(
        "partial flag varieties",
        lambda rank: [X for m in range(1, rank + 1) for X in StepFlags(m).of_rank_unsorted(rank)],
    )


def Varieties(*varieties: FlagVariety | str) -> Family:
    """An explicit finite list, given as varieties or names.

    >>> [X.name for X in Varieties("Fl(1,3;4)", Gr(2, 4))]
    ['Gr(2,4)', 'Fl(1,3;4)']
    """
    members = sorted({X if isinstance(X, FlagVariety) else FlagVariety(X) for X in varieties})
    if not members:
        raise DeclarationError("expected at least one flag variety, got none")
    name = ", ".join(X.name for X in members)
    return Family(name, lambda rank: [X for X in members if X.rank == rank], max(X.rank for X in members))


def HomogeneousSpaces(types: str = _TYPES, *, most_classes: int = MOST_CLASSES) -> Family:
    """All G/P with at most ``most_classes`` Schubert classes, G simple of the given Cartan types, P any parabolic subgroup.

    ``B2`` and ``C2`` both occur: they are one group with two numberings of the nodes. Spaces with too many classes are left out without
    being looked at one by one, so that a rank costs about as much as the spaces it has.

    >>> [X.name for X in HomogeneousSpaces("AG").up_to(3)]
    ['Gr(1,2)', 'Gr(1,3)', 'Gr(2,3)', 'G2/P1', 'G2/P2', 'Fl(3)', 'G2/B']
    """
    letters = _read_types(types)
    if type(most_classes) is not int or most_classes < 2:
        raise DeclarationError(f"expected a number of classes of 2 or more, got most_classes={most_classes!r}")

    def members(kind: CartanType) -> Iterator[tuple[int, ...]]:
        todo: list[tuple[int, ...]] = [(node,) for node in _all(kind)]
        while todo:
            marked = todo.pop()
            if number_of_cosets(kind, marked) <= most_classes:  # one more marked node, and there are more classes
                yield marked
                todo.extend((*marked, node) for node in range(marked[-1] + 1, kind.rank + 1))

    name = f"homogeneous spaces G/P {_of_types(letters)} with at most {most_classes:,} classes"
    return Family(name, _quotients(letters, members), _last_rank(letters))


def Cominuscule() -> Family:
    """All G/P_i with i cominuscule: the simple root ``alpha_i`` occurs once in the highest root.

    These are ``Gr(k,n)``, ``Q^N``, ``LG(n,2n)``, ``OG(n,2n)``, ``D_n/P_{n-1}``, ``E6/P1``, ``E6/P6`` and ``E7/P7``.

    >>> [X.name for X in Cominuscule().of_rank(4)]
    ['Gr(1,5)', 'Gr(4,5)', 'Gr(2,5)', 'Gr(3,5)', 'Q^6', 'D4/P3', 'OG(4,8)', 'Q^7', 'LG(4,8)']
    """
    return Family("cominuscule varieties", _quotients(_TYPES, lambda kind: [(i,) for i in cominuscule_nodes(kind)]))


def Minuscule() -> Family:
    """All G/P_i with i minuscule: ``alpha_i^vee`` occurs once in the highest coroot; as cominuscule, with B and C exchanged.

    >>> [X.name for X in Minuscule().of_rank(4) if X.kind.letter != "A"]
    ['Q^6', 'D4/P3', 'OG(4,8)', 'IG(1,8)', 'OG(4,9)']
    """

    def nodes(kind: CartanType) -> list[tuple[int, ...]]:
        dual = CartanType({"B": "C", "C": "B"}.get(kind.letter, kind.letter), kind.rank)
        return [(i,) for i in cominuscule_nodes(dual)]

    return Family("minuscule varieties", _quotients(_TYPES, nodes))


def Adjoint() -> Family:
    """The adjoint variety of each type: the orbit of the highest root, whose support in fundamental weights is marked.

    In type A this is ``Fl(1,n-1;n)``, in type C ``IG(1,2n) = P^(2n-1)`` (the highest root is ``2 omega_1``).

    >>> [X.name for X in Adjoint().of_rank(4)]
    ['IG(1,8)', 'OG(2,8)', 'OG(2,9)', 'F4/P1', 'Fl(1,4;5)']
    """

    def nodes(kind: CartanType) -> list[tuple[int, ...]]:
        highest, matrix = positive_roots(kind)[-1][0], cartan_matrix(kind)
        weight = [sum(a * row[j] for a, row in zip(highest, matrix, strict=True)) for j in range(kind.rank)]
        return [tuple(j for j, coefficient in enumerate(weight, start=1) if coefficient)]

    return Family("adjoint varieties", _quotients(_TYPES, nodes))


def IsotropicGrassmannians() -> Family:
    """All ``B_n/P_k``, ``C_n/P_k`` and ``D_n/P_k``. Not among them: ``OG(n-1,2n)``, which has two marked nodes.

    >>> [X.name for X in IsotropicGrassmannians().up_to(4)]
    ['Q^3', 'OG(2,5)', 'IG(1,4)', 'LG(2,4)', 'Q^5', 'IG(1,6)', 'OG(3,7)', 'LG(3,6)', 'OG(2,7)', 'IG(2,6)']
    """
    return Family("isotropic Grassmannians", _quotients("BCD", lambda kind: [(node,) for node in _all(kind)]))


def LagrangianGrassmannians() -> Family:
    """All ``LG(n,2n)``, n >= 2."""
    return Family("Lagrangian Grassmannians", _quotients("C", lambda kind: [(kind.rank,)]))


def OrthogonalGrassmannians() -> Family:
    """The maximal ones, of spinors: all ``OG(n,2n+1)``, n >= 2, and ``OG(n,2n)``, n >= 4.

    >>> [X.name for X in OrthogonalGrassmannians().up_to(5)]
    ['OG(2,5)', 'OG(3,7)', 'OG(4,8)', 'OG(4,9)']
    """
    return Family("maximal orthogonal Grassmannians", _quotients("BD", lambda kind: [(kind.rank,)]))


def _read_types(types: str) -> str:
    """Cartan letters, each once, in alphabetical order."""
    if not isinstance(types, str) or not types:
        raise DeclarationError(f"expected Cartan letters such as 'ABCD', got types={types!r}")
    for place, letter in enumerate(types):
        if letter not in _TYPES or letter in types[:place]:
            what = "a second time" if letter in _TYPES else f"as letter {place + 1}"
            raise DeclarationError(f"expected different Cartan letters out of {_TYPES}, got {letter!r} {what} in types={types!r}")
    return "".join(sorted(types))


def _of_types(letters: str) -> str:
    if len(letters) == 1:
        return f"of type {letters}"
    return "of all types" if letters == _TYPES else f"of types {', '.join(letters)}"


def _last_rank(letters: str) -> int | None:
    """The largest rank of these types, ``None`` without end."""
    return max({"E": 8, "F": 4, "G": 2}[letter] for letter in letters) if set(letters) <= set("EFG") else None


def _all(kind: CartanType) -> tuple[int, ...]:
    return tuple(range(1, kind.rank + 1))


def _quotients(letters: str, nodes: Callable[[CartanType], Iterable[tuple[int, ...]]]) -> Callable[[int], Iterator[FlagVariety]]:
    """From a rank to the G/P of the given types, where ``nodes`` lists the sets of marked nodes."""

    def of_rank(rank: int) -> Iterator[FlagVariety]:
        for letter in letters:
            try:
                kind = CartanType(letter, rank)
            except NotationError:  # E, F and G have few ranks, B and C start at 2, D at 4
                continue
            for marked in nodes(kind):
                yield FlagVariety(f"{kind}/P{','.join(map(str, marked))}")

    return of_rank
