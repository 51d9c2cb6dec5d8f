"""Families: the ordered, usually infinite, sets of flag varieties that a conjecture speaks about."""

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace
from itertools import combinations, count

from conjcheck.errors import DeclarationError
from conjcheck.geometry.flag_variety import Fl, FlagVariety, Gr

__all__ = ["CompleteFlags", "Family", "Grassmannians", "PartialFlags", "ProjectiveSpaces", "StepFlags", "Varieties"]


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


def CompleteFlags() -> Family:
    """All ``Fl(n)``, n >= 2."""
    return Family("complete flag varieties", lambda rank: [Fl(rank + 1)])


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
