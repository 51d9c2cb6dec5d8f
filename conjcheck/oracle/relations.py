"""How a class of G/B is reached from shorter ones: ``den * sigma_w = sum of L * sigma_z - (other terms)``, L combinations of divisors.

A relation names classes ``z``, one letter shorter, with integer weights ``L`` (the divisor ``sum L_i sigma_{s_i}``), and ``den``.
The other terms are those of the products ``L * sigma_z`` by the quantum Chevalley formula: quantum terms, which are shorter, and
classical terms of the same length as w, for which relations come earlier.

Type A: the transition of Lascoux and Schutzenberger, Lett. Math. Phys. 10 (1985), in one subtraction: with r the last descent of w, s the
largest position with ``w(s) < w(r)`` and ``z = w t_rs``, the weight ``omega_r - omega_{r-1}``.

Other types: exact elimination, level by level: among the classes above z that have no relation yet, one whose coroot is no combination of
the coroots of the others can be isolated by a weight that vanishes on those. Where that ends before all classes are reached (it
does on D4 and F4), the rest of the level is eliminated at once, over several z.
"""

from dataclasses import dataclass
from fractions import Fraction
from functools import cache
from math import gcd, lcm
from typing import Any

from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.oracle.chevalley import chevalley

__all__ = ["Relation", "annihilator", "eliminated", "relation"]

Weight = tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Relation:
    """``den * sigma_w = sum of L * sigma_z - (other terms)``: ``parts`` are pairs (L in fundamental weights, index of z)."""

    parts: tuple[tuple[Weight, int], ...]
    den: int


def relation(X: FlagVariety, w: int) -> Relation:
    """The relation of the class with index w, which is not the identity, on a complete flag variety G/B."""
    if X.kind.letter == "A":
        return _transition(X, w)
    return _level(X, X.classes[w].length)[w]


def _transition(X: FlagVariety, w: int) -> Relation:
    line = X.classes[w].permutation
    r = X.classes[w].descents[-1]
    s = max(j for j in range(r, len(line)) if line[j] < line[r - 1])
    swapped = list(line)
    swapped[r - 1], swapped[s] = swapped[s], swapped[r - 1]
    weight = tuple((i == r) - (i == r - 1) for i in range(1, X.rank + 1))
    return Relation(((weight, X.schubert(permutation=swapped).index),), 1)


@cache
def _level(X: FlagVariety, length: int) -> dict[int, Relation]:
    """Relations of all classes of one length, in an order in which each uses only earlier ones of the same length."""
    above = {
        z.index: [(target, coroot) for target, d, coroot in chevalley(X).terms(z.index) if not any(d)]
        for z in X.of_length(length - 1)
    }
    wanted = {w.index for w in X.of_length(length)}
    found: dict[int, Relation] = {}
    moving = True
    while moving and wanted:
        moving = False
        for z, covers in above.items():
            left = [(w, coroot) for w, coroot in covers if w in wanted]
            for w, coroot in left:
                weight = annihilator([c for x, c in left if x != w], coroot)
                if weight is not None:
                    found[w] = Relation(((weight, z),), sum(a * b for a, b in zip(weight, coroot, strict=True)))
                    wanted.discard(w)
                    moving = True
                    break
    return found | eliminated(above, wanted, X.rank)


def eliminated(above: dict[int, list[tuple[int, Weight]]], wanted: set[int], rank: int) -> dict[int, Relation]:
    """Relations of the wanted classes from all rows ``sigma_{s_i} * sigma_z`` together, by exact row reduction."""
    rows: list[tuple[dict[int, Fraction], dict[tuple[int, int], Fraction]]] = []
    for z, covers in above.items():
        for i in range(rank):
            line = {w: Fraction(coroot[i]) for w, coroot in covers if w in wanted and coroot[i]}
            trace = {(i, z): Fraction(1)}
            for pivot_line, pivot_trace in rows:
                pivot = next(iter(pivot_line))
                if factor := line.get(pivot):
                    _subtract(line, factor, pivot_line)
                    _subtract(trace, factor, pivot_trace)
            if line:
                pivot = min(line)
                scale = line[pivot]
                line = {pivot: Fraction(1)} | {w: x / scale for w, x in line.items() if w != pivot}
                trace = {key: x / scale for key, x in trace.items()}
                for other_line, other_trace in rows:
                    if factor := other_line.get(pivot):
                        _subtract(other_line, factor, line)
                        _subtract(other_trace, factor, trace)
                rows.append((line, trace))
    found = {}
    for line, trace in rows:
        (w,) = line
        den = lcm(*(x.denominator for x in trace.values()))
        weights: dict[int, list[int]] = {}
        for (i, z), x in trace.items():
            weights.setdefault(z, [0] * rank)[i] = int(x * den)
        found[w] = Relation(tuple((tuple(weight), z) for z, weight in sorted(weights.items())), den)
    assert set(found) == wanted, "on G/B the divisors generate the classical ring over Q"
    return found


def _subtract(line: dict[Any, Fraction], factor: Fraction, other: dict[Any, Fraction]) -> None:
    """``line -= factor * other``, in place, zeros dropped; the first key stays first."""
    for key, x in other.items():
        value = line.get(key, Fraction(0)) - factor * x
        if value:
            line[key] = value
        else:
            line.pop(key, None)


def annihilator(vectors: list[Weight], witness: Weight) -> Weight | None:
    """A primitive integer vector that vanishes on some vectors but not on the witness (positive there); ``None`` if there is none.

    >>> annihilator([(1, 0, 1)], (0, 0, 1))
    (-1, 0, 1)
    """
    size = len(witness)
    rows = [[Fraction(x) for x in vector] for vector in vectors]
    pivots: list[int] = []
    for column in range(size):
        lead = next((k for k in range(len(pivots), len(rows)) if rows[k][column]), None)
        if lead is None:
            continue
        top = len(pivots)
        rows[top], rows[lead] = rows[lead], rows[top]
        rows[top] = [x / rows[top][column] for x in rows[top]]
        for k, row in enumerate(rows):
            if k != top and row[column]:
                rows[k] = [x - row[column] * y for x, y in zip(row, rows[top], strict=True)]
        pivots.append(column)
    for free in (column for column in range(size) if column not in pivots):
        solution = [Fraction(0)] * size
        solution[free] = Fraction(1)
        for k, column in enumerate(pivots):
            solution[column] = -rows[k][free]
        value = sum(x * y for x, y in zip(solution, witness, strict=True))
        if value:
            scale = lcm(*(x.denominator for x in solution)) * (1 if value > 0 else -1)
            whole = [int(x * scale) for x in solution]
            divisor = gcd(*whole)
            return tuple(x // divisor for x in whole)
    return None
