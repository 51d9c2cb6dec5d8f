"""Engine "recursion" on G/B: associativity and the quantum Chevalley formula, nothing else.

In type A, with ``x_r = sigma_{s_r} - sigma_{s_{r-1}}``, ``r`` the last descent of ``w``, ``s`` the largest position with
``w(s) < w(r)`` and ``z = w t_rs``, the class ``sigma_w`` is ``x_r * sigma_z`` minus the other Chevalley terms. So by associativity

    sigma_w * y  =  x_r * (sigma_z * y)  -  sum of c q^d (sigma_z' * y)   over the other terms ``c q^d sigma_z'`` of ``x_r * sigma_z``.

This is the quantum form of the transition of Lascoux and Schutzenberger, Lett. Math. Phys. 10 (1985). All numbers are Python
integers, all degrees are kept: there is no bound on the degree of q, guessed or other.

A product is first moved by Seidel elements (law 4) to classes that fix n; the transition stays among those. Both the
reduced and the direct route are offered, so that one can witness for the other.
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

__all__ = ["CompleteFlagRing", "complete_flag_ring"]

Packed = dict[int, int]
"""Sum of terms ``c q^d sigma_w``, keyed by ``w.index + (packed d << shift)``."""

_MOST_PRODUCTS = 150_000


class CompleteFlagRing:
    """The ring QH*(Fl(n)) with its products on packed terms.

    Args:
        X: a complete flag variety of type A.
    """

    def __init__(self, X: FlagVariety) -> None:
        self.X = X
        self.shift = len(X.classes).bit_length()
        self.bits = max(X.dim.bit_length(), 3)
        self._moves: dict[tuple[int, int], list[tuple[int, int]]] = {}
        self._relations: dict[int, tuple[int, int, list[tuple[int, int]]]] = {}
        self._sweeps: dict[int, dict[int, Packed]] = {}
        self._most_sweeps = max(_MOST_PRODUCTS // (len(X.classes) // X.n), 4)
        self._degrees: dict[int, Degree] = {}
        self._prepare_symmetry()

    def _prepare_symmetry(self) -> None:
        """Seidel images and packed shifts; for each class its representative (which fixes n) and the element that leads back."""
        X, group = self.X, seidel(self.X)
        self.group = group
        weights = np.array([1 << (self.bits * k) for k in range(len(X.marked))], dtype=np.int64)
        self.packed_shifts: Ints = (group.shifts @ weights) << self.shift
        self.representatives = np.array([u.index for u in X.classes if u.permutation[-1] == X.n], dtype=np.int64)
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

    def _x(self, r: int, w: int) -> list[tuple[int, int]]:
        """Terms of ``x_r * sigma_w`` as (key to add to w, sign)."""
        found = self._moves.get((r, w))
        if found is None:
            found = []
            for target, d, divisors in chevalley(self.X).terms(w):
                sign = (divisors[r - 1] if r <= len(divisors) else 0) - (divisors[r - 2] if r > 1 else 0)
                if sign:
                    found.append((target - w + self.pack(d), sign))
            self._moves[r, w] = found
        return found

    def _relation(self, w: int) -> tuple[int, int, list[tuple[int, int]]]:
        """``(r, z, rest)`` with ``sigma_w = x_r * sigma_z - rest``; rest as (packed term, coefficient)."""
        found = self._relations.get(w)
        if found is None:
            line = self.X.classes[w].permutation
            r = self.X.classes[w].descents[-1]
            s = max(j for j in range(r, len(line)) if line[j] < line[r - 1])
            swapped = list(line)
            swapped[r - 1], swapped[s] = swapped[s], swapped[r - 1]
            z = self.X.schubert(permutation=swapped).index
            terms = [(z + key, sign) for key, sign in self._x(r, z)]
            assert terms.count((w, 1)) == 1, "the transition must contain sigma_w once"
            found = self._relations[w] = (r, z, [(key, sign) for key, sign in terms if key != w])
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
            r, z, rest = self._relation(w)
            missing = [t for t in (z, *(key & mask for key, _ in rest)) if t not in known]
            if missing:
                stack.extend(missing)
                continue
            total: Packed = {}
            for key, count in known[z].items():
                for step, sign in self._x(r, key & mask):
                    total[key + step] = total.get(key + step, 0) + sign * count
            for key, sign in rest:
                power = (key >> self.shift) << self.shift
                for term, count in known[key & mask].items():
                    total[term + power] = total.get(term + power, 0) - sign * count
            known[w] = {key: count for key, count in total.items() if count}
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
            known: dict[int, Packed] = {0: {a: 1}}
            rows = [self._times(b, known) for b in self.representatives.tolist()]
            sizes = [len(row) for row in rows]
            keys = np.fromiter((key for row in rows for key in row), dtype=np.int64, count=sum(sizes))
            counts = np.fromiter((c for row in rows for c in row.values()), dtype=np.int64, count=sum(sizes))
            partner = np.repeat(self.representatives, sizes)
            terms, powers = keys & mask, (keys >> shift) << shift
            moved = [powers + self.packed_shifts[f, terms] + group.images[f, terms] for f in range(len(group.units))]
            partner_shifts = [self.packed_shifts[h, partner] for h in range(len(group.units))]
            partner_images = np.concatenate([images[partner] for images in group.images])
            all_counts = np.tile(counts, len(group.units))
            for g in range(len(group.units)):
                full = np.concatenate(
                    [
                        moved[group.table[g, h]]
                        - partner_shifts[h]
                        + (self.packed_shifts[g, group.units[h]] - self.packed_shifts[g, a])
                        for h in range(len(group.units))
                    ]
                )
                degrees = np.empty((len(full), len(places)), dtype=np.int64)
                for k, place in enumerate(places):
                    degrees[:, k] = (full >> place) & field
                yield Block(X.classes[group.images[g, a]], partner_images, full & mask, degrees, all_counts)


@lru_cache(maxsize=8)
def complete_flag_ring(X: FlagVariety) -> CompleteFlagRing:
    """The ring of a complete flag variety, made once."""
    return CompleteFlagRing(X)
