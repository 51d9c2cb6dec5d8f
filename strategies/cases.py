"""Cases: single questions ``N_{u,v}^{w,d}``, inside the degree axiom, near a true term, or outside the axiom."""

from collections.abc import Callable
from typing import Any

from hypothesis import assume
from hypothesis import strategies as st

from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.families import Family
from conjcheck.geometry.flag_variety import MOST_CLASSES, Degree, SchubertClass
from conjcheck.geometry.symmetries import seidel
from conjcheck.strategies.arguments import read_choice
from conjcheck.strategies.bias import depths
from conjcheck.strategies.degrees import degrees
from conjcheck.strategies.indices import draw_below
from conjcheck.strategies.rows import rows
from conjcheck.strategies.steps import home, ladder, steps

__all__ = ["cases"]

Outcome = tuple[SchubertClass, Degree]


def cases(
    on: Family,
    *,
    kind: str = "inside",
    min_n: int = 2,
    max_n: int | None = None,
    max_classes: int = MOST_CLASSES,
    premise: Callable[..., Any] | None = None,
) -> st.SearchStrategy[Case]:
    """Cases ``(X, u, v, w, d)`` of the flag varieties of a family; d has one entry per marked node.

    The row ``(X, u, v)`` is drawn first, as :func:`rows` does, and shrinks as it does. Then, by kind:

    * ``"inside"``: the degree axiom ``l(u) + l(v) = l(w) + sum d_i deg q_i`` holds, and ``(w, d)`` is a term of sigma_u times a
      product of divisors that contains sigma_v: a candidate for a nonzero constant. Shrinks towards ``d = 0``.
    * ``"near"``: an inside case with one thing changed: a unit of q moved to another node with the same ``deg q_i`` or w replaced
      by a neighbour of the same length (the axiom still holds), or one ``d_i`` off by one (it does not). Shrinks towards small
      d and w.
    * ``"outside"``: the axiom fails, so the constant is 0. Shrinks towards ``d = 0`` and the first w of a wrong length.

    Measured on eight seeds with 500 examples each: an inside case asks for a nonzero constant in 83 %, 59 % and 47 % on ``Fl(4)``,
    ``Fl(5)`` and ``Fl(6)``; an even choice among the outcomes that the axiom allows in a row would do so in 5.4 %, 0.8 % and 0.1 %
    (computed). A near case has constant 0 in 96 %, 97 % and 99 % on these.

    Args:
        on: the family.
        kind: ``"inside"``, ``"near"`` or ``"outside"``.
        min_n: the least ``X.n``.
        max_n: the greatest ``X.n``; by default as for :func:`flag_varieties`.
        max_classes: the greatest number of Schubert classes.
        premise: a predicate ``(X, u, v)``, as for :func:`rows`.

    Cost: one or two choices besides the row (``"outside"``: up to two for each unit of q, and two more); about 0.1 ms for each class
    that is met for the first time.

    Raises:
        InvalidArgument: at once.

    >>> from conjcheck.geometry.families import Grassmannians
    >>> from hypothesis import find
    >>> find(cases(Grassmannians()), lambda case: any(case.d))
    Case.parse('Gr(1,2): (1) * (1) -> (), q^(1)')
    """
    finish = _KINDS[read_choice("kind", kind, _KINDS)]
    return _cases(rows(on, min_n=min_n, max_n=max_n, max_classes=max_classes, premise=premise), finish)


@st.composite
def _cases(draw: st.DrawFn, row_strategy: st.SearchStrategy[Row], finish: Callable[[st.DrawFn, Row], Outcome]) -> Case:
    """A row, then the rest."""
    row = draw(row_strategy)
    w, d = finish(draw, row)
    return Case(row.X, row.u, row.v, w, d)


def _inside(draw: st.DrawFn, row: Row) -> Outcome:
    """Walk from the longer class along the divisors of the shorter one's Seidel representative, then relabel back.

    With v = g a: ``sigma_u * sigma_v = q^{-shift(g, a)} S_g * (sigma_u * sigma_a)``, and a is short. A walk that ends at a negative
    degree is no term; one or two in a hundred. The walk is one choice, a byte for each step that any row of X needs, so that
    rows with short walks do not count as simpler.
    """
    most = int(depths(row.X).max())
    turns = draw(st.binary(min_size=most, max_size=most))
    v, w = sorted((row.u, row.v), key=lambda c: c.length)
    g, a = home(v)
    d: Degree = (0,) * len(row.X.marked)
    for divisor, turn in zip(ladder(a), turns, strict=False):
        ways = [step for step in steps(w) if divisor in step.divisors]
        step = ways[turn * len(ways) // 256]
        w, d = step.w, tuple(x + y for x, y in zip(d, step.d, strict=True))
    group = seidel(row.X)
    d = tuple(x + y for x, y in zip(d, (group.shifts[g, w.index] - group.shifts[g, a.index]).tolist(), strict=True))
    assume(min(d) >= 0)
    return row.X.classes[int(group.images[g, w.index])], d


def _near(draw: st.DrawFn, row: Row) -> Outcome:
    """One of the near misses of an inside case, smallest first."""
    misses = _misses(*_inside(draw, row))
    return misses[draw_below(draw, len(misses))]


def _misses(w: SchubertClass, d: Degree) -> list[Outcome]:
    """What differs in one thing; never empty, because some ``d_i`` can always be raised."""
    X, level = w.variety, w.variety.of_length(w.length)
    places = range(len(d))

    def changed(*moves: tuple[int, int]) -> Degree:
        return tuple(x + sum(by for k, by in moves if k == place) for place, x in enumerate(d))

    moved = [changed((i, -1), (j, 1)) for i in places for j in places if i != j and X.q_degrees[i] == X.q_degrees[j]]
    off = [changed((i, by)) for i in places for by in (-1, 1)]
    spot = w.index - level[0].index
    found = [(w, e) for e in moved + off if min(e) >= 0]
    found += [(level[k], d) for k in (spot - 1, spot + 1) if 0 <= k < len(level)]
    return sorted(found, key=lambda outcome: (sum(outcome[1]), outcome[1], outcome[0].index))


def _outside(draw: st.DrawFn, row: Row) -> Outcome:
    """Any degree that fits into the row, then any length but the right one, then any class of that length."""
    X, total = row.X, row.u.length + row.v.length
    d = draw(degrees(X, max_total=total))
    right = total - sum(x * y for x, y in zip(d, X.q_degrees, strict=True))
    lengths = [length for length in range(X.dim + 1) if length != right]
    level = X.of_length(lengths[draw_below(draw, len(lengths))])
    return level[draw_below(draw, len(level))], d


_KINDS: dict[str, Callable[[st.DrawFn, Row], Outcome]] = {"inside": _inside, "near": _near, "outside": _outside}
