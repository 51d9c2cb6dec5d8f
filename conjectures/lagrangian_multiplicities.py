"""Lagrangian multiplicities: is every structure constant of ``LG(n, 2n)`` 0 or a power of 2? No, but not before n = 4.

Every coefficient of the quantum Pieri rule is a power of 2 (``quantum_pieri_lagrangian.py``), and so are all constants of ``LG(2,4)``
and ``LG(3,6)`` (computed). Classes of more than one row spoil it: quantum constants of ``LG(4,8)`` are 3, and classical ones of
``LG(5,10)`` are 6, though those of ``LG(4,8)`` are still powers of 2 (computed).

Source: none; a guess that small examples invite, stated here to be refuted.
"""

from typing import Any

from conjcheck import FlagVariety, LagrangianGrassmannians, SchubertClass, claim

__all__ = ["lagrangian_constants_are_powers_of_two"]


@claim(on=LagrangianGrassmannians(), statement=r"N_{\lambda,\mu}^{\nu,d} \in \{0\} \cup \{2^m : m \ge 0\}")
def lagrangian_constants_are_powers_of_two(
    X: FlagVariety, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: tuple[int], N: Any
) -> bool:
    """Whether the constant has at most one binary digit 1."""
    return int(N(u, v, w, d)).bit_count() <= 1
