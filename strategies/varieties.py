"""Flag varieties of a family, simplest first."""

from hypothesis import strategies as st
from hypothesis.errors import InvalidArgument

from conjcheck.geometry.families import Family
from conjcheck.geometry.flag_variety import MOST_CLASSES, FlagVariety
from conjcheck.geometry.weyl import number_of_cosets
from conjcheck.strategies.arguments import read_family, read_integer

__all__ = ["flag_varieties", "members"]

_DEFAULT_MAX_N = 5


def flag_varieties(
    on: Family, *, min_n: int = 2, max_n: int | None = None, max_classes: int = MOST_CLASSES
) -> st.SearchStrategy[FlagVariety]:
    """Flag varieties of a family, up to 256 of them each with the same probability.

    Shrinks towards the smallest variety of the family, in the order of ``FlagVariety.sort_key`` (rank, marked nodes, dimension).
    One choice.

    Args:
        on: the family.
        min_n: the least ``X.n``, the rank plus one.
        max_n: the greatest ``X.n``; by default the largest n of a finite family, and 5 for an infinite one.
        max_classes: leave varieties out that have more Schubert classes; decided without enumerating them.

    Cost: the varieties within the bounds are listed once, when the strategy is made; a draw is constant.

    Raises:
        InvalidArgument: at once, also if no variety is within the bounds.

    >>> from conjcheck.geometry.families import Grassmannians
    >>> from hypothesis import find
    >>> find(flag_varieties(Grassmannians()), lambda X: X.dim >= 3)
    FlagVariety('Gr(1,4)')
    """
    return st.sampled_from(members(on, min_n=min_n, max_n=max_n, max_classes=max_classes))


def members(on: Family, *, min_n: int, max_n: int | None, max_classes: int) -> tuple[FlagVariety, ...]:
    """The varieties within the bounds, in order; the bounds are checked."""
    family = read_family(on)
    low, most = read_integer("min_n", min_n, least=2), read_integer("max_classes", max_classes, least=1)
    if max_n is not None:
        high = read_integer("max_n", max_n, least=2)
    else:
        high = family.last_rank + 1 if family.last_rank is not None else max(low, _DEFAULT_MAX_N)
    if high < low:
        raise InvalidArgument(f"expected max_n of at least min_n={low}, got max_n={high}")
    found = tuple(X for rank in range(low - 1, high) for X in family.of_rank(rank) if number_of_cosets(X.kind, X.marked) <= most)
    if not found:
        raise InvalidArgument(
            f"expected at least one variety of {family} with {low} <= n <= {high} and at most {most:,} classes, got none; "
            "widen min_n, max_n or max_classes"
        )
    return found
