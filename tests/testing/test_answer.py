"""What counts as a count."""

from fractions import Fraction
from itertools import count

import numpy as np
import pytest
import sympy

from conjcheck.testing.answer import WrongAnswer, count_of, shown_objects, truth_of


class Always:
    """An integer by ``__index__`` alone."""

    def __index__(self):
        return 4


@pytest.mark.parametrize(
    ("answer", "expected"),
    [
        (0, 0),
        (7, 7),
        (10**40, 10**40),
        (True, 1),
        (np.int64(3), 3),
        (np.uint8(3), 3),
        (np.array(3), 3),
        (sympy.Integer(5), 5),
        (sympy.Rational(6, 2), 3),
        (sympy.Symbol("x") * 0, 0),
        (Always(), 4),
        ([], 0),
        ((), 0),
        ({(1, 2), (2, 1)}, 2),
        (["a", "b"], 2),
        ((x for x in range(5)), 5),
        (range(3), 3),
        (frozenset({frozenset()}), 1),
        (iter([(1,), (2,)]), 2),
        (({"a": 1}).keys(), 1),
    ],
    ids=lambda value: type(value).__name__,
)
def test_counts(answer, expected):
    """Integers of Python, numpy and sympy count as themselves, iterables as the number of their objects."""
    counted = count_of(answer)
    assert counted == expected
    assert type(counted) is int


@pytest.mark.parametrize(
    ("answer", "words"),
    [
        (-1, "got the negative number -1"),
        (np.int64(-2), "got the negative number -2"),
        (0.5, "got a float 0.5"),
        (2.0, "got a float 2.0"),
        (np.float64(1), "got a float64"),
        (Fraction(2, 1), "got a Fraction"),
        (sympy.Rational(1, 2), "got a Half"),
        (sympy.Float(2), "got a Float"),
        (1 + 0j, "got a complex"),
        (None, "got None; does the rule return on every path?"),
        ("abc", "got a str 'abc'"),
        (b"abc", "got a bytes"),
        (bytearray(b"a"), "got a bytearray"),
        ({1: 2}, "got a dict {1: 2}"),
        (np.array([5]), "got a"),
        (np.array([2, 0, 1]), "got a"),
        (object, "got a type"),
        (len, "got a builtin_function_or_method"),
        ([[1]], "expected hashable objects, got object 1 = [1] of type list; return tuples instead"),
        (iter([(1,), {2}]), "got object 2 = {2} of type set"),
        (["a", "b", "a"], "expected distinct objects, got 'a' a second time, as object 3"),
        ([1, True], "expected distinct objects, got True a second time"),
        ((1 for _ in count()), "expected distinct objects"),
        (count(), "expected at most 100,000 objects, got more; return their number instead"),
    ],
    ids=lambda value: type(value).__name__,
)
def test_refusals(answer, words):
    """Anything else is refused with what was expected, what came, what to do; a float never decides, not even 2.0."""
    with pytest.raises(WrongAnswer) as caught:
        count_of(answer)
    assert words in str(caught.value)
    assert str(caught.value).startswith("expected ")


def test_huge_counts_are_exact():
    """Numbers too long to be printed are still counts, or refused as negative ones."""
    assert count_of(10**5000) == 10**5000
    with pytest.raises(WrongAnswer, match="negative"):
        count_of(-(10**5000))


def test_a_long_answer_is_not_quoted_in_full():
    """The refusal of a huge wrong answer stays readable."""
    with pytest.raises(WrongAnswer) as caught:
        count_of("x" * 100_000)
    assert len(str(caught.value)) < 2_000


def test_shown_objects():
    """Objects are shown as text, at most twelve of them; a number shows none."""
    assert shown_objects(3) is None
    assert shown_objects([]) == ()
    assert shown_objects([(1, 2), "x"]) == ("(1, 2)", "'x'")
    assert shown_objects(range(14)) == (*map(str, range(12)), "... 2 more")


@pytest.mark.parametrize(
    ("answer", "expected"),
    [(True, True), (False, False), (np.bool_(True), True), (sympy.true, True), (sympy.false, False)],
    ids=str,
)
def test_truths(answer, expected):
    """A claim may return the truth values of Python, numpy and sympy."""
    assert truth_of(answer) is expected


@pytest.mark.parametrize("answer", [None, 1, 0, "yes", [], sympy.Symbol("x"), np.array([True])], ids=str)
def test_no_truths(answer):
    """Anything else is no answer of a claim, however true or false it looks."""
    with pytest.raises(WrongAnswer, match="expected True or False from a claim, got "):
        truth_of(answer)
