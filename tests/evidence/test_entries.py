"""Entries of a record: what they count, the bound of a sample, and how two become one."""

import math
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st
from making import PLACES, counterexamples, covereds, samples
from scipy.stats import beta

from conjcheck import FlagVariety
from conjcheck.errors import RecordError
from conjcheck.evidence.entries import Counterexample, Covered, Sample, failure_bound, own_version


def at_most(rows, failing, p):
    """The exact probability of at most so many failures."""
    return sum(math.comb(rows, k) * p**k * (1 - p) ** (rows - k) for k in range(failing + 1))


@given(st.integers(1, 60), st.integers(0, 60))
def test_the_bound_is_exact_and_rounded_up(rows, failing):
    """At the bound the observation has at most probability 0.05, one unit of its last digit below it has more: in exact arithmetic."""
    text = failure_bound(rows, failing)
    if failing >= rows:
        assert text == "1"
        return
    bound = Fraction(text)
    unit = Fraction(1, 10 ** len(text.partition(".")[2]))
    level = Fraction(1, 20)
    assert at_most(rows, failing, bound) <= level < at_most(rows, failing, bound - unit)
    assert bound >= 100 * unit, "three digits"


@pytest.mark.parametrize(("rows", "failing"), [(100, 0), (100, 3), (100_000, 0), (1_000_000, 7), (20_000, 400)])
def test_the_bound_against_scipy(rows, failing):
    """The bound is the quantile of a beta distribution, as Clopper and Pearson have it, to three digits."""
    expected = beta.ppf(0.95, failing + 1, rows - failing)
    assert expected <= float(failure_bound(rows, failing)) <= expected * 1.011


def test_the_rule_of_three():
    """Without a failure the bound is about 3 / rows (common practice); it is written without exponent."""
    assert failure_bound(10**9) == "0.00000000300"
    assert failure_bound(59) == "0.0496"
    assert failure_bound(58) == "0.0504"


def test_a_bound_that_would_take_too_long():
    """With very many failures there is no bound, at once, so that no record can keep its reader busy."""
    assert failure_bound(10**18, 10**17) == "1"
    assert failure_bound(10**18, 0).startswith("0.00000000000000000")


def test_rows_of_a_space():
    """All rows of a space are the pairs of its classes; a space is complete when all were passed."""
    entry = Covered(FlagVariety("Gr(2,4)"), rows=30, seen=36, cases=40, nonzero=40)
    assert (entry.of, entry.complete) == (36, True)
    assert not Covered(FlagVariety("Gr(2,4)"), rows=30, seen=35, cases=40, nonzero=40).complete


@given(st.data(), st.sampled_from([covereds, samples, counterexamples]))
def test_joining(data, entries):
    """Joining two entries about one thing is commutative, associative and idempotent."""
    first = data.draw(entries())
    others = [other for other in data.draw(st.lists(entries(), min_size=8, max_size=8)) if other.key == first.key][:2]
    second, third = (*others, first, first)[:2]
    assert first.joined(first) == first
    assert first.joined(second) == second.joined(first)
    assert first.joined(second).joined(third) == first.joined(second.joined(third))


def test_what_is_joined():
    """The entry that went further is kept; of equal ones the quicker one; a certificate is better than words."""
    X = FlagVariety("Gr(1,3)")
    part, whole = Covered(X, 3, 4, 5, 6, seconds=1.0), Covered(X, 8, 9, 10, 7, seconds=2.0)
    quick = Covered(X, 8, 9, 10, 7, seconds=1.5)
    assert part.joined(whole) == whole
    assert whole.joined(quick) == quick
    small, large = Sample(X, "drawn", 1, 10, 20), Sample(X, "drawn", 1, 11, 22)
    assert small.joined(large) == large
    words = Counterexample(PLACES[0], 1, None, minimal=False, instead="words")
    proof = Counterexample(PLACES[0], None, 2, minimal=True, certificate="a.json")
    assert words.joined(proof) == Counterexample(PLACES[0], 1, 2, minimal=True, certificate="a.json")


def test_samples_of_two_versions():
    """Two versions may draw different rows from one seed: that is no contradiction, and only one of them counts."""
    X = FlagVariety("Gr(1,3)")
    old, new = Sample(X, "drawn", 1, 10, 20, conjcheck="0.1.0"), Sample(X, "drawn", 1, 10, 21, conjcheck="0.2.0")
    assert old.joined(new) == new.joined(old) == old
    with pytest.raises(RecordError, match=r"sample of Gr\(1,3\) with seed 1, got two that contradict each other: cases 20 and 21"):
        old.joined(Sample(X, "drawn", 1, 10, 21, conjcheck="0.1.0"))


def test_the_version():
    """The version in an entry is that of the package."""
    import conjcheck

    assert own_version() == conjcheck.__version__
