"""The oracle in a claim's hand."""

from collections.abc import Iterable
from typing import Any

from conjcheck.errors import NotationError
from conjcheck.geometry.case import Case, Row, read_degree
from conjcheck.geometry.flag_variety import SchubertClass
from conjcheck.oracle import row_terms
from conjcheck.oracle.engine import RowTerms
from conjcheck.oracle.guard import note_question

__all__ = ["Asker"]


class Asker:
    """The oracle in a claim's hand: ``N(u, v, w, d)`` is a constant, ``N.product(u, v)`` a product; remembers the last row."""

    __slots__ = ("_classical", "_key", "_terms")

    def __init__(self, classical: bool) -> None:
        self._classical = classical
        self._key: tuple[SchubertClass, SchubertClass] | None = None
        self._terms: RowTerms = {}

    def _row(self, u: SchubertClass, v: SchubertClass) -> RowTerms:
        if self._key != (u, v):
            Row(u.variety, u, v)  # checks that they live on one variety
            terms = row_terms(u, v)
            self._terms = {key: n for key, n in terms.items() if not any(key[1])} if self._classical else terms
            self._key = (u, v)
        return self._terms

    def __call__(self, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: Iterable[int] | None = None) -> int:
        """The constant ``N_{u,v}^{w,d}``; without d the classical one.

        Raises:
            NotationError, DifferentVarieties: an argument that denotes nothing on the variety of u.
        """
        note_question()
        terms = self._row(u, v)
        key = w, (0,) * len(u.variety.marked) if d is None else d
        try:
            if key in terms:
                return terms[key]
        except TypeError:
            pass
        case = Case(u.variety, u, v, w, read_degree(u.variety, key[1]))
        if self._classical and any(case.d):
            raise NotationError(f"expected d = 0 in the classical ring, got d={case.d}; declare ring='quantum', or leave d out")
        return terms.get((case.w, case.d), 0)

    def product(self, u: SchubertClass, v: SchubertClass) -> dict[Any, int]:
        """The product ``{(w, d): N}``, or ``{w: N}`` in the classical ring; nonzero terms only."""
        note_question()
        terms = self._row(u, v)
        return {w: n for (w, _), n in terms.items()} if self._classical else dict(terms)
