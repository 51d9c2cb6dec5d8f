"""Short conditions on cases: one test of a feature, or two joined by "and" or "or"."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from conjcheck.testing.features import Cases, Feature, Values, bracketed
from conjcheck.testing.traits import Bools

__all__ = ["Found", "Test", "iter_tests"]

_MOST_THRESHOLDS = 24
_MOST_WORDS = 12
_PAIR_COST = 10.0
_EXACTLY = 4
_NATURAL = 2

_OPPOSITE = {"<=": ">", ">": "<=", "==": "!=", "!=": "==", ">=": "<", "<": ">="}
_SAID = {"<=": "at most", ">=": "at least", "==": "equal to", "!=": "other than", ">": "more than", "<": "less than"}


@dataclass(frozen=True, slots=True)
class Test:
    """One test of a feature: ``is``/``is not`` for truth values, a comparison with a value else.

    Attributes:
        feature: the feature.
        sign: ``"is"``, ``"is not"``, or a comparison sign.
        value: what it is compared with.
    """

    __test__ = False  # pytest takes classes of this name for tests

    feature: Feature
    sign: str
    value: Any = None

    def holds(self, values: Values) -> Bools:
        """Where it holds, given the values of its feature."""
        match self.sign:
            case "is":
                return np.asarray(values, dtype=bool)
            case "is not":
                return ~np.asarray(values, dtype=bool)
            case "<=":
                return np.asarray(values <= self.value)
            case ">=":
                return np.asarray(values >= self.value)
            case "<":
                return np.asarray(values < self.value)
            case ">":
                return np.asarray(values > self.value)
            case "==":
                return np.asarray(values == self.value)
        return np.asarray(values != self.value)

    def of(self, cases: Cases) -> Bools | None:
        """Where it holds among some cases; ``None`` if the feature makes no sense there."""
        values = self.feature.of(cases)
        return None if values is None else self.holds(values)

    @property
    def opposite(self) -> "Test":
        """The test that holds where this one does not."""
        if self.sign in ("is", "is not"):
            return Test(self.feature, "is not" if self.sign == "is" else "is")
        if self.sign == "<=" and isinstance(self.value, int):
            return Test(self.feature, ">=", self.value + 1)
        if self.sign == ">=" and isinstance(self.value, int):
            return Test(self.feature, "<=", self.value - 1)
        return Test(self.feature, _OPPOSITE[self.sign], self.value)

    @property
    def words(self) -> str:
        """It in words."""
        if self.sign in ("is", "is not"):
            return self.feature.yes if self.sign == "is" else self.feature.no
        if self.sign == "<=" and self.value == 0 and self.feature.yes.startswith("the number"):
            return f"{self.feature.yes} is 0"
        if len(self.feature.yes) > 20 or isinstance(self.value, str):
            return f"{self.feature.yes} is {_SAID[self.sign]} {self.value}"
        return f"{self.feature.yes} {self.sign.replace('==', '=')} {self.value}"

    @property
    def expression(self) -> str:
        """It as a Python expression; empty if there is no short one."""
        code = self.feature.code
        if not code or self.sign == "is":
            return code
        return f"not {bracketed(code)}" if self.sign == "is not" else f"{bracketed(code)} {self.sign} {self.value!r}"

    @property
    def oddity(self) -> int:
        """The smaller, the sooner it comes to mind."""
        return (
            2 * self.feature.oddity
            + 2 * self.feature.asks
            + _EXACTLY * (self.sign in ("==", "!=") and not isinstance(self.value, str))
        )


@dataclass(frozen=True, slots=True)
class Found:
    """A condition on cases: one test, or two joined by a word.

    Attributes:
        tests: one or two tests.
        join: ``"and"`` or ``"or"``; of no meaning for one test.
        failing, informative, zeros: at how many failures it holds, and at how many agreements with a nonzero value and with zeros.
    """

    tests: tuple[Test, ...]
    join: str
    failing: int = 0
    informative: int = 0
    zeros: int = 0

    def of(self, cases: Cases) -> Bools | None:
        """Where it holds among some cases; ``None`` if a feature makes no sense there."""
        parts = [test.of(cases) for test in self.tests]
        known = [part for part in parts if part is not None]
        if len(known) < len(parts):
            return None
        joined: Bools = np.logical_and.reduce(known) if self.join == "and" else np.logical_or.reduce(known)
        return joined

    @property
    def opposite(self) -> "Found":
        """The condition that holds where this one does not, without counts."""
        return Found(tuple(test.opposite for test in self.tests), "or" if self.join == "and" else "and")

    @property
    def words(self) -> str:
        """It in words."""
        return f"; {self.join} ".join(test.words for test in self.tests)

    @property
    def expression(self) -> str:
        """It as a Python expression; empty if there is no short one."""
        parts = [test.expression for test in self.tests]
        if not all(parts):
            return ""
        return parts[0] if len(parts) == 1 else f" {self.join} ".join(map(bracketed, parts))

    @property
    def on_rows(self) -> bool:
        """Whether X, u, v decide it."""
        return all(test.feature.needs != "case" for test in self.tests)

    @property
    def asks(self) -> bool:
        """Whether the oracle has to be asked."""
        return any(test.feature.asks for test in self.tests)

    @property
    def reaches_on(self) -> bool:
        """Whether it may speak of more than the cases looked at: no bound on the size of spaces, no single number above 2."""

        def stuck(test: Test) -> bool:
            if test.sign in ("==", "!="):
                return isinstance(test.value, int) and (test.feature.grows or abs(test.value) > _NATURAL)
            return test.feature.grows and test.sign in ("<=", "<")

        return not any(map(stuck, self.tests))

    @property
    def cost(self) -> float:
        """What it takes to say it, in bits: about ten for the second test, and more for odd features and for "or"."""
        return (
            _PAIR_COST * (len(self.tests) - 1)
            + sum(test.oddity for test in self.tests)
            + (len(self.tests) > 1 and self.join == "or")
        )


def iter_tests(feature: Feature, values: Values) -> Iterator[Test]:
    """The tests of a feature that hold at some cases and not at others, by its values."""
    if values.dtype == bool:
        if values.any() and not values.all():
            yield Test(feature, "is")
            yield Test(feature, "is not")
        return
    levels = np.unique(values)
    if len(levels) < 2:
        return
    if values.dtype.kind == "U":
        for level in levels[:_MOST_WORDS].tolist():
            yield Test(feature, "==", level)
            yield Test(feature, "!=", level)
        return
    if len(levels) > _MOST_THRESHOLDS:
        levels = levels[np.linspace(0, len(levels) - 1, _MOST_THRESHOLDS).astype(int)]
    chosen = [int(level) for level in levels]
    for level in chosen:
        if level != chosen[-1]:
            yield Test(feature, "<=", level)
        if level != chosen[0]:
            yield Test(feature, ">=", level)
        if level not in (chosen[0], chosen[-1]):
            yield Test(feature, "==", level)
            yield Test(feature, "!=", level)
