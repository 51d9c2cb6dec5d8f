"""Views of a minimal representative in type A: permutation, partition, 01..m-string, reduced word. Both ways.

Conventions: one-line notation ``w(1)...w(n)``, values and positions 1-based, products compose as functions
(``s1 s2 = 231``); ``W^P`` holds the permutations whose descents are all marked. Partition of ``Gr(k, n)``: inside a box of k
rows and n - k columns, ``lambda_i = w(k + 1 - i) - (k + 1 - i)``, written without trailing zeros. String: letter j tells in
which step (0-based) the value j first appears. Words: ``(i1, ..., il)`` means ``s_i1 ... s_il``.

Every reader takes what a person writes, and raises ``NotationError`` that names the offending entry.
"""

from collections import Counter
from collections.abc import Iterable, Sequence
from itertools import pairwise

from conjcheck.errors import NotationError

__all__ = [
    "LETTERS",
    "descents",
    "partition_of",
    "permutation_from_partition",
    "permutation_from_string",
    "permutation_from_word",
    "read_integers",
    "read_permutation",
    "string_of",
    "text_of_permutation",
]

LETTERS = "0123456789abcdefghijklmnopqrstuvwxyz"

Permutation = tuple[int, ...]


def read_integers(what: str, value: Iterable[int]) -> tuple[int, ...]:
    """A tuple of exact integers; a ``str``, a float or anything else is refused by name."""
    if isinstance(value, str) or not isinstance(value, Iterable):
        raise NotationError(f"expected a sequence of integers for {what}, got {what}={value!r}; write a tuple such as (2, 1)")
    result = []
    for place, entry in enumerate(value, start=1):
        try:
            result.append(int(entry.__index__()))
        except (AttributeError, TypeError):
            raise NotationError(f"expected integers in {what}, got entry {place} = {entry!r} of {what}={value!r}") from None
    return tuple(result)


def descents(w: Sequence[int]) -> tuple[int, ...]:
    """Positions i (1-based) with ``w(i) > w(i + 1)``.

    >>> descents((2, 1, 4, 3))
    (1, 3)
    """
    return tuple(i for i, (a, b) in enumerate(pairwise(w), start=1) if a > b)


def read_permutation(value: Iterable[int], steps: Sequence[int], n: int) -> Permutation:
    """A permutation of 1..n all of whose descents are marked."""
    w = read_integers("permutation", value)
    if len(w) != n:
        raise NotationError(f"expected a permutation of 1..{n}, got {len(w)} entries in permutation={w}")
    seen: set[int] = set()
    for place, entry in enumerate(w, start=1):
        if not 1 <= entry <= n:
            raise NotationError(f"expected a permutation of 1..{n}, got entry {place} = {entry} in permutation={w}")
        if entry in seen:
            raise NotationError(f"expected a permutation of 1..{n}, got {entry} a second time, as entry {place} of permutation={w}")
        seen.add(entry)
    for place in descents(w):
        if place not in steps:
            raise NotationError(
                f"expected descents only at positions {tuple(steps)}, got {w[place - 1]} > {w[place]} at position {place} of "
                f"permutation={w}; sort the entries inside each block to get the minimal representative"
            )
    return w


def permutation_from_partition(value: Iterable[int], k: int, n: int) -> Permutation:
    """The permutation with at most one descent, at k, of a partition in the box of k rows and n - k columns."""
    shape = read_integers("partition", value)
    box = f"{k} rows and {n - k} columns"
    for row, part in enumerate(shape, start=1):
        if row > k and part:
            raise NotationError(f"expected a partition inside a box of {box}, got {part} in row {row} of partition={shape}")
        if not 0 <= part <= n - k:
            raise NotationError(f"expected a partition inside a box of {box}, got row {row} = {part} in partition={shape}")
        if row > 1 and part > shape[row - 2]:
            raise NotationError(
                f"expected a partition with falling rows, got row {row} = {part} after {shape[row - 2]} in partition={shape}"
            )
    padded = (*shape, *[0] * k)[:k]
    head = [padded[k - i] + i for i in range(1, k + 1)]
    return (*head, *(x for x in range(1, n + 1) if x not in head))


def partition_of(w: Sequence[int], k: int) -> tuple[int, ...]:
    """The partition of a permutation whose only descent is at k, without trailing zeros."""
    return tuple(part for i in range(k, 0, -1) if (part := w[i - 1] - i))


def string_of(w: Sequence[int], steps: Sequence[int]) -> str:
    """The 01..m-string: letter j tells in which step the value j first appears.

    >>> string_of((2, 1, 4, 3), (1, 3))
    '1021'
    """
    letters = [""] * len(w)
    step = 0
    for place, value in enumerate(w, start=1):
        letters[value - 1] = LETTERS[step]
        step += place in steps
    return "".join(letters)


def permutation_from_string(value: str, steps: Sequence[int], n: int) -> Permutation:
    """The minimal representative with a given 01..m-string."""
    content = Counter(string_of(range(1, n + 1), steps))
    if not isinstance(value, str):
        raise NotationError(f"expected a str of {n} letters, got string={value!r}")
    for place, letter in enumerate(value, start=1):
        if letter not in content:
            raise NotationError(f"expected letters {''.join(sorted(content))}, got letter {place} = {letter!r} in string={value!r}")
    for letter, count in sorted(content.items()):
        if value.count(letter) != count:
            raise NotationError(f"expected {count} times the letter {letter}, got {value.count(letter)} in string={value!r}")
    return tuple(place + 1 for letter in sorted(content) for place in range(n) if value[place] == letter)


def permutation_from_word(value: Iterable[int], n: int) -> Permutation:
    """The permutation ``s_i1 ... s_il`` of a *reduced* word."""
    word = read_integers("word", value)
    w = list(range(1, n + 1))
    for place, i in enumerate(word, start=1):
        if not 1 <= i < n:
            raise NotationError(f"expected letters from 1 to {n - 1}, got letter {place} = {i} in word={word}")
        if w[i - 1] > w[i]:
            raise NotationError(f"expected a reduced word, got word={word}: the length falls at letter {place} = {i}")
        w[i - 1], w[i] = w[i], w[i - 1]
    return tuple(w)


def text_of_permutation(w: Sequence[int]) -> str:
    """``2143`` up to n = 9, ``10.2.1...`` beyond."""
    return "".join(map(str, w)) if len(w) <= 9 else ".".join(map(str, w))
