"""Traits of one Schubert class: the properties that practitioners sort classes by, for all classes of a variety at once."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from conjcheck.geometry.cartan import cartan_matrix
from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass, orbit_of
from conjcheck.geometry.notation import descents
from conjcheck.geometry.symmetries import seidel
from conjcheck.geometry.weyl import reflected_by_word
from conjcheck.strategies.patterns import contains

__all__ = ["TRAITS", "Bools", "Trait", "bruhat", "trait", "trait_values"]

Bools = NDArray[np.bool_]

_LARGEST_BRUHAT = 1_500


@dataclass(frozen=True, eq=False, slots=True)
class Trait:
    """One property of a Schubert class.

    Attributes:
        name: short and unique.
        yes, no: for a truth value, what reports say of a class ``{}`` that has it, and of one that has not; ``yes`` alone is the
            name of a number.
        both, neither: the same of two classes, joined; empty for a number.
        of: from one class to the value; or ``None``, then ``of_all`` gives those of all classes, ``(N,)``, in order.
        applies: on which varieties it makes sense.
        code: a Python expression for it in terms of ``{}`` (a class) and ``X``; empty if there is no short one.
        oddity: 0 for what comes to mind first, more for what comes later; ties between conditions are broken by it.
    """

    name: str
    yes: str
    no: str
    of: Callable[[SchubertClass], Any] | None
    applies: Callable[[FlagVariety], bool]
    code: str = ""
    oddity: int = 1
    of_all: Callable[[FlagVariety], NDArray[Any]] | None = None

    @property
    def is_truth(self) -> bool:
        """Whether its values are truth values; otherwise they are integers."""
        return bool(self.no)

    def said_of(self, name: str, *, true: bool = True) -> str:
        """What a report says of the class called ``name``."""
        return (self.yes if true else self.no).replace("{}", name)

    def code_of(self, name: str) -> str:
        """The expression for the class called ``name``."""
        return self.code.replace("{}", name)


def _everywhere(X: FlagVariety) -> bool:
    return True


def _type_a(X: FlagVariety) -> bool:
    return X.kind.letter == "A"


def _shapes(X: FlagVariety) -> bool:
    return X.is_grassmannian


def _strict_shapes(X: FlagVariety) -> bool:
    return X.is_maximal_isotropic


def _partitions(X: FlagVariety) -> bool:
    return X.is_grassmannian or X.is_maximal_isotropic


def _inverse(w: Sequence[int]) -> tuple[int, ...]:
    return tuple(i + 1 for i in np.argsort(w).tolist())


def _corners(u: SchubertClass) -> int:
    return len(set(u.partition))


def _diagonal(u: SchubertClass) -> int:
    return sum(part > place for place, part in enumerate(u.partition))


def _conjugate(partition: Sequence[int]) -> tuple[int, ...]:
    return tuple(sum(part > column for part in partition) for column in range(partition[0])) if partition else ()


def _avoids(*patterns: Sequence[int]) -> Callable[[FlagVariety], Bools]:
    def of_all(X: FlagVariety) -> Bools:
        lines = np.array([u.permutation for u in X.classes], dtype=np.int64)
        met = np.zeros(len(lines), dtype=bool)
        for pattern in patterns:
            if len(pattern) <= X.n:
                met |= contains(lines, pattern)
        return ~met

    return of_all


def _avoids_code(pattern: str) -> str:
    """The expression that a permutation avoids a pattern; it needs ``itertools.combinations``."""
    letters = "abcdefgh"[: len(pattern)]
    rising = " < ".join(letters[pattern.index(str(value))] for value in range(1, len(pattern) + 1))
    return f"not any({rising} for {', '.join(letters)} in combinations({{}}.permutation, {len(pattern)}))"


def _pattern(name: str, yes: str, no: str, *patterns: str, oddity: int = 1) -> Trait:
    code = " and ".join(map(_avoids_code, patterns))
    of_all = _avoids(*(tuple(map(int, pattern)) for pattern in patterns))
    return Trait(name, yes, no, None, _type_a, code if len(patterns) == 1 else f"({code})", oddity, of_all)


def _seidel_classes(X: FlagVariety) -> Bools:
    found = np.zeros(len(X.classes), dtype=bool)
    found[seidel(X).units] = True
    return found


TRAITS: tuple[Trait, ...] = (
    Trait("length", "l({})", "", lambda u: u.length, _everywhere, "{}.length", 0),
    Trait("unit", "{} is the unit class", "{} is not the unit class", lambda u: u.length == 0, _everywhere, "{}.length == 0", 0),
    Trait("divisor", "{} is a divisor", "{} is not a divisor", lambda u: u.length == 1, _everywhere, "{}.length == 1", 0),
    Trait(
        "point",
        "{} is the class of a point",
        "{} is not the class of a point",
        lambda u: u is u.variety.point,
        _everywhere,
        "{}.length == X.dim",
        0,
    ),
    Trait("colength", "dim X - l({})", "", lambda u: u.variety.dim - u.length, _everywhere, "X.dim - {}.length", 2),
    Trait("seidel", "{} is a Seidel class", "{} is not a Seidel class", None, _everywhere, "", 1, _seidel_classes),
    Trait("self-dual", "{} is its own dual", "{} is not its own dual", lambda u: u.dual is u, _everywhere, "{}.dual == {}", 2),
    Trait("descents", "the number of descents of {}", "", lambda u: len(u.descents), _everywhere, "len({}.descents)", 1),
    Trait(
        "first", "the first descent of {}", "", lambda u: min(u.descents, default=0), _everywhere, "min({}.descents, default=0)", 2
    ),
    Trait(
        "last", "the last descent of {}", "", lambda u: max(u.descents, default=0), _everywhere, "max({}.descents, default=0)", 2
    ),
    Trait("letters", "the number of letters in {}", "", lambda u: len(set(u.word)), _everywhere, "len(set({}.word))", 2),
    Trait(
        "all-letters",
        "{} has every simple reflection in its word",
        "{} lacks a simple reflection in its word",
        lambda u: len(set(u.word)) == u.variety.rank,
        _everywhere,
        "len(set({}.word)) == X.rank",
        2,
    ),
    # permutations
    Trait(
        "grassmannian",
        "{} is Grassmannian (at most one descent)",
        "{} has two descents or more",
        lambda u: len(u.descents) <= 1,
        _type_a,
        "len({}.descents) <= 1",
        0,
    ),
    Trait(
        "inverse-grassmannian",
        "{} is inverse Grassmannian",
        "{} is not inverse Grassmannian",
        lambda u: len(descents(_inverse(u.permutation))) <= 1,
        _type_a,
        "sum({}.permutation.index(i) > {}.permutation.index(i + 1) for i in range(1, X.n)) <= 1",
    ),
    Trait(
        "inverse-descents",
        "the number of descents of the inverse of {}",
        "",
        lambda u: len(descents(_inverse(u.permutation))),
        _type_a,
        "sum({}.permutation.index(i) > {}.permutation.index(i + 1) for i in range(1, X.n))",
        2,
    ),
    _pattern("vexillary", "{} is vexillary (2143-avoiding)", "{} is not vexillary (contains 2143)", "2143", oddity=0),
    _pattern("dominant", "{} is dominant (132-avoiding)", "{} is not dominant (contains 132)", "132", oddity=0),
    _pattern("321", "{} avoids 321", "{} contains 321", "321"),
    _pattern("1432", "{} avoids 1432", "{} contains 1432", "1432"),
    _pattern("213", "{} avoids 213", "{} contains 213", "213", oddity=2),
    _pattern("231", "{} avoids 231", "{} contains 231", "231", oddity=2),
    _pattern("312", "{} avoids 312", "{} contains 312", "312", oddity=2),
    _pattern("1324", "{} avoids 1324", "{} contains 1324", "1324", oddity=2),
    _pattern("3142", "{} avoids 3142", "{} contains 3142", "3142", oddity=3),
    _pattern("2413", "{} avoids 2413", "{} contains 2413", "2413", oddity=3),
    _pattern("smooth", "{} is smooth (avoids 3412 and 4231)", "{} is singular (contains 3412 or 4231)", "3412", "4231"),
    Trait(
        "involution",
        "{} is an involution",
        "{} is no involution",
        lambda u: _inverse(u.permutation) == u.permutation,
        _type_a,
        "all({}.permutation[j - 1] == i for i, j in enumerate({}.permutation, 1))",
        2,
    ),
    Trait(
        "keeps-n", "{} fixes n", "{} moves n", lambda u: u.permutation[-1] == u.variety.n, _type_a, "{}.permutation[-1] == X.n", 2
    ),
    Trait("keeps-1", "{} fixes 1", "{} moves 1", lambda u: u.permutation[0] == 1, _type_a, "{}.permutation[0] == 1", 2),
    # shapes
    Trait("rows", "the number of rows of {}", "", lambda u: len(u.partition), _partitions, "len({}.partition)", 0),
    Trait(
        "columns", "the first part of {}", "", lambda u: max(u.partition, default=0), _partitions, "max({}.partition, default=0)", 0
    ),
    Trait("corners", "the number of corners of {}", "", _corners, _partitions, "len(set({}.partition))", 1),
    Trait(
        "row",
        "{} is a row",
        "{} has two rows or more",
        lambda u: len(u.partition) <= 1,
        _partitions,
        "len({}.partition) <= 1",
        0,
    ),
    Trait(
        "column",
        "{} is a column",
        "{} has two columns or more",
        lambda u: max(u.partition, default=0) <= 1,
        _shapes,
        "max({}.partition, default=0) <= 1",
        0,
    ),
    Trait(
        "hook",
        "{} is a hook",
        "{} is not a hook (contains the 2 x 2 square)",
        lambda u: all(part <= 1 for part in u.partition[1:]),
        _shapes,
        "all(part <= 1 for part in {}.partition[1:])",
        0,
    ),
    Trait(
        "rectangle",
        "{} is a rectangle",
        "{} is not a rectangle",
        lambda u: _corners(u) <= 1,
        _shapes,
        "len(set({}.partition)) <= 1",
        0,
    ),
    Trait("diagonal", "the diagonal of {} (its largest square)", "", _diagonal, _shapes, "", 1),
    Trait(
        "empty-rows",
        "the number of empty rows of {}",
        "",
        lambda u: u.variety.steps[0] - len(u.partition),
        _shapes,
        "X.steps[0] - len({}.partition)",
        1,
    ),
    Trait(
        "empty-columns",
        "the number of empty columns of {}",
        "",
        lambda u: u.variety.n - u.variety.steps[0] - max(u.partition, default=0),
        _shapes,
        "X.n - X.steps[0] - max({}.partition, default=0)",
        1,
    ),
    Trait(
        "self-conjugate",
        "{} is self-conjugate",
        "{} is not self-conjugate",
        lambda u: _conjugate(u.partition) == u.partition,
        _shapes,
        "",
        2,
    ),
    Trait(
        "strict",
        "{} has different parts",
        "{} has equal parts",
        lambda u: _corners(u) == len(u.partition),
        _shapes,
        "len(set({}.partition)) == len({}.partition)",
        2,
    ),
    Trait(
        "staircase",
        "{} is a staircase",
        "{} is no staircase",
        lambda u: u.partition == tuple(range(len(u.partition), 0, -1)),
        _partitions,
        "{}.partition == tuple(range(len({}.partition), 0, -1))",
        2,
    ),
)
"""All traits, a fixed list."""


def trait(name: str) -> Trait:
    """The trait of a name."""
    return next(t for t in TRAITS if t.name == name)


@lru_cache(maxsize=4096)
def trait_values(one: Trait, X: FlagVariety) -> NDArray[Any] | None:
    """The values of a trait at all classes of X, ``(N,)``, ``bool`` or ``int64``; ``None`` where it makes no sense."""
    if not one.applies(X):
        return None
    if one.of_all is not None:
        return one.of_all(X)
    assert one.of is not None, f"the trait {one.name} has no function"
    return np.array([one.of(u) for u in X.classes], dtype=bool if one.is_truth else np.int64)


@lru_cache(maxsize=32)
def bruhat(X: FlagVariety) -> Bools | None:
    """The Bruhat order on the classes of X, ``(N, N)``: entry ``[w, u]`` says whether ``u <= w``; ``None`` above 1,500 classes.

    By the lifting property: for a left descent s of w, ``u <= w`` iff the smaller of ``u, s u`` is ``<= s w``. Cost: ``O(N^2)`` in numpy.

    Source: Bjoerner and Brenti, Combinatorics of Coxeter Groups (2005), Proposition 2.2.7, and 2.5 for quotients.

    >>> from conjcheck.geometry.flag_variety import Gr
    >>> int(bruhat(Gr(2, 4)).sum())
    20
    """
    whole = orbit_of(X)
    size = len(whole.lengths)
    if size > _LARGEST_BRUHAT:
        return None
    matrix = len(cartan_matrix(X.kind))
    smaller = []
    for i in range(1, matrix + 1):
        image = whole.locate(reflected_by_word(X.kind, whole.weights, (i,)))
        smaller.append(np.where(whole.lengths[image] < whole.lengths, image, np.arange(size)))
    order = np.zeros((size, size), dtype=bool)
    order[0, 0] = True
    for w in range(1, size):
        i = int(whole.letters[w]) - 1
        order[w] = order[whole.parents[w]][smaller[i]]
    return order
