"""Published values of products, relations and numbers, as data with their sources, and a reader of such lines.

Sources: Be = Bertram, Adv. Math. 128 (1997) 289-305. BKT = Buch, Kresch, Tamvakis, J. AMS 16 (2003) 901-915. CMP = Chaput, Manivel,
Perrin, Transform. Groups 13 (2008) 47-89. FGP = Fomin, Gelfand, Postnikov, J. AMS 10 (1997) 565-596. KM = Kirillov, Maeno, Discrete Math.
217 (2000) 191-223. KT = Kresch, Tamvakis, J. Alg. Geom. 12 (2003) 777-810 and Compositio Math. 140 (2004) 482-500. RRW = Ravi, Rosenthal,
Wang, Math. Ann. 311 (1998) 11-26. "seen": read there; "from memory": stated there as far as known; "computed": agreed on by independent
programs, no published source; "standard": in every text book.

A line is an equation in QH*(X). ``S231`` is a class in one-line notation, ``s21`` a partition (on LG and OG a strict one), ``w21`` a
reduced word; ``x2`` is ``sigma_{s_2} - sigma_{s_1}``; ``h`` is the divisor, ``pt`` the point; ``q2`` belongs to node 2.
"""

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import partial

from conjcheck.geometry.case import Case, place_in_row
from conjcheck.geometry.flag_variety import FlagVariety, SchubertClass
from conjcheck.oracle import table
from conjcheck.oracle.check import Check, Difference, Reader, sum_degrees, times
from conjcheck.oracle.engine import RowTerms
from conjcheck.oracle.formulas import classical_degree
from conjcheck.oracle.pieri import is_lagrangian, is_odd_orthogonal, strict_class

__all__ = ["Record", "evaluate", "published", "records"]


@dataclass(frozen=True, slots=True)
class Record:
    """One published equation ``left = right`` on X."""

    X: FlagVariety
    line: str
    source: str


_LINES = [
    (
        "Gr(2,4)",
        "Be, from memory",
        """
        s1 s1 = s2 + s11; s1 s2 = s21; s1 s11 = s21; s1 s21 = s22 + q; s1 s22 = q s1; s2 s11 = q; s2 s2 = s22; s11 s11 = s22; s2 s21 = q s1;
        s11 s21 = q s1; s2 s22 = q s11; s11 s22 = q s2; s21 s21 = q s2 + q s11; s21 s22 = q s21; s22 s22 = q^2
        """,
    ),
    (
        "Gr(2,5)",
        "Be, from memory",
        "s1 s31 = s32 + q; s1 s32 = s33 + q s1; s1 s33 = q s2; s11 s3 = q; s2 s21 = s32 + q; s2 s31 = s33 + q s1",
    ),
    ("Gr(2,5)", "Be, from memory", "s2 s32 = q s2 + q s11; s2 s33 = q s21"),
    (
        "Gr(2,5)",
        "computed",
        "s21 s21 = s33 + q s1; s21 s31 = q s2 + q s11; s31 s31 = q s3 + q s21; s32 s32 = q s32 + q^2; s33 s33 = q^2 s11",
    ),
    ("Gr(3,6)", "computed", "s21 s21 = s33 + 2s321 + s222 + q; s321 s321 = q s33 + 2q s321 + q s222 + q^2"),
    ("Gr(3,6)", "computed", "s21 s321 = s333 + q s3 + 2q s21 + q s111"),
    ("Gr(3,6)", "BKT, from memory", "s333 s333 = q^3"),
    (
        "Fl(3)",
        "FGP, from memory",
        """
        S213 S213 = S312 + q1; S132 S132 = S231 + q2; S213 S132 = S231 + S312; S213 S231 = S321; S132 S312 = S321; S213 S312 = q1 S132;
        S132 S231 = q2 S213; S213 S321 = q1 S231 + q1 q2; S132 S321 = q2 S312 + q1 q2; S312 S312 = q1 S231; S231 S231 = q2 S312;
        S312 S231 = q1 q2; S312 S321 = q1 q2 S213; S231 S321 = q1 q2 S132; S321 S321 = q1 q2 S231 + q1 q2 S312
        """,
    ),
    ("Fl(3)", "KM, Appendix B, seen", "x1^6 + 3q1^2 x1^2 = 3q1 x1^4 + q1^3 + q1^2 q2; q1 x2 = x1^3 - 2q1 x1"),
    (
        "Fl(4)",
        "KM, Appendix A, seen; FGP",
        """
        S2341 = x1x2x3 + q1x3 + q2x1; S1342 = x1x2 + x1x3 + x2x3 + q1 + q2; S1423 = x1^2 + x1x2 + x2^2 - q1 - q2;
        S2143 = x1^2 + x1x2 + x1x3; S4123 = x1^3 - 2q1x1 - q1x2; S3142 = x1^2x2 + x1^2x3 + q1x1 - q1x3;
        S2413 = x1^2x2 + x1x2^2 + q1x1 + q1x2 - q2x1; S1432 = x1^2x2 + x1x2^2 + x1^2x3 + x1x2x3 + x2^2x3 + q1x1 + q1x2 + q2x2 - q1x3;
        S3412 = x1^2x2^2 + 2q1x1x2 - q2x1^2 + q1^2 + q1q2; S3241 = x1^2x2x3 + q1x1x3 + q2x1^2;
        S2431 = x1^2x2x3 + x1x2^2x3 + q2x1^2 + q2x1x2 + q1x1x3 + q1x2x3; S4213 = x1^3x2 + q1x1^2 - q1x1x2 - q1^2 - q1q2;
        S4132 = x1^3x2 + x1^3x3 + q1x1^2 - q1x1x2 - 2q1x1x3 - q1x2x3 - q1^2 - q1q2; S4312 = x1^3x2^2 + 2q1x1^2x2 - q2x1^3 + q1^2x1 + q1q2x1;
        S4231 = x1^3x2x3 + q2x1^3 + q1x1^2x3 - q1x1x2x3 - q1^2x3 - q1q2x1; S3421 = x1^2x2^2x3 + 2q1x1x2x3 + q2x1^2x2 + q1^2x3 + q1q2x1
        """,
    ),
    ("Fl(1,3;4)", "computed", "S4231 S4231 = q1q3S3241 + q1q3S4132; S2134 S4231 = q1S2341 + q1q3; S3124 S3124 = q1S2134 + q1S1243"),
    ("Fl(1,3;4)", "computed", "S2143 S3241 = q3S4123 + q1q3; S2143 S4231 = q1q3S2134 + q1q3S1243"),
    ("Fl(1,2;4)", "computed", "S4312 S4312 = q1q2^2S3124 + q1^2q2^2; S2134 S4312 = q1S3412 + q1q2S1324"),
    ("Fl(1,2;4)", "computed", "S2413 S4312 = q1q2S2413 + q1q2^2; S4213 S4213 = q1q2S3214 + q1q2S4123"),
    ("C2/P2", "KT, from memory", "s1 s1 = 2s2; s1 s2 = s21 + q; s1 s21 = q s1; s2 s2 = q s1; s2 s21 = q s2; s21 s21 = q^2"),
    (
        "C3/P3",
        "computed",
        "s1 s3 = s31 + q; s2 s2 = 2s31 + q; s2 s31 = s321 + 2q s2; s3 s3 = q s2; s21 s21 = 2q s2; s31 s31 = 2q s31 + q^2",
    ),
    ("C3/P3", "computed", "s321 s321 = q^3"),
    ("B3/P3", "computed", "s2 s2 = 2s31; s3 s3 = q; s21 s21 = q; s32 s32 = 2q s31; s321 s321 = q^2"),
    (
        "C2/B",
        "computed",
        "w1 w1 = w21 + q1; w2 w2 = 2w12 + q2; w1 w121 = q1w12 + q1q2; w21 w21 = 2q1w12 + q1q2; pt pt = q1q2^2w21 + q1^2q2^2",
    ),
    ("G2/B", "computed", "w1 w1 = w21 + q1; w2 w2 = 3w12 + q2; w1 w121 = w2121 + q1w12 + q1q2; w2 w121 = w1212 + 2w2121 + q1q2"),
    ("G2/B", "computed", "w1 w21212 = pt + q1q2^2; w2 w21212 = q2w2121 + 2q1q2^2"),
    ("E6/P1", "CMP, from memory", "3h w2431^2 - 6h^5 w2431 + 2h^9 = 0; w2431^3 - 12h^8 w2431 + 5h^12 = q"),
]

_CONSTANTS = {
    "Fl(3)": (45, 0.0),
    "Fl(4)": (1_168, 0.0),
    "Fl(5)": (62_925, 1.0),
    "Fl(6)": (6_531_372, 20.0),
    "Gr(2,4)": (24, 0.0),
    "Gr(2,5)": (70, 0.0),
    "Gr(2,6)": (171, 0.0),
    "Gr(3,6)": (345, 0.0),
}
"""Numbers of nonzero constants (computed), over ordered pairs (u, v) on ``Fl(n)``, unordered ones on ``Gr(k,n)``; and about the seconds."""

_CLASSES_AND_INDEX = {"E6/P1": (27, 12), "E7/P7": (56, 18), "E6/P2": (72, 11), "E7/P1": (126, 17), "E8/P8": (240, 29)} | {
    "F4/P1": (24, 8),
    "F4/P4": (24, 11),
    "G2/P1": (6, 5),
    "G2/P2": (6, 3),
}
"""Numbers of classes and degrees of q (standard)."""

_DEGREES_OF_HALF = {2: 2, 3: 42, 4: 24_024, 5: 701_149_020}
"""Degrees of ``Gr(n,2n)`` (OEIS A039622, seen)."""

_DEGREES_OF_SPINOR = {2: 1, 3: 2, 4: 12, 5: 286, 6: 33_592, 7: 23_178_480, 8: 108_995_910_720}
"""Degrees of ``OG(n,2n+1)`` (OEIS A003121, seen)."""

_CURVES = {"Gr(2,4)": (2, 8, 32, 128), "Gr(2,5)": (5, 55, 610, 6_765), "Gr(2,6)": (14, 364, 9_842, 265_720)}
"""Coefficients of ``q^e [pt]`` in ``sigma_1^(dim + e n)`` for e = 0, 1, 2, 3 (RRW, from memory)."""


def published(X: FlagVariety, read: Reader) -> Iterator[Check]:
    """The checks of everything that is on record for X."""
    if lines := records(X):
        yield Check("published products", "equations", lines, partial(_holds, read))
    if numbers := list(_numbers(X, read)):
        yield Check("published numbers", "numbers", numbers, _equal)
    if X.name in _CONSTANTS:
        expected, needs = _CONSTANTS[X.name]
        unit = ("number of nonzero constants", "computed", expected, partial(_count, X))
        yield Check("number of constants", "numbers", [(X, *unit)], _equal, needs=needs)


def records(X: FlagVariety) -> list[Record]:
    """All published equations on X: those of the list, and those that hold in a whole family."""
    found = [
        Record(X, " ".join(line.split()), source)
        for name, source, text in _LINES
        if FlagVariety(name) is X
        for line in text.strip().split(";")
    ]
    return found + [Record(X, line, source) for line, source in _families(X)]


def _families(X: FlagVariety) -> Iterator[tuple[str, str]]:
    n, kind = X.rank, (X.kind.letter, X.marked)
    if kind in {("A", (1,)), ("A", (n,)), ("C", (1,))} or X is FlagVariety("B2/P2"):
        yield f"h^{X.dim + 1} = q", "projective space, standard"
    if (kind in {("B", (1,)), ("D", (1,))} and X.dim >= 3) or X in {FlagVariety("G2/P1"), FlagVariety("A3/P2")}:
        yield f"h^{X.dim + 1} = 4q h", "quadric, from memory"
        yield "pt pt = q^2", "quadric, standard"
        yield "pt h = q h", "quadric, standard"
    if X.kind.letter == "A" and X.is_complete:
        for k in range(1, n + 1):
            terms = [f"w{j}{k}" for j in (k + 1, k - 1) if 1 <= j <= n]
            yield f"w{k} w{k} = {' + '.join([*terms, f'q{k}' if n > 1 else 'q'])}", "KM, Remark 15, seen"
    if is_lagrangian(X):
        for i in range(1, n + 1):
            pairs = [(k, f"s{i + k} s{i - k}" if i > k else f"s{i + k}") for k in range(1, min(i, n - i) + 1)]
            left = f"s{i} s{i}" + "".join(f" {'-' if k % 2 else '+'} 2{pair}" for k, pair in pairs)
            part = 2 * i - n - 1
            right = "0" if part < 0 else f"{'- ' if (n - i) % 2 else ''}q" + (f" s{part}" if part else "")
            yield f"{left} = {right}", "KT, from memory"
    if is_odd_orthogonal(X):
        for i in range(1, n):
            pairs = [(k, f"s{i + k} s{i - k}") for k in range(1, min(i - 1, n - i) + 1)]
            left = f"s{i} s{i}" + "".join(f" {'-' if k % 2 else '+'} 2{pair}" for k, pair in pairs)
            last = f" {'-' if i % 2 else '+'} s{2 * i}" if 2 * i <= n else ""
            yield f"{left}{last} = 0", "KT, from memory"
        yield f"s{n} s{n} = q", "KT, from memory"


_TERM = re.compile(r"([+-]?)((?:(?:q\d?|x\d|S\d+|s\d+|w\d+|h|pt|\d+)(?:\^\d+)?)+)")
_FACTOR = re.compile(r"(q\d?|x\d|S\d+|s\d+|w\d+|h|pt|\d+)(?:\^(\d+))?")


def _symbol(X: FlagVariety, name: str) -> RowTerms:
    """A factor as an element of QH*(X)."""
    zero = (0,) * len(X.marked)
    digits = tuple(map(int, name[1:])) if name[0] in "xqSsw" else ()
    match name[0]:
        case "q":
            place = X.marked.index(digits[0]) if digits else 0
            return {(X.identity, tuple(int(k == place) for k in range(len(X.marked)))): 1}
        case "x":
            divisors = [(X.schubert(word=(i,)), sign) for i, sign in ((digits[0], 1), (digits[0] - 1, -1)) if 1 <= i < X.n]
            return {(u, zero): sign for u, sign in divisors}
        case "h" | "p":
            return {(X.classes[1] if name == "h" else X.point, zero): 1}
        case "S" | "s" | "w":
            return {(_class(X, name[0], digits), zero): 1}
    return {(X.identity, zero): int(name)}


def _class(X: FlagVariety, letter: str, digits: tuple[int, ...]) -> SchubertClass:
    if letter == "S":
        return X.schubert(permutation=digits)
    if letter == "w":
        return X.schubert(word=digits)
    return X.schubert(partition=digits) if X.is_grassmannian else strict_class(X, digits)


def _terms(text: str) -> list[tuple[int, list[str]]]:
    """``2q1 S21 - x1^2`` as ``[(1, ["2", "q1", "S21"]), (-1, ["x1", "x1"])]``."""
    plain = "".join(text.split())
    found = list(_TERM.finditer(plain))
    assert "".join(term[0] for term in found) == plain, f"expected terms, got {text!r}"
    return [
        (-1 if term[1] == "-" else 1, [x[1] for x in _FACTOR.finditer(term[2]) for _ in range(int(x[2] or 1))]) for term in found
    ]


def evaluate(X: FlagVariety, text: str, read: Reader) -> RowTerms:
    """One side of an equation, multiplied out in QH*(X)."""
    total: RowTerms = {}
    for sign, names in _terms(text):
        product: RowTerms = {(X.identity, (0,) * len(X.marked)): sign}
        for name in names:
            if name[0].isdigit() or name[0] == "q":
                (((_, d), count),) = _symbol(X, name).items()
                product = {(w, sum_degrees(d, e)): count * c for (w, e), c in product.items()}
            else:
                product = times(read, _symbol(X, name), product)
        for key, count in product.items():
            total[key] = total.get(key, 0) + count
    return {key: count for key, count in total.items() if count}


def _holds(read: Reader, record: Record) -> Iterator[Difference]:
    """The equation; if its left side is a product of two classes, a difference has a case."""
    X = record.X
    left, right = record.line.split(" = ")
    a, b = evaluate(X, left, read), evaluate(X, right, read)
    keys = [key for key in {*a, *b} if a.get(key, 0) != b.get(key, 0)]
    if not keys:
        return
    w, d = min(keys, key=place_in_row)
    factors = [factor for _, names in _terms(left) for factor in names]
    where: Case | str = f"{X}: {record.line}, at q^({','.join(map(str, d))}) {w!r}"
    if len(factors) == 2 and len(_terms(left)) == 1 and all(factor[0] in "Sswhp" for factor in factors):
        (((u, _), _),), (((v, _), _),) = (_symbol(X, factor).items() for factor in factors)
        where = Case(X, u, v, w, d)
    yield Difference(where, ("product", a.get((w, d), 0)), (f"published ({record.source})", b.get((w, d), 0)))


Number = tuple[FlagVariety, str, str, int, Callable[[], int]]


def _numbers(X: FlagVariety, read: Reader) -> Iterator[Number]:
    """``(X, what, source, published value, what computes it)``."""
    if pair := next((pair for name, pair in _CLASSES_AND_INDEX.items() if FlagVariety(name) is X), None):
        yield X, "number of Schubert classes", "standard", pair[0], lambda: len(X.classes)
        yield X, "degree of q", "standard", pair[1], lambda: X.q_degrees[0]
    if is_lagrangian(X) or is_odd_orthogonal(X):
        yield X, "number of Schubert classes", "standard", 2**X.rank, lambda: len(X.classes)
        yield X, "degree of q", "standard", X.rank + 1 if is_lagrangian(X) else 2 * X.rank, lambda: X.q_degrees[0]
    if X.is_grassmannian and X.n == 2 * X.marked[0] and X.marked[0] in _DEGREES_OF_HALF:
        yield X, "degree", "OEIS A039622, seen", _DEGREES_OF_HALF[X.marked[0]], partial(classical_degree, X, read)
    if is_odd_orthogonal(X) and X.rank in _DEGREES_OF_SPINOR:
        yield X, "degree", "OEIS A003121, seen", _DEGREES_OF_SPINOR[X.rank], partial(classical_degree, X, read)
    for e, number in enumerate(_CURVES.get(X.name, ())):
        what = f"coefficient of q^{e} [pt] in sigma_1^{X.dim + e * X.n}"
        yield X, what, "RRW, from memory", number, partial(_coefficient, X, read, e)


def _coefficient(X: FlagVariety, read: Reader, e: int) -> int:
    return evaluate(X, f"h^{X.dim + e * X.n}", read).get((X.point, (e,)), 0)


def _count(X: FlagVariety) -> int:
    """Nonzero constants in the whole table: over ordered pairs, on Grassmannians over unordered ones."""
    return sum(int((block.v >= block.u.index).sum()) if X.is_grassmannian else len(block) for block in table(X))


def _equal(number: Number) -> Iterator[Difference]:
    X, what, source, expected, compute = number
    found = compute()
    if found != expected:
        yield Difference(f"{X}: {what}", ("oracle", found), (f"published ({source})", expected))
