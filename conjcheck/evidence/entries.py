"""The entries of a record: a space covered in order, rows drawn at random, a counterexample; and how two entries become one.

Joining is commutative, associative and idempotent, so that records can be merged in any order, and in pieces.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from decimal import Context, Decimal, localcontext
from functools import lru_cache, partial
from importlib.metadata import PackageNotFoundError, version
from typing import Any

from conjcheck.errors import RecordError
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import FlagVariety

__all__ = ["FEWEST_ROWS", "Counterexample", "Covered", "Sample", "failure_bound", "own_version", "refuting"]

FEWEST_ROWS = 20
"""Of fewer rows drawn at random no bound on the failures is stated."""

_THREE_DIGITS = 100
_MOST_FAILING = 10_000


@dataclass(frozen=True, slots=True)
class Counterexample:
    """One recorded counterexample.

    Attributes:
        where: the case, or the row for a claim about whole products.
        rule, oracle: the two values, polynomials as text; ``None`` where there is none.
        minimal: whether all smaller cases were compared when it was recorded.
        certificate: the name of a file beside the record that proves the oracle's value; ``None`` for none.
        instead: what stands in place of a certificate, in words; ``None`` for nothing.
        rule_hash: the hash of the rule that it refuted, see ``evidence.source``; ``None`` if not known.
    """

    where: Case | Row
    rule: int | str | None
    oracle: int | str | None
    minimal: bool
    certificate: str | None = None
    instead: str | None = None
    rule_hash: str | None = None

    @property
    def key(self) -> str:
        """What two entries about the same thing share."""
        return str(self.where)

    @property
    def sort_key(self) -> tuple[Any, ...]:
        """The order in the file."""
        return (self.where.sort_key, self.key)

    def joined(self, other: "Counterexample") -> "Counterexample":
        """One entry from two at the same place: what one of them does not know is filled in from the other.

        Raises:
            RecordError: two different values, or two versions of the rule.
        """
        if None not in (self.rule_hash, other.rule_hash) and self.rule_hash != other.rule_hash:
            raise RecordError(
                f"expected one version of the rule at counterexample {self.where}, got {self.rule_hash} and {other.rule_hash}; "
                "record the rule as it stands anew on both sides, with pytest --conjcheck-record or conjcheck survey"
            )
        values = []
        for name in ("rule", "oracle"):
            mine, its = getattr(self, name), getattr(other, name)
            if None not in (mine, its) and mine != its:
                raise RecordError(
                    f"expected one value of the {name} at counterexample {self.where}, got {mine} and {its}; compute it again with "
                    f"pytest --conjcheck-case '{self.where}' and keep the right entry"
                )
            values.append(its if mine is None else mine)
        certificate = min(filter(None, (self.certificate, other.certificate)), default=None)
        instead = None if certificate else min(filter(None, (self.instead, other.instead)), default=None)
        minimal, version = self.minimal or other.minimal, self.rule_hash or other.rule_hash
        return Counterexample(self.where, values[0], values[1], minimal, certificate, instead, version)

    def as_json(self) -> dict[str, Any]:
        """The entry in the file."""
        return {
            "where": str(self.where),
            "rule": self.rule,
            "oracle": self.oracle,
            "minimal": self.minimal,
            "certificate": self.certificate,
            "instead": self.instead,
            "rule_hash": self.rule_hash,
        }


def refuting(known: Sequence[Counterexample], recorded: str | None, rule: str | None) -> list[Counterexample]:
    """Those of the counterexamples of a record that refute one version of the rule, and not an earlier one.

    Args:
        known: the counterexamples.
        recorded: the hash of the rule in the record; where it names none, a counterexample that names none is believed.
        rule: the hash of the version asked about; ``None`` for that of the record.
    """
    version = recorded if rule is None else rule
    return [c for c in known if version is None or c.rule_hash == version or (recorded is None and c.rule_hash is None)]


@dataclass(frozen=True, slots=True)
class Covered:
    """How far one space was compared, in the order of rows.

    Attributes:
        X: the space.
        rows: rows with at least one case inside the premise, all of them compared.
        seen: rows passed, in order, those outside the premise included; all ``of`` them if the space is complete.
        cases: cases compared; ``nonzero`` of them have a constant that is not 0, at ``failing`` of them the rule is wrong.
        seconds: how long it took.
        engine: the engine of the oracle.
        conjcheck: the version that computed it.
    """

    X: FlagVariety
    rows: int
    seen: int
    cases: int
    nonzero: int
    failing: int = 0
    seconds: float = 0.0
    engine: str = "unknown"
    conjcheck: str = "unknown"

    @property
    def of(self) -> int:
        """The number of all rows of the space."""
        return int(self.X.number_of_classes) ** 2

    @property
    def complete(self) -> bool:
        """Whether no row is left."""
        return self.seen == self.of

    @property
    def key(self) -> str:
        """What two entries about the same thing share."""
        return self.X.name

    @property
    def sort_key(self) -> tuple[Any, ...]:
        """The order in the file: that of the spaces."""
        return self.X.sort_key

    def joined(self, other: "Covered") -> "Covered":
        """Of two entries for one space the one that went further; if they went equally far, the quicker one.

        Raises:
            RecordError: the two contradict each other, since rows come in one order.
        """
        _hold_together(f"coverage of {self.X}", self, other, "seen", ("rows", "cases", "nonzero", "failing"))
        return min(self, other, key=lambda c: (-c.seen, c.seconds, c.engine, c.conjcheck))

    def as_json(self) -> dict[str, Any]:
        """The entry in the file."""
        return {
            "space": self.X.name,
            "rows": self.rows,
            "seen": self.seen,
            "of": self.of,
            "cases": self.cases,
            "nonzero": self.nonzero,
            "failing": self.failing,
            "seconds": self.seconds,
            "engine": self.engine,
            "conjcheck": self.conjcheck,
        }


@dataclass(frozen=True, slots=True)
class Sample:
    """Rows of one space drawn at random.

    Attributes:
        X: the space.
        how: how rows were drawn, in words, e.g. ``"rows drawn uniformly, with repetition"``.
        seed: the seed.
        rows: rows drawn inside the premise, repetitions included, all of them compared; at ``failing`` of them the rule is wrong.
        cases: cases compared.
        conjcheck: the version that computed it; another one may draw other rows from the same seed.
    """

    X: FlagVariety
    how: str
    seed: int
    rows: int
    cases: int
    failing: int = 0
    conjcheck: str = "unknown"

    @property
    def bound(self) -> str:
        """What the sample says about all rows, in words; see :func:`failure_bound`."""
        return "too few rows for a bound on the failures" if self.rows < FEWEST_ROWS else self.share

    @property
    def share(self) -> str:
        """The bound of a sample of any size, in words."""
        share = failure_bound(self.rows, self.failing)
        return f"at 95 % the share of failing rows inside the premise, weighted as drawn, is at most {share}"

    @property
    def key(self) -> tuple[str, str, int]:
        """What two entries about the same thing share."""
        return self.X.name, self.how, self.seed

    @property
    def sort_key(self) -> tuple[Any, ...]:
        """The order in the file: that of the spaces first."""
        return (self.X.sort_key, self.how, self.seed)

    def joined(self, other: "Sample") -> "Sample":
        """Of two samples with one seed the larger one: it begins with the smaller one.

        Raises:
            RecordError: the two contradict each other.
        """
        if self.conjcheck == other.conjcheck:
            _hold_together(f"sample of {self.X} with seed {self.seed}", self, other, "rows", ("cases", "failing"))
        return min(self, other, key=lambda s: (-s.rows, s.conjcheck, s.cases, s.failing))

    def as_json(self) -> dict[str, Any]:
        """The entry in the file."""
        return {
            "space": self.X.name,
            "how": self.how,
            "seed": self.seed,
            "rows": self.rows,
            "cases": self.cases,
            "failing": self.failing,
            "bound": self.bound,
            "conjcheck": self.conjcheck,
        }


def _hold_together(what: str, first: Any, second: Any, reach: str, numbers: tuple[str, ...]) -> None:
    """Refuse two entries if the one that went less far counts more, or both went equally far and count differently."""
    shorter, longer = sorted((first, second), key=lambda entry: [getattr(entry, name) for name in (reach, *numbers)])
    same = getattr(shorter, reach) == getattr(longer, reach)
    for name in numbers:
        less, more = getattr(shorter, name), getattr(longer, name)
        if less > more or (same and less != more):
            raise RecordError(
                f"expected one {what}, got two that contradict each other: {name} {less:,} and {more:,} after "
                f"{getattr(shorter, reach):,} and {getattr(longer, reach):,} rows; compute it again and remove the wrong entry"
            )


@lru_cache(maxsize=1024)
def failure_bound(rows: int, failing: int = 0) -> str:
    """The largest share p of failing rows that is compatible with a sample at 95 %, rounded up to three digits, as a decimal.

    The largest p for which ``failing`` or fewer failures among ``rows`` independent draws still have probability 0.05: the one-sided
    bound of Clopper and Pearson; without a failure the largest p with ``(1 - p)^rows >= 0.05``. Never rounded down, so that
    the statement stays true; 1, which is no bound, if more than 10,000 rows failed.

    Cost: about ``100 failing`` operations on decimals.

    Source: Clopper and Pearson, The use of confidence or fiducial limits illustrated in the case of the binomial, Biometrika 26 (1934).

    >>> failure_bound(100), failure_bound(100, 3), failure_bound(1_000_000), failure_bound(0)
    ('0.0296', '0.0758', '0.00000300', '1')
    """
    if failing >= rows or failing > _MOST_FAILING:
        return "1"
    with localcontext(Context(prec=60)):
        level = Decimal("0.05")

        def holds(numerator: int, digits: int) -> bool:
            return _at_most(rows, failing, Decimal(numerator).scaleb(-digits)) <= level

        digits = 3
        while (numerator := _first(10**digits, partial(holds, digits=digits))) < _THREE_DIGITS:
            digits += 1
        return f"{Decimal(numerator).scaleb(-digits):f}"


def _first(last: int, holds: Callable[[int], bool]) -> int:
    """The first of ``1, ..., last`` that holds, if all later ones do and the last one does."""
    low, high = 0, last
    while high - low > 1:
        middle = (low + high) // 2
        low, high = (low, middle) if holds(middle) else (middle, high)
    return high


def _at_most(rows: int, failing: int, p: Decimal) -> Decimal:
    """The probability of at most ``failing`` failures among ``rows`` independent draws, for ``0 < p < 1``."""
    term = total = (1 - p) ** rows
    for k in range(1, failing + 1):
        term = term * (rows - k + 1) * p / (k * (1 - p))
        total += term
    return total


def own_version() -> str:
    """The version of conjcheck that is running."""
    try:
        return version("conjcheck")
    except PackageNotFoundError:
        return "unknown"
