"""Names of flag varieties, both ways: from a name to the Cartan type and the marked nodes, and back to the one name that is printed.

Printed: ``Gr(2,4)``, ``Fl(4)``, ``Fl(1,3;4)`` in type A; ``Q^5`` (quadric in P^6) for ``B_n/P_1`` and ``D_n/P_1``;
``LG(n,2n) = C_n/P_n``; ``IG(k,2n) = C_n/P_k`` for k < n; ``OG(k,2n+1) = B_n/P_k`` and ``OG(k,2n) = D_n/P_k`` for the other k, without
``D_n/P_{n-1}``; and ``D5/P4``, ``E6/P1``, ``C3/P1,3``, ``G2/B`` for the rest. Also read: ``P^3``, every ``X3/P1,3``, ``OG(1,N)``,
``IG(n,2n)``, and ``OG(n-1,2n)``, which has two marked nodes, ``D_n/P_{n-1,n}``.
"""

import re
from difflib import get_close_matches
from functools import lru_cache

from conjcheck.errors import NotationError
from conjcheck.geometry.cartan import CartanType

__all__ = ["lagrangian", "name_of", "orthogonal", "parse_name", "quadric", "symplectic", "type_a"]

Parabolic = tuple[CartanType, tuple[int, ...]]


def type_a(steps: tuple[int, ...], n: int) -> Parabolic:
    """``Fl(steps; n)``."""
    if n < 2:
        raise NotationError(f"expected n of 2 or more, got n={n}")
    if not steps:
        raise NotationError(f"expected at least one step between 1 and {n - 1}, got none")
    for before, step in zip((0, *steps), steps, strict=False):
        if not before < step < n:
            raise NotationError(
                f"expected rising steps between 1 and {n - 1}, got step {step} in Fl({','.join(map(str, steps))};{n})"
            )
    return CartanType("A", n - 1), steps


def lagrangian(n: int, size: int) -> Parabolic:
    """``LG(n, 2n) = C_n/P_n``."""
    if n < 2:
        raise NotationError(f"expected n of 2 or more, got n={n} in LG({n},{size}); LG(1,2) is Gr(1,2)")
    if size != 2 * n:
        raise NotationError(f"expected LG({n},{2 * n}), Lagrangian subspaces of C^{2 * n}, got {size} in LG({n},{size})")
    return CartanType("C", n), (n,)


def symplectic(k: int, size: int) -> Parabolic:
    """``IG(k, 2n) = C_n/P_k``."""
    if size < 4 or size % 2:
        raise NotationError(f"expected an even number of 4 or more as second entry, got {size} in IG({k},{size})")
    if not 1 <= k <= size // 2:
        raise NotationError(f"expected k between 1 and {size // 2}, got k={k} in IG({k},{size})")
    return CartanType("C", size // 2), (k,)


_SMALL_ORTHOGONAL = {
    3: "OG(1,3) is Gr(1,2)",
    4: "D_2 is A_1 x A_1, not simple",
    6: "D_3 is A_3: OG(1,6) is Gr(2,4), OG(2,6) is Fl(1,3;4), OG(3,6) is Gr(3,4)",
}


def orthogonal(k: int, size: int) -> Parabolic:
    """``OG(k, 2n+1) = B_n/P_k``; ``OG(k, 2n) = D_n/P_k``, where k = n - 1 has two marked nodes and k = n means one of two families."""
    if size < 5 or size == 6:
        why = f"; {_SMALL_ORTHOGONAL[size]}" if size in _SMALL_ORTHOGONAL else ""
        raise NotationError(f"expected 5, 7, 8 or more as second entry, got {size} in OG({k},{size}){why}")
    n, odd = divmod(size, 2)
    if not 1 <= k <= n:
        raise NotationError(f"expected k between 1 and {n}, got k={k} in OG({k},{size})")
    if odd:
        return CartanType("B", n), (k,)
    return CartanType("D", n), ((n - 1, n) if k == n - 1 else (k,))


_SMALL_QUADRICS = {1: "Gr(1,2)", 2: "Gr(1,2) x Gr(1,2)", 4: "Gr(2,4)"}


def quadric(dim: int) -> Parabolic:
    """``Q^dim``, in ``P^(dim + 1)``: ``B_n/P_1`` for ``dim = 2n - 1``, ``D_n/P_1`` for ``dim = 2n - 2``."""
    if dim < 3 or dim == 4:
        why = f"; Q^{dim} is {_SMALL_QUADRICS[dim]}" if dim in _SMALL_QUADRICS else ""
        raise NotationError(f"expected a quadric of dimension 3, 5, 6 or more, got Q^{dim}{why}")
    return CartanType("B" if dim % 2 else "D", dim // 2 + 1), (1,)


_NAMES = re.compile(
    r"""Fl\((?P<complete>\d+)\) | Fl\((?P<steps>\d+(,\d+)*);(?P<n>\d+)\) | Gr\((?P<k>\d+),(?P<m>\d+)\) | P\^(?P<dim>\d+)
    | (?P<form>LG|IG|OG)\((?P<i>\d+),(?P<size>\d+)\) | Q\^(?P<quadric>\d+)
    | (?P<letter>[A-G])(?P<rank>\d+)/(?P<parabolic>B|P\d+(,\d+)*)""",
    re.VERBOSE,
)
_WORDS = {"fl": "Fl", "gr": "Gr", "lg": "LG", "ig": "IG", "og": "OG", "p": "P", "q": "Q"}
_FORMS = {"LG": lagrangian, "IG": symplectic, "OG": orthogonal}


@lru_cache(maxsize=4096)
def parse_name(name: str) -> Parabolic:
    """The Cartan type and marked nodes of a name; white space does not matter."""
    found = _NAMES.fullmatch(name.replace(" ", "")) if isinstance(name, str) else None
    if not found:
        raise NotationError(
            "expected a flag variety such as 'Fl(1,3;4)', 'Gr(2,4)', 'Fl(4)', 'P^3', 'LG(3,6)', 'IG(2,6)', 'OG(3,7)', 'Q^5' or "
            f"'A3/P1,3', got {name!r}{_meant(name)}"
        )
    if found["complete"]:
        n = int(found["complete"])
        return type_a(tuple(range(1, n)), n)
    if found["steps"]:
        return type_a(tuple(map(int, found["steps"].split(","))), int(found["n"]))
    if found["k"]:
        return type_a((int(found["k"]),), int(found["m"]))
    if found["dim"]:
        return type_a((1,), int(found["dim"]) + 1)
    if found["form"]:
        return _FORMS[found["form"]](int(found["i"]), int(found["size"]))
    if found["quadric"]:
        return quadric(int(found["quadric"]))
    kind = CartanType(found["letter"], int(found["rank"]))
    if found["parabolic"] == "B":
        return kind, tuple(range(1, kind.rank + 1))
    marked = tuple(map(int, found["parabolic"][1:].split(",")))
    for before, node in zip((0, *marked), marked, strict=False):
        if not before < node <= kind.rank:
            raise NotationError(f"expected rising nodes between 1 and {kind.rank}, got node {node} in {name!r}")
    return kind, marked


def _meant(name: object) -> str:
    """A question with a name that can be read and differs little, e.g. only in small letters; empty if there is none."""
    text = "".join(name.split()) if isinstance(name, str) else ""
    word = re.match("[A-Za-z]*", text)
    head = word[0] if word else ""
    close = get_close_matches(head.lower(), _WORDS, n=1)
    tries = [f"{_WORDS[close[0]]}{text[len(head) :]}"] if close else []
    return next((f"; did you mean {guess}?" for guess in (*tries, text.upper()) if _NAMES.fullmatch(guess)), "")


def name_of(kind: CartanType, marked: tuple[int, ...]) -> str:
    """The one name that is printed.

    >>> name_of(CartanType("C", 3), (3,)), name_of(CartanType("C", 3), (1, 3)), name_of(CartanType("D", 5), (1,))
    ('LG(3,6)', 'C3/P1,3', 'Q^8')
    """
    n = kind.rank
    nodes = ",".join(map(str, marked))
    if kind.letter == "A":
        if len(marked) == 1:
            return f"Gr({nodes},{n + 1})"
        return f"Fl({n + 1})" if len(marked) == n else f"Fl({nodes};{n + 1})"
    if len(marked) == n:
        return f"{kind}/B"
    match (kind.letter, marked):
        case ("B", (1,)):
            return f"Q^{2 * n - 1}"
        case ("D", (1,)):
            return f"Q^{2 * n - 2}"
        case ("B", (_,)):
            return f"OG({nodes},{2 * n + 1})"
        case ("C", (k,)):
            return f"{'LG' if k == n else 'IG'}({nodes},{2 * n})"
        case ("D", (k,)) if k != n - 1:
            return f"OG({nodes},{2 * n})"
    return f"{kind}/P{nodes}"
