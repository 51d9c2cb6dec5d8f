"""Engine "recursion" on G/B: associativity and the quantum Chevalley formula, nothing else.

A relation ``den * sigma_w = sum of L * sigma_z - (other terms c q^d sigma_z')`` reaches w from shorter classes (see
``relations``). So by associativity

    den * sigma_w * y  =  sum of L * (sigma_z * y)  -  sum of c q^d (sigma_z' * y).

All numbers are Python integers, the division by ``den`` is checked to leave no rest, and all degrees are kept: there is no bound on the
degree of q, guessed or other.

A product is first moved by Seidel elements (law 4) to chosen representatives; in type A those that fix n, which the relations never leave.
Both the reduced and the direct route are offered, so that one can witness for the other.
"""

from collections.abc import Iterator
from functools import cache, lru_cache

import numpy as np

from conjcheck.geometry.flag_variety import Degree, FlagVariety
from conjcheck.geometry.symmetries import seidel
from conjcheck.geometry.weyl import Ints
from conjcheck.oracle.chevalley import chevalley
from conjcheck.oracle.engine import Block, RowTerms
from conjcheck.oracle.guard import note_question
from conjcheck.oracle.relations import Relation, relation

__all__ = ["CompleteFlagRing", "Packed", "complete_flag_ring"]

Packed = dict[int, int]
"""Sum of terms ``c q^d sigma_w``, keyed by ``w.index + (packed d << shift)``."""

_MOST_PRODUCTS = 150_000


class CompleteFlagRing:
    """The ring QH*(G/B) with its products on packed terms.

    Args:
        X: a complete flag variety G/B.
    """

    def __init__(self, X: FlagVariety) -> None:
        self.X = X
        self.shift = len(X.classes).bit_length()
        self.bits = max(X.dim.bit_length(), 3)
        self._moves: dict[tuple[tuple[int, ...], int], list[tuple[int, int]]] = {}
        self._relations: dict[int, tuple[Relation, Packed]] = {}
        self._sweeps: dict[int, dict[int, Packed]] = {}
        self._most_sweeps = max(_MOST_PRODUCTS // len(X.classes), 2)
        self._degrees: dict[int, Degree] = {}
        self._prepare_symmetry()

    def _prepare_symmetry(self) -> None:
        """Seidel images and packed shifts; for each class its representative and the element that leads back."""
        X, group = self.X, seidel(self.X)
        self.group = group
        weights = np.array([1 << (self.bits * k) for k in range(len(X.marked))], dtype=np.int64)
        self.packed_shifts: Ints = (group.shifts @ weights) << self.shift
        if X.kind.letter == "A":
            chosen = [u.index for u in X.classes if u.permutation[-1] == X.n]
        else:
            chosen = sorted(set(group.images.min(axis=0).tolist()))
        self.representatives = np.array(chosen, dtype=np.int64)
        self.home = np.empty(len(X.classes), dtype=np.int64)
        self.element = np.empty(len(X.classes), dtype=np.int64)
        for g, images in enumerate(group.images):
            reached = images[self.representatives]
            self.home[reached], self.element[reached] = self.representatives, g

    def pack(self, d: Degree) -> int:
        """A degree as one integer, ready to be added to a class index."""
        return sum(x << (self.bits * k) for k, x in enumerate(d)) << self.shift

    def unpack(self, key: int) -> tuple[int, Degree]:
        """Class index and degree of a packed term."""
        code = key >> self.shift
        d = self._degrees.get(code)
        if d is None:
            mask = (1 << self.bits) - 1
            d = self._degrees[code] = tuple((code >> (self.bits * k)) & mask for k in range(len(self.X.marked)))
        return key & ((1 << self.shift) - 1), d

    def _steps(self, weight: tuple[int, ...], w: int) -> list[tuple[int, int]]:
        """Terms of ``L * sigma_w``, L the divisor ``sum weight_i sigma_{s_i}``, as (key to add to w, coefficient)."""
        found = self._moves.get((weight, w))
        if found is None:
            found = self._moves[weight, w] = [
                (target - w + self.pack(d), count)
                for target, d, coroot in chevalley(self.X).terms(w)
                if (count := sum(a * b for a, b in zip(weight, coroot, strict=True)))
            ]
        return found

    def _relation(self, w: int) -> tuple[Relation, dict[int, int]]:
        """The relation of w and its other terms, as packed terms."""
        found = self._relations.get(w)
        if found is None:
            how = relation(self.X, w)
            rest: Packed = {}
            for weight, z in how.parts:
                for step, count in self._steps(weight, z):
                    rest[z + step] = rest.get(z + step, 0) + count
            assert rest.pop(w) == how.den, "the relation must contain sigma_w as often as it says"
            found = self._relations[w] = (how, {key: count for key, count in rest.items() if count})
        return found

    def _times(self, w: int, known: dict[int, Packed]) -> Packed:
        """``sigma_w * y``, where ``known`` holds ``sigma_e * y``; every ``sigma_z * y`` on the way is remembered there."""
        mask = (1 << self.shift) - 1
        stack = [w]
        while stack:
            w = stack[-1]
            if w in known:
                stack.pop()
                continue
            how, rest = self._relation(w)
            missing = [t for t in (*(z for _, z in how.parts), *(key & mask for key in rest)) if t not in known]
            if missing:
                stack.extend(missing)
                continue
            total: Packed = {}
            for weight, z in how.parts:
                for key, count in known[z].items():
                    for step, factor in self._steps(weight, key & mask):
                        total[key + step] = total.get(key + step, 0) + factor * count
            for key, factor in rest.items():
                power = (key >> self.shift) << self.shift
                for term, count in known[key & mask].items():
                    total[term + power] = total.get(term + power, 0) - factor * count
            known[w] = _divided(total, how.den)
            stack.pop()
        return known[w]

    def _sweep(self, y: int) -> dict[int, Packed]:
        """The products with ``sigma_y`` known so far; only the sweeps used last are kept, so that memory is bounded."""
        known = self._sweeps.pop(y, None)
        if known is None:
            while len(self._sweeps) >= self._most_sweeps:
                self._sweeps.pop(next(iter(self._sweeps)))
            known = {0: {y: 1}}
        self._sweeps[y] = known
        return known

    def packed_row(self, u: int, v: int) -> Packed:
        """``sigma_u * sigma_v`` on packed terms, through the Seidel representatives."""
        note_question()
        a, b, g, h = int(self.home[u]), int(self.home[v]), int(self.element[u]), int(self.element[v])
        if a in self._sweeps.get(b, ()):
            reduced = self._sweeps[b][a]
        elif b in self._sweeps.get(a, ()):
            reduced = self._sweeps[a][b]
        else:
            short, long = sorted((a, b))
            reduced = self._times(short, self._sweep(long))
        if g == h == 0:
            return reduced
        both = self.group.table[g, h]
        images, shifts = self._moved(int(both))
        constant = self._offset(g, h, a, b)
        mask = (1 << self.shift) - 1
        return {
            (key >> self.shift << self.shift) + images[key & mask] + shifts[key & mask] + constant: c for key, c in reduced.items()
        }

    def direct_row(self, u: int, v: int) -> Packed:
        """``sigma_u * sigma_v`` without any symmetry and without any memory: the second route."""
        note_question()
        return dict(self._times(u, {0: {v: 1}}))

    @cache  # noqa: B019  # a ring lives as long as the process
    def _moved(self, g: int) -> tuple[list[int], list[int]]:
        return self.group.images[g].tolist(), self.packed_shifts[g].tolist()

    def _offset(self, g: int, h: int, a: int, b: int) -> int:
        """Packed exponent that completes ``sigma_{g a} * sigma_{h b} = q^offset S_{gh} * (sigma_a * sigma_b)``."""
        shifts = self.packed_shifts
        return int(shifts[g, self.group.units[h]] - shifts[g, a] - shifts[h, b])

    def terms(self, packed: Packed) -> RowTerms:
        """Packed terms as ``{(w, d): N}``."""
        classes, shift, mask, degrees = self.X.classes, self.shift, (1 << self.shift) - 1, self._degrees
        result: RowTerms = {}
        for key, count in packed.items():
            code = key >> shift
            d = degrees[code] if code in degrees else self.unpack(key)[1]
            result[classes[key & mask], d] = count
        return result

    def blocks(self) -> Iterator[Block]:
        """The whole table: one sweep per representative, every other row of its Seidel orbit by relabelling whole arrays."""
        note_question()
        X, group, shift = self.X, self.group, self.shift
        mask = (1 << shift) - 1
        places = self.bits * np.arange(len(X.marked), dtype=np.int64) + shift
        field = (1 << self.bits) - 1
        for a in self.representatives.tolist():
            known = self._sweep(a)
            for b, other in self._sweeps.items():
                if a in other:
                    known.setdefault(b, other[a])
            rows = [self._times(b, known) for b in self.representatives.tolist()]
            sizes = [len(row) for row in rows]
            keys = np.fromiter((key for row in rows for key in row), dtype=np.int64, count=sum(sizes))
            counts = np.fromiter((c for row in rows for c in row.values()), dtype=np.int64, count=sum(sizes))
            partner = np.repeat(self.representatives, sizes)
            terms, powers = keys & mask, (keys >> shift) << shift
            moved = powers + self.packed_shifts[:, terms] + group.images[:, terms]
            from_partner = self.packed_shifts[:, partner]
            partner_images = group.images[:, partner].ravel()
            all_counts = np.tile(counts, len(group.units))
            for g in range(len(group.units)):
                offsets = self.packed_shifts[g, group.units] - self.packed_shifts[g, a]
                full = (moved[group.table[g]] - from_partner + offsets[:, None]).ravel()
                degrees = ((full >> places[:, None]) & field).T
                yield Block(X.classes[group.images[g, a]], partner_images, full & mask, degrees, all_counts)


def _divided(total: Packed, den: int) -> Packed:
    """Terms divided by an integer, zeros dropped."""
    if den == 1:
        return {key: count for key, count in total.items() if count}
    assert all(count % den == 0 for count in total.values()), "structure constants are integers"
    return {key: count // den for key, count in total.items() if count}


@lru_cache(maxsize=8)
def complete_flag_ring(X: FlagVariety) -> CompleteFlagRing:
    """The ring of a complete flag variety, made once."""
    return CompleteFlagRing(X)
