"""Views of a minimal representative in types B, C and D: signed permutation and strict partition. Both ways.

Conventions: a signed permutation w is the tuple ``w(1)...w(n)`` of nonzero integers, ``-j`` for a barred j: ``w(e_j) = e_k`` if
``w(j) = k`` and ``w(e_j) = -e_k`` if ``w(j) = -k``; products compose as functions. Simple roots (Bourbaki): ``alpha_i = e_i - e_{i+1}``
for i < n, and ``alpha_n`` is ``e_n`` in type B, ``2 e_n`` in type C, ``e_{n-1} + e_n`` in type D, where the number of signs is even.

A root ``e_a - e_b``, with ``e_{-b} = -e_b``, is positive when a stands before b in ``1, 2, ..., n, -n, ..., -2, -1``: minimal
representatives are sorted by *this* order in each block, not by size.

Strict partitions, on ``LG(n,2n)``, ``OG(n,2n+1)`` and ``OG(n,2n)``: each p with ``-p`` in w gives the part ``n + 1 - p``, in type D
``n - p`` without the part 0. Their sum is the length.

Source: Bourbaki, Groupes et algebres de Lie, ch. 4-6 (1968), plates II-IV; strict partitions as in Pragacz, Algebro-geometric
applications of Schur S- and Q-polynomials, Lecture Notes in Math. 1478 (1991).
"""

from collections.abc import Iterable, Sequence

from conjcheck.errors import NotationError
from conjcheck.geometry.cartan import CartanType
from conjcheck.geometry.notation import read_integers

__all__ = ["has_strict_partitions", "read_signed", "signed_from_partition", "strict_partition_of", "text_of_signed"]

Signed = tuple[int, ...]


def has_strict_partitions(kind: CartanType, marked: Sequence[int]) -> bool:
    """Whether G/P is ``LG(n,2n)``, ``OG(n,2n+1)`` or ``OG(n,2n)``."""
    return kind.letter in "BCD" and tuple(marked) == (kind.rank,)


def read_signed(value: Iterable[int], kind: CartanType, marked: Sequence[int]) -> Signed:
    """A signed permutation that keeps every simple root outside ``marked`` positive."""
    w, n = read_integers("signed", value), kind.rank
    if len(w) != n:
        raise NotationError(f"expected a signed permutation of 1..{n}, got {len(w)} entries in signed={w}")
    seen: dict[int, int] = {}
    for place, entry in enumerate(w, start=1):
        if not 1 <= abs(entry) <= n:
            raise NotationError(f"expected entries 1..{n} or -1..-{n}, got entry {place} = {entry} in signed={w}")
        if abs(entry) in seen:
            first = seen[abs(entry)]
            raise NotationError(
                f"expected each of 1..{n} once, with or without sign, got entry {place} = {entry} after entry {first} = {w[first - 1]} "
                f"in signed={w}"
            )
        seen[abs(entry)] = place
    signs = sum(entry < 0 for entry in w)
    if kind.letter == "D" and signs % 2:
        raise NotationError(f"expected an even number of signs in type D, got {signs} in signed={w}")
    levi = [i for i in range(1, n + 1) if i not in marked]
    wrong = next((i for i in levi if _falls(w, i, kind.letter)), None)
    if wrong is not None:
        raise NotationError(f"expected a minimal representative, got {_fault(w, wrong, levi, kind.letter)}")
    return w


def _falls(w: Signed, i: int, letter: str) -> bool:
    """Whether w turns the simple root ``alpha_i`` into a negative one, that is ``l(w s_i) < l(w)``."""
    n = len(w)
    if i == n and letter != "D":
        return w[-1] < 0
    before, after = (w[i - 1], w[i]) if i < n else (w[-2], -w[-1])
    return _spot(before, n) > _spot(after, n)


def _spot(entry: int, n: int) -> int:
    """The place of an entry in the order ``1, ..., n, -n, ..., -1``."""
    return entry if entry > 0 else 2 * n + 1 + entry


def _times(w: Signed, i: int, letter: str) -> Signed:
    """``w s_i``."""
    if i < len(w):
        return (*w[: i - 1], w[i], w[i - 1], *w[i + 1 :])
    return (*w[:-2], -w[-1], -w[-2]) if letter == "D" else (*w[:-1], -w[-1])


def _fault(w: Signed, i: int, levi: Sequence[int], letter: str) -> str:
    """Which root of the Levi falls, how to sort, and what comes out."""
    n, best = len(w), w
    while falling := [j for j in levi if _falls(best, j, letter)]:
        best = _times(best, falling[0], letter)
    if i < n:
        what, root = f"{w[i - 1]} before {w[i]} at entries {i} and {i + 1}", f"e_{i} - e_{i + 1}"
        how = f"sort each block by the order 1, ..., {n}, -{n}, ..., -1"
    elif letter == "D":
        what, root = f"{w[-2]}, {w[-1]} as entries {n - 1} and {n}", f"e_{n - 1} + e_{n}"
        how = f"negate both, swap them, and sort each block by the order 1, ..., {n}, -{n}, ..., -1"
    else:
        what, root = f"entry {n} = {w[-1]}", f"e_{n}" if letter == "B" else f"2 e_{n}"
        how = "drop the signs of the last block and sort it"
    return f"{what} in signed={w}: alpha_{i} = {root} of the Levi becomes negative; {how}: the minimal representative is {best}"


def strict_partition_of(w: Sequence[int], letter: str) -> tuple[int, ...]:
    """The strict partition of a minimal representative of a maximal isotropic Grassmannian.

    >>> strict_partition_of((2, -3, -1), "C"), strict_partition_of((2, 3, -4, -1), "D")
    ((3, 1), (3,))
    """
    top = len(w) if letter == "D" else len(w) + 1
    return tuple(top + entry for entry in sorted(w, reverse=True) if -top < entry < 0)


def signed_from_partition(value: Iterable[int], kind: CartanType) -> Signed:
    """The minimal representative of a strict partition; zeros at its end do not matter.

    >>> signed_from_partition((3, 1), CartanType("C", 3))
    (2, -3, -1)
    """
    shape, n = read_integers("partition", value), kind.rank
    top = n if kind.letter == "D" else n + 1
    for row, part in enumerate(shape, start=1):
        if not 0 <= part < top:
            raise NotationError(
                f"expected a strict partition with parts up to {top - 1}, got row {row} = {part} in partition={shape}"
            )
        if row > 1 and part >= shape[row - 2] and (part or shape[row - 2]):
            raise NotationError(
                f"expected a strict partition, with rows that get shorter, got row {row} = {part} after {shape[row - 2]} in "
                f"partition={shape}"
            )
    barred = {top - part for part in shape if part}
    if kind.letter == "D" and len(barred) % 2:
        barred.add(n)
    return (*(p for p in range(1, n + 1) if p not in barred), *(-p for p in sorted(barred, reverse=True)))


def text_of_signed(w: Sequence[int]) -> str:
    """``1.-3.2``, always with dots."""
    return ".".join(map(str, w))
