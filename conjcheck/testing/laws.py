"""What every rule must obey, without any oracle: one answer, unit, commutativity, duality, S3, Seidel, diagram, associativity.

The laws are those of the structure constants themselves, so a rule that breaks one is wrong at one of the two places compared.
"""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from conjcheck.geometry.case import Case, Row, place_in_row
from conjcheck.geometry.flag_variety import Degree, SchubertClass
from conjcheck.geometry.polynomial import RootPolynomial
from conjcheck.geometry.symmetries import diagram_images, seidel
from conjcheck.testing.answer import Value
from conjcheck.testing.calls import Key, Values
from conjcheck.testing.compare import Comparer

__all__ = ["LAWS", "BrokenLaw", "NoValue", "broken_laws", "laws_apply"]

LAWS = (
    "one answer",
    "unit",
    "positivity",
    "commutativity",
    "Poincare duality",
    "S3-symmetry",
    "Seidel symmetry",
    "diagram symmetry",
    "associativity",
)
"""The laws, in the order in which they are tried."""

_MOST_OUTCOMES = 3_000
_MOST_TERMS = 40


@dataclass(frozen=True, slots=True)
class BrokenLaw:
    """A law that a rule breaks.

    Attributes:
        law: its name.
        detail: the two values that should be equal, and where.
        rows: the rows that took part; the rule is wrong on one of them.
    """

    law: str
    detail: str
    rows: tuple[Row, ...]


class NoValue(Exception):
    """The rule gives no values on a row that a law asked for; ``.row`` is the row."""

    def __init__(self, row: Row) -> None:
        super().__init__(str(row))
        self.row = row


def broken_laws(comparer: Comparer, row: Row, choice: int = 0) -> Iterator[BrokenLaw]:
    """The laws that a candidate breaks around one row.

    Args:
        comparer: what calls the rule.
        row: a row inside the premise.
        choice: any integer; picks the third class and the Seidel element where a law leaves a choice.

    Raises:
        NoValue: the rule gives no values on a row that takes part.

    Rows with more than 3,000 outcomes are left alone: the survey and the probe are the better tools there.
    """
    return _Neighbourhood(comparer, row, choice).broken()


def laws_apply(comparer: Comparer, row: Row) -> bool:
    """Whether the laws have anything to say around a row: it is not too large, and some case lies inside the premise."""
    if not 0 < comparer.size(row) <= _MOST_OUTCOMES or not comparer.inside(row):
        return False
    if comparer.conjecture.premise_by_rows:
        return True
    return any(comparer.admits(Case(row.X, row.u, row.v, w, d)) for w, d in comparer.outcomes(row))


class _Neighbourhood:
    """One row and its relatives."""

    def __init__(self, comparer: Comparer, row: Row, choice: int) -> None:
        self.comparer, self.row, self.choice = comparer, row, choice
        self.conjecture = comparer.conjecture
        self.values: Values = {}

    def _of(self, row: Row) -> Values | None:
        """The rule's nonzero values on a row; ``None`` outside the premise or where there are too many outcomes."""
        if self.comparer.size(row) > _MOST_OUTCOMES or row.X not in self.conjecture.on:
            return None
        if not self.comparer.inside(row):
            return None
        try:
            return self.comparer.values(row, self.comparer.outcomes(row))
        except KeyboardInterrupt:
            raise
        except BaseException as error:
            raise NoValue(row) from error

    def _compare(
        self,
        law: str,
        expected: Mapping[Key, Value],
        row: Row,
        found: Mapping[Key, Value],
        origin: Callable[[SchubertClass, Degree], Case | None] = lambda w, d: None,
    ) -> Iterator[BrokenLaw]:
        """Differences between two sets of values on ``row``.

        ``origin`` gives the case of this row that the law takes to an outcome there, ``None`` if there is none. A premise on cases may
        admit one of the two and not the other: then they have nothing to say about each other.
        """
        for w, d in sorted({*expected, *found}, key=place_in_row):
            here, there = expected.get((w, d), 0), found.get((w, d), 0)
            second = Case(row.X, row.u, row.v, w, d)
            first = origin(w, d) or second
            if here != there and self.comparer.admits(first) and self.comparer.admits(second):
                source = f"at {first}" if first != second else f"by {law}"
                yield BrokenLaw(law, f"{here} {source}, but {there} at {second}", (first.row, row))

    def broken(self) -> Iterator[BrokenLaw]:
        """All laws in order."""
        values = self._of(self.row)
        if values is None:
            return
        self.values = values
        yield from self._compare("one answer", values, self.row, self._of(self.row) or {})
        yield from self._unit()
        if self.conjecture.is_equivariant:
            yield from self._positive()
        yield from self._commutative()
        if self.conjecture.is_equivariant:
            return  # the other symmetries move the torus action
        yield from self._duality()
        yield from self._s3()
        if not self.conjecture.is_classical:
            yield from self._seidel()
        yield from self._diagram()
        if self.conjecture.premise is None:
            yield from self._associative()

    def _unit(self) -> Iterator[BrokenLaw]:
        X, u, v = self.row.X, self.row.u, self.row.v
        if u is X.identity or v is X.identity:
            other = v if u is X.identity else u
            yield from self._compare("unit", {(other, (0,) * len(X.marked)): 1}, self.row, self.values)

    def _positive(self) -> Iterator[BrokenLaw]:
        """Coefficients are nonnegative (Graham, Duke Math. J. 109 (2001); Mihalcea, Amer. J. Math. 128 (2006)) and degrees are right."""
        X, u, v = self.row.X, self.row.u, self.row.v
        for (w, d), value in self.values.items():
            weight = sum(a * b for a, b in zip(d, X.q_degrees, strict=True))
            place, degree = Case(X, u, v, w, d), u.length + v.length - w.length - weight
            polynomial = value if isinstance(value, RootPolynomial) else RootPolynomial.of(X.rank, {(0,) * X.rank: value})
            if not polynomial.is_positive:
                yield BrokenLaw("positivity", f"{polynomial} at {place} has a negative coefficient", (self.row,))
            if not polynomial.is_homogeneous or polynomial.degree != degree:
                yield BrokenLaw("positivity", f"{polynomial} at {place} is not homogeneous of degree {degree}", (self.row,))

    def _commutative(self) -> Iterator[BrokenLaw]:
        X, u, v = self.row.X, self.row.u, self.row.v
        swapped = Row(X, v, u)
        if u is not v and (found := self._of(swapped)) is not None:
            yield from self._compare("commutativity", self.values, swapped, found, lambda w, d: Case(X, u, v, w, d))

    def _duality(self) -> Iterator[BrokenLaw]:
        X, u, v = self.row.X, self.row.u, self.row.v
        if u.length + v.length == X.dim:
            key = (X.point, (0,) * len(X.marked))
            expected = {key: 1} if u.dual is v else {}
            found = {key: self.values[key]} if key in self.values else {}
            yield from self._compare("Poincare duality", expected, self.row, found)

    def _s3(self) -> Iterator[BrokenLaw]:
        X, u, v = self.row.X, self.row.u, self.row.v
        chosen = list(self.values)[self.choice % len(self.values)] if self.values else None
        w = chosen[0] if chosen else X.classes[self.choice % len(X.classes)]
        partner = Row(X, u, w.dual)
        if (found := self._of(partner)) is not None:
            expected = {(v.dual, d): n for (x, d), n in self.values.items() if x is w}
            there = {(x, d): n for (x, d), n in found.items() if x is v.dual}
            yield from self._compare("S3-symmetry", expected, partner, there, lambda _, d: Case(X, u, v, w, d))

    def _seidel(self) -> Iterator[BrokenLaw]:
        X, u, v = self.row.X, self.row.u, self.row.v
        group = seidel(X)
        g = 1 + self.choice % (len(group.units) - 1) if len(group.units) > 1 else 0
        moved = Row(X, X.classes[group.images[g, u.index]], v)
        if g and (found := self._of(moved)) is not None:
            expected = {}
            shifts, before = (group.shifts[g] - group.shifts[g, u.index]).tolist(), np.argsort(group.images[g])

            def origin(w: SchubertClass, d: Degree) -> Case | None:
                x = X.classes[before[w.index]]
                degree = tuple(a - b for a, b in zip(d, shifts[x.index], strict=True))
                return Case(X, u, v, x, degree) if min(degree) >= 0 else None

            for (w, d), n in self.values.items():
                key = X.classes[group.images[g, w.index]], tuple(a + b for a, b in zip(d, shifts[w.index], strict=True))
                if min(key[1]) < 0:
                    if not self.comparer.admits(Case(X, u, v, w, d)):
                        continue
                    detail = f"{n} at {Case(X, u, v, w, d)}, where a Seidel element would make a power of q negative"
                    yield BrokenLaw("Seidel symmetry", detail, (self.row,))
                else:
                    expected[key] = n
            yield from self._compare("Seidel symmetry", expected, moved, found, origin)

    def _diagram(self) -> Iterator[BrokenLaw]:
        X, u, v = self.row.X, self.row.u, self.row.v
        for Y, images, places in diagram_images(X):
            image = Row(Y, Y.classes[images[u.index]], Y.classes[images[v.index]])
            if (found := self._of(image)) is not None:
                expected = {(Y.classes[images[w.index]], tuple(d[p] for p in places)): n for (w, d), n in self.values.items()}
                before = dict(zip(images, X.classes, strict=True))

                def origin(w: SchubertClass, d: Degree, before: dict[int, SchubertClass] = before, places: Any = places) -> Case:
                    return Case(X, u, v, before[w.index], tuple(d[places.index(k)] for k in range(len(d))))

                yield from self._compare("diagram symmetry", expected, image, found, origin)

    def _associative(self) -> Iterator[BrokenLaw]:
        X, u, v = self.row.X, self.row.u, self.row.v
        z = X.classes[self.choice % len(X.classes)]
        rows = [self.row, Row(X, v, z)]
        right = self._of(rows[1])
        if right is None or len(self.values) + len(right) > _MOST_TERMS:
            return
        here = self._extend(self.values, lambda w: Row(X, w, z), rows)
        there = self._extend(right, lambda w: Row(X, u, w), rows)
        if here is not None and there is not None and here != there:
            w, d = min((key for key in {*here, *there} if here.get(key, 0) != there.get(key, 0)), key=place_in_row)
            power = f"q^({','.join(map(str, d))}) {w!r}"
            values = f"{here.get((w, d), 0)} in (u * v) * z, but {there.get((w, d), 0)} in u * (v * z)"
            yield BrokenLaw("associativity", f"the coefficient of {power} is {values}, for {u!r}, {v!r}, {z!r} on {X}", tuple(rows))

    def _extend(self, values: Values, row_of: Callable[[SchubertClass], Row], rows: list[Row]) -> Values | None:
        """The bilinear extension: a product times one class; the rows used are added to ``rows``."""
        total: Values = {}
        for (w, d), n in values.items():
            rows.append(row_of(w))
            product = self._of(rows[-1])
            if product is None:
                return None
            for (x, e), m in product.items():
                key = x, tuple(a + b for a, b in zip(d, e, strict=True))
                total[key] = total.get(key, 0) + n * m
        return total
