"""What every engine offers: rows, single constants, and a whole table in blocks; and the products that callers get."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, Protocol

import numpy as np

from conjcheck.geometry.case import place_in_row
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass
from conjcheck.geometry.typeset import latex_class, latex_polynomial, latex_power
from conjcheck.geometry.weyl import Ints

__all__ = ["Block", "Engine", "Product", "RowTerms", "blocks_by_rows"]

RowTerms = dict[tuple[SchubertClass, Degree], int]


class Product(dict[tuple[SchubertClass, Degree], Any]):
    """A product of Schubert classes: ``{(w, d): N}``, nonzero terms only, in the order of cases (``sum d``, ``d``, ``w``).

    The values are integers, or polynomials for an equivariant product.

    Prints as mathematics: ``q^(1) sigma(2) + q^(1) sigma(1,1)`` in text, LaTeX in notebooks.
    """

    @classmethod
    def of(cls, terms: Mapping[tuple[SchubertClass, Degree], Any]) -> "Product":
        """The product with its terms put in order."""
        return cls(sorted(terms.items(), key=lambda item: place_in_row(item[0])))

    def __repr__(self) -> str:
        return " + ".join(f"{_size(count)}{_power('q^({})', d)}{w!r}" for (w, d), count in self.items()) or "0"

    __str__ = __repr__

    def _repr_latex_(self) -> str:
        body = " + ".join(
            f"{latex_polynomial(_size(count))}{latex_power(d)}{' ' if any(d) else ''}\\sigma_{{{latex_class(str(w))}}}"
            for (w, d), count in self.items()
        )
        return f"${body or '0'}$"


def _size(count: Any) -> str:
    if count == 1:
        return ""
    return f"{count} " if isinstance(count, int) else f"({count}) "


def _power(shape: str, d: Degree) -> str:
    return (shape.format(",".join(map(str, d))) + " ") if any(d) else ""


@dataclass(frozen=True, eq=False)
class Block:
    """All nonzero constants ``N_{u,v}^{w,d}`` with one u; row k of each array is one constant.

    Blocks may share arrays: read them, do not write to them.

    Attributes:
        u: the class.
        v, w: ``(K,)``, 0-based indices into ``u.variety.classes``.
        d: ``(K, m)``, one column per marked node.
        N: ``(K,)``, positive.
    """

    u: SchubertClass
    v: Ints
    w: Ints
    d: Ints
    N: Ints

    def __len__(self) -> int:
        return len(self.N)


class Engine(Protocol):
    """A way to compute structure constants."""

    name: str

    def refuses(self, X: FlagVariety) -> str | None:
        """``None`` if X is in reach, else the reason."""

    def row(self, u: SchubertClass, v: SchubertClass) -> RowTerms:
        """The nonzero terms of ``sigma_u * sigma_v``, in any order."""

    def constant(self, u: SchubertClass, v: SchubertClass, w: SchubertClass, d: Degree) -> int:
        """One constant."""

    def blocks(self, X: FlagVariety) -> Iterator[Block]:
        """The whole table, one block per u, in an order of the engine's choosing."""


def blocks_by_rows(engine: Engine, X: FlagVariety) -> Iterator[Block]:
    """The whole table, row by row, u in the order of the classes."""
    for u in X.classes:
        found: list[tuple[Any, ...]] = [
            (v.index, w.index, *d, count) for v in X.classes for (w, d), count in engine.row(u, v).items()
        ]
        array = np.array(found, dtype=np.int64).reshape(len(found), 3 + len(X.marked))
        yield Block(u, array[:, 0], array[:, 1], array[:, 2:-1], array[:, -1])
