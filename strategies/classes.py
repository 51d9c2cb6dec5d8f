"""Schubert classes of one flag variety: all, Grassmannian, with given descents, avoiding patterns."""

from collections.abc import Iterable
from functools import lru_cache

import numpy as np
from hypothesis import strategies as st
from hypothesis.errors import InvalidArgument

from conjcheck.errors import NotationError
from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass
from conjcheck.geometry.notation import read_integers
from conjcheck.strategies.arguments import read_integer, read_variety
from conjcheck.strategies.patterns import contains
from conjcheck.strategies.urns import Urn

__all__ = ["schubert_classes"]

Pattern = tuple[int, ...]


def schubert_classes(
    X: FlagVariety,
    *,
    grassmannian: bool = False,
    at: int | None = None,
    descents: Iterable[int] | None = None,
    avoiding: Iterable[int] | Iterable[Iterable[int]] | None = None,
) -> st.SearchStrategy[SchubertClass]:
    """Schubert classes of a flag variety, each with about the same probability. Restrictions add up.

    Shrinks towards the first of the allowed classes in the order of ``X.classes``: length, then lexicographic. One choice up to 256
    classes; beyond, the length, then the place among the classes of that length.

    Args:
        X: the flag variety.
        grassmannian: only classes with at most one descent.
        at: the marked node (1-based) where that descent has to be; the identity has none and is allowed.
        descents: only classes with exactly these descents, a set of marked nodes (1-based).
        avoiding: only permutations that avoid a pattern, such as ``(1, 3, 2)``, or each of several, such as
            ``[(2, 1, 4, 3), (3, 1, 4, 2)]``; patterns in one-line notation, 1-based. Type A only.

    Cost: the allowed classes are listed once and kept; on ``Fl(8)`` with its 40,320 classes this takes about 0.2 s. A draw is
    constant; nothing is drawn and then thrown away.

    Raises:
        InvalidArgument: at once, also if no class is allowed.
        OutOfReach: X has too many classes to enumerate.

    >>> from conjcheck.geometry.flag_variety import Fl
    >>> from hypothesis import find
    >>> find(schubert_classes(Fl(4), grassmannian=True, at=2), lambda u: u.length == 2)
    sigma[1423]
    """
    read_variety(X)
    if not isinstance(grassmannian, bool):
        raise InvalidArgument(f"expected True or False for grassmannian, got grassmannian={grassmannian!r}; a node goes into at=")
    if at is not None:
        if not grassmannian:
            raise InvalidArgument(f"expected at= only together with grassmannian=True, got at={at!r}")
        if read_integer("at", at, least=1) not in X.marked:
            raise InvalidArgument(f"expected one of the marked nodes {X.marked} of {X} for at, got at={at}")
    wanted = None if descents is None else _read_nodes(X, descents)
    patterns = () if avoiding is None else _read_patterns(X, avoiding)
    found = _selection(X, grassmannian, at, wanted, patterns)
    if not found:
        raise InvalidArgument(
            f"expected restrictions that some class of {X} satisfies, got none with grassmannian={grassmannian}, at={at}, "
            f"descents={wanted}, avoiding={patterns or None}"
        )
    return _drawn(Urn(found, level=lambda u: u.length))


@st.composite
def _drawn(draw: st.DrawFn, urn: Urn[SchubertClass]) -> SchubertClass:
    return urn.draw(draw)


def _read_nodes(X: FlagVariety, descents: Iterable[int]) -> tuple[int, ...]:
    """A set of marked nodes, rising."""
    try:
        nodes = read_integers("descents", descents)
    except NotationError as error:
        raise InvalidArgument(str(error)) from None
    for node in nodes:
        if node not in X.marked:
            raise InvalidArgument(f"expected marked nodes of {X}, some of {X.marked}, for descents, got {node} in descents={nodes}")
    return tuple(sorted(set(nodes)))


def _read_patterns(X: FlagVariety, avoiding: Iterable[int] | Iterable[Iterable[int]]) -> tuple[Pattern, ...]:
    """One or several patterns."""
    if X.kind.letter != "A":
        raise InvalidArgument(f"expected a variety of type A together with avoiding=, got {X}: its classes are no permutations")
    if isinstance(avoiding, str) or not isinstance(avoiding, Iterable):
        raise InvalidArgument(f"expected a pattern such as (1, 3, 2), or a list of them, for avoiding, got avoiding={avoiding!r}")
    entries = list(avoiding)
    several = [entries] if entries and all(isinstance(entry, int) for entry in entries) else entries
    patterns = []
    for entry in several:
        if isinstance(entry, int):
            raise InvalidArgument(f"expected either one pattern or a list of patterns for avoiding, got a mixture: {entries!r}")
        try:
            pattern = read_integers("avoiding", entry)  # type: ignore[arg-type]  # it says itself what is wrong with it
        except NotationError as error:
            raise InvalidArgument(str(error)) from None
        if not pattern or sorted(pattern) != list(range(1, len(pattern) + 1)):
            raise InvalidArgument(f"expected a pattern to be a permutation of 1..k in one-line notation, got {pattern} in avoiding")
        patterns.append(pattern)
    return tuple(sorted(set(patterns)))


@lru_cache(maxsize=256)
def _selection(
    X: FlagVariety, grassmannian: bool, at: int | None, descents: tuple[int, ...] | None, patterns: tuple[Pattern, ...]
) -> tuple[SchubertClass, ...]:
    """The allowed classes, in order."""
    found = X.classes
    if grassmannian:
        found = tuple(u for u in found if len(u.descents) <= 1 and (at is None or u.descents in ((), (at,))))
    if descents is not None:
        found = tuple(u for u in found if u.descents == descents)
    for pattern in patterns:
        if found and len(pattern) <= X.n:
            inside = contains(np.array([u.permutation for u in found], dtype=np.int64), pattern)
            found = tuple(u for u, bad in zip(found, inside.tolist(), strict=True) if not bad)
    return found
