"""Features of cases: what may tell the cases where a rule fails from those where it is right.

A feature gives one value per case, ``bool``, ``int`` or ``str``, for all cases of a space at once; its words go into reports.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.geometry.weyl import Ints, dual_indices
from conjcheck.testing.traits import TRAITS, Trait, bruhat, trait, trait_values

__all__ = ["FEATURES", "Cases", "Feature", "Values", "bracketed", "feature_values"]

Values = NDArray[Any]


@dataclass(frozen=True, eq=False, slots=True)
class Cases:
    """K cases of one space, as arrays.

    Attributes:
        X: the space.
        u, v, w: ``(K,)``, 0-based indices into ``X.classes``; all w are 0 where the "cases" are rows.
        d: ``(K, m)``, one column per marked node.
        constant: ``(K,)``, the true constant; ``None`` in the equivariant rings and for rows.
        largest: ``(K,)``, the largest constant of the product ``u * v``; ``None`` in the equivariant rings.
    """

    X: FlagVariety
    u: Ints
    v: Ints
    w: Ints
    d: Ints
    constant: Values | None = None
    largest: Values | None = None

    def __len__(self) -> int:
        return len(self.u)


@dataclass(frozen=True, eq=False, slots=True)
class Feature:
    """One feature of cases.

    Attributes:
        yes, no: what reports say where it is true, and where not; ``yes`` alone is the name of a number or of a word.
        needs: what it depends on: ``"space"``, ``"row"`` or ``"case"``; the first two are cheap, and make premises on rows.
        of: from cases to values, ``(K,)``; ``None`` where it makes no sense.
        code: a Python expression in X, u, v, w, d, with public attributes only; empty if there is no short one.
        oddity: the smaller, the sooner it comes to mind.
        asks: whether it needs the oracle: then no premise can be made of it.
        grows: whether it grows with the space: then a bound from above leaves finitely many spaces, which is no premise worth having.
    """

    yes: str
    no: str
    needs: str
    of: Callable[[Cases], Values | None]
    code: str = ""
    oddity: int = 1
    asks: bool = False
    grows: bool = False

    @property
    def name(self) -> str:
        """Its name in lists."""
        return self.yes


def bracketed(code: str) -> str:
    """An expression in brackets, if it is joined from several."""
    return f"({code})" if " and " in code or " or " in code else code


def feature_values(feature: Feature, tables: Sequence[Cases]) -> Values | None:
    """The values at all cases of some spaces, joined; ``None`` if it makes no sense on one of them."""
    found: list[Values] = []
    for cases in tables:
        values = feature.of(cases)
        if values is None:
            return None
        found.append(values)
    return np.concatenate(found) if found else None


def _of_space(yes: str, no: str, value: Callable[[FlagVariety], Any], code: str, oddity: int = 1, **choices: Any) -> Feature:
    """A feature of the space alone; ``None`` where the value is ``None``."""

    def of(cases: Cases) -> Values | None:
        found = value(cases.X)
        return None if found is None else np.full(len(cases), found)

    return Feature(yes, no, "space", of, code, oddity, **choices)


_SPACE = (
    _of_space("n", "", lambda X: X.n if X.kind.letter == "A" else None, "X.n", 0, grows=True),
    _of_space("the rank", "", lambda X: X.rank, "X.rank", 1, grows=True),
    _of_space("the number of steps", "", lambda X: len(X.marked), "len(X.marked)", 0),
    _of_space("dim X", "", lambda X: X.dim, "X.dim", 1, grows=True),
    _of_space("X is a complete flag variety", "X is not a complete flag variety", lambda X: X.is_complete, "X.is_complete", 0),
    _of_space("the Cartan type of X", "", lambda X: str(X.kind.letter), "X.kind.letter", 1),
    _of_space("k", "", lambda X: X.steps[0] if X.is_grassmannian else None, "X.steps[0]", 1),
    _of_space("n - k", "", lambda X: X.n - X.steps[0] if X.is_grassmannian else None, "X.n - X.steps[0]", 1),
    _of_space(
        "the smaller of k, n - k",
        "",
        lambda X: min(X.steps[0], X.n - X.steps[0]) if X.is_grassmannian else None,
        "min(X.steps[0], X.n - X.steps[0])",
        1,
    ),
    _of_space("the first step", "", lambda X: None if X.is_grassmannian else X.marked[0], "X.marked[0]", 2),
    _of_space("the last step", "", lambda X: None if X.is_grassmannian else X.marked[-1], "X.marked[-1]", 2),
    _of_space("the smallest deg q", "", lambda X: min(X.q_degrees), "min(X.q_degrees)", 2, grows=True),
    _of_space("the largest deg q", "", lambda X: max(X.q_degrees), "max(X.q_degrees)", 2, grows=True),
)


def _single(one: Trait, name: str) -> Feature:
    """The trait of u, of v or of w."""

    def of(cases: Cases) -> Values | None:
        values = trait_values(one, cases.X)
        return None if values is None else np.asarray(values[getattr(cases, name)])

    no = one.said_of(name, true=False) if one.is_truth else ""
    return Feature(one.said_of(name), no, "case" if name == "w" else "row", of, one.code_of(name), one.oddity + (name == "w"))


def _paired(one: Trait, join: Callable[[Values, Values], Values], yes: str, no: str, code: str, oddity: int) -> Feature:
    """The trait of both u and v, joined by a function that does not see their order."""

    def of(cases: Cases) -> Values | None:
        values = trait_values(one, cases.X)
        return None if values is None else join(values[cases.u], values[cases.v])

    return Feature(yes, no, "row", of, code, one.oddity + oddity)


def _symmetric(one: Trait) -> tuple[Feature, ...]:
    """The trait for both of u and v, or any of them."""
    u, v = (one.code_of(name) for name in "uv")
    if not one.is_truth:
        low, high = (f"{what}({u}, {v})" if one.code else "" for what in ("min", "max"))
        pair = f"{one.said_of('u')} and {one.said_of('v')}"
        return (
            _paired(one, np.minimum, f"the smaller of {pair}", "", low, 1),
            _paired(one, np.maximum, f"the larger of {pair}", "", high, 1),
        )
    any_code, both_code = (f"{bracketed(u)} {word} {bracketed(v)}" if one.code else "" for word in ("or", "and"))
    some, each = "u or v", "each of u and v"
    return (
        _paired(one, np.logical_or, one.said_of(some), one.said_of(each, true=False), any_code, 0),
        _paired(one, np.logical_and, one.said_of(each), one.said_of(some, true=False), both_code, 0),
    )


def _sum_of_lengths(cases: Cases) -> Values:
    length = trait_values(trait("length"), cases.X)
    assert length is not None
    return np.asarray(length[cases.u] + length[cases.v])


def _masks(cases: Cases) -> tuple[Ints, Ints]:
    """The descent sets of u and v as bits, bit i for the node i."""
    masks = _descent_masks(cases.X)
    return masks[cases.u], masks[cases.v]


@lru_cache(maxsize=256)
def _descent_masks(X: FlagVariety) -> Ints:
    return np.array([sum(1 << i for i in u.descents) for u in X.classes], dtype=np.int64)


def _separated(cases: Cases) -> Values:
    first, last = trait_values(trait("first"), cases.X), trait_values(trait("last"), cases.X)
    assert first is not None
    assert last is not None
    far = np.where(first == 0, cases.X.rank + 1, first)
    one: Values = last[cases.u] <= far[cases.v]
    other: Values = last[cases.v] <= far[cases.u]
    return one | other


def _below(smaller: str, larger: str) -> Callable[[Cases], Values | None]:
    """Whether one class is below another in the Bruhat order; ``v^`` is the dual of v."""

    def index(cases: Cases, name: str) -> Ints:
        if name == "v^":
            return np.asarray(dual_indices(cases.X.kind, cases.X.marked)[cases.v])
        return np.asarray(getattr(cases, name))

    def of(cases: Cases) -> Values | None:
        order = bruhat(cases.X)
        return None if order is None else order[index(cases, larger), index(cases, smaller)]

    return of


def _dual(cases: Cases) -> Values:
    return np.asarray(dual_indices(cases.X.kind, cases.X.marked)[cases.u] == cases.v)


_max_min = "max(u.descents, default=0) <= min(v.descents, default=X.n)"
_min_max = "max(v.descents, default=0) <= min(u.descents, default=X.n)"

_ROW = (
    Feature("l(u) + l(v)", "", "row", _sum_of_lengths, "u.length + v.length", 0),
    Feature("l(u) + l(v) - dim X", "", "row", lambda c: _sum_of_lengths(c) - c.X.dim, "u.length + v.length - X.dim", 0),
    Feature(
        "l(u) - l(v)",
        "",
        "row",
        lambda c: 2 * _sum_of_lengths(Cases(c.X, c.u, c.u * 0, c.w, c.d)) - _sum_of_lengths(c),
        "u.length - v.length",
        1,
    ),
    Feature("u = v", "u and v differ", "row", lambda c: c.u == c.v, "u == v", 0),
    Feature(
        "u comes after v in the order of the classes",
        "u comes before v in the order of the classes, or u = v",
        "row",
        lambda c: c.u > c.v,
        "u.index > v.index",
        0,
    ),
    Feature("u is the dual of v", "u is not the dual of v", "row", _dual, "u == v.dual", 1),
    Feature("the classical product u * v is not 0", "the classical product u * v is 0", "row", _below("u", "v^"), "", 0),
    Feature("u <= v in the Bruhat order", "not u <= v in the Bruhat order", "row", _below("u", "v"), "", 1),
    Feature("v <= u in the Bruhat order", "not v <= u in the Bruhat order", "row", _below("v", "u"), "", 1),
    Feature(
        "a descent of u is one of v",
        "no descent of u is one of v",
        "row",
        lambda c: np.bitwise_and(*_masks(c)) != 0,
        "bool(set(u.descents) & set(v.descents))",
        0,
    ),
    Feature(
        "u and v have the same descents",
        "u and v have different descents",
        "row",
        lambda c: np.equal(*_masks(c)),
        "u.descents == v.descents",
        0,
    ),
    Feature(
        "the descents of u and v are separated (those of one up to a place, those of the other from there on)",
        "the descents of u and v are not separated",
        "row",
        _separated,
        f"({_max_min}) or ({_min_max})",
        0,
    ),
    Feature("the largest constant of the product u * v", "", "row", lambda c: c.largest, "", 1, asks=True),
)


def _entries(of: Callable[[Ints], Any]) -> Callable[[Cases], Values]:
    return lambda cases: np.asarray(of(cases.d))


def _connected(cases: Cases) -> Values:
    """Whether the q's that occur stand side by side (also where none does)."""
    here = cases.d > 0
    starts = here[:, :1].sum(axis=1) + (here[:, 1:] & ~here[:, :-1]).sum(axis=1)
    return np.asarray(starts <= 1)


def _axiom(cases: Cases) -> Values:
    length = trait_values(trait("length"), cases.X)
    assert length is not None
    return np.asarray(_sum_of_lengths(cases) == length[cases.w] + cases.d @ np.array(cases.X.q_degrees))


_CASE = (
    Feature("d > 0 (some q occurs)", "d = 0 (classical)", "case", _entries(lambda d: d.any(axis=1)), "any(d)", 0),
    Feature("|d|", "", "case", _entries(lambda d: d.sum(axis=1)), "sum(d)", 0),
    Feature("the number of q's that occur", "", "case", _entries(lambda d: (d > 0).sum(axis=1)), "sum(x > 0 for x in d)", 1),
    Feature("every q occurs", "not every q occurs", "case", _entries(lambda d: (d > 0).all(axis=1)), "all(d)", 0),
    Feature("the largest entry of d", "", "case", _entries(lambda d: d.max(axis=1)), "max(d)", 0),
    Feature("the smallest entry of d", "", "case", _entries(lambda d: d.min(axis=1)), "min(d)", 1),
    Feature("the first entry of d", "", "case", _entries(lambda d: d[:, 0]), "d[0]", 2),
    Feature("the last entry of d", "", "case", _entries(lambda d: d[:, -1]), "d[-1]", 2),
    Feature("the q's that occur stand side by side", "the q's that occur do not stand side by side", "case", _connected, "", 2),
    Feature("deg q^d", "", "case", lambda c: c.d @ np.array(c.X.q_degrees), "sum(a * b for a, b in zip(d, X.q_degrees))", 2),
    Feature("u <= w in the Bruhat order", "not u <= w in the Bruhat order", "case", _below("u", "w"), "", 1),
    Feature("v <= w in the Bruhat order", "not v <= w in the Bruhat order", "case", _below("v", "w"), "", 1),
    Feature("w = u", "w and u differ", "case", lambda c: c.w == c.u, "w == u", 2),
    Feature("w = v", "w and v differ", "case", lambda c: c.w == c.v, "w == v", 2),
    Feature(
        "lengths and degrees add up",
        "lengths and degrees do not add up",
        "case",
        _axiom,
        "u.length + v.length == w.length + sum(a * b for a, b in zip(d, X.q_degrees))",
        0,
    ),
    Feature(
        "the constant is 2 or more",
        "the constant is 0 or 1",
        "case",
        lambda c: None if c.constant is None else c.constant > 1,
        "",
        1,
        asks=True,
    ),
)

FEATURES: tuple[Feature, ...] = (
    *_SPACE,
    *_ROW,
    *_CASE,
    *(feature for one in TRAITS for feature in _symmetric(one)),
    *(_single(one, name) for one in TRAITS for name in "uvw"),
)
"""All features, a fixed list."""
