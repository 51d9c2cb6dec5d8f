"""The flag variety G/P and its Schubert classes: immutable values, one object per variety and per class.

``sigma_u`` is indexed by the minimal-length representative ``u`` in ``W^P`` and has codimension ``u.length``; ``sigma_e = 1``.
Because a variety and its classes exist once, ``==`` is identity: fast as a dictionary key, and true across pickling.
"""

from collections.abc import Iterable
from functools import cache
from itertools import groupby
from typing import Any

import numpy as np

from conjcheck.errors import NotationError, OutOfReach
from conjcheck.geometry import names, notation
from conjcheck.geometry.cartan import CartanType, cartan_matrix, positive_roots
from conjcheck.geometry.signed import has_strict_partitions, read_signed, signed_from_partition, strict_partition_of, text_of_signed
from conjcheck.geometry.typeset import latex_class, latex_space
from conjcheck.geometry.weyl import Orbit, dual_indices, number_of_cosets, one_lines, orbit, signed_lines, weight_images

__all__ = ["IG", "LG", "MOST_CLASSES", "OG", "Degree", "Fl", "FlagVariety", "Gr", "SchubertClass", "orbit_of"]

Degree = tuple[int, ...]

MOST_CLASSES = 50_000
"""Enumeration stops here with ``OutOfReach``: a variety with more classes is a typing error more often than a wish."""


class FlagVariety:
    """A flag variety, by name: ``FlagVariety("Fl(1,3;4)")``, ``"Gr(2,4)"``, ``"Fl(4)"``, ``"P^3"``, ``"A3/P1,3"``, ``"A3/B"``.

    Also ``"LG(3,6)"``, ``"IG(2,6)"``, ``"OG(3,7)"``, ``"Q^5"``, ``"E6/P1"``, ``"G2/B"``; ``geometry.names`` lists them all.

    Attributes:
        kind: the Cartan type; ``rank`` its rank.
        marked: the marked nodes ``I`` (Bourbaki, 1-based, rising): the simple roots that are *not* in the Levi of P.
        n, steps: in type A, ``Fl(steps; n)``; in every type ``n`` is ``rank + 1`` and ``steps`` is ``marked``.
        dim: the dimension, which is the length of the longest class.
        q_degrees: ``deg q_i`` for i in ``marked``, in the unit in which ``sigma_u`` has degree ``u.length``.
        name: the name in the usual notation; ``FlagVariety(X.name) is X``.

    Cost: constant; the classes are enumerated when first asked for.

    Raises:
        NotationError: the name denotes no flag variety.

    >>> X = FlagVariety("Fl(1,3;4)")
    >>> X.dim, X.q_degrees, len(X.classes)
    (5, (3, 3), 12)
    """

    __slots__ = ("dim", "kind", "marked", "n", "name", "q_degrees", "rank", "sort_key", "steps")

    kind: CartanType
    rank: int
    marked: tuple[int, ...]
    n: int
    steps: tuple[int, ...]
    dim: int
    q_degrees: tuple[int, ...]
    name: str
    sort_key: tuple[Any, ...]

    def __new__(cls, name: str) -> "FlagVariety":
        """Look the name up; see the class."""
        return _of(*names.parse_name(name))

    def __repr__(self) -> str:
        return f"FlagVariety({self.name!r})"

    def __str__(self) -> str:
        return self.name

    def _repr_latex_(self) -> str:
        return f"${latex_space(self.name)}$"

    def __reduce__(self) -> tuple[type, tuple[str]]:
        return FlagVariety, (self.name,)

    def __lt__(self, other: "FlagVariety") -> bool:
        return self.sort_key < other.sort_key

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"a flag variety is immutable; cannot set {name!r}")

    @property
    def is_complete(self) -> bool:
        """Whether every node is marked, so that P is a Borel subgroup."""
        return len(self.marked) == self.rank

    @property
    def is_grassmannian(self) -> bool:
        """Whether this is ``Gr(k, n)``: type A with one marked node."""
        return self.kind.letter == "A" and len(self.marked) == 1

    @property
    def is_maximal_isotropic(self) -> bool:
        """Whether this is ``LG(n,2n)``, ``OG(n,2n+1)`` or ``OG(n,2n)``, whose classes have strict partitions."""
        return has_strict_partitions(self.kind, self.marked)

    @property
    def notations(self) -> tuple[str, ...]:
        """The notations that ``schubert`` reads here, and that its classes have as attributes.

        >>> FlagVariety("LG(3,6)").notations, FlagVariety("E6/P1").notations
        (('signed', 'partition', 'word'), ('word',))
        """
        has_partition = ("partition",) if self.is_grassmannian or self.is_maximal_isotropic else ()
        if self.kind.letter == "A":
            return ("permutation", *has_partition, "string", "word")
        return ("signed", *has_partition, "word") if self.kind.letter in "BCD" else ("word",)

    @property
    def number_of_classes(self) -> int:
        """The number of Schubert classes, without enumerating them."""
        return number_of_cosets(self.kind, self.marked)

    @property
    def classes(self) -> tuple["SchubertClass", ...]:
        """All Schubert classes by length, then lexicographically in one-line notation (B, C, D: signed; exceptional types: in words)."""
        return _classes(self)

    @property
    def identity(self) -> "SchubertClass":
        """The class ``sigma_e = 1``."""
        return self.classes[0]

    @property
    def point(self) -> "SchubertClass":
        """The class of a point, ``sigma_w`` for the longest w in ``W^P``."""
        return self.classes[-1]

    def of_length(self, length: int) -> tuple["SchubertClass", ...]:
        """The classes of one codimension, in order; empty outside ``0..dim``."""
        return _levels(self).get(length, ())

    def schubert(
        self,
        *misplaced: Any,
        permutation: Iterable[int] | None = None,
        partition: Iterable[int] | None = None,
        string: str | None = None,
        word: Iterable[int] | None = None,
        signed: Iterable[int] | None = None,
    ) -> "SchubertClass":
        """The class given in exactly one notation; which one is never guessed from the value.

        Raises:
            NotationError: none or several notations, a notation that this variety has not, or a value that is no class of it.

        >>> Gr(2, 4).schubert(partition=(2, 1)).permutation
        (2, 4, 1, 3)
        >>> LG(3, 6).schubert(partition=(3, 1)).signed
        (2, -3, -1)
        """
        given = {"permutation": permutation, "partition": partition, "string": string, "word": word, "signed": signed}
        given = {key: value for key, value in given.items() if value is not None}
        ways = [f"{way}=" for way in self.notations]
        if misplaced:
            raise NotationError(f"expected {' or '.join(ways)} with the notation named, got {misplaced[0]!r} without a name")
        if len(given) != 1:
            one_of = "one of " if len(ways) > 1 else ""
            raise NotationError(f"expected {one_of}{', '.join(ways)}, got {sorted(given) or 'none'}")
        (key,) = given
        if key not in self.notations:
            listed = " or ".join(filter(None, (", ".join(ways[:-1]), ways[-1])))
            raise NotationError(f"expected {listed} on {self.name}: {_who_has(key, self)} {key}=")
        if word is not None and self.kind.letter != "A":
            return self._from_word(notation.read_integers("word", word))
        if signed is not None:
            return self.classes[_signed_index(self)[read_signed(signed, self.kind, self.marked)]]
        if partition is not None and self.is_maximal_isotropic:
            return self.classes[_signed_index(self)[signed_from_partition(partition, self.kind)]]
        if permutation is not None:
            w = notation.read_permutation(permutation, self.marked, self.n)
        elif partition is not None:
            w = notation.permutation_from_partition(partition, self.marked[0], self.n)
        elif string is not None:
            w = notation.permutation_from_string(string, self.marked, self.n)
        else:
            w = notation.read_permutation(notation.permutation_from_word(word or (), self.n), self.marked, self.n)
        return self.classes[_permutation_index(self)[w]]

    def _from_word(self, word: tuple[int, ...]) -> "SchubertClass":
        """A class of any type from a reduced word of its minimal representative."""
        whole, matrix = orbit_of(self), np.array(cartan_matrix(self.kind), dtype=np.int64)
        weight = whole.weights[0]
        for place in range(len(word), 0, -1):
            i = word[place - 1]
            if not 1 <= i <= self.rank:
                raise NotationError(f"expected letters from 1 to {self.rank}, got letter {place} = {i} in word={word}")
            if weight[i - 1] <= 0:
                raise NotationError(f"expected a reduced word of a class of {self.name}, got letter {place} = {i} in word={word}")
            weight = weight - weight[i - 1] * matrix[i - 1]
        return self.classes[int(whole.locate(weight[None, :])[0])]


class SchubertClass:
    """A Schubert class ``sigma_u`` of a flag variety; made by ``X.schubert`` or taken from ``X.classes``.

    Attributes:
        variety: the flag variety.
        index: the 0-based place in ``variety.classes``.
        length: the length of u, which is the codimension of the class.
    """

    __slots__ = ("index", "length", "variety")

    variety: FlagVariety
    index: int
    length: int

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"a Schubert class is immutable; cannot set {name!r}")

    def __repr__(self) -> str:
        return f"sigma{self}"

    def __str__(self) -> str:
        """``(2,1)`` where there are partitions, else ``[2143]`` in type A, ``[1.-3.2]`` in B, C, D, and ``<1.3.2>`` (a word) in E, F, G."""
        X = self.variety
        if X.is_grassmannian or X.is_maximal_isotropic:
            return f"({','.join(map(str, self.partition))})"
        if X.kind.letter == "A":
            return f"[{notation.text_of_permutation(self.permutation)}]"
        if X.kind.letter in "BCD":
            return f"[{text_of_signed(self.signed)}]"
        return f"<{'.'.join(map(str, self.word))}>"

    def _repr_latex_(self) -> str:
        return f"$\\sigma_{{{latex_class(str(self))}}}$"

    def __reduce__(self) -> tuple[Any, tuple[FlagVariety, int]]:
        return _class_at, (self.variety, self.index)

    def __lt__(self, other: "SchubertClass") -> bool:
        return (self.variety.sort_key, self.index) < (other.variety.sort_key, other.index)

    @property
    def permutation(self) -> tuple[int, ...]:
        """One-line notation, values 1..n (type A)."""
        return _permutations(self.variety)[self.index]

    @property
    def signed(self) -> tuple[int, ...]:
        """The signed permutation, ``-j`` for a barred j (types B, C, D; conventions: ``geometry.signed``)."""
        return _signed(self.variety)[self.index]

    @property
    def partition(self) -> tuple[int, ...]:
        """``Gr(k,n)``: the partition in the box of k rows and n - k columns, without trailing zeros. LG and maximal OG: the strict one."""
        return _partitions(self.variety)[self.index]

    @property
    def string(self) -> str:
        """The 01..m-string (type A): letter j tells in which step the value j first appears."""
        return _strings(self.variety)[self.index]

    @property
    def word(self) -> tuple[int, ...]:
        """The lexicographically first reduced word of the minimal representative (1-based nodes)."""
        return orbit_of(self.variety).word(self.index)

    @property
    def descents(self) -> tuple[int, ...]:
        """The nodes i with ``l(u s_i) < l(u)``, a subset of the marked nodes; in type A the descents of the permutation."""
        return _descents(self.variety)[self.index]

    @property
    def dual(self) -> "SchubertClass":
        """The Poincare dual class: the minimal representative of ``w0 u W_P``."""
        return self.variety.classes[int(dual_indices(self.variety.kind, self.variety.marked)[self.index])]


def Fl(*steps: int, n: int | None = None) -> FlagVariety:
    """``Fl(1, 3, n=4)`` is ``Fl(1,3;4)``: flags of subspaces of dimensions 1 and 3 in C^4; ``Fl(4)`` is the complete flags.

    >>> Fl(1, 3, n=4), Fl(3)
    (FlagVariety('Fl(1,3;4)'), FlagVariety('Fl(3)'))
    """
    if n is None:
        if len(steps) != 1:
            raise NotationError(f"expected n=, as in Fl(1, 3, n=4), got Fl{steps}; Fl(4) alone means complete flags")
        (n,) = notation.read_integers("n", steps)
        steps = tuple(range(1, n))
    return _of(*names.type_a(notation.read_integers("steps", steps), *notation.read_integers("n", (n,))))


def Gr(k: int, n: int) -> FlagVariety:
    """The Grassmannian of k-planes in C^n.

    >>> Gr(2, 4).q_degrees
    (4,)
    """
    return Fl(k, n=n)


def LG(n: int, N: int) -> FlagVariety:
    """``LG(n, 2n)``: Lagrangian subspaces of a symplectic C^(2n), n >= 2.

    >>> LG(3, 6).q_degrees
    (4,)
    """
    return _of(*names.lagrangian(*notation.read_integers("n, N", (n, N))))


def IG(k: int, N: int) -> FlagVariety:
    """``IG(k, 2n)``: isotropic k-planes in a symplectic C^(2n), n >= 2; ``IG(n, 2n)`` is ``LG(n, 2n)``.

    >>> IG(2, 6).q_degrees
    (5,)
    """
    return _of(*names.symplectic(*notation.read_integers("k, N", (k, N))))


def OG(k: int, N: int) -> FlagVariety:
    """``OG(k, N)``: isotropic k-planes in a quadratic C^N, N = 5, 7 or more; of ``OG(n, 2n)`` one of the two families.

    ``OG(1, N)`` is the quadric ``Q^(N-2)``, and ``OG(n - 1, 2n)`` has two marked nodes.

    >>> OG(3, 7).q_degrees, OG(1, 7), OG(3, 8)
    ((6,), FlagVariety('Q^5'), FlagVariety('D4/P3,4'))
    """
    return _of(*names.orthogonal(*notation.read_integers("k, N", (k, N))))


def orbit_of(X: FlagVariety) -> Orbit:
    """The arrays behind the classes.

    Raises:
        OutOfReach: more than ``MOST_CLASSES`` classes.
    """
    count = X.number_of_classes
    if count > MOST_CLASSES:
        raise OutOfReach(f"expected a variety with at most {MOST_CLASSES:,} Schubert classes, got {X.name} with {count:,}")
    return orbit(X.kind, X.marked)


@cache
def _of(kind: CartanType, marked: tuple[int, ...]) -> FlagVariety:
    """The one object for a type and its marked nodes."""
    dim = sum(any(root[i - 1] for i in marked) for root, _ in positive_roots(kind))
    X = object.__new__(FlagVariety)
    store = object.__setattr__
    store(X, "kind", kind)
    store(X, "rank", kind.rank)
    store(X, "marked", marked)
    store(X, "n", kind.rank + 1)
    store(X, "steps", marked)
    store(X, "dim", dim)
    store(X, "q_degrees", _q_degrees(kind, marked))
    store(X, "name", names.name_of(kind, marked))
    store(X, "sort_key", (kind.rank, len(marked), dim, kind.letter, marked))
    return X


def _q_degrees(kind: CartanType, marked: tuple[int, ...]) -> tuple[int, ...]:
    """``deg q_i = <2 rho - 2 rho_P, alpha_i^vee>``: the sum over the roots outside the Levi of ``<alpha, alpha_i^vee>``."""
    matrix = cartan_matrix(kind)
    outside = [root for root, _ in positive_roots(kind) if any(root[i - 1] for i in marked)]
    total = [sum(column) for column in zip(*outside, strict=True)]
    return tuple(sum(a * matrix[j][i - 1] for j, a in enumerate(total)) for i in marked)


def _who_has(notation_asked: str, X: FlagVariety) -> str:
    """Who has a notation that X has not."""
    if notation_asked == "partition":
        return "only a Grassmannian has" if X.kind.letter == "A" else "outside type A only LG(n,2n), OG(n,2n+1) and OG(n,2n) have"
    return "only types B, C and D have" if notation_asked == "signed" else "only type A has"


@cache
def _classes(X: FlagVariety) -> tuple[SchubertClass, ...]:
    """The classes, made once: identity is equality, so nothing here may ever be made a second time."""
    made = []
    store = object.__setattr__
    for index, length in enumerate(orbit_of(X).lengths.tolist()):
        u = object.__new__(SchubertClass)
        store(u, "variety", X)
        store(u, "index", index)
        store(u, "length", length)
        made.append(u)
    return tuple(made)


def _class_at(X: FlagVariety, index: int) -> SchubertClass:
    return X.classes[index]


@cache
def _levels(X: FlagVariety) -> dict[int, tuple[SchubertClass, ...]]:
    return {length: tuple(level) for length, level in groupby(X.classes, key=lambda u: u.length)}


@cache
def _permutations(X: FlagVariety) -> tuple[tuple[int, ...], ...]:
    if X.kind.letter != "A":
        raise NotationError(f"expected a variety of type A, got {X.name}: its classes have no permutation; use .{X.notations[0]}")
    return tuple(map(tuple, one_lines(orbit_of(X).weights).tolist()))


@cache
def _permutation_index(X: FlagVariety) -> dict[tuple[int, ...], int]:
    return {w: index for index, w in enumerate(_permutations(X))}


@cache
def _signed(X: FlagVariety) -> tuple[tuple[int, ...], ...]:
    if X.kind.letter not in "BCD":
        raise NotationError(
            f"expected a variety of type B, C or D, got {X.name}: its classes have no signed permutation; use .{X.notations[0]}"
        )
    return tuple(map(tuple, signed_lines(X.kind, orbit_of(X).weights).tolist()))


@cache
def _signed_index(X: FlagVariety) -> dict[tuple[int, ...], int]:
    return {w: index for index, w in enumerate(_signed(X))}


@cache
def _partitions(X: FlagVariety) -> tuple[tuple[int, ...], ...]:
    if X.is_maximal_isotropic:
        return tuple(strict_partition_of(w, X.kind.letter) for w in _signed(X))
    if not X.is_grassmannian:
        raise NotationError(f"expected a Grassmannian, got {X.name}: its classes have no partition; use .{X.notations[0]}")
    return tuple(notation.partition_of(w, X.marked[0]) for w in _permutations(X))


@cache
def _strings(X: FlagVariety) -> tuple[str, ...]:
    return tuple(notation.string_of(w, X.marked) for w in _permutations(X))


@cache
def _descents(X: FlagVariety) -> tuple[tuple[int, ...], ...]:
    """Type A: read off one-line notation. Else ``u s_i`` has the weight ``u lambda_P - u alpha_i``; i is a descent when it is shorter."""
    if X.kind.letter == "A":
        return tuple(map(notation.descents, _permutations(X)))
    whole, images = orbit_of(X), weight_images(X.kind, X.marked)
    matrix = np.array(cartan_matrix(X.kind), dtype=np.int64)
    shorter = [
        whole.lengths[whole.locate(whole.weights - np.einsum("k,nkj->nj", matrix[i - 1], images))] < whole.lengths for i in X.marked
    ]
    return tuple(tuple(i for i, falls in zip(X.marked, row, strict=True) if falls) for row in zip(*shorter, strict=True))
