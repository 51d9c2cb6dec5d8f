"""Constants at most one: is every structure constant of complete flags 0 or 1? Twice no, but not soon.

The classical constants of ``Fl(n)`` are 0 or 1 up to n = 5, the quantum constants up to n = 4, and no longer after that: on
``Fl(5)`` the quantum constants with value 2 are 25 of 62,925 (computed). Small examples invite the guess.

Source: folklore, stated here to be refuted.
"""

from typing import Any

from conjcheck import CompleteFlags, FlagVariety, SchubertClass, claim

__all__ = ["classical_constants_at_most_one", "quantum_constants_at_most_one"]


@claim(on=CompleteFlags(), statement=r"N_{u,v}^{w,d} \le 1")
def quantum_constants_at_most_one(X: FlagVariety, u: SchubertClass, v: SchubertClass, N: Any) -> bool:
    """Whether no coefficient of the quantum product exceeds 1."""
    return all(value <= 1 for value in N.product(u, v).values())


@claim(on=CompleteFlags(), ring="classical", statement=r"c_{u,v}^{w} \le 1")
def classical_constants_at_most_one(X: FlagVariety, u: SchubertClass, v: SchubertClass, N: Any) -> bool:
    """Whether no coefficient of the classical product exceeds 1."""
    return all(value <= 1 for value in N.product(u, v).values())
