"""Permutations, partitions, strings and words: the conventions, the way back, and every refusal."""

from itertools import combinations, pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy.combinatorics import Permutation

from conjcheck.errors import NotationError
from conjcheck.geometry.notation import (
    LETTERS,
    descents,
    partition_of,
    permutation_from_partition,
    permutation_from_string,
    permutation_from_word,
    read_integers,
    read_permutation,
    string_of,
    text_of_permutation,
)


def flags(most=7):
    """Pairs (n, steps), n first."""
    return st.integers(2, most).flatmap(
        lambda n: st.tuples(st.just(n), st.sets(st.integers(1, n - 1), min_size=1).map(lambda steps: tuple(sorted(steps))))
    )


@st.composite
def minimal_permutations(draw):
    """Triples (n, steps, w) with w a minimal representative."""
    n, steps = draw(flags())
    w = draw(st.permutations(range(1, n + 1)))
    cuts = [0, *steps, n]
    return n, steps, tuple(x for a, b in pairwise(cuts) for x in sorted(w[a:b]))


def test_products_compose_as_functions():
    """``s1 s2 = 231`` and ``s2 s1 = 312``."""
    assert permutation_from_word((1, 2), 3) == (2, 3, 1)
    assert permutation_from_word((2, 1), 3) == (3, 1, 2)


@settings(deadline=None)
@given(st.integers(2, 7).flatmap(lambda n: st.lists(st.integers(1, n - 1), max_size=12).map(lambda word: (n, word))))
def test_words_are_products_of_adjacent_transpositions(case):
    """A reduced word gives the product of its letters as functions (sympy applies the left factor first); others are refused."""
    n, word = case
    expected = Permutation(list(range(n)))
    for i in reversed(word):
        expected = expected * Permutation([[i - 1, i]], size=n)
    if expected.inversions() == len(word):
        assert permutation_from_word(word, n) == tuple(x + 1 for x in expected.array_form)
    else:
        with pytest.raises(NotationError, match="expected a reduced word"):
            permutation_from_word(word, n)


@settings(deadline=None)
@given(st.permutations(range(1, 7)))
def test_descents_are_sympys_up_to_counting_from_one(w):
    """Positions i, from 1, with ``w(i) > w(i + 1)``."""
    assert [i - 1 for i in descents(w)] == Permutation([x - 1 for x in w]).descents()


@pytest.mark.parametrize(
    ("k", "n", "shape", "w"),
    [
        (2, 4, (), (1, 2, 3, 4)),
        (2, 4, (1,), (1, 3, 2, 4)),
        (2, 4, (1, 1), (2, 3, 1, 4)),
        (2, 4, (2,), (1, 4, 2, 3)),
        (2, 4, (2, 1), (2, 4, 1, 3)),
        (2, 4, (2, 2), (3, 4, 1, 2)),
        (3, 7, (4, 2, 1), (2, 4, 7, 1, 3, 5, 6)),
    ],
)
def test_partitions_by_hand(k, n, shape, w):
    """``lambda_i = w(k + 1 - i) - (k + 1 - i)``, worked out by hand."""
    assert permutation_from_partition(shape, k, n) == w
    assert partition_of(w, k) == shape


@settings(deadline=None)
@given(
    st.integers(2, 9).flatmap(
        lambda n: st.integers(1, n - 1).flatmap(
            lambda k: st.tuples(st.just(n), st.just(k), st.lists(st.integers(0, n - k), min_size=k, max_size=k))
        )
    )
)
def test_partition_and_permutation_determine_each_other(case):
    """The formula holds in every row, ``|lambda|`` is the number of inversions, trailing zeros do not matter."""
    n, k, parts = case
    shape = tuple(sorted(parts, reverse=True))
    w = permutation_from_partition(shape, k, n)
    assert all(shape[i - 1] == w[k - i] - (k + 1 - i) for i in range(1, k + 1))
    assert sum(shape) == sum(a > b for a, b in combinations(w, 2))
    assert set(descents(w)) <= {k}
    short = partition_of(w, k)
    assert short == tuple(part for part in shape if part)
    assert permutation_from_partition(short, k, n) == w
    assert permutation_from_partition((*shape, 0, 0), k, n) == w


@settings(deadline=None)
@given(minimal_permutations())
def test_strings_tell_the_step_in_which_a_value_appears(case):
    """Letter j counts the steps k with j not among ``w(1), ..., w(k)``; the string determines the class."""
    n, steps, w = case
    string = string_of(w, steps)
    assert string == "".join(LETTERS[sum(j not in w[:k] for k in steps)] for j in range(1, n + 1))
    assert permutation_from_string(string, steps, n) == w


@settings(deadline=None)
@given(minimal_permutations())
def test_strings_have_as_many_inversions_as_permutations(case):
    """Pairs of places with a larger letter before a smaller one number the length."""
    _, steps, w = case
    assert sum(a > b for a, b in combinations(string_of(w, steps), 2)) == sum(a > b for a, b in combinations(w, 2))


def test_one_string_by_hand():
    """On ``Fl(1,3;4)`` the class 2143 has the string 1021: 2 appears first, then 1 and 4, then 3."""
    assert string_of((2, 1, 4, 3), (1, 3)) == "1021"
    assert permutation_from_string("1021", (1, 3), 4) == (2, 1, 4, 3)


@settings(deadline=None)
@given(minimal_permutations())
def test_reading_a_minimal_representative_changes_nothing(case):
    """Readers accept lists, tuples and numpy integers, and give back a tuple of int."""
    n, steps, w = case
    for value in (w, list(w), np.array(w), iter(w)):
        read = read_permutation(value, steps, n)
        assert read == w
        assert all(type(x) is int for x in read)


def test_text_of_permutations():
    """Digits up to n = 9, dots from n = 10 on."""
    assert text_of_permutation((2, 1, 4, 3)) == "2143"
    assert text_of_permutation((10, 1, 2, 3, 4, 5, 6, 7, 8, 9)) == "10.1.2.3.4.5.6.7.8.9"


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (
            lambda: read_integers("word", "12"),
            "expected a sequence of integers for word, got word='12'; write a tuple such as (2, 1)",
        ),
        (lambda: read_integers("word", 12), "expected a sequence of integers for word, got word=12; write a tuple such as (2, 1)"),
        (lambda: read_integers("word", (1, 2.0)), "expected integers in word, got entry 2 = 2.0 of word=(1, 2.0)"),
        (lambda: read_integers("word", [None]), "expected integers in word, got entry 1 = None of word=[None]"),
        (lambda: read_permutation((1, 2), (1,), 3), "expected a permutation of 1..3, got 2 entries in permutation=(1, 2)"),
        (lambda: read_permutation((1, 2, 4), (1,), 3), "expected a permutation of 1..3, got entry 3 = 4 in permutation=(1, 2, 4)"),
        (lambda: read_permutation((0, 1, 2), (1,), 3), "expected a permutation of 1..3, got entry 1 = 0 in permutation=(0, 1, 2)"),
        (
            lambda: read_permutation((1, 2, 2), (1,), 3),
            "expected a permutation of 1..3, got 2 a second time, as entry 3 of permutation=(1, 2, 2)",
        ),
        (
            lambda: read_permutation((1, 3, 2), (1,), 3),
            "expected descents only at positions (1,), got 3 > 2 at position 2 of permutation=(1, 3, 2); "
            "sort the entries inside each block to get the minimal representative",
        ),
        (
            lambda: permutation_from_partition((2, 1, 1), 2, 4),
            "expected a partition inside a box of 2 rows and 2 columns, got 1 in row 3 of partition=(2, 1, 1)",
        ),
        (
            lambda: permutation_from_partition((3,), 2, 4),
            "expected a partition inside a box of 2 rows and 2 columns, got row 1 = 3 in partition=(3,)",
        ),
        (
            lambda: permutation_from_partition((1, -1), 2, 4),
            "expected a partition inside a box of 2 rows and 2 columns, got row 2 = -1 in partition=(1, -1)",
        ),
        (
            lambda: permutation_from_partition((1, 2), 2, 4),
            "expected a partition with falling rows, got row 2 = 2 after 1 in partition=(1, 2)",
        ),
        (lambda: permutation_from_string(("0", "1"), (1,), 2), "expected a str of 2 letters, got string=('0', '1')"),
        (lambda: permutation_from_string("02", (1,), 2), "expected letters 01, got letter 2 = '2' in string='02'"),
        (lambda: permutation_from_string("00", (1,), 2), "expected 1 times the letter 0, got 2 in string='00'"),
        (lambda: permutation_from_string("011", (1,), 2), "expected 1 times the letter 1, got 2 in string='011'"),
        (lambda: permutation_from_word((1, 3), 3), "expected letters from 1 to 2, got letter 2 = 3 in word=(1, 3)"),
        (lambda: permutation_from_word((0,), 3), "expected letters from 1 to 2, got letter 1 = 0 in word=(0,)"),
        (lambda: permutation_from_word((1, 1), 3), "expected a reduced word, got word=(1, 1): the length falls at letter 2 = 1"),
    ],
)
def test_refusals_name_the_offending_entry(call, message):
    """Each refusal is a ``NotationError`` that says what was expected and which entry came instead."""
    with pytest.raises(NotationError) as error:
        call()
    assert str(error.value) == message
