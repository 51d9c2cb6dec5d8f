"""Cayley plane bound: is every structure constant of ``E6/P1`` at most 3? No: 15 of 660 are 4.

The complex Cayley plane ``E6/P1`` has 27 Schubert classes and ``deg q = 12``. Over unordered pairs (u, v) its product has 660 nonzero
constants; 372 of them are 1, 174 are 2, 99 are 3, and 15 are 4, two of those without q (computed). Products u * v with
``l(u) + l(v) <= 9``, which one does by hand, have no constant above 3.

Source: none; a guess that hand calculations invite, stated here to be refuted.
"""

from typing import Any

from conjcheck import FlagVariety, SchubertClass, Varieties, claim

__all__ = ["cayley_plane_constants_at_most_three"]


@claim(on=Varieties("E6/P1"), statement=r"N_{u,v}^{w,d} \le 3 \text{ on } E_6/P_1")
def cayley_plane_constants_at_most_three(
    X: FlagVariety, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: tuple[int], N: Any
) -> bool:
    """Whether the constant is 3 or less."""
    return bool(N(u, v, w, d) <= 3)
