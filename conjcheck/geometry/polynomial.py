"""Polynomials in the simple roots with integer coefficients: the values of equivariant structure constants."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from conjcheck.errors import NotationError
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.geometry.typeset import latex_polynomial

__all__ = ["RootPolynomial", "read_polynomial", "simple_roots"]

Exponents = tuple[int, ...]


@dataclass(frozen=True, slots=True)
class RootPolynomial:
    """A polynomial in ``alpha_1, ..., alpha_r``: a value, with ``+ - *``, powers, and integers mixed in.

    Made from ``simple_roots(X)``; ``terms`` are pairs (exponents, coefficient), sorted, without zeros.

    >>> from conjcheck.geometry.flag_variety import Fl
    >>> a, b = simple_roots(Fl(3))
    >>> (a + b) ** 2 - b * b
    alpha1^2 + 2 alpha1 alpha2
    """

    rank: int
    terms: tuple[tuple[Exponents, int], ...]

    @classmethod
    def of(cls, rank: int, terms: Mapping[Exponents, int]) -> "RootPolynomial":
        """The polynomial with given coefficients."""
        return cls(rank, tuple(sorted(((e, c) for e, c in terms.items() if c), reverse=True)))

    def _other(self, other: Any) -> "RootPolynomial | None":
        if isinstance(other, RootPolynomial):
            if other.rank != self.rank:
                raise NotationError(f"expected polynomials in {self.rank} simple roots, got one in {other.rank}")
            return other
        return RootPolynomial.of(self.rank, {(0,) * self.rank: int(other)}) if hasattr(other, "__index__") else None

    def __add__(self, other: Any) -> "RootPolynomial":
        if (right := self._other(other)) is None:
            raise TypeError(f"expected a polynomial or an integer, got {other!r}")
        total = dict(self.terms)
        for e, c in right.terms:
            total[e] = total.get(e, 0) + c
        return RootPolynomial.of(self.rank, total)

    def __mul__(self, other: Any) -> "RootPolynomial":
        if (right := self._other(other)) is None:
            raise TypeError(f"expected a polynomial or an integer, got {other!r}")
        total: dict[Exponents, int] = {}
        for e, c in self.terms:
            for f, d in right.terms:
                key = tuple(x + y for x, y in zip(e, f, strict=True))
                total[key] = total.get(key, 0) + c * d
        return RootPolynomial.of(self.rank, total)

    __radd__, __rmul__ = __add__, __mul__

    def __neg__(self) -> "RootPolynomial":
        return self.__mul__(-1)

    def __sub__(self, other: Any) -> "RootPolynomial":
        return self.__add__(other * -1)

    def __rsub__(self, other: Any) -> "RootPolynomial":
        return self.__mul__(-1).__add__(other)

    def __pow__(self, power: int) -> "RootPolynomial":
        result = RootPolynomial.of(self.rank, {(0,) * self.rank: 1})
        for _ in range(power):
            result = result * self
        return result

    def __eq__(self, other: object) -> bool:
        if isinstance(other, RootPolynomial):
            return self.rank == other.rank and self.terms == other.terms
        if hasattr(other, "__index__"):
            right = self._other(other)
            return right is not None and self.terms == right.terms
        return NotImplemented

    def __hash__(self) -> int:
        return hash(self.terms) if self.degree else hash(self.constant)

    def __bool__(self) -> bool:
        return bool(self.terms)

    @property
    def degree(self) -> int:
        """The largest total degree of a term; 0 for the zero polynomial."""
        return max((sum(e) for e, _ in self.terms), default=0)

    @property
    def constant(self) -> int:
        """The coefficient of 1."""
        return next((c for e, c in self.terms if not any(e)), 0)

    @property
    def is_positive(self) -> bool:
        """Whether no coefficient is negative."""
        return all(c > 0 for _, c in self.terms)

    @property
    def is_homogeneous(self) -> bool:
        """Whether all terms have the same total degree."""
        return len({sum(e) for e, _ in self.terms}) <= 1

    def at(self, values: tuple[int, ...], p: int) -> int:
        """The value modulo p at residues of the simple roots."""
        total = 0
        for e, c in self.terms:
            term = c
            for x, value in zip(e, values, strict=True):
                term = term * pow(value, x, p) % p
            total += term
        return total % p

    def __repr__(self) -> str:
        return " ".join(_term(e, c, first=not k) for k, (e, c) in enumerate(self.terms)) or "0"

    __str__ = __repr__

    def _repr_latex_(self) -> str:
        return f"${latex_polynomial(str(self))}$"

    def sympy(self) -> Any:
        """The same as an expression of sympy, in symbols ``alpha1, alpha2, ...`` (needs sympy)."""
        import sympy

        symbols = sympy.symbols(f"alpha1:{self.rank + 1}")
        return sum((c * sympy.prod(s**x for s, x in zip(symbols, e, strict=True)) for e, c in self.terms), sympy.Integer(0))


def _term(exponents: Exponents, count: int, *, first: bool) -> str:
    roots = " ".join(f"alpha{i}" + (f"^{x}" if x > 1 else "") for i, x in enumerate(exponents, start=1) if x)
    size = str(abs(count)) if abs(count) != 1 or not roots else ""
    sign = ("-" if first else "- ") if count < 0 else ("" if first else "+ ")
    return sign + " ".join(filter(None, (size, roots)))


@lru_cache(maxsize=256)
def simple_roots(X: FlagVariety) -> tuple[RootPolynomial, ...]:
    """The simple roots ``alpha_1, ..., alpha_r`` of X as polynomials; in type A ``alpha_i = y_{i+1} - y_i``."""
    return tuple(RootPolynomial.of(X.rank, {tuple(int(i == j) for j in range(X.rank)): 1}) for i in range(X.rank))


def read_polynomial(answer: Any, rank: int) -> RootPolynomial | None:
    """The polynomial that an answer stands for: a ``RootPolynomial``, an integer, or an expression of sympy in ``alpha1, alpha2, ...``.

    ``None`` for anything else, also for an expression with other symbols or with coefficients that are no integers.
    """
    if isinstance(answer, RootPolynomial):
        return answer if answer.rank == rank else None
    try:
        return RootPolynomial.of(rank, {(0,) * rank: int(answer.__index__())})
    except (AttributeError, TypeError):
        pass
    if not hasattr(answer, "free_symbols"):
        return None
    import sympy

    if answer.has(sympy.Float):
        return None
    symbols = sympy.symbols(f"alpha1:{rank + 1}")
    try:
        terms = sympy.Poly(answer, *symbols, domain="ZZ").terms()
    except (sympy.PolynomialError, sympy.CoercionFailed):
        return None
    return RootPolynomial.of(rank, {tuple(map(int, e)): int(c) for e, c in terms})
