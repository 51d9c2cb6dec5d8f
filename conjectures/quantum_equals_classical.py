"""Quantum equals classical: quantum constants of Grassmannians as classical constants of two-step flag varieties.

On ``Gr(k, n)`` write a class as a 01-string (letter j is 0 when the value j is among the first k). ``widen(string, d)``, the
``J_d`` of the statement, renames 1 to 2 and then turns the last d zeros and the first d twos into 1: a class on
``Fl(k - d, k + d; n)``, that of the kernels and spans of the curves of degree d that meet the Schubert variety. Then
``N_{u,v}^{w,d}`` is the number of two-step puzzles with ``widen(u)`` on the north-west side, ``widen(v)`` on the north-east side
(both clockwise) and the reverse of ``widen(dual of w)`` along the bottom, for every w of the length that the degree axiom asks
for; it is 0 for d above k or n - k.

Sources: A. S. Buch, A. Kresch and H. Tamvakis, Gromov-Witten invariants on Grassmannians, J. Amer. Math. Soc. 16 (2003), 901-915;
puzzles as in ``two_step_puzzles.py``.
"""

from functools import lru_cache

from _puzzles import Puzzle, step_pieces

from conjcheck import FlagVariety, Grassmannians, SchubertClass, candidate

__all__ = ["quantum_equals_classical"]


@candidate(
    on=Grassmannians(),
    statement=r"N_{u,v}^{w,d} = \#\{\text{two-step puzzles with boundary } J_d(u), J_d(v), J_d(w^\vee)\text{, clockwise}\}",
    references=[
        "A. S. Buch, A. Kresch, H. Tamvakis, Gromov-Witten invariants on Grassmannians, J. Amer. Math. Soc. 16 (2003), 901-915",
        "A. S. Buch, A. Kresch, K. Purbhoo, H. Tamvakis, The puzzle conjecture for the cohomology of two-step flag manifolds, "
        "J. Algebraic Combin. 44 (2016), 973-1007",
    ],
)
def quantum_equals_classical(
    X: FlagVariety, u: SchubertClass, v: SchubertClass
) -> dict[tuple[SchubertClass, tuple[int]], tuple[Puzzle, ...]]:
    """The two-step puzzles over each ``(w, d)``; a puzzle is the tuple of the labels on its horizontal edges, row by row."""
    (k,), n = X.steps, X.n
    found = {}
    for d in range(min(k, n - k) + 1):
        outputs = X.of_length(u.length + v.length - d * n)
        if outputs:
            puzzles = step_pieces(2).fill(widen(u.string, d), widen(v.string, d))
            for w in outputs:
                bottom = tuple(reversed(widen(w.dual.string, d)))
                if bottom in puzzles:
                    found[w, (d,)] = puzzles[bottom]
    return found


@lru_cache(maxsize=65536)
def widen(string: str, d: int) -> str:
    """The 012-string ``J_d`` on ``Fl(k - d, k + d; n)`` of a 01-string on ``Gr(k, n)``.

    >>> widen("0110", 0), widen("0110", 1), widen("0110", 2)
    ('0220', '0121', '1111')
    """
    letters = string.replace("1", "2").replace("2", "1", d)
    return "1".join(letters.rsplit("0", d))
