"""From a survey to the record: how far it got, as entries that can be committed."""

from conjcheck.conjecture.declare import Conjecture
from conjcheck.evidence.entries import Covered, own_version
from conjcheck.oracle import engines_for
from conjcheck.testing.survey import Coverage

__all__ = ["covered"]


def covered(coverage: Coverage, conjecture: Conjecture, *, cross_check: bool = False) -> tuple[Covered, ...]:
    """The entries of all spaces that a survey has entered, the last one as far as it got.

    Args:
        coverage: how far the survey got; nothing is wrong in any row that it counts.
        conjecture: the conjecture surveyed; equivariant constants come from one engine only.
        cross_check: whether every product was computed in two ways.
    """
    how = ", every product computed in two ways" if cross_check and not conjecture.is_equivariant else ""
    return tuple(
        Covered(
            space.X,
            rows=space.rows,
            seen=space.rows_seen,
            cases=space.cases,
            nonzero=space.nonzero,
            seconds=round(space.seconds, 3),
            engine=("localisation" if conjecture.is_equivariant else engines_for(space.X)[0].name) + how,
            conjcheck=own_version(),
        )
        for space in coverage.spaces
        if space.rows_seen
    )
