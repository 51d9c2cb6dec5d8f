"""Flag varieties of a family, simplest first."""

from hypothesis import strategies as st
from hypothesis.errors import InvalidArgument

from conjcheck.geometry.families import Family
from conjcheck.geometry.flag_variety import MOST_CLASSES, FlagVariety
from conjcheck.geometry.weyl import number_of_cosets
from conjcheck.strategies.arguments import read_family, read_integer
from conjcheck.strategies.urns import Urn

__all__ = ["flag_varieties", "members"]

_DEFAULT_MAX_N = 5


def flag_varieties(
    on: Family, *, min_n: int = 2, max_n: int | None = None, max_classes: int = MOST_CLASSES
) -> st.SearchStrategy[FlagVariety]:
    """Flag varieties of a family, each with about the same probability.

    Shrinks towards the smallest variety of the family, in the order of ``FlagVariety.sort_key``: first n, then the place among
    the varieties of that n, which are in order of their marked nodes and dimension.

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
    return _drawn(members(on, min_n=min_n, max_n=max_n, max_classes=max_classes))


@st.composite
def _drawn(draw: st.DrawFn, varieties: Urn[FlagVariety]) -> FlagVariety:
    return varieties.draw(draw)


def members(on: Family, *, min_n: int, max_n: int | None, max_classes: int) -> Urn[FlagVariety]:
    """The varieties within the bounds; the bounds are checked."""
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
    return Urn(found, level=lambda X: X.n, level_first=True)
