"""Step puzzles for any number of steps: the rule conjectured in 1999 for every partial flag variety. It is false.

For ``Fl(k1, ..., kd; n)`` write u, v, w as 01..d-strings (letter j tells in which step the value j first appears) and count
triangular puzzles with u on the north-west side, v on the north-east side, both read clockwise, and w along the bottom from left
to right. The labels are the digits 0..d and the words XY in which every digit of X exceeds every digit of Y; the pieces are the
triangles ``(i, i, i)`` and all rotations of ``(X, Y, XY)``, pointing up or turned by a half turn. See ``_puzzles.py``.

The rule is a theorem for one step (Knutson, Tao and Woodward) and for two steps (see ``two_step_puzzles.py``). From three steps on
it misses some constants, first with n = 5.

Source: conjectured by A. Knutson (1999, unpublished), as told in the introduction of A. S. Buch, A. Kresch, K. Purbhoo and
H. Tamvakis, The puzzle conjecture for the cohomology of two-step flag manifolds, J. Algebraic Combin. 44 (2016), 973-1007.
"""

from _puzzles import Puzzle, classes_by_string, step_pieces

from conjcheck import FlagVariety, PartialFlags, SchubertClass, candidate

__all__ = ["step_puzzles"]


@candidate(
    on=PartialFlags(),
    ring="classical",
    statement=r"c_{u,v}^{w} = \#\{d\text{-step puzzles with boundary } u, v, w\}",
    references=[
        "A. Knutson, conjecture of 1999, as told in: A. S. Buch, A. Kresch, K. Purbhoo, H. Tamvakis, The puzzle conjecture for "
        "the cohomology of two-step flag manifolds, J. Algebraic Combin. 44 (2016), 973-1007",
    ],
)
def step_puzzles(X: FlagVariety, u: SchubertClass, v: SchubertClass) -> dict[SchubertClass, tuple[Puzzle, ...]]:
    """The step puzzles over each class; a puzzle is the tuple of the labels on its horizontal edges, row by row."""
    classes = classes_by_string(X)
    return {classes[bottom]: puzzles for bottom, puzzles in step_pieces(len(X.steps)).fill(u.string, v.string).items()}
