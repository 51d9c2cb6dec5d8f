"""Two-step puzzles: classical constants of the two-step flag varieties.

For ``Fl(a, b; n)`` write u, v, w as 012-strings (letter j tells in which step the value j first appears). The constant
``c_{u,v}^w`` is the number of triangular puzzles with u on the north-west side, v on the north-east side, both read clockwise,
and w along the bottom from left to right, laid with the two-step pieces: eight labels 0, 1, 2, 10, 20, 21, 2(10), (21)0, and
the triangles ``(i, i, i)`` and all rotations of ``(X, Y, XY)``, pointing up or turned by a half turn. See ``_puzzles.py``.

Source: conjectured by A. Knutson (1999); proved by A. S. Buch, A. Kresch, K. Purbhoo and H. Tamvakis, The puzzle conjecture for
the cohomology of two-step flag manifolds, J. Algebraic Combin. 44 (2016), 973-1007.
"""

from _puzzles import Puzzle, classes_by_string, step_pieces

from conjcheck import FlagVariety, SchubertClass, StepFlags, candidate

__all__ = ["two_step_puzzles"]


@candidate(
    on=StepFlags(2),
    ring="classical",
    statement=r"c_{u,v}^{w} = \#\{\text{two-step puzzles with boundary } u, v, w\}",
    references=[
        "A. S. Buch, A. Kresch, K. Purbhoo, H. Tamvakis, The puzzle conjecture for the cohomology of two-step flag manifolds, "
        "J. Algebraic Combin. 44 (2016), 973-1007",
    ],
)
def two_step_puzzles(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[SchubertClass, tuple[Puzzle, ...]]:
    """The two-step puzzles over each class; a puzzle is the tuple of the labels on its horizontal edges, row by row."""
    classes = classes_by_string(X)
    return {classes[bottom]: puzzles for bottom, puzzles in step_pieces(2).fill(u.string, v.string).items()}
